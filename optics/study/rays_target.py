"""Rays from the last face of the guide to the target: exit, cover, port, flight, and the part of the field they land in."""

from dataclasses import dataclass

import numpy as np

from optics.fiberscope import Cover, Target
from optics.study.rays import Flock, Note, evenly, on_disc, passed
from optics.units import AnyUnit, rad_from_deg

PARTS = 4  # of the field: rings of equal width, or lengths of a bore


@dataclass(frozen=True, slots=True)
class Place:
    """Where things stand in front of the tip, as numbers: the ports, and the part of the target that is looked at.

    Ports are discs around the objective's axis, tilted toward their azimuth; one of negative radius is cut out of the
    first. The field is the cone that starts pupil_depth behind the face and has its radius at the working distance; in a
    bore it is the wall between two depths.
    """

    port_x_mm: np.ndarray
    port_y_mm: np.ndarray
    port_radius_mm: np.ndarray
    port_tilt_deg: np.ndarray
    port_azimuth_deg: np.ndarray
    field_radius_mm: float
    pupil_depth_mm: float
    from_mm: float
    to_mm: float


def out_of_guide(
    flock: Flock,
    *,
    core_index: float,
    tilt_deg: float,
    cover: Cover | None,
    medium_index: float,
    note: Note,
    random: np.random.Generator,
) -> Flock:
    """Through the exit face, upright or ground at an angle, and a cover with air behind it, spread or clear."""
    behind = medium_index if cover is None else 1.0
    flock = flock.toward(flock.na, 2 * np.pi * evenly(flock.batch, random)).rows(flock.na < core_index)
    flock = _refracted(flock, core_index, behind, float(rad_from_deg(tilt_deg)))
    note("exit face", flock)
    if cover is None:
        return flock
    if cover.spread_na > 0:
        across, up = on_disc(flock.batch, cover.spread_na, random)
        across, up = across + flock.na * np.cos(flock.azimuth_rad), up + flock.na * np.sin(flock.azimuth_rad)
        flock = flock.toward(np.hypot(across, up), np.arctan2(up, across)).rows(np.hypot(across, up) < 1)
        note("spreading", flock)
    flock = flock.times(passed(na=flock.na, from_index=1.0, to_index=cover.index))
    flock = flock.times(passed(na=flock.na, from_index=cover.index, to_index=medium_index))
    note("cover", flock)
    return flock


def _refracted(flock: Flock, core_index: float, outside_index: float, tilt_rad: float) -> Flock:
    """Each ray through a flat face whose normal leans toward -x, so that the light turns toward +x.

    What lies along the face of n times the direction stays (Snell's law in three dimensions).
    """
    lean, upright = np.sin(tilt_rad), np.cos(tilt_rad)
    x, y = flock.na * np.cos(flock.azimuth_rad), flock.na * np.sin(flock.azimuth_rad)
    z = np.sqrt(core_index**2 - flock.na**2)
    across = x * upright + z * lean  # along the face, in the plane of the tilt
    along = np.hypot(across, y)
    flock = flock.times(passed(na=along, from_index=core_index, to_index=outside_index))
    across, y = (part[along < min(core_index, outside_index)] for part in (across, y))
    x = across * upright - np.sqrt(outside_index**2 - across**2 - y**2) * lean
    return flock.toward(np.hypot(x, y), np.arctan2(y, x))


def landing(flock: Flock, place: Place, target: Target, cover: Cover | None, medium_index: float, random):
    """(ray, part of the field) of every ray that lands in the field; rays start anywhere on the ports, by area."""
    start, way = _from_ports(flock, place, cover, medium_index, random)
    with np.errstate(divide="ignore", invalid="ignore"):
        if target.form == "bore":
            reach = _to_wall(start, way, target.bore_mm / 2)
            depth = (start + reach * way)[2]
            share = (depth - place.from_mm) / (place.to_mm - place.from_mm)
        else:
            lean = rad_from_deg(target.tilt_deg)
            # the plane through (0, 0, distance): z - distance = x tan(lean)
            slope = way[2] * np.cos(lean) - way[0] * np.sin(lean)
            reach = ((target.distance_mm - start[2]) * np.cos(lean) + start[0] * np.sin(lean)) / slope
            x, y, z = start + reach * way
            apex = target.distance_mm + place.pupil_depth_mm
            share = np.where(z > -place.pupil_depth_mm, np.hypot(x, y) * apex / (z + place.pupil_depth_mm), np.inf)
            share = share / place.field_radius_mm
        landed = (reach > 0) & (share >= 0) & (share < 1)
    return np.flatnonzero(landed), np.floor(PARTS * share[landed]).astype(int)


