"""The mosaic of cores: where each one lies, what it collects, what its neighbors pass on, how its disc falls on the pixels.

Everything that depends on geometry alone is worked out once and kept: a picture is then a gather, a
multiplication and a sum. Coordinates are micrometers on the bundle's face from its middle, x to the
right and y up; rows of arrays run upward.
"""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from optics.image.coupled import ROWS, rings
from optics.spec import not_negative, positive, require, within
from optics.units import AnyUnit, Flags, rad_from_deg

TAPS = 4  # samples along each axis that a cubic spline takes
PLACES, LEAST_PLACES, STAMP_PIXELS = (
    32,
    4,
    96,
)  # positions of a disc within a pixel: so many for small discs, fewer for large


@dataclass(frozen=True, slots=True, eq=False)
class Mosaic:
    """The cores of one bundle, each [core]: place, lattice coordinates, throughput over the mean, and whether it is alive."""

    x_um: np.ndarray
    y_um: np.ndarray
    lattice: AnyUnit  # [core, 2], whole steps along the two rows
    throughput_ratio: np.ndarray
    alive: Flags


@dataclass(frozen=True, slots=True, eq=False)
class Drawing:
    """Which pixels each core's disc touches, and the share of each pixel that it covers, [core, place]."""

    cores: AnyUnit  # the cores that fall on the frame
    pixel: AnyUnit  # places in the frame with its margin
    cover_share: np.ndarray
    frame: tuple[int, int]
    margin: int


@lru_cache(maxsize=8)
def mosaic(
    *,
    pitch_um: float,
    image_um: float,
    turn_deg: float,
    jitter_share: float,
    dead_fraction: float,
    transmission_spread: float,
    seed: int,
) -> Mosaic:
    """The cores whose centers lie within a circle of diameter `image_um`, on a hexagonal lattice about its middle.

    `turn_deg`: a row of neighbors from the x axis. `jitter_share`: rms displacement along x and along y over the
    pitch, the same at both faces. `dead_fraction` of the cores, to the nearest whole number, are dark. Throughput is
    log-normal with mean 1 and rms `transmission_spread`. Each of the three has its own stream of the seed.
    References: closed_form (lattice); assumed (the distributions).

    >>> cores = mosaic(pitch_um=10.0, image_um=1000.0, turn_deg=0.0, jitter_share=0.0, dead_fraction=0.01,
    ...     transmission_spread=0.0, seed=1)
    >>> len(cores.x_um), int((~cores.alive).sum())
    (9061, 91)
    """
    positive(pitch_um=pitch_um, image_um=image_um)
    not_negative(jitter_share=jitter_share, transmission_spread=transmission_spread)
    within(0.0, 1.0, dead_fraction=dead_fraction)
    jitter, dead, spread = (np.random.default_rng(stream) for stream in np.random.SeedSequence(seed).spawn(3))
    reach = int(image_um / pitch_um * 0.5774) + 2
    steps = np.arange(-reach, reach + 1)
    lattice = np.stack(np.meshgrid(steps, steps), axis=-1).reshape(-1, 2)
    place = pitch_um * lattice @ ROWS
    inside = (place**2).sum(axis=1) <= (0.5 * image_um * (1 + 1e-12)) ** 2
    lattice, place = lattice[inside], place[inside]
    turn = rad_from_deg(turn_deg)
    place = place @ np.array([[np.cos(turn), np.sin(turn)], [-np.sin(turn), np.cos(turn)]])
    place = place + jitter_share * pitch_um * jitter.standard_normal(place.shape)
    alive = np.ones(len(place), bool)
    alive[dead.permutation(len(place))[: round(dead_fraction * len(place))]] = False
    width = np.sqrt(np.log1p(transmission_spread**2))
    throughput = np.exp(width * spread.standard_normal(len(place)) - 0.5 * width**2)
    return Mosaic(place[:, 0], place[:, 1], lattice, throughput, alive)


