"""One fiber: its acceptance, the paths and reflections of its rays, its modes, and the table [guide.fiber].

Step index, geometric optics. m = NA^2/n1^2 is the sine squared of the steepest guided angle inside the
core; averages are over a filled cone of uniform radiance (uniform in sine squared), which is what a
lamp's image and a straight fiber both give.
"""

from typing import Literal

import numpy as np

from optics.spec import Curve, Spec, not_negative, positive, quantity, require
from optics.units import Numbers, deg_from_rad, m_from_um, um_from_nm

# Rules across fields, relative to the table: (field, other, comparison, what to say).
RULES = (
    ("core_um", "fiber_um", "at most", "the core must be at most as wide as its fiber"),
    ("na", "core_index", "below", "the NA must be below the core index"),
)


class Fiber(Spec):
    """The fiber a light guide is made of."""

    core_um: float = quantity("diameter of the light-carrying core", gt=0.0, le=5000.0, usual=(10.0, 1000.0))
    fiber_um: float = quantity(
        "diameter of the fiber with its cladding (and coating, if it stays on)", gt=0.0, le=6000.0, usual=(12.0, 1000.0)
    )
    na: float = quantity(
        "numerical aperture: sine of the widest guided half-angle in air (above 1 nothing stops it but the core index)",
        gt=0.0,
        le=1.5,
        usual=(0.2, 0.9),
        common=True,
    )
    core_index: float = quantity("refractive index of the core at 588 nm", gt=1.0, le=3.0, usual=(1.4, 1.85))
    attenuation: Curve = quantity("loss of the drawn fiber in dB/m against wavelength in nm, not of the bulk material")
    material: Literal["glass", "silica", "plastic"] = quantity("what the core is made of")
    allowed_strain: float = quantity(
        "strain at the surface that the fiber is trusted with for its life, as a fraction",
        gt=0.0,
        le=0.1,
        usual=(0.001, 0.02),
    )
    highest_temperature_c: float = quantity(
        "highest temperature that the fiber with its coating and glue stands", ge=0.0, le=1200.0, usual=(70.0, 400.0)
    )
    steam: bool = quantity("whether it can be sterilized with steam at 134 C")


def numerical_aperture(*, core_index: Numbers, clad_index: Numbers) -> np.ndarray:
    """NA of a step-index fiber: sqrt(n1^2 - n2^2).

    Raises OutOfRange unless the cladding has the lower index.
    References: closed_form.

    >>> round(float(numerical_aperture(core_index=1.62, clad_index=1.52)), 3)
    0.56
    """
    positive(core_index=core_index, clad_index=clad_index)
    core, clad = np.asarray(core_index, float), np.asarray(clad_index, float)
    require("clad_index", clad_index, "below the core index", clad < core)
    return np.sqrt((core - clad) * (core + clad))


def clad_index(*, core_index: Numbers, na: Numbers) -> np.ndarray:
    """Index of the cladding that gives this NA: sqrt(n1^2 - NA^2).

    >>> round(float(clad_index(core_index=1.62, na=0.57)), 4)
    1.5164
    """
    share = _share(na, core_index)
    return np.asarray(core_index, float) * np.sqrt(1 - share)


def half_angle_deg(*, na: Numbers, outside_index: Numbers) -> np.ndarray:
    """Half-angle of the cone in the medium in front: asin(NA/n).

    Raises OutOfRange where the NA is above the index outside: there the fiber takes and gives light at every angle,
    and no half-angle describes it.

    >>> half_angle_deg(na=np.array([0.22, 0.50, 0.66]), outside_index=1.0).round(1).tolist()
    [12.7, 30.0, 41.3]
    """
    positive(outside_index=outside_index)
    not_negative(na=na)
    ratio = np.asarray(na, float) / outside_index
    require("na", na, "at most the index outside", ratio <= 1)
    return deg_from_rad(np.arcsin(ratio))


def ray_stretch(*, ray_na: Numbers, core_index: Numbers) -> np.ndarray:
    """Path over fiber length of a ray: 1/cos(theta) with sin(theta) = NA/n1, skew or not.

    >>> round(float(ray_stretch(ray_na=0.5, core_index=1.492)), 4)
    1.0614
    """
    not_negative(ray_na=ray_na)
    positive(core_index=core_index)
    sine = np.asarray(ray_na, float) / core_index
    require("ray_na", ray_na, "below the core index", sine < 1)
    return 1 / np.sqrt(1 - sine**2)


def path_stretch(*, na: Numbers, core_index: Numbers) -> np.ndarray:
    """Mean path over fiber length in a filled cone: <sec theta> = (2/m)(1 - sqrt(1 - m)) = 2/(1 + sqrt(1 - m)).

    References: closed_form.

    >>> round(float(path_stretch(na=0.5, core_index=1.492)), 5)
    1.02977
    """
    return 2 / (1 + np.sqrt(1 - _share(na, core_index)))


def mean_tangent_ratio(*, na: Numbers, core_index: Numbers) -> np.ndarray:
    """Mean tangent of the angle in a filled cone: [asin sqrt(m) - sqrt(m (1 - m))]/m, toward (2/3) sqrt(m).

    References: closed_form.

    >>> round(float(mean_tangent_ratio(na=0.5, core_index=1.492)), 5)
    0.23143
    """
    share = _share(na, core_index)
    safe = np.maximum(share, 1e-4)
    exact = (np.arcsin(np.sqrt(safe)) - np.sqrt(safe * (1 - safe))) / safe
    # below m = 1e-4 the difference loses digits; two terms of the series are exact there to 1e-9
    return np.where(share < 1e-4, np.sqrt(share) * (2 / 3 + share / 5), exact)


def bounces_per_m(*, na: Numbers, core_index: Numbers, core_um: Numbers) -> np.ndarray:
    """Mean reflections per meter of fiber in a filled cone, skew rays included: (4/pi) <tan theta>/d.

    4/pi instead of the 1 of rays through the axis is exact for uniform lighting of the core (mean chord of a disc).
    References: closed_form.

    >>> round(float(bounces_per_m(na=0.5, core_index=1.492, core_um=1000.0)), 1)
    294.7
    """
    positive(core_um=core_um)
    return 4 / np.pi * mean_tangent_ratio(na=na, core_index=core_index) / m_from_um(np.asarray(core_um, float))


def v_number(*, core_um: Numbers, na: Numbers, wavelength_nm: Numbers) -> Numbers:
    """Normalized frequency: pi d NA/lambda.

    >>> round(v_number(core_um=2.0, na=0.39, wavelength_nm=633.0), 3)
    3.871
    """
    positive(core_um=core_um, na=na, wavelength_nm=wavelength_nm)
    return np.pi * core_um * na / um_from_nm(wavelength_nm)


def mode_count(*, v_number: Numbers) -> Numbers:
    """Guided modes of a step-index fiber, both polarizations, for large V: V^2/2.

    References: gloge_1971 (V^2/2 for many modes; below V = 2.405 there are two, of one shape).
    """
    positive(v_number=v_number)
    return np.where(np.asarray(v_number) < 2.405, 2.0, np.asarray(v_number, float) ** 2 / 2)


def _share(na: Numbers, core_index: Numbers) -> np.ndarray:
    """m = (NA/n1)^2, checked."""
    positive(core_index=core_index)
    not_negative(na=na)
    share = (np.asarray(na, float) / core_index) ** 2
    require("na", na, "below the core index", share < 1)
    return share
