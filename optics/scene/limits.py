"""Limits that optical radiation is screened against, with their edition and how well each is known.

Paid standards were read second-hand or are remembered; each figure says which. The current edition,
a measurement and the licensed assessor decide, never this file.
"""

from dataclasses import dataclass

import numpy as np

from optics.spec import positive, require, within
from optics.units import Numbers, m2_from_mm2

# Angles subtended: below SMALL_RAD a source is "small"; averaging fields of the short and of the long exposure;
# the least and the largest angle that the thermal limits count.
SMALL_RAD, LONG_FIELD_RAD, LARGEST_RAD = 0.011, 0.1, 0.1
JUDGED_AT_MM = 200.0
# Risk groups 0 (exempt), 1, 2: radiance over the long field, over the short field, of the source itself; and the
# irradiance of a small source.
GROUP_RADIANCE_W_M2_SR = (100.0, 1.0e4, 4.0e6)
GROUP_SMALL_W_M2 = (1.0, 1.0, 400.0)
UVA_EYE_W_M2, ACTINIC_J_M2, WORKDAY_S = 10.0, 30.0, 30_000.0
# Skin, the longest time for which its limit is stated.
SKIN_S = 10.0
# Temperature of an insertion part in the body less that of the body (41 C, 37 C).
TIP_RISE_K = 4.0
STILL_AIR_W_M2_K = 10.0  # free convection and radiation together, the usual round figure


@dataclass(frozen=True, slots=True)
class Ignition:
    """A screening figure for an explosive atmosphere: below either of the two.

    References: eur_16011, niosh_laser_safety (both read), iec_60079_28 (remembered).
    """

    name: str
    power_w: float
    irradiance_w_mm2: float | None
    source: str
    basis: str


IGNITION = (
    Ignition("groups IIA to IIC up to temperature class T4", 0.035, 0.005, "EUR 16011", "read"),
    Ignition("group I, methane in mines", 0.150, 0.020, "NIOSH, laser safety in mining", "read"),
    Ignition("temperature class T6 and carbon disulfide", 0.015, None, "IEC 60079-28", "remembered"),
)


def blue_light_limit_w_m2_sr(*, exposure_s: Numbers) -> Numbers:
    """Blue-light weighted radiance allowed: 1e6 J/(m2 sr) over the time to 1e4 s, then 100 W/(m2 sr).

    References: iec_62471 (second-hand).

    >>> float(blue_light_limit_w_m2_sr(exposure_s=100.0))
    10000.0
    """
    positive(exposure_s=exposure_s)
    return 1.0e6 / np.minimum(exposure_s, 1.0e4)


def blue_light_small_limit_w_m2(*, exposure_s: Numbers) -> Numbers:
    """Blue-light weighted irradiance allowed from a source under 11 mrad: 100 J/m2 to 100 s, then 1 W/m2.

    References: iec_62471 (second-hand).
    """
    positive(exposure_s=exposure_s)
    return 100.0 / np.minimum(exposure_s, 100.0)


def thermal_limit_w_m2_sr(*, source_rad: Numbers, exposure_s: Numbers) -> Numbers:
    """Thermally weighted radiance allowed: 50000/(alpha t^0.25) from 10 us to 10 s, then 28000/alpha.

    alpha counts between 0.0017 rad (0.011 beyond 10 s) and 0.1 rad. References: iec_62471 (remembered).
    """
    positive(source_rad=source_rad)
    require("exposure_s", exposure_s, "1e-05 or more", np.asarray(exposure_s) >= 1e-5)
    long = np.asarray(exposure_s) > 10.0
    alpha = np.clip(source_rad, np.where(long, SMALL_RAD, 0.0017), LARGEST_RAD)
    return np.where(long, 28_000.0, 50_000.0 * np.minimum(exposure_s, 10.0) ** -0.25) / alpha


def skin_limit_w_m2(*, exposure_s: Numbers) -> Numbers:
    """Irradiance of the skin allowed, 380-3000 nm: 20000 t^0.25 J/m2 over t, stated up to 10 s only.

    References: iec_62471 (second-hand).

    >>> round(float(skin_limit_w_m2(exposure_s=10.0)))
    3557
    """
    within(0.0, SKIN_S, exposure_s=exposure_s)
    positive(exposure_s=exposure_s)
    return 20_000.0 * np.asarray(exposure_s) ** -0.75


def infrared_eye_limit_w_m2(*, exposure_s: Numbers) -> Numbers:
    """Infrared irradiance of the eye allowed, 780-3000 nm: 18000 t^-0.75 to 1000 s, then 100 W/m2.

    References: iec_62471 (second-hand).
    """
    positive(exposure_s=exposure_s)
    return np.where(np.asarray(exposure_s) <= 1000.0, 18_000.0 * np.asarray(exposure_s) ** -0.75, 100.0)


def averaged_share(*, source_mm2: Numbers, field_rad: Numbers, distance_mm: Numbers) -> Numbers:
    """Radiance averaged over a round field of view, as a share of the true radiance: source over field, at most 1.

    Source and field are compared by area, as if all of the source lay inside the field (the safe side for several
    ports). References: closed_form.

    >>> round(float(averaged_share(source_mm2=np.pi * 0.6**2, field_rad=0.011, distance_mm=200.0)), 2)
    0.3
    """
    positive(source_mm2=source_mm2, field_rad=field_rad, distance_mm=distance_mm)
    return np.minimum(source_mm2 / (np.pi / 4 * (np.asarray(field_rad) * distance_mm) ** 2), 1.0)


def risk_group(
    *,
    long_w_m2_sr: Numbers,
    short_w_m2_sr: Numbers,
    true_w_m2_sr: Numbers,
    irradiance_w_m2: Numbers,
    source_rad: Numbers,
) -> np.ndarray:
    """Risk group 0 to 3 by blue light: by radiance, or by irradiance for a source under 11 mrad.

    Parameters: blue-weighted radiance averaged over 100 mrad, over 11 mrad, and of the source itself; irradiance
    and angle subtended at the place of judgment. References: iec_62471 (second-hand).
    """
    by_radiance = [
        np.asarray(x) > y for x, y in zip((long_w_m2_sr, short_w_m2_sr, true_w_m2_sr), GROUP_RADIANCE_W_M2_SR)
    ]
    # A group is left when its own figure is exceeded; the groups are ordered, so the highest one left counts.
    wide = np.max([exceeded * (at + 1) for at, exceeded in enumerate(by_radiance)], axis=0)
    small = np.max([(np.asarray(irradiance_w_m2) > y) * (at + 1) for at, y in enumerate(GROUP_SMALL_W_M2)], axis=0)
    return np.where(np.asarray(source_rad) < SMALL_RAD, small, wide)


def temperature_rise_k(*, absorbed_w: Numbers, film_w_m2_k: Numbers, surface_mm2: Numbers) -> Numbers:
    """Steady rise of a tip over its surroundings: absorbed power over film coefficient times surface.

    References: closed_form (Newton's law of cooling).

    >>> round(float(temperature_rise_k(absorbed_w=0.030, film_w_m2_k=10.0, surface_mm2=311.0)), 1)
    9.6
    """
    positive(film_w_m2_k=film_w_m2_k, surface_mm2=surface_mm2)
    return np.asarray(absorbed_w) / (np.asarray(film_w_m2_k) * m2_from_mm2(np.asarray(surface_mm2)))
