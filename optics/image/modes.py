"""Guided modes of a weakly guiding step-index core: LP_lm, by V, U and W.

V = pi d NA/lambda; U and W = sqrt(V^2 - U^2) are the transverse numbers inside and outside, from
U J_(l+1)(U)/J_l(U) = W K_(l+1)(W)/K_l(W). A pair solved once serves every core: only V counts.
"""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from optics.spec import positive, require
from optics.units import AnyUnit, Numbers, um_from_nm

# The modes with a cutoff below V = 10.2: (azimuthal l, radial m). Enough where V or the launched
# cone is small; see `optics.image.coupled` for what is left out above.
MODES = (
    *((0, 1), (1, 1), (2, 1), (0, 2), (3, 1), (1, 2), (4, 1), (2, 2)),
    *((0, 3), (5, 1), (3, 2), (1, 3), (6, 1), (4, 2), (7, 1)),
)
STEPS = 48  # of the bisection: the bracket is below 4, so that 1e-14 is left
CONE_STEP = 0.25  # of the launch table, in units of 1/radius
CONE_NODES = 65


@dataclass(frozen=True, slots=True)
class ModeTable:
    """One mode sampled over W: V at each node, and the share of its light within a launched cone."""

    azimuthal: int
    cutoff_v_number: float
    v_number: np.ndarray
    w: AnyUnit
    launched_fraction: np.ndarray


def bessel_j(order: int, x: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """J_l and J_(l+1) by upward recurrence; stable for x above about l, where all guided U lie."""
    from scipy.special import j0, j1

    low, high = j0(x), j1(x)
    for n in range(1, order + 1):
        low, high = high, 2.0 * n / x * high - low
    return low, high


def scaled_k(order: int, x: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """exp(x) K_l and exp(x) K_(l+1) by upward recurrence (always stable)."""
    from scipy.special import k0e, k1e

    low, high = k0e(x), k1e(x)
    for n in range(1, order + 1):
        low, high = high, low + 2.0 * n / x * high
    return low, high


@lru_cache(maxsize=64)
def _zeros(azimuthal: int, radial: int) -> tuple[float, float]:
    """(cutoff, limit for large V) of U: zeros of J_(l-1) and of J_l."""
    from scipy.special import jn_zeros

    top = float(jn_zeros(azimuthal, radial)[-1])
    if azimuthal == 0:
        return (0.0 if radial == 1 else float(jn_zeros(1, radial - 1)[-1])), top
    return float(jn_zeros(azimuthal - 1, radial)[-1]), top


def _inside(azimuthal: int, radial: int, w: np.ndarray) -> np.ndarray:
    """U of a mode for given W: bisection between cutoff and limit, where the left side rises from 0 or -2l."""
    low, high = (np.full_like(w, end) for end in _zeros(azimuthal, radial))
    outside, above = scaled_k(azimuthal, w)
    for _ in range(STEPS):
        u = 0.5 * (low + high)
        here, next_one = bessel_j(azimuthal, u)
        # sign-safe form of U J_(l+1)/J_l < W K_(l+1)/K_l: J_l keeps one sign within the bracket
        small = (u * next_one * outside - w * above * here) * np.sign(here) < 0
        low, high = np.where(small, u, low), np.where(small, high, u)
    return 0.5 * (low + high)


def v_number(*, core_um: Numbers, na: Numbers, wavelength_nm: Numbers) -> Numbers:
    """Normalized frequency pi d NA/lambda. References: gloge_1971.

    >>> round(v_number(core_um=2.0, na=0.39, wavelength_nm=633.0), 3)
    3.871
    """
    positive(core_um=core_um, na=na, wavelength_nm=wavelength_nm)
    return np.pi * core_um * na / um_from_nm(wavelength_nm)


def cutoff_v_number(*, azimuthal: int, radial: int) -> float:
    """V above which LP_lm is guided: 0 for LP01, else a zero of J_(l-1). References: gloge_1971.

    >>> round(cutoff_v_number(azimuthal=1, radial=1), 4)
    2.4048
    """
    return _zeros(azimuthal, radial)[0]


def outside_number(*, v_number: Numbers, azimuthal: int, radial: int) -> np.ndarray:
    """W of a guided LP_lm for a given V, solved to 1e-10: the larger, the tighter the light is held.

    Raises OutOfRange at or below cutoff. References: gloge_1971.

    >>> round(float(outside_number(v_number=3.8714, azimuthal=0, radial=1)), 3)
    3.377
    """
    cutoff, top = _zeros(azimuthal, radial)
    require("v_number", v_number, f"above the cutoff {cutoff:g}", np.asarray(v_number) > cutoff)
    v = np.asarray(v_number, float)
    low, high = np.full(v.shape, cutoff), np.minimum(v, top)
    for _ in range(STEPS + 4):
        u = 0.5 * (low + high)
        w = np.sqrt(np.maximum(v * v - u * u, 1e-300))
        (here, next_one), (outside, above) = bessel_j(azimuthal, u), scaled_k(azimuthal, w)
        small = (u * next_one * outside - w * above * here) * np.sign(here) < 0
        low, high = np.where(small, u, low), np.where(small, high, u)
    return np.sqrt(np.maximum(v * v - (0.5 * (low + high)) ** 2, 0.0))


@lru_cache(maxsize=1)
def mode_tables() -> tuple[ModeTable, ...]:
    """All of `MODES` over W from 1e-6 to 200, with their launch; made once, in some ten milliseconds."""
    w = np.concatenate([np.geomspace(1e-6, 0.04, 24), np.expm1(np.arange(2, 134) * 0.04)])
    cone = np.arange(CONE_NODES) * CONE_STEP
    tables = []
    for azimuthal, radial in MODES:
        u = _inside(azimuthal, radial, w)
        launched = _launched(azimuthal, u, w, cone)
        tables.append(ModeTable(azimuthal, _zeros(azimuthal, radial)[0], np.hypot(u, w), w, launched))
    return tuple(tables)


def _launched(azimuthal: int, u: np.ndarray, w: np.ndarray, cone: np.ndarray) -> np.ndarray:
    """Share of a mode's far field within a cone, [W, cone]; q = k a sine.

    Far field (C J_l(q) - q J_(l+1)(q)) V^2/((U^2 - q^2)(W^2 + q^2)), C = W K_(l+1)/K_l, for a field
    of 1 at the core's edge; total power V^2 K_(l-1) K_(l+1)/(2 U^2 K_l^2) by Parseval.
    """
    from scipy.special import jv

    outside, above = scaled_k(azimuthal, w)
    below = above - 2.0 * azimuthal / w * outside  # K_(l-1)
    u2, w2 = (u * u)[:, None], (w * w)[:, None]
    gap = u2 - cone * cone
    gap = np.where(np.abs(gap) < 1e-9, 1e-9, gap)  # numerator and gap vanish together
    far = (w * above / outside)[:, None] * jv(azimuthal, cone) - cone * jv(azimuthal + 1, cone)
    density = cone * (far * (u2 + w2) / (gap * (w2 + cone * cone))) ** 2
    within = np.cumsum(0.5 * CONE_STEP * (density[:, 1:] + density[:, :-1]), axis=1)
    total = (u * u + w * w) * np.abs(below) * above / (2.0 * u * u * outside * outside)
    return np.concatenate([np.zeros((len(w), 1)), np.minimum(within / total[:, None], 1.0)], axis=1)
