"""Off the axis: how the lens's cone narrows toward the edge, what light is left there, and what the cores take of it.

A lens takes from each direction what passes its entrance pupil, and spreads it as its mapping says:
both follow from the conservation of etendue, whatever lies between. The cone at the image is then an
ellipse in direction cosines, narrower along the radius (meridional) than across it (sagittal).
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np

from optics.image.objective import accepted_fraction, chief_ray_sine
from optics.spec import not_negative, require, within
from optics.units import Numbers, rad_from_deg


@dataclass(frozen=True, slots=True)
class EdgeCone:
    """Half-widths of the cone (in sine) over those on axis; diffraction's cutoff falls by the same."""

    meridional_ratio: np.ndarray
    sagittal_ratio: np.ndarray


def edge_cone(*, half_angle_deg: Numbers, mapping: Literal["tan", "f_theta"]) -> EdgeCone:
    """The cone at the image of a point seen at an angle from the axis, against that on axis.

    With the mapping h(w) of unit focal length: cos w dw/dh along the radius, sin w/h across it. "tan": cos^3 w and
    cos w; "f_theta": cos w and sin w/w. For a round entrance pupil that stays the same, seen under its tilt; w in
    air, below 90. References: closed_form (etendue; skew invariant).

    >>> cone = edge_cone(half_angle_deg=30.0, mapping="tan")
    >>> round(float(cone.sagittal_ratio), 4), round(float(cone.meridional_ratio), 4)
    (0.866, 0.6495)
    """
    angle = np.asarray(half_angle_deg, float)
    require("half_angle_deg", angle, "at least 0 and below 90", (angle >= 0) & (angle < 90))
    w = rad_from_deg(angle)
    if mapping == "tan":
        return EdgeCone(np.cos(w) ** 3, np.cos(w))
    return EdgeCone(np.cos(w), np.sinc(w / np.pi))


def edge_light_ratio(*, half_angle_deg: Numbers, mapping: Literal["tan", "f_theta"]) -> np.ndarray:
    """Light on the image of an evenly bright target seen at an angle from the axis, over that on axis.

    The product of the cone's two ratios: cos^4 w for "tan", cos w sin w/w for "f_theta", which keeps more.
    References: closed_form (etendue).

    >>> [round(float(edge_light_ratio(half_angle_deg=30.0, mapping=one)), 4) for one in ("tan", "f_theta")]
    [0.5625, 0.827]
    """
    cone = edge_cone(half_angle_deg=half_angle_deg, mapping=mapping)
    return cone.meridional_ratio * cone.sagittal_ratio


def edge_acceptance_ratio(
    *, height_mm: Numbers, exit_pupil_mm: Numbers, core_na: Numbers, cone_sine: Numbers
) -> np.ndarray:
    """What cores at an image height take of the lens's tilted cone, over what those on axis take.

    A finite exit pupil tilts the chief ray by h/sqrt(h^2 + e^2); `accepted_fraction` of the tilted over the straight
    cone. 1 for a telecentric lens (e infinite). References: closed_form.

    >>> kept = edge_acceptance_ratio(height_mm=0.5, exit_pupil_mm=1.0, core_na=0.39, cone_sine=0.125)
    >>> round(float(kept), 2)
    0.2
    """
    tilt = chief_ray_sine(height_mm=height_mm, exit_pupil_mm=exit_pupil_mm)
    straight = accepted_fraction(core_na=core_na, cone_sine=cone_sine, tilt_sine=0.0)
    return accepted_fraction(core_na=core_na, cone_sine=cone_sine, tilt_sine=tilt) / straight


def edge_f_number(*, f_number: Numbers, half_angle_deg: Numbers, mapping: Literal["tan", "f_theta"]) -> np.ndarray:
    """Working f-number along the radius at an angle from the axis, where it is highest: N over the meridional ratio.

    For the contrast of bars that lie across the radius; along it take the sagittal ratio.
    References: closed_form (etendue).

    >>> round(float(edge_f_number(f_number=4.0, half_angle_deg=30.0, mapping="tan")), 3)
    6.158
    """
    return np.asarray(f_number, float) / edge_cone(half_angle_deg=half_angle_deg, mapping=mapping).meridional_ratio


def edge_snr(
    *, signal_ratio: Numbers, even_snr: Numbers, shot_share: Numbers, transmission_spread: Numbers
) -> np.ndarray:
    """Signal to noise of a core that gets `signal_ratio` of the light that gives `even_snr` (cores all alike).

    1/snr^2 = spread^2 + (q sigma + 1 - sigma)/(q even)^2, q the ratio: of the noise without the cores' spread the
    share `shot_share` (sigma, in variance) grows with the light, the rest stays. 0 in the dark.
    References: emva_1288; closed_form.

    >>> float(edge_snr(signal_ratio=0.25, even_snr=20.0, shot_share=1.0, transmission_spread=0.0))
    10.0
    """
    not_negative(signal_ratio=signal_ratio, transmission_spread=transmission_spread)
    within(0.0, 1.0, shot_share=shot_share)
    q, shot = np.asarray(signal_ratio, float), np.asarray(shot_share, float)
    signal = q * even_snr
    noise = np.sqrt((transmission_spread * signal) ** 2 + shot * q + 1.0 - shot)
    return np.where(q > 0, signal / np.where(q > 0, noise, 1.0), 0.0)
