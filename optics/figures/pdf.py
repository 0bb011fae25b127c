"""The report of one design on paper: A4, lying, as the bytes of a PDF; the same design gives the same bytes.

The answer first, then along the light: budget, target and detail, fit, working range, screening, the design's file and
every value with its source. A part that the design does not have takes no page.
"""

import io
from dataclasses import dataclass

import numpy as np
from matplotlib.backends.backend_pdf import PdfPages
from matplotlib.figure import Figure

from optics.figures import body, detail, target, working_range
from optics.figures import light as light_pictures
from optics.figures.palette import LIGHT, THIN
from optics.figures.paper import answer, blocks, light, sheet, values
from optics.figures.paper import words as say
from optics.figures.paper.blocks import Cell
from optics.figures.paper.sheet import COLUMN, FINE, FIRST, GAP, SIDE, Area, Block
from optics.presets import Design
from optics.report.answer import Report
from optics.report.views import PassageView, SectionView, Spectra, TargetMap
from optics.study.smallest_change import Change
from optics.study.working_range import RangeCurves

LEFT, RIGHT = SIDE, SIDE + COLUMN + GAP
ROOM_DOWN = FIRST - sheet.BOTTOM
LEAST_MAP = 2.6  # inches


@dataclass(frozen=True, slots=True)
class Contents:
    """All that the report shows of one design: None where it has no such part.

    `file`: the design file as text; `change`: the smallest one that meets what is not met.
    """

    design: Design
    file: str
    report: Report
    spectra: Spectra
    target: TargetMap | None
    section: SectionView | None
    passage: PassageView | None
    working_range: RangeCurves | None
    change: Change | None = None


def pdf(contents: Contents) -> bytes:
    """The whole report."""
    out, pages = io.BytesIO(), sheets(contents)
    info = {"Title": f"{contents.report.name}: sizing report", "CreationDate": None, "ModDate": None,
            "Creator": None, "Producer": None}  # fmt: skip
    with PdfPages(out, metadata=info) as file:
        for page in pages:
            file.savefig(page)
    return out.getvalue()


def sheets(contents: Contents) -> list[Figure]:
    """The pages, footers and all."""
    pages: list[Figure] = []
    told = [*answer.answer(pages, contents.report, contents.design.sourced, contents.change)]
    light.light(pages, contents.report)
    _target_and_detail(pages, contents)
    _fit(pages, contents)
    _rest(pages, contents, told)
    answer.table_of_contents(pages)
    for number, page in enumerate(pages, 1):
        _footer(page, contents.report, number, len(pages))
    return pages


def pairs(rows: list[say.Pair], width: float = COLUMN) -> list[Block]:
    """Names on the left, numbers on the right."""
    wide = (width * 0.62, width * 0.38)
    return [
        blocks.row([Cell(name, color=LIGHT.soft), Cell(value, right=True)], wide, gutter=0.04) for name, value in rows
    ]


def _target_and_detail(pages: list[Figure], contents: Contents) -> None:
    """Map and numbers on the left, the light's profile and the ledger of detail on the right."""
    report = contents.report
    if contents.target is None:
        return
    axes = sheet.page(pages, "On the target, and what is seen of it" if report.detail else "On the target")
    left = [blocks.heading("The light, in numbers"), *_two_columns(say.target(report))]
    if report.detail:
        left += [sheet.space(0.1), blocks.heading("The detail, in numbers"), *_two_columns(say.detail(report))]
    top = blocks.heading("The light on the target")
    deep = ROOM_DOWN - sum(block.high for block in left) - top.high
    picture = _map(contents.target, deep)
    shown = [top, sheet.picture(picture, 0.0)] if picture else []
    sheet.flow([*shown, *left], sheet.column(pages, axes, LEFT, FIRST))
    right = [sheet.picture(target.profile(contents.target, width_in=COLUMN), 0.05)]
    if report.detail:
        right += [
            blocks.heading("What each part alone would allow"),
            blocks.words(say.limits(report), below=0.0),
            sheet.picture(detail.ledger(report, width_in=COLUMN), 0.0),
        ]
    sheet.flow(right, sheet.column(pages, axes, RIGHT, FIRST))


