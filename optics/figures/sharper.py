"""The picture of sharpness: what is resolved over one number of the design, and where going on stops helping."""

from collections.abc import Sequence
from itertools import groupby

import numpy as np
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

from optics.figures.canvas import panel, three
from optics.figures.image import part_color
from optics.figures.palette import BOLD, LIGHT, LINE, SMALL, TEXT, THIN, WIDTH_IN, Palette
from optics.study.sharper import FLAT, Sharpness

# Inches: of a panel, from one to the next, and margins
PANEL, GAP, TOP, FOOT, LEFT, EDGE = 1.5, 0.95, 0.36, 0.5, 0.62, 0.2
CORES = 0.26  # above the panel of the pitch, for the scale of cores
AWAY, MARKED = 0.13, 0.45  # of the axis: so far names keep from the marks, and from their words
ROOM = 0.8  # inches of a line that can carry its name
# Of each number: its name, its unit, the word for more of it, and how a value of it is written
NAMES = {
    "image.bundle.pitch_um": ("core pitch", "µm", "Smaller", "{} µm"),
    "image.chip.pixel_um": ("pixel pitch", "µm", "Smaller", "{} µm"),
    "image.objective.f_number": ("f-number", "", "Wider", "f/{}"),
    "source.lamp.flux_lm": ("the lamp's light", "lm", "More light", "{} lm"),
    "source.lamp.flux_w": ("the lamp's light", "W", "More light", "{} W"),
}
CALLED = {"lattice": "the lattice", "objective": "the objective", "camera": "the camera", "eye": "the eye"}
STEPS = ((1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0), (1.0, 2.0, 5.0), (1.0, 3.0), (1.0,))


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

    Ring: the design; dot: the sharpest; shaded: going on gains under 5 %; dashed: what is asked; dotted: the lattice limit.
    """
    tops = [TOP + CORES * _has_cores(curve) for curve in curves]
    high = sum(tops) + len(curves) * panel_in + (len(curves) - 1) * (GAP - TOP) + FOOT
    figure, above = Figure(figsize=(width_in, high), facecolor=palette.paper), 0.0
    FigureCanvasAgg(figure)
    for curve, top in zip(curves, tops):
        above += top
        axes = panel(figure, palette, left=LEFT, right=EDGE, top=above, bottom=high - above - panel_in)
        axes.set(ylim=(0, 1.2 * top_lp_mm), ylabel="lp/mm at the target" if panel_in > PANEL else "lp/mm")
        _panel(axes, curve, palette, wanted_lp_mm, width_in - LEFT - EDGE)
        above += panel_in + GAP - TOP
    return figure


def _panel(axes: Axes, curve: Sharpness, palette: Palette, wanted: float | None, wide_in: float) -> None:
    (name, unit, *_), x = NAMES[curve.path], curve.value
    axes.set(xscale="log", xlim=(x[0], x[-1]))
    places = round_places(x[0], x[-1], 9 if wide_in > 4 else 6)
    axes.set_xticks(places, [three(place) for place in places])
    axes.set_xticks([], minor=True)
    axes.set_xlabel(f"{name}, {unit}" if unit else name)
    axes.yaxis.set_major_formatter(lambda value, _: three(value))
    if curve.best_lp_mm > 0:
        axes.axvspan(curve.enough, x[0] if curve.toward < 0 else x[-1], color=palette.ghost, linewidth=0, zorder=0)
    if _has_cores(curve):
        axes.plot(x, curve.lattice_limit_lp_mm, color=palette.soft, linewidth=1.3 * THIN, linestyle=(0, (1, 2)))
        _few_pixels(axes, curve, palette)
        _cores(axes, curve, palette)
    if wanted is not None:
        axes.axhline(wanted, color=palette.ink, linewidth=THIN, linestyle=(0, (4, 2)))
    _colored(axes, curve, palette, wide_in)
    _marks(axes, curve, palette)
    axes.set_title(
        what_it_says(curve), loc="left", color=palette.ink, fontsize=TEXT, pad=23 if _has_cores(curve) else 6
    )


def _has_cores(curve: Sharpness) -> bool:
    """Whether the pitch of cores is what is moved."""
    return curve.path.endswith("pitch_um")


def _share(curve: Sharpness, at: float) -> float:
    """Place along the axis, 0 to 1."""
    return float(np.log(at / curve.value[0]) / np.log(curve.value[-1] / curve.value[0]))


def _colored(axes: Axes, curve: Sharpness, palette: Palette, wide_in: float) -> None:
    """The line in runs of one limiting part each; a run that has room carries its name, away from the marks."""
    x, y, row = curve.value, curve.resolved_lp_mm, 0
    marks = (_share(curve, curve.now), _share(curve, curve.best))
    for part, group in groupby(curve.limited_by):
        run = slice(row, row + len(list(group)) + 1)  # up to the first of the next
        row = run.stop - 1
        color = part_color(part, palette)
        axes.plot(x[run], y[run], color=color, linewidth=BOLD, solid_capstyle="round")
        ends = [_share(curve, at) for at in x[run][[0, -1]]]
        if part is None or wide_in * (ends[1] - ends[0]) < ROOM or y[run].max() <= 0:
            continue
        for share in (0.5, 0.4, 0.6, 0.3, 0.7, 0.15, 0.85):
            place = ends[0] + share * (ends[1] - ends[0])
            at = float(x[0] * (x[-1] / x[0]) ** place)
            height = float(np.interp(at, x, y))
            above = height < 0.25 * axes.get_ylim()[1]
            if place > AWAY and all(abs(place - mark) > (MARKED if above else AWAY) for mark in marks):
                rises = np.interp(1.1 * at, x, y) > np.interp(at / 1.1, x, y)
                _name(axes, part, color, (at, height), above, bool(rises) != above)
                break


def _name(axes: Axes, said: str, color: str, at: tuple[float, float], above: bool, right: bool) -> None:
    """A name beside a line, on the side where it leaves room."""
    axes.annotate(said, at, (3 if right else -3, 6 if above else -6), textcoords="offset points", color=color,
                  ha="left" if right else "right", va="bottom" if above else "top", fontsize=SMALL)  # fmt: skip


def _marks(axes: Axes, curve: Sharpness, palette: Palette) -> None:
    """Ring and dot, each with the gap there."""
    x, y = curve.value, curve.resolved_lp_mm
    ring = {"color": palette.paper, "markeredgecolor": palette.ink, "markersize": 7, "markeredgewidth": LINE}
    axes.plot(curve.now, curve.now_lp_mm, "o", clip_on=False, zorder=5, **ring)
    marks, apart = [("now", curve.now, curve.now_lp_mm)], abs(_share(curve, curve.now) - _share(curve, curve.best))
    if curve.best_lp_mm > 1.02 * curve.now_lp_mm and apart > 0.03:
        dot = {"color": palette.ink, "markersize": 6, "markeredgecolor": palette.paper}
        axes.plot(curve.best, curve.best_lp_mm, "o", clip_on=False, zorder=5, **dot)
        marks.append(("sharpest", curve.best, curve.best_lp_mm))
    tight = apart < 2 * AWAY and curve.best_lp_mm - curve.now_lp_mm < 0.12 * axes.get_ylim()[1]
    for said, at, height in marks:
        here = int(np.argmin(np.abs(np.log(x / at))))
        rises = y[min(here + 1, len(x) - 1)] > 1.002 * y[max(here - 1, 0)]
        left, below = _share(curve, at) < (0.25 if rises else 0.72), said == "now" and len(marks) > 1 and tight
        gap = f"{three(0.5 / height)} mm" if height > 0 else "nothing"
        axes.annotate(f"{said} {gap}", (at, height), (5 if left else -5, -7 if below else 6), textcoords="offset points",
                      va="top" if below else "bottom", ha="left" if left else "right", color=palette.ink, fontsize=SMALL,
                      weight="bold" if said == "now" else "normal")  # fmt: skip


def _few_pixels(axes: Axes, curve: Sharpness, palette: Palette) -> None:
    """A bar along the foot where the camera has too few pixels a pitch."""
    few = curve.few_pixels
    if few.any():
        low, high = curve.value[few][[0, -1]]
        axes.axvspan(low, high, 0, 0.02, color=palette.soft, linewidth=0)
        axes.annotate("pixels beat with cores", (low, 0), (3, 6), textcoords="offset points", color=palette.soft,
                      fontsize=SMALL)  # fmt: skip


def _cores(axes: Axes, curve: Sharpness, palette: Palette) -> None:
    """A second scale above: how many cores."""
    cores = curve.core_count
    counts = round_places(float(cores.min()), float(cores.max()), 6)
    places = np.exp(np.interp(np.log(counts), np.log(cores[::-1]), np.log(curve.value[::-1])))
    look = {"textcoords": "offset points", "color": palette.soft, "fontsize": SMALL}
    for place, count in zip(places, counts):
        if _share(curve, place) < 0.08:  # the word stands there
            continue
        axes.annotate(f"{count:,.0f}", (place, 1), (0, 4), xycoords=("data", "axes fraction"), ha="center", **look)
        axes.plot([place, place], [1, 1.02], transform=axes.get_xaxis_transform(), color=palette.soft, linewidth=THIN,
                  clip_on=False)  # fmt: skip
    axes.annotate("cores", (0, 1), (-6, 4), xycoords="axes fraction", ha="right", **look)


def what_it_says(curve: Sharpness) -> str:
    """One line on a curve: where going on stops helping, and what takes over."""
    name, _, more, written = NAMES[curve.path]
    best, enough = (written.format(three(float(f"{value:.2g}"))) for value in (curve.best, curve.enough))
    y, part = curve.resolved_lp_mm, CALLED.get(curve.because or "", curve.because)
    if curve.best_lp_mm <= 0:
        return f"Nothing is resolved at any {name}" if curve.toward < 0 else "Nothing is resolved in any of this light"
    if y.min() >= FLAT * curve.best_lp_mm:
        return f"It hardly matters here: {part} limits"
    if y[0 if curve.toward < 0 else -1] < FLAT * curve.best_lp_mm:
        return f"{more} stops being sharper near {best}: {part} takes over"
    if curve.toward > 0 and part == "light":
        return f"{more} is sharper still beyond {best}"
    return f"{more} than {enough} gains little: {part} limits"


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
