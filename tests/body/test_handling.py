"""Handling: strain and radius, rods and fibers, slack, and what materials take."""

import numpy as np
import pytest
from pydantic import ValidationError

from optics.body.handling import (
    PLASTIC_DIAMETERS,
    TESTED,
    Handling,
    bend_strain,
    bonded_stiffness_ratio,
    least_bend_radius_mm,
    plastic_bend_radius_mm,
    proof_tested_strain,
    slide_mm,
    takes_sterilization,
    temperature_margin_c,
)
from optics.spec import OutOfRange, beyond


def test_strain_against_the_length_of_a_bent_skin():
    """Outer skin of an arc of radius R + D/2 against the neutral one of radius R."""
    fiber_mm, radius, angle = 0.05, 10.0, 1.3
    skin = (radius + fiber_mm / 2) * angle
    assert bend_strain(fiber_um=50.0, bend_radius_mm=radius) == pytest.approx(skin / (radius * angle) - 1)


def test_radius_and_strain_are_inverse():
    fiber, strain = np.array([25.0, 50.0, 500.0]), np.array([0.0015, 0.0025, 0.01])
    radius = least_bend_radius_mm(fiber_um=fiber, allowed_strain=strain)
    np.testing.assert_allclose(bend_strain(fiber_um=fiber, bend_radius_mm=radius), strain, rtol=1e-14)
    np.testing.assert_allclose(
        radius, [least_bend_radius_mm(fiber_um=f, allowed_strain=s) for f, s in zip(fiber, strain)]
    )


def test_a_fused_length_bends_as_one_rod():
    """A drawn silica image fiber of 0.5 mm wants 50-125 mm unless proof tested to more (common practice)."""
    least = [float(least_bend_radius_mm(fiber_um=500.0, allowed_strain=strain)) for strain in (0.005, 0.002)]
    assert least == pytest.approx([50.0, 125.0])
    long_term = proof_tested_strain(proof_strain=0.01, long_term=True)
    short_term = proof_tested_strain(proof_strain=0.01, long_term=False)
    assert short_term == pytest.approx(2 * long_term) == pytest.approx(0.0066667, rel=1e-4)


def test_plastic_by_diameters():
    assert [plastic_bend_radius_mm(fiber_mm=1.0, diameters_factor=f) for f in PLASTIC_DIAMETERS] == [20.0, 25.0]


def test_slide_is_the_difference_of_two_arcs():
    assert slide_mm(offset_mm=1.5, bend_deg=90.0) == pytest.approx((20 + 1.5) * np.pi / 2 - 20 * np.pi / 2)
    assert slide_mm(offset_mm=-1.5, bend_deg=90.0) == pytest.approx(-float(slide_mm(offset_mm=1.5, bend_deg=90.0)))


def test_bonded_bundle_against_second_moments():
    """Second moments of area: one rod of N fibers at a packing against N rods, glass filling the packed share."""
    count, packing, d = 3900, 0.82, 0.03
    rod = np.pi / 64 * (d**2 * count / packing) ** 2
    free = count * np.pi / 64 * d**4
    assert bonded_stiffness_ratio(fiber_count=count, packing_fraction=packing) == pytest.approx(rod * packing / free)


def test_heat():
    assert temperature_margin_c(material="epoxied_glass", temperature_c=134.0, cautious=True) < 0
    assert temperature_margin_c(material="fused_glass", temperature_c=134.0, cautious=True) > 0
    assert not takes_sterilization(material="pmma", sterilization="steam")
    assert takes_sterilization(material="pmma", sterilization="gas")
    assert takes_sterilization(material="epoxied_glass", sterilization="steam")


def test_table_and_refusals():
    assert Handling(bend_radius_mm=25.0).sterilization == "none"
    with pytest.raises(ValidationError):
        Handling(bend_radius_mm=25.0, sterilization="boiling")
    with pytest.raises(ValidationError):
        Handling(bend_radius_mm=0.0)
    with pytest.raises(OutOfRange) as said:
        bend_strain(fiber_um=50.0, bend_radius_mm=0.0)
    assert str(said.value) == "bend_radius_mm is 0; it must be above 0."
    with pytest.raises(OutOfRange, match="allowed_strain is 1; it must be below 1"):
        least_bend_radius_mm(fiber_um=50.0, allowed_strain=1.0)
    assert beyond(TESTED, allowed_strain=0.03)
