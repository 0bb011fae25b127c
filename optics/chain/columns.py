"""Designs as a struct of arrays: one row a design, one column a leaf of the design file.

Every stage of the chain reads its numbers here by dotted path, so one code path serves one design
and ten thousand. A number that a design does not have is nan; a text that it does not have is "".
"""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from optics.fiberscope import Fiberscope, leaves
from optics.spec import Curve
from optics.spectrum import GRID_NM, covered, on_grid
from optics.units import AnyUnit, Flags


@dataclass(frozen=True, slots=True)
class Curves:
    """The distinct curves of one path on the wavelength grid, and which of them each design has (-1: none)."""

    on_grid: AnyUnit  # [curve, wavelength]
    covered: Flags  # [curve, wavelength] inside the curve's own range
    row: AnyUnit  # [design]


@dataclass(frozen=True, slots=True)
class Columns:
    """`number` [design] or, for lists, [design, item]; `text` [design]; `curve` by path."""

    count: int
    number: dict[str, np.ndarray]
    text: dict[str, np.ndarray]
    curve: dict[str, Curves]

    def __getitem__(self, path: str) -> np.ndarray:
        """The number at a path for every design, nan where a design has none."""
        found = self.number.get(path)
        return np.full(self.count, np.nan) if found is None else found

    def get(self, path: str, otherwise: float) -> np.ndarray:
        """The number at a path, or a stated value where a design has none."""
        found = self[path]
        return np.where(np.isnan(found), otherwise, found)

    def items(self, path: str, otherwise: float) -> np.ndarray:
        """The numbers of a list [design, item]; rows shorter than the longest are filled up."""
        found = self.number.get(path)
        if found is None:
            return np.zeros((self.count, 0))
        return np.where(np.isnan(found), otherwise, found)

    def has(self, path: str) -> np.ndarray:
        """Whether a design has a number at this path [design]."""
        found = self.number.get(path)
        return np.zeros(self.count, bool) if found is None else ~np.isnan(found)

    def texts(self, path: str) -> np.ndarray:
        found = self.text.get(path)
        return np.full(self.count, "", dtype=object) if found is None else found

    def split(self, path: str) -> Iterator[tuple[str, np.ndarray]]:
        """(text, row numbers) for each distinct text at a path ("" where a design has none)."""
        found = self.texts(path)
        for text in sorted(set(found.tolist())):
            yield text, np.flatnonzero(found == text)

    def spectrum(self, path: str) -> np.ndarray:
        """The curve at a path on the grid [design, wavelength]; 0 where a design has none."""
        curves = self.curve.get(path)
        if curves is None:
            return np.zeros((self.count, len(GRID_NM)))
        return np.where(curves.row[:, None] >= 0, curves.on_grid[curves.row], 0.0)

    def covered(self, path: str) -> np.ndarray:
        """Where the curve at a path has data [design, wavelength]; everywhere where a design has none."""
        curves = self.curve.get(path)
        if curves is None:
            return np.ones((self.count, len(GRID_NM)), bool)
        return np.where(curves.row[:, None] >= 0, curves.covered[curves.row], True)

    def take(self, rows: np.ndarray) -> "Columns":
        """These rows as columns of their own."""
        return Columns(
            len(rows),
            {path: column[rows] for path, column in self.number.items()},
            {path: column[rows] for path, column in self.text.items()},
            {path: replace(curves, row=curves.row[rows]) for path, curves in self.curve.items()},
        )

    def replaced(self, numbers: Mapping[str, np.ndarray]) -> "Columns":
        """The same designs with whole number columns replaced by path (for the studies)."""
        return replace(self, number={**self.number, **numbers})


def columns(designs: Sequence[Fiberscope]) -> Columns:
    """The struct of arrays of a list of designs."""
    rows = [dict(leaves(design)) for design in designs]
    paths = {path: value for row in rows for path, value in row.items()}
    number, text, curve = {}, {}, {}
    for path, sample in paths.items():
        found = [row.get(path) for row in rows]
        if isinstance(sample, str) or any(isinstance(value, str) for value in found):
            text[path] = np.array([value if isinstance(value, str) else "" for value in found], dtype=object)
            if all(value is None or isinstance(value, str) for value in found):
                continue
            found = [None if isinstance(value, str) else value for value in found]
        if isinstance(sample, Curve):
            curve[path] = _curves(found)
        elif isinstance(sample, tuple):
            number[path] = _padded(found)
        else:
            number[path] = np.array([np.nan if value is None else value for value in found], dtype=float)
    return Columns(len(rows), number, text, curve)


def _curves(found: list[Curve | None]) -> Curves:
    distinct = {curve: None for curve in found if curve is not None}
    order = {curve: row for row, curve in enumerate(distinct)}
    return Curves(
        np.array([on_grid(curve) for curve in distinct]),
        np.array([covered(curve) for curve in distinct]),
        np.array([-1 if curve is None else order[curve] for curve in found]),
    )


def _padded(found: list[tuple | None]) -> np.ndarray:
    width = max((len(items) for items in found if items), default=0)
    table = np.full((len(found), width), np.nan)
    for row, items in enumerate(found):
        if items:
            table[row, : len(items)] = items
    return table


def written_out(values: np.ndarray, repeats: np.ndarray, fill: float) -> np.ndarray:
    """List columns [design, item] with each item written out as often as it repeats, filled up at the end."""
    width = int(repeats.sum(axis=1).max(initial=0))
    out, end, place = np.full((len(values), width), fill), np.cumsum(repeats, axis=1), np.arange(width)
    for item in range(values.shape[1]):
        here = (place >= (end[:, item] - repeats[:, item])[:, None]) & (place < end[:, item, None])
        out = np.where(here, values[:, item, None], out)
    return out


ABSENT = -1.2345e300  # stands for "no such number" where rows are compared


def distinct_rows(tables: Columns, prefixes: tuple[str, ...]) -> tuple[np.ndarray, np.ndarray]:
    """(first row of each distinct setting of these tables, for every row which of them it is)."""
    parts = [np.zeros((tables.count, 1))]
    for path in (path for path in sorted(tables.number) if path.startswith(prefixes)):
        parts += [np.nan_to_num(tables.number[path].reshape(tables.count, -1), nan=ABSENT)]
    for path in (path for path in sorted(tables.text) if path.startswith(prefixes)):
        parts += [np.unique(tables.text[path].astype(str), return_inverse=True)[1].reshape(-1, 1)]
    for path in (path for path in sorted(tables.curve) if path.startswith(prefixes)):
        parts += [tables.curve[path].row.reshape(-1, 1)]
    stacked = np.ascontiguousarray(np.hstack([part.astype(float) for part in parts]))
    keys = stacked.view(np.dtype((np.void, stacked.dtype.itemsize * stacked.shape[1]))).ravel()
    _, first, inverse = np.unique(keys, return_index=True, return_inverse=True)
    return first, inverse.ravel()
