"""Exact trace of rays through bends of a step-index fiber: the reference that the bend kernel is checked against.

The geometry of a chord in the torus is `torus`; here are the rays, the straight runs, and the counting.

Assumptions: geometric optics, smooth wall, no absorption (the bundle counts it once, along the whole
length), a cladding thick enough that what enters it is lost. Skew rays above the NA count as guided.
"""

from dataclasses import dataclass

import numpy as np

from optics.guide.torus import MOST_HITS, through
from optics.spec import not_negative, positive, require
from optics.units import mm_from_um, rad_from_deg

BATCH = 16_000
STEEP_HITS = 4_000  # of an isotropic source's rays, of which under 1 % run almost across the fiber
CONE_SHARE = 0.95


@dataclass(frozen=True, slots=True)
class Rays:
    """Rays at one cross-section: place over the core radius, direction sines inside the core."""

    x_ratio: np.ndarray
    y_ratio: np.ndarray
    x_sine: np.ndarray
    y_sine: np.ndarray

    def __len__(self) -> int:
        return len(self.x_ratio)

    def sine(self) -> np.ndarray:
        """Sine of the angle to the fiber's axis, inside the core."""
        return np.hypot(self.x_sine, self.y_sine)

    def skew_sine(self) -> np.ndarray:
        """x y' - y x', what a straight fiber conserves beside the angle."""
        return self.x_ratio * self.y_sine - self.y_ratio * self.x_sine

    def kept(self, which: np.ndarray) -> "Rays":
        return Rays(self.x_ratio[which], self.y_ratio[which], self.x_sine[which], self.y_sine[which])


@dataclass(frozen=True, slots=True)
class BendTrace:
    """What a trace counted: the share that is still guided, and the NA of every ray that is."""

    transmission: float
    standard_error: float
    cone_na: float
    exit_na: np.ndarray


def filled_rays(*, launch_sine: float, rays: int, random: np.random.Generator) -> Rays:
    """Rays of uniform radiance: uniform over the core and in sin^2 up to launch_sine (inside the core)."""
    radius, place = np.sqrt(random.random(rays)), 2 * np.pi * random.random(rays)
    sine, azimuth = launch_sine * np.sqrt(random.random(rays)), 2 * np.pi * random.random(rays)
    return Rays(radius * np.cos(place), radius * np.sin(place), sine * np.cos(azimuth), sine * np.sin(azimuth))


def isotropic_rays(*, limit_sine: float, rays: int, random: np.random.Generator) -> Rays:
    """Rays of an isotropic source that fills the core, those that the straight fiber traps (skew ones too).

    limit_sine = NA/n1; the direction is uniform in solid angle, forward.
    """
    parts, have = [], 0
    while have < rays:
        sine = np.sqrt(1 - random.random(BATCH) ** 2)
        radius, place, azimuth = np.sqrt(random.random(BATCH)), *(2 * np.pi * random.random((2, BATCH)))
        some = Rays(radius * np.cos(place), radius * np.sin(place), sine * np.cos(azimuth), sine * np.sin(azimuth))
        parts.append(some.kept(guided(some, limit_sine=limit_sine)))
        have += len(parts[-1])
    return Rays(*(np.concatenate([getattr(p, f) for p in parts])[:rays] for f in Rays.__slots__))


def guided(rays: Rays, *, limit_sine: float) -> np.ndarray:
    """Which rays a straight fiber keeps: sine^2 - skew^2 <= (NA/n1)^2 at the wall."""
    return rays.sine() ** 2 - rays.skew_sine() ** 2 <= limit_sine**2


def after_straight_run(rays: Rays, *, random: np.random.Generator) -> Rays:
    """The same rays after a long straight run and a turn of the bend plane, both random.

    A straight fiber keeps the angle and the skewness, so that a ray ends anywhere along a chord of its
    caustic, at any azimuth.
    """
    sine = np.maximum(rays.sine(), 1e-300)
    caustic = np.clip(rays.skew_sine() / sine, -1.0, 1.0)
    along = np.sqrt(1 - caustic**2) * (2 * random.random(len(rays)) - 1)
    turn = 2 * np.pi * random.random(len(rays))
    c, s = np.cos(turn), np.sin(turn)
    # in the ray's own frame it runs along x at the height -caustic (x y' - y x' = skewness)
    return Rays(along * c + caustic * s, along * s - caustic * c, sine * c, sine * s)


def through_bend(
    rays: Rays, *, radius_ratio: float, limit_sine: float, bend_rad: float, most_hits: int = MOST_HITS
) -> tuple[Rays, np.ndarray]:
    """Rays at the end of a bend toward -x, and which of those sent in they are.

    radius_ratio: axis radius over core radius, above 1; limit_sine = NA/n1. A ray that leaves the bend in
    the chord after its last hit is kept even where a straight fiber would lose it: see `guided`. So is
    one that hits the wall more than most_hits times, as it is then: it creeps along, or hardly advances.
    """
    if bend_rad == 0 or not len(rays):
        return rays, np.ones(len(rays), bool)
    parts = [rays.x_ratio, rays.y_ratio, rays.x_sine, rays.y_sine]
    state = np.stack([*parts, np.sqrt(np.maximum(1 - parts[2] ** 2 - parts[3] ** 2, 0.0))])
    out = through(state, radius_ratio, limit_sine, bend_rad, most_hits)
    alive = ~np.isnan(out[0])
    return Rays(*out[:4, alive]), alive


