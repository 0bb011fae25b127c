"""The picture of a bench: readings against the model before and after the fit, and below what is left."""

from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.ticker import MaxNLocator

from optics.figures.canvas import panel, three, width_of
from optics.figures.palette import LIGHT, LINE, SMALL, TEXT, THIN, WIDTH_IN, Palette

# Inches: heights of the two panels, between them, margins
HIGH, LOW, GAP, TOP, FOOT, LEFT, RIGHT = 2.35, 0.95, 0.3, 0.62, 0.52, 0.82, 0.2
VARIED = {
    "length_m": "length of the guide, m",
    "bend_radius_mm": "bend radius, mm",
    "distance_mm": "distance from the tip, mm",
}
MEASURED = {"power_mw": "power out of the tip, mW", "lux": "light at the center, lx"}
STEEP = 2.5  # readings that differ by more than this factor stand on a logarithmic scale
FAR = 6.0  # standard errors, beyond which a residual is shown at the edge


@dataclass(frozen=True, slots=True)
class Points:
    """Readings: where, what was read with its standard error, residual in standard errors, number, whether apart."""

    at: np.ndarray
    got: np.ndarray
    error: np.ndarray
    normalized: np.ndarray
    row: np.ndarray
    apart: np.ndarray


@dataclass(frozen=True, slots=True)
class Line:
    """The model over what was varied, before and after the fit; `said` tells lines apart where there are several."""

    at: np.ndarray
    before: np.ndarray
    after: np.ndarray
    said: str


@dataclass(frozen=True, slots=True)
class BenchView:
    """What the picture shows; `left_out`: (row, where, read) of readings that the fit does not use."""

    varied: str
    measured: str
    points: Points
    lines: tuple[Line, ...]
    left_out: tuple[tuple[int, float, float], ...]


