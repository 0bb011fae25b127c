"""Exchange of light between neighboring cores: coupled modes of two, and the pair law of the lattice.

Equal cores would swap their light completely within millimeters. Random core sizes put neighbors
out of step and so rescue the image. Beyond about 10 % of exchange the pair law ends and
`coupled` takes over.
"""

import numpy as np

from optics.image.modes import outside_number, scaled_k, v_number
from optics.spec import not_negative, positive, require
from optics.units import Numbers, rad_from_deg, um_from_nm

# The pair law holds while all six neighbors together take less than about a tenth.
TESTED = {"neighbor_share": (0.0, 0.017)}
# The range of the fitted formula.
TESTED_TEWARI_THYAGARAJAN_1986 = {"v_number": (1.5, 2.5), "pitch_ratio": (2.0, 4.5)}


def coupling_per_um(
    *, core_um: Numbers, pitch_um: Numbers, na: Numbers, clad_index: Numbers, wavelength_nm: Numbers
) -> np.ndarray:
    """Coupling of the LP01 modes of two equal step-index cores (weakly guiding).

    kappa = U^2 K0(W p/a)/(beta a^2 V^2 K1(W)^2). Two such cores swap all light over pi/(2 kappa).
    References: snyder_love_1983; closed_form (checked against finite differences).

    >>> kappa = coupling_per_um(core_um=2.0, pitch_um=3.2, na=0.39, clad_index=1.446, wavelength_nm=633.0)
    >>> f"{float(kappa):.3e}"
    '1.879e-04'
    """
    return mode_coupling_per_um(
        azimuthal=0,
        radial=1,
        parity=1,
        core_um=core_um,
        pitch_um=pitch_um,
        na=na,
        clad_index=clad_index,
        wavelength_nm=wavelength_nm,
    )


def mode_coupling_per_um(
    *,
    azimuthal: int,
    radial: int,
    parity: int,
    core_um: Numbers,
    pitch_um: Numbers,
    na: Numbers,
    clad_index: Numbers,
    wavelength_nm: Numbers,
) -> np.ndarray:
    """Coupling of equal LP_lm modes of two equal cores, lobes along (`parity` 1) or across (-1) their line.

    U^2 (K0(W p/a) +- K_2l(W p/a))/(beta a^2 V^2 K_(l-1)(W) K_(l+1)(W)); negative across, where the
    fields oppose; without the K_2l for l = 0. Raises OutOfRange below cutoff.
    References: snyder_love_1983.

    >>> across = mode_coupling_per_um(azimuthal=1, radial=1, parity=-1, core_um=2.0, pitch_um=3.2, na=0.39,
    ...     clad_index=1.446, wavelength_nm=633.0)
    >>> bool(across < 0)
    True
    """
    positive(core_um=core_um, pitch_um=pitch_um, na=na, wavelength_nm=wavelength_nm)
    require("pitch_um", pitch_um, "above core_um", np.asarray(pitch_um) > np.asarray(core_um))
    require("clad_index", clad_index, "1 or more", np.asarray(clad_index) >= 1)
    v = v_number(core_um=core_um, na=na, wavelength_nm=wavelength_nm)
    w = outside_number(v_number=v, azimuthal=azimuthal, radial=radial)
    radius = 0.5 * np.asarray(core_um, float)
    far = w * pitch_um / radius
    zero, twice = (scaled_k(order, far)[0] for order in (0, 2 * azimuthal))
    lobes = zero if azimuthal == 0 else zero + np.sign(parity) * twice
    outside, above = scaled_k(azimuthal, w)
    below = above - 2.0 * azimuthal / w * outside
    beta = _propagation_per_um(np.sqrt(v * v - w * w), radius, na, clad_index, wavelength_nm)
    return (v * v - w * w) * lobes * np.exp(2.0 * w - far) / (beta * radius**2 * v * v * np.abs(below) * above)


def _propagation_per_um(u, radius, na, clad_index, wavelength_nm):
    wave = 2.0 * np.pi / um_from_nm(wavelength_nm)
    return np.sqrt(wave * wave * (np.asarray(clad_index) ** 2 + np.asarray(na) ** 2) - (u / radius) ** 2)


def mismatch_per_um(
    *,
    core_um: Numbers,
    na: Numbers,
    clad_index: Numbers,
    wavelength_nm: Numbers,
    core_spread_fraction: Numbers,
) -> np.ndarray:
    """Standard deviation of half the difference of two neighbors' LP01 propagation constants.

    s = (d beta/d a) a sigma/sqrt2, d beta/d a = U^2/(beta a^3) (K0(W)/K1(W))^2, sigma the relative
    rms spread of core sizes, neighbors independent.
    References: gloge_1971 (dU/dV); closed_form.

    >>> s = mismatch_per_um(core_um=2.0, na=0.39, clad_index=1.446, wavelength_nm=633.0, core_spread_fraction=0.02)
    >>> f"{float(s):.2e}"
    '2.65e-03'
    """
    not_negative(core_spread_fraction=core_spread_fraction)
    v = v_number(core_um=core_um, na=na, wavelength_nm=wavelength_nm)
    w = outside_number(v_number=v, azimuthal=0, radial=1)
    outside, above = scaled_k(0, w)
    radius = 0.5 * np.asarray(core_um, float)
    beta = _propagation_per_um(np.sqrt(v * v - w * w), radius, na, clad_index, wavelength_nm)
    slope = (v * v - w * w) * (outside / above) ** 2 / (beta * radius**2)
    return slope * core_spread_fraction / np.sqrt(2.0)