def trace_bend(
    *,
    core_index: float,
    clad_index: float,
    core_um: float,
    bend_radius_mm: float,
    bend_deg: float,
    launch_na: float,
    rays: int,
    seed: int,
) -> BendTrace:
    """One bend of radius bend_radius_mm (of the axis) through bend_deg, filled evenly up to launch_na.

    transmission: of the light launched, what leaves the bend still in the core. Above the fiber's NA only
    the skew rays that the straight fiber guides arrive at the bend.
    Raises OutOfRange on an impossible fiber, bend or launch.
    References: independent_trace has values of the same geometry by another program.
    """
    fiber = _Fiber.of(core_index, clad_index, core_um)
    launch_sine = _launch_sine(launch_na, core_index)
    random = np.random.default_rng(seed)
    start = filled_rays(launch_sine=launch_sine, rays=_count(rays), random=random)
    left, _ = through_bend(start.kept(guided(start, limit_sine=fiber.limit)), **fiber.bend(bend_radius_mm, bend_deg))
    return _counted(left, rays, core_index)


def trace_bends(
    *,
    core_index: float,
    clad_index: float,
    core_um: float,
    bend_radius_mm: np.ndarray,
    bend_deg: np.ndarray,
    launch_na: float,
    rays: int,
    seed: int,
) -> tuple[BendTrace, ...]:
    """The light behind each of several separate bends: a random straight run and a random azimuth between them.

    Transmissions are cumulative; what the straight run does not guide is lost there.
    """
    fiber = _Fiber.of(core_index, clad_index, core_um)
    random = np.random.default_rng(seed)
    now = filled_rays(launch_sine=_launch_sine(launch_na, core_index), rays=_count(rays), random=random)
    found = []
    for radius, angle in zip(*np.broadcast_arrays(np.atleast_1d(bend_radius_mm), np.atleast_1d(bend_deg))):
        now = now.kept(guided(now, limit_sine=fiber.limit))
        now, _ = through_bend(after_straight_run(now, random=random), **fiber.bend(float(radius), float(angle)))
        found.append(_counted(now, rays, core_index))
    return tuple(found)


def trace_isotropic(
    *,
    core_index: float,
    clad_index: float,
    core_um: float,
    bend_radius_mm: float,
    bend_deg: float,
    rays: int,
    seed: int,
) -> BendTrace:
    """As trace_bend, for light that an isotropic source in the whole core leaves trapped, skew rays included.

    transmission is of the light that the straight fiber traps. References: achenbach_cobb_2002.
    """
    fiber = _Fiber.of(core_index, clad_index, core_um)
    start = isotropic_rays(limit_sine=fiber.limit, rays=_count(rays), random=np.random.default_rng(seed))
    left, _ = through_bend(start, **fiber.bend(bend_radius_mm, bend_deg), most_hits=STEEP_HITS)
    return _counted(left, rays, core_index)


@dataclass(frozen=True, slots=True)
class _Fiber:
    limit: float
    core_mm: float

    @classmethod
    def of(cls, core_index, clad_index, core_um):
        positive(core_index=core_index, clad_index=clad_index, core_um=core_um)
        require("clad_index", clad_index, "below the core index", clad_index < core_index)
        return cls(float(np.sqrt(1 - (clad_index / core_index) ** 2)), mm_from_um(core_um))

    def bend(self, bend_radius_mm, bend_deg):
        not_negative(bend_deg=bend_deg)
        require("bend_radius_mm", bend_radius_mm, "above half the core diameter", bend_radius_mm > self.core_mm / 2)
        straight = not np.isfinite(bend_radius_mm)
        return {
            "radius_ratio": 2 * bend_radius_mm / self.core_mm,
            "limit_sine": self.limit,
            "bend_rad": 0.0 if straight else float(rad_from_deg(bend_deg)),
        }


def _launch_sine(launch_na, core_index):
    positive(launch_na=launch_na)
    require("launch_na", launch_na, "at most the core index", launch_na <= core_index)
    return launch_na / core_index


def _count(rays):
    require("rays", rays, "1 or more", rays >= 1)
    return int(rays)


def _counted(left: Rays, rays: int, core_index: float) -> BendTrace:
    """The share that is left; its standard error by the rule of succession, so that it is never 0."""
    kept, exit_na = len(left), core_index * left.sine()
    error = np.sqrt((kept + 1) * (rays - kept + 1) / (rays + 3)) / (rays + 2)
    cone = float(np.quantile(exit_na, CONE_SHARE)) if kept else 0.0
    return BendTrace(kept / rays, float(error), cone, exit_na)
