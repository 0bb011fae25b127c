"""What bends take: the loss of one over its radius beside the pessimist's bound, and the design's own bends traced by rays."""

from dataclasses import dataclass

import numpy as np

from optics.body.handling import least_bend_radius_mm
from optics.chain.columns import columns, written_out
from optics.chain.cone import guide_face_na
from optics.chain.light import light
from optics.chain.solve import solved
from optics.fiberscope import Fiberscope
from optics.guide.bend import (
    TESTED,
    bend_transmission,
    bends_cone_na,
    bends_transmission,
    mode_count_transmission,
    relative_bend_ratio,
)
from optics.guide.fiber import clad_index, mean_tangent_ratio
from optics.guide.raytrace import trace_bends
from optics.units import Flags, mm_from_um, rad_from_deg

RADII = 161
SHOWN_DB = 1.6  # sharper bends than take this are left out, unless the design has them
HITS, FEWEST, MOST = 3e7, 2000, 50_000  # what a trace may cost; rays


@dataclass(frozen=True, slots=True)
class OwnBend:
    """A bend of the design: what one such takes of the launched cone, dB (inf: all)."""

    radius_mm: float
    angle_deg: float
    repeats_count: int
    loss_db: float


@dataclass(frozen=True, slots=True)
class BendView:
    """What one bend through `bend_deg` takes over its radius, dB: the kernel, and the mode-count law as the bound.

    `tested`: where the kernel was compared with the trace. Below `breaking_radius_mm` the fiber is strained
    beyond what it is trusted with for its life.
    """

    radius_mm: np.ndarray
    loss_db: np.ndarray
    bound_db: np.ndarray
    tested: Flags
    bend_deg: float
    launch_na: float
    fiber_na: float
    breaking_radius_mm: float
    own: tuple[OwnBend, ...]
    total_db: float


def bend_view(fiberscope: Fiberscope) -> BendView:
    """Loss over bend radius for this fiber and this launch; where the design has no bend, a quarter turn."""
    fiber, bends = fiberscope.guide.fiber, [bend for bend in fiberscope.guide.bundle.bends if bend.angle_deg > 0]
    glass = _fiber(fiberscope)
    na = cone_in_guide_na(fiberscope)
    breaking = least_bend_radius_mm(fiber_um=fiber.fiber_um, allowed_strain=fiber.allowed_strain)
    sharpest = min(bends, key=lambda bend: bend.radius_mm, default=None)
    angle = sharpest.angle_deg if sharpest else 90.0
    unit = (
        float(relative_bend_ratio(core_index=fiber.core_index, na=fiber.na, core_um=fiber.core_um, bend_radius_mm=1e3))
        * 1e3
    )
    own = [bend.radius_mm for bend in bends]
    low, high = min([unit / TESTED["relative_bend"][1], breaking / 2, *own]) / 1.3, max([6 * breaking, *own]) * 2.0

    def lost_db(radius_mm, bend_deg):
        return _db(bend_transmission(**glass, bend_radius_mm=radius_mm, bend_deg=bend_deg, launch_na=na))

    wide = np.geomspace(max(low, 1.01 * mm_from_um(fiber.core_um) / 2), high, RADII)
    seen = wide[(lost_db(wide, angle) < SHOWN_DB) | (wide > min([breaking / 2, *own]) / 1.3)]
    radius = np.geomspace(seen[0], high, RADII)
    x = unit / radius
    bound = _db(mode_count_transmission(relative_bend_ratio=x, launch_share=(na / fiber.na) ** 2))
    marks = tuple(
        OwnBend(bend.radius_mm, bend.angle_deg, bend.repeats, float(lost_db(bend.radius_mm, bend.angle_deg)))
        for bend in bends
    )
    radii, angles = _written_out(fiberscope)
    total = (
        float(_db(bends_transmission(**glass, bend_radius_mm=radii, bend_deg=angles, launch_na=na))) if bends else 0.0
    )
    tested = x <= TESTED["relative_bend"][1]
    return BendView(radius, lost_db(radius, angle), bound, tested, angle, na, fiber.na, breaking, marks, total)


def cone_in_guide_na(fiberscope: Fiberscope) -> float:
    """NA up to which the light fills the guide's fibers before the first bend."""
    table = solved(columns([fiberscope]))
    value = light(table).value
    face = min(float(value["launch_na"][0]), float(value["first_face_na"][0]), float(guide_face_na(table)[0]))
    bundle = fiberscope.guide.bundle
    wide = float(table["guide.bundle.diameter_mm"][0])
    return min(face * (bundle.entry_mm or wide) / wide, fiberscope.guide.fiber.na)


def _fiber(fiberscope: Fiberscope) -> dict[str, float]:
    fiber = fiberscope.guide.fiber
    clad = float(clad_index(core_index=fiber.core_index, na=fiber.na))
    return {"core_index": fiber.core_index, "clad_index": clad, "core_um": fiber.core_um}


def _written_out(fiberscope: Fiberscope) -> tuple[np.ndarray, np.ndarray]:
    """Radius and angle of every bend of the design, one by one."""
    bends = [bend for bend in fiberscope.guide.bundle.bends if bend.angle_deg > 0]
    repeats = np.array([[bend.repeats for bend in bends]], int)
    radius, angle = (np.array([[getattr(bend, name) for bend in bends]]) for name in ("radius_mm", "angle_deg"))
    return written_out(radius, repeats, np.inf)[0], written_out(angle, repeats, 0.0)[0]


def _db(transmission: np.ndarray) -> np.ndarray:
    passes = np.asarray(transmission) > 0
    return np.where(passes, -10 * np.log10(np.where(passes, np.minimum(transmission, 1.0), 1.0)), np.inf)


@dataclass(frozen=True, slots=True)
class TracedBend:
    """Light left behind one bend of the row, by the kernel and by rays; NA that holds 95 % of it by both."""

    radius_mm: float
    angle_deg: float
    kernel_share: float
    traced_share: float
    standard_error: float
    kernel_na: float
    traced_na: float


@dataclass(frozen=True, slots=True)
class BendTraceView:
    """Every bend of the design in a row, traced."""

    bends: tuple[TracedBend, ...]
    rays: int
    seed: int


def bend_trace_view(fiberscope: Fiberscope, seed: int) -> BendTraceView | None:
    """The design's bends by single rays beside the kernel; as many rays as some seconds afford. None without a bend."""
    radii, angles = _written_out(fiberscope)
    if not len(radii):
        return None
    fiber, row = fiberscope.guide.fiber, {**_fiber(fiberscope), "launch_na": cone_in_guide_na(fiberscope)}
    steep = float(mean_tangent_ratio(na=row["launch_na"], core_index=fiber.core_index))
    hits = 4 / np.pi * steep * float((radii * rad_from_deg(angles)).sum()) / mm_from_um(fiber.core_um)
    rays = int(np.clip(HITS / max(hits, 1.0), FEWEST, MOST))
    traced = trace_bends(**row, bend_radius_mm=radii, bend_deg=angles, rays=rays, seed=seed)
    bends = []
    for place, found in enumerate(traced, 1):
        some = {**row, "bend_radius_mm": radii[:place], "bend_deg": angles[:place]}
        shares = (bends_transmission(**some), found.transmission, found.standard_error)
        cones = (bends_cone_na(**some), found.cone_na)
        bends.append(TracedBend(float(radii[place - 1]), float(angles[place - 1]), *shares, *cones))
    return BendTraceView(tuple(bends), rays, seed)
