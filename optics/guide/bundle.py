"""A guide end to end: the fibers' area, what the face takes, and what is left after its length."""

from typing import Annotated, Literal

import numpy as np
from pydantic import Field

from optics.guide.fiber import Fiber
from optics.spec import Spec, quantity
from optics.units import Numbers


class Bend(Spec):
    """One bend of the guide, or several alike with straight runs between."""

    radius_mm: float = quantity("radius of the guide's axis", gt=0, usual=(5.0, 200.0))
    angle_deg: float = quantity("angle turned", ge=0, le=3600, usual=(0.0, 360.0))
    repeats: int = quantity(
        "how many such bends, one after another with straight runs between", default=1, source="assumed", ge=1, le=12
    )


class GuideBundle(Spec):
    """The scope's own light guide, all branches together by area."""

    diameter_mm: Annotated[float, Field(gt=0, le=50)] | Literal["solve"] = quantity(
        'diameter of the round bundle that has the area of all branches, or "solve" for the most that fits the tube',
        usual=(0.3, 6.0),
        common=True,
    )
    length_m: float = quantity("length from input face to exit face", gt=0, le=1000, usual=(0.3, 8.0), common=True)
    packing_fraction: float = quantity(
        "fiber area over bundle area (the core share is a factor of its own)", gt=0, le=1, usual=(0.7, 0.9)
    )
    broken_fraction: float = quantity(
        "share of the fibers that are broken", default=0.0, source="assumed", ge=0, lt=1, usual=(0.0, 0.2)
    )
    bounce_loss_fraction: float = quantity(
        "share of the light lost at each reflection at the core's wall",
        default=0.0,
        source="assumed",
        ge=0,
        le=0.01,
        usual=(0.0, 1e-4),
    )
    entry_mm: float | None = quantity(
        "diameter of a tapered input face; absent: as wide as the bundle", default=None, gt=0, le=50, usual=(0.5, 8.0)
    )
    exit_mm: float | None = quantity(
        "diameter of a tapered exit face, all branches together by area; absent: as wide as the bundle",
        default=None,
        gt=0,
        le=50,
        usual=(0.3, 8.0),
    )
    exit_tilt_deg: float = quantity(
        "angle at which the exit face is ground off; it turns the light of every port the same way, toward +x",
        default=0.0,
        source="assumed",
        ge=0,
        le=45,
        usual=(0.0, 30.0),
    )
    bends: tuple[Bend, ...] = Field(
        default=(), strict=False, max_length=12, description="separate bends, from the lamp on"
    )


class Cable(Spec):
    """A separate light cable between the lamp and the scope."""

    fiber: Fiber = quantity("the cable's fiber")
    diameter_mm: float = quantity("diameter of the cable's bundle", gt=0, le=50, usual=(1.0, 6.0), common=True)
    length_m: float = quantity("length of the cable", gt=0, le=1000, usual=(1.0, 4.0), common=True)
    packing_fraction: float = quantity("fiber area over bundle area", gt=0, le=1, usual=(0.7, 0.9))


def fiber_area_mm2(*, diameter_mm: Numbers, packing_fraction: Numbers) -> Numbers:
    """Area of all fibers of a round bundle, claddings included."""
    return np.pi / 4 * diameter_mm**2 * packing_fraction
