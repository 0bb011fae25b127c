"""The picture of the working range: light, evenness, detail and exposure against distance, with the needs."""

from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

from optics.figures.canvas import panel, three, width_of
from optics.figures.palette import LIGHT, LINE, SMALL, TEXT, THIN, WIDTH_IN, Palette
from optics.study.working_range import RangeCurves

# Inches: height of a panel, between panels, margins
HIGH, GAP, TOP, FOOT, LEFT, RIGHT = 1.08, 0.42, 0.74, 0.5, 0.78, 0.2
SHORT = {"target_center_lux": "center", "target_min_lux": "least"}
GAPS = "smallest gap seen"
FINE, COARSE = (1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0), (1.0, 2.0, 5.0)


@dataclass(frozen=True, slots=True)
class Row:
    """One panel: lines (values, strength), whether its scale is logarithmic, the needs drawn in it with their levels."""

    title: str
    lines: tuple[tuple[np.ndarray, float], ...]
    log: bool
    back: bool
    needs: dict[str, float]


def curves(view: RangeCurves, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """Small multiples over one scale of distance: dashed what is needed, thick where it is not met, shaded the depth of field."""
    seen = np.isfinite(view.field_radius_mm).any()
    rows = [
        row
        for row in _rows(view)
        if any(np.isfinite(values).any() for values, _ in row.lines) or (seen and row.title.startswith(GAPS))
    ]
    high = TOP + len(rows) * (HIGH + GAP) - GAP + FOOT
    figure = Figure(figsize=(width_in, high), facecolor=palette.paper)
    FigureCanvasAgg(figure)
    for place, row in enumerate(rows):
        top = TOP + place * (HIGH + GAP)
        axes = panel(figure, palette, left=LEFT, right=RIGHT, top=top, bottom=high - top - HIGH)
        _panel(axes, palette, view, row)
        _said(axes, palette, view, row)
        if place < len(rows) - 1:
            axes.tick_params(labelbottom=False)
        else:
            axes.set_xlabel("distance from the tip, mm")
    _key(figure, palette, view, width_in, high)
    return figure


def _rows(view: RangeCurves) -> list[Row]:
    wanted = dict(view.needs)
    slow = np.nanmax(view.exposure_s, initial=0.0) >= 1
    unit, times = ("s", 1.0) if slow else ("ms", 1e3)
    light = {name: wanted[name] for name in SHORT if name in wanted}
    frame = {"frame_hz": times / wanted["frame_hz"]} if "frame_hz" in wanted else {}
    lines = ((view.center_lux, 1.0), (view.mean_lux, 0.6), (view.least_lux, 0.3))
    return [
        Row("illuminance, lux", lines, True, False, light),
        Row("evenness", ((view.evenness, 1.0),), False, False, {name: wanted[name] for name in ("evenness",) if name in wanted}),
        Row(f"{GAPS}, mm", ((view.smallest_gap_mm, 1.0),), False, True,
            {name: wanted[name] for name in ("smallest_gap_mm",) if name in wanted}),
        Row(f"exposure, {unit}", ((view.exposure_s * times, 1.0),), True, True, frame),
    ]  # fmt: skip


def _panel(axes: Axes, palette: Palette, view: RangeCurves, row: Row) -> None:
    x, color = view.distance_mm, palette.back if row.back else palette.light
    wide = x[-1] > 3 * x[0]
    axes.set(xscale="log" if wide else "linear", yscale="log" if row.log else "linear")
    low, high = max(view.depth_near_mm, x[0]), min(view.depth_far_mm, x[-1])
    if high > low:  # false for nan too
        axes.axvspan(low, high, color=palette.ghost, linewidth=0)
    axes.axvline(view.working_distance_mm, color=palette.soft, linewidth=THIN, linestyle=(0, (1, 2)))
    for values, strength in row.lines:
        axes.plot(
            x,
            np.where(values > 0, values, np.nan) if row.log else values,
            color=color,
            linewidth=LINE,
            alpha=0.3 + 0.7 * strength,
        )
    for level in row.needs.values():
        axes.axhline(level, color=palette.ink, linewidth=THIN, linestyle=(0, (4, 2)))
    for name, at, side in view.fails:
        if name in row.needs and at is not None:
            axes.plot(
                [at, x[-1] if side == "far" else x[0]],
                [row.needs[name]] * 2,
                color=palette.accent,
                linewidth=2.2 * LINE,
                solid_capstyle="butt",
            )
    _scales(axes, x, wide, row)


def _scales(axes: Axes, x: np.ndarray, wide: bool, row: Row) -> None:
    """Limits, and ticks at round places."""
    some = np.concatenate(
        [values[np.isfinite(values) & (values > 0)] for values, _ in row.lines] + [np.array(list(row.needs.values()))]
    )
    if row.log:
        low, high = (float(some.min()) / 1.4, float(some.max()) * 1.4) if some.size else (0.1, 1.0)
        axes.set_ylim(low, high)
        places = _round_places(low, high, 4)
        axes.set_yticks(places, [three(place) for place in places])
        axes.set_yticks([], minor=True)
    else:
        axes.set_ylim(0, 1.02 if row.title == "evenness" else max(float(some.max(initial=0.0)) * 1.15, 1e-9))
        axes.yaxis.set_major_formatter(lambda value, _: three(value))
    axes.set_xlim(x[0], x[-1])
    if wide:
        places = _round_places(x[0], x[-1], 7)
        axes.set_xticks(places, [three(place) for place in places])
        axes.set_xticks([], minor=True)


def _round_places(low: float, high: float, most: int) -> list[float]:
    """Round numbers on a logarithmic scale, as many as there is room for."""
    for steps in (FINE, COARSE, (1.0, 3.0), (1.0,)):
        places = [step * 10.0**power for power in range(-7, 9) for step in steps if low <= step * 10.0**power <= high]
        if len(places) <= most:
            return places
    return places[:: -(-len(places) // most)]


def _said(axes: Axes, palette: Palette, view: RangeCurves, row: Row) -> None:
    """The title, and on the right where the needs of this panel hold."""
    axes.set_title(row.title, loc="left", color=palette.ink, fontsize=TEXT, pad=5)
    blind = not any(np.isfinite(values).any() for values, _ in row.lines)
    told = ["nothing resolved"] if blind else []
    for name in () if blind else row.needs:
        ends = {side: at for other, at, side in view.fails if other == name and at is not None}
        which = f"{SHORT[name]} " if len(row.needs) > 1 else ""
        if "far" in ends and ends["far"] <= view.distance_mm[0]:
            told.append(f"{which}not met")
        else:
            told += [f"{which}{'beyond' if side == 'far' else 'below'} {three(at)} mm" for side, at in ends.items()]
    if told:
        axes.set_title("✗ " + ", ".join(told), loc="right", color=palette.accent, fontsize=SMALL, weight="bold", pad=5)
    elif row.needs:
        axes.set_title("✓ met throughout", loc="right", color=palette.ink, fontsize=SMALL, pad=5)


def _key(figure: Figure, palette: Palette, view: RangeCurves, width_in: float, high: float) -> None:
    said = [f"dotted: at work, {three(view.working_distance_mm)} mm"]
    said += ["dashed: needed"] if view.needs else []
    said += ["shaded: depth of field"] if np.isfinite(view.depth_near_mm) else []
    x = 0.12
    for text in said:
        figure.text(x / width_in, 1 - 0.14 / high, text, color=palette.soft, fontsize=SMALL, va="center")
        x += width_of(text, SMALL) + 0.18
    three_of = np.isfinite(view.least_lux).any()
    told = "light: at the center (strong), mean, least in the field (pale)" if three_of else "light: at the center"
    figure.text(0.12 / width_in, 1 - 0.32 / high, told, color=palette.soft, fontsize=SMALL, va="center")
