"""Smaller is not always sharper: what is resolved at the target over pitch, f-number and the lamp's light, all else as it is.

Each number is moved over a range, all in one batch through the chain; where most is resolved is closed in on. A finer pitch
helps until cores share their light or starve; a wider stop until blur or the cores' cone take over; more light until
the lattice or the lens limits.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from optics.chain.axes import evaluate_possible, holding
from optics.chain.columns import Columns, columns
from optics.fiberscope import Fiberscope
from optics.image.lattice import core_count
from optics.spec import require
from optics.study.sharper_curves import losses, numbered, way_of
from optics.units import AnyUnit, Flags
from optics.viewer.camera import LEAST_PIXELS_PER_PITCH, WORST_PIXELS_PER_PITCH
from optics.viewer.detail import PARTS

FLAT = 0.95  # as good as the best: what is resolved is at least this share of it
PARTED = 5  # places tried at once between two neighbors
ROUNDS = 4  # of closing in: the range of two neighbors shrinks by PARTED + 1 each time
PEAKS = 2  # the highest of the coarse curve that are closed in on
SAME = 1e-6  # relative: no difference
END = 0.02  # in the log of the number: so near the end of its range it counts as the end
STEP = 1.25  # how far beyond the best the next part is asked for its cost
COST = 2e-3  # in the log of contrast: less is no cost
PITCH, CORE, PIXEL = "image.bundle.pitch_um", "image.bundle.core_um", "image.chip.pixel_um"
STOP, RATED = "image.objective.f_number", "source.launch.rated_lm"
FLUXES = ("source.lamp.flux_lm", "source.lamp.flux_w")


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


@dataclass(frozen=True, slots=True)
class Sweep:
    """One number and its range; `moved` gives the columns of its values, with what moves along."""

    table: Columns
    path: str
    toward: int
    low: AnyUnit
    high: AnyUnit

    @property
    def now(self) -> AnyUnit:
        return float(self.table[self.path][0])

    def moved(self, value: np.ndarray) -> dict[str, np.ndarray]:
        """Cores keep their share of the pitch; a chip keeps its size; a rating follows the lamp."""
        ratio, found = value / self.now, {self.path: np.asarray(value, float)}
        one = {path: float(self.table[path][0]) for path in (CORE, RATED, "image.chip.columns", "image.chip.rows")}
        if self.path == PITCH:
            found[CORE] = one[CORE] * ratio
        if self.path == PIXEL:
            found |= {
                path: np.maximum(np.rint(one[path] / ratio), 3.0) for path in ("image.chip.columns", "image.chip.rows")
            }
        if self.path in FLUXES and np.isfinite(one[RATED]):
            found[RATED] = one[RATED] * ratio
        return found


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
    found = _tried(sweeps, [_places(sweep, count) for sweep in sweeps])
    drawn = [{name: part.copy() for name, part in one.items()} for one in found]
    for _ in range(ROUNDS):
        between = [_between(one) for one in found]
        found = [_joined(one, more) for one, more in zip(found, _tried(sweeps, between))]
    return tuple(_told(*each) for each in zip(sweeps, drawn, found, _takes_over(sweeps, found)))


# The ranges


def _pitch(table: Columns) -> Sweep:
    """Pitches of 1.5 to 25 um and beyond where the design is; at least ten cores across, and pixels enough to sample them."""
    if not table.has(PITCH)[0]:
        now = float(table[PIXEL][0])
        return Sweep(table, PIXEL, -1, min(0.7, 0.5 * now), max(6.0, 2.0 * now))
    now = float(table[PITCH][0])
    across = 1e2 * float(table["image.bundle.diameter_mm"][0])  # a tenth of the bundle, um
    pixel = float((table["viewer.camera.pixel_um"] / table["viewer.camera.relay_magnification"])[0])
    least = 0.0 if np.isnan(pixel) else WORST_PIXELS_PER_PITCH * pixel
    low, high = min(max(1.5, least), now), max(min(max(25.0, 2.0 * now), across), 1.01 * now)
    return Sweep(table, PITCH, -1, low, high)


def _stop(table: Columns) -> Sweep:
    now = float(table[STOP][0])
    return Sweep(table, STOP, -1, min(1.4, now), max(16.0, now))


def _flux(table: Columns) -> Sweep:
    path = next(path for path in FLUXES if table.has(path)[0])
    now = float(table[path][0])
    return Sweep(table, path, 1, now / 1e4, now * 1e2)


SWEEPS = {"pitch": _pitch, "f_number": _stop, "flux": _flux}


def _places(sweep: Sweep, count: int) -> np.ndarray:
    """Even ratios from end to end; the design as it is takes the place of the nearest between."""
    value = np.geomspace(sweep.low, sweep.high, count)
    value[0], value[-1] = sweep.low, sweep.high
    if sweep.now not in (sweep.low, sweep.high):
        value[1 + np.argmin(np.abs(np.log(value[1:-1] / sweep.now)))] = sweep.now
    return value


# Trying


def _tried(sweeps: list[Sweep], places: list[np.ndarray]) -> list[dict[str, np.ndarray]]:
    """The chain's numbers at places of each sweep, all in one batch; places that no design can have are left out."""
    count, ends = sum(map(len, places)), np.cumsum([len(place) for place in places])
    many, changed = sweeps[0].table.take(np.zeros(count, int)), {}
    rows = [np.arange(end - len(place), end) for place, end in zip(places, ends)]
    for sweep, place, here in zip(sweeps, places, rows):
        for path, column in sweep.moved(place).items():
            changed.setdefault(path, many[path].copy())[here] = column
    many = many.replaced(changed)
    figures, ready = evaluate_possible(many)
    good = ready & holding(many)
    names = ("resolved_lp_mm", "lattice_limit_lp_mm", "limited_by", "pixels_per_pitch")
    found = {name: figures[name] for name in names} if good.any() else {name: np.full(count, np.nan) for name in names}
    found["resolved_lp_mm"] = np.nan_to_num(found["resolved_lp_mm"])
    bundle, size = many.has(PITCH), many.get("image.bundle.diameter_mm", 1.0)
    found["core_count"] = np.where(bundle, core_count(diameter_mm=size, pitch_um=many.get(PITCH, 1.0)), np.nan)
    kept = [here[good[here]] for here in rows]
    return [
        {"value": place[good[here]], **{name: part[keep] for name, part in found.items()}}
        for place, here, keep in zip(places, rows, kept)
    ]


