"""The last pages of the report: screening lines, the design's file, every value with its source."""

from collections.abc import Mapping
from dataclasses import replace

from optics.figures import pdf_sheet as paper
from optics.figures import pdf_words as say
from optics.figures.palette import LIGHT
from optics.figures.pdf_sheet import COLUMN, FINE, Block, Cell
from optics.presets import Document
from optics.report.answer import Report
from optics.tables import Sourced

SMALLEST = 6.8  # points
SCREEN = (0.2, COLUMN - 2.3, 1.1, 1.0)  # mark, line, value, screening figure
VALUES = (1.32, 0.72, 0.78, COLUMN - 3.52, 0.7)  # name, value, tolerance, source and place, basis


def screening(report: Report) -> list[Block]:
    """The lines of the screening: numbers in a row, the words below."""
    if not report.exposure:
        return []
    head = paper.head_row([Cell(""), Cell("line"), Cell("value", right=True), Cell("screening figure", right=True)], SCREEN)
    found = [paper.heading("Screening of optical radiation and heat"), paper.words(say.screening_count(report), size=FINE), head]
    for line in report.exposure:
        mark, name, value, figure, because = say.screening(line)
        over = mark == say.SHORT
        ink = LIGHT.accent if over else LIGHT.ink
        cells = [Cell(mark, True, ink), Cell(name, over, ink), Cell(value, over, ink, True), Cell(figure, right=True)]
        numbers = paper.row(cells, SCREEN, size=FINE + 0.3, pad=0.02, rule=False, keep=True)
        why = paper.row([Cell(""), Cell(because, color=LIGHT.soft)], (SCREEN[0], COLUMN - SCREEN[0]), size=SMALLEST, pad=0.03)
        found += [replace(numbers, again=head), replace(why, again=head)]
    return [*found, paper.space(0.16)]


def file(text: str) -> list[Block]:
    """The design's file as text."""
    lines = text.rstrip("\n").split("\n")
    return [paper.heading("The design file"), paper.listing(lines), paper.space(0.12)]


def values(document: Document, sourced: Mapping[str, Sourced]) -> list[Block]:
    """Every value in force by the design's tables, with tolerance, source, place and basis."""
    names = [Cell(name) for name in ("value of", "is", "low – high", "source: place in it", "basis")]
    head = paper.head_row(names, VALUES, SMALLEST)
    found = [paper.heading("Every value and where it comes from"), paper.words(say.softness(sourced), size=FINE), head]
    for table in say.tables(document, sourced):
        title = table.path or "the design"
        title += f"  ·  preset {table.preset}" if table.preset else ""
        found.append(replace(paper.words(title, size=FINE, bold=True, below=0.02, keep=True), again=head))
        if table.given:
            told = "given: " + ", ".join(f"{name} {value}" for name, value in table.given)
            found.append(replace(paper.words(told, size=SMALLEST, below=0.03), again=head))
        if table.same:
            found.append(paper.words(f"all else as in {table.same}, value for value", size=SMALLEST, below=0.03))
        for value in table.values:
            found.append(replace(_value(value), again=head))
        found.append(paper.space(0.05))
    return found


def _value(value: say.Value) -> Block:
    cells = [
        Cell(value.name),
        Cell(value.value, True),
        Cell(value.tolerance),
        Cell(value.source, color=LIGHT.soft),
        Cell(value.basis, color=LIGHT.accent if value.soft else LIGHT.ink),
    ]
    return paper.row(cells, VALUES, size=SMALLEST, pad=0.03, gutter=0.07)
