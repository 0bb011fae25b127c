"""The smallest single change that makes a failing design pass: one number moved, found by bisection on the chain.

For each design the numbers that can help what fails are moved away from where they are, rung by rung in
even ratios, until a rung passes; between the last two rungs the edge is closed in on. The answer is checked: with it
the design passes, with 2 % less of the change it does not. Sizes of changes are compared as ratios.
"""

import math
import typing
from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import numpy as np

from optics.chain.axes import evaluate_possible, holding
from optics.chain.columns import Columns
from optics.fiberscope import Fiberscope
from optics.needs import Needs
from optics.study.pick_needs import margins, meeting
from optics.units import AnyUnit, Flags

LIGHT = ("target_center_lux", "target_min_lux", "target_uva_w_m2")
DETAIL = ("smallest_gap_mm", "smallest_line_mm")
SEEN = (*DETAIL, "frame_hz")
SIZE = ("fits", "outer_diameter_mm", "passes")
RUNGS = np.log([1.03, 1.08, 1.17, 1.35, 1.7, 2.5, 4.0])
BISECTIONS = 40
CLOSE = 0.004  # of the change: how near the edge is found
LESS = 0.98  # with this share of the change the design must still fail
DIGITS = 6


@dataclass(frozen=True, slots=True)
class Knob:
    """One number: what a larger value can help, and what a smaller one can."""

    path: str
    up: tuple[str, ...] = ()
    down: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Change:
    """One number of the design file moved; both in the unit of the path."""

    path: str
    before: AnyUnit
    after: AnyUnit

    def as_dict(self) -> dict[str, Any]:
        return {"path": self.path, "from": self.before, "to": self.after}


# What can be bought or made otherwise; the job itself (distance, length, bore, needs) stays. In the order of the light.
KNOBS = (
    Knob("source.lamp.flux_lm", up=(*LIGHT, *SEEN)),
    Knob("source.lamp.flux_w", up=(*LIGHT, *SEEN)),
    Knob("guide.bundle.diameter_mm", up=(*LIGHT, "evenness", *SEEN), down=(*LIGHT, "evenness", *SEEN, *SIZE)),
    Knob("guide.bundle.packing_fraction", up=(*LIGHT, *SEEN)),
    Knob("scene.ports.offset_mm", up=(*LIGHT, "evenness", *SEEN), down=(*LIGHT, "evenness", *SEEN, *SIZE)),
    Knob(
        "image.objective.focal_mm",
        up=("target_min_lux", "evenness", *SEEN),
        down=("target_min_lux", "evenness", "field_of_view_deg", *SEEN),
    ),
    Knob("image.objective.f_number", up=DETAIL, down=SEEN),
    Knob(
        "image.objective.focus_mm",
        up=("target_min_lux", "evenness", "field_of_view_deg", *SEEN),
        down=("target_min_lux", "evenness", "field_of_view_deg", *SEEN),
    ),
    Knob("image.bundle.pitch_um", up=SEEN, down=(*SEEN, "bend_radius_mm", "passes")),
    Knob(
        "image.bundle.diameter_mm",
        up=("target_min_lux", "evenness", "field_of_view_deg"),
        down=("target_min_lux", "target_center_lux", "evenness", *SIZE, "bend_radius_mm"),
    ),
    Knob(
        "image.chip.pixel_um",
        up=("field_of_view_deg", *SEEN),
        down=("target_min_lux", "evenness", *SEEN, *SIZE),
    ),
    Knob("image.chip.longest_exposure_s", up=DETAIL, down=("frame_hz",)),
    Knob("viewer.camera.longest_exposure_s", up=DETAIL, down=("frame_hz",)),
    Knob("viewer.camera.relay_na", up=SEEN),
    Knob("body.section.outer_diameter_mm", up=("fits",), down=("outer_diameter_mm", "passes")),
    Knob("body.section.wall_mm", down=SIZE),
    Knob("body.section.clearance_mm", down=SIZE),
    Knob("body.passage.rigid_tip_mm", down=("rigid_tip_mm", "passes")),
    Knob("body.handling.bend_radius_mm", down=("bend_radius_mm", "passes")),
)


@dataclass(slots=True)
class _Lanes:
    """One design with one knob moved one way, each; `good` passes and `bad` does not, both values of the knob."""

    row: np.ndarray
    knob: np.ndarray
    start: np.ndarray
    end: np.ndarray  # the farthest value of the knob, on the side it moves to
    bad: np.ndarray
    good: np.ndarray

    def take(self, at: np.ndarray) -> "_Lanes":
        return _Lanes(*(getattr(self, name)[at] for name in self.__slots__))


def smallest_changes(
    needs: Needs, table: Columns, margin: Mapping[str, np.ndarray], rows: np.ndarray
) -> dict[int, Change]:
    """For each of these failing designs the smallest single change that makes it pass; designs without one are left out.

    `margin` as `pick_needs.margins` gives it for the whole table.
    """
    few = table.take(rows)
    lanes = _lanes(few, {name: found[rows] for name, found in margin.items()})
    found: list[_Lanes] = []
    for rung in RUNGS:
        if not len(lanes.row):
            break
        ratio = np.minimum(rung, np.abs(np.log(lanes.end / lanes.start)))
        lanes.good = lanes.start * np.exp(np.sign(lanes.end - lanes.start) * ratio)
        passes = _pass(needs, few, lanes, lanes.good)
        found.append(lanes.take(passes))
        rest = ~np.isin(lanes.row, lanes.row[passes]) & (ratio == rung)
        lanes = lanes.take(rest)
        lanes.bad = lanes.good
    near = (
        _Lanes(*(np.concatenate([getattr(each, name) for each in found]) for name in _Lanes.__slots__))
        if found
        else lanes
    )
    if not len(near.row):
        return {}
    return _best(needs, few, _closed_in(needs, few, near), rows)


