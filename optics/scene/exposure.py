"""Screening of optical radiation: hazard weights, and the weighted quantities of many designs at once.

A guide is judged at 200 mm in air, as a lamp is; a class there says nothing of 5 mm or of contact.
Words and limits for one design: `caution.lines`. Everything here screens; it certifies nothing.
"""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from optics.scene.limits import (
    JUDGED_AT_MM,
    LONG_FIELD_RAD,
    SMALL_RAD,
    STILL_AIR_W_M2_K,
    averaged_share,
    risk_group,
    temperature_rise_k,
    thermal_limit_w_m2_sr,
)
from optics.spec import OutOfRange, not_negative, positive, within
from optics.spectrum import GRID_NM, QUADRATURE_NM
from optics.tables import table
from optics.units import Numbers, w_m2_from_w_mm2

EDITIONS = ("iec_62471_2006", "icnirp_2013")


def blue_light_weight(*, wavelength_nm: Numbers) -> Numbers:
    """Blue-light hazard weight B, 300-700 nm, 0 outside: straight lines between the 5 nm nodes to 500 nm.

    Beyond: 10^((450 - lambda)/50) to 600 nm, then 0.001 to 700 nm. References: iec_62471 (table 4.2, second-hand).

    >>> [round(float(blue_light_weight(wavelength_nm=at)), 4) for at in (440.0, 475.0, 550.0, 650.0, 750.0)]
    [1.0, 0.55, 0.01, 0.001, 0.0]
    """
    positive(wavelength_nm=wavelength_nm)
    at, nodes = np.asarray(wavelength_nm, float), table("blue_light_hazard")
    low = np.interp(at, nodes["wavelength_nm"], nodes["weight"], left=0.0)
    fall = 10.0 ** ((450.0 - np.clip(at, 500.0, 600.0)) / 50.0)
    return np.where(at <= 500.0, low, np.where(at <= 700.0, fall, 0.0))


def thermal_weight(*, wavelength_nm: Numbers, edition: str) -> Numbers:
    """Retinal thermal weight R, 380-1400 nm, 0 outside, in either edition.

    iec_62471_2006: 10 B to 500 nm. icnirp_2013: B to 435 nm, then 1. Both: 1 to 700 nm, 10^((700 - lambda)/500) to
    1050 nm, 0.2 to 1150 nm, falling to 0.02 at 1200 nm and staying there.
    References: iec_62471 (second-hand; beyond 1050 nm remembered), icnirp_2013 (remembered).

    >>> [float(thermal_weight(wavelength_nm=440.0, edition=edition)) for edition in EDITIONS]
    [10.0, 1.0]
    """
    positive(wavelength_nm=wavelength_nm)
    if edition not in EDITIONS:
        raise OutOfRange(f"edition is {edition!r}; it must be one of {', '.join(EDITIONS)}.")
    at = np.asarray(wavelength_nm, float)
    blue = blue_light_weight(wavelength_nm=at)
    short = 10.0 * blue if edition == EDITIONS[0] else np.where(at < 435.0, blue, 1.0)
    near = 10.0 ** ((700.0 - np.clip(at, 700.0, 1050.0)) / 500.0)
    tail = 0.2 * 10.0 ** (0.02 * (1150.0 - np.clip(at, 1150.0, 1200.0)))
    weight = np.where(at <= 500.0, short, np.where(at <= 1050.0, near, tail))
    return np.where((at < 380.0) | (at > 1400.0), 0.0, weight)


def actinic_weight(*, wavelength_nm: Numbers) -> Numbers:
    """Actinic ultraviolet weight S from 320 to 400 nm, 0 above; shorter waves are not in the data.

    Straight lines in the logarithm between 5 nm nodes. Raises OutOfRange below 320 nm.
    References: icnirp_uv_2004 (remembered), optical_radiation_ireland_2010 (one value read).
    """
    within(320.0, np.inf, wavelength_nm=wavelength_nm)
    at, nodes = np.asarray(wavelength_nm, float), table("actinic_uv_hazard")
    return np.where(at <= 400.0, np.exp(np.interp(at, nodes["wavelength_nm"], np.log(nodes["weight"]))), 0.0)


@lru_cache(maxsize=1)
def _weights() -> np.ndarray:
    """[wavelength, hazard] on the grid: blue, thermal in both editions, actinic, UV-A, infrared, skin, all."""
    blue = blue_light_weight(wavelength_nm=GRID_NM)
    thermal = [thermal_weight(wavelength_nm=GRID_NM, edition=edition) for edition in EDITIONS]
    # Bands: a node at the end of a band counts half.
    uv, infrared, skin = (np.heaviside(x, 0.5) for x in (400.0 - GRID_NM, GRID_NM - 780.0, GRID_NM - 380.0))
    found = [blue, *thermal, actinic_weight(wavelength_nm=GRID_NM), uv, infrared, skin, np.ones(GRID_NM.size)]
    return np.stack(found, axis=-1) * QUADRATURE_NM[:, None]


