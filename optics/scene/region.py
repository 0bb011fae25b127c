"""What a point sees of a disc through a cone: the boundary integral in closed form.

A port shines on a point only where the port overlaps the circle of radius z tan(theta) about the
foot of the point, z above the port's plane. Uniform radiance over that overlap gives an irradiance
vector that is an integral over its boundary (two circular arcs), elementary and exact. Every other
region is made of discs with signs, and every angular distribution of differences of circles.
"""

from dataclasses import dataclass

import numpy as np

from optics.units import Numbers


@dataclass(frozen=True, slots=True)
class DiscView:
    """Configuration factors of the part of a disc that a cone lets a point see.

    `facing_factor`: for a receiver parallel to the disc and facing it, irradiance / (pi radiance).
    `lateral_per_mm`: for a receiver whose normal lies in the disc's plane and points from the foot to
    the disc's center, over the distance from foot to center (so that it has a limit there). None if not asked for.
    """

    facing_factor: np.ndarray
    lateral_per_mm: np.ndarray | None


def disc_view(
    *, height_mm: Numbers, offset_mm: Numbers, radius_mm: Numbers, cone_sine2_share: Numbers, lateral: bool
) -> DiscView:
    """Factors of the overlap of a disc with the cone's circle, for points in front of the disc's plane; exact.

    With t = z^2 s/(1-s) the squared radius of the cone's circle, d the offset of the foot, a the disc:
    facing = [s alpha + (P - (z^2 + d^2 - a^2) J/S)/2]/pi, alpha the half-arc of the cone's circle inside the
    disc, P that of the disc inside the circle, J the same as seen from the point, S^2 = A^2 - (2ad)^2,
    A = z^2 + d^2 + a^2. Where the disc lies wholly inside the circle: 2 a^2 z^2/(S (S + z^2 + d^2 - a^2)).

    Parameters: height_mm z above the disc's plane (0 or less: behind it, nothing is seen), offset_mm d (0 or
    more), radius_mm a (0: no disc), all broadcast together, shape [...]; cone_sine2_share s = sin^2 of the
    cone's half-angle, 0..1, shape [..., edge] or [edge]. Returns DiscView of shape [..., edge].
    References: lambert_1760 (boundary integral); closed_form.

    A Lambertian disc on its axis, a^2/(a^2 + z^2):

    >>> seen = disc_view(height_mm=2.0, offset_mm=0.0, radius_mm=1.0, cone_sine2_share=[1.0], lateral=False)
    >>> round(float(seen.facing_factor[0]), 12)
    0.2
    """
    z, d, a = np.broadcast_arrays(*(np.asarray(x, float) for x in (height_mm, offset_mm, radius_mm)))
    s = np.asarray(cone_sine2_share, float)
    shape = (*np.broadcast_shapes(z.shape, s.shape[:-1]), s.shape[-1])
    z, d, a = (np.broadcast_to(x, shape[:-1]).reshape(-1, 1) for x in (z, d, a))
    s = np.broadcast_to(s, shape).reshape(-1, shape[-1]) if s.ndim > 1 else s[None]
    facing, sideways = _rows(np.where(z > 0, z, 1.0), d, a, s, lateral)
    dark = (z <= 0) | (a <= 0)
    facing = np.where(dark, 0.0, facing).reshape(shape)
    return DiscView(facing, np.where(dark, 0.0, sideways).reshape(shape) if lateral else None)


def _rows(z, d, a, s, lateral):
    """Both factors for rows [n, 1] of points and edges [n or 1, edge]: whole, none, or the arcs where cut."""
    z2, d2, a2 = z * z, d * d, a * a
    near, far, inside = (d - a) ** 2, (d + a) ** 2, d < a
    beyond = 1.0 - s
    t = z2 * (s / np.where(beyond > 0, beyond, 1e-300))
    root = np.sqrt((z2 + near) * (z2 + far))
    q = z2 + d2 - a2
    whole = np.where(q > 0, 2 * a2 * z2 / (root * (root + np.abs(q))), (root - q) / (2 * root))
    facing = np.where(t >= far, whole, np.where(inside, s, 0.0))
    sideways = np.where(t >= far, 2 * z * a2 / (root * (root + z2 + d2 + a2)), 0.0) if lateral else None
    row, edge = np.nonzero((t > near) & (t < far))
    if row.size:
        cut_t, cut_s = t[row, edge], s[row if s.shape[0] > 1 else 0, edge]
        cut = _cut(*(x[row, 0] for x in (z, d, a, z2, d2, a2, root, q)), cut_t, cut_s, lateral)
        facing[row, edge] = cut[0]
        if lateral:
            sideways[row, edge] = cut[1]
    return facing, sideways


def _cut(z, d, a, z2, d2, a2, root, q, t, s, lateral):
    """Both factors where the circle of the cone cuts the edge of the disc."""
    width = 2 * a * d
    total = z2 + d2 + a2
    rho = np.sqrt(t)
    cosine = np.clip((t - d2 - a2) / width, -1.0, 1.0)
    alpha_cosine = np.clip((t + d2 - a2) / (2 * d * rho), -1.0, 1.0)
    alpha = np.arccos(alpha_cosine)
    arc = np.arccos(-cosine)
    reach = total + width * cosine
    # half the integral of 1/r^2 over the part of the disc's edge that lies inside the circle
    seen_arc = np.arccos(np.clip(-(width + total * cosine) / reach, -1.0, 1.0)) / root
    facing = np.maximum((s * alpha + 0.5 * (arc - q * seen_arc)) / np.pi, 0.0)
    if not lateral:
        return facing, None
    chord = rho * np.sqrt((1 - alpha_cosine) * (1 + alpha_cosine)) / reach
    return facing, -z / (np.pi * d) * (chord + (arc - total * seen_arc) / (2 * d))


def bin_factor(height, offset, radius, edges):
    """Configuration factor of each bin: differences over the last axis."""
    view = disc_view(height_mm=height, offset_mm=offset, radius_mm=radius, cone_sine2_share=edges, lateral=False)
    return np.diff(view.facing_factor, axis=-1)


def ports_area_mm2(radius):
    """Area of all ports of each design; a negative radius is cut out."""
    return np.pi * np.sum(radius * np.abs(radius), axis=-1)


def distinct_ports(*properties):
    """Ports of a design alike in all properties [design, port]: indices of the first of each, and each port's row."""
    alike = np.ones((*properties[0].shape, properties[0].shape[1]), bool)
    for value in properties:
        gap = np.abs(value[:, :, None] - value[:, None, :])
        alike &= gap <= 1e-12 * np.abs(value).max(axis=1)[:, None, None]
    first = np.argmax(alike, axis=-1)
    design, port = np.nonzero(first == np.arange(first.shape[1]))
    row = np.zeros(first.shape, int)
    row[design, port] = np.arange(design.size)
    return design, port, np.take_along_axis(row, first, axis=-1)