# What a core collects: the picture on the face is a cubic spline through its samples


@lru_cache(maxsize=8)
def taps(*, cores: Mosaic, rows: int, columns: int, sample_um: float) -> tuple[AnyUnit, AnyUnit]:
    """(samples, weights), both [core, 16]: the cubic B-spline at each core's middle, on a periodic grid about the middle."""
    ways = [spline(place=at / sample_um + (count - 1) / 2) for at, count in ((cores.y_um, rows), (cores.x_um, columns))]
    (row, down), (column, across) = ways
    place = (row % rows)[:, :, None] * columns + (column % columns)[:, None, :]
    return place.reshape(len(row), -1), (down[:, :, None] * across[:, None, :]).reshape(len(row), -1).astype(np.float32)


def spline(*, place: AnyUnit) -> tuple[AnyUnit, AnyUnit]:
    """(samples, weights), both [..., 4]: the cubic B-spline at places counted in samples.

    >>> samples, weights = spline(place=np.array([2.5]))
    >>> samples.tolist(), (weights * 48).round(9).tolist()
    ([[1, 2, 3, 4]], [[1.0, 23.0, 23.0, 1.0]])
    """
    first = np.floor(place).astype(int)
    t = np.asarray(place) - first
    s = 1.0 - t
    weights = [s**3, 4.0 - 3.0 * t * t * (2.0 - t), 4.0 - 3.0 * s * s * (2.0 - s), t**3]
    return first[..., None] + np.arange(-1, TAPS - 1), np.stack(weights, axis=-1) / 6.0


def spline_mtf(*, cycles: AnyUnit) -> AnyUnit:
    """What a cubic B-spline through the samples makes of a frequency in cycles a sample; a picture is divided by it first."""
    return (2.0 + np.cos(2.0 * np.pi * cycles)) / 3.0


# What the neighbors pass on


def exchanged(*, light: AnyUnit, cores: Mosaic, exchange_share: np.ndarray) -> AnyUnit:
    """Light of each core after the exchange with all cores around it, [core].

    `exchange_share` [ring]: the share of a core's light that ends in one core of each ring (`image.coupled`). What
    would go to cores that are not there stays; what goes beyond the rings is spread evenly over all. Nothing is lost.
    """
    within(0.0, 1.0, exchange_share=exchange_share)
    if exchange_share[0] > 1.0 - 1e-9:
        return light
    kernel, rest = _kernel(tuple(float(share) for share in exchange_share))
    reach, low = len(kernel) // 2, cores.lattice.min(axis=0)
    place = tuple((cores.lattice - low + reach).T)
    shape = tuple(cores.lattice.max(axis=0) - low + 1 + 2 * reach)
    grid = np.zeros((2, *shape))
    grid[0][place], grid[1][place] = light, 1.0
    wave = np.zeros(shape)
    wave[: len(kernel), : len(kernel)] = kernel
    passed = np.fft.irfft2(np.fft.rfft2(grid) * np.fft.rfft2(np.roll(wave, (-reach, -reach), (0, 1))), shape)
    received, present = (one[place] for one in passed)
    return received + light * (1.0 - rest - present) + rest * light.mean()


@lru_cache(maxsize=8)
def _kernel(exchange_share: tuple[float, ...]) -> tuple[AnyUnit, float]:
    """(shares on the lattice's own coordinates, what goes beyond them)."""
    places = [np.rint(ring @ np.linalg.inv(ROWS)).astype(int) for ring in rings()]
    reach = max(int(np.abs(ring).max()) for ring in places)
    kernel = np.zeros((2 * reach + 1, 2 * reach + 1))
    for ring, share in zip(places, exchange_share):
        kernel[tuple((ring + reach).T)] = share
    total = kernel.sum()
    require("the sum of exchange_share over all cores", total, "at most 1", total <= 1.0 + 1e-6)
    return kernel, max(1.0 - float(total), 0.0)


# How the discs fall on the pixels


