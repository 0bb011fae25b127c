"""One number of a design moved over a range: the ranges, what moves along with the number, and the batch through the chain."""

from dataclasses import dataclass

import numpy as np

from optics.chain.axes import evaluate_possible, holding
from optics.chain.columns import Columns
from optics.image.lattice import core_count
from optics.units import AnyUnit, um_from_mm
from optics.viewer.camera import WORST_PIXELS_PER_PITCH

PARTED = 5  # places tried at once between two neighbors
PEAKS = 2  # the highest of a coarse curve that are closed in on
LEAST_ACROSS = 10.0  # pitches across a bundle
PITCH, CORE, PIXEL = "image.bundle.pitch_um", "image.bundle.core_um", "image.chip.pixel_um"
STOP, RATED = "image.objective.f_number", "source.launch.rated_lm"
FLUXES = ("source.lamp.flux_lm", "source.lamp.flux_w")
DIMMER, BRIGHTER = 1e4, 1e2  # how far the lamp is turned down and up
BRIGHT = dict(zip(FLUXES, (1e3, 10.0)))  # and up to at least so many lumens, watts
CHIP = ("image.chip.columns", "image.chip.rows")
NUMBERS = ("resolved_lp_mm", "lattice_limit_lp_mm", "limited_by", "pixels_per_pitch")

Tried = dict[str, np.ndarray]  # "value" and the chain's numbers there [place]


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
        one = {path: float(self.table[path][0]) for path in (CORE, RATED, *CHIP)}
        if self.path == PITCH:
            found[CORE] = one[CORE] * ratio
        if self.path == PIXEL:
            found |= {path: np.maximum(np.rint(one[path] / ratio), 3.0) for path in CHIP}
        if self.path in FLUXES and np.isfinite(one[RATED]):
            found[RATED] = one[RATED] * ratio
        return found


# The ranges


def _pitch(table: Columns) -> Sweep:
    """Pitches of 1.5 to 25 um, or to where the design is; enough cores across, and pixels enough to sample them."""
    if not table.has(PITCH)[0]:
        now = float(table[PIXEL][0])
        return Sweep(table, PIXEL, -1, min(0.7, 0.5 * now), max(6.0, 2.0 * now))
    now = float(table[PITCH][0])
    across = um_from_mm(float(table["image.bundle.diameter_mm"][0])) / LEAST_ACROSS
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
    return Sweep(table, path, 1, now / DIMMER, max(BRIGHTER * now, BRIGHT[path]))


SWEEPS = {"pitch": _pitch, "f_number": _stop, "flux": _flux}


def places(sweep: Sweep, count: int) -> np.ndarray:
    """Even ratios from end to end; the design as it is takes the place of the nearest between."""
    value = np.geomspace(sweep.low, sweep.high, count)
    value[0], value[-1] = sweep.low, sweep.high
    if sweep.now not in (sweep.low, sweep.high):
        value[1 + np.argmin(np.abs(np.log(value[1:-1] / sweep.now)))] = sweep.now
    return value


# Trying


def tried(sweeps: list[Sweep], at: list[np.ndarray]) -> list[Tried]:
    """The chain's numbers at places of each sweep, all in one batch; places that no design can have are left out."""
    count, ends = sum(map(len, at)), np.cumsum([len(place) for place in at])
    many, changed = sweeps[0].table.take(np.zeros(count, int)), {}
    rows = [np.arange(end - len(place), end) for place, end in zip(at, ends)]
    for sweep, place, here in zip(sweeps, at, rows):
        for path, column in sweep.moved(place).items():
            changed.setdefault(path, many[path].copy())[here] = column
    many = many.replaced(changed)
    figures, ready = evaluate_possible(many)
    good = ready & holding(many)
    found = {name: figures[name] if good.any() else np.full(count, np.nan) for name in NUMBERS}
    found["resolved_lp_mm"] = np.nan_to_num(found["resolved_lp_mm"])
    bundle, size = many.has(PITCH), many.get("image.bundle.diameter_mm", 1.0)
    found["core_count"] = np.where(bundle, core_count(diameter_mm=size, pitch_um=many.get(PITCH, 1.0)), np.nan)
    kept = [here[good[here]] for here in rows]
    return [
        {"value": place[good[here]], **{name: part[keep] for name, part in found.items()}}
        for place, here, keep in zip(at, rows, kept)
    ]


def between(found: Tried) -> np.ndarray:
    """Places on both sides of the highest peaks, up to their neighbors."""
    value, height = found["value"], found["resolved_lp_mm"]
    padded = np.pad(height, 1, constant_values=-1.0)
    peaks = np.flatnonzero((height >= padded[:-2]) & (height >= padded[2:]) & (height > 0))
    peaks = peaks[np.argsort(-height[peaks], kind="stable")][:PEAKS]
    part = np.linspace(0.0, 1.0, PARTED + 2)[1:-1]
    sides = [(value[peak], value[peak + side]) for peak in peaks for side in (-1, 1) if 0 <= peak + side < len(value)]
    return np.unique([start * (end / start) ** part for start, end in sides])


def joined(found: Tried, more: Tried) -> Tried:
    """Both in the order of their values."""
    both = {name: np.concatenate([part, more[name]]) for name, part in found.items()}
    order = np.argsort(both["value"], kind="stable")
    return {name: part[order] for name, part in both.items()}
