"""Figures as bytes: PNG, SVG, PDF. The same figure gives the same bytes: no dates, no random names."""

import io
import re

from matplotlib.figure import Figure

DPI = 100


def png(figure: Figure, dpi: float = DPI) -> bytes:
    return _saved(figure, "png", dpi=dpi, metadata={"Software": None}, pil_kwargs={"compress_level": 3})


def svg(figure: Figure) -> bytes:
    """Letters as outlines, so that it looks the same without the font."""
    return _numbered(_saved(figure, "svg", metadata={"Date": None, "Creator": None}))


def pdf(figure: Figure) -> bytes:
    return _saved(figure, "pdf", metadata={"CreationDate": None, "ModDate": None, "Creator": None, "Producer": None})


FORMATS = {"png": png, "svg": svg, "pdf": pdf}


def _saved(figure: Figure, kind: str, **options) -> bytes:
    out = io.BytesIO()
    figure.savefig(out, format=kind, facecolor=figure.get_facecolor(), **options)
    return out.getvalue()


def _numbered(text: bytes) -> bytes:
    """The same SVG with its random names numbered in the order in which they appear."""
    names: dict[bytes, bytes] = {}
    for name in re.findall(rb'id="([A-Za-z][A-Za-z0-9_]*[0-9a-f]{10})"', text):
        names.setdefault(name, b"n%d" % len(names))
    return re.sub(
        rb"\b[A-Za-z][A-Za-z0-9_]*[0-9a-f]{10}\b", lambda found: names.get(found.group(), found.group()), text
    )
