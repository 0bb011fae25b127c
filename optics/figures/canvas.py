"""The sheet that pictures are drawn on: figures with fixed margins in inches, quiet axes, numbers of three digits."""

import math
from collections.abc import Sequence
from functools import lru_cache
from typing import Any

from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.font_manager import FontProperties
from matplotlib.textpath import text_to_path

from optics.figures.palette import SMALL, TEXT, THIN, Palette

POINTS_IN = 72.0
ROUNDED_UP = 1.035


def sheet(width_in: float, height_in: float, palette: Palette) -> tuple[Figure, Axes]:
    """A figure whose one bare axes is measured in inches, (0, 0) at the bottom left."""
    figure = Figure(figsize=(width_in, height_in), facecolor=palette.paper)
    FigureCanvasAgg(figure)
    axes = figure.add_axes((0.0, 0.0, 1.0, 1.0))
    axes.set(xlim=(0, width_in), ylim=(0, height_in))
    axes.axis("off")
    return figure, axes


def chart(
    width_in: float, height_in: float, palette: Palette, *, left: float, right: float, bottom: float, top: float
) -> tuple[Figure, Axes]:
    """A figure with one quiet axes; the margins are in inches."""
    figure = Figure(figsize=(width_in, height_in), facecolor=palette.paper)
    FigureCanvasAgg(figure)
    return figure, panel(figure, palette, left=left, right=right, bottom=bottom, top=top)


def panel(figure: Figure, palette: Palette, *, left: float, right: float, bottom: float, top: float) -> Axes:
    """One quiet axes on a figure; the margins are in inches."""
    width, height = figure.get_size_inches()
    box = (left / width, bottom / height, (width - left - right) / width, (height - bottom - top) / height)
    return quiet(figure.add_axes(box), palette)


def quiet(axes: Axes, palette: Palette) -> Axes:
    """Thin axes in soft ink, no frame above and on the right."""
    axes.set_facecolor(palette.paper)
    for side, spine in axes.spines.items():
        spine.set(visible=side in ("left", "bottom"), color=palette.soft, linewidth=THIN)
    axes.tick_params(colors=palette.soft, labelsize=SMALL, width=THIN, length=3, which="both")
    axes.tick_params(which="minor", length=1.5)
    for axis in (axes.xaxis, axes.yaxis):
        axis.label.set(color=palette.ink, fontsize=TEXT)
    return axes


def three(value: float | None) -> str:
    """A number as people read it: three digits, thousands with commas, a dash for none.

    >>> [three(x) for x in (346861.98, 2.2024, 0.0550, 12.0, None, 0.000241, 0.0)]
    ['347,000', '2.2', '0.055', '12', '-', '0.000241', '0']
    """
    if value is None or not math.isfinite(value):
        return "-"
    if abs(value) >= 1000:
        scale = 10 ** max(len(str(int(abs(value)))) - 3, 0)
        return f"{round(value / scale) * scale:,}"
    if value != 0 and abs(value) < 1e-4:
        return f"{value:.3g}".replace("e-0", "e-")
    return f"{value:.3g}"


def round_length(value: float) -> float:
    """The nearest length below that people count in: 1, 2 or 5 times a power of ten.

    >>> round_length(0.37), round_length(5.9), round_length(12.0)
    (0.2, 5.0, 10.0)
    """
    power = 10.0 ** math.floor(math.log10(max(value, 1e-12)))
    return next(step for step in (5 * power, 2 * power, power) if step <= value * (1 + 1e-9))


def seconds(value_s: float | None) -> str:
    """A time in the unit that reads best.

    >>> seconds(0.000241), seconds(0.02), seconds(1.5)
    ('0.241 ms', '20 ms', '1.5 s')
    """
    if value_s is None:
        return "-"
    return f"{three(value_s)} s" if value_s >= 1 else f"{three(value_s * 1e3)} ms"


def lost(factor: float) -> str:
    """What a factor takes away, as a share of what came: tiny rests are told as the rest.

    >>> lost(0.694), lost(1.0), lost(0.18), lost(0.0004), lost(1.02), lost(0.9996), lost(0.998)
    ('−31 %', '0', '−82 %', '×0.0004', '+2 %', '0', '−0.2 %')
    """
    if abs(factor - 1) < 5e-4:
        return "0"
    if factor < 0.01:
        return f"×{factor:.1g}"
    share = (factor - 1) * 100
    return f"{'+' if share > 0 else '−'}{abs(share):.{0 if abs(share) >= 1.5 else 1}f} %"


@lru_cache(maxsize=4096)
def width_of(text: str, size: float, bold: bool = False) -> float:
    """Width of the longest line of a text, inches; a little more than on paper, since screens round letters up."""
    font = FontProperties(size=size, weight="bold" if bold else "normal")
    return (
        max(
            (text_to_path.get_text_width_height_descent(line, font, False)[0] for line in text.split("\n")), default=0.0
        )
        / POINTS_IN
        * ROUNDED_UP
    )


def wrapped(text: str, size: float, room_in: float) -> str:
    """A text in lines no wider than the room, broken at spaces."""
    lines: list[str] = []
    for word in text.split():
        if lines and width_of(f"{lines[-1]} {word}", size) <= room_in:
            lines[-1] += f" {word}"
        else:
            lines.append(word)
    return "\n".join(lines)


def spread(wanted: Sequence[float], gap: float, low: float, high: float) -> list[float]:
    """Places near the wanted ones, in the same order, at least a gap apart, inside [low, high] if they fit.

    >>> spread([1.0, 1.1, 3.0], 0.5, 0.0, 4.0)
    [0.8, 1.3, 3.0]
    """
    order = sorted(range(len(wanted)), key=lambda at: wanted[at])
    blocks: list[list[Any]] = []  # [first place, members]
    for at in order:
        blocks.append([wanted[at], [at]])
        while True:
            place, members = blocks[-1]
            room = gap * (len(members) - 1)
            place = min(max(place, low), max(high - room, low))
            blocks[-1][0] = place
            if len(blocks) < 2 or blocks[-2][0] + gap * len(blocks[-2][1]) <= place + 1e-12:
                break
            before = blocks.pop(-2)
            joined = before[1] + members
            ideal = sum(wanted[one] - gap * rank for rank, one in enumerate(joined)) / len(joined)
            blocks[-1] = [ideal, joined]
    placed = [0.0] * len(wanted)
    for place, members in blocks:
        for rank, one in enumerate(members):
            placed[one] = round(place + gap * rank, 9)
    return placed
