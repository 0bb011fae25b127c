"""Generated subjects to look at: bar target, cracks, a gear tooth, vessels, a flat field.

Each returns relative reflectance [row, column], 1 being the target's own, over a square of a stated
width; rows run upward. Features have their own sizes in millimeters as shares of the width, never of what a design
resolves: two designs that look at the same field look at the same thing. `contrast` is Michelson's, of the deepest
feature against its surround. Same numbers, same seed, same array. All shapes are made up.
"""

from functools import lru_cache

import numpy as np

from optics.spec import OutOfRange
from optics.units import AnyUnit
from optics.viewer.bars import bar_target
from optics.viewer.strokes import checked_dark_level, frozen, middles_mm, mottle, path

GOLDEN_RAD = 2.399963229728653


@lru_cache(maxsize=4)
def crack_network(*, width_mm: float, pixels: int, contrast: float, seed: int) -> np.ndarray:
    """Branching cracks on a mottled, scaled surface; from a fiftieth of the width down to nothing."""
    dark = checked_dark_level(width_mm, pixels, contrast)
    rng = np.random.default_rng(seed)
    cover = np.zeros((pixels, pixels))
    turn = rng.uniform(0, 2 * np.pi)
    for number in range(4):
        angle = turn + number * GOLDEN_RAD
        start = 0.62 * width_mm * np.array([np.cos(angle), np.sin(angle)])
        _crack(
            cover,
            width_mm,
            rng,
            start,
            angle + np.pi + rng.normal(0, 0.35),
            width_mm / rng.uniform(60, 130),
            1.15 * width_mm,
            3,
        )
    scale = (
        1.0
        + 0.07 * mottle(pixels=pixels, slope=1.3, seed=seed + 1)
        + 0.035 * mottle(pixels=pixels, slope=0.6, seed=seed + 2)
    )
    return frozen(np.clip(scale, 0.4, 1.3) * (1.0 - (1.0 - dark) * cover))


