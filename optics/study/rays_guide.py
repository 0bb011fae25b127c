"""Rays from the lamp onto the first face and through the guide: launch, cable, joint, fibers, walls, bends, tapers."""

from dataclasses import replace

import numpy as np

from optics.fiberscope import Butt, Fiber, GuideBundle, Joint, Lamp, Matched, Rated, Source, Spot
from optics.guide.raytrace import Rays, after_straight_run, guided, through_bend
from optics.study.rays import Flock, Note, evenly, on_disc, passed, redrawn, value_at
from optics.units import mm_from_m, mm_from_um, rad_from_deg, transmission_from_db

# Bends cost time by the hits on the wall: so many for each ray sent out by the lamp are afforded, and at least so many rays.
HITS_A_RAY, LEAST_BENT = 100.0, 2000
MOST_COPIES = 8  # of a ray before a joint that few get through


def onto_face(source: Source, flock: Flock, *, face_mm: float, face_na: float, note: Note, random) -> Flock:
    """Filter, condenser, and which rays meet the face within its cone and within its rim."""
    sent = len(flock)
    if source.filter is not None:
        flock = flock.times(value_at(source.filter.transmission, flock.wavelength_nm, 0.0))
        note("filter", flock)
    launch, lamp = source.launch, source.lamp
    if isinstance(launch, Butt | Spot):
        flock = flock if isinstance(launch, Butt) else _in_spot(flock, lamp, launch)
        note("condenser", flock)
        flock = flock.rows(flock.na <= face_na)
        note("cone", flock)
        if isinstance(launch, Butt):
            # every point of the emitter sends the same cone, so copies may try from places of their own
            flock = redrawn(flock, round(sent * np.clip((lamp.emitter_mm / face_mm) ** 2, 1, MOST_COPIES)), random)
            flock = _anywhere(flock, lamp.emitter_mm, random).across(launch.gap_mm, 1.0)
        flock = flock.within(face_mm)
    else:
        flock = _imaged(flock, lamp, launch, face_mm, face_na)
        note("condenser", flock)
        note("cone", flock)
    note("spot", flock)
    return flock


def _in_spot(flock: Flock, lamp: Lamp, launch: Spot) -> Flock:
    """A condenser puts each ray to its like in a spot of stated size, profile and cone."""
    away = np.hypot(flock.x_mm, flock.y_mm)
    inside = np.minimum(
        (away / (lamp.emitter_mm / 2)) ** 2, 1 - 1e-16
    )  # share of the emitter's area nearer to the axis
    if launch.profile == "gaussian":  # exp(-2 r^2/w^2) beyond r
        there = launch.spot_mm / 2 * np.sqrt(-np.log1p(-inside) / 2)
    else:
        there = launch.spot_mm / 2 * np.sqrt(inside)
    stretch = there / np.maximum(away, 1e-300)
    flock = replace(flock, na=flock.na * launch.cone_na / lamp.cone_na)
    return flock.at(flock.x_mm * stretch, flock.y_mm * stretch).times(launch.transmission)


def _imaged(flock: Flock, lamp: Lamp, launch: Matched | Rated, face_mm: float, face_na: float) -> Flock:
    """An ideal condenser images the emitter onto the whole face: what a ray gains in height it loses in sine.

    The optical invariant, diameter times sine, holds for each ray; one that comes steeper than the face's cone is lost.
    Rated: the share of the lamp that the reference guide so accepts gives its rated lumens, so each accepted ray is worth
    the rating over that share, here as there; a lamp sold by its rating is taken to fill the cone of the guide.
    """
    scale = face_mm / lamp.emitter_mm
    flock = replace(flock.at(flock.x_mm * scale, flock.y_mm * scale), na=flock.na / scale)
    flock = flock.rows(flock.na <= face_na)
    if isinstance(launch, Matched):
        return flock.times(launch.transmission)
    steepest = lamp.cone_na * lamp.emitter_mm / launch.reference_diameter_mm
    accepted = min(1.0, (launch.reference_na / steepest) ** 2)
    filling = face_na / min(face_na, lamp.cone_na / scale)
    return replace(flock, na=flock.na * filling).times(launch.rated_lm / lamp.flux_lm / accepted)


def _anywhere(flock: Flock, face_mm: float, random) -> Flock:
    """The same rays from random places of a face, at random azimuths."""
    flock = flock.at(*on_disc(flock.batch, face_mm / 2, random))
    return flock.toward(flock.na, 2 * np.pi * evenly(flock.batch, random))


