"""Pictures of the margins: how often each need is met, how one number spreads against its limit, what moves it."""

from collections.abc import Mapping

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from optics.figures.canvas import chart, three, width_of
from optics.figures.palette import LIGHT, LINE, SMALL, TEXT, THIN, WIDTH_IN, Palette
from optics.needs import AT_MOST
from optics.study.margins_answer import Causes, Condition, Driver

NEED_ROW, CAUSE_ROW, CAUSE_LEFT_IN = 0.42, 0.46, 2.3  # inches: a row, and the room for names
SHOWN_SHARE, MOST_CAUSES = 0.005, 6  # causes below, or beyond that many, stand together
SMALL_WIDTH_IN, SMALL_HEIGHT_IN, SIDE_IN = 3.2, 1.62, 0.12
BINS = 24
BACK = ("smallest_gap_mm", "smallest_line_mm", "field_of_view_deg", "frame_hz", "resolved_lp_mm")
BODY = ("outer_diameter_mm", "bend_radius_mm", "rigid_tip_mm")
SOFT = ("assumed", "remembered")


# How often


def odds(
    new: Condition,
    aged: Condition | None,
    names: Mapping[str, str],
    *,
    palette: Palette = LIGHT,
    width_in: float = WIDTH_IN,
) -> Figure:
    """The share of the samples that meet all needs, and each: bars with their standard error, the aged ones thin below.

    `names`: each need with its limit, two lines.
    """
    lines = [("all needs\ntogether", new.all_needs, new.all_needs_standard_error, True, False)]
    least = min(need.probability for need in new.needs)
    for need in new.needs:
        worst = need.probability == least < 1
        lines.append((names[need.name], need.probability, need.standard_error, need.varies, worst))
    worn = [None] * len(lines)
    if aged is not None:
        worn = [aged.all_needs, *(need.probability for need in aged.needs)]
    left = 0.24 + max(width_of(text, TEXT if row == 0 else SMALL + 1) for row, (text, *_) in enumerate(lines))
    figure, axes = chart(
        width_in, NEED_ROW * len(lines) + 0.92, palette, left=left, right=1.12, bottom=0.52, top=0.4 if aged else 0.16
    )
    places = [row + (0.25 if row else 0.0) for row in range(len(lines))]
    for place, line, old in zip(places, lines, worn):
        _odds_row(axes, palette, place, line, old)
    axes.axhline(0.625, xmin=-left / (width_in - left - 1.12), color=palette.grid, linewidth=THIN, clip_on=False)
    axes.set(xlim=(0, 100), ylim=(places[-1] + 0.55, -0.55), yticks=[], xlabel="share of the samples that meet it, %")
    axes.spines["left"].set_visible(False)
    if aged is not None:
        figure.text(0.12 / width_in, 1 - 0.2 / figure.get_figheight(), "thick: new   thin: aged", color=palette.soft,
                    fontsize=SMALL, va="center")  # fmt: skip
    return figure


def _odds_row(axes: Axes, palette: Palette, place: float, line: tuple, old: float | None) -> None:
    text, share, error, varies, worst = line
    ink = palette.accent if worst else palette.ink
    high, y = (0.56, place) if old is None else (0.38, place - 0.11)
    axes.barh(y, 100, color=palette.ghost, height=high, linewidth=0)
    fill = palette.accent if worst else palette.back
    axes.barh(y, 100 * share, color=fill, height=high, linewidth=0, alpha=1.0 if varies else 0.45)
    if varies and 0 < share < 1:
        axes.plot([100 * (share - error), 100 * (share + error)], [y, y], color=palette.ink, linewidth=LINE)
    if old is not None:
        axes.barh(place + 0.24, 100, color=palette.ghost, height=0.2, linewidth=0)
        axes.barh(place + 0.24, 100 * old, color=palette.soft, height=0.2, linewidth=0)
    first, _, second = text.partition("\n")
    look = {"ha": "right", "weight": "bold" if worst or place == 0 else "normal", "color": ink}
    axes.text(-2, place - 0.17, first, va="center_baseline", fontsize=TEXT, **look)
    axes.text(-2, place + 0.21, second, va="center_baseline", fontsize=SMALL, **{**look, "weight": "normal",
              "color": ink if worst or place == 0 else palette.soft})  # fmt: skip
    told = percent(share, error) if varies else "always" if share == 1 else "never"
    said = {"color": ink if varies else palette.soft, "weight": look["weight"], "fontsize": TEXT}
    axes.text(103, y, told, va="center_baseline", **said)
    if old is not None:
        axes.text(103, place + 0.24, percent(old), color=palette.soft, fontsize=SMALL, va="center_baseline")


