"""Fiber formulas: limits, inverses, and averages over rays drawn independently of the closed forms."""

import numpy as np
import pytest

from optics.guide import fiber
from optics.spec import Curve, OutOfRange

INDEX, NA = 1.492, 0.5
GOOD = {
    "core_um": 46.0,
    "fiber_um": 50.0,
    "na": 0.57,
    "core_index": 1.62,
    "attenuation": Curve(wavelength_nm=(400.0, 700.0), value=(1.0, 0.2)),
    "material": "glass",
    "allowed_strain": 0.0015,
    "highest_temperature_c": 140.0,
    "steam": True,
}


def cone(count=400_000, na=NA, index=INDEX):
    """Tangent, secant and skewness of rays of uniform radiance that fill a round core of radius 1."""
    random = np.random.default_rng(3)
    sine = na / index * np.sqrt(random.random(count))
    offset = np.sqrt(random.random(count)) * np.sin(2 * np.pi * random.random(count))
    cosine = np.sqrt(1 - sine**2)
    return sine / cosine, 1 / cosine, offset


def test_averages_over_the_cone_match_drawn_rays():
    tangent, secant, _ = cone()
    assert fiber.path_stretch(na=NA, core_index=INDEX) == pytest.approx(secant.mean(), abs=1e-4)
    assert fiber.mean_tangent_ratio(na=NA, core_index=INDEX) == pytest.approx(tangent.mean(), abs=3e-4)


def test_bounces_match_drawn_chords():
    # a ray at the height `offset` from the axis (in core radii) meets the wall every 2 sqrt(1 - offset^2) r / tan
    tangent, _, offset = cone()
    per_radius = (tangent / (2 * np.sqrt(1 - offset**2))).mean()
    counted = fiber.bounces_per_m(na=NA, core_index=INDEX, core_um=1000.0)
    assert counted == pytest.approx(per_radius / 0.0005, rel=0.01)


@pytest.mark.parametrize("na", [0.0, 0.01, 0.2, 0.5, 1.4])
def test_cladding_and_aperture_are_inverse(na):
    clad = fiber.clad_index(core_index=INDEX, na=na)
    if na == 0.0:
        assert clad == pytest.approx(INDEX)
    else:
        assert fiber.numerical_aperture(core_index=INDEX, clad_index=clad) == pytest.approx(na, rel=1e-9)


def test_narrow_cones_go_straight():
    assert fiber.path_stretch(na=0.0, core_index=1.5) == 1.0
    assert fiber.mean_tangent_ratio(na=0.0, core_index=1.5) == 0.0
    assert fiber.bounces_per_m(na=0.0, core_index=1.5, core_um=50.0) == 0.0
    assert fiber.ray_stretch(ray_na=0.0, core_index=1.5) == 1.0


def test_small_cones_join_the_series_smoothly():
    na = 1.5 * np.sqrt(np.array([0.99e-4, 1.01e-4]))
    slope = np.diff(fiber.mean_tangent_ratio(na=na, core_index=1.5)) / np.diff(na)
    assert slope == pytest.approx(2 / 3 / 1.5, rel=1e-3)


def test_filled_cone_is_the_mean_of_its_rays():
    na = NA * np.sqrt((np.arange(20_000) + 0.5) / 20_000)
    mean = fiber.ray_stretch(ray_na=na, core_index=INDEX).mean()
    assert fiber.path_stretch(na=NA, core_index=INDEX) == pytest.approx(mean, abs=1e-6)


def test_half_angle_narrows_in_water_and_inverts():
    angle = fiber.half_angle_deg(na=0.66, outside_index=np.array([1.0, 1.3334]))
    assert angle[1] < angle[0]
    assert 1.3334 * np.sin(np.deg2rad(angle[1])) == pytest.approx(0.66)


def test_modes_grow_with_the_square_of_core_and_aperture():
    v = fiber.v_number(core_um=np.array([50.0, 100.0]), na=0.2, wavelength_nm=850.0)
    assert np.divide(*fiber.mode_count(v_number=v)[::-1]) == pytest.approx(4.0)
    assert fiber.mode_count(v_number=1.5) == 2.0


def test_scalar_equals_array_element():
    na = np.linspace(0.05, 0.8, 7)
    for formula, given in (
        (fiber.path_stretch, {"core_index": 1.6}),
        (fiber.mean_tangent_ratio, {"core_index": 1.6}),
        (fiber.half_angle_deg, {"outside_index": 1.33}),
        (fiber.bounces_per_m, {"core_index": 1.6, "core_um": 30.0}),
    ):
        together = formula(na=na, **given)
        alone = [float(formula(na=one, **given)) for one in na]
        assert alone == pytest.approx(together.tolist(), rel=1e-12)


@pytest.mark.parametrize(
    ("call", "said"),
    [
        (lambda: fiber.numerical_aperture(core_index=1.5, clad_index=1.6), "clad_index is 1.6; it must be below"),
        (lambda: fiber.path_stretch(na=1.5, core_index=1.5), "na is 1.5; it must be below the core index"),
        (lambda: fiber.half_angle_deg(na=1.1, outside_index=1.0), "na is 1.1; it must be at most the index outside"),
        (lambda: fiber.bounces_per_m(na=0.5, core_index=1.5, core_um=0.0), "core_um is 0; it must be above 0"),
        (lambda: fiber.ray_stretch(ray_na=-0.1, core_index=1.5), "ray_na is -0.1; it must be 0 or more"),
    ],
)
def test_impossible_fibers_are_refused(call, said):
    with pytest.raises(OutOfRange, match=said):
        call()


def test_table_takes_a_fiber_and_refuses_nonsense():
    assert fiber.Fiber(**GOOD).core_um == 46.0
    for change in (
        {"na": 0.0},
        {"core_index": 1.0},
        {"material": "wood"},
        {"steam": 1},
        {"color": "red"},
        {"core_um": -1.0},
    ):
        with pytest.raises(ValueError, match=next(iter(change))):
            fiber.Fiber(**GOOD | change)


def test_rules_name_fields_of_the_table():
    fields = fiber.Fiber.model_fields
    for field, other, comparison, sentence in fiber.RULES:
        assert {field, other} <= set(fields)
        assert comparison in ("at most", "below")
        assert sentence.startswith("the ")
