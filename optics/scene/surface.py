"""Light over the field of view of a tilted plane or of a bore wall, from any ports, tilted ones included.

The slower path beside `field`, design by design: the same exact irradiance at every point of a
quadrature over the part of the surface that the field's cone sees. Both give the same where both hold.
"""

from dataclasses import dataclass

import numpy as np

from optics.scene.exit_cone import ExitCone
from optics.scene.field import Lighting
from optics.scene.irradiance import lit_points, plane_points, point_light, port_reach_mm, require_in_front
from optics.scene.ports import Port, as_ports, pieces
from optics.spec import not_negative, positive, require
from optics.units import Numbers, lux_from_lm_mm2, rad_from_deg

# Rings (or depths) and spokes of the quadrature; how much finer the unlit share is sought.
RINGS, SPOKES, FINER = 24, 48, 4


@dataclass(frozen=True, slots=True)
class SurfaceLight:
    """Per unit flux in each bin at the center [design, bin], and the field under the flux given."""

    center_per_mm2: np.ndarray
    lighting: Lighting


def plane_field(
    *,
    ports: list[tuple[Port, ...]],
    sine2_edges: np.ndarray,
    flux_lm: np.ndarray,
    distance_mm: np.ndarray,
    tilt_deg: np.ndarray,
    field_radius_mm: np.ndarray,
    pupil_depth_mm: np.ndarray,
) -> SurfaceLight:
    """Light over the part of a tilted plane that the field's cone sees; means are by area of the plane.

    The cone starts pupil_depth behind the face and has the field's radius at the working distance; on the plane
    through (0, 0, distance) it cuts an ellipse. Center: at (0, 0, distance).

    Parameters: ports, one tuple a design; sine2_edges [design, bin + 1] in the medium in front; flux_lm
    [design, bin]; the rest [design]. Returns SurfaceLight, in lux for lumens and in W/m2 for watts.
    Raises OutOfRange: a port that reaches through the plane; a cone that the plane does not cut whole.
    References: lambert_1760; closed_form (perspective).
    """
    not_negative(pupil_depth_mm=pupil_depth_mm)
    positive(field_radius_mm=field_radius_mm)
    require("tilt_deg", tilt_deg, "above -90 and below 90", np.abs(tilt_deg) < 90)
    found = []
    for one, w, b, radius, depth, edges, flux in zip(
        ports, distance_mm, rad_from_deg(tilt_deg), field_radius_mm, pupil_depth_mm, sine2_edges, flux_lm
    ):
        require_in_front(as_ports(one), w, b)
        steep = "so small that the plane cuts the whole cone of the field"
        require("field_radius_mm", radius, steep, (w + depth) * np.cos(b) > radius * abs(np.sin(b)))
        normal = (np.sin(b), 0.0, -np.cos(b))
        center = plane_points(w, b, 0.0, 0.0)

        def surface(rings, spokes, w=w, b=b, radius=radius, depth=depth):
            return _ellipse(rings * radius, spokes, w, b, depth)

        found.append(_light(as_ports(one), edges, flux, center, normal, surface))
    return _stacked(found)


def bore_field(
    *,
    ports: list[tuple[Port, ...]],
    sine2_edges: np.ndarray,
    flux_lm: np.ndarray,
    bore_mm: np.ndarray,
    distance_mm: np.ndarray,
    from_mm: np.ndarray,
    to_mm: np.ndarray,
) -> SurfaceLight:
    """Light over the wall of a bore around the axis, between two depths; means are by area of the wall.

    Center: the mean around the wall at the working distance. Which depths the field sees: `seen_wall_mm`. Where
    to_mm is not beyond from_mm nothing is seen: mean, least and evenness are 0 and all is unlit.

    Parameters: as for `plane_field`; from_mm, to_mm [design]. Raises OutOfRange: ports outside the bore.
    References: lambert_1760.
    """
    positive(bore_mm=bore_mm, distance_mm=distance_mm)
    found = []
    for one, bore, w, start, end, edges, flux in zip(ports, bore_mm, distance_mm, from_mm, to_mm, sine2_edges, flux_lm):
        reach = port_reach_mm(as_ports(one))
        require("bore_mm", bore, f"above {2 * reach:g}, so that the ports lie inside", bore > 2 * reach)
        turn = 2 * np.pi * (np.arange(SPOKES) + 0.5) / SPOKES
        center = (bore / 2 * np.cos(turn), bore / 2 * np.sin(turn), w)

        def surface(rings, spokes, bore=bore, start=start, end=end):
            depth = start + (end - start) * rings**2
            at = (bore / 2 * np.cos(spokes), bore / 2 * np.sin(spokes), depth)
            return at, (-np.cos(spokes), -np.sin(spokes), 0.0), np.ones(np.broadcast_shapes(rings.shape, spokes.shape))

        normal = (-np.cos(turn), -np.sin(turn), 0.0)
        found.append(_light(as_ports(one), edges, flux, center, normal, surface if end > start else None))
    return _stacked(found)


