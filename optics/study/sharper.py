"""Smaller is not always sharper: what is resolved at the target over pitch, f-number and the lamp's light, all else as it is.

Each number is moved over a range, all in one batch through the chain; where most is resolved is closed in on. A finer pitch
helps until cores share their light or starve; a wider stop until blur or the cores' cone take over; more light until
the lattice or the lens limits.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from optics.chain.columns import columns
from optics.fiberscope import Fiberscope
from optics.spec import require
from optics.study.sharper_curves import losses, numbered, way_of
from optics.study.sharper_sweeps import SWEEPS, Sweep, Tried, between, joined, places, tried
from optics.units import AnyUnit, Flags
from optics.viewer.camera import LEAST_PIXELS_PER_PITCH
from optics.viewer.detail import PARTS

FLAT = 0.95  # as good as the best: what is resolved is at least this share of it
ROUNDS = 3  # of closing in on the best
SAME = 1e-6  # relative: no difference
END = 0.02  # in the log of the number: so near the end of its range it counts as the end
STEP = 1.25  # how far beyond the best the next part is asked for its cost
COST = 2e-3  # in the log of contrast: less is no cost


@dataclass(frozen=True, slots=True)
class Sharpness:
    """What is resolved at the target over one number of the design; 0: nothing. `value`, `now`, `best` and `enough` in its unit.

    `toward`: the direction that promises more, -1 for a smaller number. `best`: where most is resolved, of equal ones the
    nearest to now; `stops`: it lies inside the range, so going on makes it no better; `because`: the part that takes
    over there, or that limits where the range ends (None: nothing is resolved). `enough`: coming from the other end, the
    first place within 5 % of the best. `core_count` nan without cores, `pixels_per_pitch` nan without a camera on them;
    `few_pixels` where they beat with the cores.
    """

    path: str
    toward: int
    now: AnyUnit
    now_lp_mm: float
    value: AnyUnit
    resolved_lp_mm: np.ndarray
    lattice_limit_lp_mm: np.ndarray
    limited_by: tuple[str | None, ...]
    core_count: np.ndarray
    pixels_per_pitch: np.ndarray
    few_pixels: Flags
    best: AnyUnit
    best_lp_mm: float
    stops: bool
    because: str | None
    enough: AnyUnit


def over_pitch(fiberscope: Fiberscope, count: int = 61) -> Sharpness:
    """Over the pitch of the cores at the same share of core, NA and spread (of a chip: of its pixels, the chip's size kept).

    The range ends where a camera would have too few pixels to tell neighboring cores apart. Raises OutOfRange without an
    image, or for fewer than 3 places.
    """
    return over_all(fiberscope, count, ("pitch",))[0]


def over_f_number(fiberscope: Fiberscope, count: int = 61) -> Sharpness:
    """Over the f-number of the objective. Raises as `over_pitch`."""
    return over_all(fiberscope, count, ("f_number",))[0]


def over_flux(fiberscope: Fiberscope, count: int = 61) -> Sharpness:
    """Over the lamp's flux, its color and cone as they are. Raises as `over_pitch`."""
    return over_all(fiberscope, count, ("flux",))[0]


def over_all(
    fiberscope: Fiberscope, count: int = 61, which: Sequence[str] = ("pitch", "f_number", "flux")
) -> tuple[Sharpness, ...]:
    """Several of them in one batch."""
    require("count", count, "at least 3", count >= 3)
    table = columns([numbered(fiberscope)])
    sweeps = [SWEEPS[name](table) for name in which]
    found = drawn = tried(sweeps, [places(sweep, count) for sweep in sweeps])
    for _ in range(ROUNDS):
        closer = [between(one) for one in found]
        if any(map(len, closer)):
            found = [joined(*both) for both in zip(found, tried(sweeps, closer))]
    return tuple(_told(*each) for each in zip(sweeps, drawn, found, _takes_over(sweeps, found)))


# What they say


def _best(sweep: Sweep, found: Tried) -> int:
    """The row where most is resolved; of equal ones that nearest to now."""
    top = found["resolved_lp_mm"].max()
    away = np.abs(np.log(found["value"] / sweep.now))
    return int(np.argmin(np.where(found["resolved_lp_mm"] >= top * (1 - SAME), away, np.inf)))


def _takes_over(sweeps: list[Sweep], found: list[Tried]) -> list[str | None]:
    """The part whose cost rises most a step beyond the best, at what is resolved there; else the one that limits there."""
    best = [_best(sweep, one) for sweep, one in zip(sweeps, found)]
    at = [one["value"][row] for one, row in zip(found, best)]
    beyond = [
        float(np.clip(value * STEP**sweep.toward, one["value"][0], one["value"][-1]))
        for sweep, value, one in zip(sweeps, at, found)
    ]
    many = sweeps[0].table.take(np.zeros(2 * len(sweeps), int))
    changed: dict[str, np.ndarray] = {}
    for number, (sweep, pair) in enumerate(zip(sweeps, zip(at, beyond))):
        for path, column in sweep.moved(np.array(pair)).items():
            changed.setdefault(path, many[path].copy())[2 * number : 2 * number + 2] = column
    top = np.array([one["resolved_lp_mm"][row] for one, row in zip(found, best)])
    cost = losses(way_of(many.replaced(changed)), np.repeat(top, 2))
    parts = list(cost)
    rise = np.array([cost[part][1::2] - cost[part][0::2] for part in parts])
    told: list[str | None] = []
    for number, (one, row) in enumerate(zip(found, best)):
        limit = one["limited_by"][row]
        worst = int(np.argmax(rise[:, number]))
        taken = parts[worst] if rise[worst, number] > COST else PARTS[int(limit)] if np.isfinite(limit) else None
        told.append(taken if top[number] > 0 else None)
    return told


def _told(sweep: Sweep, drawn: Tried, found: Tried, because: str | None) -> Sharpness:
    row, value, height = _best(sweep, found), found["value"], found["resolved_lp_mm"]
    end = value[0] if sweep.toward < 0 else value[-1]
    here = int(np.argmin(np.abs(np.log(drawn["value"] / sweep.now))))
    return Sharpness(
        path=sweep.path,
        toward=sweep.toward,
        now=sweep.now,
        now_lp_mm=float(drawn["resolved_lp_mm"][here]),
        value=drawn["value"],
        resolved_lp_mm=drawn["resolved_lp_mm"],
        lattice_limit_lp_mm=drawn["lattice_limit_lp_mm"],
        limited_by=tuple(None if np.isnan(code) else PARTS[int(code)] for code in drawn["limited_by"]),
        core_count=drawn["core_count"],
        pixels_per_pitch=drawn["pixels_per_pitch"],
        few_pixels=drawn["pixels_per_pitch"] < LEAST_PIXELS_PER_PITCH,
        best=float(value[row]),
        best_lp_mm=float(height[row]),
        stops=bool(height[row] > 0 and abs(np.log(value[row] / end)) > END),
        because=because,
        enough=_enough(sweep, value, height),
    )


def _enough(sweep: Sweep, value: np.ndarray, height: np.ndarray) -> float:
    """Coming from the end that promises least, where 95 % of the best is first reached, by a straight line between places."""
    if sweep.toward < 0:
        value, height = value[::-1], height[::-1]
    level = FLAT * height.max()
    first = int(np.argmax(height >= level))
    if first == 0:
        return float(value[0])
    part = (level - height[first - 1]) / (height[first] - height[first - 1])
    return float(value[first - 1] * (value[first] / value[first - 1]) ** part)