def _two_columns(rows: list[say.Pair]) -> list[Block]:
    """Names and numbers in two columns, to be read down each."""
    half, deep = (COLUMN - GAP / 2) / 2, (len(rows) + 1) // 2
    wide = (half * 0.68, half * 0.32, GAP / 2, half * 0.68, half * 0.32)
    rows = [*rows, ("", "")] if len(rows) % 2 else rows

    def cells(row: say.Pair) -> list[Cell]:
        return [Cell(row[0], color=LIGHT.soft), Cell(row[1], right=True)]

    return [
        blocks.row([*cells(one), Cell(""), *cells(two)], wide, size=FINE + 0.4, gutter=0.03, pad=0.04)
        for one, two in zip(rows[:deep], rows[deep:])
    ]


def _map(view: TargetMap, high: float) -> Figure | None:
    """The map as wide as the column, or as its height allows; None where that is too narrow for its words."""
    steep = float(np.ptp(view.v_mm) / np.ptp(view.u_mm))
    wide = min((high - target.BELOW - target.ABOVE - 0.01) / steep + target.LEFT + target.RIGHT, COLUMN)
    return target.irradiance_map(view, width_in=wide) if wide >= LEAST_MAP else None


def _fit(pages: list[Figure], contents: Contents) -> None:
    """The section on the left, the passage on the right, both to scale."""
    report = contents.report
    if contents.section is None:
        return
    axes = sheet.page(pages, "Fit and passage" if contents.passage else "Fit")
    left = [
        blocks.heading("Cross-section, to scale"),
        sheet.picture(body.section(contents.section, width_in=COLUMN), 0.2),
    ]
    sheet.flow([*left, *pairs(say.fit(report))], sheet.column(pages, axes, LEFT, FIRST))
    right = [*pairs(say.passage(report))]
    if contents.passage:
        drawn = sheet.picture(body.passage(contents.passage, width_in=COLUMN), 0.2)
        right = [blocks.heading("The tip in the bend of the bore, to scale"), drawn, *right]
    else:
        right = [blocks.heading("Bending"), *right]
    sheet.flow(right, sheet.column(pages, axes, RIGHT, FIRST))


def _rest(pages: list[Figure], contents: Contents, told: list[Block]) -> None:
    """Working range, or the color of the light; then, flowing on, the screening, the file and the values."""
    report = contents.report
    if contents.working_range is not None:
        axes = sheet.page(pages, "Working range, screening and sources")
        drawn = working_range.curves(contents.working_range, width_in=COLUMN)
        sheet.flow([sheet.picture(drawn)], sheet.column(pages, axes, LEFT, FIRST + 0.06))
        said = [blocks.heading("Over the working range")]
        said += [blocks.words("  ".join(say.working_range(contents.working_range)), below=0.14)]
    else:
        axes = sheet.page(pages, "The light's color, screening and sources")
        drawn = light_pictures.spectra(contents.spectra, width_in=COLUMN)
        left = [
            blocks.heading("Spectra, in and out"),
            sheet.picture(drawn),
            blocks.heading("In numbers"),
            *pairs(say.light(report)),
        ]
        sheet.flow(left, sheet.column(pages, axes, LEFT, FIRST))
        said = []
    said += [*told, *values.screening(report), *values.file(contents.file)]
    said += values.values(contents.design.document, contents.design.sourced)
    more = sheet.areas(pages, Area(axes, RIGHT, FIRST), "Screening, the design file and sources", (LEFT, RIGHT))
    sheet.flow(said, more)


def _footer(page: Figure, report: Report, number: int, count: int) -> None:
    """Which design, which version, which page, on every page."""
    axes, y = page.axes[0], sheet.FOOTER
    look = {"fontsize": FINE, "color": LIGHT.soft, "va": "baseline"}
    axes.plot([SIDE, sheet.WIDE - SIDE], [y + 0.14] * 2, color=LIGHT.grid, linewidth=THIN)
    name = sheet.trimmed(report.name, FINE, 3.0)
    axes.text(SIDE, y, f"{name}  ·  design {report.design_hash}  ·  version {report.version}", **look)
    axes.text(sheet.WIDE / 2 + 0.9, y, say.SCREENING, ha="center", **look)
    axes.text(sheet.WIDE - SIDE, y, f"page {number} of {count}", ha="right", **look)
