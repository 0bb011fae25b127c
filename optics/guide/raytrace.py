"""Exact trace of rays through bends of a step-index fiber: the reference that the bend kernel is checked against.

Lengths inside this file count in core radii. The bend is a torus: u runs outward in the bend plane
from the fiber's axis, y across, the axis circle has radius R. With h = u + (u^2 + y^2 - 1)/(2R) a
straight chord is h(t) = h0 + B t + t^2/(2R), y(t) = y0 + y' t with B = u' + (u u' + y y')/R, and the
wall is exactly h^2 + y^2 = 1: a ball in a disc under a constant pull. A ray is lost at the wall when
its direction's component along the outward normal exceeds NA/n1.

Assumptions: geometric optics, smooth wall, no absorption (the bundle counts it once, along the whole
length), a cladding thick enough that what enters it is lost. Skew rays above the NA count as guided.
"""

from dataclasses import dataclass

import numpy as np

from optics.spec import OutOfRange, not_negative, positive, require
from optics.units import rad_from_deg, um_from_mm

CHUNK = 16_000
CREEP = 1e-3
CONE_SHARE = 0.95


@dataclass(frozen=True, slots=True)
class Rays:
    """Rays at one cross-section: place over the core radius, direction sines inside the core."""

    x_ratio: np.ndarray
    y_ratio: np.ndarray
    x_sine: np.ndarray
    y_sine: np.ndarray

    def __len__(self) -> int:
        return len(self.x_ratio)

    def sine(self) -> np.ndarray:
        """Sine of the angle to the fiber's axis, inside the core."""
        return np.hypot(self.x_sine, self.y_sine)

    def skew_sine(self) -> np.ndarray:
        """x y' - y x', what a straight fiber conserves beside the angle."""
        return self.x_ratio * self.y_sine - self.y_ratio * self.x_sine

    def kept(self, which: np.ndarray) -> "Rays":
        return Rays(self.x_ratio[which], self.y_ratio[which], self.x_sine[which], self.y_sine[which])


@dataclass(frozen=True, slots=True)
class BendTrace:
    """What a trace counted: the share that is still guided, and the NA of every ray that is."""

    transmission: float
    standard_error: float
    cone_na: float
    exit_na: np.ndarray


def filled_rays(*, launch_sine: float, rays: int, random: np.random.Generator) -> Rays:
    """Rays of uniform radiance: uniform over the core and in sin^2 up to launch_sine (inside the core)."""
    radius, place = np.sqrt(random.random(rays)), 2 * np.pi * random.random(rays)
    sine, azimuth = launch_sine * np.sqrt(random.random(rays)), 2 * np.pi * random.random(rays)
    return Rays(radius * np.cos(place), radius * np.sin(place), sine * np.cos(azimuth), sine * np.sin(azimuth))


def isotropic_rays(*, limit_sine: float, rays: int, random: np.random.Generator) -> Rays:
    """Rays of an isotropic source that fills the core, those that the straight fiber traps (skew ones too).

    limit_sine = NA/n1; the direction is uniform in solid angle, forward.
    """
    parts, have = [], 0
    while have < rays:
        sine = np.sqrt(1 - random.random(CHUNK) ** 2)
        radius, place, azimuth = np.sqrt(random.random(CHUNK)), *(2 * np.pi * random.random((2, CHUNK)))
        some = Rays(radius * np.cos(place), radius * np.sin(place), sine * np.cos(azimuth), sine * np.sin(azimuth))
        parts.append(some.kept(guided(some, limit_sine=limit_sine)))
        have += len(parts[-1])
    return Rays(*(np.concatenate([getattr(p, f) for p in parts])[:rays] for f in Rays.__slots__))


def guided(rays: Rays, *, limit_sine: float) -> np.ndarray:
    """Which rays a straight fiber keeps: sine^2 - skew^2 <= (NA/n1)^2 at the wall."""
    return rays.sine() ** 2 - rays.skew_sine() ** 2 <= limit_sine**2


def after_straight_run(rays: Rays, *, random: np.random.Generator) -> Rays:
    """The same rays after a long straight run and a turn of the bend plane, both random.

    A straight fiber keeps the angle and the skewness, so that a ray ends anywhere along a chord of its
    caustic, at any azimuth.
    """
    sine = np.maximum(rays.sine(), 1e-300)
    caustic = np.clip(rays.skew_sine() / sine, -1.0, 1.0)
    along = np.sqrt(1 - caustic**2) * (2 * random.random(len(rays)) - 1)
    turn = 2 * np.pi * random.random(len(rays))
    c, s = np.cos(turn), np.sin(turn)
    # in the ray's own frame it runs along x at the height -caustic (x y' - y x' = skewness)
    return Rays(along * c + caustic * s, along * s - caustic * c, sine * c, sine * s)


