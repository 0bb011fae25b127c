"""Generated subjects to look at: bar target, cracks, a gear tooth, vessels, a flat field.

Each returns relative reflectance [row, column], 1 being the target's own, over a square of a stated
width; rows run upward. Features have their own sizes in millimeters as shares of the width, never of what a design
resolves: two designs that look at the same field look at the same thing. `contrast` is Michelson's, of the deepest
feature against its surround. Same numbers, same seed, same array. All shapes are made up.
"""

from functools import lru_cache

import numpy as np

from optics.image.contrast import three_bar_lp_mm
from optics.spec import positive, require, within
from optics.units import AnyUnit
from optics.viewer.strokes import box, middles_mm, mottle, path, text

COARSEST_SHARE = 1 / 34  # width of the coarsest bar over the width of the picture
ROWS = (2, 3, 5)  # patterns in each row of the bar target, coarse to fine
GOLDEN_RAD = 2.399963229728653


def dark_level(*, contrast: float) -> float:
    """Reflectance of a feature of Michelson contrast C on a surround of 1: (1 - C)/(1 + C).

    >>> round(dark_level(contrast=0.5), 6)
    0.333333
    """
    within(0.0, 1.0, contrast=contrast)
    return (1.0 - contrast) / (1.0 + contrast)


def _checked(width_mm: float, pixels: int, contrast: float) -> float:
    positive(width_mm=width_mm)
    require("pixels", pixels, "from 16 to 8192", 16 <= pixels <= 8192)
    return dark_level(contrast=contrast)


def bar_frequencies_lp_mm(*, width_mm: float) -> AnyUnit:
    """Line pairs per mm of the bar target's patterns: every second element of the three-bar series, from coarse on."""
    positive(width_mm=width_mm)
    first = int(np.ceil(6.0 * np.log2(0.5 / (COARSEST_SHARE * width_mm))))
    steps = first + 2 * np.arange(sum(ROWS))
    return three_bar_lp_mm(group=steps // 6, element=steps % 6 + 1)


@lru_cache(maxsize=4)
def bar_target(*, width_mm: float, pixels: int, contrast: float) -> np.ndarray:
    """Three bars across and three upright for each of ten frequencies, with their line pairs per mm, and a ruler.

    Bars are five times as long as wide. References: mil_std_150a (proportions and frequencies).
    """
    dark = _checked(width_mm, pixels, contrast)
    ink, frequencies = np.zeros((pixels, pixels)), iter(bar_frequencies_lp_mm(width_mm=width_mm))
    letters, top = width_mm / 46, 0.30 * width_mm
    for count in ROWS:
        row = [next(frequencies) for _ in range(count)]
        bars = [0.5 / f for f in row]
        room = [max(11.0 * bar, len(_three(f)) * letters) for bar, f in zip(bars, row)]
        gap = min(0.06 * width_mm, (0.66 * width_mm - sum(room)) / max(count - 1, 1))
        left = -0.5 * (sum(room) + gap * (count - 1))
        for f, bar, wide in zip(row, bars, room):
            start = left + 0.5 * (wide - 11.0 * bar)
            _three_bars(ink, width_mm, bar, start, top - 5.0 * bar)
            said = _three(f)
            text(cover=ink, width_mm=width_mm, said=said, left_mm=left + 0.5 * (wide - len(said) * letters * 6 / 7),
                 low_mm=top - 5.0 * bars[0] - 1.6 * letters, high_mm=letters)  # fmt: skip
            left += wide + gap
        top -= 5.0 * bars[0] + 3.4 * letters
    _ruler(ink, width_mm, top - 0.6 * letters, letters)
    return _frozen(1.0 - (1.0 - dark) * np.minimum(ink, 1.0))


def _three(f: float) -> str:
    return f"{f:.3g}"


def _three_bars(ink: AnyUnit, width_mm: float, bar: float, left: float, low: float) -> None:
    """Upright bars, then level ones a bar's width beside them."""
    for place in (0, 2, 4):
        box(cover=ink, width_mm=width_mm, left_mm=left + place * bar, low_mm=low, wide_mm=bar, high_mm=5 * bar)
        box(
            cover=ink, width_mm=width_mm, left_mm=left + 6 * bar, low_mm=low + place * bar, wide_mm=5 * bar, high_mm=bar
        )


def _ruler(ink: AnyUnit, width_mm: float, top: float, letters: float) -> None:
    """A line with ten ticks, and how long it is."""
    power = 10.0 ** np.floor(np.log10(0.4 * width_mm))
    length = max(step * power for step in (1, 2, 5) if step * power <= 0.4 * width_mm)
    line, said = width_mm / 240, f"{length:g} mm"
    left = -0.5 * length
    box(cover=ink, width_mm=width_mm, left_mm=left, low_mm=top - line, wide_mm=length, high_mm=line)
    for tick in range(11):
        high = letters * (1.0 if tick % 5 == 0 else 0.6)
        box(
            cover=ink,
            width_mm=width_mm,
            left_mm=left + tick * length / 10 - line / 2,
            low_mm=top - line - high,
            wide_mm=line,
            high_mm=high,
        )
    text(
        cover=ink,
        width_mm=width_mm,
        said=said,
        left_mm=-0.43 * len(said) * letters,
        low_mm=top - 2.6 * letters,
        high_mm=letters,
    )


@lru_cache(maxsize=4)
def crack_network(*, width_mm: float, pixels: int, contrast: float, seed: int) -> np.ndarray:
    """Branching cracks on a mottled, scaled surface; from a fiftieth of the width down to nothing."""
    dark = _checked(width_mm, pixels, contrast)
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
    return _frozen(np.clip(scale, 0.4, 1.3) * (1.0 - (1.0 - dark) * cover))


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
    dark = _checked(width_mm, pixels, contrast)
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
    return _frozen(np.clip(flank * inside + behind * (1.0 - inside), 0.02, 1.3))


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
    dark = _checked(width_mm, pixels, contrast)
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
    return _frozen(np.clip(surface, 0.5, 1.3) * (1.0 - (1.0 - dark) * cover))


def _vessel(cover, width_mm, rng, start, angle, thick) -> None:
    """A stretch of vessel up to where it branches, then its branches."""
    if thick < width_mm / 300 or np.abs(start).max() > 0.85 * width_mm:
        return
    step = max(0.6 * thick, width_mm / 160)
    count = max(int((thick * rng.uniform(6, 11) + width_mm * rng.uniform(0.03, 0.07)) / step), 3)
    heading = angle + np.cumsum(rng.normal(0, 0.16 * np.sqrt(step * 60 / width_mm), count))
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
    _checked(width_mm, pixels, 0.0)
    return np.ones((pixels, pixels))


def _frozen(array: np.ndarray) -> np.ndarray:
    array.setflags(write=False)
    return array


SUBJECTS = {
    "bars": "a bar target",
    "cracks": "a network of cracks",
    "gear": "the edge of a gear tooth",
    "vessels": "a tree of vessels",
    "flat": "a flat field",
}


def subject_reflectance(*, subject: str, width_mm: float, pixels: int, contrast: float, seed: int) -> np.ndarray:
    """One of SUBJECTS by name.

    >>> subject_reflectance(subject="flat", width_mm=10.0, pixels=64, contrast=0.3, seed=1).mean()
    np.float64(1.0)
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
    from optics.spec import OutOfRange

    if subject not in SUBJECTS:
        raise OutOfRange(f"subject is {subject!r}; it must be one of {', '.join(SUBJECTS)}.")
