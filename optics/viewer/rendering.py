"""The view: what an operator sees of a subject, through the lens, the cores and the camera; or by a sensor at the tip.

Subject x light -> the lens's blur -> what each core collects -> what its neighbors pass on -> its throughput -> its
disc on the pixels -> noise. Sizes are micrometers at the image (the bundle's face, or the sensor); rows run upward.
"""

from dataclasses import dataclass
from functools import lru_cache
from itertools import pairwise

import numpy as np

from optics.image.contrast import disc_mtf, honeycomb_filter_mtf
from optics.image.lattice import resolution_limit_lp_mm
from optics.spec import not_negative, positive, require, within
from optics.units import AnyUnit, mm_from_um
from optics.viewer.mosaic import Mosaic, drawing, drawn, exchanged, mosaic, spline, spline_mtf, taps

BLURS = 6  # defocus discs computed where the blur varies over the picture; between them by interpolation
WORST_DEG = 30.0  # the lattice's worst direction, across its rows
RADII = 2048  # frequencies in the table from which a filter is read


@dataclass(frozen=True, slots=True)
class View:
    """The picture [row, column], upward, in the unit of `lit_level`; the size of a pixel at the target, on axis.

    `saturated_share`: of the pixels of the image, those whose well was full. `cores` and `dead` are counts, 0 for a
    sensor at the tip.
    """

    image: AnyUnit
    pixel_mm: float
    saturated_share: float
    cores: int
    dead: int


def render(
    *,
    reflectance: np.ndarray,
    light_ratio: np.ndarray,
    sample_um: float,
    lens_lp_mm: np.ndarray,
    lens_mtf: np.ndarray,
    defocus_um: np.ndarray | float,
    image_um: float,
    pitch_um: float,
    core_um: float,
    turn_deg: float,
    jitter_share: float,
    dead_fraction: float,
    transmission_spread: float,
    exchange_share: np.ndarray,
    veil_ratio: float,
    pixel_um: float,
    rows: int,
    columns: int,
    magnification: float,
    lit_level: float,
    full_well_e: float,
    dark_noise_e: float,
    gain_dn_e: float,
    noise: bool,
    seed: int,
) -> View:
    """The view through a bundle of cores.

    Parameters
        reflectance [row, column]: the subject as the image meets it, relative, sampled every `sample_um` about the
            middle and wide enough for the image and its blur (it is taken as periodic);
        light_ratio, any coarser shape over the same rectangle: light on the image over that behind `lit_level`;
        lens_lp_mm, lens_mtf: the lens's contrast without defocus, at rising frequencies from 0 on, the last beyond;
        defocus_um: diameter of the blur disc, one for all or a coarse map over the same rectangle;
        image_um: circle in which the cores' centers lie; the lattice as in `mosaic`; exchange_share as in
            `image.coupled.ring_shares`; veil_ratio: light between the cores, over the image's mean;
        pixel_um at the bundle, rows, columns: the camera's pixels (an eye: those of the picture);
        magnification: size at the image over size at the target, on axis;
        lit_level: what a pixel wholly inside an undisturbed core's disc holds where reflectance and light are 1: mean
            electrons, or for an eye cd/m2 (then full_well_e infinite, noise False, and pixels are means);
        noise: whether to draw it; the well fills and is counted either way.
    Returns View. Raises OutOfRange.
    References: closed_form (Fourier optics); emva_1288 (noise).
    """
    positive(pixel_um=pixel_um, lit_level=lit_level, magnification=magnification)
    require("core_um", core_um, "above 0 and at most pitch_um", 0 < core_um <= pitch_um)
    not_negative(veil_ratio=veil_ratio)
    cores = mosaic(
        pitch_um=pitch_um,
        image_um=image_um,
        turn_deg=turn_deg,
        jitter_share=jitter_share,
        dead_fraction=dead_fraction,
        transmission_spread=transmission_spread,
        seed=seed,
    )
    face = _lit(reflectance, light_ratio)
    lens = _table(lens_lp_mm, lens_mtf, sample_um, core_um)
    collected = _collected(face, sample_um, lens, defocus_um, cores)
    light = exchanged(light=collected, cores=cores, exchange_share=exchange_share)
    light = light * cores.throughput_ratio * cores.alive
    discs = drawing(cores=cores, core_um=float(core_um), pixel_um=float(pixel_um), rows=rows, columns=columns)
    picture, circle = drawn(light=light, drawing=discs), _circle(rows, columns, 0.5 * image_um / pixel_um)
    if veil_ratio > 0:
        picture = picture + veil_ratio * picture[circle > 0.5].mean() * circle
    image, share = _read_out(lit_level * picture, full_well_e, dark_noise_e, gain_dn_e, noise, seed, circle > 0.5)
    return View(image, mm_from_um(pixel_um) / magnification, share, len(light), int((~cores.alive).sum()))