def readings(view: BenchView, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """Readings with error bars, the design's own line dashed, the fitted one solid; residuals in standard errors below."""
    high = TOP + HIGH + GAP + LOW + FOOT
    figure = Figure(figsize=(width_in, high), facecolor=palette.paper)
    FigureCanvasAgg(figure)
    main = panel(figure, palette, left=LEFT, right=RIGHT, top=TOP, bottom=FOOT + LOW + GAP)
    below = panel(figure, palette, left=LEFT, right=RIGHT, top=TOP + HIGH + GAP, bottom=FOOT)
    _lines(main, palette, view)
    _points(main, palette, view)
    _scales(main, below, view)
    _residuals(below, palette, view)
    _key(figure, palette, view, width_in, high)
    return figure


def _lines(axes: Axes, palette: Palette, view: BenchView) -> None:
    for line in view.lines:
        axes.plot(line.at, line.before, color=palette.soft, linewidth=LINE * 0.8, linestyle=(0, (4, 2)))
        axes.plot(line.at, line.after, color=palette.back, linewidth=LINE)
        if line.said:
            axes.annotate(
                line.said, (line.at[0], line.after[0]), (4, 3), textcoords="offset points", color=palette.back,
                fontsize=SMALL,
            )  # fmt: skip


def _points(axes: Axes, palette: Palette, view: BenchView) -> None:
    found = view.points
    for chosen, color in ((~found.apart, palette.ink), (found.apart, palette.accent)):
        if chosen.any():
            axes.errorbar(
                found.at[chosen], found.got[chosen], found.error[chosen], fmt="o", markersize=4, color=color,
                elinewidth=THIN * 1.3, capsize=2, zorder=4,
            )  # fmt: skip
    for row, at, got in zip(found.row[found.apart], found.at[found.apart], found.got[found.apart]):
        _named(axes, palette, f"row {row}", at, got, palette.accent)
    for row, at, got in view.left_out:
        axes.plot(at, got, marker="x", markersize=6, color=palette.soft, linestyle="none", zorder=4)
        _named(axes, palette, f"row {row}, left out", at, got, palette.soft)


def _named(axes: Axes, palette: Palette, text: str, at: float, got: float, color: str) -> None:
    """A name beside a point, on the side where there is room."""
    axes.annotate(
        text, (at, got), (7, 6), textcoords="offset points", color=color, fontsize=SMALL, annotation_clip=False,
        bbox={"facecolor": palette.paper, "edgecolor": "none", "pad": 0.8, "alpha": 0.7}, zorder=5,
    )  # fmt: skip


def _scales(main: Axes, below: Axes, view: BenchView) -> None:
    """One scale of what was varied; readings that differ much on a logarithmic one."""
    some = np.concatenate([line.at for line in view.lines] + [view.points.at])
    low, high = float(some.min()), float(some.max())
    even = view.varied == "length_m"
    ends = (low - 0.03 * (high - low), high + 0.1 * (high - low)) if even else (low / 1.06, high * 1.18)
    for axes in (main, below):
        axes.set(xscale="linear" if even else "log", xlim=ends)
        if not even:
            places = round_places(*ends, 6)
            axes.set_xticks(places, [three(place) for place in places])
            axes.set_xticks([], minor=True)
    main.tick_params(labelbottom=False)
    below.set_xlabel(VARIED[view.varied])
    read = np.concatenate([view.points.got, [got for *_, got in view.left_out]])
    curves = np.concatenate([np.concatenate([line.before, line.after]) for line in view.lines] or [read])
    least, most = min(read.min(), curves.min()), max((read + 0).max(), curves.max())
    if least > 0 and most / least > STEEP:
        main.set(yscale="log", ylim=(least / 1.25, most * 1.25))
        places = round_places(least / 1.25, most * 1.25, 5)
        main.set_yticks(places, [three(place) for place in places])
        main.set_yticks([], minor=True)
    else:
        room = 0.12 * max(most - least, 0.05 * most)
        main.set_ylim(least - room, most + room)
        main.yaxis.set_major_locator(MaxNLocator(5))
        main.yaxis.set_major_formatter(lambda value, _: three(value))


def round_places(low: float, high: float, most: int) -> list[float]:
    """Round numbers on a logarithmic scale, as many as there is room for.

    >>> round_places(0.9, 60.0, 6)
    [1.0, 2.0, 5.0, 10.0, 20.0, 50.0]
    """
    for steps in ((1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0), (1.0, 2.0, 3.0, 5.0), (1.0, 2.0, 5.0), (1.0, 3.0), (1.0,)):
        places = [step * 10.0**power for power in range(-7, 10) for step in steps if low <= step * 10.0**power <= high]
        if len(places) <= most:
            return places
    return places[:: -(-len(places) // most)]


def _residuals(axes: Axes, palette: Palette, view: BenchView) -> None:
    found = view.points
    axes.axhspan(-2, 2, color=palette.ghost, linewidth=0)
    axes.axhline(0, color=palette.back, linewidth=THIN)
    most = min(max(3.0, 1.15 * float(np.abs(found.normalized).max())), FAR)
    for at, off, apart in zip(found.at, found.normalized, found.apart):
        color = palette.accent if apart else palette.ink
        shown, mark = (off, "o") if abs(off) <= FAR else (np.sign(off) * most * 0.93, "^" if off > 0 else "v")
        axes.plot([at, at], [0, shown], color=color, linewidth=THIN)
        axes.plot(at, shown, marker=mark, markersize=4, color=color, linestyle="none")
    axes.set(ylim=(-most, most), ylabel="residual")
    axes.set_yticks([-2, 0, 2])


def _key(figure: Figure, palette: Palette, view: BenchView, width_in: float, high: float) -> None:
    """How to read it, in two lines above."""
    figure.text(
        0.12 / width_in, 1 - 0.16 / high, MEASURED[view.measured], color=palette.ink, fontsize=TEXT, va="center"
    )
    x = 0.12
    for said, color, style in (
        ("before the fit", palette.soft, (0, (4, 2))),
        ("after it", palette.back, "solid"),
    ):
        axes = figure.axes[0]
        y = 1 - 0.4 / high
        line = axes.plot([x / width_in, (x + 0.28) / width_in], [y, y], color=color, linewidth=LINE, linestyle=style,
                         transform=figure.transFigure, clip_on=False)  # fmt: skip
        line[0].set_in_layout(False)
        figure.text((x + 0.34) / width_in, y, said, color=palette.soft, fontsize=SMALL, va="center")
        x += 0.34 + width_of(said, SMALL) + 0.2
    figure.text(
        x / width_in, 1 - 0.4 / high, "bars: ± 1 standard error", color=palette.soft, fontsize=SMALL, va="center"
    )
