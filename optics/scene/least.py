"""The least irradiance over a field: sought on a grid of interpolated values, exact around what was found."""

import numpy as np

from optics.scene.region import bin_factor, distinct_ports, ports_area_mm2

# The grid: center, rings and spokes, and a finer rim (every 4 degrees: halfway between 2, 3, 5 ports and more);
# nodes of the profile of one port.
RINGS, SPOKES, RIM, NODES = 12, 30, 90, 36


def least_per_mm2(field, flux):
    """The least irradiance over the field: sought on the grid by profiles, exact at and around the worst point."""
    x, y, radius, edges = field.port_x_mm, field.port_y_mm, field.port_radius_mm, field.sine2_edges
    density = flux / (ports_area_mm2(radius)[:, None] * np.diff(edges, axis=-1))
    design, port, row = distinct_ports(radius)
    profile = _profiles(field.rows(design), np.abs(radius[design, port]), density[design])
    at_x, at_y = _points(field)
    total = np.zeros(at_x.shape)
    for one in range(radius.shape[1]):
        away = np.sqrt((at_x - x[:, one, None]) ** 2 + (at_y - y[:, one, None]) ** 2)
        total += np.sign(radius[:, one, None]) * _interpolated(profile, row[:, one], away)
    worst = np.argmin(total, axis=-1)[:, None]
    at_x, at_y = (np.take_along_axis(value, worst, axis=-1) for value in (at_x, at_y))
    at_x, at_y = _around(at_x, at_y, field.field_radius_mm[:, None])
    away = np.hypot(at_x[:, None] - x[..., None], at_y[:, None] - y[..., None])
    seen = bin_factor(field.distance_mm[:, None, None], away, np.abs(radius)[..., None], edges[:, None, None])
    seen = np.sum(np.sign(radius)[..., None, None] * seen, axis=1)
    return np.maximum(np.einsum("dnb,db->dn", seen, density).min(axis=-1), 0.0)


def _points(field):
    """The search grid: center, rings and rim, with a spoke through the first port."""
    rings = np.repeat((np.arange(RINGS) + 0.5) / RINGS, SPOKES)
    turn = np.concatenate([np.tile(np.arange(SPOKES) / SPOKES, RINGS), np.arange(RIM) / RIM]) * 2 * np.pi
    radius = np.concatenate([rings, np.ones(RIM)])
    along, across = (np.append(0.0, radius * part) for part in (np.cos(turn), np.sin(turn)))
    first = np.arctan2(field.port_y_mm[:, 0], field.port_x_mm[:, 0])
    cosine, sine = (field.field_radius_mm * part for part in (np.cos(first), np.sin(first)))
    return cosine[:, None] * along - sine[:, None] * across, sine[:, None] * along + cosine[:, None] * across


def _around(x, y, edge):
    """The point found and its surroundings within half a step of the grid, inside the field: [design, point]."""
    radius, turn = np.hypot(x, y), np.arctan2(y, x)
    radius = np.clip(radius + np.array([0.0, -0.5, -0.25, 0.25, 0.5, 0.0, 0.0]) * edge / RINGS, 0.0, edge)
    turn = turn + np.array([0.0, 0.0, 0.0, 0.0, 0.0, -0.5, 0.5]) * 2 * np.pi / RIM
    return radius * np.cos(turn), radius * np.sin(turn)


def _profiles(field, radius, density):
    """Irradiance over the distance from a port's axis: knee, end and a table of NODES + 1 values, a row a port.

    Half of the nodes lie across the edge of the outermost cone, where the profile is steep.
    """
    z, s = field.distance_mm, field.sine2_edges[:, -1]
    far = field.field_radius_mm + np.hypot(field.port_x_mm, field.port_y_mm).max(axis=-1)
    rim = z * np.sqrt(s / np.maximum(1.0 - s, 1e-300))
    knee, end = np.clip(rim - radius, 0.0, far), np.minimum(rim + radius, far)
    rise = np.arange(NODES // 2 + 1) / (NODES // 2)
    steep = knee[:, None] + (end - knee)[:, None] * rise
    nodes = np.concatenate([knee[:, None] * rise[:-1], steep], axis=1)
    seen = bin_factor(z[:, None], nodes, radius[:, None], field.sine2_edges[:, None])
    return knee, end, np.einsum("rnb,rb->rn", seen, density)


def _interpolated(profile, row, away):
    """A profile at these distances, by straight lines; past the last node its last value (0 unless the field ends)."""
    knee, end, table = (value[row] for value in profile)
    half = NODES // 2
    knee, span = knee[:, None], (end - knee)[:, None]
    inner = away * (half / np.where(knee > 0, knee, 1.0))
    outer = half + (away - knee) * (half / np.where(span > 0, span, 1.0))
    place = np.minimum(np.where(away < knee, inner, outer), float(NODES))
    cell = np.minimum(place.astype(int), NODES - 1)
    flat = (table[:, :-1].ravel(), np.diff(table, axis=1).ravel())
    index = cell + NODES * np.arange(row.size)[:, None]
    return flat[0][index] + (place - cell) * flat[1][index]
