"""The objective: where it focuses, how much it blurs, and which part of its cone the cores take.

A thin lens whose entrance pupil lies `pupil_depth_mm` behind the distal face. In every formula
`focus_mm` and `distance_mm` count **from the pupil**; `apparent_distance_mm` gets there from a
distance in front of the face. The field of view is in `field`, the contrast in `contrast`.
"""

from dataclasses import dataclass

import numpy as np

from optics.circles import overlap_area
from optics.image.field import Mapping
from optics.spec import Spec, not_negative, positive, quantity, require, within
from optics.units import Numbers, mm_from_um, um_from_mm


class Objective(Spec):
    """The lens at the tip that images the target onto the bundle (or onto the sensor at the tip)."""

    focal_mm: float = quantity("focal length", gt=0, usual=(0.3, 6.0), common=True)
    f_number: float = quantity("focal length over entrance pupil", gt=0.5, usual=(2.0, 11.0), common=True)
    focus_mm: float = quantity("sharpest distance, from the distal face", gt=0, usual=(3.0, 200.0), common=True)
    pupil_depth_mm: float = quantity(
        "entrance pupil behind the distal face; 0 where it lies in the face",
        default=0.0,
        ge=0,
        usual=(0.0, 3.0),
        source="assumed",
    )
    exit_pupil_mm: float | None = quantity(
        "exit pupil to bundle face; left out: telecentric, so that no chief ray is tilted",
        default=None,
        gt=0,
        usual=(1.0, 30.0),
    )
    mapping: Mapping = quantity(
        "image height over field angle: tan (no distortion) or f_theta (barrel)", default="tan", source="assumed"
    )
    transmission: float = quantity(
        "share of the light that the lens passes", default=0.85, gt=0, le=1, usual=(0.6, 0.98), source="assumed"
    )
    wavefront_error_nm: float | None = quantity(
        "rms wavefront error; left out: free of aberration", default=None, ge=0, usual=(0.0, 80.0)
    )


@dataclass(frozen=True, slots=True)
class DepthOfField:
    """Nearest and farthest distance from the pupil that stay within the blur; far may be infinite."""

    near_mm: np.ndarray
    far_mm: np.ndarray


def _beyond_focal(focal_mm: Numbers, focus_mm: Numbers) -> None:
    positive(focal_mm=focal_mm, focus_mm=focus_mm)
    require("focus_mm", focus_mm, "beyond the focal length", np.asarray(focus_mm) > np.asarray(focal_mm))


def apparent_distance_mm(*, distance_mm: Numbers, pupil_depth_mm: Numbers, index: Numbers) -> Numbers:
    """Where the pupil sees an object that lies `distance_mm` in front of the flat face, in a medium.

    d/n + depth (paraxial refraction at a flat window; the lateral size is kept). `index` is that
    of the medium, 1 in air. References: closed_form.

    >>> round(apparent_distance_mm(distance_mm=20.0, pupil_depth_mm=1.0, index=1.3334), 3)
    15.999
    """
    not_negative(distance_mm=distance_mm, pupil_depth_mm=pupil_depth_mm)
    require("index", index, "1 or more", np.asarray(index) >= 1)
    return distance_mm / index + pupil_depth_mm


def image_distance_mm(*, focal_mm: Numbers, focus_mm: Numbers) -> Numbers:
    """Lens to image: v = f s/(s - f), s > f from the pupil. References: closed_form (thin lens).

    >>> round(image_distance_mm(focal_mm=1.0, focus_mm=20.0), 5)
    1.05263
    """
    _beyond_focal(focal_mm, focus_mm)
    return focal_mm * focus_mm / (focus_mm - focal_mm)


def magnification(*, focal_mm: Numbers, focus_mm: Numbers) -> Numbers:
    """Image over object size: m = f/(s - f), s > f from the pupil. References: closed_form (thin lens).

    >>> round(magnification(focal_mm=1.0, focus_mm=21.0), 5)
    0.05
    """
    _beyond_focal(focal_mm, focus_mm)
    return focal_mm / (focus_mm - focal_mm)


def depth_of_field_mm(*, focal_mm: Numbers, f_number: Numbers, blur_um: Numbers, focus_mm: Numbers) -> DepthOfField:
    """Distances from the pupil between which the blur disc at the image stays below `blur_um`.

    H = f^2/(N c) + f; near = s(H - f)/(H + s - 2f); far = s(H - f)/(H - s), infinite from s = H on.
    Exact for a thin lens with its stop at the lens. References: closed_form.

    >>> depth = depth_of_field_mm(focal_mm=1.0, f_number=4.0, blur_um=10.0, focus_mm=10.0)
    >>> round(float(depth.near_mm), 3), round(float(depth.far_mm), 3)
    (7.353, 15.625)
    """
    _beyond_focal(focal_mm, focus_mm)
    positive(f_number=f_number, blur_um=blur_um)
    f, s = np.asarray(focal_mm, float), np.asarray(focus_mm, float)
    hyperfocal = f * f / (f_number * mm_from_um(blur_um)) + f
    ends = s < hyperfocal
    far = s * (hyperfocal - f) / np.where(ends, hyperfocal - s, 1.0)
    return DepthOfField(s * (hyperfocal - f) / (hyperfocal + s - 2 * f), np.where(ends, far, np.inf))