def _between(found: dict[str, np.ndarray]) -> np.ndarray:
    """Places on both sides of the highest peaks, up to their neighbors."""
    value, height = found["value"], found["resolved_lp_mm"]
    padded = np.pad(height, 1, constant_values=-1.0)
    peaks = np.flatnonzero((height >= padded[:-2]) & (height >= padded[2:]) & (height > 0))
    peaks = peaks[np.argsort(-height[peaks], kind="stable")][:PEAKS]
    part = np.linspace(0.0, 1.0, PARTED + 2)[1:-1]
    sides = [(value[peak], value[peak + side]) for peak in peaks for side in (-1, 1) if 0 <= peak + side < len(value)]
    return np.unique([start * (end / start) ** part for start, end in sides])


def _joined(found: dict[str, np.ndarray], more: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
    joined = {name: np.concatenate([part, more[name]]) for name, part in found.items()}
    order = np.argsort(joined["value"], kind="stable")
    return {name: part[order] for name, part in joined.items()}


# What they say


def _best(sweep: Sweep, found: dict[str, np.ndarray]) -> int:
    """The row where most is resolved; of equal ones that nearest to now."""
    top = found["resolved_lp_mm"].max()
    away = np.abs(np.log(found["value"] / sweep.now))
    return int(np.argmin(np.where(found["resolved_lp_mm"] >= top * (1 - SAME), away, np.inf)))


def _takes_over(sweeps: list[Sweep], found: list[dict[str, np.ndarray]]) -> list[str | None]:
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


def _told(sweep: Sweep, drawn: dict[str, np.ndarray], found: dict[str, np.ndarray], because: str | None) -> Sharpness:
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