@lru_cache(maxsize=4)
def drawing(*, cores: Mosaic, core_um: float, pixel_um: float, rows: int, columns: int) -> Drawing:
    """Every disc on a frame of square pixels about the middle; each covers its exact area."""
    positive(core_um=core_um, pixel_um=pixel_um)
    stamps = disc_stamps(disc_pixels=core_um / pixel_um)
    places, side = stamps.shape[0], stamps.shape[-1]
    margin = side // 2
    x, y = (
        at / pixel_um + count / 2 for at, count in ((cores.x_um, columns), (cores.y_um, rows))
    )  # in pixels from the corner
    on = (x > -margin) & (x < columns + margin) & (y > -margin) & (y < rows + margin)
    column, row = (np.floor(at[on]).astype(int) for at in (x, y))
    across, down = (np.floor((at[on] - first) * places).astype(int) for at, first in ((x, column), (y, row)))
    frame = (
        rows + 4 * margin,
        columns + 4 * margin,
    )  # discs just outside touch the frame: twice the margin on each side
    step = np.arange(-margin, margin + 1)
    offsets = (step[:, None] * frame[1] + step).ravel()
    first = (row + 2 * margin) * frame[1] + column + 2 * margin
    cover = stamps[down, across].reshape(len(first), -1)
    return Drawing(np.flatnonzero(on), (first[:, None] + offsets).ravel(), cover, frame, 2 * margin)


def drawn(*, light: AnyUnit, drawing: Drawing) -> AnyUnit:
    """The picture [row, column]: each pixel holds the mean of what its area sees, `light` [core] being a disc's level."""
    weight = (drawing.cover_share * light[drawing.cores, None]).ravel()
    frame = np.bincount(drawing.pixel, weight, drawing.frame[0] * drawing.frame[1]).reshape(drawing.frame)
    return frame[drawing.margin : -drawing.margin, drawing.margin : -drawing.margin]


@lru_cache(maxsize=8)
def disc_stamps(*, disc_pixels: float) -> AnyUnit:
    """Share of each pixel that a disc covers, [place y, place x, row, column], its middle at so many places in the pixel."""
    radius = 0.5 * disc_pixels
    reach = int(np.ceil(radius))
    places = int(np.clip(STAMP_PIXELS / disc_pixels, LEAST_PLACES, PLACES))
    middle = (np.arange(places) + 0.5) / places
    corner = np.arange(-reach, reach + 2) - middle[:, None]  # [place, corner]
    below = disc_corner_area(x=corner[None, :, None, :], y=corner[:, None, :, None], radius=radius)
    return np.maximum(np.diff(np.diff(below, axis=-1), axis=-2), 0.0)


def disc_corner_area(*, x: AnyUnit, y: AnyUnit, radius: float) -> AnyUnit:
    """Area of the part of a disc about the origin that lies left of x and below y, in the square of their unit.

    The integral of min(y, s) + s over the disc's chords, s = sqrt(r^2 - x^2): whole chords beyond where the line y
    leaves the disc (above the middle), none there below it. References: closed_form.

    >>> float(disc_corner_area(x=0.0, y=0.0, radius=2.0).round(9)) == round(np.pi, 9)
    True
    """

    def chords(at):  # integral of s from the middle
        return 0.5 * (
            at * np.sqrt(np.maximum(radius**2 - at * at, 0.0)) + radius**2 * np.arcsin(np.clip(at / radius, -1, 1))
        )

    x, y = np.broadcast_arrays(np.clip(x, -radius, radius), np.clip(y, -radius, radius))
    edge = np.sqrt(np.maximum(radius**2 - y * y, 0.0))
    left, right = np.minimum(x, -edge), np.clip(x, -edge, edge)
    whole = 2.0 * (chords(left) - chords(-radius) + chords(np.maximum(x, edge)) - chords(edge))
    return np.where(y > 0, whole, 0.0) + y * (right + edge) + chords(right) - chords(-edge)
