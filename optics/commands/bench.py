"""`bench`: readings from a bench fitted by the design's own model, and the fit as settings of the design."""

import argparse
from pathlib import Path

from optics import presets
from optics.commands.terminal import add_design, as_json, opened, paragraph, rounded, table
from optics.presets import Design
from optics.spec import OutOfRange
from optics.study.bench import Bench, bench_file

REACH = 4.0  # standard errors at the ends of the residual's line
SPAN = 12  # characters to each side of it


def add_arguments(parser: argparse.ArgumentParser) -> None:
    add_design(parser)
    parser.add_argument(
        "readings",
        metavar="READINGS.csv",
        help="a table with a header: length_m,power_mw (cut-back), bend_radius_mm,power_mw or distance_mm,lux; "
        "standard_error_mw or standard_error_lux and, for bends, bend_deg may stand beside them",
    )
    parser.add_argument(
        "--flat", action="store_true", help="fit one loss at all wavelengths, in place of the fiber's own curve"
    )
    parser.add_argument(
        "--without", type=int, action="append", default=[], metavar="ROW", help="leave one reading out; may be repeated"
    )
    parser.add_argument("--to", metavar="FILE.toml", help="write the design with the fit in it")
    parser.add_argument("--force", action="store_true", help="write over an existing file")
    parser.add_argument("--json", action="store_true", help="JSON alone, numbers unrounded")


def run(options: argparse.Namespace) -> int:
    path = None if options.to is None else _writable(Path(options.to), options.force)
    design = opened(options)
    found = bench_file(design, options.readings, flat=options.flat, without=tuple(options.without))
    if path is not None:
        _write(path, found)
    print(as_json(found.as_dict()) if options.json else written(found, design, options.readings, path))
    return 0


def _writable(path: Path, force: bool) -> Path:
    if path.suffix != ".toml":
        raise OutOfRange(f"--to is {path}; it must end in .toml.")
    if path.exists() and not force:
        raise OutOfRange(f"--to {path} exists already; --force writes over it.")
    return path


def _write(path: Path, found: Bench) -> None:
    """The design file: what was fitted, from what and how sure, as notes above the design."""
    notes = [
        f"# {item.path}: {item.value:.6g} +- {item.standard_error:.2g} ({item.unit}), fitted to {item.source}, {item.at}"
        for item in found.fitted
    ]
    text = "\n".join([*notes, "", presets.saved(found.document)])
    try:
        path.write_text(text, encoding="utf-8")
    except OSError as wrong:
        raise OutOfRange(f"--to {path} cannot be written: {(wrong.strerror or 'unknown reason').lower()}.") from None


def written(found: Bench, design: Design, readings: str, path: Path | None) -> str:
    """The answer in words, the fitted values, each reading against the fit."""
    parts = [
        f"{design.fiberscope.name}  ({len(found.residuals)} readings of {found.measured} against {found.varied}, {readings})",
        paragraph(found.verdict, lead=""),
        "",
        "Fitted (95 % interval), as settings of the design",
        _fitted(found),
        "",
        "Readings against the fit",
        _residuals(found),
        "",
        paragraph(
            "The model is the design as it stands, bends and all, with only what was varied in its place.", lead=""
        ),
    ]
    if found.left_out:
        parts.append(paragraph(f"Left out as asked: row {', '.join(map(str, found.left_out))}.", lead=""))
    if path is not None:
        parts.append(paragraph(f"Written to {path}.", lead=""))
    return "\n".join(parts)


def _fitted(found: Bench) -> str:
    rows = [("", "before", "fitted", "+-", "from", "to", "")]
    for item in found.fitted:
        numbers = (rounded(number) for number in (item.before, item.value, item.standard_error, item.low, item.high))
        rows.append((item.path, *numbers, item.unit))
    return table(rows, right=range(1, 6))


def _residuals(found: Bench) -> str:
    rows = [("row", found.varied, found.measured, "model", "off by", "std. errors", "")]
    for item in found.residuals:
        numbers = (rounded(number) for number in (item.at, item.measured, item.model))
        off = f"{100 * item.residual / item.model:+.1f} %" if item.model else "-"
        rows.append((str(item.row), *numbers, off, f"{item.normalized:+.1f}", _line(item.normalized, item.apart)))
    return table(rows, right=range(6), wrap=False)


def _line(normalized: float, apart: bool) -> str:
    """A residual as a mark left or right of the middle."""
    place = SPAN + round(min(max(normalized / REACH, -1.0), 1.0) * SPAN)
    marks = [" "] * (2 * SPAN + 1)
    marks[SPAN] = "|"
    marks[place] = "o" if abs(normalized) <= REACH else "<" if normalized < 0 else ">"
    return "".join(marks) + ("  apart" if apart else "")
