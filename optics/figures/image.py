"""Pictures of what makes the image sharp: the contrast of each part against what is needed, and what is resolved over one number of the design."""

from collections.abc import Sequence
from itertools import groupby

import numpy as np
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

from optics.figures.canvas import chart, panel, spread, three, width_of
from optics.figures.palette import BOLD, LIGHT, LINE, SMALL, TEXT, THIN, WIDTH_IN, Palette
from optics.study.sharper import Sharpness
from optics.study.sharper_curves import Contrasts

# Inches: of the chart of contrasts; of the panels of sharpness, their gap and margins
HIGH, RIGHT = 3.5, 1.02
PANEL, GAP, TOP, FOOT, LEFT, EDGE = 1.5, 0.62, 0.42, 0.5, 0.62, 0.2
CORES = 0.34  # above the panel of the pitch, for the scale of cores
SERIES = {"lattice": 0, "crosstalk": 1, "camera": 2, "light": 3, "objective": 4, "focus": 5}
WHOLE = 0.97  # a part that leaves more than this wherever detail is resolved is not drawn in color
NAMES = {
    "image.bundle.pitch_um": ("core pitch", "µm"),
    "image.chip.pixel_um": ("pixel pitch", "µm"),
    "image.objective.f_number": ("f-number", ""),
    "source.lamp.flux_lm": ("the lamp's light", "lm"),
    "source.lamp.flux_w": ("the lamp's light", "W"),
}
STEPS = ((1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0), (1.0, 2.0, 5.0), (1.0, 3.0), (1.0,))


def part_color(part: str | None, palette: Palette) -> str:
    return palette.series[SERIES[part]] if part in SERIES else palette.soft


# Contrast over frequency


