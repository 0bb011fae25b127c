"""The bar target: three bars each way at ten frequencies, their line pairs per mm, and a ruler."""

from functools import lru_cache

import numpy as np

from optics.image.contrast import three_bar_lp_mm
from optics.spec import positive
from optics.units import AnyUnit
from optics.viewer.strokes import box, checked_dark_level, frozen, text

COARSEST_SHARE = 1 / 34  # width of the coarsest bar over the width of the picture
ROWS = (2, 3, 5)  # patterns in each row of the bar target, coarse to fine


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
    dark = checked_dark_level(width_mm, pixels, contrast)
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
    return frozen(1.0 - (1.0 - dark) * np.minimum(ink, 1.0))


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
