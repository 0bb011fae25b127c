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
