"""The paper of the report: pages in inches, pictures set on them, and how blocks of known height flow into columns.

What does not fit in a column goes to the next one, so nothing is cut off and nothing overlaps. A picture's figure is drawn
straight onto the page: its lines stay lines, its letters letters.
"""

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass

from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.transforms import Bbox

from optics.figures.canvas import sheet, width_of
from optics.figures.palette import LIGHT

# A4, lying: inches
WIDE, HIGH = 11.69, 8.27
SIDE, TOP, HEAD, BOTTOM, FOOTER, GAP = 0.6, 0.46, 0.42, 0.56, 0.33, 0.36
ROOM = WIDE - 2 * SIDE
COLUMN = (ROOM - GAP) / 2
TITLE_ROOM = ROOM - 2.4
FIRST = HIGH - TOP - HEAD  # where what stands below the title begins
FINE, BODY, HEADING, TITLE = 7.2, 8.5, 10.5, 15.0  # points of type


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
class Area:
    """A column on a page into which blocks flow from its top."""

    axes: Axes
    left: float
    top: float
    bottom: float = BOTTOM


class Inset(Artist):
    """A figure drawn onto another one, its lower left corner at a place in inches."""

    def __init__(self, inner: Figure, left: float, bottom: float) -> None:
        super().__init__()
        self._inner, self.box = inner, Bbox.from_bounds(left, bottom, *inner.get_size_inches())
        inner.patch.set_visible(False)

    def draw(self, renderer) -> None:
        self._inner.dpi = self.get_figure(root=True).dpi
        self._inner.bbox_inches.set(self.box)
        self._inner.draw(renderer)


def page(pages: list[Figure], title: str) -> Axes:
    """One page more, empty but for its title; its sheet in inches."""
    figure, axes = sheet(WIDE, HIGH, LIGHT)
    pages.append(figure)
    size = max(TITLE * min(1.0, TITLE_ROOM / width_of(title, TITLE, True)), HEADING)
    said = trimmed(title, size, TITLE_ROOM, True)
    axes.text(SIDE, HIGH - TOP, said, fontsize=size, weight="bold", color=LIGHT.ink, va="top")
    return axes


def trimmed(text: str, size: float, room_in: float, bold: bool = False) -> str:
    """A text that fits on one line, the end left off where it must be."""
    if width_of(text, size, bold) <= room_in:
        return text
    while len(text) > 1 and width_of(f"{text}…", size, bold) > room_in:
        text = text[:-1].rstrip()
    return f"{text}…"


def space(high: float) -> Block:
    return Block(high, lambda axes, x, y: None)


def picture(figure: Figure, below: float = 0.1) -> Block:
    high = float(figure.get_size_inches()[1])
    return Block(high + below, lambda axes, x, y: axes.figure.add_artist(Inset(figure, x, y - high)) and None)


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


def areas(pages: list[Figure], first: Area, title: str, lefts: Sequence[float]) -> Iterator[Area]:
    """The first area, then the columns of as many new pages as are asked for."""
    yield first
    while True:
        axes = page(pages, title)
        for left in lefts:
            yield Area(axes, left, FIRST)


def column(pages: list[Figure], axes: Axes, left: float, top: float) -> Iterator[Area]:
    """One column of a page; what it does not hold goes to pages of its own."""
    return areas(pages, Area(axes, left, top), "Continued", (left,))
