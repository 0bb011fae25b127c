"""The paper of the PDF report: pages in inches, blocks of text, tables and pictures, and how they flow into columns.

A block knows its height before it is drawn, so nothing is cut off and nothing overlaps: what does not fit goes to the
next column. Pictures keep their lines and letters: their figure is drawn straight onto the page.
"""

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace

from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.transforms import Bbox

from optics.figures.canvas import POINTS_IN, sheet, width_of
from optics.figures.palette import LIGHT, THIN

# A4, lying: inches
WIDE, HIGH = 11.69, 8.27
SIDE, TOP, HEAD, BOTTOM, FOOTER, GAP = 0.6, 0.46, 0.42, 0.56, 0.33, 0.36
ROOM = WIDE - 2 * SIDE
COLUMN = (ROOM - GAP) / 2
FIRST = HIGH - TOP - HEAD  # where what stands below the title begins
FINE, BODY, HEADING, TITLE = 7.2, 8.5, 10.5, 15.0  # points of type
MONO, MONO_WIDTH = "DejaVu Sans Mono", 0.602  # width of a letter over its size
LEADING = 1.24  # from line to line, over the size of the type


@dataclass(frozen=True, slots=True)
class Block:
    """Something of known height: `draw(axes, left, top)`.

    `keep`: not parted from what follows; `split(high)`: in two, the first no higher; `again`: what stands above it anew
    (names of columns) at the top of another column.
    """

    high: float
    draw: Callable[[Axes, float, float], None]
    keep: bool = False
    split: "Callable[[float], tuple[Block | None, Block | None]] | None" = None
    again: "Block | None" = None


@dataclass(frozen=True, slots=True)
class Cell:
    """Words in a table's row: bold, soft or accented; to the right edge of their column or from its left."""

    text: str
    bold: bool = False
    color: str = LIGHT.ink
    right: bool = False


@dataclass(frozen=True, slots=True)
class Area:
    """A column on a page into which blocks flow from its top."""

    axes: Axes
    left: float
    top: float
    bottom: float = BOTTOM


class _Inset(Artist):
    """A figure drawn onto another one, its lower left corner at a place in inches."""

    def __init__(self, inner: Figure, left: float, bottom: float) -> None:
        super().__init__()
        self._inner, self._box = inner, Bbox.from_bounds(left, bottom, *inner.get_size_inches())
        inner.patch.set_visible(False)

    def draw(self, renderer) -> None:
        self._inner.dpi = self.get_figure(root=True).dpi
        self._inner.bbox_inches.set(self._box)
        self._inner.draw(renderer)


def page(title: str) -> tuple[Figure, Axes]:
    """An empty page with its title."""
    figure, axes = sheet(WIDE, HIGH, LIGHT)
    axes.text(SIDE, HIGH - TOP, title, fontsize=TITLE, weight="bold", color=LIGHT.ink, va="top")
    return figure, axes


def line_in(size: float) -> float:
    """Height of one line of type, inches."""
    return size * LEADING / POINTS_IN


def wrapped(text: str, size: float, room_in: float, bold: bool = False) -> list[str]:
    """A text in lines no wider than the room: broken at spaces, in long words after a mark, at worst within them."""
    lines: list[str] = [""]
    for word in text.split():
        for turn, part in enumerate(_parts(word, size, room_in, bold)):
            joined = f"{lines[-1]} {part}" if lines[-1] and not turn else lines[-1] + part
            if turn or (lines[-1] and width_of(joined, size, bold) > room_in):
                lines.append(part)
            else:
                lines[-1] = joined
    return lines


