"""Single rays: how they are drawn, what each carries, and the elementary optics that it meets. Base of the ray check.

The check follows rays from the lamp to the target by code of its own and shares no transport formula with the chain: here
and in `rays_launch`, `rays_guide`, `rays_target` stand points, directions, faces and dice; only the trace of a bend
(`guide.raytrace`) is common ground. `rays_count` leads the rays through and counts them.

The numbers drawn at one step are spread evenly over each of some batches, in random order, which lowers the noise.
The batches know nothing of each other, so their scatter is an honest standard error.
"""

from collections.abc import Callable
from dataclasses import dataclass, fields, replace

import numpy as np

from optics.fiberscope import Lamp
from optics.spec import Curve
from optics.tables import column
from optics.units import AnyUnit

VISIBLE_NM = (380.0, 780.0)  # where lumens are counted
MOST_LM_W = 683.0  # lumens per watt at 540 THz, by definition of the SI
CELL_NM = 0.25  # wavelengths are drawn from cells as fine as this


@dataclass(frozen=True, slots=True)
class Flock:
    """Many rays on their way, one row a ray.

    `na` is n sin(theta) to the axis, which a flat face across it keeps; the place is seen from the axis of the face, or
    inside a fiber from its own. The weights are the lamp's lumens (or watts) shared among all rays sent out.
    """

    batch: AnyUnit  # whole numbers that rise along the rows
    weight: np.ndarray
    wavelength_nm: np.ndarray
    na: np.ndarray
    azimuth_rad: np.ndarray
    x_mm: np.ndarray
    y_mm: np.ndarray

    def __len__(self) -> int:
        return len(self.weight)

    def rows(self, which: np.ndarray) -> "Flock":
        """Some of the rays, by mask or by row numbers."""
        return Flock(*(getattr(self, field.name)[which] for field in fields(self)))

    def times(self, factor: np.ndarray | float) -> "Flock":
        """The same rays, each standing for less light; those that stand for none are dropped."""
        left = replace(self, weight=self.weight * factor)
        return left if np.all(left.weight > 0) else left.rows(left.weight > 0)

    def toward(self, na: np.ndarray, azimuth_rad: np.ndarray) -> "Flock":
        return replace(self, na=na, azimuth_rad=azimuth_rad)

    def at(self, x_mm: np.ndarray, y_mm: np.ndarray) -> "Flock":
        return replace(self, x_mm=x_mm, y_mm=y_mm)

    def across(self, gap_mm: float, index: float) -> "Flock":
        """The rays after a gap between two faces; those along the faces never arrive."""
        sine = self.na / index
        arriving = self.rows(sine < 1)
        shift = gap_mm * np.tan(np.arcsin(sine[sine < 1]))
        return arriving.at(
            arriving.x_mm + shift * np.cos(arriving.azimuth_rad), arriving.y_mm + shift * np.sin(arriving.azimuth_rad)
        )

    def within(self, diameter_mm: float) -> "Flock":
        """The rays that hit a round face around the axis."""
        return self.rows(np.hypot(self.x_mm, self.y_mm) <= diameter_mm / 2)


Note = Callable[[str, Flock], None]  # takes down what is left after a step


def evenly(batch: np.ndarray, random: np.random.Generator) -> np.ndarray:
    """A number from 0 to 1 for each ray: of the n rays of a batch one falls into each n-th part, in random order.

    >>> found = evenly(np.zeros(4, int), np.random.default_rng(1))
    >>> np.floor(4 * np.sort(found)).tolist()
    [0.0, 1.0, 2.0, 3.0]
    """
    shuffled = np.argsort(batch + random.random(len(batch)))
    place = shuffled - np.searchsorted(batch, batch)
    return (place + random.random(len(batch))) / np.bincount(batch)[batch]


def on_disc(batch: np.ndarray, radius_mm: np.ndarray | float, random: np.random.Generator):
    """A random point of a disc for each ray, all parts of its area alike: (x, y)."""
    away, turn = radius_mm * np.sqrt(evenly(batch, random)), 2 * np.pi * evenly(batch, random)
    return away * np.cos(turn), away * np.sin(turn)


