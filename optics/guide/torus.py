"""Chords of a ray in a torus: from the start to the wall, and from wall to wall. Lengths in core radii.

The bend is a torus: u runs outward in the bend plane from the fiber's axis, y across, the axis is a circle
of radius R. With h = u + (u^2 + y^2 - 1)/(2R) a straight chord is h(t) = h0 + B t + t^2/(2R), y(t) = y0 +
y' t with B = u' + (u u' + y y')/R, and the wall is exactly h^2 + y^2 = 1: a ball in a disc under a
constant pull. A ray is lost at the wall when the component of its direction along the outward normal
exceeds NA/n1.
"""

import numpy as np

CHUNK = 16_000  # rays worked on at a time
CREEP = 1e-3  # least normal component of a reflection, over the limit
MOST_HITS = 20_000  # of one ray: the few that creep along the wall or hardly advance are left at that


def _first_chord(b, a, u, y, dy):
    """Length of the chord from a point inside to the wall: the quartic's least positive root.

    g = h^2 + y^2 - 1 is below 0 inside and its second derivative there at most M, so that the positive
    root of g + g' s + M s^2/2 never passes the wall; the steps converge as Newton's do. The few rays that
    nearly graze the wall on their way take more of them.
    """
    h = u + (u * u + y * y - 1) * a
    given = (b, h, y, dy, 2 * (b * b + 4 * a * (1 - h)) + 4 * a + 2 * dy * dy)
    t = np.zeros_like(u)
    todo = slice(None)
    for _ in range(60):
        for _ in range(7):
            t[todo], ends = _toward_wall(t[todo], a, *(part[todo] for part in given))
        todo = np.arange(u.size)[todo][ends < -1e-13]
        if not todo.size:
            break
    return t


def _toward_wall(t, a, b, h, y, dy, most):
    slope_h, yt = b + 2 * a * t, y + dy * t
    ht = h + t * (b + a * t)
    g = np.minimum(ht * ht + yt * yt - 1, 0.0)
    slope = 2 * (ht * slope_h + yt * dy)
    root = np.sqrt(slope * slope - 2 * most * g)
    return t + np.where(slope > 0, -2 * g / np.maximum(slope + root, 1e-300), (root - slope) / most), g


def _next_chord(b, a, u, y, dy):
    """Length of the chord from a wall point to the next: the cubic's least positive root (tau = A t)."""
    c = b * b + 2 * a * u + dy * dy
    d = np.minimum(2 * a * (b * u + y * dy), 0.0)
    third = 2 * b / 3
    p = c / 3 - third * third
    q = third * (third * third - c / 2) + d / 2
    disc = q * q + p * p * p
    three = disc < 0
    tau = np.empty_like(u)
    w = np.cbrt(-q - np.copysign(np.sqrt(np.maximum(disc, 0.0)), q))
    np.subtract(w, p / np.where(w == 0, 1.0, w), out=tau)
    if three.any():
        p3, q3 = p[three], q[three]
        size = np.sqrt(-p3)
        turn = np.arccos(np.clip(-q3 / (size * -p3), -1, 1)) / 3
        least = (b[three] < 0) & (c[three] > 0)
        tau[three] = 2 * size * np.cos(turn - np.where(least, 4 * np.pi / 3, 0.0))
    tau -= third
    for _ in range(2):
        value = d + tau * (c + tau * (2 * b + tau))
        slope = c + tau * (4 * b + 3 * tau)
        tau = np.maximum(tau - value / np.where(np.abs(slope) < 1e-300, 1e-300, slope), 0.0)
    return tau / a


def through(state, radius, limit, bend_rad, most_hits=MOST_HITS):
    """Trace [5, ray] of (u, y, u', y', z') through bend_rad; the exit state, nan where the ray is lost.

    New rays join whenever half of the working set has ended, so that the few rays with very many hits
    do not make the rest wait. A ray with more than most_hits counts as kept, in its state of then.
    """
    out = np.full_like(state, np.nan)
    work, live, left = state[:, :0], np.arange(0), np.zeros((2, 0))
    waiting, count = 0, state.shape[1]
    while live.size or waiting < count:
        if live.size < CHUNK // 2 and waiting < count:
            fresh = np.arange(waiting, min(waiting + CHUNK - live.size, count))
            waiting = fresh[-1] + 1
            budget = np.stack([np.full(fresh.size, float(bend_rad)), np.full(fresh.size, float(most_hits))])
            joined = _hit(out, state[:, fresh], fresh, budget, radius, limit, _first_chord)
            work, live, left = (np.concatenate(pair, axis=-1) for pair in zip((work, live, left), joined))
        work, live, left = _hit(out, work, live, left, radius, limit, _next_chord)
    return out


def _hit(out, work, live, left, radius, limit, chord):
    """Every ray on to its next hit of the wall and reflected there; those that end go to `out` or are dropped.

    left: the angle and the hits that each ray still has.
    """
    u, y, du, dy, dz = work
    b = du + (u * du + y * dy) / radius
    t = chord(b, 0.5 / radius, u, y, dy)
    at, along = radius + u + du * t, dz * t
    turned = np.arctan2(along, at)
    ends = turned >= left[0]
    if ends.any():
        out[:, live[ends]] = _cut(work[:, ends], radius, left[0, ends])
    rho = np.hypot(at, along)
    du, dz = (du * at + dz * along) / rho, dz * (radius + u) / rho
    u, y = rho - radius, y + dy * t
    size = np.hypot(u, y)
    u, y = u / size, y / size
    normal = du * u + dy * y
    stay = (normal <= limit) & ~ends
    back = normal + np.maximum(normal, CREEP * limit)
    work, left = np.stack([u, y, du - back * u, dy - back * y, dz]), left - np.stack([turned, np.ones_like(turned)])
    creeps = normal < CREEP * limit
    if creeps.any():  # lifted off the wall, not sped up
        sine2 = work[2, creeps] ** 2 + work[3, creeps] ** 2
        work[2:4, creeps] *= np.sqrt((1 - dz[creeps] ** 2) / sine2)
    tired = stay & (left[1] <= 0)
    if tired.any():
        out[:, live[tired]] = work[:, tired]
        stay &= ~tired
    return (work, live, left) if stay.all() else (work[:, stay], live[stay], left[:, stay])


def _cut(state, radius, left):
    """State where a chord crosses the plane that lies `left` radians further."""
    u, y, du, dy, dz = state
    c, s = np.cos(left), np.sin(left)
    t = (radius + u) * s / (dz * c - du * s)
    at, along = radius + u + du * t, dz * t
    return np.stack([np.hypot(at, along) - radius, y + dy * t, du * c + dz * s, dy, dz * c - du * s])
