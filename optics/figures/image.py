"""The picture of the contrast: what each part of the way back leaves over frequency, against what is needed."""

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from optics.figures.canvas import chart, spread, three
from optics.figures.palette import BOLD, LIGHT, LINE, SMALL, TEXT, THIN, WIDTH_IN, Palette
from optics.study.sharper_curves import Contrasts

# Inches: height and margins
HIGH, LEFT, RIGHT, FOOT, HEAD = 3.5, 0.62, 0.9, 0.5, 0.3
SERIES = {"lattice": 0, "crosstalk": 1, "camera": 2, "light": 3, "objective": 4, "focus": 5}
WHOLE = 0.97  # a part that leaves more than this wherever detail is resolved is drawn in soft ink


def part_color(part: str | None, palette: Palette) -> str:
    """The color of a part in all pictures of the detail; soft ink for one that has none."""
    return palette.series[SERIES[part]] if part in SERIES else palette.soft


def contrasts(seen: Contrasts, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """Each part's contrast (thin), all together (bold), what is needed (dashed); resolved where the last two meet."""
    figure, axes = chart(width_in, HIGH, palette, left=LEFT, right=RIGHT, bottom=FOOT, top=HEAD)
    f, lowest = seen.frequency_lp_mm, float(seen.product_mtf.min())
    axes.set(xlim=(f[0], f[-1]), ylim=(max(1.1 * lowest, -0.5) if lowest < 0 else 0.0, 1.02))
    axes.set(xlabel="line pairs per mm, at the target", ylabel="contrast left")
    axes.xaxis.set_major_formatter(lambda value, _: three(value))
    if lowest < 0:
        axes.axhline(0, color=palette.grid, linewidth=THIN)
    _beyond_lattice(axes, seen, palette)
    ends = _lines(axes, seen, palette)
    over = (f <= seen.resolved_lp_mm) & (seen.product_mtf >= seen.needed_mtf)
    axes.fill_between(f, seen.needed_mtf, seen.product_mtf, where=over, color=palette.ghost, linewidth=0, zorder=0)
    axes.plot(f, seen.needed_mtf, color=palette.accent, linewidth=LINE, linestyle=(0, (4, 2)))
    axes.plot(f, seen.product_mtf, color=palette.ink, linewidth=BOLD)
    ends += [("all parts", float(seen.product_mtf[-1]), palette.ink, "bold")]
    ends += [("needed", float(seen.needed_mtf[-1]), palette.accent, "bold")]
    _named(axes, ends, f[-1], HIGH - FOOT - HEAD)
    _crossing(axes, seen, palette)
    return figure


def _lines(axes: Axes, seen: Contrasts, palette: Palette) -> list[tuple[str, float, str, str]]:
    """The parts that take something, each in its color; those that take next to nothing in soft ink."""
    named, f = [], seen.frequency_lp_mm
    inside = f <= max(seen.resolved_lp_mm, 0.5 * f[-1])
    for part, left in seen.mtf.items():
        quiet = left[inside].min() > WHOLE
        color = palette.soft if quiet else part_color(part, palette)
        axes.plot(f, left, color=color, linewidth=THIN if quiet else LINE)
        named.append((part, float(left[-1]), color, "normal"))
    return named


def _named(axes: Axes, ends: list[tuple[str, float, str, str]], right: float, high_in: float) -> None:
    """Names beside the ends of the lines, kept apart."""
    low, top = axes.get_ylim()
    inch = high_in / (top - low)
    places = spread([(top - min(max(at, low), top)) * inch for _, at, *_ in ends], 0.165, 0.03, high_in)
    for (name, _, color, weight), at in zip(ends, places):
        axes.text(right, top - at / inch, f" {name}", color=color, fontsize=SMALL, weight=weight, va="center")


def _beyond_lattice(axes: Axes, seen: Contrasts, palette: Palette) -> None:
    limit, end = seen.lattice_limit_lp_mm, float(seen.frequency_lp_mm[-1])
    if limit >= end:
        return
    axes.axvspan(limit, end, facecolor="none", edgecolor=palette.grid, hatch="///", linewidth=0, zorder=0)
    axes.axvline(limit, color=palette.soft, linewidth=THIN)
    side = "right" if limit > 0.7 * end else "center"
    axes.annotate(
        f"the lattice ends at {three(limit)}", (limit, 1.0), (3 if side == "right" else 0, 5), ha=side,
        xycoords=("data", "axes fraction"), textcoords="offset points", color=palette.soft, fontsize=SMALL,
    )  # fmt: skip


def _crossing(axes: Axes, seen: Contrasts, palette: Palette) -> None:
    at, paper = seen.resolved_lp_mm, {"facecolor": palette.paper, "edgecolor": "none", "pad": 1.5, "alpha": 0.85}
    if at <= 0:
        axes.text(0.5, 0.3, "nothing is resolved: at every frequency\nmore is needed than is left", ha="center",
                  transform=axes.transAxes, color=palette.accent, fontsize=TEXT, weight="bold", bbox=paper)  # fmt: skip
        return
    height, low = float(np.interp(at, seen.frequency_lp_mm, seen.product_mtf)), max(axes.get_ylim()[0], 0.0)
    axes.plot([at, at], [axes.get_ylim()[0], height], color=palette.ink, linewidth=THIN)
    axes.plot(at, height, "o", color=palette.ink, markersize=6, markeredgecolor=palette.paper, clip_on=False, zorder=5)
    right = at < 0.62 * seen.frequency_lp_mm[-1]
    axes.annotate(
        f"resolved {three(at)} lp/mm:\na gap of {three(0.5 / at)} mm", (at, low), (7 if right else -7, 7),
        textcoords="offset points", ha="left" if right else "right", va="bottom", color=palette.ink, fontsize=SMALL,
        weight="bold", bbox=paper,
    )  # fmt: skip