def contrasts(seen: Contrasts, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """Each part's contrast (thin), all together (bold), what is needed (dashed); resolved where the last two meet."""
    figure, axes = chart(width_in, HIGH, palette, left=LEFT, right=RIGHT, bottom=FOOT, top=0.3)
    f, lowest = seen.frequency_lp_mm, min(float(seen.product_mtf.min()), 0.0)
    axes.set(xlim=(f[0], f[-1]), ylim=(max(1.1 * lowest, -0.5), 1.02))
    axes.set(xlabel="line pairs per mm, at the target", ylabel="contrast left")
    if lowest < 0:
        axes.axhline(0, color=palette.grid, linewidth=THIN)
    _beyond_lattice(axes, seen, palette)
    ends = _lines(axes, seen, palette)
    over = (f <= seen.resolved_lp_mm) & (seen.product_mtf >= seen.needed_mtf)
    axes.fill_between(f, seen.needed_mtf, seen.product_mtf, where=over, color=palette.ghost, linewidth=0, zorder=0)
    axes.plot(f, seen.needed_mtf, color=palette.accent, linewidth=LINE, linestyle=(0, (4, 2)))
    axes.plot(f, seen.product_mtf, color=palette.ink, linewidth=BOLD)
    ends += [("all parts", float(seen.product_mtf[-1]), palette.ink, "bold")]
    ends += [(f"needed of {three(seen.detail_contrast)}", float(seen.needed_mtf[-1]), palette.accent, "bold")]
    _named(axes, ends, f[-1], HIGH - FOOT - 0.3)
    _crossing(axes, seen, palette)
    return figure


def _lines(axes: Axes, seen: Contrasts, palette: Palette) -> list[tuple[str, float, str, str]]:
    """The parts that take something, each in its color; those that take next to nothing as one name."""
    named, quiet, inside = [], [], seen.frequency_lp_mm <= max(seen.resolved_lp_mm, 0.5 * seen.frequency_lp_mm[-1])
    for part, left in seen.mtf.items():
        if left[inside].min() > WHOLE:
            quiet.append(part)
            continue
        color = part_color(part, palette)
        axes.plot(seen.frequency_lp_mm, left, color=color, linewidth=LINE)
        named.append((part, float(left[-1]), color, "normal"))
    if quiet:
        height = float(np.mean([seen.mtf[part][-1] for part in quiet]))
        for part in quiet:
            axes.plot(seen.frequency_lp_mm, seen.mtf[part], color=palette.soft, linewidth=THIN)
        named.append(("\n".join(quiet), height, palette.soft, "normal"))
    return named


def _named(axes: Axes, ends: list[tuple[str, float, str, str]], right: float, high_in: float) -> None:
    """Names beside the ends of the lines, kept apart."""
    low, top = axes.get_ylim()
    inch = high_in / (top - low)
    order = sorted(ends, key=lambda end: -end[1])
    rows, taken = [], 0
    for name, *_ in order:
        rows.append(taken + name.count("\n") / 2)
        taken += 1 + name.count("\n")
    wanted = [(top - min(max(at, low), top)) * inch for _, at, *_ in order]
    lines = [name.count("\n") for name, *_ in order]
    placed = spread([w - 0.0 for w in wanted], 0.17 * (1 + max(lines) / 2), 0.05, high_in - 0.05)
    for (name, _, color, weight), at in zip(order, placed):
        axes.text(
            right, top - at / inch, f" {name}", color=color, fontsize=SMALL, weight=weight, va="center", linespacing=1.1
        )


def _beyond_lattice(axes: Axes, seen: Contrasts, palette: Palette) -> None:
    limit, end = seen.lattice_limit_lp_mm, seen.frequency_lp_mm[-1]
    if limit >= end:
        return
    axes.axvspan(limit, end, facecolor="none", edgecolor=palette.grid, hatch="///", linewidth=0, zorder=0)
    axes.axvline(limit, color=palette.soft, linewidth=THIN)
    axes.annotate(
        f"lattice ends at {three(limit)}", (limit, 1.02), (0, 4), textcoords="offset points",
        xycoords=("data", "data"), ha="center", color=palette.soft, fontsize=SMALL,
    )  # fmt: skip


def _crossing(axes: Axes, seen: Contrasts, palette: Palette) -> None:
    at = seen.resolved_lp_mm
    if at <= 0:
        axes.text(0.5, 0.5, "nothing is resolved:\nmore is needed than is left", transform=axes.transAxes, ha="center",
                  va="center", color=palette.accent, fontsize=TEXT, weight="bold")  # fmt: skip
        return
    height = float(np.interp(at, seen.frequency_lp_mm, seen.product_mtf))
    axes.plot([at, at], [axes.get_ylim()[0], height], color=palette.ink, linewidth=THIN)
    axes.plot(at, height, "o", color=palette.ink, markersize=6, markeredgecolor=palette.paper, clip_on=False)
    right = at < 0.55 * seen.frequency_lp_mm[-1]
    axes.annotate(
        f"resolved {three(at)} lp/mm,\na gap of {three(0.5 / at)} mm", (at, max(axes.get_ylim()[0], 0.0)),
        (7 if right else -7, 8), textcoords="offset points", ha="left" if right else "right", va="bottom",
        color=palette.ink, fontsize=SMALL, weight="bold",
    )  # fmt: skip


# What is resolved over one number


def sharper(
    curves: Sequence[Sharpness],
    *,
    top_lp_mm: float,
    wanted_lp_mm: float | None = None,
    palette: Palette = LIGHT,
    width_in: float = WIDTH_IN,
    panel_in: float = PANEL,
) -> Figure:
    """One panel for each number on one scale of line pairs per mm; the line's color is the part that limits.

    Ring: the design; dot: the sharpest; shaded: going on makes it no sharper; dashed: what is asked.
    """
    tops = [TOP + (CORES if np.isfinite(curve.core_count).any() and _is_pitch(curve) else 0.0) for curve in curves]
    high = sum(tops) + len(curves) * panel_in + (len(curves) - 1) * GAP + FOOT - 0.1 * (len(curves) - 1)
    figure = Figure(figsize=(width_in, high), facecolor=palette.paper)
    FigureCanvasAgg(figure)
    above = 0.0
    for curve, top in zip(curves, tops):
        above += top
        axes = panel(figure, palette, left=LEFT, right=EDGE, top=above, bottom=high - above - panel_in)
        _sharpness(axes, curve, palette, top_lp_mm, wanted_lp_mm, width_in - LEFT - EDGE)
        above += panel_in + GAP - 0.1
    return figure


def _is_pitch(curve: Sharpness) -> bool:
    return curve.path.endswith("pitch_um")


def _sharpness(
    axes: Axes, curve: Sharpness, palette: Palette, top: float, wanted: float | None, wide_in: float
) -> None:
    name, unit = NAMES[curve.path]
    x, y = curve.value, curve.resolved_lp_mm
    axes.set(xscale="log", xlim=(x[0], x[-1]), ylim=(0, 1.16 * top), ylabel="lp/mm")
    places = round_places(x[0], x[-1], 9 if wide_in > 4 else 6)
    axes.set_xticks(places, [three(place) for place in places])
    axes.set_xticks([], minor=True)
    axes.set_xlabel(f"{name}, {unit}" if unit else name)
    axes.yaxis.set_major_formatter(lambda value, _: three(value))
    if curve.stops:
        beyond = (x[0], curve.best) if curve.toward < 0 else (curve.best, x[-1])
        axes.axvspan(*beyond, color=palette.ghost, linewidth=0, zorder=0)
    if _is_pitch(curve):
        axes.plot(x, curve.lattice_limit_lp_mm, color=palette.soft, linewidth=THIN, linestyle=(0, (1, 2)))
        _beats(axes, curve, palette)
        _cores(axes, curve, palette)
    if wanted is not None:
        axes.axhline(wanted, color=palette.ink, linewidth=THIN, linestyle=(0, (4, 2)))
    _colored(axes, curve, palette, wide_in)
    _marks(axes, curve, palette, top)
    _said(axes, curve, palette, unit)


def _colored(axes: Axes, curve: Sharpness, palette: Palette, wide_in: float) -> None:
    """The line in runs of one limiting part each; a run that has room carries its name."""
    x, y, row = curve.value, curve.resolved_lp_mm, 0
    whole = np.log(x[-1] / x[0])
    for part, group in groupby(curve.limited_by):
        count = len(list(group))
        run = slice(row, min(row + count + 1, len(x)))
        seen = np.where(y[run] > 0, y[run], np.nan) if part is None else y[run]
        axes.plot(x[run], seen, color=part_color(part, palette), linewidth=BOLD, solid_capstyle="round")
        row += count
    del whole, wide_in


def _marks(axes: Axes, curve: Sharpness, palette: Palette, top: float) -> None:
    axes.plot(curve.now, curve.now_lp_mm, "o", color=palette.paper, markeredgecolor=palette.ink, markersize=7,
              markeredgewidth=LINE, clip_on=False, zorder=5)  # fmt: skip
    near = abs(np.log(curve.best / curve.now)) < 0.03 * np.log(curve.value[-1] / curve.value[0])
    if curve.best_lp_mm > 0 and not near:
        axes.plot(curve.best, curve.best_lp_mm, "o", color=palette.ink, markersize=6, markeredgecolor=palette.paper,
                  clip_on=False, zorder=5)  # fmt: skip
    marks = [("now", curve.now, curve.now_lp_mm)] + ([] if near else [("sharpest", curve.best, curve.best_lp_mm)])
    for said, at, height in marks:
        share = np.log(at / curve.value[0]) / np.log(curve.value[-1] / curve.value[0])
        side = "left" if share < 0.2 else "right" if share > 0.8 else "center"
        gap = f"{three(0.5 / height)} mm" if height > 0 else "nothing"
        axes.annotate(f"{said} {gap}", (at, height), (0, 8), textcoords="offset points", ha=side, va="bottom",
                      color=palette.ink, fontsize=SMALL, weight="bold" if said == "now" else "normal")  # fmt: skip


def _beats(axes: Axes, curve: Sharpness, palette: Palette) -> None:
    """A bar along the foot where the camera has too few pixels a pitch."""
    few = curve.pixels_per_pitch < 4 / np.sqrt(3)
    if not few.any():
        return
    low, high = curve.value[few][0], curve.value[few][-1]
    axes.axvspan(low, high, 0, 0.03, color=palette.accent, linewidth=0)
    axes.annotate("under 2.31 pixels a core", (low, 0), (2, 5), textcoords="offset points", color=palette.accent,
                  fontsize=SMALL)  # fmt: skip


def _cores(axes: Axes, curve: Sharpness, palette: Palette) -> None:
    """A second scale above: how many cores."""
    cores = curve.core_count
    if not np.isfinite(cores).any():
        return
    counts = round_places(cores.min(), cores.max(), 6)
    at = np.exp(np.interp(np.log(counts), np.log(cores[::-1]), np.log(curve.value[::-1])))
    for place, count in zip(at, counts):
        axes.annotate(f"{count:,.0f}", (place, 1), (0, 4), xycoords=("data", "axes fraction"), textcoords="offset points",
                      ha="center", color=palette.soft, fontsize=SMALL)  # fmt: skip
        axes.plot([place, place], [1, 1.02], transform=axes.get_xaxis_transform(), color=palette.soft, linewidth=THIN,
                  clip_on=False)  # fmt: skip
    axes.annotate("cores", (0, 1), (-6, 4), xycoords="axes fraction", textcoords="offset points", ha="right",
                  color=palette.soft, fontsize=SMALL)  # fmt: skip


def _said(axes: Axes, curve: Sharpness, palette: Palette, unit: str) -> None:
    """Above the panel: where it stops, and what takes over."""
    told = what_it_says(curve, unit)
    pad = 22 if _is_pitch(curve) and np.isfinite(curve.core_count).any() else 6
    axes.set_title(told, loc="left", color=palette.ink, fontsize=TEXT, pad=pad)


def what_it_says(curve: Sharpness, unit: str) -> str:
    """One line on a curve."""
    best = f"{three(curve.best)} {unit}".rstrip()
    if curve.best_lp_mm <= 0:
        return "Nothing is resolved anywhere here"
    if curve.toward > 0:
        return f"From {three(curve.enough)} {unit} on more light gains little: {curve.because} limits"
    if curve.stops and curve.because == "crosstalk":
        return f"Smaller stops being sharper at {best}: crosstalk takes over"
    if curve.stops:
        return f"Sharpest at {best}; then {curve.because} takes over"
    return f"Smaller is sharper down to {best}; {curve.because} limits"


def round_places(low: float, high: float, most: int) -> list[float]:
    """Round numbers on a logarithmic scale, as many as there is room for.

    >>> round_places(1.4, 16.0, 6)
    [2.0, 5.0, 10.0]
    """
    for steps in STEPS:
        places = [step * 10.0**power for power in range(-9, 10) for step in steps if low <= step * 10.0**power <= high]
        if len(places) <= most:
            return places
    return places[:: -(-len(places) // most)]


assert width_of
