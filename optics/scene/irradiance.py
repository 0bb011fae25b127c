"""Irradiance on a plane or on a bore wall, from any set of ports: exact, point by point.

Every port is made of discs with signs; the cone of differences of circles; each overlap is a
boundary integral in closed form (`region.disc_view`). Nothing is sampled but the points themselves.
The ports do not shade each other, and the target throws nothing back.
"""

import numpy as np

from optics.scene.exit_cone import ExitCone
from optics.scene.ports import Port, as_ports, pieces, port_area_mm2
from optics.scene.region import disc_view
from optics.spec import not_negative, positive, require
from optics.units import Numbers, rad_from_deg, w_m2_from_w_mm2

# Points worked at once: small enough for the cache, large enough to forget the loop.
BLOCK = 8192


def plane_irradiance_w_m2(
    *,
    ports: Port | tuple[Port, ...],
    cone: ExitCone,
    power_w: Numbers,
    distance_mm: Numbers,
    tilt_deg: Numbers,
    u_mm: Numbers,
    v_mm: Numbers,
) -> np.ndarray:
    """Irradiance on a plane through (0, 0, distance), at (u cos b, v, distance + u sin b).

    Parameters: ports and cone; power_w over all ports, shared by area, 0 or more; distance_mm above 0;
    tilt_deg b of the plane, below 90 either way; u_mm, v_mm on the plane. All broadcast. Exactly 0 where dark.
    Raises OutOfRange: a port that reaches through the plane.
    References: lambert_1760; independent_integration (values).

    >>> from optics.scene.ports import Disc
    >>> one = plane_irradiance_w_m2(ports=[Disc(0.0, 0.0, 0.5)], cone=ExitCone.uniform(0.5), power_w=1.0,
    ...                             distance_mm=20.0, tilt_deg=0.0, u_mm=0.0, v_mm=0.0)
    >>> round(float(one), 4)
    3181.1107
    """
    not_negative(power_w=power_w)
    positive(distance_mm=distance_mm)
    require("tilt_deg", tilt_deg, "above -90 and below 90", np.abs(tilt_deg) < 90)
    power, w, b, u, v = np.broadcast_arrays(power_w, distance_mm, rad_from_deg(np.asarray(tilt_deg, float)), u_mm, v_mm)
    found = as_ports(ports)
    require_in_front(found, w, b)
    at, normal = plane_points(w, b, u, v), (np.sin(b), 0.0, -np.cos(b))
    return w_m2_from_w_mm2(power * point_light(ports=found, cone=cone, point_mm=at, normal=normal, bins=False))


def bore_irradiance_w_m2(
    *,
    ports: Port | tuple[Port, ...],
    cone: ExitCone,
    power_w: Numbers,
    bore_mm: Numbers,
    z_mm: Numbers,
    azimuth_deg: Numbers,
) -> np.ndarray:
    """Irradiance on the wall of a bore around the axis, at depth z beyond the face; first light only.

    Parameters: as for the plane; bore_mm diameter; z_mm depth (0 or less: dark unless a port is tilted);
    azimuth_deg from +x toward +y. All broadcast. Exactly 0 where dark.
    Raises OutOfRange: a port that reaches through the wall.
    References: lambert_1760; independent_integration (values).
    """
    not_negative(power_w=power_w)
    positive(bore_mm=bore_mm)
    power, bore, z, turn = np.broadcast_arrays(power_w, bore_mm, z_mm, rad_from_deg(np.asarray(azimuth_deg, float)))
    found = as_ports(ports)
    reach = port_reach_mm(found)
    require("bore_mm", bore, f"above {2 * reach:g}, so that the ports lie inside", bore > 2 * reach)
    cosine, sine = np.cos(turn), np.sin(turn)
    at = (bore / 2 * cosine, bore / 2 * sine, z)
    normal = (-cosine, -sine, 0.0)
    return w_m2_from_w_mm2(power * point_light(ports=found, cone=cone, point_mm=at, normal=normal, bins=False))


def plane_points(w, b, u, v):
    """The point (u, v) of a plane at distance w, tilted by b (radians)."""
    return u * np.cos(b), v, w + u * np.sin(b)


def require_in_front(ports, w, b):
    """Refuse a plane at distance w, tilted by b (radians), that a port reaches through."""
    for piece in (piece for port in ports for piece in pieces(port) if piece.sign > 0):
        room = w * np.cos(b) + piece.disc.x_mm * np.sin(b) - piece.disc.radius_mm * np.abs(np.sin(b))
        require("distance_mm", w, "such that every port lies in front of the tilted plane", room > 0)


def port_reach_mm(ports: tuple[Port, ...]) -> float:
    """How far from the axis the ports reach."""
    discs = [piece.disc for port in ports for piece in pieces(port) if piece.sign > 0]
    return float(max(np.hypot(disc.x_mm, disc.y_mm) + disc.radius_mm for disc in discs))


