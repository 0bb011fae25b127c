"""The closed list of unit suffixes, and every conversion by name.

A quantity is a plain float whose name ends in its unit. Conversions happen here and nowhere
else, so that no formula carries a bare power of ten.
"""

from typing import Annotated

import numpy as np

# What a public number may be: one value, or an array that broadcasts, in the unit that its name ends in.
Numbers = float | np.ndarray
# The same in whatever unit came in, and truth values one by one.
AnyUnit = Annotated[float | np.ndarray, "in the unit of what went in"]
Flags = Annotated[bool | np.ndarray, "true or false"]

SUFFIXES = tuple(
    "nm um mm m mm2 um2 deg rad db db_m w w_nm lm w_m2 w_mm2 w_m2_k lux w_m2_sr cd_m2 j_m2 j_m2_sr "
    "mm2_sr lp_mm per_m per_um lm_w c k s hz cpd arcmin e dn dn_e gy count".split()
)
PURE = tuple(
    "na index fraction share ratio reflectance transmission contrast magnification f_number v_number "
    "efficiency evenness sine stretch exchange mtf weight sensitivity factor strain probability photons "
    "noise snr spread power threshold pixels_per_pitch".split()
)


def unit_of(name: str) -> str | None:
    """The unit that a name ends in (the longest that matches), "1" for a pure number, else None.

    >>> unit_of("exit_irradiance_w_m2"), unit_of("core_share"), unit_of("length")
    ('w_m2', '1', None)
    """
    for suffix in sorted(SUFFIXES, key=len, reverse=True):
        if name.endswith("_" + suffix) or name == suffix:
            return suffix
    return "1" if any(name == word or name.endswith("_" + word) for word in PURE) else None


# Lengths
def um_from_nm(length_nm: Numbers) -> Numbers:
    return length_nm * 1e-3


def m_from_nm(length_nm: Numbers) -> Numbers:
    return length_nm * 1e-9


def mm_from_um(length_um: Numbers) -> Numbers:
    return length_um * 1e-3


def um_from_mm(length_mm: Numbers) -> Numbers:
    return length_mm * 1e3


def m_from_um(length_um: Numbers) -> Numbers:
    return length_um * 1e-6


def um_from_m(length_m: Numbers) -> Numbers:
    return length_m * 1e6


def m_from_mm(length_mm: Numbers) -> Numbers:
    return length_mm * 1e-3


def mm_from_m(length_m: Numbers) -> Numbers:
    return length_m * 1e3


# Areas and what is spread over them
def mm2_from_um2(area_um2: Numbers) -> Numbers:
    return area_um2 * 1e-6


def w_m2_from_w_mm2(irradiance_w_mm2: Numbers) -> Numbers:
    return irradiance_w_mm2 * 1e6


def w_mm2_from_w_m2(irradiance_w_m2: Numbers) -> Numbers:
    return irradiance_w_m2 * 1e-6


def m2_from_mm2(area_mm2: Numbers) -> Numbers:
    """Square meters (the only place where they occur: flux in lm or W over an area)."""
    return area_mm2 * 1e-6


# Frequencies: one line pair per mm is 1e-3 periods per um
def per_um_from_lp_mm(frequency_lp_mm: Numbers) -> Numbers:
    return frequency_lp_mm * 1e-3


def lp_mm_from_per_um(frequency_per_um: Numbers) -> Numbers:
    return frequency_per_um * 1e3


# Angles
def rad_from_deg(angle_deg: Numbers) -> Numbers:
    return np.deg2rad(angle_deg)


def deg_from_rad(angle_rad: Numbers) -> Numbers:
    return np.rad2deg(angle_rad)


def arcmin_from_rad(angle_rad: Numbers) -> Numbers:
    return np.rad2deg(angle_rad) * 60.0


# Levels
def transmission_from_db(loss_db: Numbers) -> Numbers:
    """The fraction of power left after a loss in decibels.

    >>> round(transmission_from_db(3.0), 3)
    0.501
    """
    return 10.0 ** (-np.asarray(loss_db) / 10.0) if isinstance(loss_db, np.ndarray) else 10.0 ** (-loss_db / 10.0)


def db_from_transmission(transmission: Numbers) -> Numbers:
    return -10.0 * np.log10(transmission)


def db_m_from_db_km(loss_db: Numbers) -> Numbers:
    """Decibels per meter from decibels per kilometer."""
    return loss_db * 1e-3


# Illuminance
def lux_from_lm_mm2(exitance_lm_mm2: Numbers) -> Numbers:
    """Lux from lumens per mm2; W/m2 from W per mm2 alike."""
    return exitance_lm_mm2 * 1e6


def mw_from_w(power_w: Numbers) -> Numbers:
    """Milliwatts: the unit of the figures for explosive atmospheres."""
    return power_w * 1e3
