"""Pictures of a comparison: designs over length or bend radius with their crossings, and the tube shared out."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

from optics.figures.canvas import chart, panel, spread, three, width_of
from optics.figures.palette import LIGHT, LINE, SMALL, TEXT, THIN, WIDTH_IN, Palette

STYLES = ("solid", (0, (5, 2)), (0, (1, 1.3)), (0, (5, 2, 1, 2)))  # of the designs, so that grey print tells them apart
SMALL_IN, NAME_IN = 3.0, 0.15  # inches: height of a small chart, between names
PANEL, GAP, TOP, FOOT, LEFT, RIGHT = 1.5, 0.44, 0.58, 0.5, 0.78, 0.24
LOG_FROM = 8.0  # ratio of the numbers from which on a scale is logarithmic


@dataclass(frozen=True, slots=True)
class Along:
    """One number of several designs along a path; nan where there is none. `crossings`: (place, value) of each."""

    title: str
    along: str
    places: np.ndarray
    names: tuple[str, ...]
    values: np.ndarray
    now: tuple[float, ...]
    crossings: tuple[tuple[float, float], ...]


def along(view: Along, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """The designs along the path: each by its own color and dash, a dot where it stands, a ring where two cross."""
    right = 0.3 + max(width_of(name, SMALL) for name in view.names)
    right = min(right, 0.36 * width_in)
    figure, axes = chart(width_in, SMALL_IN, palette, left=0.74, right=right, bottom=0.52, top=0.42)
    axes.set(xscale="log", xlim=(view.places[0], view.places[-1]), xlabel=view.along)
    axes.set_title(view.title, loc="left", color=palette.ink, fontsize=TEXT, pad=8)
    _upright(axes, view.values, [])
    _round_ticks(axes.set_xticks, view.places[0], view.places[-1], 6)
    ends = []
    for row, name in enumerate(view.names):
        color, values = palette.series[row], view.values[row]
        axes.plot(view.places, values, color=color, linewidth=LINE, linestyle=STYLES[row])
        known = np.flatnonzero(np.isfinite(values) & (values > 0))
        if known.size and np.isfinite(view.now[row]):
            at = np.exp(np.interp(np.log(view.now[row]), np.log(view.places[known]), np.log(values[known])))
            axes.plot(view.now[row], at, "o", color=color, markersize=6, zorder=4)
        if known.size:
            ends.append((float(values[known[-1]]), name, color))
    for place, value in view.crossings:
        axes.plot(
            place,
            value,
            "o",
            markersize=11,
            color="none",
            markeredgecolor=palette.accent,
            markeredgewidth=1.6,
            zorder=5,
        )
    _end_names(axes, ends, SMALL_IN - 0.94)
    return figure


def _end_names(axes: Axes, ends: list[tuple[float, str, str]], height_in: float) -> None:
    """Each design's name at the right end of its line, apart where they crowd."""
    shares = [axes.transAxes.inverted().transform(axes.transData.transform((1.0, value)))[1] for value, _, _ in ends]
    placed = spread([share * height_in for share in shares], NAME_IN, 0.0, height_in)
    for (_, name, color), share, at in zip(ends, shares, placed):
        axes.annotate(
            name, (1.0, share), (1.03, at / height_in), xycoords="axes fraction", textcoords="axes fraction", color=color,
            fontsize=SMALL, weight="bold", va="center_baseline", annotation_clip=False,
        )  # fmt: skip


def _upright(axes: Axes, values: np.ndarray, more: Sequence[float]) -> None:
    """The scale of the numbers: logarithmic where they span much."""
    some = np.concatenate([values[np.isfinite(values) & (values > 0)], np.asarray(more, float)])
    if not some.size:
        axes.set(yticks=[])
        return
    low, high = float(some.min()), float(some.max())
    if high > LOG_FROM * low:
        low = max(low / 1.3, high / 1e5)
        axes.set(yscale="log", ylim=(low, high * 1.3))
        _round_ticks(axes.set_yticks, low, high * 1.3, 5)
        return
    room = 0.1 * (high - low) or 0.1 * high
    axes.set_ylim(low - room, high + room)
    axes.yaxis.set_major_formatter(lambda value, _: three(value))
    axes.locator_params(axis="y", nbins=5)


