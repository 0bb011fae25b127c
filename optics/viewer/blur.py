"""The picture on the image's plane: subject times light, blurred by the lens, each place by its own defocus.

Contrast acts on the picture's waves; between its samples the picture is read by a cubic spline, whose own
transfer is divided out first, so that no wave is weakened by the reading. Sizes are micrometers at the image.
"""

from collections.abc import Callable
from functools import lru_cache
from itertools import pairwise

import numpy as np

from optics.image.contrast import disc_mtf
from optics.spec import not_negative, require
from optics.units import AnyUnit, mm_from_um
from optics.viewer.mosaic import spline_mtf

BLURS, EVEN_UM = 7, 0.05  # blur discs tried where the blur varies over the picture; a variation that is none
RADII = 2048  # frequencies in the table from which a filter is read


def lit_subject(*, reflectance: np.ndarray, light_ratio: np.ndarray) -> AnyUnit:
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


def contrast_table(*, lens_lp_mm: np.ndarray, lens_mtf: np.ndarray, sample_um: float, core_um: float) -> AnyUnit:
    """Contrast of lens and core [radius] on even frequencies up to the corner of the samples' band."""
    frequency, contrast = np.asarray(lens_lp_mm, float), np.asarray(lens_mtf, float)
    rising = frequency[0] == 0 and bool((np.diff(frequency) > 0).all())
    require("lens_lp_mm", frequency[0], "0 at its start and rising", rising)
    radii = _radii_lp_mm(sample_um)
    return np.interp(radii, frequency, contrast) * disc_mtf(diameter_um=core_um, frequency_lp_mm=radii)


def _radii_lp_mm(sample_um: float) -> AnyUnit:
    return np.linspace(0.0, np.sqrt(0.5) / mm_from_um(sample_um) * (1 + 1e-9), RADII)


def blur_at(
    *, defocus_um: np.ndarray | float, shape: tuple[int, int], sample_um: float, x_um: np.ndarray, y_um: np.ndarray
) -> AnyUnit:
    """The blur disc at places on the image: one for all, or read from a coarse map of at least 2 x 2 from corner to corner."""
    values = np.asarray(defocus_um, float)
    not_negative(defocus_um=values)
    if values.ndim == 0:
        return values
    require("the sides of defocus_um", min(values.shape), "2 or more", min(values.shape) >= 2)
    places = []
    for at, count, coarse in ((y_um, shape[0], values.shape[0]), (x_um, shape[1], values.shape[1])):
        places.append(np.clip((at / sample_um / (count - 1) + 0.5) * (coarse - 1), 0.0, coarse - 1.000001))
    (row, column), (down, across) = ([np.floor(at).astype(int) for at in places], [at % 1.0 for at in places])
    top = values[row, column] * (1 - across) + values[row, column + 1] * across
    return top * (1 - down) + (values[row + 1, column] * (1 - across) + values[row + 1, column + 1] * across) * down


def blurred(
    *,
    face: AnyUnit,
    sample_um: float,
    lens: AnyUnit,
    blur_um: AnyUnit,
    pixel_um: float,
    seen: Callable[[AnyUnit], AnyUnit],
) -> AnyUnit:
    """What `seen` makes of the blurred picture, each place with its own blur.

    `lens` from `contrast_table`; `pixel_um`: square over which each place averages, 0 for none. Where the blur
    varies, pictures of a few even blurs are made, closer together where it is small, and mixed by place.
    """
    from scipy.fft import irfft2, rfft2

    low, high = float(np.min(blur_um)), float(np.max(blur_um))
    even = high - low < EVEN_UM + 0.02 * low
    levels = np.array([low]) if even else low + (high - low) * np.linspace(0.0, 1.0, BLURS) ** 2
    wave, radii = rfft2(face, workers=-1), _radii_lp_mm(sample_um)
    pictures = []
    for level in levels:
        table = lens * disc_mtf(diameter_um=level, frequency_lp_mm=radii)
        band = _filter(face.shape, float(sample_um), table.astype(np.float32).tobytes(), float(pixel_um))
        pictures.append(seen(irfft2(wave * band, face.shape, workers=-1)))
    if even:
        return pictures[0]
    at = np.interp(blur_um, levels, np.arange(BLURS))
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