def _parts(word: str, size: float, room_in: float, bold: bool) -> list[str]:
    """A word in pieces that fit, nearly always itself."""
    parts = []
    while width_of(word, size, bold) > room_in and len(word) > 1:
        fits = max(n for n in range(1, len(word)) if n == 1 or width_of(word[:n], size, bold) <= room_in)
        marks = [at + 1 for at in range(fits // 3, fits) if word[at] in "._-/,"]
        cut = marks[-1] if marks else fits
        parts.append(word[:cut])
        word = word[cut:]
    return [*parts, word]


def _lines(axes: Axes, x: float, y: float, lines: Sequence[str], size: float, **look) -> None:
    """Lines of type whose first hangs from y."""
    for row, line in enumerate(lines):
        axes.text(x, y - (row + 0.86) * line_in(size) + 0.02, line, fontsize=size, va="baseline", **look)


def words(
    text: str, width: float = COLUMN, *, size: float = BODY, bold: bool = False, color: str = LIGHT.ink,
    below: float = 0.06, keep: bool = False,
) -> Block:  # fmt: skip
    """A paragraph and the space below it."""
    lines = wrapped(text, size, width, bold)

    def draw(axes: Axes, x: float, y: float) -> None:
        _lines(axes, x, y, lines, size, color=color, weight="bold" if bold else "normal")

    return Block(len(lines) * line_in(size) + below, draw, keep)


def heading(text: str, width: float = COLUMN) -> Block:
    return replace(words(text, width, size=HEADING, bold=True, below=0.07), keep=True)


def space(high: float) -> Block:
    return Block(high, lambda axes, x, y: None)


def picture(figure: Figure, below: float = 0.1) -> Block:
    high = float(figure.get_size_inches()[1])
    return Block(high + below, lambda axes, x, y: axes.figure.add_artist(_Inset(figure, x, y - high)) and None)


def row(
    cells: Sequence[Cell], widths: Sequence[float], *, size: float = BODY, pad: float = 0.045, rule: bool = True,
    gutter: float = 0.1, keep: bool = False, least: float = 0.0,
) -> Block:  # fmt: skip
    """One row of a table: each cell wrapped to its column, a hairline below."""
    told = [wrapped(cell.text, size, wide - gutter, cell.bold) for cell, wide in zip(cells, widths)]
    high = max(max(map(len, told)) * line_in(size) + pad, least)

    def draw(axes: Axes, x: float, y: float) -> None:
        left = x
        for cell, lines, wide in zip(cells, told, widths):
            look = {"color": cell.color, "weight": "bold" if cell.bold else "normal"}
            at = {"x": left + wide - gutter, "ha": "right"} if cell.right else {"x": left}
            _lines(axes, at.pop("x"), y - pad / 2, lines, size, **at, **look)
            left += wide
        if rule:
            axes.plot([x, x + sum(widths)], [y - high] * 2, color=LIGHT.grid, linewidth=0.6 * THIN)

    return Block(high, draw, keep)


def head_row(names: Sequence[Cell], widths: Sequence[float], size: float = FINE) -> Block:
    """The names of a table's columns."""
    return row([replace(cell, color=LIGHT.soft) for cell in names], widths, size=size, keep=True)


def listing(lines: Sequence[str], width: float = COLUMN, *, size: float = 6.6, columns: int = 2) -> Block:
    """Lines of a file in narrow columns, to be read down each; it breaks where the page does."""
    step, narrow = line_in(size) * 0.96, (width - 0.2 * (columns - 1)) / columns
    letters = int(narrow * POINTS_IN / (MONO_WIDTH * size))
    cut = [part for line in lines for part in _hard(line, letters)]
    return _listing(cut, step, narrow + 0.2, size, columns)


def _listing(lines: Sequence[str], step: float, wide: float, size: float, columns: int) -> Block:
    deep = math.ceil(len(lines) / columns)

    def draw(axes: Axes, x: float, y: float) -> None:
        for at, line in enumerate(lines):
            left, down = x + at // deep * wide, y - (at % deep + 0.85) * step
            axes.text(left, down, line, fontsize=size, family=MONO, color=LIGHT.ink, va="baseline")

    def split(high: float) -> tuple[Block | None, Block | None]:
        fits = int(high / step) * columns
        if fits < 6 * columns:
            return None, _listing(lines, step, wide, size, columns)
        return _listing(lines[:fits], step, wide, size, columns), _listing(lines[fits:], step, wide, size, columns)

    return Block(deep * step + 0.1, draw, split=split)


def _hard(line: str, letters: int) -> list[str]:
    """A line of a file in pieces of so many letters, each after the first marked as going on."""
    if len(line) <= letters:
        return [line]
    cut = max(line.rfind(" ", letters // 2, letters), line.rfind(",", letters // 2, letters)) + 1 or letters
    return [line[:cut], *_hard("  ↪ " + line[cut:].lstrip(), letters)]


def flow(blocks: Sequence[Block], areas: Iterator[Area]) -> float:
    """Draw blocks one below the other, on to the next area where one does not fit; the height where the last ended."""
    area, rest = next(areas), list(blocks)
    y = area.top
    while rest:
        block = rest.pop(0)
        if y - _together(block, rest) >= area.bottom - 1e-9:
            block.draw(area.axes, area.left, y)
            y -= block.high
            continue
        first, left = block.split(y - area.bottom) if block.split else (None, block)
        if first:
            first.draw(area.axes, area.left, y)
        elif y == area.top:  # taller than a whole column
            block.draw(area.axes, area.left, y)
            left = None
        rest = [left, *rest] if left else rest
        if rest:
            area = next(areas)
            y = area.top
            if rest[0].again:
                rest.insert(0, rest[0].again)
    return y


def _together(block: Block, rest: Sequence[Block]) -> float:
    """Height of a block with what it must not be parted from."""
    if not block.keep or not rest:
        return block.high
    return block.high + (min(rest[0].high, 1.0) if rest[0].split else _together(rest[0], rest[1:]))