def _round_ticks(ticks, low: float, high: float, most: int) -> None:
    for steps in ((1.0, 2.0, 5.0), (1.0, 3.0), (1.0,)):
        places = [step * 10.0**power for power in range(-7, 9) for step in steps if low <= step * 10.0**power <= high]
        if len(places) <= most:
            break
    places = places[:: -(-len(places) // most)] if places else places
    ticks(places, [three(place) for place in places])
    ticks([], minor=True)


# The tube shared out


@dataclass(frozen=True, slots=True)
class Shared:
    """Smallest gap and light over the image's share of the tube [share]; nan where nothing is resolved or asked."""

    share: np.ndarray
    gap_mm: np.ndarray
    center_lux: np.ndarray
    fits: np.ndarray
    best: tuple[float, float, float] | None  # share, gap, light
    flat: tuple[float, float] | None
    now: tuple[float, float, float]
    wanted_gap_mm: float
    wanted_lux: float


def shared(view: Shared, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """The two curves over one scale of shares: shaded where the gap is as good as the best, dashed what is needed."""
    high = TOP + 2 * PANEL + GAP + FOOT
    figure = Figure(figsize=(width_in, high), facecolor=palette.paper)
    FigureCanvasAgg(figure)
    rows = (
        ("smallest gap, mm", view.gap_mm, view.wanted_gap_mm, 1, palette.back, True),
        ("light at the center of the target, lx", view.center_lux, view.wanted_lux, 2, palette.light, False),
    )
    for place, (title, values, wanted, which, color, below) in enumerate(rows):
        top = TOP + place * (PANEL + GAP)
        axes = panel(figure, palette, left=LEFT, right=RIGHT, top=top, bottom=high - top - PANEL)
        axes.set_title(title, loc="left", color=palette.ink, fontsize=TEXT, pad=5)
        now, best = view.now[which], view.best[which] if view.best else np.nan
        _upright(axes, values, [each for each in (wanted, now, best) if np.isfinite(each) and each > 0])
        axes.set_xlim(0, 100)
        if view.flat:
            axes.axvspan(100 * view.flat[0], 100 * view.flat[1], color=palette.ghost, linewidth=0)
        if np.isfinite(wanted):
            axes.axhline(wanted, color=palette.ink, linewidth=THIN, linestyle=(0, (4, 2)))
        met = values <= wanted if below else values >= wanted
        met = met | ~np.isfinite(wanted)
        axes.plot(100 * view.share, values, color=color, linewidth=LINE, alpha=0.45)
        axes.plot(100 * view.share, np.where(met, values, np.nan), color=color, linewidth=1.7 * LINE)
        if view.best:
            axes.plot(100 * view.best[0], best, "o", color=color, markeredgecolor=palette.ink, markersize=8, zorder=4,
                      clip_on=False)  # fmt: skip
        if np.isfinite(now):
            axes.plot(100 * view.now[0], now, "D", color="none", markeredgecolor=palette.accent, markeredgewidth=1.8,
                      markersize=8, zorder=5, clip_on=False)  # fmt: skip
        axes.tick_params(labelbottom=place == 1)
    axes.set_xlabel("share of the image in what fibers may take, %")
    _shared_key(figure, palette, view, width_in, high)
    return figure


def _shared_key(figure: Figure, palette: Palette, view: Shared, width_in: float, high: float) -> None:
    said = [("◇ as it stands", palette.accent)]
    said += [("● finest", palette.ink), ("shaded: within 5 % of it", palette.soft)] if view.best else []
    if np.isfinite(view.wanted_gap_mm) or np.isfinite(view.wanted_lux):
        said.append(("dashed: needed", palette.soft))
    x = 0.12
    for text, color in said:
        figure.text(x / width_in, 1 - 0.16 / high, text, color=color, fontsize=SMALL, va="center")
        x += width_of(text, SMALL) + 0.16
