"""The eye at the eyepiece: how large and how bright the face looks, and the contrast the eye needs."""

import numpy as np

from optics.spec import Spec, positive, quantity, within
from optics.units import Numbers, arcmin_from_rad, deg_from_rad, mm_from_um, rad_from_deg

NEAR_POINT_MM = 250.0  # conventional distance of distinct vision
# Luminances and angles over which the author compares his formula with measurements (from memory).
TESTED = {"luminance_cd_m2": (0.01, 1000.0), "field_deg": (0.5, 60.0)}


class Eye(Spec):
    """An eyepiece on the proximal face, and one eye behind it."""

    eyepiece_focal_mm: float = quantity("focal length of the eyepiece", gt=1, le=250, usual=(12.0, 40.0), common=True)
    transmission: float = quantity(
        "share of the light that the eyepiece passes", default=0.9, gt=0, le=1, usual=(0.7, 1.0), source="assumed"
    )
    field_stop_mm: float | None = quantity(
        "diameter of the field stop at the face; left out: the whole image bundle shows",
        default=None,
        gt=0,
        usual=(0.5, 10.0),
    )


def eyepiece_magnification(*, eyepiece_focal_mm: Numbers) -> Numbers:
    """Magnification of an eyepiece against the naked eye at 250 mm: 250/f. References: trade.

    >>> eyepiece_magnification(eyepiece_focal_mm=25.0)
    10.0
    """
    positive(eyepiece_focal_mm=eyepiece_focal_mm)
    return NEAR_POINT_MM / eyepiece_focal_mm


def angular_pitch_arcmin(*, pitch_um: Numbers, eyepiece_focal_mm: Numbers) -> Numbers:
    """Angle between neighboring cores in the eyepiece: p/f. References: closed_form.

    >>> round(float(angular_pitch_arcmin(pitch_um=10.0, eyepiece_focal_mm=25.0)), 3)
    1.375
    """
    positive(pitch_um=pitch_um, eyepiece_focal_mm=eyepiece_focal_mm)
    return arcmin_from_rad(mm_from_um(pitch_um) / eyepiece_focal_mm)


def seen_frequency_cpd(*, frequency_lp_mm: Numbers, eyepiece_focal_mm: Numbers) -> Numbers:
    """Cycles per degree of a grating on the face, at the middle of the field: f times f_e times one degree.

    References: closed_form.

    >>> round(float(seen_frequency_cpd(frequency_lp_mm=57.735, eyepiece_focal_mm=25.0)), 2)
    25.19
    """
    positive(eyepiece_focal_mm=eyepiece_focal_mm)
    return frequency_lp_mm * eyepiece_focal_mm * rad_from_deg(1.0)


def apparent_field_deg(*, image_mm: Numbers, eyepiece_focal_mm: Numbers) -> np.ndarray:
    """Full angle at which the eye sees the face: 2 atan(D/2f). References: closed_form.

    >>> round(float(apparent_field_deg(image_mm=2.0, eyepiece_focal_mm=20.0)), 2)
    5.72
    """
    positive(image_mm=image_mm, eyepiece_focal_mm=eyepiece_focal_mm)
    return 2.0 * deg_from_rad(np.arctan(np.asarray(image_mm, float) / (2.0 * eyepiece_focal_mm)))


def pupil_diameter_mm(*, luminance_cd_m2: Numbers, field_deg: Numbers) -> np.ndarray:
    """Diameter of the eye's pupil: 5 - 3 tanh(0.4 log10(L X^2/40^2)), X the side of a square field in degrees.

    References: barten_1999.

    >>> round(float(pupil_diameter_mm(luminance_cd_m2=100.0, field_deg=40.0)), 2)
    3.01
    """
    positive(luminance_cd_m2=luminance_cd_m2, field_deg=field_deg)
    return 5.0 - 3.0 * np.tanh(0.4 * np.log10(np.asarray(luminance_cd_m2, float) * (field_deg / 40.0) ** 2))


def seen_luminance_cd_m2(
    *, face_cd_m2: Numbers, transmission: Numbers, cone_sine: Numbers, eyepiece_focal_mm: Numbers, pupil_mm: Numbers
) -> np.ndarray:
    """Luminance that acts on the eye: the face's, times the part of the eye's pupil that the exit cone fills.

    L tau min(1, (2 sine f_e/pupil)^2): an eyepiece keeps luminance, but its exit pupil
    2 sine f_e may be smaller than the eye's. References: closed_form.

    >>> float(seen_luminance_cd_m2(face_cd_m2=100.0, transmission=0.9, cone_sine=0.05, eyepiece_focal_mm=20.0,
    ...     pupil_mm=4.0))
    22.5
    """
    within(0.0, 1.0, transmission=transmission, cone_sine=cone_sine)
    positive(eyepiece_focal_mm=eyepiece_focal_mm, pupil_mm=pupil_mm)
    filled = np.minimum(2.0 * np.asarray(cone_sine, float) * eyepiece_focal_mm / pupil_mm, 1.0) ** 2
    return face_cd_m2 * transmission * filled


