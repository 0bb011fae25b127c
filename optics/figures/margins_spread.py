"""Picture of the margins: how one headline number spreads against its limit."""

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from optics.figures.canvas import chart, three, width_of
from optics.figures.margins import percent
from optics.figures.palette import LIGHT, LINE, SMALL, TEXT, THIN, Palette
from optics.needs import AT_MOST

SMALL_WIDTH_IN, SMALL_HEIGHT_IN, SIDE_IN = 3.2, 1.62, 0.12
BINS = 24
BACK = ("smallest_gap_mm", "smallest_line_mm", "field_of_view_deg", "frame_hz", "resolved_lp_mm")
BODY = ("outer_diameter_mm", "bend_radius_mm", "rigid_tip_mm")


def spread(
    name: str,
    title: str,
    samples: np.ndarray,
    nominal: float | None,
    wanted: float | None,
    aged: np.ndarray | None = None,
    *,
    palette: Palette = LIGHT,
    width_in: float = SMALL_WIDTH_IN,
) -> Figure:
    """A histogram of one headline number: what lies beyond the need's limit is shaded, the nominal value is marked.

    Samples without the number (nothing resolved) count as beyond. A limit far off is told by an arrow.
    """
    figure, axes = chart(width_in, SMALL_HEIGHT_IN, palette, left=SIDE_IN, right=SIDE_IN, bottom=0.42, top=0.34)
    there = samples[~np.isnan(samples)]
    old = None if aged is None else aged[~np.isnan(aged)]
    low, high = _ends(there, old, nominal, wanted)
    edges = np.linspace(low, high, BINS + 1)
    counts = np.histogram(there, edges)[0]
    shown = max(counts.max(initial=1), 1)
    color = palette.back if name in BACK else palette.soft if name in BODY else palette.light
    axes.stairs(counts, edges, fill=True, color=color, linewidth=0)
    if wanted is not None:
        _beyond(axes, palette, name, edges, counts, wanted)
    if old is not None and old.size:
        worn = np.histogram(old, edges)[0]
        shown = max(shown, worn.max())
        axes.stairs(worn, edges, color=palette.ink, linewidth=THIN * 1.4)
    axes.set(xlim=(low, high), ylim=(0, (1.12 if wanted is None else 1.3) * shown), yticks=[])
    axes.spines["left"].set_visible(False)
    if nominal is not None:
        axes.plot(nominal, 0.0, marker="^", markersize=6, color=palette.ink, clip_on=False, zorder=5)
    if wanted is not None:
        _limit(axes, palette, name, wanted, low, high)
    _ticks(axes, low, high, width_in)
    axes.set_title(title, loc="left", color=palette.ink, fontsize=TEXT, pad=5)
    _status(axes, palette, name, samples, wanted, width_in - 2 * SIDE_IN - width_of(title, TEXT))
    return figure


def _ends(
    there: np.ndarray, old: np.ndarray | None, nominal: float | None, wanted: float | None
) -> tuple[float, float]:
    """The scale: nearly all samples, the nominal value, and the limit where it is near."""
    parts = [part for part in (there, old) if part is not None and part.size]
    if not parts:
        parts = [np.array([value for value in (nominal, wanted) if value is not None] or [0.0])]
    low = min(float(np.quantile(part, 0.002)) for part in parts)
    high = max(float(np.quantile(part, 0.998)) for part in parts)
    if nominal is not None:
        low, high = min(low, nominal), max(high, nominal)
    span = max(high - low, 1e-3 * max(abs(high), abs(low), 1e-9))
    if wanted is not None and low - 0.6 * span < wanted < high + 0.6 * span:
        low, high = min(low, wanted), max(high, wanted)
    return low - 0.04 * span, high + 0.04 * span


def _beyond(axes: Axes, palette: Palette, name: str, edges: np.ndarray, counts: np.ndarray, wanted: float) -> None:
    """The part of the histogram on the wrong side of the limit, its cut bin too."""
    wrong = (wanted, edges[-1]) if name in AT_MOST else (edges[0], wanted)
    for start, end, count in zip(edges, edges[1:], counts):
        first, last = max(start, wrong[0]), min(end, wrong[1])
        if count and last > first:
            axes.fill([first, last, last, first], [0, 0, count, count], facecolor=palette.accent,
                      edgecolor=palette.paper, hatch="////", linewidth=0)  # fmt: skip


def _limit(axes: Axes, palette: Palette, name: str, wanted: float, low: float, high: float) -> None:
    said = f"{'≤' if name in AT_MOST else '≥'} {three(wanted)}"
    top = axes.get_ylim()[1]
    if low <= wanted <= high:
        axes.axvline(wanted, color=palette.ink, linewidth=LINE * 0.8, linestyle=(0, (4, 2)))
        right = wanted < (low + high) / 2
        x = wanted + (0.015 if right else -0.015) * (high - low)
    else:
        right = wanted < low
        said = f"← {said}" if right else f"{said} →"
        x = low if right else high
    box = {"facecolor": palette.paper, "edgecolor": "none", "pad": 1.0, "alpha": 0.75}
    axes.text(
        x, 0.99 * top, said, ha="left" if right else "right", va="top", color=palette.ink, fontsize=SMALL, bbox=box
    )


def _ticks(axes: Axes, low: float, high: float, width_in: float) -> None:
    """Round places, as many as keep their words apart."""
    from matplotlib.ticker import MaxNLocator

    scale = (width_in - 2 * SIDE_IN) / (high - low)
    for most in (5, 4, 3, 2, 1):
        places = MaxNLocator(most, steps=[1, 2, 2.5, 5, 10]).tick_values(low, high)
        step = places[1] - places[0]
        digits = max(0, -int(np.floor(np.log10(step) + 1e-9))) + (1 if f"{step:.1e}".startswith("2.5") else 0)
        names = {place: f"{place:,.{digits}f}" for place in places.tolist()}
        fits = {
            place: text
            for place, text in names.items()
            if width_of(text, SMALL) / 2 <= SIDE_IN + min(place - low, high - place) * scale and low <= place <= high
        }
        if all(width_of(text, SMALL) + 0.1 < step * scale for text in names.values()) and fits:
            break
    axes.set_xticks(list(fits), list(fits.values()))


def _status(axes: Axes, palette: Palette, name: str, samples: np.ndarray, wanted: float | None, room_in: float) -> None:
    """On the right: the share beyond the limit, or where nine in ten lie."""
    none = float(np.isnan(samples).mean())
    if wanted is not None:
        good = samples <= wanted if name in AT_MOST else samples >= wanted
        share = float(1 - good.mean())
        long = width_of(f"✗ {percent(share)} beyond", SMALL, True) + 0.12 > room_in
        said = f"✗ {percent(share)}{'' if long else ' beyond'}" if share else "✓ all within"
        look = {"color": palette.accent, "weight": "bold"} if share else {"color": palette.ink}
    else:
        ends = np.quantile(samples[~np.isnan(samples)], (0.05, 0.95)) if none < 1 else ()
        said = f"90 %: {' – '.join(three(float(end)) for end in ends)}" if none < 0.05 else f"{percent(none)} without"
        look = {"color": palette.soft}
    if width_of(said, SMALL, "weight" in look) + 0.12 < room_in:
        axes.set_title(said, loc="right", fontsize=SMALL, pad=5, **look)
    else:  # a long title: one line lower
        axes.set_ylim(top=1.3 * axes.get_ylim()[1])
        axes.text(1.0, 0.99, said, ha="right", va="top", fontsize=SMALL, transform=axes.transAxes, **look)
