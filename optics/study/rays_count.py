"""The chain traced ray by ray: single rays led from the lamp to the target, counted after each step, with standard errors."""

from dataclasses import dataclass, field

import numpy as np

from optics.fiberscope import Fiberscope
from optics.media.index import D_LINE_NM, refractive_index
from optics.spec import not_negative, within
from optics.study.rays import Flock, from_lamp, passed, redrawn
from optics.study.rays_guide import (
    HITS_A_RAY,
    along,
    along_wall,
    around_bends,
    into_fibers,
    onto_face,
    tapered,
    through_joint,
)
from optics.study.rays_target import PARTS, Place, landing, out_of_guide, part_areas_mm2
from optics.units import AnyUnit, lux_from_lm_mm2

FEWEST, MOST = 100, 100_000_000
BATCHES = 100
AT_ONCE = 200_000  # rays sent out together
ROUNDING, FEW = 1e-12, 2.0
FLIGHTS = 5  # rays that fly to the target for each one that the lamp sends out


@dataclass(frozen=True, slots=True)
class Counted:
    """A number that rays gave, and its standard error, in the same unit."""

    value: float
    standard_error: float


@dataclass(frozen=True, slots=True)
class RayStep:
    """What is left after one step (lm, or W where watts are counted), and the factor of this step alone."""

    name: str
    after: Counted
    factor: Counted


@dataclass(frozen=True, slots=True)
class RayTrace:
    """All steps in the order of the light; illuminance in lux (or W/m2) of the parts of the field and of all of it.

    Parts from the axis outward, or from near to far; both empty or None where no place was given.
    """

    steps: tuple[RayStep, ...]
    parts: tuple[Counted, ...]
    whole: Counted | None


@dataclass(slots=True)
class Tally:
    """Light of each batch after each step and in each part of the field, and the most that one ray stood for."""

    sent: AnyUnit = field(default_factory=lambda: np.zeros(BATCHES))
    light: dict[str, AnyUnit] = field(default_factory=dict)
    heaviest: dict[str, float] = field(default_factory=dict)

    def note(self, name: str, flock: Flock) -> None:
        self.light[name] = self.light.get(name, 0.0) + np.bincount(flock.batch, flock.weight, BATCHES)
        self.heaviest[name] = max(self.heaviest.get(name, 0.0), float(flock.weight.max(initial=0.0)))

    def counted(self, light: AnyUnit, heaviest: float) -> Counted:
        """The sum over all batches, and its error from their scatter."""
        total = float(light.sum())
        return Counted(total, _error(light - total * self.sent / self.sent.sum(), total, heaviest))

    def factor(self, before: AnyUnit, after: AnyUnit, heaviest: float) -> Counted:
        """The ratio of two steps, which noise that both share leaves alone."""
        came = float(before.sum())
        if came == 0:
            return Counted(0.0, 1.0)
        share = float(after.sum()) / came
        return Counted(share, _error(after - share * before, float(after.sum()), heaviest) / came)


def _error(scatter: AnyUnit, total: float, heaviest: float) -> float:
    """Standard error of a sum from what each batch has too much or too little; mere rounding counts as none.

    Where few rays are left their scatter says little, so that a few of the heaviest are added in quadrature.
    """
    found = float(np.sqrt(np.sum(scatter**2) * BATCHES / (BATCHES - 1)))
    exact = total > 0 and found <= ROUNDING * total
    return 0.0 if exact else float(np.hypot(found, FEW * heaviest))


