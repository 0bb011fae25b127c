"""Contrast factors of the parts, each a function of spatial frequency; their product is the system's.

Frequencies and sizes belong to the same plane (bundle face, or sensor). Discs and pixels may turn
the contrast negative beyond their first zero: the sign is kept, for the picture shows it.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np

from optics.spec import not_negative, positive, within
from optics.units import Numbers, mm_from_um, per_um_from_lp_mm, um_from_nm

# Rms wavefront error in waves up to which the factor was held against computed lenses.
TESTED = {"wavefront_error_ratio": (0.0, 0.1)}
# Share of the cutoff over which wavefront errors stay alike, fitted to nine Zernike aberrations.
CORRELATION = 0.15


@dataclass(frozen=True, slots=True)
class BarTarget:
    """Group and element of a three-bar target."""

    group: Any
    element: Any


def disc_mtf(*, diameter_um: Numbers, frequency_lp_mm: Numbers) -> np.ndarray:
    """Contrast that is left after averaging over a uniform disc: 2 J1(pi d f)/(pi d f), with its sign.

    For a core's aperture (once where it collects, once where the eye or camera sees it shine) and
    for a defocus disc. References: closed_form (Fourier transform of a disc).

    >>> once = disc_mtf(diameter_um=7.5, frequency_lp_mm=57.735)
    >>> round(float(once), 3), round(float(once**2), 3)
    (0.786, 0.618)
    """
    from scipy.special import j1

    not_negative(diameter_um=diameter_um, frequency_lp_mm=frequency_lp_mm)
    x = np.pi * np.asarray(diameter_um, float) * per_um_from_lp_mm(np.asarray(frequency_lp_mm, float))
    small = x < 1e-4
    return np.where(small, 1.0 - x * x / 8.0, 2.0 * j1(x) / np.where(small, 1.0, x))


def pixel_mtf(*, pixel_um: Numbers, frequency_lp_mm: Numbers) -> np.ndarray:
    """Contrast left by a square pixel, grating along its rows: sin(pi w f)/(pi w f), with its sign.

    References: closed_form.

    >>> round(float(pixel_mtf(pixel_um=10.0 / 2.31, frequency_lp_mm=57.735)), 2)
    0.9
    """
    not_negative(pixel_um=pixel_um, frequency_lp_mm=frequency_lp_mm)
    return np.sinc(pixel_um * per_um_from_lp_mm(frequency_lp_mm))


def motion_mtf(*, shift_um: Numbers, frequency_lp_mm: Numbers) -> np.ndarray:
    """Contrast left by a steady shift of the image during the exposure, along it; the same form as a pixel's.

    References: closed_form.

    >>> round(float(motion_mtf(shift_um=10.0, frequency_lp_mm=50.0)), 4)
    0.6366
    """
    not_negative(shift_um=shift_um, frequency_lp_mm=frequency_lp_mm)
    return np.sinc(shift_um * per_um_from_lp_mm(frequency_lp_mm))


def cutoff_lp_mm(*, f_number: Numbers, wavelength_nm: Numbers) -> Numbers:
    """Frequency beyond which an ideal lens passes nothing: 1/(lambda N), N the working f-number.

    References: closed_form.

    >>> round(cutoff_lp_mm(f_number=4.0, wavelength_nm=500.0), 6)
    500.0
    """
    positive(f_number=f_number, wavelength_nm=wavelength_nm)
    return 1.0 / (mm_from_um(um_from_nm(wavelength_nm)) * f_number)


def diffraction_mtf(*, f_number: Numbers, wavelength_nm: Numbers, frequency_lp_mm: Numbers) -> np.ndarray:
    """Contrast of an ideal lens with a round pupil, incoherent light: (2/pi)(acos x - x sqrt(1 - x^2)), x = f/cutoff.

    0 beyond the cutoff. References: closed_form (autocorrelation of the pupil).

    >>> round(float(diffraction_mtf(f_number=4.0, wavelength_nm=500.0, frequency_lp_mm=250.0)), 4)
    0.391
    """
    not_negative(frequency_lp_mm=frequency_lp_mm)
    cutoff = cutoff_lp_mm(f_number=f_number, wavelength_nm=wavelength_nm)
    x = np.minimum(np.asarray(frequency_lp_mm, float) / cutoff, 1.0)
    return (2.0 / np.pi) * (np.arccos(x) - x * np.sqrt(1.0 - x * x))


def aberration_mtf(
    *, wavefront_error_nm: Numbers, f_number: Numbers, wavelength_nm: Numbers, frequency_lp_mm: Numbers
) -> np.ndarray:
    """Factor for aberrations by their rms wavefront error: exp(-(2 pi W)^2 (1 - exp(-(x/0.15)^2))), x = f/cutoff.

    W in waves. The mean over kinds of aberration; a single kind may lie 0.15 to either side at 0.07
    waves (`TESTED`). At high frequency it is the Strehl ratio.
    Notes: chosen over shannon_1994, 1 - (W/0.18)^2 (1 - 4 (x - 1/2)^2), which lies up to 0.05 above
    the mean of computed lenses at 0.07 waves and turns negative from 0.18 on.
    References: hufnagel_1965 (random wavefronts; correlation length fitted).

    >>> half = aberration_mtf(wavefront_error_nm=35.0, f_number=4.0, wavelength_nm=500.0, frequency_lp_mm=250.0)
    >>> round(float(half), 3), round(float(np.exp(-((2 * np.pi * 0.07) ** 2))), 3)
    (0.824, 0.824)
    """
    not_negative(wavefront_error_nm=wavefront_error_nm, frequency_lp_mm=frequency_lp_mm)
    x = np.asarray(frequency_lp_mm, float) / cutoff_lp_mm(f_number=f_number, wavelength_nm=wavelength_nm)
    waves = np.asarray(wavefront_error_nm, float) / wavelength_nm
    return np.exp((2.0 * np.pi * waves) ** 2 * np.expm1(-((x / CORRELATION) ** 2)))


def veil_contrast(*, veil_ratio: Numbers) -> Numbers:
    """Contrast left under a uniform veil: 1/(1 + v), v = veiling light over the image's mean.

    Light in the cladding and stray reflections; at every frequency alike, even the lowest.
    References: closed_form.

    >>> veil_contrast(veil_ratio=0.25)
    0.8
    """
    not_negative(veil_ratio=veil_ratio)
    return 1.0 / (1.0 + veil_ratio)


def honeycomb_filter_mtf(*, residual_contrast: Numbers, pitch_um: Numbers, frequency_lp_mm: Numbers) -> np.ndarray:
    """Contrast left by the Gaussian filter that leaves `residual_contrast` of the honeycomb.

    epsilon^((f/f_h)^2), with the honeycomb's first order at f_h = 2/(sqrt3 p): epsilon^(1/4) at the
    lattice limit. References: closed_form.

    >>> filtered = honeycomb_filter_mtf(residual_contrast=0.01, pitch_um=10.0, frequency_lp_mm=57.735)
    >>> round(float(filtered), 3), round(0.01**0.25, 3)
    (0.316, 0.316)
    """
    positive(residual_contrast=residual_contrast, pitch_um=pitch_um)
    within(0.0, 1.0, residual_contrast=residual_contrast)
    not_negative(frequency_lp_mm=frequency_lp_mm)
    order = per_um_from_lp_mm(np.asarray(frequency_lp_mm, float)) * pitch_um * np.sqrt(3.0) / 2.0
    return np.asarray(residual_contrast, float) ** (order * order)


def three_bar_lp_mm(*, group: Any, element: Any) -> Numbers:
    """Frequency of an element of a three-bar target: 2^(G + (E - 1)/6) line pairs per mm, E from 1 to 6.

    References: mil_std_150a.

    >>> three_bar_lp_mm(group=0, element=1), round(three_bar_lp_mm(group=2, element=4), 2)
    (1.0, 5.66)
    """
    within(1, 6, element=element)
    return 2.0 ** (group + (element - 1) / 6.0)


def three_bar_element(*, frequency_lp_mm: Numbers) -> BarTarget:
    """The finest group and element of a three-bar target that is not above a frequency.

    References: mil_std_150a.

    >>> seen = three_bar_element(frequency_lp_mm=5.7)
    >>> int(seen.group), int(seen.element)
    (2, 4)
    """
    positive(frequency_lp_mm=frequency_lp_mm)
    # A hair of tolerance, so that an element's own frequency finds that element.
    steps = np.floor(6.0 * np.log2(np.asarray(frequency_lp_mm, float)) + 1e-9).astype(int)
    return BarTarget(steps // 6, steps % 6 + 1)