def redrawn(flock: Flock, count: int, random: np.random.Generator) -> Flock:
    """About `count` rays of equal weight in place of these: each is taken as often as its weight says.

    Each batch keeps its light to the last digit; heavy rays stand there several times, light ones by luck. The choice goes
    by rising angle, so that all angles stay represented.
    """
    flock = flock.rows(np.lexsort((flock.na, flock.batch)))
    parts, start = [], np.searchsorted(flock.batch, np.unique(flock.batch))
    for first, end in zip(start, [*start[1:], len(flock)]):
        upto = np.cumsum(flock.weight[first:end])
        wanted = max(1, round(count * (end - first) / len(flock)))
        marks = (np.arange(wanted) + random.random()) / wanted * upto[-1]
        chosen = first + np.minimum(np.searchsorted(upto, marks), end - first - 1)
        parts.append((chosen, np.full(wanted, upto[-1] / wanted)))
    if not parts:
        return flock
    return replace(
        flock.rows(np.concatenate([chosen for chosen, _ in parts])), weight=np.concatenate([each for _, each in parts])
    )


def passed(*, na: np.ndarray, from_index: float, to_index: float) -> np.ndarray:
    """Share of each ray that passes a flat face, unpolarized, by its own angles on both sides; 0 where none leaves.

    Fresnel's amplitudes r_s and r_p, 1 - (r_s^2 + r_p^2)/2.

    >>> passed(na=np.array([0.0, 1.2]), from_index=1.5, to_index=1.0).round(4).tolist()
    [0.96, 0.0]
    """
    leaves = (na < from_index) & (na < to_index)
    before, after = (np.sqrt(np.where(leaves, 1 - (na / index) ** 2, 1.0)) for index in (from_index, to_index))
    r_s = (from_index * before - to_index * after) / (from_index * before + to_index * after)
    r_p = (to_index * before - from_index * after) / (to_index * before + from_index * after)
    return np.where(leaves, 1 - (r_s**2 + r_p**2) / 2, 0.0)


def seen_weight(wavelength_nm: np.ndarray) -> np.ndarray:
    """V(lambda), linear between its nanometers, 0 outside the visible."""
    table_nm, v = column("cie_1931_observer", "wavelength_nm"), column("cie_1931_observer", "y")
    visible = (wavelength_nm >= VISIBLE_NM[0]) & (wavelength_nm <= VISIBLE_NM[1])
    return np.where(visible, np.interp(wavelength_nm, table_nm, v), 0.0)


def value_at(curve: Curve, wavelength_nm: np.ndarray, outside: float) -> np.ndarray:
    """A curve at each ray's own wavelength; beyond its data the value stated."""
    return np.interp(wavelength_nm, curve.abscissa, curve.ordinate, left=outside, right=outside)


def lamp_flux(lamp: Lamp, *, in_lumens: bool, band_nm: tuple[float, float]) -> tuple[float, np.ndarray, np.ndarray]:
    """(flux of the lamp, ends of fine cells of wavelength, share of the flux up to each) within the band.

    In lumens cells count by power times V(lambda), in watts by power alone.
    """
    ends = np.arange(band_nm[0], band_nm[1] + CELL_NM / 2, CELL_NM)
    middle = (ends[1:] + ends[:-1]) / 2
    power = value_at(lamp.spectrum, middle, 0.0)
    seen = power * seen_weight(middle)
    lumens_per_watt = MOST_LM_W * seen.sum() / power.sum() if power.sum() > 0 else 0.0
    watts = lamp.flux_w if lamp.flux_lm is None else lamp.flux_lm / max(lumens_per_watt, 1e-300)
    counted = seen if in_lumens and seen.sum() > 0 else power
    upto = np.append(0.0, np.cumsum(counted))
    flux = watts * lumens_per_watt if in_lumens else watts
    return flux, ends, upto / max(upto[-1], 1e-300)


def from_lamp(
    lamp: Lamp,
    *,
    batch: np.ndarray,
    ray_share: float,
    in_lumens: bool,
    band_nm: tuple[float, float],
    random: np.random.Generator,
) -> Flock:
    """Rays as they leave the lamp: each stands for `ray_share` of its flux.

    Wavelength by the lamp's spectrum (times V for lumens), place anywhere on the emitter's disc, direction uniform in
    sin^2 up to the lamp's cone, which is what a surface of even radiance sends out.
    """
    flux, ends, upto = lamp_flux(lamp, in_lumens=in_lumens, band_nm=band_nm)
    x, y = on_disc(batch, lamp.emitter_mm / 2, random)
    return Flock(
        batch,
        np.full(len(batch), flux * ray_share),
        np.interp(evenly(batch, random), upto, ends),
        lamp.cone_na * np.sqrt(evenly(batch, random)),
        2 * np.pi * evenly(batch, random),
        x,
        y,
    )
