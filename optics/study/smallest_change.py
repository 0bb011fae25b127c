"""The smallest single change that makes a failing design pass: one number moved, found by bisection on the chain.

For each design the numbers that can help what fails are moved away from where they are, rung by rung in even
ratios, until what failed is met; between the last two rungs the edge is closed in on. There everything is asked: with the
change the design passes, with 2 % less of it it does not. Sizes of changes are compared as ratios.
"""

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from optics.chain.axes import evaluate_possible, holding
from optics.chain.columns import Columns
from optics.needs import Needs
from optics.study.pick_knobs import KNOBS, usual_bounds
from optics.study.pick_needs import FLAGS, margins, meeting
from optics.units import AnyUnit, Flags

RUNGS = np.log([1.03, 1.08, 1.17, 1.35, 1.7, 2.5, 4.0])
BISECTIONS = 40
CLOSE = 0.004  # of the change: how near the edge is found
LESS = 0.98  # with this share of the change the design must still fail
DIGITS = 4  # of a changed number, more where the change is small
TRIES = 4  # rounds in which a lane that does not hold gives way to others


@dataclass(frozen=True, slots=True)
class Change:
    """One number of the design file moved; both in the unit of the path."""

    path: str
    before: AnyUnit
    after: AnyUnit

    def as_dict(self) -> dict[str, Any]:
        return {"path": self.path, "from": self.before, "to": self.after}


@dataclass(slots=True)
class _Lanes:
    """One design with one knob moved one way, each: at `good` what failed is met, at `bad` it is not.

    `whole`: at `good` everything is met. All values are of the knob.
    """

    row: np.ndarray
    knob: np.ndarray
    start: np.ndarray
    end: np.ndarray  # the farthest value, on the side it moves to
    bad: np.ndarray
    good: np.ndarray
    whole: np.ndarray

    def take(self, at: np.ndarray) -> "_Lanes":
        return _Lanes(*(getattr(self, name)[at] for name in self.__slots__))

    def moved(self, to: np.ndarray) -> np.ndarray:
        """How far a value is from the start, as the logarithm of a ratio."""
        return np.abs(np.log(to / self.start))


@dataclass(frozen=True, slots=True)
class _Asked:
    """The designs, what is asked of them, and what each of them fails [need, design]."""

    needs: Needs
    table: Columns
    margin: dict[str, np.ndarray]

    def at(self, lanes: _Lanes, value: np.ndarray) -> tuple[Flags, Flags, Flags]:
        """(what failed is met, everything is met, what failed got better) with each lane's knob at a value [lane]."""
        moved, changed = self.table.take(lanes.row), {}
        for number in np.unique(lanes.knob):
            path = KNOBS[number].path
            changed[path] = np.where(lanes.knob == number, value, moved[path])
        moved = moved.replaced(changed)
        helped, whole, better = (np.zeros(len(value), bool) for _ in range(3))
        possible = np.flatnonzero(holding(moved))
        figures, ready = evaluate_possible(moved.take(possible))
        if figures.value:
            now = margins(self.needs, moved.take(possible), figures)
            before = {name: found[lanes.row[possible]] for name, found in self.margin.items()}
            helped[possible] = ready & np.logical_and.reduce(
                [(now[name] >= 0) | (was >= 0) for name, was in before.items()]
            )
            whole[possible] = ready & meeting(now)
            numbers = [(now[name] > was) | (was >= 0) for name, was in before.items() if name not in FLAGS]
            better[possible] = ready & np.logical_and.reduce(numbers) if numbers else ready
        return helped, whole, better


def smallest_changes(
    needs: Needs, table: Columns, margin: Mapping[str, np.ndarray], rows: np.ndarray
) -> dict[int, Change]:
    """For each of these failing designs the smallest single change that makes it pass; designs without one are left out.

    `margin` as `pick_needs.margins` gives it for the whole table.
    """
    asked = _Asked(needs, table.take(rows), {name: found[rows] for name, found in margin.items()})
    lanes = _lanes(asked)
    found: list[_Lanes] = [lanes.take(np.zeros(0, int))]
    for rung in RUNGS:
        if not len(lanes.row):
            break
        ratio = np.minimum(rung, lanes.moved(lanes.end))
        lanes.good = lanes.start * np.exp(np.sign(lanes.end - lanes.start) * ratio)
        helped, lanes.whole, better = asked.at(lanes, lanes.good)
        found.append(lanes.take(helped))
        # A knob that does not move every failing number the right way at first is left alone.
        done = helped | ~better | np.isin(lanes.row, lanes.row[lanes.whole]) | (ratio < rung)
        lanes = lanes.take(~done)
        lanes.bad = lanes.good
    near = _Lanes(*(np.concatenate([getattr(each, name) for each in found]) for name in _Lanes.__slots__))
    best: dict[int, Change] = {}
    for _ in range(TRIES):  # a lane that does not hold in the end gives way to those that it left behind
        if not len(near.row):
            break
        last, tried = _closed_in(asked, near)
        best |= _best(asked, last, rows)
        open_rows = [place for place, row in enumerate(rows) if int(row) not in best]
        near = near.take(~tried & np.isin(near.row, open_rows))
    return best