def render_chip(
    *,
    reflectance: np.ndarray,
    light_ratio: np.ndarray,
    sample_um: float,
    lens_lp_mm: np.ndarray,
    lens_mtf: np.ndarray,
    defocus_um: np.ndarray | float,
    pixel_um: float,
    rows: int,
    columns: int,
    magnification: float,
    lit_level: float,
    full_well_e: float,
    dark_noise_e: float,
    gain_dn_e: float,
    noise: bool,
    seed: int,
) -> View:
    """The view by a sensor at the tip: the pixels look directly; parameters as for `render`.

    Pixels are square and touch; a color filter mosaic is not drawn. References: closed_form; emva_1288 (noise).
    """
    positive(pixel_um=pixel_um, lit_level=lit_level, magnification=magnification)
    face, lens = _lit(reflectance, light_ratio), _table(lens_lp_mm, lens_mtf, sample_um, 0.0)
    samples = tuple(
        _grid_taps(count, int(size), pixel_um / sample_um) for count, size in zip(face.shape, (rows, columns))
    )

    def seen(blurred):
        (row, down), (column, across) = samples
        tall = sum(blurred[row[:, tap]] * down[:, tap, None] for tap in range(row.shape[1]))
        tall = np.ascontiguousarray(tall.T)
        return sum(tall[column[:, tap]] * across[:, tap, None] for tap in range(column.shape[1])).T

    middles = [(np.arange(count) - (count - 1) / 2) * pixel_um for count in (rows, columns)]
    blur = _map_at(defocus_um, face.shape, sample_um, middles[1][None, :], middles[0][:, None])
    picture = _blurred(face, sample_um, lens, blur, pixel_um, seen)
    image, share = _read_out(
        lit_level * np.maximum(picture, 0.0),
        full_well_e,
        dark_noise_e,
        gain_dn_e,
        noise,
        seed,
        np.ones((rows, columns), bool),
    )
    return View(image, mm_from_um(pixel_um) / magnification, share, 0, 0)


# Light and the lens's blur


def _lit(reflectance: np.ndarray, light_ratio: np.ndarray) -> AnyUnit:
    """Subject times light, the light's map interpolated linearly."""
    subject, light = np.asarray(reflectance, np.float32), np.asarray(light_ratio, float)
    require("reflectance", subject.min(), "0 or more", subject.min() >= 0)
    require("light_ratio", light.min(), "0 or more", light.min() >= 0)
    return subject * stretched(values=light, rows=subject.shape[0], columns=subject.shape[1])


def stretched(*, values: AnyUnit, rows: int, columns: int) -> AnyUnit:
    """A coarse map over the same rectangle, corner samples on corner samples, interpolated linearly.

    >>> stretched(values=np.array([[0.0, 1.0]]), rows=1, columns=5).tolist()
    [[0.0, 0.25, 0.5, 0.75, 1.0]]
    """
    coarse = np.atleast_2d(np.asarray(values, np.float32))
    coarse = np.pad(coarse, [(0, int(count == 1)) for count in coarse.shape], mode="edge")
    row, down = _between(coarse.shape[0], rows)
    tall = coarse[row] * (1 - down[:, None]) + coarse[row + 1] * down[:, None]
    column, across = _between(coarse.shape[1], columns)
    out = np.empty((rows, columns), np.float32)
    for place, (first, last) in enumerate(pairwise(np.searchsorted(column, np.arange(coarse.shape[1])))):
        rise = tall[:, place + 1] - tall[:, place]
        np.multiply(rise[:, None], across[first:last], out=out[:, first:last])
        out[:, first:last] += tall[:, place, None]
    return out


@lru_cache(maxsize=16)
def _between(coarse: int, fine: int) -> tuple[AnyUnit, AnyUnit]:
    """For each fine place, the coarse one before it and how far beyond."""
    at = np.linspace(0.0, coarse - 1.0, fine)
    first = np.minimum(at.astype(int), coarse - 2)
    return first, (at - first).astype(np.float32)