def _crack(cover, width_mm, rng, start, angle, thick, length, order) -> None:
    """One crack that wanders and tapers, and its branches."""
    step = width_mm / 110
    count = max(int(length / step), 3)
    bends = np.cumsum(rng.normal(0, 0.10, count)) + rng.normal(
        0, 0.32, count
    )  # it wanders, and it jags from grain to grain
    bends -= np.linspace(0, 1, count) * bends[-1] * 0.6
    heading = angle + bends
    points = start + np.concatenate(
        [np.zeros((1, 2)), np.cumsum(step * np.stack([np.cos(heading), np.sin(heading)], axis=1), axis=0)]
    )
    along = np.linspace(0, 1, count + 1)
    taper = thick * (1.0 - along) ** 0.6 * np.exp(rng.normal(0, 0.25, count + 1))
    path(cover=cover, width_mm=width_mm, points_mm=points, thick_mm=taper)
    for place in (
        rng.choice(np.arange(2, count), min(count // 14, 9) if order > 0 else 0, replace=False) if count > 16 else ()
    ):
        side = rng.choice((-1.0, 1.0)) * rng.uniform(0.5, 1.25)
        left = length * (1.0 - along[place]) * rng.uniform(0.25, 0.6)
        _crack(cover, width_mm, rng, points[place], heading[place] + side, 0.7 * taper[place], left, order - 1)


@lru_cache(maxsize=4)
def gear_edge(*, width_mm: float, pixels: int, contrast: float, seed: int) -> np.ndarray:
    """A ground tooth flank with pits along its pitch line, its rounded tip edge, and the dark gap beyond."""
    dark = checked_dark_level(width_mm, pixels, contrast)
    rng = np.random.default_rng(seed)
    at = middles_mm(width_mm=width_mm, pixels=pixels) / width_mm
    turn = 0.22
    u, v = (
        np.cos(turn) * at[None, :] + np.sin(turn) * at[:, None],
        -np.sin(turn) * at[None, :] + np.cos(turn) * at[:, None],
    )
    edge = 0.24 - 0.10 * u * u  # the tip edge, slightly crowned
    lines = rng.standard_normal(4 * pixels)
    lines = np.convolve(lines, np.ones(5) / 5, "same") + 0.7 * np.convolve(lines, np.ones(31) / 31**0.5 / 3, "same")
    ground = 1.0 + 0.035 * np.interp(
        v + 0.03 * u, np.linspace(-1, 1, len(lines)), lines / lines.std()
    )  # grinding marks along the tooth
    flank = (
        ground * (0.86 + 0.22 * np.clip(v + 0.5, 0, 1)) * (1.0 + 0.03 * mottle(pixels=pixels, slope=1.2, seed=seed + 1))
    )
    soft = 1.0 / pixels
    inside = np.clip((edge - v) / soft + 0.5, 0.0, 1.0)
    chamfer = np.exp(-(((v - edge + 0.012) / 0.006) ** 2))
    behind = 0.05 + 0.30 * np.clip((v - edge - 0.13) * 6.0, 0.0, 1.0) * (1 - 0.4 * np.clip((v - edge - 0.2) * 4, 0, 1))
    pits, halo = _pits(width_mm, pixels, rng, turn)
    flank = flank * (1.0 + 0.06 * halo) * (1.0 - (1.0 - dark) * pits) + 0.22 * chamfer
    return frozen(np.clip(flank * inside + behind * (1.0 - inside), 0.02, 1.3))


def _pits(width_mm, pixels, rng, turn) -> tuple[AnyUnit, AnyUnit]:
    """Pits in a band along the pitch line: cover, and the bright burnished rims around the larger ones."""
    pits, halo = np.zeros((pixels, pixels)), np.zeros((pixels, pixels))
    ahead, up = np.array([np.cos(turn), np.sin(turn)]), np.array([-np.sin(turn), np.cos(turn)])
    for _ in range(90):
        size = width_mm * min(float(np.exp(rng.normal(np.log(0.008), 0.75))), 0.05)
        middle = width_mm * (rng.uniform(-0.55, 0.55) * ahead + (rng.normal(-0.06, 0.075)) * up)
        for lobe in range(5):  # a pit is ragged: a few overlapping rounds
            off = 0.3 * size * rng.normal(0, 1, 2)
            ends = np.stack([middle + off - 0.08 * size * ahead, middle + off + 0.08 * size * ahead])
            thick = np.full(2, size * (rng.uniform(0.35, 0.8) if lobe else 0.9))
            path(cover=halo, width_mm=width_mm, points_mm=ends, thick_mm=thick * 1.5)
            path(cover=pits, width_mm=width_mm, points_mm=ends, thick_mm=thick)
    return pits, halo


@lru_cache(maxsize=4)
def vessel_tree(*, width_mm: float, pixels: int, contrast: float, seed: int) -> np.ndarray:
    """Vessels that branch and thin under a moist surface: daughters by Murray's cube law, fainter as they thin."""
    dark = checked_dark_level(width_mm, pixels, contrast)
    rng = np.random.default_rng(seed)
    cover = np.zeros((pixels, pixels))
    turn = rng.uniform(0, 2 * np.pi)
    for number in range(3):
        angle = turn + number * GOLDEN_RAD + rng.normal(0, 0.2)
        start = 0.75 * width_mm * np.array([np.cos(angle), np.sin(angle)])
        _vessel(cover, width_mm, rng, start, angle + np.pi + rng.normal(0, 0.2), width_mm / rng.uniform(24, 36))
    surface = (
        1.0
        + 0.05 * mottle(pixels=pixels, slope=1.6, seed=seed + 1)
        + 0.012 * mottle(pixels=pixels, slope=0.3, seed=seed + 2)
    )
    return frozen(np.clip(surface, 0.5, 1.3) * (1.0 - (1.0 - dark) * cover))


def _vessel(cover, width_mm, rng, start, angle, thick) -> None:
    """A stretch of vessel up to where it branches, then its branches."""
    if thick < width_mm / 280 or np.abs(start).max() > 0.76 * width_mm:
        return
    step = max(0.6 * thick, width_mm / 110)
    count = max(int((thick * rng.uniform(6, 11) + width_mm * rng.uniform(0.03, 0.07)) / step), 3)
    heading = angle + np.cumsum(rng.normal(0, 0.16 * np.sqrt(60 * step / width_mm), count))
    points = start + np.concatenate(
        [np.zeros((1, 2)), np.cumsum(step * np.stack([np.cos(heading), np.sin(heading)], axis=1), axis=0)]
    )
    depth = 1.0 - np.exp(-thick * 110 / width_mm)  # thin vessels hold less blood in the line of sight
    share = rng.uniform(0.55, 0.93)  # of the flow that goes on: r0^3 = r1^3 + r2^3
    after = thick * share ** (1 / 3) * 0.985
    path(cover=cover, width_mm=width_mm, points_mm=points, thick_mm=np.linspace(thick, after, count + 1), depth=depth)
    side = rng.choice((-1.0, 1.0))
    for part, bend in ((share, -0.18), (1.0 - share, 0.75)):
        _vessel(
            cover,
            width_mm,
            rng,
            points[-1],
            heading[-1] + side * (bend + rng.normal(0, 0.12)),
            thick * part ** (1 / 3) * 0.985,
        )


def flat_field(*, width_mm: float, pixels: int) -> np.ndarray:
    """The target's own surface and nothing on it."""
    checked_dark_level(width_mm, pixels, 0.0)
    return np.ones((pixels, pixels))


SUBJECTS = {
    "bars": "a bar target",
    "cracks": "a network of cracks",
    "gear": "the edge of a gear tooth",
    "vessels": "a tree of vessels",
    "flat": "a flat field",
}


def subject_reflectance(*, subject: str, width_mm: float, pixels: int, contrast: float, seed: int) -> np.ndarray:
    """One of SUBJECTS by name.

    >>> float(subject_reflectance(subject="flat", width_mm=10.0, pixels=64, contrast=0.3, seed=1).mean())
    1.0
    """
    require_subject(subject)
    size = {"width_mm": float(width_mm), "pixels": int(pixels)}
    if subject == "flat":
        return flat_field(**size)
    if subject == "bars":
        return bar_target(**size, contrast=float(contrast))
    made = {"cracks": crack_network, "gear": gear_edge, "vessels": vessel_tree}[subject]
    return made(**size, contrast=float(contrast), seed=int(seed))


def require_subject(subject: str) -> None:
    """Refuse an unknown subject with the known ones."""
    if subject not in SUBJECTS:
        raise OutOfRange(f"subject is {subject!r}; it must be one of {', '.join(SUBJECTS)}.")
