"""The last pages of the report: screening lines, the design's file, every value with its source."""

from collections.abc import Mapping
from dataclasses import replace

from optics.figures.canvas import width_of
from optics.figures.palette import LIGHT
from optics.figures.paper import blocks, origin, sheet
from optics.figures.paper import words as say
from optics.figures.paper.blocks import Cell
from optics.figures.paper.sheet import COLUMN, FINE, Block
from optics.presets import Document
from optics.report.answer import Report
from optics.tables import Sourced

SMALLEST = 6.6  # points
SCREEN = (0.2, COLUMN - 2.4, 1.2, 1.0)  # mark, line, value, screening figure
VALUES = (0.14, 1.16, 0.58, 0.82, COLUMN - 3.42, 0.72)  # mark, name, value, tolerance, source and place, basis


def screening(report: Report) -> list[Block]:
    """The lines of the screening: numbers in a row, the words below."""
    if not report.exposure:
        return []
    head = blocks.head_row(
        [Cell(""), Cell("line"), Cell("value", right=True), Cell("screening figure", right=True)], SCREEN
    )
    found = [
        blocks.heading("Screening of optical radiation and heat"),
        blocks.words(say.screening_count(report), size=FINE),
        head,
    ]
    for line in report.exposure:
        mark, name, value, figure, because = say.screening(line)
        over = mark == say.SHORT
        ink = LIGHT.accent if over else LIGHT.ink
        cells = [Cell(mark, True, ink), Cell(name, over, ink), Cell(value, over, ink, True), Cell(figure, right=True)]
        numbers = blocks.row(cells, SCREEN, size=FINE + 0.3, pad=0.02, rule=False, keep=True)
        why = blocks.row(
            [Cell(""), Cell(because, color=LIGHT.soft)], (SCREEN[0], COLUMN - SCREEN[0]), size=SMALLEST, pad=0.03
        )
        found += [replace(numbers, again=head), replace(why, again=head)]
    return [*found, sheet.space(0.16)]


def file(text: str) -> list[Block]:
    """The design's file as text."""
    lines = text.rstrip("\n").split("\n")
    return [blocks.heading("The design file"), blocks.listing(lines), sheet.space(0.12)]


def values(document: Document, sourced: Mapping[str, Sourced]) -> list[Block]:
    """Every value in force by the design's tables, with tolerance, source, place and basis."""
    names = [Cell(name) for name in ("", "value of", "is", "low – high", "source: place in it", "basis")]
    head = blocks.head_row(names, VALUES, SMALLEST)
    found = [
        blocks.heading("Every value and where it comes from"),
        blocks.words(f"{origin.softness(sourced)} Practice: common practice, without a source.", size=FINE),
        head,
    ]
    for table in origin.tables(document, sourced):
        title = table.path or "the design"
        title += f"  ·  preset {table.preset}" if table.preset else ""
        only = not (table.values or table.defaults or table.same)
        found.append(replace(_title(title, table.given), again=head, keep=not only))
        if table.same:
            found.append(replace(_aside("", f"all else as in {table.same}, value for value"), again=head))
        if table.defaults:
            told = ", ".join(f"{name} {value}" for name, value in table.defaults)
            found.append(replace(_aside(origin.SOFT, f"left at the default, assumed: {told}"), again=head))
        found += [replace(_value(value), again=head) for value in table.values]
    return found


def _title(title: str, given: tuple[say.Pair, ...]) -> Block:
    """The table's name, and beside it what the design gives itself."""
    told = "given: " + ", ".join(f"{name} {value}" for name, value in given) if given else ""
    edges = [sum(VALUES[:count]) for count in range(2, len(VALUES))]
    long = width_of(title, SMALLEST, True) + 0.1
    wide = next((edge for edge in edges if edge >= long), long)
    return blocks.row([Cell(title, True), Cell(told)], (wide, COLUMN - wide), size=SMALLEST, pad=0.06, gutter=0.05)


def _aside(mark: str, text: str) -> Block:
    """A remark in the table, over all its columns."""
    cells = [Cell(mark, color=LIGHT.accent), Cell(text)]
    return blocks.row(cells, (VALUES[0], COLUMN - VALUES[0]), size=SMALLEST, pad=0.022, gutter=0.06)


def _value(value: origin.Value) -> Block:
    cells = [
        Cell(origin.SOFT if value.soft else "", color=LIGHT.accent),
        Cell(value.name),
        Cell(value.value),
        Cell(value.tolerance),
        Cell(say.typeset(value.source), color=LIGHT.soft),
        Cell(value.basis, color=LIGHT.accent if value.soft else LIGHT.ink),
    ]
    return blocks.row(cells, VALUES, size=SMALLEST, pad=0.022, gutter=0.06)