def point_light(*, ports: tuple[Port, ...], cone: ExitCone, point_mm: tuple, normal: tuple, bins: bool) -> np.ndarray:
    """Irradiance per unit flux (1/mm2) at points (x, y, z) whose surface has this normal, toward the ports.

    Every port must lie in front of each point's surface; the callers see to it. With `bins`, one value for each
    bin of the cone along the last axis, per unit of flux in that bin.
    """
    point, shape = _columns(point_mm, normal)
    density, lowest = np.asarray(cone.flux_share) / np.diff(cone.sine2_edges), cone.sine2_edges[0]
    if bins:
        density = np.diag(1.0 / np.diff(cone.sine2_edges))
    # Differences of circles, as weights of the circles; the one at sin^2 = 0 sees nothing.
    weight = -np.diff(density, axis=0, prepend=0.0, append=0.0)
    edges = np.asarray(cone.sine2_edges)[1 if lowest == 0 else 0 :]
    weight = weight[1 if lowest == 0 else 0 :] / sum(port_area_mm2(port) for port in ports)
    value = np.zeros((point.shape[1], *weight.shape[1:]))
    for start in range(0, len(value), BLOCK):
        rows = slice(start, start + BLOCK)
        for port in ports:
            value[rows] += _from_port(port, cone, point[:, rows], edges, weight)
    return value.reshape((*shape, *weight.shape[1:]))


def lit_points(*, ports: tuple[Port, ...], cone: ExitCone, point_mm: tuple) -> np.ndarray:
    """Where any light comes at all: points whose circle of light overlaps a port."""
    point, shape = _columns(point_mm, (0.0, 0.0, -1.0))
    lit = np.zeros(point.shape[1], bool)
    for port in ports:
        lit |= _lit(port, cone, [_local(piece.disc, point)[:2] for piece in pieces(port)])
    return lit.reshape(shape)


def _columns(point_mm, normal):
    """Points and normals as six rows, and the shape they broadcast to."""
    parts = [np.asarray(c, float) for c in (*point_mm, *normal)]
    shape = np.broadcast_shapes(*(c.shape for c in parts))
    return np.stack([np.broadcast_to(c, shape).ravel() for c in parts]), shape


def _from_port(port, cone, point, edges, weight):
    """Irradiance from one port, exactly 0 where it is dark."""
    value, places = 0.0, []
    for piece in pieces(port):
        height, offset, toward, along = _local(piece.disc, point)
        flat = bool(np.all(along == 0.0))
        view = disc_view(
            height_mm=height,
            offset_mm=offset,
            radius_mm=piece.disc.radius_mm,
            cone_sine2_share=edges,
            lateral=not flat,
        )
        toward, along = (part[(..., *(None,) * (weight.ndim - 1))] for part in (toward, along))
        value = value + piece.sign * toward * (view.facing_factor @ weight)
        if not flat:
            value = value + piece.sign * along * (view.lateral_per_mm @ weight)
        places.append((height, offset))
    lit = _lit(port, cone, places)[(..., *(None,) * (weight.ndim - 1))]
    return np.where(lit, np.maximum(value, 0.0), 0.0)


def _lit(port, cone, places):
    """Where the ring of light about the foot of a point overlaps the port, by (height, offset) of each piece."""
    first, last = cone.lit_sine2_share
    lit = True
    for piece, (height, offset) in zip(pieces(port), places):
        core, rim = (np.maximum(height, 0.0) * _tangent(s) for s in (first, last))
        radius = piece.disc.radius_mm
        if piece.sign > 0:
            lit = (height > 0) & (offset - radius < rim) & (offset + radius > core)
        else:
            lit = lit & (offset + rim > radius)
    return lit


def _local(disc, point):
    """Height over the port's plane, offset of the foot, and the normal's parts toward the port and along the plane."""
    x, y, z, normal = point[0] - disc.x_mm, point[1] - disc.y_mm, point[2], point[3:]
    if disc.tilt_deg == 0.0:
        return z, np.hypot(x, y), -normal[2], -(normal[0] * x + normal[1] * y)
    tilt, turn = rad_from_deg(disc.tilt_deg), rad_from_deg(disc.azimuth_deg)
    axis = np.array([np.sin(tilt) * np.cos(turn), np.sin(tilt) * np.sin(turn), np.cos(tilt)])
    height = axis[0] * x + axis[1] * y + axis[2] * z
    foot = np.stack([x - height * axis[0], y - height * axis[1], z - height * axis[2]])
    return height, np.sqrt(np.sum(foot**2, axis=0)), -(axis @ normal), -np.sum(normal * foot, axis=0)


def _tangent(sine2_share):
    return np.sqrt(sine2_share / (1.0 - sine2_share)) if sine2_share < 1.0 else np.inf