def _table(lens_lp_mm, lens_mtf, sample_um: float, core_um: float) -> AnyUnit:
    """Contrast of lens and core [radius] on even frequencies up to the corner of the samples' band."""
    frequency, contrast = np.asarray(lens_lp_mm, float), np.asarray(lens_mtf, float)
    require(
        "lens_lp_mm", frequency.min(), "0 at its start and rising", frequency[0] == 0 and (np.diff(frequency) > 0).all()
    )
    radii = _radii_lp_mm(sample_um)
    return np.interp(radii, frequency, contrast) * disc_mtf(diameter_um=core_um, frequency_lp_mm=radii)


def _radii_lp_mm(sample_um: float) -> AnyUnit:
    return np.linspace(0.0, np.sqrt(0.5) / mm_from_um(sample_um) * (1 + 1e-9), RADII)


def _collected(face, sample_um, lens, defocus_um, cores: Mosaic) -> AnyUnit:
    """What each core collects: the blurred picture averaged over its disc [core]."""
    place, weight = taps(cores=cores, rows=face.shape[0], columns=face.shape[1], sample_um=float(sample_um))
    blur = _map_at(defocus_um, face.shape, sample_um, cores.x_um, cores.y_um)
    found = _blurred(
        face, sample_um, lens, blur, 0.0, lambda picture: np.einsum("ij,ij->i", picture.ravel()[place], weight)
    )
    return np.maximum(found, 0.0).astype(float)  # rounding, and the ringing of a lens's band limit beside deep black


def _map_at(values, shape, sample_um, x_um, y_um) -> AnyUnit:
    """A coarse map (or one number) at places on the image."""
    values = np.asarray(values, float)
    not_negative(defocus_um=values)
    if values.ndim == 0:
        return values
    places = []
    for at, count, coarse in ((y_um, shape[0], values.shape[0]), (x_um, shape[1], values.shape[1])):
        places.append(np.clip((at / sample_um / (count - 1) + 0.5) * (coarse - 1), 0.0, coarse - 1.000001))
    (row, column), (down, across) = ([np.floor(at).astype(int) for at in places], [at % 1.0 for at in places])
    top = values[row, column] * (1 - across) + values[row, column + 1] * across
    return top * (1 - down) + (values[row + 1, column] * (1 - across) + values[row + 1, column + 1] * across) * down


def _blurred(face, sample_um, lens, blur_um, pixel_um, seen) -> AnyUnit:
    """`seen` of the blurred picture, each place with its own blur: between pictures of a few even blurs."""
    from scipy.fft import irfft2, rfft2

    low, high = float(np.min(blur_um)), float(np.max(blur_um))
    levels = [low] if high - low < 0.02 * (low + mm_from_um(1.0)) else list(np.linspace(low, high, BLURS))
    wave, radii = rfft2(face, workers=-1), _radii_lp_mm(sample_um)
    pictures = []
    for level in levels:
        table = lens * disc_mtf(diameter_um=level, frequency_lp_mm=radii)
        band = _filter(face.shape, float(sample_um), table.astype(np.float32).tobytes(), float(pixel_um))
        pictures.append(seen(irfft2(wave * band, face.shape, workers=-1)))
    if len(levels) == 1:
        return pictures[0]
    at = np.clip((np.asarray(blur_um) - low) / (levels[1] - low), 0.0, len(levels) - 1.0)
    return sum(np.maximum(1.0 - np.abs(at - place), 0.0) * picture for place, picture in enumerate(pictures))


@lru_cache(maxsize=12)
def _filter(shape: tuple[int, int], sample_um: float, table: bytes, pixel_um: float) -> AnyUnit:
    """The transfer of lens and aperture on the samples' frequencies, over that of the spline that reads between samples."""
    place, split, edge = _band(shape, sample_um, pixel_um)
    contrast = np.frombuffer(table, np.float32)
    return (contrast[place] * (1 - split) + contrast[place + 1] * split) * edge


@lru_cache(maxsize=4)
def _band(shape: tuple[int, int], sample_um: float, pixel_um: float) -> tuple[AnyUnit, AnyUnit, AnyUnit]:
    """Where each frequency lies in the table of radii, and the factors along rows and columns."""
    across, up = np.fft.rfftfreq(shape[1]), np.fft.fftfreq(shape[0])
    radius = np.hypot(across[None, :], up[:, None]) * ((RADII - 1) / (np.sqrt(0.5) * (1 + 1e-9)))
    place = np.minimum(radius.astype(int), RADII - 2)
    square = [np.sinc(at * pixel_um / sample_um) / spline_mtf(cycles=at) for at in (up, across)]
    return place, (radius - place).astype(np.float32), (square[0][:, None] * square[1]).astype(np.float32)