def defocus_blur_um(*, focal_mm: Numbers, f_number: Numbers, focus_mm: Numbers, distance_mm: Numbers) -> Numbers:
    """Diameter of the blur disc at the image of an object at `distance_mm`, the lens focused at `focus_mm`.

    c = (f/N) (f/(s - f)) |w - s|/w, both from the pupil; the inverse of `depth_of_field_mm`.
    Geometric: it holds where c is above the diffraction disc. References: closed_form.

    >>> round(float(defocus_blur_um(focal_mm=1.0, f_number=4.0, focus_mm=10.0, distance_mm=15.625)), 6)
    10.0
    """
    _beyond_focal(focal_mm, focus_mm)
    positive(f_number=f_number, distance_mm=distance_mm)
    blur_mm = focal_mm**2 / (f_number * (focus_mm - focal_mm)) * np.abs(distance_mm - focus_mm) / distance_mm
    return um_from_mm(blur_mm)


def working_f_number(
    *, focal_mm: Numbers, f_number: Numbers, magnification: Numbers, exit_pupil_mm: Numbers
) -> Numbers:
    """f-number of the cone that reaches the image: N e/(e - f m), e = exit pupil to image.

    N (1 + m) for a pupil at the lens (e = f + f m), N for a telecentric lens (e infinite), whose
    cone does not narrow as it focuses nearer. The cone's sine is 1/(2 N'). References: closed_form
    (pupil magnification P: N (1 + m/P), with e = f (P + m)).

    >>> round(working_f_number(focal_mm=1.0, f_number=4.0, magnification=0.05, exit_pupil_mm=1.05), 6)
    4.2
    """
    positive(focal_mm=focal_mm, f_number=f_number)
    not_negative(magnification=magnification)
    inner = np.asarray(exit_pupil_mm) > focal_mm * np.asarray(magnification)
    require("exit_pupil_mm", exit_pupil_mm, "farther from the image than its shift focal_mm * magnification", inner)
    return f_number / (1.0 - focal_mm * magnification / exit_pupil_mm)


def chief_ray_sine(*, height_mm: Numbers, exit_pupil_mm: Numbers) -> np.ndarray:
    """Sine of the chief ray's tilt at an image height: h/sqrt(h^2 + e^2); 0 for a telecentric lens (e infinite).

    References: closed_form.

    >>> round(float(chief_ray_sine(height_mm=3.0, exit_pupil_mm=4.0)), 6)
    0.6
    """
    not_negative(height_mm=height_mm)
    require("exit_pupil_mm", exit_pupil_mm, "above 0", np.asarray(exit_pupil_mm) > 0)
    slope = np.asarray(height_mm, float) / exit_pupil_mm
    return slope / np.sqrt(1.0 + slope * slope)


def accepted_fraction(*, core_na: Numbers, cone_sine: Numbers, tilt_sine: Numbers) -> np.ndarray:
    """Share of the lens's uniformly filled cone that a core of `core_na` takes, the cone tilted.

    Overlap of two circles in direction cosines (radii NA and cone_sine, centers tilt_sine apart)
    over the cone's own circle: uniform radiance is uniform in direction cosines. Meridional: skew
    rays above the NA count as lost. References: closed_form.

    >>> round(float(accepted_fraction(core_na=0.39, cone_sine=0.25, tilt_sine=0.30)), 4)
    0.6562
    """
    positive(core_na=core_na, cone_sine=cone_sine)
    within(0.0, 1.0, tilt_sine=tilt_sine)
    require("cone_sine", cone_sine, "1 or less", np.asarray(cone_sine) <= 1)
    taken = overlap_area(radius_1=core_na, radius_2=cone_sine, distance=tilt_sine)
    return taken / (np.pi * np.asarray(cone_sine, float) ** 2)


def face_irradiance_factor(*, f_number: Numbers, magnification: Numbers, transmission: Numbers) -> Numbers:
    """Irradiance on axis at the image over the target's radiance: pi tau/(4 N^2 (1 + m)^2).

    For a pupil at the lens; for any other pass `working_f_number` and magnification 0. A radiance
    stated inside a medium of index n enters divided by n^2. References: closed_form.

    >>> round(face_irradiance_factor(f_number=4.0, magnification=0.0, transmission=0.85), 6)
    0.041724
    """
    positive(f_number=f_number)
    not_negative(magnification=magnification)
    within(0.0, 1.0, transmission=transmission)
    return np.pi * transmission / (4.0 * f_number**2 * (1.0 + magnification) ** 2)
