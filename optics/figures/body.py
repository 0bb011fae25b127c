"""Pictures of the body, to scale: the cross-section with every part named, and the tip in the bend of its bore."""

from collections.abc import Iterator

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Circle, PathPatch
from matplotlib.path import Path

from optics.figures.canvas import round_length, sheet, spread, three
from optics.figures.palette import LIGHT, LINE, SMALL, THIN, WIDTH_IN, Palette
from optics.report.views import Part, PassageView, SectionView

SIDE, LINE_IN = 1.16, 0.165  # inches: room for the names on each side; a line of small type


def section(view: SectionView, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """The cross-section to scale, each part named beside it; what is free in the lumen is hatched."""
    across = width_in - 2 * SIDE
    outer = max(view.outer_diameter_mm, view.needed_lumen_mm)
    figure, axes = sheet(width_in, across + 0.78, palette)
    scale = across / outer  # inches for each mm
    middle = np.array([width_in / 2, across / 2 + 0.66])
    _tube(axes, palette, view, middle, scale)
    for part in view.parts:
        _part(axes, palette, part, middle, scale)
    _names(axes, palette, view, middle, scale, width_in)
    bar = round_length(outer / 3)
    axes.plot([0.12, 0.12 + bar * scale], [0.42, 0.42], color=palette.ink, linewidth=2.0, solid_capstyle="butt")
    axes.text(0.12, 0.36, f"{three(bar)} mm", color=palette.ink, fontsize=SMALL, va="top")
    free = (
        f"hatched: free, {three(view.free_area_mm2)} mm²"
        if view.fits
        else f"✗ the parts need a lumen of {three(view.needed_lumen_mm)} mm (dashed)"
    )
    axes.text(
        width_in - 0.12,
        0.36,
        free,
        color=palette.ink if view.fits else palette.accent,
        weight="normal" if view.fits else "bold",
        fontsize=SMALL,
        va="top",
        ha="right",
    )
    return figure


def _tube(axes: Axes, palette: Palette, view: SectionView, middle: np.ndarray, scale: float) -> None:
    outer, lumen = view.outer_diameter_mm * scale / 2, view.lumen_mm * scale / 2
    axes.add_patch(Circle(middle, outer, facecolor=palette.grid, edgecolor=palette.ink, linewidth=THIN))
    axes.add_patch(
        Circle(
            middle,
            lumen,
            facecolor=palette.paper,
            edgecolor=palette.soft,
            linewidth=0,
            hatch="////" if view.fits else None,
        )
    )
    look = (
        {"edgecolor": palette.ink, "linewidth": THIN}
        if view.fits
        else {"edgecolor": palette.accent, "linewidth": LINE, "zorder": 2}
    )
    axes.add_patch(Circle(middle, lumen, fill=False, **look))
    if not view.fits:
        axes.add_patch(Circle(middle, view.needed_lumen_mm * scale / 2, fill=False, linestyle="dashed", **look))


def _part(axes: Axes, palette: Palette, part: Part, middle: np.ndarray, scale: float) -> None:
    fill = {
        "light": palette.light,
        "image": palette.paper,
        "cores": palette.back,
        "channel": palette.paper,
        "opening": palette.ghost,
        "wire": palette.soft,
    }[part.kind]
    at = middle + scale * np.array([part.x_mm, part.y_mm])
    axes.add_patch(Circle(at, part.diameter_mm * scale / 2, facecolor=fill, edgecolor=palette.ink, linewidth=THIN))


def _names(axes: Axes, palette: Palette, view: SectionView, middle: np.ndarray, scale: float, width_in: float) -> None:
    """Names in two columns, each with a hairline to its part; as far apart as they need."""
    outer = max(view.outer_diameter_mm, view.needed_lumen_mm) * scale / 2
    labels = list(_labels(view))
    right = [label for label in labels if label[1][0] >= 0]
    while len(right) - (len(labels) - len(right)) > 1:  # even columns: the one nearest the middle changes sides
        right.remove(min(right, key=lambda label: label[1][0]))
    while (len(labels) - len(right)) - len(right) > 1:
        right.append(max((label for label in labels if label not in right), key=lambda label: label[1][0]))
    for side, column in ((1, right), (-1, [label for label in labels if label not in right])):
        gap = max((1.3 + text.count("\n") for text, _ in column), default=1.0) * LINE_IN
        places = spread(
            [middle[1] + at[1] * scale for _, at in column], gap, middle[1] - outer + 0.1, middle[1] + outer - 0.12
        )
        for (text, at), y in zip(column, places):
            edge = width_in / 2 + side * (width_in / 2 - SIDE + 0.1)
            where = middle + scale * np.asarray(at)
            axes.plot(
                [edge, edge - side * 0.06, where[0]], [y, y, where[1]], color=palette.ink, linewidth=THIN, zorder=3
            )
            axes.plot(*where, marker="o", color=palette.ink, markersize=2.5, zorder=3)
            axes.text(
                edge + side * 0.04,
                y,
                text,
                color=palette.ink,
                fontsize=SMALL,
                ha="left" if side > 0 else "right",
                va="center",
                linespacing=1.1,
            )


def _labels(view: SectionView) -> Iterator[tuple[str, tuple[float, float]]]:
    """(words, the place they point at) for each kind and size of part, and for lumen and tube."""
    named = {"light": "light port", "image": "image part", "cores": "image", "channel": "channel", "wire": "wire"}
    for kind, name in named.items():
        for size in sorted({part.diameter_mm for part in view.parts if part.kind == kind}, reverse=True):
            same = [part for part in view.parts if part.kind == kind and part.diameter_mm == size]
            part = max(same, key=lambda part: (round(part.x_mm, 6), part.y_mm))
            ring = kind == "light" and any(_inside(other, part) for other in view.parts if other.kind == "image")
            what = ("light ring" if ring else part.name if kind == "light" else name) + ("s" if len(same) > 1 else "")
            opening = next(
                (
                    f"\n{three(p.diameter_mm)} mm open"
                    for p in view.parts
                    if p.kind == "opening" and kind == "channel" and _inside(p, part)
                ),
                "",
            )
            yield (
                f"{f'{len(same)} ' if len(same) > 1 else ''}{what}\n⌀ {three(size)} mm{opening}",
                _point_in(part, view, kind, ring),
            )
    yield (
        f"lumen\n⌀ {three(view.lumen_mm)} mm",
        (0.5 * view.lumen_mm * np.cos(-2.2), 0.5 * view.lumen_mm * np.sin(-2.2)),
    )
    middle = (view.outer_diameter_mm + view.lumen_mm) / 4
    yield f"tube\n⌀ {three(view.outer_diameter_mm)} mm", (middle * np.cos(-0.9), middle * np.sin(-0.9))


def _inside(small: Part, large: Part) -> bool:
    return (
        np.hypot(small.x_mm - large.x_mm, small.y_mm - large.y_mm) + small.diameter_mm / 2
        <= large.diameter_mm / 2 + 1e-6
    )


def _point_in(part: Part, view: SectionView, kind: str, ring: bool) -> tuple[float, float]:
    """A place in the part that no part upon it covers."""
    if kind == "cores" or not (ring or kind in ("image", "channel")):
        return part.x_mm, part.y_mm
    upon = next((other for other in view.parts[view.parts.index(part) + 1 :] if _inside(other, part)), None)
    if upon is None:
        return part.x_mm, part.y_mm
    turn = np.pi / 4 if kind == "image" else -np.pi / 5 if kind == "light" else 0.0
    away = np.array([np.cos(turn), np.sin(turn)])
    inner = np.array([upon.x_mm, upon.y_mm]) + away * upon.diameter_mm / 2
    outer = np.array([part.x_mm, part.y_mm]) + away * part.diameter_mm / 2
    return tuple((inner + outer) / 2)


def passage(view: PassageView, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """The bore through its bend, to scale, with the tip where it is tightest and the longest tip that passes."""
    x, y = (
        np.concatenate([view.inner_x_mm, view.outer_x_mm, view.tip_x_mm]),
        np.concatenate([view.inner_y_mm, view.outer_y_mm, view.tip_y_mm]),
    )
    room, foot = width_in - 0.24, 0.98
    scale = min(room / np.ptp(x), 3.4 / np.ptp(y))
    figure, axes = sheet(width_in, np.ptp(y) * scale + foot + 0.1, palette)
    shift = np.array([(width_in - np.ptp(x) * scale) / 2 - x.min() * scale, foot - y.min() * scale])

    def place(x_mm, y_mm):
        return np.column_stack([x_mm, y_mm]) * scale + shift

    inner, outer = place(view.inner_x_mm, view.inner_y_mm), place(view.outer_x_mm, view.outer_y_mm)
    axes.add_patch(PathPatch(Path(np.concatenate([inner, outer[::-1]])), facecolor=palette.ghost, linewidth=0))
    for wall in (inner, outer):
        axes.plot(*wall.T, color=palette.ink, linewidth=LINE)
    tip = place(view.tip_x_mm, view.tip_y_mm)
    good = (
        view.rigid_tip_mm is None or view.longest_rigid_tip_mm is None or view.rigid_tip_mm <= view.longest_rigid_tip_mm
    )
    if len(tip):
        axes.add_patch(
            PathPatch(
                Path(tip),
                facecolor=palette.back if good else palette.accent,
                edgecolor=palette.ink,
                linewidth=THIN,
                alpha=0.9,
            )
        )
    if view.longest_x_mm.size:
        axes.plot(
            *place(view.longest_x_mm, view.longest_y_mm).T,
            color=palette.ink,
            linewidth=THIN * 1.4,
            linestyle=(0, (4, 2)),
        )
    bar = round_length(np.ptp(x) / 4)
    axes.plot([0.12, 0.12 + bar * scale], [0.84, 0.84], color=palette.ink, linewidth=2.0, solid_capstyle="butt")
    axes.text(0.12 + bar * scale + 0.08, 0.84, f"{three(bar)} mm", color=palette.ink, fontsize=SMALL, va="center")
    for row, (text, met) in enumerate(_passing(view)):
        axes.text(
            0.12,
            0.7 - row * 0.185,
            text,
            color=palette.accent if met is False else palette.ink,
            weight="bold" if met is False else "normal",
            fontsize=SMALL,
            va="top",
        )
    return figure


def _passing(view: PassageView) -> Iterator[tuple[str, bool | None]]:
    """What the picture says, line by line, with a mark."""
    enters = view.tip_diameter_mm <= view.bore_mm
    yield (
        f"{'✓' if enters else '✗'} tube ⌀ {three(view.tip_diameter_mm)} mm in a bore of ⌀ {three(view.bore_mm)} mm",
        enters,
    )
    longest = view.longest_rigid_tip_mm
    if longest is not None and view.rigid_tip_mm is not None:
        met = view.rigid_tip_mm <= longest
        yield (
            f"{'✓' if met else '✗'} rigid tip {three(view.rigid_tip_mm)} mm; up to {three(longest)} mm passes (dashed)",
            met,
        )
    elif longest is not None:
        yield f"a rigid tip up to {three(longest)} mm passes (dashed)", None
    elif view.rigid_tip_mm is not None:
        yield f"rigid tip {three(view.rigid_tip_mm)} mm", None
    if view.passable_radius_mm is not None:
        met, given = view.bend_radius_mm <= view.passable_radius_mm, three(view.passable_radius_mm)
        yield f"{'✓' if met else '✗'} tube bends to {three(view.bend_radius_mm)} mm; the bore gives {given} mm", met
