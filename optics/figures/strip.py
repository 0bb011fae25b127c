"""The light strip: the whole instrument from lamp to viewer as one ribbon whose thickness is the light left.

There, the light that is left; back, the contrast that is left; both on one log scale that the strip
states. Wide for a screen, narrow (top to bottom) for a phone.
"""

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from optics.figures import strip_words as words
from optics.figures.canvas import sheet, width_of, wrapped
from optics.figures.palette import LARGE, LIGHT, LINE, SMALL, THIN, Palette
from optics.figures.strip_words import Leg, Station
from optics.report.answer import Report

LINE_IN = 0.168  # a line of small type
EASE = (1 - np.cos(np.linspace(0, np.pi, 24))) / 2  # how a ribbon narrows within a leg
WIDE_IN, NARROW_IN = 12.0, 3.9

# Wide: inches on the sheet, from its bottom and its left
HIGH, MIDDLE = 4.05, 1.95  # the sheet; the ribbon's axis
THICK, THIN_BACK = 1.05, 0.7  # of the ribbon at the lamp, and of the way back at the target
EDGE, LAMP, CONE = 0.3, 0.66, 0.95  # margin; where the first leg begins; from tip to target
LOSSES, NAMES, LIMITS = 2.56, 1.24, 0.89  # base lines of the losses, of the names, of what each part allows
PAD, CROWDED = 0.07, 0.32  # beside each name; how far every other name steps down when they crowd


def light_strip(
    report: Report, *, palette: Palette = LIGHT, width_in: float | None = None, narrow: bool = False
) -> Figure:
    """The strip of one design: wide, or with `narrow` from top to bottom and as high as it needs."""
    if narrow:
        from optics.figures.strip_narrow import narrow_strip

        return narrow_strip(report, palette=palette, width_in=width_in or NARROW_IN)
    width_in = width_in or WIDE_IN
    figure, axes = sheet(width_in, HIGH, palette)
    there, back, viewer = words.outward(report), words.backward(report), words.viewer_station(report)
    landed = words.target_station(report)
    last = viewer or landed
    end = width_in - EDGE - (_block_width(last) + (0.12 if viewer else 0.6) if last else 0.1)
    room = end - LAMP - (CONE if landed else 0.0)
    returning = [wide + 2.3 * PAD for wide in _needs_in(back)]
    outgoing, crowded = _slots(there, room - sum(returning))
    tip = _ribbon(axes, palette, "light left", palette.light, there, outgoing, EDGE, LAMP, THICK, crowded)
    _station(axes, palette, words.lamp_station(report), EDGE, EDGE)
    axes.text(EDGE, LOSSES, "loss", color=palette.soft, fontsize=SMALL, va="baseline")
    leaving = words.exit_station(report)
    _station(axes, palette, leaving, min(tip - 1.1, width_in - EDGE - _block_width(leaving)), tip)
    if landed:
        plate = tip + CONE
        _cone(
            axes, palette, tip, plate, thickness(there[-1].left if there else 1.0, words.full_scale_db(there)) * THICK
        )
        _station(axes, palette, landed, max(plate - 0.1, tip - 0.85 + _block_width(leaving)), plate)
    if viewer:
        x = _ribbon(
            axes,
            palette,
            words.back_title(report),
            palette.back,
            back,
            returning,
            plate,
            plate + 0.05,
            THIN_BACK,
            False,
        )
        axes.plot(
            [x, x],
            [MIDDLE - 0.5 * THICK, MIDDLE + 0.5 * THICK],
            color=palette.ink,
            linewidth=LINE,
            solid_capstyle="butt",
        )
        _station(axes, palette, viewer, x + 0.1, x)
        for y, text in ((LOSSES + 0.06, "contrast\nof each part"), (LIMITS, "allowed by each\nalone, lp/mm")):
            _lines(axes, x + 0.1, y, text, color=palette.soft)
    _foot(axes, palette, report, tip)
    return figure


def thickness(left: float | np.ndarray, scale_db: float) -> np.ndarray:
    """Thickness (1 at the start) for the share that is left, on the strip's log scale; never less than a hairline."""
    return np.maximum(1 + 10 * np.log10(np.maximum(left, 1e-12)) / scale_db, 0.015)


def _needs_in(legs: list[Leg]) -> list[float]:
    """How wide the words of each leg are."""
    return [max(width_of(text, SMALL, leg.marked) for text in (leg.split, leg.loss, leg.limit)) for leg in legs]


def _slots(legs: list[Leg], room_in: float) -> tuple[list[float], bool]:
    """Width of each leg, its words and an equal share of what is left; and whether names must step down in turn."""
    need = np.array(_needs_in(legs))
    each = (room_in - need.sum()) / max(len(need), 1)
    if each >= PAD:
        return list(need + np.minimum(each, 0.8)), False
    return list((need + 0.15) * room_in / (need + 0.15).sum()), True


