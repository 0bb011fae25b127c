"""Designs drawn from the tolerances of one, each such that it can exist.

Each value is drawn on its own from a triangle: nothing below `low` or above `high`, most likely at the nominal
value. It needs no number beyond the three that are known, takes lopsided tolerances as they are, and puts
fewer parts at the ends than a flat distribution, as parts that were made to a nominal value do. A curve is
drawn as a whole, by one factor on all of it.
"""

from dataclasses import dataclass, replace

import numpy as np

from optics.chain.columns import Columns, Curves
from optics.fiberscope import RULES, SOLVE
from optics.spec import OutOfRange
from optics.study.margins_ranges import Tolerance, place
from optics.units import AnyUnit, Flags

AT_MOST_ONE = ("scene.target.reflectance", "source.filter.transmission")
ROUNDS = 40  # draws of whole sets before the rules are said to leave too little


@dataclass(frozen=True, slots=True)
class Drawn:
    """Samples that can exist. `redrawn`: how many of the first set broke a rule and were drawn again, and why."""

    values: AnyUnit  # [sample, tolerance]
    redrawn: int
    because: tuple[tuple[str, int], ...]


def triangular_quantile(*, share: AnyUnit, low: AnyUnit, value: AnyUnit, high: AnyUnit) -> AnyUnit:
    """Below which a share of a triangular distribution lies: its ends low and high, its peak at value.

    low + sqrt(share (high - low)(value - low)) up to the peak, high - sqrt((1 - share)(high - low)(high - value))
    beyond it. Its variance is (l^2 + v^2 + h^2 - lv - lh - vh)/18.
    References: jcgm_101 (6.4), closed_form.

    >>> float(triangular_quantile(share=0.5, low=0.0, value=1.0, high=2.0))
    1.0
    """
    below = low + np.sqrt(np.maximum(share, 0.0) * (high - low) * (value - low))
    above = high - np.sqrt(np.maximum(1.0 - share, 0.0) * (high - low) * (high - value))
    return np.where(share * (high - low) < value - low, below, above)


def latin_hypercube(count: int, dimensions: int, random: np.random.Generator) -> AnyUnit:
    """Shares [sample, dimension], one in each of `count` equal steps of every dimension, in random order.

    Never worse than count - 1 independent samples, so the binomial standard error is on the safe side.
    References: mckay_1979, owen_1997.
    """
    steps = random.permuted(np.tile(np.arange(count), (dimensions, 1)), axis=1).T
    return (steps + random.random((count, dimensions))) / count


def drawn(table: Columns, ranges: tuple[Tolerance, ...], samples: int, seed: int) -> Drawn:
    """Samples of one design (`table`, one row); those that break a rule across fields are drawn again, and counted.

    Raises OutOfRange: the rules leave almost nothing of the ranges.
    """
    random = np.random.default_rng(seed)
    values = _hypercube(ranges, samples, random)
    broken = broken_rules(applied(table, ranges, values))
    bad = np.flatnonzero(np.logical_or.reduce([mask for _, mask in broken])) if broken else np.zeros(0, int)
    because = tuple((said, int(mask.sum())) for said, mask in broken)
    open_rows = bad
    for _ in range(ROUNDS):
        if open_rows.size == 0:
            return Drawn(values, int(bad.size), because)
        fresh = _hypercube(ranges, samples, random)
        again = broken_rules(applied(table, ranges, fresh))
        good = fresh[~np.logical_or.reduce([mask for _, mask in again])] if again else fresh
        filled = open_rows[: len(good)]
        values[filled] = good[: len(filled)]
        open_rows = open_rows[len(filled) :]
    most = max(because, key=lambda item: item[1])
    raise OutOfRange(
        f"{bad.size / samples:.0%} of the samples are designs that cannot exist (most often: {most[0]}); "
        "narrow the tolerances."
    )


def applied(table: Columns, ranges: tuple[Tolerance, ...], values: AnyUnit) -> Columns:
    """The design of `table` (one row) once for each row of values [sample, tolerance], its values replaced."""
    many = table.take(np.zeros(len(values), int))
    numbers: dict[str, np.ndarray] = {}
    for column, tolerance in zip(values.T, ranges):
        if tolerance.curve:
            many = scaled_curve(many, tolerance.path, column)
            continue
        path, item = place(tolerance.path)
        if item is None:
            numbers[path] = column
        else:
            numbers.setdefault(path, many.number[path].copy())[:, item] = column
    return many.replaced(numbers)


def scaled_curve(table: Columns, path: str, factor: np.ndarray, added: float = 0.0) -> Columns:
    """The same designs with the curve at a path times a factor for each [design], plus what is added to all."""
    old = table.curve[path]
    new = Curves(old.on_grid[old.row] * factor[:, None] + added, old.covered[old.row], np.arange(table.count))
    return replace(table, curve={**table.curve, path: new})


def broken_rules(table: Columns) -> list[tuple[str, Flags]]:
    """(sentence, which designs break it) for every rule across fields that some design breaks."""
    found = []
    for rule in RULES:
        values = [_column(table, path) for path in rule.paths]
        if any(column is None for column in values):
            continue
        rows = np.flatnonzero(np.logical_and.reduce([_present(column) for column in values]))
        mask = np.zeros(table.count, bool)
        if rows.size:
            mask[rows] = ~np.broadcast_to(rule.holds(*(column[rows] for column in values)), rows.shape)
        found.append((f"{' and '.join(rule.paths[: rule.shown])}: {rule.sentence}", mask))
    found += [
        (f"{path} must be at most 1", (table.spectrum(path) > 1.0).any(axis=1))
        for path in AT_MOST_ONE
        if path in table.curve
    ]
    return [(said, mask) for said, mask in found if mask.any()]


def _hypercube(ranges: tuple[Tolerance, ...], samples: int, random: np.random.Generator) -> np.ndarray:
    low, value, high = np.array([(item.low, item.value, item.high) for item in ranges]).reshape(-1, 3).T
    return triangular_quantile(share=latin_hypercube(samples, len(ranges), random), low=low, value=value, high=high)


def _column(table: Columns, path: str) -> np.ndarray | None:
    return table.number.get(path, table.text.get(path))


def _present(column: np.ndarray) -> np.ndarray:
    """Which designs have this value (what is to be solved for is not there yet); of a list: any item of it."""
    if column.dtype == object:
        return (column != "") & (column != SOLVE)
    return (~np.isnan(column)).reshape(len(column), -1).any(axis=1)
