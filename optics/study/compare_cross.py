"""Where one design overtakes another: in guide length and in bend radius, by a scan and halving.

Both designs of a pair are moved alike: the same length, or the same radius of their first bend, all else as it
is. A crossover is where the better one changes; numbers that are the same over a stretch do not cross there.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import combinations, pairwise

import numpy as np

from optics.chain.axes import evaluate_possible, holding
from optics.chain.columns import Columns, columns
from optics.fiberscope import Fiberscope
from optics.units import AnyUnit

LENGTH, RADIUS = "guide.bundle.length_m", "guide.bundle.bends.0.radius_mm"
RANGES = {LENGTH: (0.1, 100.0), RADIUS: (2.0, 200.0)}  # scanned in even ratios
SCANNED = 61
HALVINGS = 26
ALIKE = 1e-9
# The number that decides; ahead is who has more of it.
DECIDES = {
    "delivered_lm": "delivered_lm",
    "color_temperature_k": "color_temperature_k",
    "color_rendering_index": "color_rendering_index",
    "smallest_gap_mm": "resolved_lp_mm",  # the finer gap is the higher resolution, 0 where nothing is resolved
}


@dataclass(frozen=True, slots=True)
class Crossover:
    """Where, along a path, the second design of a pair overtakes the first or the first the second; None: nowhere in range.

    `ahead` has more lumens, the higher color temperature or rendering, or the finer detail beyond the value; without a
    crossover, all along ("" where they are the same, or where the path is not one of both designs).
    """

    quantity: str
    path: str
    value: AnyUnit | None
    between: tuple[str, str]
    ahead: str
    words: str


@dataclass(frozen=True, slots=True)
class _Bracket:
    """A change of sign between two scanned values of a path, for one quantity and one pair."""

    pair: tuple[int, int]
    path: str
    quantity: str
    low: AnyUnit
    high: AnyUnit
    sign: int  # of first less second at `low`


def crossovers(scopes: Sequence[Fiberscope], names: Sequence[str]) -> tuple[Crossover, ...]:
    """All crossovers of all pairs: for each quantity and path those in range, or one line that says there is none."""
    table, found = columns(list(scopes)), []
    for path, (low, high) in RANGES.items():
        has = _has(table, path)
        steps = np.geomspace(low, high, SCANNED)
        if not has.any():
            steps = steps[:2]  # nothing to move: one look for the shape of the answer
        numbers = _along(table, path, np.tile(steps, len(scopes)), np.repeat(np.arange(len(scopes)), len(steps)))
        for quantity in DECIDES:
            curve = numbers[quantity].reshape(len(scopes), len(steps))
            found += [
                (quantity, path, pair, *_changes(curve, pair, steps, path, quantity, has[list(pair)].all()))
                for pair in combinations(range(len(scopes)), 2)
            ]
    edges = iter(_closed_in(table, [bracket for *_, brackets, _ in found for bracket in brackets]))
    rows = []
    for quantity, path, pair, brackets, ahead in found:
        between = (names[pair[0]], names[pair[1]])
        for bracket in brackets:
            beyond = between[1] if bracket.sign > 0 else between[0]
            rows.append(_row(quantity, path, next(edges), between, beyond))
        if not brackets:
            rows.append(_row(quantity, path, None, between, "" if ahead is None else between[ahead]))
    order = list(DECIDES)
    return tuple(sorted(rows, key=lambda row: (order.index(row.quantity), list(RANGES).index(row.path))))


def _has(table: Columns, path: str) -> np.ndarray:
    """Which designs have the number that the path moves [design]."""
    if path == LENGTH:
        return np.ones(table.count, bool)
    return (table.items("guide.bundle.bends.angle_deg", 0.0) > 0)[:, :1].any(axis=1)


def _along(table: Columns, path: str, values: np.ndarray, rows: np.ndarray) -> dict[str, np.ndarray]:
    """The numbers that decide, of these designs with these values at the path; nan where the rules forbid it."""
    moved = table.take(rows)
    if path == LENGTH:
        moved = moved.replaced({LENGTH: values})
    elif "guide.bundle.bends.radius_mm" in moved.number and moved.number["guide.bundle.bends.radius_mm"].shape[1]:
        radius = moved.number["guide.bundle.bends.radius_mm"].copy()
        radius[:, 0] = np.where(np.isnan(radius[:, 0]), np.nan, values)
        moved = moved.replaced({"guide.bundle.bends.radius_mm": radius})
    found = {quantity: np.full(len(values), np.nan) for quantity in DECIDES}
    good = np.flatnonzero(holding(moved))
    figures, ready = evaluate_possible(moved.take(good))
    for quantity, name in DECIDES.items():
        found[quantity][good] = np.where(ready, figures.value[name], np.nan)
    return found


def _sign(first: np.ndarray, second: np.ndarray) -> np.ndarray:
    """1 where the first is ahead, -1 where the second is, 0 where they are alike or unknown."""
    apart = first - second
    alike = np.abs(apart) <= ALIKE * np.maximum(np.abs(first), np.abs(second))
    return np.where(np.isnan(apart) | alike, 0, np.sign(np.nan_to_num(apart))).astype(int)


def _changes(curve, pair, steps, path, quantity, both: bool) -> tuple[list[_Bracket], int | None]:
    """Brackets of every change of the one ahead, and, without any, who is ahead all along (None: nobody)."""
    sign = _sign(curve[pair[0]], curve[pair[1]])
    told = np.flatnonzero(sign)
    if not both or not told.size:
        return [], None
    brackets = [
        _Bracket(pair, path, quantity, steps[at], steps[after], int(sign[at]))
        for at, after in pairwise(told)
        if sign[at] != sign[after]
    ]
    return brackets, None if brackets else int(sign[told[0]] < 0)


def _closed_in(table: Columns, brackets: list[_Bracket]) -> list[float]:
    """Where in each bracket the one ahead changes: where the first of it ceases to be ahead, by halving in ratio."""
    edges = np.zeros(len(brackets))
    for path in RANGES:
        mine = [place for place, bracket in enumerate(brackets) if bracket.path == path]
        if not mine:
            continue
        low, high = (np.array([getattr(brackets[place], end) for place in mine]) for end in ("low", "high"))
        rows = np.array([brackets[place].pair for place in mine]).T.ravel()
        was = np.array([brackets[place].sign for place in mine])
        for _ in range(HALVINGS):
            middle = np.sqrt(low * high)
            numbers = _along(table, path, np.tile(middle, 2), rows)
            first, second = (
                np.array([numbers[brackets[place].quantity][at + half * len(mine)] for at, place in enumerate(mine)])
                for half in (0, 1)
            )
            still = _sign(first, second) == was
            low, high = np.where(still, middle, low), np.where(still, high, middle)
        edges[mine] = np.sqrt(low * high)
    return [float(edge) for edge in edges]


WORDS = {
    "delivered_lm": "more lumens",
    "color_temperature_k": "the higher color temperature",
    "color_rendering_index": "the higher color rendering",
    "smallest_gap_mm": "the finer detail",
}
ALONG = {LENGTH: ("length", "m"), RADIUS: ("radius of the first bend", "mm")}


def _row(quantity: str, path: str, value: float | None, between: tuple[str, str], ahead: str) -> Crossover:
    what, unit = ALONG[path]
    low, high = RANGES[path]
    if value is not None:
        words = f"beyond a {what} of {value:.3g} {unit} {ahead} gives {WORDS[quantity]}"
    elif ahead:
        words = f"none from {low:g} to {high:g} {unit}: {ahead} gives {WORDS[quantity]} all along"
    elif path == RADIUS:
        words = "none: the numbers are the same, or not both have a bend"
    else:
        words = f"none from {low:g} to {high:g} {unit}: the numbers are the same, or not both have them"
    return Crossover(quantity, path, value, between, ahead, words)
