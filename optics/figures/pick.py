"""Pictures of a search: the picks by detail and light, and what the other candidates fail first."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.colors import to_hex, to_rgb
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from optics.figures.canvas import chart, three, width_of, wrapped
from optics.figures.palette import LIGHT, SMALL, TEXT, THIN, WIDTH_IN, Palette

SMALLEST_PT, LARGEST_PT = 6.0, 15.0  # dots of the thinnest and the thickest tube
SHADES = (0.08, 0.3, 0.52, 0.76, 1.0)  # of cost classes 1 to 5, from paper to ink
DASHED = (0, (4, 2))
ROW_IN, MOST_LEFT_IN = 0.34, 2.2


@dataclass(frozen=True, slots=True)
class Dot:
    """One candidate; nan where it has no such number. `number` is its row in the table, 0 for the design as it stands."""

    number: int
    light: float
    gap_mm: float
    outer_diameter_mm: float
    cost_class: int


@dataclass(frozen=True, slots=True)
class Front:
    """The picks, the other candidates that do the job as points (light, gap), and what is asked; nan where it is not.

    `told`: numbers of the picks that are named beside their dots.
    """

    picks: tuple[Dot, ...]
    others: np.ndarray
    now: Dot | None
    wanted_light: float
    wanted_gap_mm: float
    light_label: str
    told: tuple[int, ...]


def front(view: Front, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """Smallest gap over light, finer upward: size is the outer diameter, shade the cost class.

    Without an image the outer diameter stands in for the gap; without a body the cost class.
    """
    figure, axes = chart(width_in, 4.1, palette, left=0.74, right=0.24, bottom=0.52, top=0.86)
    read, label, log = _upward(view)
    every = [
        dot for dot in (*view.picks, *([view.now] if view.now else [])) if np.isfinite(dot.light) and dot.light > 0
    ]
    _scales(axes, view, [(dot.light, read(dot)) for dot in every], log)
    axes.set(xlabel=view.light_label, ylabel=label)
    if log and len(view.others):
        axes.plot(*view.others.T, "o", color=palette.soft, markersize=2.2, markeredgewidth=0, alpha=0.35, zorder=1)
    _wanted(axes, palette, view, log)
    low, high = _range(view)
    for dot in sorted(view.picks, key=lambda dot: -dot.outer_diameter_mm):
        axes.plot(dot.light, read(dot), "o", markersize=_size(dot, low, high), color=shade(dot.cost_class, palette),
                  markeredgecolor=palette.ink, markeredgewidth=THIN, alpha=0.92, zorder=3)  # fmt: skip
    for dot in view.picks:
        if dot.number in view.told:
            far = _size(dot, low, high) / 2 + 1
            axes.annotate(
                str(dot.number), (dot.light, read(dot)), (far * 0.7, far * 0.7), textcoords="offset points", color=palette.ink,
                fontsize=SMALL, weight="bold", ha="left", va="bottom", zorder=5,
            )  # fmt: skip
    if view.now is not None and np.isfinite(read(view.now)) and view.now.light > 0:
        axes.plot(view.now.light, read(view.now), "D", markersize=8, color="none", markeredgecolor=palette.accent,
                  markeredgewidth=1.8, zorder=4)  # fmt: skip
    _key(figure, palette, view, low, high)
    return figure


def shade(cost_class: int, palette: Palette) -> str:
    """The fill of a cost class, even steps from paper to the color of the way back."""
    part = SHADES[cost_class - 1]
    mixed = [(1 - part) * paper + part * full for paper, full in zip(to_rgb(palette.paper), to_rgb(palette.back))]
    return to_hex(mixed)


def _upward(view: Front):
    """(what is read of a dot, its label, whether it is the gap)."""
    if any(np.isfinite(dot.gap_mm) for dot in view.picks):
        return (lambda dot: dot.gap_mm), "smallest gap, mm (finer upward)", True
    if any(np.isfinite(dot.outer_diameter_mm) for dot in view.picks):
        return (lambda dot: dot.outer_diameter_mm), "outer diameter, mm (thinner upward)", False
    return (lambda dot: float(dot.cost_class)), "cost class (cheaper upward)", False


def _scales(axes: Axes, view: Front, points: list[tuple[float, float]], log: bool) -> None:
    x = [light for light, _ in points] + [view.wanted_light]
    y = [up for _, up in points] + ([view.wanted_gap_mm] if log else [])
    if log and len(view.others):
        x, y = [*x, *view.others[:, 0]], [*y, *view.others[:, 1]]
    axes.set_xscale("log")
    _set(axes.set_xlim, axes.set_xticks, x, 1.35, False)
    if log:
        axes.set_yscale("log")
        _set(axes.set_ylim, axes.set_yticks, y, 1.3, True)
        return
    low, high = np.nanmin(y), np.nanmax(y)
    room = 0.12 * (high - low) or 0.5
    axes.set_ylim(high + room, low - room)


def _set(limits, ticks, values: list[float], room: float, downward: bool) -> None:
    """Limits around values on a logarithmic scale, and ticks at round places."""
    some = np.array([value for value in values if np.isfinite(value) and value > 0] or [1.0])
    low, high = some.min() / room, some.max() * room
    limits((high, low) if downward else (low, high))
    for steps in ((1.0, 1.5, 2.0, 3.0, 5.0, 7.0), (1.0, 2.0, 5.0), (1.0, 3.0), (1.0,)):
        places = [step * 10.0**power for power in range(-7, 9) for step in steps if low <= step * 10.0**power <= high]
        if len(places) <= 6:
            break
    ticks(places, [three(place) for place in places])
    ticks([], minor=True)


def _wanted(axes: Axes, palette: Palette, view: Front, log: bool) -> None:
    look = {"color": palette.ink, "linewidth": THIN, "linestyle": DASHED, "zorder": 2}
    if np.isfinite(view.wanted_light):
        axes.axvline(view.wanted_light, **look)
    if log and np.isfinite(view.wanted_gap_mm):
        axes.axhline(view.wanted_gap_mm, **look)


def _range(view: Front) -> tuple[float, float]:
    outer = [dot.outer_diameter_mm for dot in view.picks if np.isfinite(dot.outer_diameter_mm)]
    return (min(outer), max(outer)) if outer else (np.nan, np.nan)


def _size(dot: Dot, low: float, high: float) -> float:
    if not np.isfinite(dot.outer_diameter_mm) or high <= low:
        return (SMALLEST_PT + LARGEST_PT) / 2
    return float(np.interp(dot.outer_diameter_mm, (low, high), (SMALLEST_PT, LARGEST_PT)))


def _key(figure: Figure, palette: Palette, view: Front, low: float, high: float) -> None:
    """What size, shade, diamond and dashes mean."""
    width, height = figure.get_size_inches()

    def line(place: float, entries: list[tuple[dict, str]]) -> None:
        x = 0.14
        for look, said in entries:
            if look:
                figure.add_artist(
                    Line2D([(x + 0.06) / width], [1 - place / height], linestyle="none", **{"marker": "o", **look})
                )
                x += 0.2
            figure.text(x / width, 1 - place / height, said, color=palette.ink if look else palette.soft, fontsize=SMALL,
                        va="center_baseline")  # fmt: skip
            x += width_of(said, SMALL) + 0.14

    edge = {"markeredgecolor": palette.ink, "markeredgewidth": THIN}
    classes = sorted({dot.cost_class for dot in view.picks})
    shades = [({"color": shade(each, palette), "markersize": 8, **edge}, str(each)) for each in classes]
    line(0.16, [({}, "cost class"), *shades, ({}, "(1 cheap, 5 dear)")] if shades else [])
    sizes = []
    if np.isfinite(low):
        sizes = [({"color": "none", "markersize": SMALLEST_PT, **edge}, f"{three(low)} mm")]
        sizes += [({"color": "none", "markersize": LARGEST_PT, **edge}, f"{three(high)} mm")] if high > low else []
        sizes = [({}, "tube"), *sizes]
    line(0.4, sizes)
    here = {"color": "none", "marker": "D", "markersize": 7, "markeredgecolor": palette.accent, "markeredgewidth": 1.6}
    marks = [(here, "as it stands")] if view.now is not None else []
    marks += [({}, "dashed: needed")] if np.isfinite(view.wanted_light) or np.isfinite(view.wanted_gap_mm) else []
    marks += [({}, "specks: others that do the job")] if len(view.others) else []
    line(0.64, marks)


def failing(counts: Mapping[str, int], *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """What the candidates fail first, in the order of the light: bars of how many, the longest one in the accent."""
    names = {name: wrapped(name, TEXT, MOST_LEFT_IN) for name in counts}
    left = 0.3 + max(width_of(name, TEXT, True) for name in names.values())
    lines = max(name.count("\n") + 1 for name in names.values())
    figure, axes = chart(
        width_in,
        ROW_IN * (1 + 0.35 * (lines - 1)) * len(counts) + 0.24,
        palette,
        left=left,
        right=0.7,
        bottom=0.1,
        top=0.1,
    )
    most = max(counts.values())
    for place, (name, count) in enumerate(counts.items()):
        worst = count == most
        axes.barh(place, count, height=0.56, color=palette.accent if worst else palette.back, linewidth=0)
        axes.text(-0.02 * most, place, names[name], ha="right", va="center", fontsize=TEXT, color=palette.ink,
                  linespacing=1.05, weight="bold" if worst else "normal")  # fmt: skip
        axes.text(count + 0.02 * most, place, f"{count:,}", va="center_baseline", fontsize=TEXT, color=palette.ink)
    axes.set(xlim=(0, most), ylim=(len(counts) - 0.5, -0.5), xticks=[], yticks=[])
    for spine in axes.spines.values():
        spine.set_visible(False)
    return figure
