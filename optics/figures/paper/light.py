"""The report's page of the light: the strip, and the budget as a table with a bar and the reason of every step."""

from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Rectangle

from optics.figures.canvas import lost, three
from optics.figures.palette import LIGHT, THIN
from optics.figures.paper import blocks, sheet
from optics.figures.paper.blocks import Cell
from optics.figures.paper.sheet import BODY, FINE, FIRST, GAP, ROOM, SIDE, Area, Block
from optics.figures.paper.words import typeset
from optics.figures.strip import EDGE, light_strip
from optics.figures.strip_words import outward
from optics.report.answer import Report
from optics.units import db_from_transmission

STEP, LEFT_LM, LOSS, BAR = 1.3, 0.8, 0.75, 2.6  # widths of the columns, inches; the reasons take the rest
LEAST, MOST = 0.126, 0.2  # height of a row, inches


def light(pages: list[Figure], report: Report) -> None:
    """The strip over the page's width, the budget below it; on a page more where it is very long."""
    axes = sheet.page(pages, "The light, from the lamp on")
    strip = light_strip(report, width_in=ROOM + 2 * EDGE)
    y = sheet.flow(
        [sheet.picture(strip, 0.02)],
        sheet.column(pages, axes, SIDE - EDGE, FIRST + 0.2),
    )
    more = sheet.areas(pages, Area(axes, SIDE, y), "The light, continued", (SIDE,))
    sheet.flow(budget(report, y - sheet.BOTTOM), more)


def budget(report: Report, high: float) -> list[Block]:
    """Rows for all steps; lower ones where that brings them all onto the page."""
    steps, legs = report.light.steps, outward(report)
    least = min(max(high / (len(steps) + 2.3), LEAST), MOST)
    widths = (STEP, LEFT_LM, LOSS, GAP / 2, BAR, GAP / 2, ROOM - STEP - LEFT_LM - LOSS - BAR - GAP)
    size = BODY if least > 0.16 else FINE + 0.3 if least > 0.14 else FINE
    scale_db = max(float(db_from_transmission(max(legs[-1].left if legs else 1.0, 1e-12))), 1.0)
    names = (Cell("step"), Cell("lm after", right=True), Cell("loss", right=True), Cell(""))
    top = blocks.head_row(
        [*names, Cell(f"light lost, whole width {three(scale_db)} dB"), Cell(""), Cell("because")], widths
    )
    rows = [top]
    before = 1.0
    for step, leg in zip(steps, [None, *legs]):
        marked = bool(leg and leg.marked)
        color = LIGHT.accent if marked else LIGHT.ink
        after = leg.left if leg else 1.0
        cells = [
            Cell(step.name, marked, color),
            Cell(three(step.after_lm), marked, color, True),
            Cell(lost(step.factor) if leg else "", marked, color, True),
            Cell(""), Cell(""), Cell(""),
            Cell(typeset(step.because), color=color),
        ]  # fmt: skip
        row = blocks.row(cells, widths, size=size, pad=0.0, least=least)
        rows.append(_barred(row, before, after, scale_db, marked, sum(widths[:4])))
        before = after
    found = report.light
    share = f"{three(found.delivered_w)} W, {three(found.transmission * 100)} % of the lamp"
    said = f"{share}; 95 % of it within NA {found.exit_na:.3f}"
    cells = [Cell("delivered", True), Cell(three(found.delivered_lm), True, right=True),
             Cell(lost(found.transmission), True, right=True), Cell(""), Cell(""), Cell(""), Cell(said, True)]  # fmt: skip
    return [*rows, blocks.row(cells, widths, size=size, pad=0.02, least=least, rule=False)]


def _barred(row: Block, before: float, after: float, scale_db: float, marked: bool, left: float) -> Block:
    """A row with its loss as a bar from the light before it to the light after it, in decibels."""

    def place(share: float) -> float:
        return BAR * min(float(db_from_transmission(max(share, 1e-12))) / scale_db, 1.0)

    def draw(axes: Axes, x: float, y: float) -> None:
        row.draw(axes, x, y)
        x, high = x + left, min(row.high, MOST) - 0.05
        low = y - (row.high + high) / 2
        axes.add_patch(Rectangle((x, low), BAR, high, facecolor=LIGHT.ghost, linewidth=0))
        start, end = sorted((place(before), place(after)))
        color = LIGHT.accent if marked else LIGHT.light
        axes.add_patch(Rectangle((x + start, low), end - start, high, facecolor=color, linewidth=0))
        mark = [low - 0.015, low + high + 0.015]
        axes.plot([x + place(after)] * 2, mark, color=LIGHT.soft, linewidth=THIN, solid_capstyle="butt")

    return Block(row.high, draw, row.keep)
