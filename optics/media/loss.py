"""Spectral attenuation of a drawn fiber, and how it grows as fibers get thinner."""

import numpy as np

from optics.spec import not_negative, positive, require
from optics.units import Numbers

# Nepers of power in a decibel; exp is three times as fast as a power of ten on the big arrays here.
NEPER_PER_DB = np.log(10.0) / 10.0


def attenuation_transmission(*, loss_db_m: Numbers, length_m: Numbers, stretch: Numbers) -> Numbers:
    """What a length of fiber lets through, for a ray whose path is `stretch` times the axis.

    10^(-alpha L sec(theta)/10), alpha the spectral loss in dB/m of the drawn fiber, L in m, stretch
    1 or more; all broadcast, so loss [wavelength] and stretch [bin, 1] give [bin, wavelength].
    Raises OutOfRange below these bounds. Source: closed_form.

    >>> round(float(attenuation_transmission(loss_db_m=0.5, length_m=2.0, stretch=1.0)), 4)
    0.7943
    """
    not_negative(loss_db_m=loss_db_m, length_m=length_m)
    require("stretch", stretch, "1 or more", np.asarray(stretch) >= 1.0)
    return np.exp(np.asarray(loss_db_m) * (-NEPER_PER_DB * np.asarray(length_m) * np.asarray(stretch)))


def wall_scaled_loss_db_m(
    *, bulk_db_m: Numbers, reference_db_m: Numbers, reference_um: Numbers, core_um: Numbers
) -> Numbers:
    """Loss of a core of another diameter than the one measured, when the excess is lost at the wall.

    alpha(d) = alpha_bulk + (alpha_ref - alpha_bulk) d_ref/d: the bounces per meter go as 1/d. Holds
    while the wall is as good as in the fiber measured. `reference_db_m` of a core of
    `reference_um`, not below the `bulk_db_m` of the glass. Raises OutOfRange. Source:
    flint_fiber_1971 (0.45 dB/m in a fiber of 70 um whose glass had 0.05).

    >>> round(wall_scaled_loss_db_m(bulk_db_m=0.05, reference_db_m=0.45, reference_um=70.0, core_um=35.0), 3)
    0.85
    """
    not_negative(bulk_db_m=bulk_db_m)
    positive(reference_um=reference_um, core_um=core_um)
    require("reference_db_m", reference_db_m, "not below bulk_db_m", np.asarray(reference_db_m) >= bulk_db_m)
    return bulk_db_m + (reference_db_m - bulk_db_m) * (reference_um / core_um)
