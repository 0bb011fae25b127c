"""Placing circles one after another in a given lumen, many layouts at once.

Each circle is set where it touches two others, or the wall and one other: as near the wall as it
goes, ties by height. In the right order this builds most tightest layouts exactly, so that
trying a few orders and closing in on the lumen replaces a search over positions. Only products,
quotients and square roots of single elements occur: a layout comes out the same, to the last
bit, alone and among others.

Lengths are in any one unit; arrays lie as [circle, layout].
"""

import numpy as np

_TOUCH = 1e-9  # circles may come this much closer than touching, as a share of the lumen
_FLAT = 1e-12  # rounding of a squared sine where centers lie in a line


def placed(
    radii: np.ndarray, at_wall: np.ndarray, lumen_radius: np.ndarray, tie: np.ndarray
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Centers x, y [circle, layout] in the order given, and whether every circle found a place.

    `radii` and `at_wall` are [circle, layout]; circles at the wall touch it.
    """
    x, y = np.zeros_like(radii), np.zeros_like(radii)
    y[0] = lumen_radius - radii[0]
    slack = _TOUCH * lumen_radius
    fits = y[0] >= -slack
    for i in range(1, len(radii)):
        reach, sums = lumen_radius - radii[i], radii[:i] + radii[i]
        x[i], y[i], found = _best(*_at_wall(x[:i], y[:i], reach, sums), x[:i], y[:i], sums, slack, tie, None)
        left = np.flatnonzero(fits & ~found & ~at_wall[i])
        if i > 1 and left.size:  # away from the wall only where there is no room at it
            px, py, between = x[:i, left], y[:i, left], sums[:, left]
            tried = _between(px, py, between)
            x[i, left], y[i, left], found[left] = _best(*tried, px, py, between, slack[left], tie[left], reach[left])
        fits &= found
    return x, y, fits


def _best(cx, cy, valid, px, py, sums, slack, tie, reach):
    """The candidate nearest the wall that overlaps nothing: x, y, and whether there is one [layout]."""
    score = tie * cy
    if reach is not None:
        to_wall = reach - np.sqrt(cx * cx + cy * cy)
        valid = valid & (to_wall >= -slack)
        score = score - 1e3 * to_wall
    near = (sums - slack) ** 2
    for j in range(len(px)):
        ex, ey = cx - px[j], cy - py[j]
        valid = valid & (ex * ex + ey * ey >= near[j])
    best, column = np.where(valid, score, -np.inf).argmax(axis=0), np.arange(cx.shape[1])
    return cx[best, column], cy[best, column], valid[best, column]


def _at_wall(px, py, reach, sums):
    """Where a circle touches the wall and one other: x, y, possible [candidate, layout]."""
    square = px * px + py * py
    from_center = np.sqrt(square)
    turnable = (from_center > _TOUCH * reach) & (reach > 0)
    cosine = (reach * reach + square - sums * sums) / np.where(turnable, 2 * reach * from_center, 1.0)
    sine = 1 - cosine * cosine
    valid = turnable & (sine >= -_FLAT)
    scale = reach / np.where(turnable, from_center, 1.0)
    sine = np.sqrt(np.maximum(sine, 0.0)) * scale
    cosine = cosine * scale
    ax, ay, bx, by = cosine * px, cosine * py, sine * py, sine * px
    return np.concatenate([ax - bx, ax + bx]), np.concatenate([ay + by, ay - by]), np.concatenate([valid, valid])


def _between(px, py, sums):
    """Where a circle touches two others: x, y, possible [candidate, layout]."""
    first, second = np.triu_indices(len(px), 1)
    dx, dy = px[second] - px[first], py[second] - py[first]
    apart = np.maximum(dx * dx + dy * dy, np.finfo(float).tiny)
    near = sums[first] * sums[first]
    along = (apart + near - sums[second] * sums[second]) / (2 * apart)
    aside = near / apart - along * along
    valid = aside >= -_FLAT
    aside = np.sqrt(np.maximum(aside, 0.0))
    mx, my, bx, by = px[first] + along * dx, py[first] + along * dy, aside * dy, aside * dx
    return np.concatenate([mx - bx, mx + bx]), np.concatenate([my + by, my - by]), np.concatenate([valid, valid])
