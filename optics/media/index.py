"""Refractive index over wavelength, each medium by its source's own formula within its valid range.

Glasses, fused silica and PMMA are given against air, water and air against vacuum, as their
sources do; the difference is a factor of 1.0003.
"""

from functools import lru_cache
from typing import NamedTuple

import numpy as np

from optics.spec import OutOfRange, within
from optics.tables import nearest, preset
from optics.units import Numbers, um_from_nm

MEDIA = ("air", "water", "oil", "fused_silica", "pmma", "borosilicate_crown", "lead_silicate_flint")
D_LINE_NM = 587.5618  # helium d, where n_d is quoted


class _Dispersion(NamedTuple):
    """n^e = constant + sum of b lambda^2/(lambda^2 - c) + sum of a lambda^p, lambda in um."""

    exponent: float
    constant: float
    strength: np.ndarray
    resonance_um2: np.ndarray
    term: np.ndarray
    term_exponent: np.ndarray
    lowest_nm: float
    highest_nm: float


def refractive_index(*, medium: str, wavelength_nm: Numbers) -> Numbers:
    """Refractive index of one of `MEDIA` at a wavelength in nm (any shape).

    n^e = constant + sum of b lambda^2/(lambda^2 - c) + sum of a lambda^p with the coefficients of
    presets/media/: Sellmeier (e = 2), a polynomial of n^2, Cauchy (e = 1) or the sum for air.
    Raises OutOfRange for an unknown medium and outside the range of its source. Sources:
    malitson_1965, beadie_2015, open_index_data, daimon_masumura_2007, ciddor_1996.

    >>> [round(float(refractive_index(medium=name, wavelength_nm=D_LINE_NM)), 4) for name in MEDIA]
    [1.0003, 1.3334, 1.4771, 1.4585, 1.4925, 1.5168, 1.62]
    """
    law = _dispersion(medium)
    within(law.lowest_nm, law.highest_nm, **{f"wavelength_nm for {medium}": wavelength_nm})
    square = np.square(um_from_nm(np.asarray(wavelength_nm, dtype=float)))[..., None]
    resonances = (law.strength * square / (square - law.resonance_um2)).sum(axis=-1)
    powers = (law.term * square ** (law.term_exponent / 2)).sum(axis=-1)
    return (law.constant + resonances + powers) ** (1.0 / law.exponent)


def valid_range_nm(*, medium: str) -> tuple[float, float]:
    """The shortest and the longest wavelength that the medium's formula holds for."""
    law = _dispersion(medium)
    return law.lowest_nm, law.highest_nm


@lru_cache(maxsize=16)
def _dispersion(medium: str) -> _Dispersion:
    """The formula of one medium, from its preset."""
    if medium not in MEDIA:
        raise OutOfRange(
            f"medium is {medium!r}{nearest(str(medium), list(MEDIA))}; it must be one of {', '.join(MEDIA)}."
        )
    values = {key: entry.value for key, entry in preset("media", medium).values.items()}
    arrays = (np.array(values.get(key, ())) for key in ("strength", "resonance_um2", "term", "term_exponent"))
    return _Dispersion(values["exponent"], values["constant"], *arrays, values["lowest_nm"], values["highest_nm"])
