"""The lamp: how much light, of which color, from how small a place, into which cone."""

import numpy as np

from optics.spec import Curve, Spec, quantity
from optics.units import Numbers

# Flux of a lamp is stated in exactly one of two ways; fiberscope.py turns this into a sentence.
FLUX_KEYS = ("flux_lm", "flux_w")


class Lamp(Spec):
    """A lamp: spectrum, flux, emitting area and cone. Its radiance bounds everything after it."""

    flux_lm: float | None = quantity(
        "luminous flux that the lamp gives; absent: flux_w is given",
        default=None,
        gt=0,
        usual=(20.0, 3000.0),
        common=True,
    )
    flux_w: float | None = quantity(
        "radiant flux within the spectrum's range, for lamps outside the visible; absent: flux_lm is given",
        default=None,
        gt=0,
        usual=(0.1, 20.0),
    )
    emitter_mm: float = quantity("diameter of the disc that has the emitter's area", gt=0, usual=(0.3, 5.0))
    cone_na: float = quantity(
        "sine of the half-angle that the lamp fills in air; 1 = Lambertian", gt=0, le=1, usual=(0.2, 1.0)
    )
    spectrum: Curve = quantity("relative spectral power, per nm")


class Filter(Spec):
    """A filter between lamp and guide (hot mirror, pass band): its transmission spectrum."""

    transmission: Curve = quantity("spectral transmission, 0 to 1")


def etendue_mm2_sr(*, diameter_mm: Numbers, na: Numbers) -> Numbers:
    """Etendue of a uniformly filled disc: G = pi A NA^2 with A = pi D^2 / 4 (NA = n sin theta).

    Reference: closed form (definition of etendue for a cone about the normal).

    >>> round(etendue_mm2_sr(diameter_mm=1.0, na=0.5), 4)
    0.6169
    """
    return np.pi * (np.pi / 4 * diameter_mm**2) * na**2


def luminance_cd_mm2(*, flux_lm: Numbers, diameter_mm: Numbers, na: Numbers) -> Numbers:
    """Mean luminance of a lamp, candela per square millimeter: flux over etendue.

    >>> round(luminance_cd_mm2(flux_lm=250.0, diameter_mm=(4 / np.pi) ** 0.5, na=1.0), 1)
    79.6
    """
    return flux_lm / etendue_mm2_sr(diameter_mm=diameter_mm, na=na)
