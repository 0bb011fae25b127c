"""Pictures of the light on the target: the map and the profile across it."""

import numpy as np
from matplotlib import patheffects
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from optics.figures.canvas import chart, panel, round_length, three
from optics.figures.palette import LIGHT, LINE, SMALL, TEXT, THIN, WIDTH_IN, Palette
from optics.report.views import TargetMap

# Inches: room on the right (color bar), on the left, below, above
RIGHT, LEFT, BELOW, ABOVE = 1.02, 0.1, 0.58, 0.1
WHITE, HALO = "#ffffff", [patheffects.withStroke(linewidth=2.5, foreground="#10131a")]  # on any color of the map


def irradiance_map(view: TargetMap, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """Illuminance on the target in color: the rim of the field of view, where the need is met, and a scale."""
    side = width_in - LEFT - RIGHT
    high = side * float(np.ptp(view.v_mm) / np.ptp(view.u_mm))
    figure, axes = chart(width_in, high + BELOW + ABOVE, palette, left=LEFT, right=RIGHT, bottom=BELOW, top=ABOVE)
    extent = (view.u_mm[0], view.u_mm[-1], view.v_mm[0], view.v_mm[-1])
    top = max(float(view.lux.max()), 1e-9)
    axes.imshow(
        view.lux,
        extent=extent,
        origin="lower",
        cmap=palette.light_map,
        vmin=0,
        vmax=top,
        interpolation="bilinear",
        aspect="auto",
    )
    axes.set(xlim=extent[:2], ylim=extent[2:], xticks=[], yticks=[])
    axes.spines[:].set_visible(False)
    _field(axes, view)
    _ports(axes, view)
    _color_bar(figure, palette, view, top, LEFT + side + 0.1)
    _below(axes, palette, view, high, _need(axes, view, palette))
    return figure


def _field(axes: Axes, view: TargetMap) -> None:
    """The rim of the field of view, or the two depths between which a wall is seen."""
    look = {"color": WHITE, "linewidth": LINE, "path_effects": HALO}
    words = {"color": WHITE, "fontsize": SMALL, "path_effects": HALO, "transform": axes.transAxes, "linespacing": 1.1}
    if view.field_radius_mm is None:
        return
    if view.surface == "bore":
        for depth in view.field_v_mm:
            axes.axhline(depth, **look)
        axes.text(
            0.02,
            0.97,
            f"seen from {three(view.field_v_mm[0])} to {three(view.field_v_mm[1])} mm deep",
            va="top",
            **words,
        )
        return
    axes.plot(view.field_u_mm, view.field_v_mm, **look)
    axes.text(0.02, 0.98, f"field of view\n⌀ {three(2 * view.field_radius_mm)} mm", va="top", **words)


def _ports(axes: Axes, view: TargetMap) -> None:
    """From which sides the light comes: arrowheads at the edge."""
    if view.surface == "bore":
        return
    reach, middle = 0.465 * np.ptp(view.u_mm), view.u_mm.mean()
    for port in view.ports:
        away = np.hypot(port.x_mm, port.y_mm)
        if away > 1e-6:
            x, y = middle + reach * port.x_mm / away, reach * port.y_mm / away
            turn = np.rad2deg(np.arctan2(-y, -x)) - 90
            axes.plot(
                [x],
                [y],
                marker=(3, 0, turn),
                color=WHITE,
                markersize=8,
                markeredgecolor="#10131a",
                markeredgewidth=0.8,
                clip_on=False,
            )


def _need(axes: Axes, view: TargetMap, palette: Palette) -> str:
    """The line along which the light is just what is wanted; says how the field stands to it."""
    wanted = view.wanted_lux
    if wanted is None:
        return ""
    if view.lux.min() < wanted < view.lux.max():
        lines = axes.contour(
            view.u_mm, view.v_mm, view.lux, levels=[wanted], colors=[WHITE], linewidths=[LINE], linestyles=["dashed"]
        )
        lines.set_path_effects(HALO)
        return f"dashed: the {three(wanted)} lx wanted"
    return f"{'all above' if view.lux.min() >= wanted else 'all below'} the {three(wanted)} lx wanted"


def _color_bar(figure: Figure, palette: Palette, view: TargetMap, top: float, left: float) -> None:
    """The scale of the map, in lux, with the need marked."""
    width, high = figure.get_size_inches()
    axes = panel(figure, palette, left=left, right=width - left - 0.16, bottom=BELOW, top=ABOVE + 0.24)
    axes.imshow(
        np.linspace(0, 1, 256)[:, None], extent=(0, 1, 0, top), origin="lower", cmap=palette.light_map, aspect="auto"
    )
    if view.wanted_lux is not None and 0.02 * top < view.wanted_lux < top:
        axes.axhline(view.wanted_lux, color=WHITE, linewidth=LINE, linestyle=(0, (2, 1)), path_effects=HALO)
    axes.set(xlim=(0, 1), ylim=(0, top), xticks=[])
    axes.spines[:].set_visible(False)
    axes.set_yticks(_ticks(top), [three(place) for place in _ticks(top)])
    axes.yaxis.tick_right()
    figure.text(left / width, 1 - ABOVE / high, "lux", color=palette.ink, fontsize=TEXT, va="top")


def _ticks(top: float) -> list[float]:
    """About four places from 0 to the top."""
    step = round_length(top / 4)
    return [step * count for count in range(int(top / step + 1e-9) + 1)]


def _below(axes: Axes, palette: Palette, view: TargetMap, high: float, need: str) -> None:
    """Scale bar, distance, and how the field stands to the need."""
    across = float(np.ptp(view.u_mm))
    bar = round_length(across / 4)
    look = {"transform": axes.transAxes, "clip_on": False}
    y = -0.12 / high
    axes.plot([0.0, bar / across], [y, y], color=palette.ink, linewidth=2.0, solid_capstyle="butt", **look)
    axes.text(0.0, y - 0.06 / high, f"{three(bar)} mm", color=palette.ink, fontsize=SMALL, va="top", **look)
    if any(np.hypot(port.x_mm, port.y_mm) > 1e-6 for port in view.ports) and view.surface == "plane":
        axes.text(0.0, y - 0.23 / high, "▲ on this side: a port", color=palette.soft, fontsize=SMALL, va="top", **look)
    where = (
        "wall of the bore, unrolled; depth upward"
        if view.surface == "bore"
        else f"{three(view.distance_mm)} mm from the tip"
        + (f", tilted {three(view.tilt_deg)}°" if view.tilt_deg else "")
    )
    axes.text(1.0, y - 0.06 / high, where, color=palette.soft, fontsize=SMALL, va="top", ha="right", **look)
    axes.text(1.0, y - 0.23 / high, need, color=palette.ink, fontsize=SMALL, va="top", ha="right", **look)


def profile(view: TargetMap, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """Illuminance along one line through the center, over the field of view, against the need."""
    figure, axes = chart(width_in, 2.9, palette, left=0.95, right=0.18, bottom=0.52, top=0.32)
    x, top = view.profile_mm, max(float(view.profile_lux.max()), view.wanted_lux or 0.0, 1e-9)
    if view.field_radius_mm is not None and view.surface == "plane":
        low, high = float(view.field_u_mm.min()), float(view.field_u_mm.max())
        axes.axvspan(low, high, color=palette.ghost, linewidth=0)
        axes.text(
            (low + high) / 2,
            1.03,
            "field of view",
            color=palette.soft,
            fontsize=SMALL,
            ha="center",
            transform=axes.get_xaxis_transform(),
        )
    axes.fill_between(x, view.profile_lux, color=palette.light, alpha=0.25, linewidth=0)
    axes.plot(x, view.profile_lux, color=palette.light, linewidth=LINE)
    if view.wanted_lux is not None:
        axes.axhline(view.wanted_lux, color=palette.accent, linewidth=THIN * 1.5, linestyle="dashed")
        high_up = view.wanted_lux > 0.85 * top
        axes.annotate(
            f"{three(view.wanted_lux)} lx wanted",
            (x[0], view.wanted_lux),
            (4, -3 if high_up else 3),
            textcoords="offset points",
            color=palette.accent,
            fontsize=SMALL,
            va="top" if high_up else "bottom",
        )
    axes.set(
        xlim=(x[0], x[-1]),
        ylim=(0, top * 1.08),
        xlabel="around the wall, mm" if view.surface == "bore" else "across the target, mm",
        ylabel="illuminance, lux",
    )
    axes.set_yticks(_ticks(top * 1.08), [three(place) for place in _ticks(top * 1.08)])
    return figure
