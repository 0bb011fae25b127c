"""Coverage in closed form: where the light of a port off the axis first reaches the axis, fills it, and glints."""

import numpy as np

from optics.spec import not_negative, require
from optics.units import Numbers, rad_from_deg


def _tangent(name: str, half_angle_deg: Numbers) -> np.ndarray:
    angle = np.asarray(half_angle_deg, float)
    require(name, angle, "above 0 and below 90", (angle > 0) & (angle < 90))
    return np.tan(rad_from_deg(angle))


def first_lit_mm(*, offset_mm: Numbers, port_radius_mm: Numbers, half_angle_deg: Numbers) -> np.ndarray:
    """Distance at which the light of a facing port first reaches the axis: (s - a)/tan(alpha), 0 if it covers it.

    Parameters: offset_mm s of the port's center, port_radius_mm a (radius), half_angle_deg alpha of the exit
    cone in the medium in front. References: closed_form.

    >>> round(float(first_lit_mm(offset_mm=2.0, port_radius_mm=0.5, half_angle_deg=30.0)), 3)
    2.598
    """
    not_negative(offset_mm=offset_mm, port_radius_mm=port_radius_mm)
    gap = np.maximum(np.asarray(offset_mm) - port_radius_mm, 0.0)
    return gap / _tangent("half_angle_deg", half_angle_deg)


def fully_lit_mm(*, offset_mm: Numbers, port_radius_mm: Numbers, half_angle_deg: Numbers) -> np.ndarray:
    """Distance from which the whole of a facing port lights the axis: (s + a)/tan(alpha).

    Parameters as for `first_lit_mm`. References: closed_form.

    >>> round(float(fully_lit_mm(offset_mm=2.0, port_radius_mm=0.5, half_angle_deg=30.0)), 3)
    4.33
    """
    not_negative(offset_mm=offset_mm, port_radius_mm=port_radius_mm)
    return (np.asarray(offset_mm) + port_radius_mm) / _tangent("half_angle_deg", half_angle_deg)


def fills_from_mm(
    *, offset_mm: Numbers, port_radius_mm: Numbers, half_angle_deg: Numbers, field_half_angle_deg: Numbers
) -> np.ndarray:
    """Distance from which one port's light reaches the whole field of view; infinite where it never does.

    The far rim of the field, z tan(omega) away on the other side, is lit from z (tan alpha - tan omega) = s - a;
    with alpha at most omega never. The field's cone starts at the distal face. References: closed_form.

    >>> float(fills_from_mm(offset_mm=2.0, port_radius_mm=0.5, half_angle_deg=30.0, field_half_angle_deg=30.0))
    inf
    """
    not_negative(offset_mm=offset_mm, port_radius_mm=port_radius_mm)
    lead = _tangent("half_angle_deg", half_angle_deg) - _tangent("field_half_angle_deg", field_half_angle_deg)
    gap = np.asarray(offset_mm, float) - port_radius_mm
    return np.where(lead > 0, np.maximum(gap, 0.0) / np.where(lead > 0, lead, 1.0), np.where(gap <= 0, 0.0, np.inf))


def glint_distance_mm(*, offset_mm: Numbers, field_half_angle_deg: Numbers) -> np.ndarray:
    """Distance below which the mirror image of a port's center in a facing target lies outside the field of view.

    s/(2 tan omega): the mirror shows the port at s, twice as far away. Closer, the glint is out of the picture.
    References: closed_form.

    >>> round(float(glint_distance_mm(offset_mm=2.0, field_half_angle_deg=30.0)), 4)
    1.7321
    """
    not_negative(offset_mm=offset_mm)
    return np.asarray(offset_mm) / (2 * _tangent("field_half_angle_deg", field_half_angle_deg))