def part_areas_mm2(place: Place, target: Target) -> AnyUnit:
    """Area of each part of the field on the target's own surface.

    A cone about the axis cuts a tilted plane in an ellipse: its projection has the semi-latus r and the eccentricity
    e = (r/apex) tan(tilt), so that its area is pi r^2/((1 - e^2)^(3/2) cos(tilt)).
    """
    edges = np.arange(PARTS + 1) / PARTS
    if target.form == "bore":
        return np.pi * target.bore_mm * (place.to_mm - place.from_mm) * np.diff(edges)
    radius, lean = edges * place.field_radius_mm, rad_from_deg(target.tilt_deg)
    eccentric = radius * np.tan(lean) / (target.distance_mm + place.pupil_depth_mm)
    return np.diff(np.pi * radius**2 / ((1 - eccentric**2) ** 1.5 * np.cos(lean)))


def _from_ports(flock: Flock, place: Place, cover: Cover | None, medium_index: float, random):
    """Start and direction [x y z, ray]: a random point of the ports, the fiber straight out of its port."""
    port, across, up = _points(flock.batch, place, random)
    cosine, sine = np.cos(flock.azimuth_rad), np.sin(flock.azimuth_rad)
    if cover is not None:  # the cover's outer face is the tip's: the fibers end its thickness behind
        drift = cover.thickness_mm * np.tan(np.arcsin(flock.na / cover.index))
        across, up = across + drift * cosine, up + drift * sine
    tilt, turn = rad_from_deg(place.port_tilt_deg)[port], rad_from_deg(place.port_azimuth_deg)[port]
    flat = tilt == 0
    turn = np.where(flat, 0.0, turn)
    first = np.stack([np.cos(tilt) * np.cos(turn), np.cos(tilt) * np.sin(turn), -np.sin(tilt)])
    second = np.stack([-np.sin(turn), np.cos(turn), np.zeros_like(turn)])
    axis = np.stack([np.sin(tilt) * np.cos(turn), np.sin(tilt) * np.sin(turn), np.cos(tilt)])
    center = np.stack([place.port_x_mm[port], place.port_y_mm[port], np.zeros(len(port))])
    out = flock.na / medium_index
    way = out * (cosine * first + sine * second) + np.sqrt(1 - out**2) * axis
    return center + across * first + up * second, way


def _points(batch: np.ndarray, place: Place, random):
    """(port, x and y from its center) for each ray, every bit of the ports' area alike."""
    radius = np.maximum(place.port_radius_mm, 0.0)
    upto = np.cumsum(radius**2)
    port = np.searchsorted(upto, evenly(batch, random) * upto[-1], side="right")
    port = np.minimum(port, len(radius) - 1)
    across, up = on_disc(batch, radius[port], random)
    for cut in np.flatnonzero(place.port_radius_mm < 0):
        while True:  # what falls into the cut is drawn again
            x, y = place.port_x_mm[port] + across, place.port_y_mm[port] + up
            again = np.hypot(x - place.port_x_mm[cut], y - place.port_y_mm[cut]) < -place.port_radius_mm[cut]
            if not again.any():
                break
            across[again], up[again] = on_disc(batch[again], radius[port[again]], random)
    return port, across, up


def _to_wall(start, way, radius_mm):
    """Way of each ray to a round wall about the axis, from inside."""
    along, side = start[0] * way[0] + start[1] * way[1], way[0] ** 2 + way[1] ** 2
    room = radius_mm**2 - start[0] ** 2 - start[1] ** 2
    return (np.sqrt(along**2 + side * room) - along) / side
