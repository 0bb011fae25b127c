"""Drawing for the subjects: tapering strokes, round spots, mottled surfaces and small letters, as shares of each pixel.

Arrays are square, rows upward, over `width_mm` about the middle. A stroke thinner than a pixel darkens
it by its share, so that fine detail fades instead of breaking up.
"""

import numpy as np

from optics.spec import positive, require, within
from optics.units import AnyUnit

# Letters five wide and seven high, one row of bits from the top down
LETTERS = {
    "0": (14, 17, 19, 21, 25, 17, 14), "1": (4, 12, 4, 4, 4, 4, 14), "2": (14, 17, 1, 2, 4, 8, 31), "3": (31, 2, 4, 2, 1, 17, 14),
    "4": (2, 6, 10, 18, 31, 2, 2), "5": (31, 16, 30, 1, 1, 17, 14), "6": (6, 8, 16, 30, 17, 17, 14), "7": (31, 1, 2, 4, 8, 8, 8),
    "8": (14, 17, 17, 14, 17, 17, 14), "9": (14, 17, 17, 15, 1, 2, 12), ".": (0, 0, 0, 0, 0, 12, 12),
    "m": (0, 0, 26, 21, 21, 21, 21), " ": (0, 0, 0, 0, 0, 0, 0),
}  # fmt: skip
ADVANCE = 6  # columns from letter to letter


def middles_mm(*, width_mm: float, pixels: int) -> AnyUnit:
    """Middles of the pixels along one side."""
    return (np.arange(pixels) - (pixels - 1) / 2) * (width_mm / pixels)


def stroke(
    *, cover: AnyUnit, width_mm: float, ends_mm: AnyUnit, thick_mm: tuple[float, float], depth: float = 1.0
) -> None:
    """Draw one straight stroke with round ends into `cover`, which keeps the larger value.

    `ends_mm` [2, xy]; `thick_mm` at its two ends; `depth` is the cover of a stroke wider than a pixel.
    """
    pixels = len(cover)
    step = width_mm / pixels
    (x0, y0), (x1, y1) = ends_mm.tolist()
    reach, half = 0.5 * max(thick_mm) + step, 0.5 * width_mm
    left, right = (
        max(int((min(x0, x1) - reach + half) / step), 0),
        min(int((max(x0, x1) + reach + half) / step) + 1, pixels),
    )
    low, high = (
        max(int((min(y0, y1) - reach + half) / step), 0),
        min(int((max(y0, y1) + reach + half) / step) + 1, pixels),
    )
    if left >= right or low >= high:
        return
    x = (np.arange(left, right) + 0.5) * step - half - x0
    y = ((np.arange(low, high) + 0.5) * step - half - y0)[:, None]
    dx, dy = x1 - x0, y1 - y0
    along = np.minimum(np.maximum((x * dx + y * dy) / max(dx * dx + dy * dy, 1e-30), 0.0), 1.0)
    thick = thick_mm[0] + along * (thick_mm[1] - thick_mm[0])
    share = (0.5 * thick - np.hypot(x - along * dx, y - along * dy)) / step + 0.5
    share = np.minimum(np.maximum(share, 0.0), np.minimum(thick / step, 1.0))  # never more than it would cover
    part = cover[low:high, left:right]
    np.maximum(part, depth * share, out=part)


def path(*, cover: AnyUnit, width_mm: float, points_mm: AnyUnit, thick_mm: AnyUnit, depth: float = 1.0) -> None:
    """A stroke through many points [point, xy], its thickness given at each."""
    for at in range(len(points_mm) - 1):
        pair = (float(thick_mm[at]), float(thick_mm[at + 1]))
        stroke(cover=cover, width_mm=width_mm, ends_mm=points_mm[at : at + 2], thick_mm=pair, depth=depth)


def box(*, cover: AnyUnit, width_mm: float, left_mm: float, low_mm: float, wide_mm: float, high_mm: float) -> None:
    """An upright rectangle, its exact area in each pixel; adds up."""
    step, pixels = width_mm / len(cover), len(cover)
    edges = (np.arange(pixels + 1) - pixels / 2) * step
    x, y = (
        np.diff(np.clip(edges, start, start + size)) / step for start, size in ((left_mm, wide_mm), (low_mm, high_mm))
    )
    rows, columns = np.flatnonzero(y), np.flatnonzero(x)
    if rows.size and columns.size:
        part = cover[rows[0] : rows[-1] + 1, columns[0] : columns[-1] + 1]
        part += y[rows[0] : rows[-1] + 1, None] * x[None, columns[0] : columns[-1] + 1]


def text(*, cover: AnyUnit, width_mm: float, said: str, left_mm: float, low_mm: float, high_mm: float) -> float:
    """Letters of a height; returns their width in mm."""
    dot = high_mm / 7
    for place, letter in enumerate(said):
        for row, bits in enumerate(LETTERS[letter]):
            for column in range(5):
                if bits >> (4 - column) & 1:
                    left, low = left_mm + (ADVANCE * place + column) * dot, low_mm + (6 - row) * dot
                    box(cover=cover, width_mm=width_mm, left_mm=left, low_mm=low, wide_mm=dot, high_mm=dot)
    return dot * (ADVANCE * len(said) - 1)


def mottle(*, pixels: int, slope: float, seed: int) -> AnyUnit:
    """A mottled field of mean 0 and rms 1, periodic: amplitude falls as frequency to the power `slope`."""
    rng = np.random.default_rng(seed)
    wave = np.fft.rfft2(rng.standard_normal((pixels, pixels)))
    across, up = np.fft.rfftfreq(pixels), np.fft.fftfreq(pixels)
    radius = np.hypot(across[None, :], up[:, None])
    radius[0, 0] = np.inf
    field = np.fft.irfft2(wave * radius**-slope, (pixels, pixels))
    return field / field.std()


def dark_level(*, contrast: float) -> float:
    """Reflectance of a feature of Michelson contrast C on a surround of 1: (1 - C)/(1 + C).

    >>> round(dark_level(contrast=0.5), 6)
    0.333333
    """
    within(0.0, 1.0, contrast=contrast)
    return (1.0 - contrast) / (1.0 + contrast)


def checked_dark_level(width_mm: float, pixels: int, contrast: float) -> float:
    """`dark_level`, once width and pixels are found possible."""
    positive(width_mm=width_mm)
    require("pixels", pixels, "from 16 to 8192", 16 <= pixels <= 8192)
    return dark_level(contrast=contrast)


def frozen(array: np.ndarray) -> np.ndarray:
    """The same array, closed to changes: it is kept for the next picture."""
    array.setflags(write=False)
    return array
