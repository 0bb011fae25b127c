"""The smallest resolvable detail: where contrast meets noise, and what limits it.

Frequencies are at the bundle's face (or the chip), in lp/mm.
"""

from collections.abc import Callable

import numpy as np

from optics.spec import not_negative, positive
from optics.units import Numbers, lp_mm_from_per_um

# The order in which ties are settled: the light's way there, then the way back.
PARTS = ("light", "objective", "focus", "lattice", "crosstalk", "camera", "eye")
ITERATIONS = 10
LINE_PITCHES = 10.0  # length of the single dark line looked for, in core pitches: a house choice


def largest_passing(margin: Callable[[np.ndarray], np.ndarray], *, upper_lp_mm: np.ndarray) -> np.ndarray:
    """The largest frequency at which a falling margin is still 0 or more, within [0, upper].

    A fixed number of steps of Chandrupatla's method (Adv. Eng. Softw. 28, 145, 1997), each element on
    its own, so that a batch and a single design give the same digits.

    Parameters: margin, of an array of frequencies in lp/mm; upper_lp_mm, any shape.
    Returns: 0 where the margin is negative already at 0, `upper` where it is not negative there.
    References: chandrupatla_1997.

    >>> largest_passing(lambda f: 4.0 - f**2, upper_lp_mm=np.array([10.0, 1.0])).round(12).tolist()
    [2.0, 1.0]
    """
    low, high = np.zeros_like(upper_lp_mm), np.array(upper_lp_mm, float)
    at_low, at_high = margin(low), margin(high)
    last, at_last = low, at_low  # the point that was dropped
    step = np.full_like(high, 0.5)
    here, at_here = high, at_high  # newest end of the bracket
    other, at_other = low, at_low  # its other end
    for _ in range(ITERATIONS):
        new = here + step * (other - here)
        at_new = margin(new)
        same = np.sign(at_new) == np.sign(at_here)
        last, at_last = np.where(same, here, other), np.where(same, at_here, at_other)
        other, at_other = np.where(same, other, here), np.where(same, at_other, at_here)
        here, at_here = new, at_new
        step = _next_step(here, other, last, at_here, at_other, at_last)
    root = np.where(np.abs(at_here) < np.abs(at_other), here, other)
    return np.where(at_low < 0, 0.0, np.where(at_high >= 0, high, root))


def _next_step(here, other, last, at_here, at_other, at_last):
    """Share of the bracket to go next: inverse quadratic interpolation where it is safe, else half."""
    with np.errstate(divide="ignore", invalid="ignore"):
        place = (here - other) / (last - other)
        value = (at_here - at_other) / (at_last - at_other)
        safe = (1 - np.sqrt(1 - place) < value) & (value < np.sqrt(place))
        quadratic = at_here / (at_other - at_here) * at_last / (at_other - at_last) + (last - here) / (
            other - here
        ) * at_here / (at_last - at_here) * at_other / (at_last - at_other)
    step = np.where(safe & np.isfinite(quadratic), quadratic, 0.5)
    tight = 1e-15
    return np.clip(step, tight, 1 - tight)


def needed_contrast(*, frequency_lp_mm: Numbers, snr: Numbers, cell_um2: Numbers, threshold_snr: Numbers) -> np.ndarray:
    """Contrast that a period needs to be seen: threshold over the signal-to-noise ratio of a half-period cell.

    k/(SNR sqrt(n)), n = cells (cores or pixels) of area `cell_um2` in a square of half a period, never
    below one. With f0 = 1/(2 sqrt(cell)) this is (k/SNR) min(1, f/f0). SNR 0 needs more than any contrast.
    References: rose_1948 (threshold), EMVA 1288 (SNR of one cell).

    >>> needed_contrast(frequency_lp_mm=np.array([10.0, 1000.0]), snr=50.0, cell_um2=100.0, threshold_snr=5.0).round(9).tolist()
    [0.02, 0.1]
    """
    not_negative(snr=snr, threshold_snr=threshold_snr)
    positive(cell_um2=cell_um2)
    one_cell = lp_mm_from_per_um(0.5 / np.sqrt(cell_um2))
    ratio = np.asarray(threshold_snr) / np.maximum(snr, 1e-9)
    return ratio * np.minimum(1.0, np.asarray(frequency_lp_mm) / one_cell)


def snr_with_spread(*, snr: Numbers, transmission_spread: Numbers) -> np.ndarray:
    """Signal-to-noise ratio of one core when cores also differ: 1/sqrt(1/SNR^2 + spread^2).

    >>> round(float(snr_with_spread(snr=20.0, transmission_spread=0.05)), 3)
    14.142
    """
    not_negative(snr=snr, transmission_spread=transmission_spread)
    safe = np.maximum(np.asarray(snr, float), 1e-9)
    return np.where(np.asarray(snr) > 0, 1.0 / np.sqrt(safe**-2 + np.asarray(transmission_spread) ** 2), 0.0)


def smallest_line_um(
    *,
    contrast: Numbers,
    snr: Numbers,
    cell_um2: Numbers,
    threshold_snr: Numbers,
    line_um: Numbers,
    power_per_um: Numbers,
) -> np.ndarray:
    """Width of the thinnest single dark line that is detected, well below a core where light allows.

    A line of width w and contrast C lowers the signal of a core at distance x by C w LSF(x). The
    matched filter over the cores along its length l has (SNR_line)^2 = (SNR C w)^2 (l/cell) P with
    P = integral of LSF^2 dx = 2 integral of MTF^2 df (Parseval), so w = k/(SNR C) sqrt(cell/(l P)).
    Holds while w is below the width of the LSF.

    Parameters: line_um, the line's length; power_per_um, P in 1/um.
    References: closed_form (matched filter in white noise), rose_1948 (k).
    """
    positive(contrast=contrast, cell_um2=cell_um2, line_um=line_um)
    ratio = np.asarray(threshold_snr) / (np.maximum(snr, 1e-9) * contrast)
    return ratio * np.sqrt(np.asarray(cell_um2) / (np.asarray(line_um) * np.maximum(power_per_um, 1e-12)))


def line_seen_um(*, contrast: Numbers, response_per_um: Numbers) -> np.ndarray:
    """Width of the thinnest dark line that an eye sees: its peak, filtered by the eye, reaches threshold.

    One linear channel whose transfer is the contrast sensitivity S(f): C w 2 integral of MTF S df = 1.

    Parameters: response_per_um, 2 integral of MTF S df in 1/um.
    References: closed_form; assumed (a single channel).
    """
    positive(contrast=contrast)
    return 1.0 / (np.asarray(contrast) * np.maximum(response_per_um, 1e-12))
