"""The picture of the detail: what each part of the way back alone would allow, and what is resolved."""

from typing import Any

from matplotlib.axes import Axes
from matplotlib.figure import Figure

from optics.figures.canvas import chart, three
from optics.figures.palette import LIGHT, LINE, SMALL, TEXT, WIDTH_IN, Palette
from optics.report.answer import Limit, Report

ROW = 0.33  # inches a part
LONGEST = 5.0  # bars longer than this many times the shortest are cut, with their number


def ledger(report: Report, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """Bars of line pairs per mm at the target, one for each part alone; what is resolved as a line through them."""
    lines, resolved = report.detail.ledger, report.summary.resolved_lp_mm or 0.0
    wanted = next((0.5 / line.wanted for line in report.needs if line.name == "smallest_gap_mm"), None)
    end = _end([line.limit_lp_mm for line in lines if line.limit_lp_mm], resolved, wanted)
    figure, axes = chart(width_in, ROW * len(lines) + 1.3, palette, left=0.98, right=0.75, bottom=0.52, top=0.72)
    for row, line in enumerate(lines):
        _bar(axes, palette, row, line, line.name == report.summary.limited_by, end)
        _contrast(axes, palette, row, line, resolved > 0, end)
    axes.text(1.02 * end, -0.72, "contrast\nthere", color=palette.soft, fontsize=SMALL, va="bottom", linespacing=1.05)
    marks = [(resolved, f"resolved {three(resolved)} lp/mm" if resolved else "nothing resolved", "solid", 0.40)]
    if wanted is not None:
        marks.append((wanted, f"{'✓' if resolved >= wanted else '✗'} wanted {three(wanted)}", (0, (4, 2)), 0.18))
    _marks(axes, palette, marks, len(lines), end)
    axes.set(xlim=(0, end), ylim=(len(lines) - 0.45, -0.55), yticks=[], xlabel="line pairs per mm, at the target")
    axes.xaxis.set_major_formatter(lambda value, _: three(value))
    axes.spines["left"].set_visible(False)
    return figure


def _end(limits: list[float], resolved: float, wanted: float | None) -> float:
    """Where the scale ends: what is resolved and wanted well inside it, the longest bars cut."""
    inside = max(resolved, wanted or 0.0) or sorted([*limits, 1.0])[min(1, len(limits))]
    return max(min(LONGEST * inside, 1.12 * max(limits, default=0.0)), 1.12 * inside)


def _bar(axes: Axes, palette: Palette, row: int, line: Limit, limits: bool, end: float) -> None:
    ink, weight = (palette.accent, "bold") if limits else (palette.ink, "normal")
    limit = line.limit_lp_mm
    if limit is None:
        axes.barh(row, end, color=palette.paper, edgecolor=palette.grid, hatch="///", height=0.6, linewidth=0)
        said, x = "no limit", end
    else:
        cut = limit > end
        axes.barh(row, min(limit, end), color=palette.accent if limits else palette.back, height=0.6, linewidth=0)
        if cut:  # the bar goes on
            axes.fill([end, end * 0.985, end], [row - 0.3, row, row + 0.3], color=palette.paper, linewidth=0)
        said, x = three(limit), min(limit, end)
    inside = limit is not None and x > 0.6 * end
    look = {
        "color": palette.on_back
        if inside and not limits
        else "#ffffff"
        if inside
        else palette.soft
        if limit is None
        else ink
    }
    if limit is None:
        look["bbox"] = {"facecolor": palette.paper, "edgecolor": "none", "pad": 1.5}
    where = {"x": x - 0.03 * end, "ha": "right"} if inside or limit is None else {"x": x + 0.015 * end, "ha": "left"}
    axes.text(y=row, s=said, va="center_baseline", fontsize=TEXT, weight=weight, **where, **look)
    axes.text(-0.02 * end, row, line.name, ha="right", va="center_baseline", fontsize=TEXT, color=ink, weight=weight)


def _contrast(axes: Axes, palette: Palette, row: int, line: Limit, seen: bool, end: float) -> None:
    """The contrast that the part leaves at what is resolved."""
    shown = (
        "–"
        if not seen
        else "1"
        if line.contrast >= 0.995
        else f"{line.contrast:.2f}"
        if line.contrast >= 0.01
        else f"{line.contrast:.1g}"
    )
    axes.text(
        1.02 * end,
        row,
        shown,
        va="center_baseline",
        fontsize=TEXT,
        color=palette.soft if shown in ("–", "1") else palette.ink,
    )


def _marks(axes: Axes, palette: Palette, marks: list[tuple[float, str, Any, float]], rows: int, end: float) -> None:
    """Lines through all bars (place, words, style, inches above the bars), named beside the last of them where there is room."""
    places = [at for at, *_ in marks]
    beside = max(places) < 0.6 * end
    for at, said, style, above in marks:
        right = at < 0.6 * end
        name_at = max(places) + 0.03 * end if beside else at + (0.03 if right else -0.03) * end
        y = -0.55 - above / ROW
        look = {"color": palette.ink, "linewidth": LINE if style == "solid" else 0.7 * LINE, "linestyle": style}
        axes.plot([at, at, name_at], [rows - 0.45, y, y], clip_on=False, solid_joinstyle="miter", **look)
        name = {"x": name_at + (0.01 if right else -0.01) * end, "ha": "left" if right else "right"}
        axes.text(y=y, s=said, color=palette.ink, fontsize=SMALL, va="center", **name)