def _lanes(asked: _Asked) -> _Lanes:
    """Every knob and direction that may help all that fails, for each design that has the knob."""
    parts = []
    for number, knob in enumerate(KNOBS):
        start = asked.table[knob.path]
        low, high = usual_bounds(knob.path)
        for helped, end in ((knob.up, np.fmax(high, start)), (knob.down, np.fmin(low, start))):
            hopeless = np.logical_or.reduce([found < 0 for name, found in asked.margin.items() if name not in helped])
            row = np.flatnonzero(~np.isnan(start) & (start > 0) & (end > 0) & (end != start) & ~hopeless)
            none = np.zeros(len(row), bool)
            parts.append((row, np.full(len(row), number), start[row], end[row], start[row], end[row], none))
    return _Lanes(*(np.concatenate(each) for each in zip(*parts)))


def _closed_in(asked: _Asked, near: _Lanes) -> tuple[_Lanes, Flags]:
    """The edge where what failed is met, by halving in ratio until it is near against the change; and which lanes got there.

    A lane whose edge lies beyond one at which the same design passes whole drops out on the way.
    """
    lanes, left = near.take(np.arange(len(near.row))), np.arange(len(near.row))
    for _ in range(BISECTIONS):
        reached = np.full(asked.table.count, np.inf)
        np.minimum.at(reached, lanes.row[lanes.whole], lanes.moved(lanes.good)[lanes.whole])
        kept = lanes.moved(lanes.bad) < reached[lanes.row]
        lanes, left = lanes.take(kept), left[kept]
        rows = np.flatnonzero(lanes.moved(lanes.good) - lanes.moved(lanes.bad) > CLOSE * lanes.moved(lanes.good))
        if not rows.size:
            break
        middle = np.sqrt(lanes.good[rows] * lanes.bad[rows])
        helped, whole, _ = asked.at(lanes.take(rows), middle)
        lanes.bad[rows] = np.where(helped, lanes.bad[rows], middle)
        lanes.good[rows] = np.where(helped, middle, lanes.good[rows])
        lanes.whole[rows] = np.where(helped, whole, lanes.whole[rows])
    return lanes, np.isin(np.arange(len(near.row)), left)


def _best(asked: _Asked, lanes: _Lanes, rows: np.ndarray) -> dict[int, Change]:
    """Of each design the smallest change that holds: it passes, and with a little less of it it does not."""
    away = np.sign(lanes.end - lanes.start)
    after = np.array([_rounded(good, good - start) for good, start in zip(lanes.good, lanes.start)])
    after = np.where((after - lanes.end) * away > 0, lanes.good, after)  # rounding led past the bound
    holds = asked.at(lanes, after)[1] & ~asked.at(lanes, lanes.start + LESS * (after - lanes.start))[1]
    best: dict[int, Change] = {}
    for lane in np.lexsort((lanes.knob, lanes.moved(after))):
        row = int(rows[lanes.row[lane]])
        if holds[lane] and row not in best:
            best[row] = Change(KNOBS[lanes.knob[lane]].path, float(lanes.start[lane]), float(after[lane]))
    return best


def _rounded(number: float, change: float) -> float:
    """A number rounded onward, away from where it came from, to `DIGITS` digits or to a five-hundredth of its change."""
    digits = max(DIGITS - math.floor(math.log10(number)) - 1, 3 - math.floor(math.log10(abs(change))))
    scale = 10.0**digits
    whole = math.ceil(number * scale - 1e-6) if change > 0 else math.floor(number * scale + 1e-6)
    return round(whole / scale, digits)