@lru_cache(maxsize=64)
def usual_bounds(path: str) -> tuple[float, float]:
    """The usual bounds of a number of the design file, as its Spec states them.

    >>> usual_bounds("image.objective.f_number")
    (2.0, 11.0)
    """
    here: list[Any] = [Fiberscope]
    for part in path.split("."):
        field = next(model.model_fields[part] for model in here if part in getattr(model, "model_fields", {}))
        here = _members(field.annotation)
    return tuple(field.json_schema_extra["usual"])


def _members(annotation: Any) -> list[Any]:
    inner = typing.get_args(annotation)
    return [member for part in inner for member in _members(part)] if inner else [annotation]


def _lanes(few: Columns, margin: Mapping[str, np.ndarray]) -> _Lanes:
    """Every knob and direction that may help all that fails, for each design that has the knob."""
    failing = {name: found < 0 for name, found in margin.items()}
    parts = []
    for number, knob in enumerate(KNOBS):
        start = few[knob.path]
        low, high = usual_bounds(knob.path)
        for helped, end in ((knob.up, np.fmax(high, start)), (knob.down, np.fmin(low, start))):
            hopeless = np.logical_or.reduce([fails for name, fails in failing.items() if name not in helped])
            row = np.flatnonzero(~np.isnan(start) & (start > 0) & (end > 0) & (end != start) & ~hopeless)
            parts.append((row, np.full(len(row), number), start[row], end[row], start[row], end[row]))
    return _Lanes(*(np.concatenate(each) for each in zip(*parts)))


def _pass(needs: Needs, few: Columns, lanes: _Lanes, value: np.ndarray) -> Flags:
    """Whether each lane's design passes with its knob at a value [lane]."""
    moved = few.take(lanes.row)
    changed = {}
    for number in np.unique(lanes.knob):
        here = lanes.knob == number
        changed[KNOBS[number].path] = np.where(here, value, moved[KNOBS[number].path])
    moved = moved.replaced(changed)
    possible = np.flatnonzero(holding(moved))
    passes = np.zeros(len(value), bool)
    if possible.size:
        rows = moved.take(possible)
        figures, ready = evaluate_possible(rows)
        if figures.value:
            passes[possible] = ready & meeting(margins(needs, rows, figures))
    return passes


def _closed_in(needs: Needs, few: Columns, lanes: _Lanes) -> _Lanes:
    """The edge between failing and passing, by halving in ratio until it is near against the change.

    A lane whose edge lies beyond what another lane of the same design has reached drops out.
    """
    for _ in range(BISECTIONS):
        reached = np.full(few.count, np.inf)
        np.minimum.at(reached, lanes.row, np.abs(np.log(lanes.good / lanes.start)))
        lanes = lanes.take(np.abs(np.log(lanes.bad / lanes.start)) < reached[lanes.row])
        wide = np.abs(np.log(lanes.good / lanes.bad)) > CLOSE * np.abs(np.log(lanes.good / lanes.start))
        rows = np.flatnonzero(wide)
        if not rows.size:
            break
        middle = np.sqrt(lanes.good[rows] * lanes.bad[rows])
        passes = _pass(needs, few, lanes.take(rows), middle)
        lanes.good[rows] = np.where(passes, middle, lanes.good[rows])
        lanes.bad[rows] = np.where(passes, lanes.bad[rows], middle)
    return lanes


def _best(needs: Needs, few: Columns, lanes: _Lanes, rows: np.ndarray) -> dict[int, Change]:
    """Of each design the smallest change that holds: it passes, and with a little less it does not."""
    away = np.where(lanes.good > lanes.start, 1.0, -1.0)
    after = np.array([_rounded(good, side) for good, side in zip(lanes.good, away)])
    beyond = (after - lanes.end) * away > 0  # rounding led past the bound
    after = np.where(beyond, lanes.good, after)
    holds = _pass(needs, few, lanes, after) & ~_pass(needs, few, lanes, lanes.start + LESS * (after - lanes.start))
    ratio = np.abs(np.log(after / lanes.start))
    best: dict[int, Change] = {}
    for lane in np.lexsort((lanes.knob, ratio)):
        row = int(rows[lanes.row[lane]])
        if holds[lane] and row not in best:
            best[row] = Change(KNOBS[lanes.knob[lane]].path, float(lanes.start[lane]), float(after[lane]))
    return best


def _rounded(number: float, side: float) -> float:
    """A number to `DIGITS` digits, rounded up (side 1) or down (-1)."""
    scale = 10.0 ** (DIGITS - 1 - math.floor(math.log10(abs(number))))
    whole = math.ceil(number * scale - 1e-6) if side > 0 else math.floor(number * scale + 1e-6)
    return float(f"{whole / scale:.{DIGITS}g}")
