"""Blocks of text for the report: paragraphs, headings, rows of tables, the lines of a file; each wrapped, its height known."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

from matplotlib.axes import Axes

from optics.figures.canvas import POINTS_IN, width_of
from optics.figures.palette import LIGHT, THIN
from optics.figures.paper.sheet import BODY, COLUMN, FINE, HEADING, Block

MONO, MONO_WIDTH = "DejaVu Sans Mono", 0.602  # width of a letter over its size
LEADING = 1.24  # from line to line, over the size of the type


@dataclass(frozen=True, slots=True)
class Cell:
    """Words in a table's row: bold, soft or accented; to the right edge of their column or from its left."""

    text: str
    bold: bool = False
    color: str = LIGHT.ink
    right: bool = False


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
        marks = [at + 1 for at in range(fits // 3, fits) if word[at] in "._-–/,"]
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


def row(
    cells: Sequence[Cell], widths: Sequence[float], *, size: float = BODY, pad: float = 0.045, rule: bool = True,
    gutter: float = 0.1, keep: bool = False, least: float = 0.0,
) -> Block:  # fmt: skip
    """One row of a table: each cell wrapped to its column, a hairline below."""
    told = [wrapped(cell.text, size, wide - gutter, cell.bold) for cell, wide in zip(cells, widths)]
    deep = max(map(len, told)) * line_in(size)
    high = max(deep + pad, least)
    above = (high - deep) / 2

    def draw(axes: Axes, x: float, y: float) -> None:
        left = x
        for cell, lines, wide in zip(cells, told, widths):
            look = {"color": cell.color, "weight": "bold" if cell.bold else "normal"}
            at = {"x": left + wide - gutter, "ha": "right"} if cell.right else {"x": left}
            _lines(axes, at.pop("x"), y - above, lines, size, **at, **look)
            left += wide
        if rule:
            axes.plot([x, x + sum(widths)], [y - high] * 2, color=LIGHT.grid, linewidth=0.6 * THIN)

    return Block(high, draw, keep)


def head_row(names: Sequence[Cell], widths: Sequence[float], size: float = FINE) -> Block:
    """The names of a table's columns."""
    return row([replace(cell, color=LIGHT.soft) for cell in names], widths, size=size, keep=True)


def listing(lines: Sequence[str], width: float = COLUMN, *, size: float = 6.6, columns: int = 2) -> Block:
    """Lines of a file in narrow columns, to be read down each; empty lines are low; it breaks where the page does."""
    narrow = (width - 0.2 * (columns - 1)) / columns
    letters = int(narrow * POINTS_IN / (MONO_WIDTH * size))
    return _listing([part for line in lines for part in _hard(line, letters)], narrow + 0.2, size, columns)


def _listing(lines: Sequence[str], wide: float, size: float, columns: int) -> Block:
    step, edges = 0.95 * line_in(size), [0.0]
    for line in lines:
        edges.append(edges[-1] + step * (1.0 if line else 0.45))
    starts, deep = _turns(edges, edges[-1] / columns + step, columns), 0.0
    for start, end in zip(starts, [*starts[1:], len(lines)]):
        deep = max(deep, edges[end] - edges[start])

    def draw(axes: Axes, x: float, y: float) -> None:
        for at, line in enumerate(lines):
            column = sum(start <= at for start in starts) - 1
            down = y - (edges[at] - edges[starts[column]]) - 0.85 * step
            look = {"family": MONO, "color": LIGHT.ink, "weight": "bold" if line.startswith("[") else "normal"}
            axes.text(x + column * wide, down, line, fontsize=size, va="baseline", **look)

    def split(high: float) -> tuple[Block | None, Block | None]:
        fits = _turns(edges, high, columns + 1)[-1]
        if high < 8 * step or not 0 < fits < len(lines):
            return None, _listing(lines, wide, size, columns)
        return _listing(lines[:fits], wide, size, columns), _listing(lines[fits:], wide, size, columns)

    return Block(deep + 0.1, draw, split=split)


def _turns(edges: Sequence[float], high: float, columns: int) -> list[int]:
    """The line that each of so many columns begins with, each as full as its height allows."""
    starts = [0]
    for _ in range(columns - 1):
        starts.append(max(at for at in range(starts[-1], len(edges)) if edges[at] - edges[starts[-1]] <= high))
    return starts


def _hard(line: str, letters: int) -> list[str]:
    """A line of a file in pieces of so many letters, each after the first marked as going on."""
    if len(line) <= letters:
        return [line]
    cut = max(line.rfind(" ", letters // 2, letters), line.rfind(",", letters // 2, letters)) + 1 or letters
    return [line[:cut], *_hard("  ↪ " + line[cut:].lstrip(), letters)]
