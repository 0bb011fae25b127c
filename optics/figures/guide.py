"""Pictures of the guide: its cone on the way, the shift of its color, what its bends take over their radius."""

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from optics.figures.canvas import chart, round_length, three, width_of
from optics.figures.palette import LIGHT, LINE, SMALL, THIN, WIDTH_IN, Palette
from optics.report.view_guide import BendView, Color, ColorView, ConeView

NA_TICKS = (0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0)
DEGREES = (10, 20, 30, 40, 50, 60, 90)
LEAST_APART = 0.075  # of the axis, between two ticks
ISOTHERMS_K = (2000, 2500, 3000, 3500, 4000, 5000, 6500, 8000, 10000, 15000)
LEAST_DB, MOST_DB = 1.0, 10.0  # of the loss that is shown
DASHED, DOTTED = (0, (4, 2)), (0, (1, 2))


def cone(view: ConeView, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """Radiance over the angle, in bins even in sin^2, so that areas are lumens: launched, after the guide, as it leaves."""
    figure, axes = chart(width_in, 3.3, palette, left=0.66, right=0.2, bottom=0.52, top=0.92)
    _, inside, leaves = view.stages
    last = max(view.launch_na, view.fiber_na, _reach(inside.na, inside.radiance_ratio))
    end = min(1.06 * last**2, max(1.0, last**2))
    most = float(inside.radiance_ratio.max(initial=0.0))
    times = max(round_length(1.0 / most), 1.0) if most > 0 else 1.0
    axes.fill_between([0, view.launch_na**2], 1.0, color=palette.soft, alpha=0.14, linewidth=0)
    axes.plot([0, view.launch_na**2, view.launch_na**2], [1, 1, 0], color=palette.soft, linewidth=LINE)
    if view.launch_na > view.fiber_na * (1 + 1e-9):
        beyond = [view.fiber_na**2, view.launch_na**2]
        axes.fill_between(beyond, 1.0, facecolor="none", edgecolor=palette.accent, hatch="///", linewidth=0)
    axes.stairs(times * leaves.radiance_ratio, leaves.na**2, fill=True, color=palette.light, alpha=0.45, linewidth=0)
    axes.stairs(times * leaves.radiance_ratio, leaves.na**2, color=palette.light, linewidth=LINE, baseline=None)
    axes.stairs(
        times * inside.radiance_ratio,
        inside.na**2,
        color=palette.ink,
        linewidth=THIN * 1.5,
        linestyle=DASHED,
        baseline=None,
    )
    axes.set(
        xlim=(0, end),
        ylim=(0, 1.1),
        ylabel="radiance, launch = 1",
        xlabel="NA of the ray; even in sin², so areas are light",
    )
    _angles(axes, palette, end, view.outside_index)
    _cone_marks(axes, palette, view, (width_in - 0.86) / end)
    _cone_key(figure, palette, view, times)
    return figure


def _reach(na: np.ndarray, radiance: np.ndarray) -> float:
    """The widest NA that still holds light to speak of."""
    lit = np.flatnonzero(radiance > 0.005 * radiance.max(initial=0.0))
    return float(na[lit[-1] + 1]) if lit.size else 0.0


def _angles(axes: Axes, palette: Palette, end: float, index: float) -> None:
    """NA below, half-angles in front of the tip above, as many as there is room for."""
    shown: list[float] = []
    for na in NA_TICKS:
        if na**2 <= end and (not shown or (na**2 - shown[-1] ** 2) / end >= LEAST_APART):
            shown.append(na)
    axes.set_xticks([na**2 for na in shown], [three(na) for na in shown])
    axes.set_yticks([0, 0.5, 1.0], ["0", "0.5", "1"])
    above = axes.secondary_xaxis("top")
    places = {f"{angle}°": (index * np.sin(np.deg2rad(angle))) ** 2 for angle in DEGREES}
    places = {name: at for name, at in places.items() if at <= end}
    above.set_xticks(list(places.values()), list(places))
    above.tick_params(colors=palette.soft, labelsize=SMALL, width=THIN, length=3)
    above.spines["top"].set(color=palette.soft, linewidth=THIN)


def _cone_marks(axes: Axes, palette: Palette, view: ConeView, inch: float) -> None:
    """The cone that holds 95 % and the fiber's own, named along their lines; `inch`: inches for each unit of sin^2."""
    marks = [
        (view.exit_na, f"95 % within NA {three(view.exit_na)}", palette.ink, "solid"),
        (view.fiber_na, f"fiber NA {three(view.fiber_na)}", palette.soft, DOTTED),
    ]
    marks.sort()
    for (na, said, color, style), side in zip(marks, (-1, 1)):
        axes.axvline(na**2, color=color, linewidth=THIN * 1.5, linestyle=style)
        axes.text(
            na**2 + side * 0.09 / inch,
            0.06,
            said,
            color=color,
            fontsize=SMALL,
            rotation=90,
            ha="center",
            va="bottom",
            bbox={"facecolor": palette.paper, "edgecolor": "none", "pad": 0.8, "alpha": 0.7},
        )


def _cone_key(figure: Figure, palette: Palette, view: ConeView, times: float) -> None:
    """What each line is, with its lumens; what is enlarged."""
    width, high = figure.get_size_inches()
    looks = ((palette.soft, "solid"), (palette.ink, DASHED), (palette.light, "solid"))
    x, y = 0.12, 1 - 0.15 / high
    for stage, (color, style) in zip(view.stages, looks):
        said = f"{stage.name} {three(stage.flux_lm)} lm"
        figure.add_artist(Line2D([x / width, (x + 0.2) / width], [y, y], color=color, linestyle=style, linewidth=LINE))
        figure.text((x + 0.26) / width, y, said, color=palette.ink, fontsize=SMALL, va="center")
        x += 0.42 + width_of(said, SMALL)
    notes = [] if times == 1 else [f"the last two drawn ×{three(times)}"]
    if view.launch_na > view.fiber_na * (1 + 1e-9):
        notes.append("hatched: steeper than the fiber takes")
    figure.text(0.12 / width, 1 - 0.34 / high, "; ".join(notes), color=palette.soft, fontsize=SMALL, va="center")


def chromaticity(view: ColorView, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """From the lamp's color to the delivered one in CIE 1960 u, v, beside the black bodies."""
    figure, axes = chart(width_in, 3.1, palette, left=0.78, right=0.2, bottom=0.52, top=0.2)
    shape = (width_in - 0.98) / (3.1 - 0.72)
    points = np.array([[color.u_ratio, color.v_ratio] for color in (view.lamp, view.delivered)])
    middle = points.mean(axis=0)
    half = max(0.012, 0.75 * np.ptp(points[:, 1]), 0.75 * np.ptp(points[:, 0]) / shape, *_to_locus(view))
    (low_u, high_u), (low_v, high_v) = (
        middle[0] + half * shape * np.array([-1, 1]),
        middle[1] + half * np.array([-1, 1]),
    )
    axes.plot(view.locus_u_ratio, view.locus_v_ratio, color=palette.soft, linewidth=THIN * 1.6)
    for kelvin in ISOTHERMS_K:
        u, v = (float(np.interp(kelvin, view.locus_k, values)) for values in (view.locus_u_ratio, view.locus_v_ratio))
        clear = np.abs((points - (u, v)) / (half * shape, half)) > (0.22, 0.2)
        inside = low_u < u < high_u - 0.06 * (high_u - low_u) and low_v + 0.05 * half < v < high_v - 0.2 * half
        if inside and clear.any(axis=1).all():
            axes.plot(u, v, marker="|", color=palette.soft, markersize=6)
            axes.annotate(f"{three(kelvin)} K", (u, v), (0, 6), textcoords="offset points", color=palette.soft, fontsize=SMALL,
                          ha="center", va="bottom")  # fmt: skip
    axes.annotate(
        "", points[1], points[0],
        arrowprops={"arrowstyle": "-|>", "color": palette.ink, "linewidth": THIN * 1.5, "shrinkA": 4, "shrinkB": 4},
    )  # fmt: skip
    for color, fill in ((view.lamp, palette.soft), (view.delivered, palette.light)):
        _color_mark(axes, palette, color, fill, view)
    axes.set(xlim=(low_u, high_u), ylim=(low_v, high_v), xlabel="u, CIE 1960")
    axes.set_ylabel("v", rotation=0, labelpad=12)
    axes.locator_params(nbins=5)
    return figure


def _to_locus(view: ColorView) -> list[float]:
    """Half-heights at which the nearest black bodies of both colors lie inside the picture."""
    return [1.35 * abs(color.duv_ratio) for color in (view.lamp, view.delivered)]


def _color_mark(axes: Axes, palette: Palette, color: Color, fill: str, view: ColorView) -> None:
    """One color as a dot, its name on the side away from the other."""
    other = view.delivered if color is view.lamp else view.lamp
    right = (color.u_ratio, -color.v_ratio) > (other.u_ratio, -other.v_ratio)
    axes.plot(
        color.u_ratio, color.v_ratio, "o", color=fill, markeredgecolor=palette.ink, markeredgewidth=THIN, markersize=7
    )
    axes.annotate(
        f"{color.name}, {three(color.color_temperature_k)} K",
        (color.u_ratio, color.v_ratio),
        (9 if right else -9, -2),
        textcoords="offset points",
        color=palette.ink,
        fontsize=SMALL,
        ha="left" if right else "right",
        va="top",
    )


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
    """The design's bends, each said beside its dot, stepping up where they crowd."""
    low, high = np.log(view.radius_mm[[0, -1]])
    for step, bend in enumerate(sorted(view.own, key=lambda bend: bend.radius_mm)):
        far = (np.log(bend.radius_mm) - low) / (high - low)
        times = f"{bend.repeats_count} × " if bend.repeats_count > 1 else ""
        said = f"{times}{three(bend.angle_deg)}° at {three(bend.radius_mm)} mm\n{decibels(bend.loss_db)} each"
        axes.annotate(
            said, (bend.radius_mm, min(bend.loss_db, top)), (0, 14 + 30 * step), textcoords="offset points", color=palette.ink,
            fontsize=SMALL, ha="right" if far > 0.72 else "left", va="bottom", linespacing=1.15,
            arrowprops={"arrowstyle": "-", "color": palette.ink, "linewidth": THIN, "shrinkB": 4},
            bbox={"facecolor": palette.paper, "edgecolor": "none", "pad": 1.0, "alpha": 0.85},
        )  # fmt: skip


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