@dataclass(frozen=True, slots=True)
class Screening:
    """Weighted quantities [design]; at 200 mm in air unless the name says exit or target.

    `source_rad`: one port seen from 200 mm. Radiances: of the exit itself, and averaged over a field of view.
    `covered_from_nm`, `covered_to_nm`: where lamp and guide have data (both nan: nowhere).
    """

    power_w: np.ndarray
    exit_w_mm2: np.ndarray
    exit_skin_w_m2: np.ndarray
    source_rad: np.ndarray
    blue_w_m2_sr: np.ndarray
    blue_11_mrad_w_m2_sr: np.ndarray
    blue_100_mrad_w_m2_sr: np.ndarray
    blue_w_m2: np.ndarray
    risk_group_index: np.ndarray
    thermal_2006_w_m2_sr: np.ndarray
    thermal_2013_w_m2_sr: np.ndarray
    thermal_limit_w_m2_sr: np.ndarray
    actinic_w_m2: np.ndarray
    uva_w_m2: np.ndarray
    infrared_w_m2: np.ndarray
    target_blue_w_m2: np.ndarray
    target_skin_w_m2: np.ndarray
    tip_rise_k: np.ndarray
    face_heat_w: np.ndarray
    covered_from_nm: np.ndarray
    covered_to_nm: np.ndarray


def screening(
    *,
    power_w_nm: np.ndarray,
    target_w_m2_nm: np.ndarray,
    covered: np.ndarray,
    exit_na: np.ndarray,
    peak_factor: np.ndarray,
    port_area_mm2: np.ndarray,
    port_mm: np.ndarray,
    tip_heat_w: np.ndarray,
    tip_surface_mm2: np.ndarray,
    face_heat_w: np.ndarray,
) -> Screening:
    """The weighted quantities of all designs: radiance L = Phi/(pi A NA^2), irradiance L A/d^2 at 200 mm.

    Parameters, each with the axis [design] first: power_w_nm leaving all ports and target_w_m2_nm at the center of
    the target (nan: no target), on the grid [design, wavelength]; covered, where lamp and guide have data; exit_na of
    the cone in air (0: no light); peak_factor, the largest radiance of the cone over its mean (1: uniform; see `peak_factor`);
    port_area_mm2 of all ports together, port_mm the diameter of one; tip_heat_w left in the tip, tip_surface_mm2 it
    can give it off from (nan: not known); face_heat_w left at the input face (nan: not known).
    Returns Screening; values count only the wavelengths that have data. Raises OutOfRange on impossible input.
    References: iec_62471, icnirp_2013, closed_form.
    """
    not_negative(power_w_nm=power_w_nm, target_w_m2_nm=np.nan_to_num(target_w_m2_nm), exit_na=exit_na)
    positive(peak_factor=peak_factor, port_area_mm2=port_area_mm2, port_mm=port_mm)
    sums, landed = power_w_nm @ _weights(), target_w_m2_nm @ _weights()
    etendue = np.pi * port_area_mm2 * exit_na**2
    per_watt = np.where(etendue > 0, peak_factor / np.where(etendue > 0, etendue, 1.0), 0.0)
    radiance = w_m2_from_w_mm2(sums * per_watt[:, None])
    away = radiance * (port_area_mm2 / JUDGED_AT_MM**2)[:, None]
    alpha = port_mm / JUDGED_AT_MM
    blue = radiance[:, 0]
    short, long = (
        blue * averaged_share(source_mm2=port_area_mm2, field_rad=field, distance_mm=JUDGED_AT_MM)
        for field in (SMALL_RAD, LONG_FIELD_RAD)
    )
    group = risk_group(
        long_w_m2_sr=long, short_w_m2_sr=short, true_w_m2_sr=blue, irradiance_w_m2=away[:, 0], source_rad=alpha
    )
    surface = np.where(np.isnan(tip_surface_mm2), 1.0, tip_surface_mm2)
    rise = temperature_rise_k(absorbed_w=tip_heat_w, film_w_m2_k=STILL_AIR_W_M2_K, surface_mm2=surface)
    some = covered.any(axis=-1)
    return Screening(
        power_w=sums[:, 7],
        exit_w_mm2=sums[:, 7] / port_area_mm2,
        exit_skin_w_m2=w_m2_from_w_mm2(sums[:, 6] / port_area_mm2),
        source_rad=alpha,
        blue_w_m2_sr=blue,
        blue_11_mrad_w_m2_sr=short,
        blue_100_mrad_w_m2_sr=long,
        blue_w_m2=away[:, 0],
        risk_group_index=group,
        thermal_2006_w_m2_sr=radiance[:, 1],
        thermal_2013_w_m2_sr=radiance[:, 2],
        thermal_limit_w_m2_sr=thermal_limit_w_m2_sr(source_rad=alpha, exposure_s=1000.0),
        actinic_w_m2=away[:, 3],
        uva_w_m2=away[:, 4],
        infrared_w_m2=away[:, 5],
        target_blue_w_m2=landed[:, 0],
        target_skin_w_m2=landed[:, 6],
        tip_rise_k=np.where(np.isnan(tip_surface_mm2), np.nan, rise),
        face_heat_w=face_heat_w,
        covered_from_nm=np.where(some, GRID_NM[np.argmax(covered, axis=-1)], np.nan),
        covered_to_nm=np.where(some, GRID_NM[::-1][np.argmax(covered[:, ::-1], axis=-1)], np.nan),
    )


def peak_factor(*, sine2_edges: np.ndarray, flux: np.ndarray, na: np.ndarray) -> np.ndarray:
    """Largest radiance of a cone over the mean that its NA says: max(flux/width) NA^2/sum(flux); 1 without flux.

    Parameters: sine2_edges [..., bin + 1], flux [..., bin], na [...]. References: closed_form.

    >>> round(float(peak_factor(sine2_edges=np.array([0.0, 0.1, 0.2]), flux=np.array([3.0, 1.0]), na=np.sqrt(0.2))), 9)
    1.5
    """
    total = flux.sum(axis=-1)
    most = np.max(flux / np.diff(sine2_edges, axis=-1), axis=-1)
    return np.where(total > 0, most * na**2 / np.where(total > 0, total, 1.0), 1.0)
