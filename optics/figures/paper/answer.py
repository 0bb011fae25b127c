"""The report's first page: the answer in a sentence, headline numbers, needs with their margins, cautions and caveats."""

from collections.abc import Mapping

from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Rectangle

from optics.figures.canvas import width_of
from optics.figures.palette import LIGHT, THIN
from optics.figures.paper import blocks, origin, sheet, verdict
from optics.figures.paper import words as say
from optics.figures.paper.blocks import Cell
from optics.figures.paper.sheet import BODY, BOTTOM, FINE, HIGH, SIDE, WIDE, Block
from optics.report.answer import Report
from optics.report.verdict import sentence
from optics.study.smallest_change import Change
from optics.tables import Sourced

LEFT, RIGHT = 6.25, 3.75  # widths of the columns, inches
ASIDE = WIDE - SIDE - RIGHT
ANSWER, NUMBER = 17.0, 16.0  # points
METRICS, METRIC_HIGH = 4, 0.86  # in a row; height of one
BAR, FULL = 1.2, 1.0  # inches of the margin's bar to each end; the margin that fills it


def answer(pages: list[Figure], report: Report, sourced: Mapping[str, Sourced], change: Change | None) -> list[Block]:
    """The first page; hands back the caveats for which it had no room."""
    axes = sheet.page(pages, report.name)
    axes.text(WIDE - SIDE, HIGH - sheet.TOP - 0.05, f"Sizing report, {report.setting} use", fontsize=BODY,
              color=LIGHT.soft, ha="right", va="top")  # fmt: skip
    top = sheet.FIRST - 0.05
    first, rest = verdict.parted(sentence(report))
    mark = {True: say.MET, False: say.SHORT, None: say.OPEN}[report.summary.needs_met]
    ink = LIGHT.accent if report.summary.needs_met is False else LIGHT.ink
    said = [blocks.words(f"{mark} {first}", LEFT, size=ANSWER, bold=True, color=ink, below=0.05)]
    said += [blocks.words(rest, LEFT, size=11.0, below=0.22)] if rest else [sheet.space(0.15)]
    said += [*_metrics(verdict.headline(report)), sheet.space(0.1), *_needs(report)]
    if told := verdict.change(report.summary.needs_met, change):
        said += [sheet.space(0.08), blocks.words(told, LEFT, size=9.0)]
    sheet.flow(said, sheet.column(pages, axes, SIDE, top))
    caution, screen = _caution(report), [blocks.heading("What to know about these numbers", RIGHT)]
    y = sheet.flow([caution], sheet.column(pages, axes, ASIDE, top))
    screen += [blocks.words(origin.softness(sourced), RIGHT)] if sourced else []
    return _caveats(pages, axes, report, screen, y)


def _metrics(numbers: list[tuple[str, str, str]]) -> list[Block]:
    """Headline numbers in a grid."""
    wide = LEFT / METRICS

    def one(shown: list[tuple[str, str, str]]) -> Block:
        def draw(axes: Axes, x: float, y: float) -> None:
            for name, number, meaning in shown:
                axes.text(x, y, name, fontsize=BODY, color=LIGHT.soft, va="top")
                size = NUMBER * min(1.0, (wide - 0.1) / width_of(number, NUMBER, True))
                axes.text(x, y - 0.18, number, fontsize=size, weight="bold", color=LIGHT.ink, va="top")
                for turn, line in enumerate(blocks.wrapped(meaning, FINE - 0.4, wide - 0.12)):
                    axes.text(x, y - 0.47 - turn * 0.115, line, fontsize=FINE - 0.4, color=LIGHT.soft, va="top")
                x += wide

        return Block(METRIC_HIGH, draw)

    return [one(numbers[start : start + METRICS]) for start in range(0, len(numbers), METRICS)]


def _needs(report: Report) -> list[Block]:
    """Needs, short ones first, with their margin as a number and as a bar."""
    if not report.needs:
        return [blocks.heading("Needs", LEFT), blocks.words("No needs are set in this design.", LEFT)]
    widths = (0.26, 1.66, 1.42, 1.06, 1.02, LEFT - 5.42)
    head = blocks.head_row(
        [Cell(""), Cell("need"), Cell("wanted"), Cell("got"), Cell("margin", right=True), Cell("")], widths
    )
    rows = [blocks.heading("Needs and margins", LEFT), head]
    for need in verdict.needs(report):
        ink = LIGHT.ink if need.met else LIGHT.accent
        cells = [
            Cell(need.mark, True, ink),
            Cell(need.name, not need.met, ink),
            Cell(need.wanted),
            Cell(need.got, True, ink),
            Cell(need.margin, not need.met, ink, right=True),
            Cell(""),
        ]
        rows.append(
            _barred(
                blocks.row(cells, widths, size=9.0, pad=0.07, least=0.25),
                need,
                sum(widths[:5]) + 0.05,
                widths[5] - 0.05,
            )
        )
    return rows


