"""What the pictures of the guide show: the cone on its way, the color before and after, what bends take, bends traced."""

from dataclasses import dataclass

import numpy as np

from optics.body.handling import least_bend_radius_mm
from optics.chain.columns import columns, written_out
from optics.chain.cone import guide_face_na, medium_index
from optics.chain.evaluate import evaluate
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
from optics.media.face import ray_face_transmission
from optics.spectrum import GRID_NM, chromaticity, color_rendering_index, color_temperature_k, duv, planck
from optics.units import Flags, mm_from_um, rad_from_deg

COVER = ("scene.cover.index", "scene.cover.thickness_mm", "scene.cover.spread_na")
RADII = 161
SHOWN_DB = 1.6  # sharper bends than take this are left out, unless the design has them
HITS, FEWEST, MOST = 3e7, 2000, 50_000  # what a trace may cost; rays
LOCUS_K = np.geomspace(1800.0, 20000.0, 90)


@dataclass(frozen=True, slots=True)
class ConeStage:
    """Light by angle at one place: radiance in each bin over that of the launch, bins between edges as NA in air."""

    name: str
    na: np.ndarray
    radiance_ratio: np.ndarray
    flux_lm: float


@dataclass(frozen=True, slots=True)
class ConeView:
    """The cone as launched, after the guide, and as it leaves; areas over NA^2 are lumens."""

    stages: tuple[ConeStage, ...]
    fiber_na: float
    launch_na: float
    exit_na: float
    outside_index: float


def cone_view(fiberscope: Fiberscope) -> ConeView:
    """Radiance over angle: what the launch sends within its cone, what the guide still holds before its last face, what leaves.

    The launch is uniform within its cone, all of it counted, also what misses the face or exceeds the fiber's cone.
    """
    table = solved(columns([fiberscope]))
    bare = table.replaced({path: np.full(1, np.nan) for path in COVER if path in table.number})
    out, before = light(table), light(bare)
    launch_na, launched = float(out.value["launch_na"][0]), float(out.after_lm["condenser"][0])
    edges, index = before.beam.sine2_edges[0], float(medium_index(table)[0])
    core = fiberscope.guide.fiber.core_index
    middle = np.sqrt((edges[1:] + edges[:-1]) / 2)
    face = ray_face_transmission(core_index=core, outside_index=index, ray_na=middle)
    inside = np.where(face > 0, before.beam.bin_lm[0] / np.where(face > 0, face, 1.0), 0.0)
    stages = [
        ConeStage("launched", np.array([0.0, launch_na]), np.ones(1), launched),
        _stage("after the guide", edges, inside, launched, launch_na),
        _stage("leaves", out.beam.sine2_edges[0], out.beam.bin_lm[0], launched, launch_na),
    ]
    return ConeView(tuple(stages), float(table["guide.fiber.na"][0]), launch_na, float(out.value["exit_na"][0]), index)


def _stage(name: str, edges: np.ndarray, lumens: np.ndarray, launched: float, launch_na: float) -> ConeStage:
    of_launch = launched / launch_na**2
    density = lumens / np.diff(edges)
    return ConeStage(name, np.sqrt(edges), density / of_launch if of_launch > 0 else 0.0 * density, float(lumens.sum()))


@dataclass(frozen=True, slots=True)
class Color:
    """Color of one light. `duv_ratio`: signed distance from the black bodies in CIE 1960 u, v."""

    name: str
    x_ratio: float
    y_ratio: float
    u_ratio: float
    v_ratio: float
    color_temperature_k: float
    duv_ratio: float
    color_rendering_index: float


@dataclass(frozen=True, slots=True)
class ColorView:
    """Lamp and delivered light; the black bodies between which they lie, as u, v and temperature."""

    lamp: Color
    delivered: Color
    locus_k: np.ndarray
    locus_u_ratio: np.ndarray
    locus_v_ratio: np.ndarray


def color_view(fiberscope: Fiberscope) -> ColorView:
    """How guide and filter shift the color of the light."""
    spectrum = evaluate(columns([fiberscope])).spectrum_w_nm
    locus = chromaticity(wavelength_nm=GRID_NM, power=planck(temperature_k=LOCUS_K, wavelength_nm=GRID_NM))
    lamp, delivered = (_color(name, spectrum[name][0]) for name in ("lamp", "delivered"))
    return ColorView(lamp, delivered, LOCUS_K, np.asarray(locus.u_ratio), np.asarray(locus.v_ratio))


def _color(name: str, power: np.ndarray) -> Color:
    lit = {"wavelength_nm": GRID_NM, "power": power}
    found = chromaticity(**lit)
    numbers = (*found, color_temperature_k(**lit), duv(**lit), color_rendering_index(**lit))
    return Color(name, *map(float, numbers))


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