def peak_exchange(*, coupling_per_um: Numbers, mismatch_per_um: Numbers) -> Numbers:
    """Largest share that passes between two cores: kappa^2/(kappa^2 + (dbeta/2)^2); along a long fiber half of it.

    `mismatch_per_um` is half the difference of the propagation constants. References: closed_form.

    >>> peak_exchange(coupling_per_um=1e-4, mismatch_per_um=1e-4)
    0.5
    """
    positive(coupling_per_um=coupling_per_um)
    return 1.0 / (1.0 + (mismatch_per_um / coupling_per_um) ** 2)


def mean_exchange(*, coupling_over_spread: Numbers) -> np.ndarray:
    """Mean of the peak exchange of two cores over a normal mismatch of standard deviation s.

    sqrt(pi/2) r exp(r^2/2) erfc(r/sqrt2), r = kappa/s. References: closed_form.

    >>> [round(float(mean_exchange(coupling_over_spread=r)), 4) for r in (0.1, 1.0)]
    [0.1159, 0.6557]
    """
    from scipy.special import erfcx

    not_negative(coupling_over_spread=coupling_over_spread)
    ratio = np.asarray(coupling_over_spread, float)
    return np.sqrt(np.pi / 2.0) * ratio * erfcx(ratio / np.sqrt(2.0))


def exchange_mtf(
    *, neighbor_share: Numbers, frequency_per_um: Numbers, pitch_um: Numbers, direction_deg: Numbers
) -> np.ndarray:
    """Contrast left when each core gives `neighbor_share` to each of its six neighbors (pair law).

    w0 + w1 sum over j of cos(2 pi f p cos(phi - 60 j)), w0 = 1 - 6 w1: w0 - 2 w1 at the lattice limit
    across the rows (30 degrees), w0 - 3 w1 at that along a row (0). For 6 w1 below about a tenth;
    it turns negative where `coupled` would not. References: closed_form.

    >>> limit = dict(frequency_per_um=0.057735, pitch_um=10.0, direction_deg=30.0)
    >>> round(float(exchange_mtf(neighbor_share=0.01, **limit)), 4)
    0.92
    """
    not_negative(neighbor_share=neighbor_share, frequency_per_um=frequency_per_um)
    positive(pitch_um=pitch_um)
    phase = 2.0 * np.pi * np.asarray(frequency_per_um, float) * pitch_um
    turns = rad_from_deg(np.asarray(direction_deg, float))
    around = sum(2.0 * np.cos(phase * np.cos(turns - turn)) for turn in (0.0, np.pi / 3.0, 2.0 * np.pi / 3.0))
    return 1.0 - neighbor_share * (6.0 - around)


def power_period_um(*, coupling_per_um: Numbers) -> Numbers:
    """Length over which two equal cores swap their light and take it back: pi/kappa. References: closed_form.

    >>> round(power_period_um(coupling_per_um=1e-3))
    3142
    """
    positive(coupling_per_um=coupling_per_um)
    return np.pi / coupling_per_um


def tewari_thyagarajan_1986_coupling_per_um(
    *, core_um: Numbers, pitch_um: Numbers, na: Numbers, clad_index: Numbers, wavelength_nm: Numbers
) -> np.ndarray:
    """Coupling of two equal cores by a fitted formula, for V 1.5 to 2.5 and p/a 2 to 4.5.

    pi V/(2 k n2 a^2) exp(-(c0 + c1 s + c2 s^2)), s = p/a, with c0 = 5.2789 - 3.663 V + 0.3841 V^2,
    c1 = -0.7769 + 1.2252 V - 0.0152 V^2, c2 = -0.0175 - 0.0064 V + 0.0009 V^2.
    Notes: a rival for `coupling_per_um`, which has no such bounds and agrees with the fields' overlap to
    0.5 %. The authors state 1 %; with the coefficients at hand it strays up to 3.2 % in that range.
    References: tewari_thyagarajan_1986.

    >>> kappa = tewari_thyagarajan_1986_coupling_per_um(
    ...     core_um=6.0, pitch_um=10.0, na=0.159663, clad_index=1.444, wavelength_nm=1550.0)
    >>> round(float(power_period_um(coupling_per_um=kappa)))
    4735
    """
    v = v_number(core_um=core_um, na=na, wavelength_nm=wavelength_nm)
    radius = 0.5 * np.asarray(core_um, float)
    s = pitch_um / radius
    c0 = 5.2789 - 3.663 * v + 0.3841 * v**2
    c1 = -0.7769 + 1.2252 * v - 0.0152 * v**2
    c2 = -0.0175 - 0.0064 * v + 0.0009 * v**2
    wave = 2.0 * np.pi * clad_index / um_from_nm(wavelength_nm)
    return np.pi * v / (2.0 * wave * radius**2) * np.exp(-(c0 + c1 * s + c2 * s**2))
