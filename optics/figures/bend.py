"""The picture of the bends: what one takes over its radius, the pessimist's bound, and where the fiber is strained too far."""

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from optics.figures.canvas import chart, three, width_of
from optics.figures.palette import LIGHT, LINE, SMALL, THIN, WIDTH_IN, Palette
from optics.report.view_bend import BendView

LEAST_DB, MOST_DB = 1.0, 10.0  # of the loss that is shown
DASHED, DOTTED = (0, (4, 2)), (0, (1, 2))


def bend_loss(view: BendView, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """Loss of one bend over its radius: the kernel, the mode-count law as the pessimist's bound, the design's own bends."""
    figure, axes = chart(width_in, 3.3, palette, left=0.66, right=0.2, bottom=0.52, top=0.52)
    x, top = view.radius_mm, _top_db(view)
    axes.set(
        xscale="log",
        xlim=(x[0], x[-1]),
        ylim=(-0.02 * top, top),
        xlabel="bend radius, mm",
        ylabel="loss of one bend, dB",
    )
    axes.axvspan(x[0], view.breaking_radius_mm, color=palette.accent, alpha=0.13, linewidth=0)
    axes.axvline(view.breaking_radius_mm, color=palette.accent, linewidth=THIN * 1.5)
    _strained(axes, palette, view, top, width_in - 0.86)
    axes.plot(x, np.minimum(view.bound_db, 1e3), color=palette.soft, linewidth=LINE, linestyle=DASHED)
    loss = np.minimum(view.loss_db, 1e3)
    axes.plot(x, np.where(view.tested, loss, np.nan), color=palette.light, linewidth=1.4 * LINE)
    axes.plot(x, np.where(view.tested, np.nan, loss), color=palette.light, linewidth=1.4 * LINE, linestyle=DOTTED)
    for bend in view.own:
        axes.plot(bend.radius_mm, min(bend.loss_db, top), "o", color=palette.ink, markersize=6, clip_on=False, zorder=4)
    places = [p * s for p in (0.1, 1.0, 10.0, 100.0, 1000.0) for s in (1, 2, 5) if x[0] <= p * s <= x[-1]]
    places = places if len(places) <= 9 else [place for place in places if f"{place:g}"[0] in "15"]
    axes.set_xticks(places, [three(place) for place in places])
    axes.set_xticks([], minor=True)
    _own_names(axes, palette, view, top)
    _bend_key(figure, palette, view)
    return figure


def _strained(axes: Axes, palette: Palette, view: BendView, top: float, room: float) -> None:
    """What the shaded part means, inside it where it is wide enough."""
    said = f"strained too far below {three(view.breaking_radius_mm)} mm"
    low, high = np.log(view.radius_mm[[0, -1]])
    fits = (np.log(view.breaking_radius_mm) - low) / (high - low) * room > width_of(said, SMALL, True) + 0.1
    axes.annotate(
        said if fits else said.replace("below", "left of"),
        (view.breaking_radius_mm, 0.97 * top),
        (-4 if fits else 4, 0),
        textcoords="offset points",
        color=palette.accent,
        fontsize=SMALL,
        weight="bold",
        ha="right" if fits else "left",
        va="top",
        bbox={"facecolor": palette.paper, "edgecolor": "none", "pad": 1.0, "alpha": 0.75},
        zorder=5,
    )


def _top_db(view: BendView) -> float:
    """Where the scale of the loss ends: the design's bends and the least lasting radius well inside."""
    at_limit = float(np.interp(view.breaking_radius_mm, view.radius_mm, np.minimum(view.loss_db, 1e3)))
    return float(np.clip(1.6 * max([at_limit, *(bend.loss_db for bend in view.own)]), LEAST_DB, MOST_DB))


def _own_names(axes: Axes, palette: Palette, view: BendView, top: float) -> None:
    """The design's bends in words: one beside its dot, several as a list in the corner that the curves leave free."""
    box = {"facecolor": palette.paper, "edgecolor": "none", "pad": 1.0, "alpha": 0.8}
    look = {"textcoords": "offset points", "color": palette.ink, "fontsize": SMALL, "linespacing": 1.15, "bbox": box}
    said = [
        f"{f'{bend.repeats_count} × ' if bend.repeats_count > 1 else ''}{three(bend.angle_deg)}° at {three(bend.radius_mm)} mm"
        for bend in view.own
    ]
    if len(view.own) == 1:
        bend, (low, high) = view.own[0], np.log(view.radius_mm[[0, -1]])
        far = (np.log(bend.radius_mm) - low) / (high - low) > 0.72
        at = (bend.radius_mm, min(bend.loss_db, top))
        line = {"arrowstyle": "-", "color": palette.ink, "linewidth": THIN, "shrinkB": 4}
        each = f"{said[0]}\n{decibels(bend.loss_db)}{' each' if bend.repeats_count > 1 else ''}"
        axes.annotate(each, at, (0, 14), ha="right" if far else "left", va="bottom", arrowprops=line, **look)
    elif said:
        lines = [f"{text}: {decibels(bend.loss_db)}" for text, bend in zip(said, view.own)]
        at = (view.radius_mm[-1], 0.87 * top)
        axes.annotate("\n".join(lines), at, (-2, 0), ha="right", va="top", **look)


def decibels(loss_db: float) -> str:
    """A loss in words; below what matters it is none.

    >>> decibels(0.0778), decibels(4e-15), decibels(float("inf"))
    ('0.078 dB', 'under 0.001 dB', 'all lost')
    """
    if not np.isfinite(loss_db):
        return "all lost"
    return "under 0.001 dB" if loss_db < 1e-3 else f"{loss_db:.2g} dB"


def _bend_key(figure: Figure, palette: Palette, view: BendView) -> None:
    width, high = figure.get_size_inches()
    fibers = f"{three(view.bend_deg)}°, fiber NA {three(view.fiber_na)} filled to NA {three(view.launch_na)}"
    figure.text(0.12 / width, 1 - 0.34 / high, fibers, color=palette.soft, fontsize=SMALL, va="center")
    x, y = 0.12, 1 - 0.15 / high
    for said, color, style in (
        ("rays", palette.light, "solid"),
        ("mode count, the pessimist's bound", palette.soft, DASHED),
    ):
        figure.add_artist(Line2D([x / width, (x + 0.24) / width], [y, y], color=color, linestyle=style, linewidth=LINE))
        figure.text((x + 0.3) / width, y, said, color=palette.ink, fontsize=SMALL, va="center")
        x += 0.48 + width_of(said, SMALL)
    figure.text(x / width, y, "● this design", color=palette.ink, fontsize=SMALL, va="center")