@lru_cache(maxsize=8)
def _grid_taps(count: int, size: int, step: float) -> tuple[AnyUnit, AnyUnit]:
    place, weight = spline(place=(np.arange(size) - (size - 1) / 2) * step + (count - 1) / 2)
    return place % count, weight.astype(np.float32)


# The sensor


@lru_cache(maxsize=4)
def _circle(rows: int, columns: int, radius: float) -> AnyUnit:
    """How far each pixel lies inside the round image: 1 inside, 0 outside, its rim softened over a pixel."""
    away = np.hypot(np.arange(columns) - (columns - 1) / 2, (np.arange(rows) - (rows - 1) / 2)[:, None])
    return np.clip(radius + 0.5 - away, 0.0, 1.0)


def _read_out(mean, full_well_e, dark_noise_e, gain_dn_e, noise, seed, inside) -> tuple[AnyUnit, float]:
    require("full_well_e", full_well_e, "above 0", full_well_e > 0)
    if noise:
        return read_out(
            mean_e=mean,
            full_well_e=full_well_e,
            dark_noise_e=dark_noise_e,
            gain_dn_e=gain_dn_e,
            inside=inside,
            seed=seed,
        )
    full = mean >= full_well_e
    return np.minimum(mean, full_well_e), float(full[inside].mean())


def read_out(
    *, mean_e: AnyUnit, full_well_e: float, dark_noise_e: float, gain_dn_e: float, inside: AnyUnit, seed: int
) -> tuple[AnyUnit, float]:
    """(one exposure in electrons, share of the pixels `inside` whose well was full).

    Photons arrive at random (Poisson); the well holds `full_well_e` at most; dark noise is normal; output comes in
    whole steps, K to the electron, with the black level taken off (so that noise about black may be negative).
    Variance mu + sigma_d^2 + 1/(12 K^2) where the well is not full and the noise spans more than half a step.
    References: emva_1288.
    """
    not_negative(mean_e=mean_e, dark_noise_e=dark_noise_e)
    positive(full_well_e=full_well_e, gain_dn_e=gain_dn_e)
    rng = np.random.Generator(np.random.SFC64(np.random.SeedSequence([seed, 1288])))
    electrons = rng.poisson(mean_e).astype(np.float32)
    full = electrons >= full_well_e
    signal = np.minimum(electrons, np.float32(full_well_e))
    signal += np.float32(dark_noise_e) * rng.standard_normal(mean_e.shape, np.float32)
    return np.rint(np.float32(gain_dn_e) * signal) / np.float32(gain_dn_e), float(full[inside].mean())


# What a processor does with it


@dataclass(frozen=True, slots=True)
class Smoothing:
    """The picture without its honeycomb, and what that costs.

    `limit_contrast`: contrast left at the lattice limit, the fourth root of what is left of the honeycomb;
    `noise_ratio`: white noise of a pixel after over before.
    """

    image: AnyUnit
    limit_contrast: float
    noise_ratio: float


def smoothed(*, image: AnyUnit, residual_contrast: float, pitch_um: float, pixel_um: float) -> Smoothing:
    """The picture after the Gaussian that leaves `residual_contrast` of the honeycomb's first order.

    Transfer epsilon^((f/f_h)^2), f_h = 2/(sqrt3 p); noise falls to the root of its mean square over the pixels' band.
    References: closed_form.
    """
    from scipy.fft import irfft2, next_fast_len, rfft2

    within(1e-6, 1.0, residual_contrast=residual_contrast)
    frame = np.asarray(image, np.float32)
    sides = [
        next_fast_len(count + int(3 * pitch_um / pixel_um), real=True) for count in frame.shape
    ]  # dark room about it

    def transfer(count):
        cycles = np.abs(np.fft.fftfreq(count)) / mm_from_um(pixel_um)
        return honeycomb_filter_mtf(residual_contrast=residual_contrast, pitch_um=pitch_um, frequency_lp_mm=cycles)

    down, across = transfer(sides[0]), transfer(sides[1])  # a Gaussian is the product of two
    band = (down[:, None] * across[: sides[1] // 2 + 1]).astype(np.float32)
    out = irfft2(rfft2(frame, sides, workers=-1) * band, sides, workers=-1)[: frame.shape[0], : frame.shape[1]]
    left = np.sqrt((down**2).mean() * (across**2).mean())
    limit = resolution_limit_lp_mm(pitch_um=pitch_um, direction_deg=WORST_DEG)
    kept = honeycomb_filter_mtf(residual_contrast=residual_contrast, pitch_um=pitch_um, frequency_lp_mm=limit)
    return Smoothing(out, float(kept), float(left))