def contrast_sensitivity(*, frequency_cpd: Numbers, luminance_cd_m2: Numbers, field_deg: Numbers) -> np.ndarray:
    """Contrast sensitivity of a normal observer with two eyes: the reciprocal of the least modulation seen.

    S = 5200 exp(-0.0016 u^2 (1 + 100/L)^0.08) / sqrt((1 + 144/X^2 + 0.64 u^2)
    (63/L^0.83 + 1/(1 - exp(-0.02 u^2)))), u in cycles per degree, L in cd/m2, X the side of the
    square field in degrees.
    Notes: the house choice over `barten_1999_contrast_sensitivity`, for it holds the pupil's size
    and the retinal illuminance inside, so that luminance and field are its only inputs; in it the
    author put typical constants into the longer form.
    References: barten_2003.

    >>> [round(float(contrast_sensitivity(frequency_cpd=u, luminance_cd_m2=100.0, field_deg=10.0)), 1)
    ...     for u in (4.0, 16.0, 32.0)]
    [633.7, 169.4, 23.3]
    """
    positive(frequency_cpd=frequency_cpd, luminance_cd_m2=luminance_cd_m2, field_deg=field_deg)
    u2, lum = np.asarray(frequency_cpd, float) ** 2, np.asarray(luminance_cd_m2, float)
    optics = np.exp(-0.0016 * u2 * (1.0 + 100.0 / lum) ** 0.08)
    size = 1.0 + 144.0 / np.asarray(field_deg, float) ** 2 + 0.64 * u2
    noise = 63.0 / lum**0.83 - 1.0 / np.expm1(-0.02 * u2)
    return 5200.0 * optics / np.sqrt(size * noise)


def barten_1999_contrast_sensitivity(
    *, frequency_cpd: Numbers, luminance_cd_m2: Numbers, field_deg: Numbers, pupil_mm: Numbers
) -> np.ndarray:
    """The longer form with the pupil stated: needed where the exit pupil is not the eye's own.

    S = (M/k)/sqrt((2/T)(1/X^2 + 1/12^2 + u^2/15^2)(1/(eta p E) + Phi0/(1 - exp(-(u/7)^2)))),
    M = exp(-2 (pi sigma u)^2), sigma^2 = (0.5/60)^2 + (0.08 d/60)^2 degrees,
    E = (pi d^2/4) L (1 - (d/9.7)^2 + (d/12.4)^4) trolands; k 3, T 0.1 s, eta 0.03,
    p 1.2274e6, Phi0 3e-8 s deg^2. Two eyes. Equal to the form carried by colour-science.
    References: barten_1999.

    >>> full = barten_1999_contrast_sensitivity(
    ...     frequency_cpd=4.0, luminance_cd_m2=20.0, field_deg=60.0, pupil_mm=2.1)
    >>> round(float(full), 3)
    360.869
    """
    positive(frequency_cpd=frequency_cpd, luminance_cd_m2=luminance_cd_m2, field_deg=field_deg, pupil_mm=pupil_mm)
    u2, d = np.asarray(frequency_cpd, float) ** 2, np.asarray(pupil_mm, float)
    spread_deg2 = (0.5 / 60.0) ** 2 + (0.08 / 60.0 * d) ** 2
    trolands = np.pi * d * d / 4.0 * luminance_cd_m2 * (1.0 - (d / 9.7) ** 2 + (d / 12.4) ** 4)
    area = 1.0 / np.asarray(field_deg, float) ** 2 + 1.0 / 12.0**2 + u2 / 15.0**2
    noise = 1.0 / (0.03 * 1.2274e6 * trolands) - 3e-8 / np.expm1(-u2 / 49.0)
    return np.exp(-2.0 * np.pi**2 * spread_deg2 * u2) / 3.0 / np.sqrt(2.0 / 0.1 * area * noise)


def one_eye_threshold_contrast(*, sensitivity: Numbers) -> Numbers:
    """Least modulation that one eye sees: sqrt2 over the sensitivity of two eyes. References: barten_1999.

    >>> round(float(one_eye_threshold_contrast(sensitivity=100.0)), 5)
    0.01414
    """
    positive(sensitivity=sensitivity)
    return np.sqrt(2.0) / sensitivity


def peak_cpd(*, luminance_cd_m2: Numbers, field_deg: Numbers) -> np.ndarray:
    """Frequency at which the eye is most sensitive, by `contrast_sensitivity`; to 4 %, on a fixed grid.

    References: barten_2003.

    >>> round(float(peak_cpd(luminance_cd_m2=100.0, field_deg=10.0)), 1)
    3.1
    """
    luminance, field = np.broadcast_arrays(np.asarray(luminance_cd_m2, float), np.asarray(field_deg, float))
    grid = np.geomspace(0.2, 20.0, 60)
    seen = contrast_sensitivity(frequency_cpd=grid, luminance_cd_m2=luminance[..., None], field_deg=field[..., None])
    return grid[np.argmax(seen, axis=-1)]
