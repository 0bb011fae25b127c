"""`compare`: two to four designs side by side, what makes the differences, and where one overtakes the other."""

import argparse
import itertools

from optics import presets
from optics.commands.terminal import as_json, paragraph, rounded, table
from optics.spec import OutOfRange
from optics.study.compare import Comparison, Difference, compare
from optics.study.compare_cross import ALONG, RANGES, Crossover
from optics.study.compare_cross import WORDS as GAIN
from optics.study.compare_families import in_families
from optics.units import unit_of

UNITS = {"lm": "lm", "mm": "mm", "lux": "lx", "k": "K", "deg": "deg", "s": "s"}


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "designs",
        metavar="FILE_OR_NAME",
        nargs="+",
        help="two to four design files or demo designs; one with --families",
    )
    parser.add_argument("--families", action="store_true", help="one design in glass, silica and plastic")
    parser.add_argument(
        "--set",
        dest="settings",
        action="append",
        default=[],
        metavar="PATH=VALUE",
        help="change one value of every design, as in guide.bundle.length_m=3; may be repeated",
    )
    parser.add_argument("--json", action="store_true", help="JSON alone, numbers unrounded")


def run(options: argparse.Namespace) -> int:
    given = dict(presets.parse_setting(text) for text in options.settings)
    if options.families:
        if len(options.designs) != 1:
            raise OutOfRange(f"{len(options.designs)} designs are given; compare --families takes one.")
        made = in_families(presets.open(options.designs[0]), given)
        found = compare(list(made.values()), list(made))
        title = f"{next(iter(made.values())).fiberscope.name} in {', '.join(made)}"
        called = list(made)
    else:
        opened = [presets.open(design) for design in options.designs]
        opened = [
            presets.resolve(presets.edited(design.document, given), name) if given else design
            for name, design in zip(options.designs, opened)
        ]
        found = compare(opened)
        called = list(dict.fromkeys([found.differences[0].against, *(row.of for row in found.differences)]))
        title = " against ".join(called)
    print(as_json(found.as_dict()) if options.json else written(found, title, called))
    return 0


def written(found: Comparison, title: str, called: list[str]) -> str:
    """The comparison as text: the numbers side by side, what makes each difference, the crossovers."""
    parts = [title, ""]
    rows = [
        _row(quantity, list(group)) for quantity, group in itertools.groupby(found.differences, lambda d: d.quantity)
    ]
    parts += ["Numbers", table([("", *called, ""), *rows], right=tuple(range(1, len(called) + 1))), ""]
    parts += ["What makes the differences"]
    for quantity, group in itertools.groupby(found.differences, lambda row: row.quantity):
        told = [row for row in group if row.because != "the same"]
        if not told:
            continue
        parts += [f"  {_words(quantity)}"]
        parts += [paragraph(f"{row.of} {_by(row)}: {row.because}", lead="    ") for row in told]
    parts += ["", "Where one overtakes the other (both moved alike, all else as it is)", _crossings(found)]
    return "\n".join(parts)


def _crossings(found: Comparison) -> str:
    """A table for each path: a column for each pair, a row for each number."""
    pairs = list(dict.fromkeys(row.between for row in found.crossovers))
    said = []
    for path, (low, high) in RANGES.items():
        what, unit = ALONG[path]
        rows = []
        for quantity in dict.fromkeys(row.quantity for row in found.crossovers):
            mine = [row for row in found.crossovers if (row.quantity, row.path) == (quantity, path)]
            cells = (", ".join(_crossing(row, unit) for row in mine if row.between == pair) for pair in pairs)
            rows.append((GAIN[quantity], *cells))
        said += [paragraph(f"{what} ({path}), {low:g} to {high:g} {unit}")]
        said += [table([("", *(f"{one} | {other}" for one, other in pairs)), *rows], indent=4, wrap=False)]
    return "\n".join(said)


def _crossing(row: Crossover, unit: str) -> str:
    if row.value is None:
        return f"{row.ahead} all along" if row.ahead else "none"
    return f"{row.ahead} beyond {rounded(row.value)} {unit}"


def _row(quantity: str, group: list[Difference]) -> tuple[str, ...]:
    values = [group[0].reference, *(row.value for row in group)]
    return _words(quantity), *(rounded(value) for value in values), UNITS.get(unit_of(quantity) or "", "")


def _words(quantity: str) -> str:
    unit = unit_of(quantity)
    return (quantity.removesuffix(f"_{unit}") if unit and unit != "1" else quantity).replace("_", " ")


def _by(row: Difference) -> str:
    if row.difference is None:
        return "has no number" if row.value is None else "has one where the other has none"
    unit = UNITS.get(unit_of(row.quantity) or "", "")
    return f"{'+' if row.difference > 0 else '-'}{rounded(abs(row.difference))} {unit}".rstrip()
