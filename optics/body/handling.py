"""Handling: how sharply a scope may be bent, and what heat and sterilization its materials take."""

from typing import Literal

import numpy as np
from pydantic import Field

from optics.spec import Spec, not_negative, positive, quantity, require
from optics.units import Numbers, mm_from_um, rad_from_deg

# Long-term bend strains in use; beyond, the outcome rests on proof testing and surface
TESTED = {"allowed_strain": (0.0005, 0.02)}

Material = Literal["pmma", "epoxied_glass", "fused_glass", "silica"]
Sterilization = Literal["none", "wipe", "gas", "plasma", "steam"]

# Continuous service temperatures, C. Source: remembered common practice; a datasheet decides.
SERVICE_C: dict[str, tuple[float, float]] = {
    "pmma": (70.0, 85.0),
    "epoxied_glass": (120.0, 150.0),
    "fused_glass": (350.0, 350.0),
    "silica": (120.0, 150.0),
}
STERILIZATION_C: dict[str, float] = {"none": 0.0, "wipe": 40.0, "gas": 60.0, "plasma": 60.0, "steam": 134.0}
# Length over radius of a bent plastic fiber: 20 to 25 diameters, common practice
PLASTIC_DIAMETERS = (20.0, 25.0)


class Handling(Spec):
    """How the finished tube is bent and treated."""

    bend_radius_mm: float = quantity(
        "least bend radius of the tube's axis in use", usual=(10, 100), gt=0, le=10000, common=True
    )
    sterilization: Sterilization = Field(
        default="none", description="harshest treatment: none, wipe (chemical), gas (ethylene oxide), plasma, steam"
    )
    highest_temperature_c: float = quantity(
        "highest temperature that the insertion part meets",
        default=40.0,
        usual=(20, 150),
        source="assumed",
        ge=-50,
        le=1000,
    )


def bend_strain(*, fiber_um: Numbers, bend_radius_mm: Numbers) -> Numbers:
    """Largest strain of a bent fiber or rod, at its outer skin: D / (2 R).

    The neutral axis in the middle, R on the axis; holds for strains of a few percent.
    References: closed_form.

    >>> round(bend_strain(fiber_um=50.0, bend_radius_mm=10.0), 6)
    0.0025
    """
    positive(fiber_um=fiber_um, bend_radius_mm=bend_radius_mm)
    return mm_from_um(fiber_um) / (2 * bend_radius_mm)


def least_bend_radius_mm(*, fiber_um: Numbers, allowed_strain: Numbers) -> Numbers:
    """Least bend radius at an allowed strain: D / (2 strain).

    The diameter is the fiber's where fibers move freely, and that of the whole rod where they are
    fused or wicked with epoxy. References: closed_form.

    >>> round(least_bend_radius_mm(fiber_um=50.0, allowed_strain=0.0025), 6)
    10.0
    """
    positive(fiber_um=fiber_um, allowed_strain=allowed_strain)
    require("allowed_strain", allowed_strain, "below 1", np.asarray(allowed_strain) < 1)
    return mm_from_um(fiber_um) / (2 * allowed_strain)


def proof_tested_strain(*, proof_strain: Numbers, long_term: bool) -> Numbers:
    """Allowed strain of silica from its proof test: a third for years, two thirds for a short time.

    References: trade (remembered practice; proof often at 1 %, thin image fibers up to 2 %).

    >>> round(proof_tested_strain(proof_strain=0.01, long_term=True), 5)
    0.00333
    """
    positive(proof_strain=proof_strain)
    return proof_strain * ((1.0 if long_term else 2.0) / 3.0)


def plastic_bend_radius_mm(*, fiber_mm: Numbers, diameters_factor: Numbers) -> Numbers:
    """Least bend radius of a plastic fiber as so many of its diameters (20 to 25 in use).

    References: trade.

    >>> plastic_bend_radius_mm(fiber_mm=1.0, diameters_factor=25.0)
    25.0
    """
    positive(fiber_mm=fiber_mm, diameters_factor=diameters_factor)
    return fiber_mm * diameters_factor


def slide_mm(*, offset_mm: Numbers, bend_deg: Numbers) -> Numbers:
    """How far a free component slides that lies off the neutral axis: e theta.

    The offset is counted in the plane of the bend. A loop of slack this long must find room, or the
    component is pulled. References: closed_form.

    >>> round(float(slide_mm(offset_mm=1.5, bend_deg=180.0)), 3)
    4.712
    """
    not_negative(offset_mm=np.abs(offset_mm), bend_deg=bend_deg)
    return np.asarray(offset_mm, float) * rad_from_deg(np.asarray(bend_deg, float))


def bonded_stiffness_ratio(*, fiber_count: Numbers, packing_fraction: Numbers) -> Numbers:
    """Bending stiffness of a bonded bundle over that of the same fibers free: about N / packing.

    A rod of area N a / p against N rods of area a each: (N a/p)^2 p / (N a^2) with the modulus of
    glass over the share p of the rod. References: closed_form.

    >>> round(bonded_stiffness_ratio(fiber_count=3900, packing_fraction=0.82))
    4756
    """
    positive(fiber_count=fiber_count, packing_fraction=packing_fraction)
    require("packing_fraction", packing_fraction, "at most 1", np.asarray(packing_fraction) <= 1)
    return fiber_count / packing_fraction


def temperature_margin_c(*, material: Material, temperature_c: Numbers, cautious: bool) -> Numbers:
    """Service temperature of a construction less the temperature it meets: negative is too hot.

    `cautious` takes the lower end of the range of practice. References: trade (remembered).

    >>> temperature_margin_c(material="pmma", temperature_c=134.0, cautious=True)
    -64.0
    """
    return SERVICE_C[material][0 if cautious else 1] - temperature_c


def takes_sterilization(*, material: Material, sterilization: Sterilization) -> bool:
    """Whether a construction's service range reaches the temperature of a treatment.

    Temperature alone: moisture, vacuum and chemistry also age joints, and need a trial.
    References: trade (steam at 134 C; gas and plasma at about 55-60 C).

    >>> takes_sterilization(material="pmma", sterilization="steam")
    False
    """
    return SERVICE_C[material][1] >= STERILIZATION_C[sterilization]
