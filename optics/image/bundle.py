"""The image bundle: what it is made of, and how bright its far face is."""

from typing import Annotated, Literal

import numpy as np
from pydantic import Field

from optics.spec import Curve, Spec, positive, quantity, within
from optics.units import Numbers


class ImageBundle(Spec):
    """A coherent bundle: cores on a hexagonal lattice, in the same order at both ends."""

    pitch_um: float = quantity("center to center of neighboring cores", gt=0.5, le=200, usual=(3.0, 25.0), common=True)
    core_um: float = quantity("core diameter", gt=0.2, le=200, usual=(1.5, 20.0))
    na: float = quantity("numerical aperture of a core", gt=0, lt=1.5, usual=(0.25, 0.7))
    core_index: float = quantity("refractive index of the core", gt=1, lt=3, usual=(1.45, 1.8))
    core_spread_fraction: float = quantity(
        "rms spread of core diameters over their mean; keeps neighbors out of step and so the image together",
        ge=0,
        lt=0.5,
        usual=(0.005, 0.08),
    )
    transmission_spread: float = quantity(
        "rms spread of throughput from core to core over its mean", default=0.0, ge=0, lt=1, usual=(0.0, 0.2)
    )
    attenuation: Curve = quantity("loss of the drawn cores over wavelength, dB/m")
    dead_fraction: float = quantity("share of dark cores", default=0.0, ge=0, lt=1, usual=(0.0, 0.02))
    veil_ratio: float = quantity(
        "light that leaks through the claddings, over the image's mean", default=0.0, ge=0, usual=(0.0, 0.3)
    )
    one_rod: bool = quantity("fused along its length, so that it bends as one rod", default=False)
    allowed_strain: float = quantity(
        "greatest surface strain allowed in a lasting bend", gt=0, lt=0.2, usual=(0.001, 0.02)
    )
    highest_temperature_c: float = quantity("temperature it bears", gt=0, le=1200, usual=(70.0, 400.0))
    diameter_mm: Annotated[float, Field(gt=0, le=20)] | Literal["solve"] = quantity(
        'diameter of the lattice of cores, or "solve" for the most that fits the tube', usual=(0.2, 4.0), common=True
    )
    length_m: float = quantity("length", gt=0, le=100, usual=(0.1, 5.0), common=True)


def exit_luminance_cd_m2(*, face_lux: Numbers, transmission: Numbers, cone_sine: Numbers) -> Numbers:
    """Mean luminance of the far face: M/(pi sin^2), M = face illuminance x transmission (core share included).

    For a uniformly filled exit cone; a cone of full sine 1 is the matte face M/pi.
    References: closed_form.

    >>> round(exit_luminance_cd_m2(face_lux=100.0, transmission=0.3, cone_sine=0.25), 2)
    152.79
    """
    within(0.0, 1.0, transmission=transmission, cone_sine=cone_sine)
    positive(cone_sine=cone_sine)
    return face_lux * transmission / (np.pi * cone_sine**2)
