"""Pictures of the fit, to scale: the face of the tip beside the tube behind it, and what just passes the bend of the bore."""

from collections.abc import Iterator, Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.collections import EllipseCollection
from matplotlib.figure import Figure
from matplotlib.patches import Circle

from optics.figures.canvas import chart, round_length, sheet, three, width_of
from optics.figures.palette import LIGHT, LINE, SMALL, TEXT, THIN, WIDTH_IN, Palette
from optics.report.view_body import Part
from optics.report.view_fit import TubeView
from optics.report.view_passage import LimitCurve

MARGIN, BETWEEN, ROW = 0.12, 0.3, 0.185  # inches: at the rim, between the circles, a line of the key
NAMES = {
    "light": ("light port", "light ports"),
    "image": ("objective", "objectives"),
    "pupil": ("entrance pupil", "entrance pupils"),
    "cores": ("image cores", "image cores"),
    "channel": ("channel", "channels"),
    "opening": ("opening", "openings"),
    "wire": ("pull wire", "pull wires"),
}
AXES = {
    "outer_diameter_mm": "outer diameter of the tube, mm",
    "centerline_radius_mm": "bend radius of the bore, mm",
    "rigid_tip_mm": "rigid tip, mm",
}


def sections(view: TubeView, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """The tip's face and the tube behind it at one scale, each part in the key below; fibers at their own size."""
    across = (width_in - 2 * MARGIN - BETWEEN) / 2
    keys = [list(_key(view, view.tip, tube=False)), list(_key(view, view.tube, tube=True))]
    foot = 0.5 + ROW * max(len(key) for key in keys)
    figure, axes = sheet(width_in, across + foot + 0.34, palette)
    scale = across / max(view.outer_diameter_mm, view.needed_lumen_mm)
    for side, (parts, key, title) in enumerate(
        zip((view.tip, view.tube), keys, ("tip, seen from the front", "tube behind it"))
    ):
        left = MARGIN + side * (across + BETWEEN)
        middle = np.array([left + across / 2, foot + across / 2])
        _tube(axes, palette, view, middle, scale)
        for part in parts:
            _part(axes, palette, part, middle, scale)
        if side == 1:
            _fibers(axes, palette, view, middle, scale)
        axes.text(
            left + across / 2, foot + across + 0.12, title, color=palette.ink, fontsize=TEXT, ha="center", va="bottom"
        )
        for row, (kind, said) in enumerate(key):
            y = foot - 0.36 - ROW * row
            axes.add_patch(
                Circle((left + 0.07, y), 0.055, facecolor=_fill(palette, kind), edgecolor=palette.ink, linewidth=THIN)
            )
            axes.text(left + 0.19, y, said, color=palette.ink, fontsize=SMALL, va="center_baseline")
    bar = round_length(view.outer_diameter_mm / 3)
    low = foot - 0.1
    axes.plot([MARGIN, MARGIN + bar * scale], [low, low], color=palette.ink, linewidth=2.0, solid_capstyle="butt")
    axes.text(MARGIN + bar * scale + 0.07, low, f"{three(bar)} mm", color=palette.ink, fontsize=SMALL, va="center")
    return figure


def _tube(axes: Axes, palette: Palette, view: TubeView, middle: np.ndarray, scale: float) -> None:
    """Wall and lumen; where the parts need more room, the lumen they need as a dashed line."""
    outer, lumen, needed = (size * scale / 2 for size in (view.outer_diameter_mm, view.lumen_mm, view.needed_lumen_mm))
    ink = palette.ink if view.fits else palette.accent
    axes.add_patch(Circle(middle, outer, facecolor=palette.grid, edgecolor=palette.ink, linewidth=THIN))
    axes.add_patch(Circle(middle, lumen, facecolor=palette.paper, edgecolor=ink, linewidth=THIN if view.fits else LINE))
    if not view.fits:
        axes.add_patch(Circle(middle, needed, fill=False, edgecolor=ink, linestyle="dashed", linewidth=LINE, zorder=5))


def _part(axes: Axes, palette: Palette, part: Part, middle: np.ndarray, scale: float) -> None:
    at = middle + scale * np.array([part.x_mm, part.y_mm])
    axes.add_patch(
        Circle(
            at, part.diameter_mm * scale / 2, facecolor=_fill(palette, part.kind), edgecolor=palette.ink, linewidth=THIN
        )
    )


def _fill(palette: Palette, kind: str) -> str:
    return {
        "light": palette.light,
        "fiber": palette.light,
        "image": palette.ghost,
        "pupil": palette.back,
        "cores": palette.back,
        "channel": palette.grid,
        "opening": palette.paper,
        "wire": palette.soft,
        "wall": palette.grid,
        "needed": palette.accent,
    }[kind]


def _fibers(axes: Axes, palette: Palette, view: TubeView, middle: np.ndarray, scale: float) -> None:
    """Each fiber at its own size; where they are too many, nothing (the key says how many)."""
    if not view.fiber_x_mm.size:
        return
    size = np.full(view.fiber_x_mm.size, view.fiber_mm * scale)
    axes.add_collection(
        EllipseCollection(
            size, size, np.zeros_like(size), units="xy", transOffset=axes.transData,
            offsets=middle + scale * np.column_stack([view.fiber_x_mm, view.fiber_y_mm]),
            facecolor=palette.light, edgecolor=palette.paper, linewidth=0.15, zorder=2,
        )
    )  # fmt: skip


def _key(view: TubeView, parts: Sequence[Part], *, tube: bool) -> Iterator[tuple[str, str]]:
    """(kind, words) for each kind and size of part, the wall first, the fibers last."""
    yield "wall", f"{'tube' if tube else 'tip'} ⌀ {three(view.outer_diameter_mm)}, lumen ⌀ {three(view.lumen_mm)} mm"
    if not view.fits:
        yield "needed", f"✗ needed ⌀ {three(view.needed_lumen_mm)} mm, dashed"
    for kind, names in NAMES.items():
        for size in sorted({part.diameter_mm for part in parts if part.kind == kind}, reverse=True):
            same = [part for part in parts if part.kind == kind and part.diameter_mm == size]
            name = _light(parts, same) or names[len(same) > 1]
            name = "image bundle" if kind == "image" and tube else name
            yield kind, f"{f'{len(same)} ' if len(same) > 1 else ''}{name} ⌀ {three(size)} mm"
    if tube:
        yield "fiber", f"{view.fibers_count:,} light fibers ⌀ {three(view.fiber_mm)} mm"


def _light(parts: Sequence[Part], same: Sequence[Part]) -> str:
    """What light parts are called that are not round ports beside the objective; nothing for all others."""
    if same[0].kind != "light" or len(same) > 1:
        return ""
    port = same[0]
    inner = next((part for part in parts if part.kind == "image"), None)
    if inner is None:
        return port.name
    away = float(np.hypot(inner.x_mm - port.x_mm, inner.y_mm - port.y_mm))
    if away + inner.diameter_mm / 2 > port.diameter_mm / 2 * (1 + 1e-6):
        return ""
    return "light ring" if away < 1e-6 * port.diameter_mm else "light crescent"


def limit(view: LimitCurve, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """What just passes the bend over what is varied: below the line it passes; the design as a dot, the needs dashed."""
    figure, axes = chart(width_in, 3.2, palette, left=0.72, right=0.22, bottom=0.52, top=0.36)
    x, y = view.varied, np.nan_to_num(view.passable, nan=0.0)
    own_y = view.own[1] if view.own else 0.0
    top = 1.12 * max(float(y.max()), own_y, view.needed[1] or 0.0)
    axes.fill_between(x, y, color=palette.back, alpha=0.13, linewidth=0)
    axes.plot(x, np.where(y > 0, y, np.nan), color=palette.back, linewidth=1.4 * LINE)
    if view.stiff_mm is not None:
        _stiff(axes, palette, view, top, width_in - 0.94)
    for along, value in zip((axes.axvline, axes.axhline), view.needed):
        if value is not None:
            along(value, color=palette.ink, linewidth=THIN * 1.3, linestyle=(0, (4, 2)))
    if view.own:
        good = view.passes
        axes.plot(*view.own, "o", color=palette.ink if good else palette.accent, markersize=7, zorder=5, clip_on=False)
        said = f"{'✓' if good else '✗'} this design"
        ink = palette.ink if good else palette.accent
        _said(axes, palette, *view.own, said, x, width_in - 0.94, ink, below=good)
    axes.set(xlim=(x[0], x[-1]), ylim=(0, top), xlabel=AXES[view.vary], ylabel=AXES[view.limit])
    key = "shaded: passes the bend" + ("; dashed: the most that is wanted" if any(view.needed) else "")
    figure.text(0.12 / width_in, 1 - 0.17 / 3.2, key, color=palette.soft, fontsize=SMALL, va="center")
    return figure


def _stiff(axes: Axes, palette: Palette, view: LimitCurve, top: float, room: float) -> None:
    """Where the bore gives less than the tube's least bend radius: wider tubes, or sharper bores."""
    first, last = (float(end) for end in view.varied[[0, -1]])
    upward = view.vary == "rigid_tip_mm"  # the tube's diameter runs upward there
    low, high = (
        (first, view.stiff_mm) if view.vary == "centerline_radius_mm" else (view.stiff_mm, top if upward else last)
    )
    if low >= high or (not upward and not first <= view.stiff_mm < last):
        return
    span, line = (axes.axhspan, axes.axhline) if upward else (axes.axvspan, axes.axvline)
    span(low, high, facecolor=palette.accent, alpha=0.13, linewidth=0)
    line(view.stiff_mm, color=palette.accent, linewidth=THIN * 1.5)
    at = (first, view.stiff_mm) if upward else (low, 0.02 * top)
    _said(axes, palette, *at, "too stiff for the bend", view.varied, room, palette.accent, below=False)


def _said(
    axes: Axes, palette: Palette, x: float, y: float, said: str, span: np.ndarray, room: float, ink: str, *, below: bool
) -> None:
    """Words beside a place, on the side that has room."""
    inch = room / (span[-1] - span[0])
    left = (x - span[0]) * inch + width_of(said, SMALL, True) + 0.2 > room
    axes.annotate(
        said, (x, y), (-7 if left else 7, -5 if below else 5), textcoords="offset points", color=ink, fontsize=SMALL,
        weight="bold", ha="right" if left else "left", va="top" if below else "bottom",
        bbox={"facecolor": palette.paper, "edgecolor": "none", "pad": 1.0, "alpha": 0.75},
    )  # fmt: skip