def seen_wall_mm(
    *,
    bore_mm: Numbers,
    field_radius_mm: Numbers,
    distance_mm: Numbers,
    pupil_depth_mm: Numbers,
    near_mm: Numbers,
    far_mm: Numbers,
) -> tuple[np.ndarray, np.ndarray]:
    """Depths between which the field of view sees the wall of a bore, within the working range.

    The rim of the field meets the wall at B (w + h)/(2 R) - h, h the depth of the pupil; nearer wall is out of
    the picture. Returns (from, to); to is not beyond from where no wall is seen. References: closed_form.

    >>> [float(x) for x in seen_wall_mm(bore_mm=20.0, field_radius_mm=10.0, distance_mm=10.0, pupil_depth_mm=0.0,
    ...                                 near_mm=5.0, far_mm=40.0)]
    [10.0, 40.0]
    """
    positive(bore_mm=bore_mm, field_radius_mm=field_radius_mm, distance_mm=distance_mm, near_mm=near_mm, far_mm=far_mm)
    not_negative(pupil_depth_mm=pupil_depth_mm)
    depth = np.asarray(pupil_depth_mm, float)
    rim = np.asarray(bore_mm) * (distance_mm + depth) / (2 * np.asarray(field_radius_mm)) - depth
    return np.maximum(rim, near_mm), np.asarray(far_mm, float)


def first_light_mm(*, ports: Port | tuple[Port, ...], sine2_share: float) -> float:
    """Distance at which light first reaches the axis, for tilted ports too; infinite if it never does.

    A point of the axis is lit while its foot lies within a + z tan(alpha) of the port's center, z its height over
    the port's plane: a quadratic in the distance. `sine2_share`: sin^2 of alpha. References: closed_form.
    """
    return min(_first_light(pieces(port), sine2_share) for port in as_ports(ports))


def _first_light(parts, sine2_share):
    if sine2_share <= 0:
        return np.inf
    tangent = np.sqrt(sine2_share / (1 - sine2_share)) if sine2_share < 1 else 1e12
    disc = parts[0].disc
    tilt, turn = rad_from_deg(disc.tilt_deg), rad_from_deg(disc.azimuth_deg)
    q, away2, a = np.cos(tilt), disc.x_mm**2 + disc.y_mm**2, disc.radius_mm
    p = -np.sin(tilt) * (disc.x_mm * np.cos(turn) + disc.y_mm * np.sin(turn))
    roots = np.roots([1 / q**2 - 1 - tangent**2, -2 * (p / q**2 + a * tangent), away2 + (p / q) ** 2 - a * a])
    begin = max(0.0, -p / q)
    cut = max((part.disc.radius_mm - np.hypot(part.disc.x_mm, part.disc.y_mm) for part in parts[1:]), default=0.0)
    ends = sorted({begin, *((y.real - p) / q for y in roots if abs(y.imag) < 1e-12 * (1 + abs(y.real)))})
    ends = [end for end in ends if end >= begin]
    for end, later in zip(ends, [*ends[1:], ends[-1] + 1.0]):
        t = (end + later) / 2
        if np.sqrt(max(away2 + t * t - (p + q * t) ** 2, 0.0)) < a + tangent * (p + q * t):
            return max(end, cut / tangent)
    return np.inf


def _ellipse(radius, azimuth, w, b, depth):
    """Points where the field's rays meet the plane, its normal, and the area there per area of the facing plane."""
    x, y = radius * np.cos(azimuth), radius * np.sin(azimuth)
    stretch = (w + depth) * np.cos(b) / ((w + depth) * np.cos(b) - x * np.sin(b))
    at = (stretch * x, stretch * y, stretch * (w + depth) - depth)
    return at, (np.sin(b), 0.0, -np.cos(b)), stretch**3


def _light(ports, edges, flux, center_mm, normal, surface):
    """Center per bin, and (center, mean, least, unlit, first) under the flux, for one design."""
    total = float(np.sum(flux))
    if total <= 0:
        return np.zeros(len(edges) - 1), (0.0, 0.0, 0.0, 1.0, np.inf)
    cone = ExitCone(tuple(edges), tuple(np.asarray(flux) / total))
    center = point_light(ports=ports, cone=cone, point_mm=center_mm, normal=normal, bins=True)
    center = center.reshape(-1, len(edges) - 1).mean(axis=0)
    middle, first = float(np.sum(center * flux)), first_light_mm(ports=ports, sine2_share=cone.lit_sine2_share[1])
    if surface is None:
        return center, (middle, 0.0, 0.0, 1.0, first)

    def grid(count):
        rings, turn = np.sqrt((np.arange(RINGS * count) + 0.5) / (RINGS * count)), SPOKES * count
        return surface(rings[:, None], 2 * np.pi * (np.arange(turn) + 0.5) / turn)

    def light(at):
        return point_light(ports=ports, cone=cone, point_mm=at[0], normal=at[1], bins=False)

    over = grid(1)
    value, area = light(over), over[2]
    mean = float(np.sum(value * area) / np.sum(area))
    rim = light(surface(np.array([[1.0], [0.0]]), 2 * np.pi * np.arange(2 * SPOKES) / (2 * SPOKES)))
    fine = grid(FINER)
    unlit = float(
        np.sum(np.where(lit_points(ports=ports, cone=cone, point_mm=fine[0]), 0.0, fine[2])) / np.sum(fine[2])
    )
    least = 0.0 if unlit > 0 else min(float(value.min()), float(rim.min()))
    return center, (middle, mean * total, least * total, unlit, first)


def _stacked(found):
    """The records of all designs as arrays."""
    numbers = np.array([numbers for _, numbers in found], float).reshape(-1, 5)
    center, mean, least = (lux_from_lm_mm2(numbers[:, at]) for at in range(3))
    evenness = np.where(mean > 0, least / np.where(mean > 0, mean, 1.0), 0.0)
    lighting = Lighting(center, mean, least, evenness, numbers[:, 3], numbers[:, 4])
    return SurfaceLight(np.array([per_bin for per_bin, _ in found]), lighting)
