"""Areas and arcs of overlaps and unions of circles, in any one unit of length.

Ports, joints, the lens acceptance and the section all need them.
"""

import numpy as np

from optics.units import Numbers


def overlap_area(*, radius_1: Numbers, radius_2: Numbers, distance: Numbers) -> np.ndarray:
    """Area common to two discs whose centers lie `distance` apart (circular lens).

    Exact: r1^2 acos(x1/r1) - x1 h + r2^2 acos(x2/r2) - x2 h, with the chord's half-length h.

    >>> round(float(overlap_area(radius_1=1.0, radius_2=1.0, distance=1.0)), 6)
    1.22837
    >>> float(overlap_area(radius_1=1.0, radius_2=3.0, distance=1.5)) == np.pi
    True
    """
    r1, r2, d = np.broadcast_arrays(*(np.asarray(x, float) for x in (radius_1, radius_2, distance)))
    safe = np.where(d > 0, d, 1.0)
    x1 = np.clip((d * d + r1 * r1 - r2 * r2) / (2 * safe), -r1, r1)
    x2 = np.clip((d * d + r2 * r2 - r1 * r1) / (2 * safe), -r2, r2)
    half_chord = np.sqrt(np.maximum(r1 * r1 - x1 * x1, 0.0))

    def segment(radius, x):
        return radius * radius * np.arccos(np.clip(x / np.where(radius > 0, radius, 1.0), -1, 1)) - x * half_chord

    lens = segment(r1, x1) + segment(r2, x2)
    inside = np.pi * np.minimum(r1, r2) ** 2
    return np.where(d >= r1 + r2, 0.0, np.where(d <= np.abs(r1 - r2), inside, lens))


def free_arcs(*, x: Numbers, y: Numbers, radius: Numbers) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """The parts of each circle's rim that lie in no other disc: start and end angle (rad), and a mask.

    Circles run along the last axis; the arcs of circle i are [..., i, :] where the mask holds, as
    pieces between crossings that may abut. Of equal circles the first keeps its rim.

    >>> start, end, free = free_arcs(x=[0.0, 1.0], y=[0.0, 0.0], radius=[1.0, 1.0])
    >>> [round(float(arc), 6) for arc in ((end - start) * free).sum(axis=-1)]  # each 240 degrees
    [4.18879, 4.18879]
    """
    x, y, r = np.broadcast_arrays(*(np.asarray(a, float) for a in (x, y, radius)))
    dx, dy = x[..., None, :] - x[..., :, None], y[..., None, :] - y[..., :, None]  # [..., of, toward]
    own, other, apart = r[..., :, None], r[..., None, :], np.sqrt(dx * dx + dy * dy)
    crossing = (apart < own + other) & (apart > np.abs(own - other))
    cosine = (apart * apart + own * own - other * other) / np.where(crossing, 2 * apart * own, 1.0)
    half = np.where(crossing, np.arccos(np.clip(cosine, -1, 1)), 0.0)
    toward = np.where(crossing, np.arctan2(dy, dx), 0.0)
    ends = np.concatenate([toward - half, toward + half], axis=-1) % (2 * np.pi)
    ends = np.sort(ends, axis=-1)
    start, end = ends, np.concatenate([ends[..., 1:], ends[..., :1] + 2 * np.pi], axis=-1)
    middle = (start + end) / 2
    px = x[..., :, None] + own * np.cos(middle)
    py = y[..., :, None] + own * np.sin(middle)
    free = np.broadcast_to(own > 0, start.shape).copy()
    for j in range(r.shape[-1]):
        xj, yj, rj = (a[..., j, None, None] for a in (x, y, r))
        scale = 1e-12 * (own + rj)
        same = (np.abs(own - rj) <= scale) & (np.abs(x[..., :, None] - xj) + np.abs(y[..., :, None] - yj) <= scale)
        index = np.arange(r.shape[-1])[:, None]
        free &= np.where(same, index <= j, (px - xj) ** 2 + (py - yj) ** 2 >= rj * rj)
    return start, end, free


def union_area(*, x: Numbers, y: Numbers, radius: Numbers) -> np.ndarray:
    """Area covered by discs that may overlap, exact: Green's theorem along the free arcs of their rims.

    Discs run along the last axis; radius 0 stands for none.
    Area = 1/2 sum over arcs of r^2 (b - a) + r [x (sin b - sin a) - y (cos b - cos a)].

    >>> two = union_area(x=[0.0, 1.0], y=[0.0, 0.0], radius=[1.0, 1.0])
    >>> round(float(two + overlap_area(radius_1=1.0, radius_2=1.0, distance=1.0)), 9) == round(2 * np.pi, 9)
    True
    """
    x, y, r = np.broadcast_arrays(*(np.asarray(a, float) for a in (x, y, radius)))
    start, end, free = free_arcs(x=x, y=y, radius=r)
    own = r[..., :, None]
    along = x[..., :, None] * (np.sin(end) - np.sin(start)) - y[..., :, None] * (np.cos(end) - np.cos(start))
    return 0.5 * np.where(free, own * own * (end - start) + own * along, 0.0).sum(axis=(-2, -1))


def open_area(*, opening_radius: Numbers, x: Numbers, y: Numbers, radius: Numbers, margin: Numbers) -> np.ndarray:
    """Area inside a circle around the origin that keeps a margin from its wall and from discs in it.

    Exact, as the area of the eroded opening and the grown discs together less that of the discs.
    Discs may overlap each other and the wall; they run along the last axis, radius 0 for none.

    >>> round(float(open_area(opening_radius=2.0, x=[0.0], y=[0.0], radius=[1.0], margin=0.0) / np.pi), 9)
    3.0
    """
    x, y, r = np.broadcast_arrays(*(np.asarray(a, float) for a in (x, y, radius)))
    inner = np.maximum(np.asarray(opening_radius, float) - margin, 0.0)
    grown = np.where(r > 0, r + np.asarray(margin, float)[..., None], 0.0)
    shape = np.broadcast_shapes(inner.shape, grown.shape[:-1])
    inner = np.broadcast_to(inner, shape)[..., None]
    xs, ys, rs = (np.broadcast_to(a, (*shape, grown.shape[-1])) for a in (x, y, grown))
    none = np.zeros_like(inner)
    together = union_area(
        x=np.concatenate([none, xs], -1), y=np.concatenate([none, ys], -1), radius=np.concatenate([inner, rs], -1)
    )
    return np.maximum(together - union_area(x=xs, y=ys, radius=rs), 0.0)