def into_fibers(flock: Flock, fiber: Fiber, packing: float, names: tuple[str, str], note: Note, random) -> Flock:
    """From the face into the cores: fibers or the gaps between them, core or cladding by where a ray hits its fiber."""
    flock = flock.times(packing)
    note(names[0], flock)
    flock = _anywhere(flock, mm_from_um(fiber.fiber_um), random).within(mm_from_um(fiber.core_um))
    note(names[1], flock)
    return flock


def along(flock: Flock, fiber: Fiber, length_m: float) -> Flock:
    """What a length of fiber leaves of each ray: its own path, its own wavelength; nothing where the fiber has no data."""
    path_m = length_m / np.sqrt(1 - (flock.na / fiber.core_index) ** 2)
    loss_db_m = value_at(fiber.attenuation, flock.wavelength_nm, np.inf)
    return flock.times(transmission_from_db(loss_db_m * path_m))


def along_wall(flock: Flock, fiber: Fiber, bundle: GuideBundle) -> Flock:
    """What the reflections at the wall leave: as many as chords, as each ray has it in its core, make up the length.

    Seen along the fiber all chords of a ray are alike, by how far from the axis it passes.
    """
    radius_mm, sine = mm_from_um(fiber.core_um) / 2, flock.na / fiber.core_index
    off = flock.x_mm * np.sin(flock.azimuth_rad) - flock.y_mm * np.cos(flock.azimuth_rad)
    chord_mm = 2 * np.sqrt(np.maximum(radius_mm**2 - off**2, 1e-300))
    reflections = mm_from_m(bundle.length_m) * sine / np.sqrt(1 - sine**2) / chord_mm
    return flock.times((1 - bundle.bounce_loss_fraction) ** reflections)


def tapered(flock: Flock, from_mm: float, to_mm: float) -> Flock:
    """After a long taper: what a ray loses in height it gains in sine."""
    return replace(flock, na=flock.na * from_mm / to_mm)


def through_joint(
    flock: Flock,
    joint: Joint,
    from_mm: float,
    to_mm: float,
    to_na: float,
    from_fiber: Fiber,
    fiber: Fiber,
    note: Note,
    random,
) -> Flock:
    """Out of the cable's face, across the gap, into the guide's face and the cone that it takes.

    Straight fibers keep the angle and scramble the azimuth; a fiber's place on the last face is random. Where the guide
    is the narrower, several copies of each ray try, from places of their own.
    """
    flock = flock.times(passed(na=flock.na, from_index=from_fiber.core_index, to_index=joint.index))
    note("cable exit face", flock)
    flock = redrawn(flock, round(len(flock) * np.clip((from_mm / to_mm) ** 2, 1, MOST_COPIES)), random)
    flock = _anywhere(flock, from_mm, random).across(joint.gap_mm, joint.index)
    flock = flock.at(flock.x_mm - joint.offset_mm, flock.y_mm).within(to_mm)
    flock = flock.rows(flock.na <= to_na)
    note("joint", flock)
    flock = flock.times(passed(na=flock.na, from_index=joint.index, to_index=fiber.core_index))
    note("guide input face", flock)
    return flock


def around_bends(flock: Flock, fiber: Fiber, bundle: GuideBundle, afforded_hits: float, random) -> Flock:
    """Ray by ray through every bend, a straight run before each and behind the last, which loses what it cannot guide.

    Rays keep place, angle and skewness; as many are traced as hits are afforded, evenly taken and worth more each.
    """
    bends = [bend for bend in bundle.bends for _ in range(bend.repeats) if bend.angle_deg > 0]
    core_mm, limit = mm_from_um(fiber.core_um), fiber.na / fiber.core_index
    length_mm = sum(bend.radius_mm * rad_from_deg(bend.angle_deg) for bend in bends)
    if len(flock):
        hits = length_mm / core_mm * np.mean(np.tan(np.arcsin(flock.na / fiber.core_index))) * 4 / np.pi
        afforded = max(afforded_hits / max(hits, 1e-9), LEAST_BENT)
        flock = redrawn(flock, int(afforded), random) if afforded < len(flock) else flock
    sine, turn = flock.na / fiber.core_index, flock.azimuth_rad
    now = Rays(flock.x_mm * 2 / core_mm, flock.y_mm * 2 / core_mm, sine * np.cos(turn), sine * np.sin(turn))
    left = np.arange(len(flock))
    for bend in bends:
        kept = guided(now, limit_sine=limit)
        left, now = left[kept], after_straight_run(now.kept(kept), random=random)
        now, there = through_bend(
            now,
            radius_ratio=2 * bend.radius_mm / core_mm,
            limit_sine=limit,
            bend_rad=float(rad_from_deg(bend.angle_deg)),
        )
        left = left[there]
    kept = guided(now, limit_sine=limit)
    return replace(flock.rows(left[kept]), na=fiber.core_index * now.kept(kept).sine())
