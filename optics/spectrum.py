"""Wavelength grid, integrals, photometry, chromaticity, color temperature and color rendering.

One rule everywhere: the trapezoid on the grid of 350-1100 nm in steps of 5 nm; V(lambda) and the
color-matching functions count from 380 to 780 nm and are 0 outside. With this rule illuminant A
(over 380-780 nm) has 156.2 lm/W; plain sums of the same 81 samples would say 154.1. A spectrum on
another abscissa is a polyline: the grid points inside its range are added, then the same rule.
Spectra may carry leading axes (power[..., wavelength]); a spectrum of zeros gives 0, never NaN.
"""

from functools import lru_cache
from typing import NamedTuple

import numpy as np

from optics import units
from optics.spec import Curve, OutOfRange, not_negative, positive, require, within
from optics.tables import table
from optics.units import AnyUnit, Flags


def _frozen(array: np.ndarray) -> np.ndarray:
    array.flags.writeable = False
    return array


STEP_NM = 5.0
GRID_NM = _frozen(np.arange(350.0, 1100.0 + STEP_NM / 2, STEP_NM))
QUADRATURE_NM = _frozen(STEP_NM * np.concatenate([[0.5], np.ones(len(GRID_NM) - 2), [0.5]]))
VISIBLE_NM = (380.0, 780.0)
# Exact by definition of the SI (2019): h in J s, c in m/s; 683 lm/W at 540 THz.
PLANCK_J_S, LIGHT_M_S, MOST_LM_W = 6.62607015e-34, 299792458.0, 683.0
# c2 of Planck's law in m K as the CIE fixes it for color (ITS-90).
C2_M_K = 1.4388e-2
CREST_NM = 560.0  # where relative spectra of black bodies are 1
LOCUS_K = (1000.0, 100_000.0)
TESTED = {"distance_from_locus": (-0.05, 0.05)}  # CIE 015: beyond, a color temperature means little


class Chromaticity(NamedTuple):
    """CIE 1931 x, y and CIE 1960 u, v; all 0 without light."""

    x_share: AnyUnit
    y_share: AnyUnit
    u_ratio: AnyUnit
    v_ratio: AnyUnit


class Nodes(NamedTuple):
    """Wavelengths and the shares (they sum to 1, or 0 without light) that stand for a spectrum."""

    wavelength_nm: np.ndarray
    share: np.ndarray


def integral(power: AnyUnit, axis: int = -1) -> AnyUnit:
    """Integral of samples on the grid over wavelength (trapezoid)."""
    return np.moveaxis(np.asarray(power, dtype=float), axis, -1) @ QUADRATURE_NM


def on_grid(curve: Curve) -> AnyUnit:
    """A curve on the grid: linear between its points, 0 outside its range."""
    return np.interp(GRID_NM, curve.abscissa, curve.ordinate, left=0.0, right=0.0)


def covered(curve: Curve) -> Flags:
    """Where on the grid a curve has data."""
    return (curve.abscissa[0] <= GRID_NM) & (curve.abscissa[-1] >= GRID_NM)


def planck(*, temperature_k: units.Numbers, wavelength_nm: np.ndarray = GRID_NM) -> AnyUnit:
    """Relative spectral power of a black body, [..., wavelength]: 1 at 560 nm.

    M ~ lambda^-5 / (exp(c2/(lambda T)) - 1). Temperature from 100 to 1e6 K. Source: cie_015_2018.
    """
    within(100.0, 1e6, temperature_k=temperature_k)
    positive(wavelength_nm=wavelength_nm)
    kt, wavelength_nm = np.asarray(temperature_k, dtype=float)[..., None], np.asarray(wavelength_nm, dtype=float)
    y, crest = C2_M_K / (units.m_from_nm(wavelength_nm) * kt), C2_M_K / (units.m_from_nm(CREST_NM) * kt)
    return (CREST_NM / wavelength_nm) ** 5 * np.exp(crest - y) * np.expm1(-crest) / np.expm1(-y)


