"""What the ends and the wall of a guide do to its light: tapers, tilted faces, reflections that lose a little."""

import numpy as np

from optics.media.face import ray_face_transmission
from optics.spec import not_negative, positive, require, within
from optics.units import Numbers, deg_from_rad, m_from_um, rad_from_deg

# Gauss nodes over the offset of a chord from the axis: how often a ray meets the wall depends on it.
_AZIMUTHS = (np.arange(16) + 0.5) * np.pi / 16  # half a turn; the other half mirrors it
_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(12)
_HALF_CHORD = np.sqrt(1 - _NODES**2)
_CHORD_WEIGHT = _WEIGHTS * _HALF_CHORD / (_WEIGHTS * _HALF_CHORD).sum()


def tapered_na(*, na: Numbers, from_mm: Numbers, to_mm: Numbers) -> Numbers:
    """NA after a slow taper: NA d stays (etendue is conserved): NA1 d1 = NA2 d2.

    Holds for tapers long against their width. Above 1 such light cannot leave into air.
    References: closed_form (Lagrange invariant).

    >>> round(tapered_na(na=0.22, from_mm=1.0, to_mm=3.0), 4)
    0.0733
    """
    positive(na=na, from_mm=from_mm, to_mm=to_mm)
    return na * from_mm / to_mm


def tilt_deviation_deg(*, core_index: Numbers, outside_index: Numbers, tilt_deg: Numbers) -> np.ndarray:
    """How far a face ground at an angle turns the axis of the beam: asin(n1 sin(tilt)/n0) - tilt.

    Raises OutOfRange where the axial ray is totally reflected. References: closed_form (Snell's law).

    >>> round(float(tilt_deviation_deg(core_index=1.5, outside_index=1.0, tilt_deg=10.0)), 2)
    5.1
    """
    positive(core_index=core_index, outside_index=outside_index)
    within(0.0, 89.0, tilt_deg=tilt_deg)
    sine = np.asarray(core_index) / outside_index * np.sin(rad_from_deg(np.asarray(tilt_deg, float)))
    require("tilt_deg", tilt_deg, "small enough that the axial ray gets out", sine < 1)
    return deg_from_rad(np.arcsin(sine)) - tilt_deg


def tilted_face_transmission(
    *, core_index: Numbers, outside_index: Numbers, ray_na: Numbers, tilt_deg: Numbers
) -> np.ndarray:
    """Transmission of a face ground at an angle for rays of one NA, averaged over their azimuth, unpolarized.

    The ray meets the face at i with cos i = cos(theta) cos(tilt) + sin(theta) sin(tilt) cos(azimuth); where
    n1 sin(i) exceeds the outside index it is totally reflected. References: fresnel_equations; closed_form.

    >>> round(float(tilted_face_transmission(core_index=1.5, outside_index=1.0, ray_na=0.0, tilt_deg=0.0)), 2)
    0.96
    """
    sine = (np.asarray(ray_na, float) / core_index)[..., None]
    tilt = rad_from_deg(np.asarray(tilt_deg, float))[..., None]
    cosine = np.sqrt(1 - sine**2) * np.cos(tilt) + sine * np.sin(tilt) * np.cos(_AZIMUTHS)
    met = np.asarray(core_index)[..., None] * np.sqrt(np.maximum(1 - cosine**2, 0.0))
    index, outside = np.asarray(core_index)[..., None], np.asarray(outside_index)[..., None]
    return ray_face_transmission(core_index=index, outside_index=outside, ray_na=met).mean(axis=-1)


def reflection_transmission(
    *, loss_fraction: Numbers, length_m: Numbers, core_um: Numbers, core_index: Numbers, ray_na: Numbers
) -> np.ndarray:
    """What is left of rays of one angle when each reflection at the wall loses a little.

    A ray at theta whose chord across the core is c meets the wall every c/tan(theta) along the axis, so
    T = mean of (1 - p)^(L tan(theta)/c) over uniformly lit chords (weight c). The mean number of
    reflections is (4/pi) L tan(theta)/d, skew rays included.

    Parameters: loss_fraction p, 0 to below 1; ray_na = n sin(theta), below core_index; all broadcast.
    References: closed_form.

    >>> round(float(reflection_transmission(loss_fraction=1e-5, length_m=2.0, core_um=50.0, core_index=1.62, ray_na=0.4)), 3)
    0.88
    """
    not_negative(length_m=length_m, ray_na=ray_na)
    positive(core_um=core_um, core_index=core_index)
    loss = np.asarray(loss_fraction, float)
    require("loss_fraction", loss, "from 0 to below 1", (loss >= 0) & (loss < 1))
    sine = np.asarray(ray_na, float) / core_index
    require("ray_na", ray_na, "below the core index", sine < 1)
    across = length_m * sine / np.sqrt(1 - sine**2) / m_from_um(core_um)
    kept = np.log1p(-loss)
    return (np.exp((kept * across)[..., None] / _HALF_CHORD) * _CHORD_WEIGHT).sum(axis=-1)
