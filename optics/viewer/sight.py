"""The line of sight: where each point of the image looks on the target, and how far away that is.

From a point of the image through the middle of the pupil, out of the flat face into the medium, onto
a plane or the wall of a bore. Image and target are counted upright, both from the axis.
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np

from optics.image.field import field_half_angle_deg, refracted_half_angle_deg
from optics.image.objective import apparent_distance_mm
from optics.spec import positive
from optics.units import Flags, Numbers, rad_from_deg

LEVEL = 1e-9  # the least tangent of a ray that still counts as going outward


@dataclass(frozen=True, slots=True)
class Sight:
    """Where on the target, whether it meets it at all, the angle in air, and the distance as the pupil sees it.

    On a plane (u, v) as in `scene.irradiance`; on a wall u runs around and v is the depth. 0 where nothing is met.
    """

    u_mm: np.ndarray
    v_mm: np.ndarray
    meets: Flags
    half_angle_deg: np.ndarray
    distance_mm: np.ndarray


def sight_on_plane(
    *,
    x_mm: Numbers,
    y_mm: Numbers,
    image_distance_mm: Numbers,
    mapping: Literal["tan", "f_theta"],
    distance_mm: Numbers,
    pupil_depth_mm: Numbers,
    index: Numbers,
    tilt_deg: Numbers,
) -> Sight:
    """Points of the image on a plane through (0, 0, distance), tilted about the y axis so that +x leans away.

    The ray leaves the face at depth tan w and goes on at sin w' = sin w/n. Points whose rays run off over the
    plane's horizon meet nothing. References: closed_form (Snell; perspective).

    >>> seen = sight_on_plane(x_mm=1.0, y_mm=0.0, image_distance_mm=1.0, mapping="tan", distance_mm=20.0,
    ...     pupil_depth_mm=2.0, index=1.0, tilt_deg=0.0)
    >>> round(float(seen.u_mm), 9), round(float(seen.distance_mm), 9)
    (22.0, 22.0)
    """
    along_x, along_y, half, start, slope = _ray(x_mm, y_mm, image_distance_mm, mapping, pupil_depth_mm, index)
    tilt = rad_from_deg(np.asarray(tilt_deg, float))
    level = 1.0 - slope * along_x * np.tan(tilt)  # of the ray's way along the axis, against the plane's slope
    meets = level > LEVEL
    depth = (distance_mm + start * along_x * np.tan(tilt)) / np.where(meets, level, 1.0)
    meets = meets & (depth > 0)
    away = np.where(meets, start + slope * depth, 0.0)
    depth = np.where(meets, depth, distance_mm)
    seen = apparent_distance_mm(distance_mm=depth, pupil_depth_mm=pupil_depth_mm, index=index)
    return Sight(away * along_x / np.cos(tilt), away * along_y, meets, half, seen)


def sight_on_bore(
    *,
    x_mm: Numbers,
    y_mm: Numbers,
    image_distance_mm: Numbers,
    mapping: Literal["tan", "f_theta"],
    bore_mm: Numbers,
    pupil_depth_mm: Numbers,
    index: Numbers,
    farthest_mm: Numbers,
) -> Sight:
    """Points of the image on the wall of a bore around the axis, as far as `farthest_mm` deep.

    u = azimuth x bore/2, v = depth = (bore/2 - depth of the pupil x tan w)/tan w'. The middle looks down the bore and
    meets nothing. References: closed_form (Snell).

    >>> seen = sight_on_bore(x_mm=1.0, y_mm=0.0, image_distance_mm=1.0, mapping="tan", bore_mm=20.0,
    ...     pupil_depth_mm=0.0, index=1.0, farthest_mm=100.0)
    >>> round(float(seen.v_mm), 9)
    10.0
    """
    positive(bore_mm=bore_mm, farthest_mm=farthest_mm)
    along_x, along_y, half, start, slope = _ray(x_mm, y_mm, image_distance_mm, mapping, pupil_depth_mm, index)
    radius = 0.5 * np.asarray(bore_mm, float)
    depth = (radius - start) / np.maximum(slope, LEVEL)
    meets = (depth > 0) & (depth <= farthest_mm)
    depth = np.where(meets, depth, farthest_mm)
    seen = apparent_distance_mm(distance_mm=depth, pupil_depth_mm=pupil_depth_mm, index=index)
    around = np.arctan2(along_y, along_x) * radius
    return Sight(np.where(meets, around, 0.0), np.where(meets, depth, 0.0), meets, half, seen)


def _ray(x_mm, y_mm, image_distance_mm, mapping, pupil_depth_mm, index):
    """Direction around the axis (cosine, sine), angle in air, height at the face, and slope in the medium."""
    x, y = np.broadcast_arrays(np.asarray(x_mm, float), np.asarray(y_mm, float))
    height = np.hypot(x, y)
    safe = np.where(height > 0, height, 1.0)
    half = field_half_angle_deg(
        image_mm=np.maximum(2.0 * height, LEVEL), image_distance_mm=image_distance_mm, mapping=mapping
    )
    inside = refracted_half_angle_deg(half_angle_deg=half, index=index)
    start = pupil_depth_mm * np.tan(rad_from_deg(half))
    return np.where(height > 0, x / safe, 1.0), y / safe, half, start, np.tan(rad_from_deg(inside))