def planck_luminance_cd_m2(*, temperature_k: units.Numbers) -> units.Numbers:
    """Luminance of a black body: 683 lm/W times the V(lambda) integral of its radiance.

    L = 2 h c^2 / lambda^5 / (exp(c2/(lambda T)) - 1). An upper bound for every incandescent source.
    Source: si_brochure_2019.
    """
    seen = planck(temperature_k=temperature_k) @ _observer()[:, 1]
    crest_m = units.m_from_nm(CREST_NM)
    radiance = 2 * PLANCK_J_S * LIGHT_M_S**2 / crest_m**5 / np.expm1(C2_M_K / (crest_m * np.asarray(temperature_k)))
    return MOST_LM_W * radiance * units.m_from_nm(seen)


def photons_per_j(*, wavelength_nm: units.Numbers) -> AnyUnit:
    """Photons in a joule of light: lambda/(h c).

    >>> f"{photons_per_j(wavelength_nm=555.0):.4g}"
    '2.794e+18'
    """
    return units.m_from_nm(wavelength_nm) / (PLANCK_J_S * LIGHT_M_S)


def photopic_weight() -> np.ndarray:
    """V(lambda) on the grid, 0 outside 380-780 nm."""
    return _observer()[:, 1] / QUADRATURE_NM


def luminous_flux_lm(power_w_nm: np.ndarray) -> units.Numbers:
    """Lumens of a spectral power on the grid: 683 lm/W times its V(lambda) integral."""
    return MOST_LM_W * (np.asarray(power_w_nm, dtype=float) @ _observer()[:, 1])


def luminous_efficacy_lm_w(*, wavelength_nm: np.ndarray, power: np.ndarray) -> units.Numbers:
    """Lumens per watt of the radiation given (all of it, also the part that is not seen).

    683 int P V / int P. Raises OutOfRange for a falling abscissa or negative power. Source: cie_018_2019.

    >>> round(float(luminous_efficacy_lm_w(wavelength_nm=[554.0, 555.0, 556.0], power=[0.0, 1.0, 0.0])), 1)
    683.0
    """
    weights, power = _checked(wavelength_nm, power)
    total = power @ weights[:, 3]
    return MOST_LM_W * np.divide(power @ weights[:, 1], total, out=np.zeros_like(total), where=total > 0)[()]


def chromaticity(*, wavelength_nm: np.ndarray, power: np.ndarray) -> Chromaticity:
    """Chromaticity of a light source (CIE 1931 observer, 2 degrees).

    x = X/(X+Y+Z), u = 4X/(X+15Y+3Z), v = 6Y/(X+15Y+3Z). Source: cie_015_2018.
    """
    weights, power = _checked(wavelength_nm, power)
    return _chromaticity(power @ weights[:, :3])


def color_temperature_k(*, wavelength_nm: np.ndarray, power: np.ndarray) -> units.Numbers:
    """Correlated color temperature: of the black body nearest in CIE 1960 u, v.

    Ohno's combined solution on a table of the locus: the triangle of the color and the two
    neighbors of the nearest point where the color lies closer than 0.002 to the locus, else the
    parabola through the three distances. From 1,000 to 100,000 K, and these ends for colors beyond.
    Notes: computed for every color; farther than 0.05 from the locus (`duv`) it says little.
    0 without light. Sources: ohno_2013, cie_015_2018.
    """
    return _nearest_on_locus(chromaticity(wavelength_nm=wavelength_nm, power=power))[0]


def duv(*, wavelength_nm: np.ndarray, power: np.ndarray) -> AnyUnit:
    """Signed distance from the Planckian locus in CIE 1960 u, v: above 0 greenish, below 0 pinkish."""
    return _nearest_on_locus(chromaticity(wavelength_nm=wavelength_nm, power=power))[1]