def trace_rays(
    fiberscope: Fiberscope, *, place: Place | None, rays: int, seed: int, in_lumens: bool, band_nm: tuple[float, float]
) -> RayTrace:
    """A design's light by single rays, from the lamp to the last face and, where a place is given, on to the target.

    rays: sent out by the lamp; the same seed gives the same answer. in_lumens: count lumens, else watts within band_nm.
    Raises OutOfRange for a number of rays or a seed that cannot be. Refractive indices are those at the d line, as in the
    design file; diffraction, polarization and light thrown back are left out.
    """
    within(FEWEST, MOST, rays=rays)
    not_negative(seed=seed)
    random, tally = np.random.default_rng(seed), Tally()
    chunks = -(-rays // AT_ONCE)
    for chunk in range(chunks):
        count = rays * (chunk + 1) // chunks - rays * chunk // chunks
        batch = np.arange(count) * BATCHES // count
        tally.sent += np.bincount(batch, minlength=BATCHES)
        drawn = {"batch": batch, "ray_share": 1 / rays, "in_lumens": in_lumens, "band_nm": band_nm, "random": random}
        flock = _through_guide(fiberscope, from_lamp(fiberscope.source.lamp, **drawn), tally, random)
        if place is not None:
            _on_target(fiberscope, place, redrawn(flock, FLIGHTS * count, random), tally, random)
    return _told(fiberscope, place, tally)


def _through_guide(fiberscope: Fiberscope, flock: Flock, tally: Tally, random) -> Flock:
    """Every step up to the last face, noted in the order of the light."""
    guide, note = fiberscope.guide, tally.note
    note("lamp", flock)
    sent, cable, fiber, bundle = len(flock), guide.cable, guide.fiber, guide.bundle
    face_mm, end_mm = bundle.entry_mm or bundle.diameter_mm, bundle.exit_mm or bundle.diameter_mm
    face_na = min(fiber.na * bundle.diameter_mm / face_mm, 1.0)  # steeper rays the taper would push out of the fibers
    first, first_mm, first_na = (cable.fiber, cable.diameter_mm, cable.fiber.na) if cable else (fiber, face_mm, face_na)
    flock = onto_face(fiberscope.source, flock, face_mm=first_mm, face_na=first_na, note=note, random=random)
    flock = flock.times(passed(na=flock.na, from_index=1.0, to_index=first.core_index))
    note("input face", flock)
    if cable:
        names = ("cable packing", "cable core share")
        flock = into_fibers(flock, first, cable.packing_fraction, names, note, random)
        flock = along(flock, first, cable.length_m)
        note("cable attenuation", flock)
        flock = through_joint(flock, guide.joint, first_mm, face_mm, face_na, first, fiber, note, random)
    flock = tapered(flock, face_mm, bundle.diameter_mm)
    flock = into_fibers(flock, fiber, bundle.packing_fraction, ("packing", "core share"), note, random)
    if bundle.broken_fraction > 0:
        flock = flock.times(1 - bundle.broken_fraction)
        note("broken fibers", flock)
    flock = along(flock, fiber, bundle.length_m)
    note("attenuation", flock)
    if bundle.bounce_loss_fraction > 0:
        flock = along_wall(flock, fiber, bundle)
        note("wall reflections", flock)
    if any(bend.angle_deg > 0 for bend in bundle.bends):
        flock = around_bends(flock, fiber, bundle, HITS_A_RAY * sent, random)
        note("bends", flock)
    cover = fiberscope.scene.cover if fiberscope.scene else None
    flock = tapered(flock, bundle.diameter_mm, end_mm)
    leaning = {"core_index": fiber.core_index, "tilt_deg": bundle.exit_tilt_deg}
    return out_of_guide(flock, **leaning, cover=cover, medium_index=_medium_index(fiberscope), note=note, random=random)


def _on_target(fiberscope: Fiberscope, place: Place, flock: Flock, tally: Tally, random) -> None:
    """Flights of all rays, counted in the part of the field that each lands in."""
    scene = fiberscope.scene
    row, part = landing(flock, place, scene.target, scene.cover, _medium_index(fiberscope), random)
    for each in range(PARTS):
        tally.note(f"part {each}", flock.rows(row[part == each]))


def _medium_index(fiberscope: Fiberscope) -> float:
    medium = fiberscope.scene.target.medium if fiberscope.scene else "air"
    return 1.0 if medium == "air" else float(refractive_index(medium=medium, wavelength_nm=D_LINE_NM))


def _told(fiberscope: Fiberscope, place: Place | None, tally: Tally) -> RayTrace:
    """The tally as numbers."""
    steps, before, heaviest = [], tally.light["lamp"], tally.heaviest["lamp"]
    names = [name for name in tally.light if not name.startswith("part ")]
    for name in names:
        after = tally.light[name]
        steps.append(RayStep(name, tally.counted(after, heaviest), tally.factor(before, after, heaviest)))
        before, heaviest = after, tally.heaviest[name] or heaviest
    if place is None:
        return RayTrace(tuple(steps), (), None)
    areas = part_areas_mm2(place, fiberscope.scene.target)
    light = [tally.light[f"part {each}"] for each in range(PARTS)]
    one = tally.heaviest[names[-1]] or heaviest  # a ray at the last face; the copies of it that fly are not independent
    parts = tuple(_lux(tally.counted(part, one), area) for part, area in zip(light, areas))
    return RayTrace(tuple(steps), parts, _lux(tally.counted(np.sum(light, axis=0), one), areas.sum()))


def _lux(flux: Counted, area_mm2: float) -> Counted:
    return Counted(
        float(lux_from_lm_mm2(flux.value / area_mm2)), float(lux_from_lm_mm2(flux.standard_error / area_mm2))
    )
