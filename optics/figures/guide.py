"""Pictures of the guide: its cone on the way, and the shift of its color."""

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from optics.figures.canvas import chart, round_length, three, width_of
from optics.figures.palette import LIGHT, LINE, SMALL, THIN, WIDTH_IN, Palette
from optics.report.view_guide import Color, ColorView, ConeView

NA_TICKS = (0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0)
DEGREES = (10, 20, 30, 40, 50, 60, 90)
LEAST_APART = 0.075  # of the axis, between two ticks
ISOTHERMS_K = (2000, 2500, 3000, 3500, 4000, 5000, 6500, 8000, 10000, 15000)
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
        said = f"{stage.name} {three(stage.flux)} {view.unit}"
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
        bbox={"facecolor": palette.paper, "edgecolor": "none", "pad": 0.8, "alpha": 0.75},
    )
