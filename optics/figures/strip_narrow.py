"""The light strip for a phone: the same ribbon from top to bottom, each leg a row with its name and its loss."""

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from optics.figures import strip_words as words
from optics.figures.canvas import sheet, wrapped
from optics.figures.palette import LARGE, LINE, SMALL, TEXT, Palette
from optics.figures.strip import EASE, LINE_IN, thickness
from optics.figures.strip_words import Leg, Station
from optics.report.answer import Report

AXIS, THICK, THIN_BACK = 0.62, 0.84, 0.56  # inches: the ribbon's axis from the left, its thickness at both starts
WORDS, EDGE, ROW = 1.22, 0.12, 0.25  # where words begin; margin on the right; height of a leg
CONE, GAP = 0.12, 0.08  # from the words of the tip down to the target; before the words of a station


def narrow_strip(report: Report, *, palette: Palette, width_in: float) -> Figure:
    """The strip from top to bottom; its height follows from its legs and words."""
    there, back = words.outward(report), words.backward(report)
    stations = [
        words.lamp_station(report),
        words.exit_station(report),
        words.target_station(report),
        words.viewer_station(report),
    ]
    heights = [_height(station) for station in stations]
    room = width_in - 2 * EDGE
    notes = [
        wrapped(text, SMALL, room)
        for text in (words.largest_loss(report), words.what_limits(report), words.scale_sentence(report))
        if text
    ]
    feet = sum(LINE_IN * (1 + note.count("\n")) + 0.09 for note in notes)
    high = (
        0.1
        + sum(heights)
        + ROW * (len(there) + len(back))
        + (CONE if report.target else 0.0)
        + (0.22 if back else 0.0)
        + 2 * GAP
        + feet
    )
    figure, axes = sheet(width_in, high, palette)
    y = high - 0.1
    y = _station(axes, palette, stations[0], y, heights[0])
    begin, y = y + heights[0] - 0.05, y
    y, thick = _ribbon(axes, palette, palette.light, there, begin, y, THICK, width_in)
    tip, y = y, _station(axes, palette, stations[1], y - GAP, heights[1])
    if report.target is not None:
        plate = y - CONE
        _cone(axes, palette, tip, plate, thick)
        y = _station(axes, palette, stations[2], plate + 0.06, heights[2])
    else:
        axes.annotate("", (AXIS, tip - 0.35), (AXIS, tip), arrowprops={"arrowstyle": "-|>", "color": palette.soft})
    if back:
        axes.text(width_in - EDGE, y - 0.1, "contrast", color=palette.soft, fontsize=SMALL, ha="right", va="center")
        axes.text(WORDS, y - 0.1, "each part alone allows", color=palette.soft, fontsize=SMALL, va="center")
        begin = plate
        y, thick = _ribbon(axes, palette, palette.back, back, begin, y - 0.22, THIN_BACK, width_in)
        axes.plot([AXIS - THICK / 2, AXIS + THICK / 2], [y, y], color=palette.ink, linewidth=LINE)
        y = _station(axes, palette, stations[3], y - GAP, heights[3])
    y -= 0.0 if back else GAP
    for note in notes:
        said = note is notes[-1]
        axes.text(
            EDGE, y, note, color=palette.soft if said else palette.ink, fontsize=SMALL, va="top", linespacing=1.15
        )
        y -= LINE_IN * (1 + note.count("\n")) + 0.09
    return figure


def _height(station: Station | None) -> float:
    return 0.0 if station is None else 0.47 + LINE_IN * len(station.lines) + 0.12


def _station(axes: Axes, palette: Palette, station: Station, y: float, height: float) -> float:
    axes.text(WORDS, y, station.heading, color=palette.soft, fontsize=SMALL, va="top")
    axes.text(WORDS, y - 0.16, station.number, color=palette.ink, fontsize=LARGE, weight="bold", va="top")
    for row, (text, met) in enumerate(station.lines):
        ink = palette.accent if met is False else palette.ink if met else palette.soft
        axes.text(
            WORDS,
            y - 0.43 - row * LINE_IN,
            text,
            color=ink,
            fontsize=SMALL,
            va="top",
            weight="bold" if met is False else "normal",
        )
    return y - height


def _ribbon(
    axes: Axes, palette: Palette, color: str, legs: list[Leg], begin: float, y: float, full_in: float, width_in: float
):
    """A ribbon downward over its legs; where it ends and how thick it is there, inches."""
    scale_db = words.full_scale_db(legs)
    along, thick, before = [begin, y], [1.0, 1.0], 1.0
    axes.fill_betweenx(
        [begin, y - ROW * len(legs)], AXIS - full_in / 2, AXIS + full_in / 2, color=palette.ghost, linewidth=0
    )
    for leg in legs:
        after = float(thickness(leg.left, scale_db))
        along.extend(y - ROW * (0.2 + 0.6 * np.linspace(0, 1, len(EASE))))
        thick.extend(before + (after - before) * EASE)
        ink, weight = (
            (palette.accent, "bold")
            if leg.marked
            else (palette.soft if leg.loss in ("0", "1") else palette.ink, "normal")
        )
        middle = y - ROW / 2
        limit = leg.note if leg.limit else ""
        axes.text(WORDS, middle, leg.name, color=ink, fontsize=TEXT, weight=weight, va="center_baseline")
        axes.text(
            width_in - EDGE, middle, leg.loss, color=ink, fontsize=TEXT, weight=weight, va="center_baseline", ha="right"
        )
        if limit:
            axes.text(
                width_in - EDGE - 0.62,
                middle,
                limit,
                color=ink,
                fontsize=TEXT,
                weight=weight,
                va="center_baseline",
                ha="right",
            )
        y, before = y - ROW, after
    half = np.array([*thick, before]) * full_in / 2
    axes.fill_betweenx([*along, y], AXIS - half, AXIS + half, color=color, linewidth=0)
    return y, before * full_in


def _cone(axes: Axes, palette: Palette, tip: float, plate: float, thick_in: float) -> None:
    """The light from the tip down to the target, and the target."""
    far = 1.15 * THICK / 2
    axes.fill(
        [AXIS - thick_in / 2, AXIS + thick_in / 2, AXIS + far, AXIS - far],
        [tip, tip, plate, plate],
        color=palette.light,
        alpha=0.28,
        linewidth=0,
    )
    axes.plot(
        [AXIS - thick_in / 2, AXIS + thick_in / 2], [tip, tip], color=palette.ink, linewidth=LINE, solid_capstyle="butt"
    )
    axes.plot(
        [AXIS - far, AXIS + far],
        [plate, plate],
        color=palette.ink,
        linewidth=2.5 * LINE,
        solid_capstyle="butt",
        zorder=3,
    )