def nearest_black_body(*, wavelength_nm: np.ndarray, power: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """(color temperature in K, Duv) of a light source at once; see `color_temperature_k` and `duv`."""
    return _nearest_on_locus(chromaticity(wavelength_nm=wavelength_nm, power=power))


def color_rendering_index(*, wavelength_nm: np.ndarray, power: np.ndarray) -> units.Numbers:
    """General color rendering index Ra: 100 - 4.6 times the mean color shift of eight samples.

    Reference: the black body of the same color temperature below 5000 K, daylight from there on;
    von Kries shift of the white point; shifts in CIE 1964 U*V*W*. Negative for very poor light;
    0 without light. Notes: the standard wants a source within 0.0054 of its reference in u, v;
    farther off a number still comes out. Source: cie_13_3_1995.
    """
    weights, power = _checked(wavelength_nm, power)
    seen = (power @ weights[:, 4:]).reshape(*power.shape[:-1], 9, 3)
    temperature_k = _nearest_on_locus(_chromaticity(seen[..., 0, :]))[0]
    lit = temperature_k > 0
    reference = _reference(np.where(lit, temperature_k, 5000.0), *_whole(np.asarray(wavelength_nm, float).tobytes()))
    seen = np.where(lit[..., None, None], seen, reference)
    shift = _uvw(_adapted(seen, reference), seen, reference) - _uvw(_uv(reference), reference, reference)
    return np.where(lit, 100.0 - 4.6 * np.linalg.norm(shift, axis=-1).mean(axis=-1), 0.0)[()]


def effective_wavelengths(*, weight: np.ndarray, count: int) -> Nodes:
    """The `count` wavelengths and shares that stand for a weighted spectrum weight[..., grid].

    The Gauss quadrature of the weight: sums over the nodes are exact for polynomials of wavelength
    up to degree 2 count - 1. Three-term recurrence (Stieltjes), then the eigenvalues of its
    symmetric tridiagonal matrix (Golub and Welsch). Nodes lie within the spectrum; those that a
    spectrum of few lines does not need have the share 0. Source: golub_welsch_1969.
    """
    not_negative(weight=weight)
    require("count", count, "from 1 to 16", 1 <= count <= 16)
    weight = np.asarray(weight, dtype=float) * QUADRATURE_NM
    total = weight.sum(axis=-1, keepdims=True)
    weight = np.where(total > 0, weight / np.where(total > 0, total, 1.0), QUADRATURE_NM / QUADRATURE_NM.sum())
    center, scale = (GRID_NM[0] + GRID_NM[-1]) / 2, (GRID_NM[-1] - GRID_NM[0]) / 2
    matrix = np.zeros((*weight.shape[:-1], count, count))
    x, last, now = (GRID_NM - center) / scale, 0.0, np.ones_like(weight)
    for k in range(count):
        matrix[..., k, k] = (weight * now**2 * x).sum(axis=-1)
        after = (x - matrix[..., k, k, None]) * now - (matrix[..., k, k - 1, None] * last if k else 0.0)
        norm = np.sqrt((weight * after**2).sum(axis=-1, keepdims=True))
        live = norm > 1e-9
        if k + 1 < count:
            matrix[..., k + 1, k] = np.where(live, norm, 0.0)[..., 0]
        last, now = now, np.where(live, after / np.where(live, norm, 1.0), 0.0)
    nodes, vectors = np.linalg.eigh(matrix)
    return Nodes(center + scale * nodes, vectors[..., 0, :] ** 2 * (total > 0))


def _checked(wavelength_nm: np.ndarray, power: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Weights of the abscissa (`_weights`) and the power as an array, both checked."""
    abscissa, power = np.asarray(wavelength_nm, dtype=float), np.asarray(power, dtype=float)
    if abscissa.ndim != 1 or len(abscissa) < 2 or power.shape[-1:] != abscissa.shape:
        raise OutOfRange(f"power has the shape {power.shape}; its last axis must be that of wavelength_nm, 2 or more.")
    not_negative(power=power)
    return _weights(abscissa.tobytes()), power


@lru_cache(maxsize=64)
def _weights(abscissa: bytes) -> np.ndarray:
    """[wavelength, 31]: weights for X, Y, Z, the plain integral, and X, Y, Z of white and the 8 samples."""
    nodes = np.frombuffer(abscissa)
    require("wavelength_nm", nodes, "finite, above 0", np.isfinite(nodes) & (nodes > 0))
    require("a step of wavelength_nm", np.diff(nodes), "above 0", np.diff(nodes) > 0)
    fine = np.union1d(nodes, GRID_NM[(nodes[0] < GRID_NM) & (nodes[-1] > GRID_NM)])
    # Values at the added points are linear between the given ones
    fold = np.array([np.interp(fine, nodes, row) for row in np.eye(len(nodes))])
    return fold @ _rule(fine)


@lru_cache(maxsize=64)
def _whole(abscissa: bytes) -> tuple[np.ndarray, np.ndarray]:
    """The visible points of the abscissa and the grid together, and the color weights there."""
    fine = np.union1d(np.frombuffer(abscissa), GRID_NM)
    seen = (fine >= VISIBLE_NM[0]) & (fine <= VISIBLE_NM[1])
    return fine[seen], _rule(fine)[seen, 4:]


def _rule(fine: np.ndarray) -> np.ndarray:
    """The 31 columns of `_weights` for samples at these very points (trapezoid)."""
    steps = np.diff(fine)
    rule = (np.append(steps, 0.0) + np.append(0.0, steps)) / 2
    observer, samples = table("cie_1931_observer"), table("cie_test_colors")
    seen = (fine >= VISIBLE_NM[0]) & (fine <= VISIBLE_NM[1])
    xyz = np.stack([np.interp(fine, observer["wavelength_nm"], observer[key]) * seen for key in "xyz"], axis=1)
    factors = [np.interp(fine, samples["wavelength_nm"], samples[f"sample_{k}"]) for k in range(1, 9)]
    colors = [xyz * factor[:, None] for factor in factors]
    return rule[:, None] * np.concatenate([xyz, np.ones((len(fine), 1)), xyz, *colors], axis=1)


@lru_cache(maxsize=1)
def _observer() -> np.ndarray:
    return _frozen(np.ascontiguousarray(_weights(GRID_NM.tobytes())[:, :3]))


def _uv(xyz: np.ndarray) -> np.ndarray:
    """CIE 1960 u, v on the last axis; 0 without light."""
    below = xyz @ np.array([1.0, 15.0, 3.0])
    return xyz[..., :2] * np.array([4.0, 6.0]) / np.where(below > 0, below, 1.0)[..., None]


def _chromaticity(xyz: np.ndarray) -> Chromaticity:
    total = xyz.sum(axis=-1, keepdims=True)
    xy, uv = xyz[..., :2] / np.where(total > 0, total, 1.0), _uv(xyz)
    return Chromaticity(xy[..., 0][()], xy[..., 1][()], uv[..., 0][()], uv[..., 1][()])


@lru_cache(maxsize=1)
def _locus() -> tuple[np.ndarray, np.ndarray]:
    """Temperatures in steps of 0.25 % and the u, v of their black bodies."""
    temperature_k = np.geomspace(*LOCUS_K, 1 + round(np.log(LOCUS_K[1] / LOCUS_K[0]) / 0.0025))
    return temperature_k, _uv(planck(temperature_k=temperature_k) @ _observer())


def _nearest_on_locus(color: Chromaticity) -> tuple[np.ndarray, np.ndarray]:
    """(temperature, signed distance); both 0 without light."""
    temperature_k, locus = _locus()
    uv = np.stack([color.u_ratio, color.v_ratio], axis=-1)
    middle = np.argmin((locus**2).sum(axis=-1) - 2 * (uv @ locus.T), axis=-1).clip(1, len(locus) - 2)
    around = middle[..., None] + np.array([-1, 0, 1])
    t, points = temperature_k[around], locus[around]
    d = np.linalg.norm(uv[..., None, :] - points, axis=-1)
    # Triangle: the foot of the perpendicular on the chord between the two neighbors
    chord = points[..., 2, :] - points[..., 0, :]
    length = np.linalg.norm(chord, axis=-1)
    along = ((d[..., 0] ** 2 - d[..., 2] ** 2 + length**2) / (2 * length**2)).clip(0.0, 1.0)
    foot = points[..., 0, :] + chord * along[..., None]
    near_k = t[..., 0] + (t[..., 2] - t[..., 0]) * along
    sign = np.where(uv[..., 1] >= foot[..., 1], 1.0, -1.0)
    near = np.linalg.norm(uv - foot, axis=-1)
    # Parabola through the three distances, in temperature from the middle point
    before, after = t[..., 0] - t[..., 1], t[..., 2] - t[..., 1]
    left, right = (d[..., 0] - d[..., 1]) / before, (d[..., 2] - d[..., 1]) / after
    bend = (right - left) / (after - before)
    slope = left - bend * before
    # Beyond an end of the table the curve falls toward that end and may not bend up
    vertex = np.where(bend > 0, -slope / np.where(bend > 0, 2 * bend, 1.0), -np.sign(slope) * np.inf)
    shift = np.clip(vertex, before, after)
    far_k, far = t[..., 1] + shift, d[..., 1] + shift * (slope + bend * shift)
    close, lit = near < 0.002, uv[..., 1] > 0
    return np.where(lit, np.where(close, near_k, far_k), 0.0)[()], np.where(
        lit, sign * np.where(close, near, far), 0.0
    )[()]


def _reference(t: np.ndarray, at_nm: np.ndarray, weights: np.ndarray) -> np.ndarray:
    """[..., 9, 3]: X, Y, Z of white and the 8 samples under the reference light of CIE 13.3 of t kelvin."""
    day = table("cie_daylight")
    basis = np.array([np.interp(at_nm, day["wavelength_nm"], day[key]) for key in ("s0", "s1", "s2")]) @ weights
    low = np.polynomial.polynomial.polyval(1.0 / t, [0.244063, 0.09911e3, 2.9678e6, -4.6070e9])
    high = np.polynomial.polynomial.polyval(1.0 / t, [0.237040, 0.24748e3, 1.9018e6, -2.0064e9])
    x = np.where(t <= 7000.0, low, high)
    y = -3.0 * x**2 + 2.870 * x - 0.275
    m = 0.0241 + 0.2562 * x - 0.7341 * y
    m1, m2 = (-1.3515 - 1.7703 * x + 5.9114 * y) / m, (0.0300 - 31.4424 * x + 30.0717 * y) / m
    daylight = np.stack([np.ones_like(m1), m1, m2], axis=-1) @ basis
    light = np.where((t < 5000.0)[..., None], planck(temperature_k=t, wavelength_nm=at_nm) @ weights, daylight)
    return light.reshape(*t.shape, 9, 3)


def _cd(uv: np.ndarray) -> np.ndarray:
    u, v = uv[..., 0], uv[..., 1]
    return np.stack([4.0 - u - 10.0 * v, 1.708 * v + 0.404 - 1.481 * u], axis=-1) / v[..., None]


def _adapted(seen: np.ndarray, reference: np.ndarray) -> np.ndarray:
    """u, v of the samples after the von Kries shift from the source's white to the reference's."""
    cd = _cd(_uv(seen))
    c, d = np.moveaxis(cd * (_cd(_uv(reference[..., :1, :])) / cd[..., :1, :]), -1, 0)
    below = 16.518 + 1.481 * c - d
    return np.stack([(10.872 + 0.404 * c - 4.0 * d) / below, 5.520 / below], axis=-1)


def _uvw(uv: np.ndarray, seen: np.ndarray, white: np.ndarray) -> np.ndarray:
    """CIE 1964 W*, U*, V* of the 8 samples: u, v against the reference white, Y against white 100."""
    lightness = 25.0 * np.cbrt(100.0 * seen[..., 1:, 1] / seen[..., :1, 1]) - 17.0
    apart = 13.0 * lightness[..., None] * (uv[..., 1:, :] - _uv(white[..., :1, :]))
    return np.concatenate([lightness[..., None], apart], axis=-1)
