"""The field of view: angles from the image's size, under water, on the target, and as standards measure it."""

from typing import Literal

import numpy as np

from optics.spec import not_negative, positive, require
from optics.units import Numbers, deg_from_rad, rad_from_deg

Mapping = Literal["tan", "f_theta"]


def field_half_angle_deg(*, image_mm: Numbers, image_distance_mm: Numbers, mapping: Mapping) -> np.ndarray:
    """Half field angle in air of an image of diameter `image_mm`, lens to image `image_distance_mm`.

    "tan": atan(D/2v); "f_theta": D/2v in radians, below 90 degrees. With the focal length in place
    of v the angle comes out 5 % large at a focus of 20 f. References: closed_form.

    >>> round(float(field_half_angle_deg(image_mm=2.0, image_distance_mm=1.0, mapping="tan")), 6)
    45.0
    """
    positive(image_mm=image_mm, image_distance_mm=image_distance_mm)
    height = np.asarray(image_mm, float) / (2.0 * np.asarray(image_distance_mm, float))
    if mapping == "tan":
        return deg_from_rad(np.arctan(height))
    wide = height < np.pi / 2
    require("image_mm", image_mm, "below pi times image_distance_mm for an f_theta lens", wide)
    return deg_from_rad(height)


def refracted_half_angle_deg(*, half_angle_deg: Numbers, index: Numbers) -> np.ndarray:
    """The half field behind a flat window in a medium: sin w' = sin w/n.

    References: closed_form (Snell).

    >>> round(float(refracted_half_angle_deg(half_angle_deg=45.0, index=1.333)), 2)
    32.04
    """
    not_negative(half_angle_deg=half_angle_deg)
    require("half_angle_deg", half_angle_deg, "below 90", np.asarray(half_angle_deg) < 90)
    require("index", index, "1 or more", np.asarray(index) >= 1)
    return deg_from_rad(np.arcsin(np.sin(rad_from_deg(half_angle_deg)) / index))


def field_radius_mm(
    *, half_angle_deg: Numbers, distance_mm: Numbers, pupil_depth_mm: Numbers, index: Numbers
) -> np.ndarray:
    """Radius of the field on a plane `distance_mm` in front of the flat face, in a medium of `index`.

    depth tan w + d tan w', with w the half field in air and sin w' = sin w/n.
    References: closed_form.

    >>> round(float(field_radius_mm(half_angle_deg=45.0, distance_mm=20.0, pupil_depth_mm=2.0, index=1.0)), 6)
    22.0
    """
    not_negative(distance_mm=distance_mm, pupil_depth_mm=pupil_depth_mm)
    inside = rad_from_deg(refracted_half_angle_deg(half_angle_deg=half_angle_deg, index=index))
    return pupil_depth_mm * np.tan(rad_from_deg(half_angle_deg)) + distance_mm * np.tan(inside)


def field_from_planes_deg(
    *, near_radius_mm: Numbers, far_radius_mm: Numbers, near_mm: Numbers, far_mm: Numbers
) -> np.ndarray:
    """Full field angle from the radii seen on two planes: 2 atan((r2 - r1)/(d2 - d1)); free of the pupil's place.

    References: iso_8600_3.

    >>> round(float(field_from_planes_deg(near_radius_mm=11.0, far_radius_mm=20.0, near_mm=10.1, far_mm=20.0)), 2)
    84.55
    """
    require("far_mm", far_mm, "beyond near_mm", np.asarray(far_mm) > np.asarray(near_mm))
    larger = np.asarray(far_radius_mm) >= np.asarray(near_radius_mm)
    require("far_radius_mm", far_radius_mm, "no less than near_radius_mm", larger)
    slope = (np.asarray(far_radius_mm, float) - near_radius_mm) / (np.asarray(far_mm, float) - near_mm)
    return 2.0 * deg_from_rad(np.arctan(slope))


def field_from_window_deg(*, radius_mm: Numbers, distance_mm: Numbers) -> np.ndarray:
    """Full field angle as if the pupil lay in the window: 2 atan(r/d); overstates a lens whose pupil lies deeper.

    References: iso_8600_3 (the method it is compared with).

    >>> round(float(field_from_window_deg(radius_mm=20.0, distance_mm=20.0)), 6)
    90.0
    """
    not_negative(radius_mm=radius_mm)
    positive(distance_mm=distance_mm)
    return 2.0 * deg_from_rad(np.arctan(np.asarray(radius_mm, float) / distance_mm))


def edge_distortion_ratio(*, half_angle_deg: Numbers, index: Numbers, mapping: Mapping) -> np.ndarray:
    """Distortion at the edge of the field on a flat target: image scale there over that at the center, less 1.

    h(w)/(n tan w') - 1 with h = tan w or w, w the half field in air and sin w' = sin w/n: 0 for a
    "tan" lens in air, -10 % for f_theta at 31.5 degrees; a flat window under water takes most of a
    barrel away and turns "tan" into a pincushion. References: closed_form.

    >>> round(float(edge_distortion_ratio(half_angle_deg=31.5, index=1.0, mapping="f_theta")), 3)
    -0.103
    """
    positive(half_angle_deg=half_angle_deg)
    outside = rad_from_deg(np.asarray(half_angle_deg, float))
    inside = rad_from_deg(refracted_half_angle_deg(half_angle_deg=half_angle_deg, index=index))
    height = np.tan(outside) if mapping == "tan" else outside
    return height / (index * np.tan(inside)) - 1.0