def percent(share: float, error: float | None = None) -> str:
    """A share in percent; never a round 100 or 0 that is not whole; its standard error where that can be read.

    >>> percent(0.51, 0.0112), percent(1.0, 0.0005), percent(0.99996), percent(0.912)
    ('51.0 ± 1.1 %', '100 %', '>99.9 %', '91.2 %')
    """
    percent = 100 * share
    if 99.9 < percent < 100 or 0 < percent < 0.1:
        return ">99.9 %" if percent > 50 else "<0.1 %"
    if percent in (0.0, 100.0):
        return f"{percent:.0f} %"
    return f"{percent:.1f} %" if error is None else f"{percent:.1f} ± {100 * error:.1f} %"


# How one number spreads


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
    if width_of(said, SMALL, True) + 0.12 < room_in:
        axes.set_title(said, loc="right", fontsize=SMALL, pad=5, **look)
    else:  # a long title: one line lower
        axes.set_ylim(top=1.3 * axes.get_ylim()[1])
        axes.text(1.0, 0.99, said, ha="right", va="top", fontsize=SMALL, transform=axes.transAxes, **look)


# What moves it


def causes(found: Causes, names: Mapping[str, str], *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """Shares of the variance of one number, largest first; hatched where the tolerance is only assumed or remembered."""
    shown = [item for item in found.drivers if item.share >= SHOWN_SHARE][:MOST_CAUSES]
    small = sum(item.share for item in found.drivers) - sum(item.share for item in shown)
    rest = [
        ("all others", small),
        ("several at once", found.together_share),
        ("not explained", found.unexplained_share),
    ]
    high = CAUSE_ROW * len(shown) + 0.3 * len(rest)
    figure, axes = chart(width_in, high + 1.0, palette, left=CAUSE_LEFT_IN, right=0.85, bottom=0.52, top=0.38)
    place = 0.0
    for item in shown:
        _driver(axes, palette, place + CAUSE_ROW / 2, item, names[item.path])
        place += CAUSE_ROW
    for said, share in rest:
        _rest(axes, palette, place + 0.15, said, share)
        place += 0.3
    axes.set(xlim=(0, 100), ylim=(place + 0.05, -0.05), yticks=[], xlabel="share of its variance, %")
    axes.spines["left"].set_visible(False)
    said = "≈ hatched: a tolerance only assumed or remembered"
    figure.text(
        0.12 / width_in, 1 - 0.18 / figure.get_figheight(), said, color=palette.soft, fontsize=SMALL, va="center"
    )
    return figure


def _driver(axes: Axes, palette: Palette, y: float, item: Driver, name: str) -> None:
    soft = item.basis in SOFT
    look = {"facecolor": palette.back, "linewidth": 0}
    if soft:
        look = {"facecolor": palette.paper, "edgecolor": palette.back, "hatch": "/////", "linewidth": THIN}
    axes.barh(y, 100 * item.share, height=0.26, **look)
    part, _, what = name.rpartition(", ")
    ends = f"{three(item.low)} … {three(item.high)}{' ≈' if soft else ''}"
    under = f"{part.lower()}, {ends}" if part else ends
    axes.text(-2, y - 0.085, what, ha="right", va="center_baseline", fontsize=TEXT, color=palette.ink)
    axes.text(-2, y + 0.105, under, ha="right", va="center_baseline", fontsize=SMALL, color=palette.soft)
    end = 100 * (item.share + item.standard_error)
    axes.plot([100 * (item.share - item.standard_error), end], [y, y], color=palette.ink, linewidth=LINE * 0.8)
    axes.text(end + 2, y, percent(item.share), va="center_baseline", fontsize=TEXT, color=palette.ink)


def _rest(axes: Axes, palette: Palette, y: float, said: str, share: float) -> None:
    axes.barh(y, 100 * share, height=0.16, color=palette.soft, linewidth=0)
    axes.text(-2, y, said, ha="right", va="center_baseline", fontsize=SMALL, color=palette.soft)
    axes.text(100 * share + 2, y, percent(share), va="center_baseline", fontsize=SMALL, color=palette.soft)