def _edges(thick_in: float | np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    return MIDDLE - np.asarray(thick_in) / 2, MIDDLE + np.asarray(thick_in) / 2


def _ribbon(
    axes: Axes,
    palette: Palette,
    title: str,
    color: str,
    legs: list[Leg],
    slots: list[float],
    begin: float,
    x: float,
    full_in: float,
    crowded: bool,
) -> float:
    """A ribbon over its legs, before a band as thick as without any loss; each leg has its loss above and its name below."""
    scale_db = words.full_scale_db(legs)
    along, thick, before = [begin, x], [1.0, 1.0], 1.0
    axes.fill_between([begin, x + sum(slots)], *_edges(np.full(2, full_in)), color=palette.ghost, linewidth=0)
    for turn, (leg, wide) in enumerate(zip(legs, slots)):
        after = float(thickness(leg.left, scale_db))
        along.extend(x + wide * (0.25 + 0.5 * np.linspace(0, 1, len(EASE))))
        thick.extend(before + (after - before) * EASE)
        _words(axes, palette, leg, x + wide / 2, CROWDED * (turn % 2) if crowded else 0.0)
        x, before = x + wide, after
    axes.fill_between([*along, x], *_edges(np.array([*thick, before]) * full_in), color=color, linewidth=0)
    axes.text(
        begin + 0.1,
        MIDDLE,
        title,
        color=palette.on_light if color == palette.light else palette.on_back,
        fontsize=SMALL,
        va="center",
    )
    return x


def _words(axes: Axes, palette: Palette, leg: Leg, x: float, down: float) -> None:
    ink, weight = (
        (palette.accent, "bold") if leg.marked else (palette.soft if leg.loss in ("0", "1") else palette.ink, "normal")
    )
    _lines(axes, x, LOSSES + (0.15 if down else 0.0), leg.loss, color=ink, weight=weight, ha="center")
    _lines(axes, x, NAMES - down, leg.split, color=ink, weight=weight, ha="center")
    if down:
        axes.plot([x, x], [NAMES - down + 0.13, NAMES + 0.1], color=palette.grid, linewidth=THIN)
    if leg.limit:
        _lines(axes, x, LIMITS, leg.limit, color=ink if leg.marked else palette.soft, weight=weight, ha="center")


def _lines(axes: Axes, x: float, y: float, text: str, **look) -> None:
    """Small type whose first line stands on y."""
    for row, line in enumerate(text.split("\n")):
        axes.text(x, y - 0.145 * row, line, fontsize=SMALL, va="baseline", **look)


def _cone(axes: Axes, palette: Palette, tip: float, plate: float, thick_in: float) -> None:
    """The light on its way from the tip to the target, and the target."""
    low, high = _edges(np.array([thick_in, 1.25 * THICK]))
    axes.fill(
        [tip, tip, plate, plate], [low[0], high[0], high[1], low[1]], color=palette.light, alpha=0.28, linewidth=0
    )
    for x, at, line in ((tip, 0, LINE), (plate, 1, 2.5 * LINE)):
        axes.plot([x, x], [low[at], high[at]], color=palette.ink, linewidth=line, solid_capstyle="butt", zorder=3)


def _block_width(station: Station) -> float:
    texts = [
        (station.heading, SMALL, False),
        (station.number, LARGE, True),
        *((text, SMALL, met is False) for text, met in station.lines),
    ]
    return max(width_of(*text) for text in texts)


def _station(axes: Axes, palette: Palette, station: Station, left: float, at: float) -> None:
    """Heading, number and lines of a station, and a hairline down to its place on the ribbon."""
    y = HIGH - 0.1
    axes.text(left, y, station.heading, color=palette.soft, fontsize=SMALL, va="top")
    axes.text(left, y - 0.17, station.number, color=palette.ink, fontsize=LARGE, weight="bold", va="top")
    for row, (text, met) in enumerate(station.lines):
        ink = palette.accent if met is False else palette.ink if met else palette.soft
        axes.text(
            left,
            y - 0.45 - row * LINE_IN,
            text,
            color=ink,
            fontsize=SMALL,
            va="top",
            weight="bold" if met is False else "normal",
        )
    foot = y - 0.47 - len(station.lines) * LINE_IN
    if left <= at <= left + _block_width(station):
        axes.plot(
            [at, at],
            [MIDDLE + THICK * 0.5 + 0.3, max(foot, MIDDLE + THICK * 0.5 + 0.3)],
            color=palette.grid,
            linewidth=THIN,
        )


def _foot(axes: Axes, palette: Palette, report: Report, tip: float) -> None:
    """The diagnosis of both ways, and what the thickness means."""
    width = axes.get_xlim()[1]
    common = {"fontsize": SMALL, "va": "top", "linespacing": 1.15}
    axes.text(EDGE, 0.56, wrapped(words.largest_loss(report), SMALL, tip - EDGE - 0.3), color=palette.ink, **common)
    axes.text(EDGE, 0.2, words.scale_sentence(report), color=palette.soft, **common)
    if report.detail:
        axes.text(
            tip + 0.1,
            0.56,
            wrapped(words.what_limits(report), SMALL, width - tip - 0.1 - EDGE),
            color=palette.ink,
            **common,
        )
