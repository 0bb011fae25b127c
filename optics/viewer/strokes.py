"""Drawing for the subjects: tapering strokes, round spots, mottled surfaces and small letters, as shares of each pixel.

Arrays are square, rows upward, over `width_mm` about the middle. A stroke thinner than a pixel darkens
it by its share, so that fine detail fades instead of breaking up.
"""

import numpy as np

from optics.units import AnyUnit

# Letters five wide and seven high, one row of bits from the top down
LETTERS = {
    "0": (14, 17, 19, 21, 25, 17, 14), "1": (4, 12, 4, 4, 4, 4, 14), "2": (14, 17, 1, 2, 4, 8, 31), "3": (31, 2, 4, 2, 1, 17, 14),
    "4": (2, 6, 10, 18, 31, 2, 2), "5": (31, 16, 30, 1, 1, 17, 14), "6": (6, 8, 16, 30, 17, 17, 14), "7": (31, 1, 2, 4, 8, 8, 8),
    "8": (14, 17, 17, 14, 17, 17, 14), "9": (14, 17, 17, 15, 1, 2, 12), ".": (0, 0, 0, 0, 0, 12, 12), "m": (0, 0, 26, 21, 21, 21, 21),
    " ": (0, 0, 0, 0, 0, 0, 0),
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
    step = width_mm / len(cover)
    reach = 0.5 * max(thick_mm) + step
    low, high = ends_mm.min(axis=0) - reach, ends_mm.max(axis=0) + reach
    first = np.clip(np.floor((low + width_mm / 2) / step).astype(int), 0, len(cover))
    last = np.clip(np.ceil((high + width_mm / 2) / step).astype(int), 0, len(cover))
    if (last <= first).any():
        return
    at = middles_mm(width_mm=width_mm, pixels=len(cover))
    x, y = at[None, first[0] : last[0]] - ends_mm[0, 0], at[first[1] : last[1], None] - ends_mm[0, 1]
    (dx, dy), length2 = ends_mm[1] - ends_mm[0], max(float(((ends_mm[1] - ends_mm[0]) ** 2).sum()), 1e-30)
    along = np.clip((x * dx + y * dy) / length2, 0.0, 1.0)
    away = np.hypot(x - along * dx, y - along * dy)
    thick = thick_mm[0] + along * (thick_mm[1] - thick_mm[0])
    share = np.clip((0.5 * thick - away) / step + 0.5, 0.0, 1.0)
    share = np.minimum(share, thick / step) if min(thick_mm) < step else share
    part = cover[first[1] : last[1], first[0] : last[0]]
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
