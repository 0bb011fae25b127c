"""What all commands share: the design argument, and tables that read well on a terminal."""

import argparse
import json
import shutil
import textwrap
from collections.abc import Iterable, Sequence
from pathlib import Path
from typing import Any

from optics import presets
from optics.spec import OutOfRange


def add_design(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "design", metavar="FILE_OR_NAME", help="a design file, or the name of a demo design (see `list`)"
    )
    parser.add_argument(
        "--set",
        dest="settings",
        action="append",
        default=[],
        metavar="PATH=VALUE",
        help="change one value, as in guide.bundle.length_m=3 (absent removes it); may be repeated",
    )


def opened(options: argparse.Namespace) -> presets.Design:
    """The design of the arguments, all settings applied, checked once."""
    design = presets.open(options.design)
    if not options.settings:
        return design
    settings = dict(presets.parse_setting(text) for text in options.settings)
    settings = {path: None if value == "absent" else value for path, value in settings.items()}
    return presets.resolve(presets.edited(design.document, settings), str(options.design))


def writable(to: str, suffixes: Sequence[str], force: bool) -> Path:
    """The path to write to, unless its ending says no format or something stands there already."""
    path = Path(to)
    if path.suffix not in suffixes:
        raise OutOfRange(f"--to {path} does not end in one of: {', '.join(suffixes)}.")
    if path.exists() and not force:
        raise OutOfRange(f"--to {path} exists already; --force writes over it.")
    return path


def write(path: Path, data: bytes) -> None:
    """Write a file and say where; what cannot be written is one sentence."""
    try:
        path.write_bytes(data)
    except OSError as wrong:
        raise OutOfRange(f"--to {path} cannot be written: {(wrong.strerror or 'unknown reason').lower()}.") from None
    print(path)


def as_json(answer: Any) -> str:
    return json.dumps(answer, indent=2, allow_nan=False, ensure_ascii=False)


def rounded(value: float | int | bool | str | None, digits: int = 3) -> str:
    """A number as people read it: three digits, no exponent where it can be helped, a dash for none.

    >>> [rounded(x) for x in (12345.6, 0.123456, 3.14159, None, True, 0.0000123)]
    ['12,300', '0.123', '3.14', '-', 'yes', '1.23e-05']
    """
    if value is None:
        return "-"
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, str):
        return value
    if value != 0 and (abs(value) < 1e-3 or abs(value) >= 1e7):
        return f"{value:.{digits}g}"
    if abs(value) >= 1000:
        scale = 10 ** max(len(str(int(abs(value)))) - digits, 0)
        return f"{round(value / scale) * scale:,}"
    text = f"{value:.{digits}g}"
    return text


def table(rows: Iterable[Sequence[str]], *, right: Sequence[int] = (), indent: int = 2, wrap: bool = True) -> str:
    """Aligned columns; those in `right` to the right; the last one wrapped to the terminal's width."""
    rows = [list(map(str, row)) for row in rows]
    if not rows:
        return ""
    widths = [max(len(row[column]) for row in rows) for column in range(len(rows[0]))]
    room = shutil.get_terminal_size((100, 24)).columns - indent - sum(widths[:-1]) - 2 * (len(widths) - 1)
    lines = []
    for row in rows:
        cells = [
            cell.rjust(width) if column in right else cell.ljust(width)
            for column, (cell, width) in enumerate(zip(row, widths))
        ]
        lead = " " * indent + "  ".join(cells[:-1]) + ("  " if len(cells) > 1 else "")
        last = textwrap.wrap(row[-1], max(room, 24)) if wrap and len(widths) - 1 not in right else [cells[-1]]
        lines.append((lead + (last or [""])[0]).rstrip())
        lines.extend(" " * len(lead) + more for more in last[1:])
    return "\n".join(lines)


def paragraph(text: str, *, lead: str = "  ") -> str:
    return textwrap.fill(
        text, shutil.get_terminal_size((100, 24)).columns, initial_indent=lead, subsequent_indent=" " * len(lead)
    )
