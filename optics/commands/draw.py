"""`draw`: one picture of one design, as PNG, SVG or PDF."""

import argparse
from collections.abc import Callable
from typing import Any

from optics.commands.terminal import add_design, opened, writable, write
from optics.fiberscope import Fiberscope
from optics.spec import OutOfRange
from optics.tables import nearest

# The pictures, in the order of the light, and what each shows.
FIGURES = {
    "strip": "the light strip: the whole instrument from lamp to viewer",
    "strip_narrow": "the light strip from top to bottom, for a phone",
    "budget": "the light, step by step, in decibels and lumens",
    "spectra": "the color of the light: in, out, and as the viewer takes it",
    "target": "the map of the light on the target",
    "profile": "the light along a line across the target",
    "ledger": "the line pairs per mm that each part alone would allow",
    "range": "light, evenness, detail and exposure over the working range",
    "section": "the cross-section, to scale",
    "passage": "the tip in the bend of the bore, to scale",
}
ABSENT = {"target": "[scene]", "profile": "[scene]", "range": "[scene]", "ledger": "[image]", "section": "[body.section]",
          "passage": "[body.passage] with bore_mm"}  # fmt: skip
SUFFIXES = (".png", ".svg", ".pdf")


def add_arguments(parser: argparse.ArgumentParser) -> None:
    add_design(parser)
    parser.add_argument(
        "figure", metavar="FIGURE", help="; ".join(f"{name}: {words}" for name, words in FIGURES.items())
    )
    parser.add_argument(
        "--to", required=True, metavar="FILE", help="where to write; the ending says what: .png, .svg or .pdf"
    )
    parser.add_argument("--dark", action="store_true", help="on dark paper")
    parser.add_argument("--dpi", type=int, default=150, help="dots per inch of a PNG, 30 to 600 (150 if not given)")
    parser.add_argument("--force", action="store_true", help="write over an existing file")


def run(options: argparse.Namespace) -> int:
    path = writable(options.to, SUFFIXES, options.force)
    if options.figure not in FIGURES:
        raise OutOfRange(
            f"FIGURE is {options.figure!r}{nearest(options.figure, list(FIGURES))}; it must be one of: {', '.join(FIGURES)}."
        )
    if not 30 <= options.dpi <= 600:
        raise OutOfRange(f"--dpi is {options.dpi}; it must be from 30 to 600.")
    fiberscope = opened(options).fiberscope
    from optics.figures import export
    from optics.figures.palette import DARK, LIGHT

    figure = _drawn(fiberscope, options.figure)(palette=DARK if options.dark else LIGHT)
    data = export.png(figure, options.dpi) if path.suffix == ".png" else export.FORMATS[path.suffix[1:]](figure)
    write(path, data)
    return 0


def _drawn(fiberscope: Fiberscope, name: str) -> Callable[..., Any]:
    """The function that draws one picture, given what it is drawn from."""
    from optics.figures import body, detail, light, strip, target, working_range
    from optics.report import views
    from optics.report.size import size
    from optics.study.working_range import over_distance

    def report():
        return size(fiberscope)

    def ledger():
        return report() if fiberscope.image else None

    def distances():
        return over_distance(fiberscope) if fiberscope.scene else None

    made: dict[str, tuple[Callable[[], Any], Callable[..., Any]]] = {
        "strip": (report, strip.light_strip),
        "strip_narrow": (report, lambda found, palette: strip.light_strip(found, palette=palette, narrow=True)),
        "budget": (report, light.budget),
        "spectra": (lambda: views.spectra(fiberscope), light.spectra),
        "target": (lambda: views.target_map(fiberscope, 241), target.irradiance_map),
        "profile": (lambda: views.target_map(fiberscope, 5), target.profile),
        "ledger": (ledger, detail.ledger),
        "range": (distances, working_range.curves),
        "section": (lambda: views.section_view(fiberscope), body.section),
        "passage": (lambda: views.passage_view(fiberscope), body.passage),
    }
    found, draw = made[name][0](), made[name][1]
    if found is None:
        raise OutOfRange(f"{name} needs {ABSENT[name]}, which this design does not have.")
    return lambda palette: draw(found, palette=palette)