def _first_chord(b, a, u, y, dy):
    """Length of the chord from a point inside to the wall, A t = tau; the quartic's least positive root.

    g = h^2 + y^2 - 1 is below 0 inside and its second derivative there at most M, so that the positive
    root of g + g' s + M s^2/2 never passes the wall; the steps converge as Newton's do.
    """
    h = u + (u * u + y * y - 1) * a
    most = 2 * (b * b + 4 * a * (1 - h)) + 4 * a + 2 * dy * dy
    t = np.zeros_like(u)
    for _ in range(14):
        ht, yt, slope_h = h + t * (b + a * t), y + dy * t, b + 2 * a * t
        g = np.minimum(ht * ht + yt * yt - 1, 0.0)
        slope = 2 * (ht * slope_h + yt * dy)
        root = np.sqrt(slope * slope - 2 * most * g)
        t = t + np.where(slope > 0, -2 * g / np.maximum(slope + root, 1e-300), (root - slope) / most)
    return t


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


def _through(state, radius, limit, bend_rad):
    """Trace [5, ray] of (u, y, u', y', z') through bend_rad; the exit state, nan where the ray is lost.

    New rays join whenever half of the working set has ended, so that the few rays with very many hits
    do not make the rest wait.
    """
    out = np.full_like(state, np.nan)
    work, live, left = state[:, :0], np.arange(0), np.zeros(0)
    waiting = 0

    def advance(work, live, left, chord):
        u, y, du, dy, dz = work
        b = du + (u * du + y * dy) / radius
        t = chord(b, 0.5 / radius, u, y, dy)
        at, along = radius + u + du * t, dz * t
        turned = np.arctan2(along, at)
        ends = turned >= left
        if ends.any():
            out[:, live[ends]] = _cut(work[:, ends], radius, left[ends])
        rho = np.hypot(at, along)
        du, dz = (du * at + dz * along) / rho, dz * (radius + u) / rho
        u, y = rho - radius, y + dy * t
        size = np.hypot(u, y)
        u, y = u / size, y / size
        normal = du * u + dy * y
        back = normal + np.maximum(normal, CREEP * limit)
        stay = (normal <= limit) & ~ends
        work, left = np.stack([u, y, du - back * u, dy - back * y, dz]), left - turned
        return (work, live, left) if stay.all() else (work[:, stay], live[stay], left[stay])

    while live.size or waiting < state.shape[1]:
        if live.size < CHUNK // 2 and waiting < state.shape[1]:
            fresh = np.arange(waiting, min(waiting + CHUNK - live.size, state.shape[1]))
            waiting = fresh[-1] + 1
            joined = advance(state[:, fresh], fresh, np.full(fresh.size, float(bend_rad)), _first_chord)
            work, live, left = (np.concatenate(pair, axis=-1) for pair in zip((work, live, left), joined))
        work, live, left = advance(work, live, left, _next_chord)
    return out


def _cut(state, radius, left):
    """State where a chord crosses the plane that lies `left` radians further."""
    u, y, du, dy, dz = state
    c, s = np.cos(left), np.sin(left)
    t = (radius + u) * s / (dz * c - du * s)
    at, along = radius + u + du * t, dz * t
    return np.stack([np.hypot(at, along) - radius, y + dy * t, du * c + dz * s, dy, dz * c - du * s])


def through_bend(rays: Rays, *, radius_ratio: float, limit_sine: float, bend_rad: float) -> tuple[Rays, np.ndarray]:
    """Rays behind a bend in the x direction, and which of those sent in they are.

    radius_ratio: axis radius over core radius, above 1; limit_sine = NA/n1. A ray that leaves the bend
    in its last chord above the limit is lost where the straight fiber begins.
    """
    parts = [rays.x_ratio, rays.y_ratio, rays.x_sine, rays.y_sine]
    if bend_rad == 0:
        return rays, np.ones(len(rays), bool)
    state = np.stack([*parts, np.sqrt(np.maximum(1 - parts[2] ** 2 - parts[3] ** 2, 0.0))])
    out = _through(state, radius_ratio, limit_sine, bend_rad)
    alive = ~np.isnan(out[0])
    left = Rays(*out[:4, alive])
    return left, alive