def _barred(row: Block, need: verdict.Need, left: float, wide: float) -> Block:
    """A row with its margin as a bar from the middle: to the right met, to the left short, full at 100 %."""

    def draw(axes: Axes, x: float, y: float) -> None:
        row.draw(axes, x, y)
        middle, half = x + left + wide / 2, wide / 2
        share = -FULL if need.margin_share is None else max(-FULL, min(need.margin_share, FULL))
        long, low, high = half * share / FULL, y - 0.18, 0.11
        color = LIGHT.back if need.met else LIGHT.accent
        axes.add_patch(Rectangle((x + left, low), wide, high, facecolor=LIGHT.ghost, linewidth=0))
        axes.add_patch(Rectangle((min(middle, middle + long), low), abs(long), high, facecolor=color, linewidth=0))
        axes.plot([middle] * 2, [low - 0.02, low + high + 0.02], color=LIGHT.ink, linewidth=THIN)

    return Block(row.high, draw, row.keep)


def _caution(report: Report) -> Block:
    """The caution of the setting in a box, in sight beside the answer."""
    pad, inner = 0.13, RIGHT - 0.26
    text = next(item.text for item in report.caveats if item.where == "setting")
    inside = [
        blocks.words(f"Caution: {report.setting} use", inner, size=10.0, bold=True),
        blocks.words(text, inner, below=0.08),
    ]
    if "certifies nothing" not in text:
        inside.append(blocks.words(say.SCREENING, inner, bold=True, below=0.0))
    high = sum(block.high for block in inside) + 2 * pad

    def draw(axes: Axes, x: float, y: float) -> None:
        axes.add_patch(Rectangle((x, y - high), RIGHT, high, facecolor=LIGHT.ghost, edgecolor=LIGHT.ink, linewidth=1.0))
        down = y - pad
        for block in inside:
            block.draw(axes, x + pad, down)
            down -= block.high

    return Block(high + 0.2, draw)


def _caveats(pages: list[Figure], axes: Axes, report: Report, screen: list[Block], y: float) -> list[Block]:
    """Caveats below the caution, as many as there is room for; the rest as blocks for a later page."""
    items = [item for item in report.caveats if item.where not in ("setting", "sources")]
    done = 0
    for item in items:
        block = _caveat(item.where, say.typeset(item.text), RIGHT)
        if y - sum(b.high for b in screen) - block.high < BOTTOM + 0.2:
            break
        screen.append(block)
        done += 1
    sheet.flow(screen, sheet.column(pages, axes, ASIDE, y))
    left = [_caveat(item.where, say.typeset(item.text), sheet.COLUMN) for item in items[done:]]
    return [blocks.heading("More to know about these numbers"), *left] if left else []


def _caveat(where: str, text: str, width: float) -> Block:
    parts = [blocks.words(where, width, size=FINE, color=LIGHT.soft, below=0.0), blocks.words(text, width, below=0.07)]

    def draw(axes: Axes, x: float, y: float) -> None:
        for part in parts:
            part.draw(axes, x, y)
            y -= part.high

    return Block(sum(part.high for part in parts), draw)


def table_of_contents(pages: list[Figure]) -> None:
    """What stands on which page, in a line or two at the foot of the first."""
    titles: dict[str, list[int]] = {}
    for number, page in enumerate(pages[1:], 2):
        title = page.axes[0].texts[0].get_text()
        titles.setdefault(title if "ontinued" not in title else list(titles)[-1], []).append(number)
    told = [f"{'–'.join(map(str, sorted({on[0], on[-1]})))} {title}" for title, on in titles.items()]
    block = blocks.words("Pages: " + "  ·  ".join(told), sheet.ROOM, size=FINE, color=LIGHT.soft, below=0.0)
    block.draw(pages[0].axes[0], SIDE, BOTTOM + block.high - 0.02)
