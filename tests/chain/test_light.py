"""Light by hand: bare guides, cables, rated lamps, butt emitters, spots, filters; each step against pencil and paper."""

import numpy as np
import pytest

from optics import presets
from optics.media.face import face_transmission
from optics.report.size import size
from optics.source.lamp import etendue_mm2_sr
from optics.spec import OutOfRange

BARE = {"scene": None, "image": None, "viewer": None, "body": None, "needs": None, "guide.bundle.bends": []}


def answered(document, settings):
    report = size(presets.resolve(presets.edited(document, settings)).fiberscope)
    return report, {step.name: step for step in report.light.steps}


def test_a_bare_guide_by_hand(document):
    """2 m of flat 0.5 dB/m, NA 0.57 in 1.62, filled: 0.7883 along the guide, faces 0.8893 together, packing and core apart."""
    flat = {"wavelength_nm": [350.0, 1100.0], "value": [0.5, 0.5]}
    report, steps = answered(
        document,
        {
            **BARE,
            "source.launch.form": "matched",
            "source.launch.transmission": 1.0,
            "guide.bundle.length_m": 2.0,
            "guide.fiber.attenuation": flat,
            "guide.fiber.core_um": 45.0,
        },
    )
    lamp, face = etendue_mm2_sr(diameter_mm=1.4, na=1.0), etendue_mm2_sr(diameter_mm=2.0, na=0.57)
    assert steps["condenser"].factor == pytest.approx(min(1.0, face / lamp), rel=1e-12)
    assert steps["attenuation"].factor == pytest.approx(0.7883, abs=1.5e-4)
    assert steps["packing"].factor == pytest.approx(0.82)
    assert steps["core share"].factor == pytest.approx(0.81)
    both = steps["input face"].factor * steps["exit face"].factor
    assert both == pytest.approx(face_transmission(core_index=1.62, outside_index=1.0, na=0.57) ** 2, rel=2e-4)
    assert both == pytest.approx(0.8893, abs=3e-4)
    assert report.light.exit_na == pytest.approx(0.57 * np.sqrt(0.95), rel=2e-3)


def test_a_lambertian_die_into_a_core_of_na_one_half(document):
    """A 1 mm2 Lambertian die of 250 lm on a 1 mm2 face of NA 0.5, touching: 62.5 lm in the cone."""
    side = float(np.sqrt(4 / np.pi))
    _, steps = answered(
        document,
        {
            **BARE,
            "source.lamp.flux_lm": 250.0,
            "source.lamp.emitter_mm": side,
            "source.launch.form": "butt",
            "source.launch.gap_mm": 0.0,
            "guide.bundle.diameter_mm": side,
            "guide.fiber.na": 0.5,
        },
    )
    assert steps["spot"].after_lm == pytest.approx(62.5, rel=1e-9)
    assert steps["cone"].factor == pytest.approx(0.25, rel=1e-9)
    assert steps["spot"].factor == pytest.approx(1.0, rel=1e-9)


def test_a_gap_before_the_face_loses_the_steep_rays_first(document):
    near, far = (
        answered(document, {**BARE, "source.launch.form": "butt", "source.launch.gap_mm": gap})[0].light
        for gap in (0.0, 1.5)
    )
    assert far.delivered_lm < near.delivered_lm
    assert far.exit_na < near.exit_na


def test_overfilled_spot_and_cone_are_two_losses(document):
    spot = {"source.launch.spot_mm": 4.0, "source.launch.cone_na": 0.8, "source.launch.transmission": 0.8}
    _, steps = answered(document, {**BARE, **spot})
    assert steps["spot"].factor == pytest.approx((2.0 / 4.0) ** 2, rel=1e-12)
    assert steps["cone"].factor == pytest.approx((0.57 / 0.8) ** 2, rel=1e-9)
    assert "a cone of 0.57 would waste nothing" in steps["cone"].because
    assert "a spot within 2 mm would waste nothing" in steps["spot"].because
    _, gaussian = answered(document, {**BARE, **spot, "source.launch.profile": "gaussian"})
    assert gaussian["spot"].factor == pytest.approx(1 - np.exp(-2 * 0.25), rel=1e-12)


CABLE = {
    "guide.cable.fiber": {"preset": "lead_silicate_na066"},
    "guide.cable.diameter_mm": 3.5,
    "guide.cable.length_m": 2.5,
    "guide.cable.packing_fraction": 0.8,
    "guide.joint.gap_mm": 0.0,
    "guide.bundle.diameter_mm": 1.5,
}


def test_a_cable_and_its_joint_by_hand(document):
    """3.5 mm onto 1.5 mm, touching: 18.4 % by area; NA 0.66 onto 0.57 cuts what lies above 0.57."""
    _, steps = answered(document, {**BARE, **CABLE, "source.launch.form": "butt", "source.launch.gap_mm": 0.0})
    names = list(steps)
    assert names.index("cable attenuation") < names.index("joint") < names.index("packing")
    assert steps["cable packing"].factor == pytest.approx(0.8)
    area = (1.5 / 3.5) ** 2
    assert area == pytest.approx(0.18, abs=0.005)
    # of the cable's cone at most (0.57/0.66)^2 is within the guide's; steep rays lost a little more on the way
    assert area * (0.57 / 0.66) ** 2 < steps["joint"].factor < area * (0.57 / 0.66) ** 2 * 1.03
    # etendue by hand: what enters the guide is at most the lamp's radiance times the guide's etendue
    lamp = steps["lamp"].after_lm / etendue_mm2_sr(diameter_mm=1.4, na=1.0)
    assert steps["joint"].after_lm < lamp * etendue_mm2_sr(diameter_mm=1.5, na=0.57)


def test_a_gap_or_an_offset_at_the_joint_costs_light(document):
    base = {**BARE, **CABLE, "source.launch.form": "matched", "guide.bundle.diameter_mm": 3.5}
    touching, gap, offset = (
        answered(document, {**base, **extra})[1]["joint"].factor
        for extra in ({}, {"guide.joint.gap_mm": 1.0}, {"guide.joint.offset_mm": 0.5})
    )
    assert gap < touching
    assert offset < touching
    oil = answered(document, {**base, "guide.joint.gap_mm": 1.0, "guide.joint.index": 1.5})[1]
    assert oil["joint"].factor > gap  # the cone is narrower in oil
    assert oil["guide input face"].factor > 0.99


def test_a_rated_lamp_by_hand(document):
    """40 lm out of 3 mm of NA 0.57; into 2 mm of NA 0.57: 40 (2/3)^2; a lamp of 100 mm2 sr keeps giving to a larger guide."""
    rated = {
        "source.launch.form": "rated",
        "source.launch.rated_lm": 40.0,
        "source.launch.reference_diameter_mm": 3.0,
        "source.launch.reference_na": 0.57,
        "source.lamp.flux_lm": 3000.0,
        "source.lamp.emitter_mm": 4.0,
    }
    _, steps = answered(document, {**BARE, **rated})
    assert steps["spot"].after_lm == pytest.approx(40.0 * (2 / 3) ** 2, rel=1e-9)
    _, wider = answered(document, {**BARE, **rated, "guide.bundle.diameter_mm": 5.0})
    assert wider["spot"].after_lm == pytest.approx(40.0 * (5 / 3) ** 2, rel=1e-9)
    lamp, reference = etendue_mm2_sr(diameter_mm=4.0, na=1.0), etendue_mm2_sr(diameter_mm=3.0, na=0.57)
    _, widest = answered(document, {**BARE, **rated, "guide.bundle.diameter_mm": 9.0})
    assert widest["spot"].after_lm == pytest.approx(
        40.0 * lamp / reference, rel=1e-9
    )  # the lamp's own etendue is used up


def test_a_filter_colors_the_light(document):
    plain, warm = (
        answered(document, {**BARE, **extra})[0].light
        for extra in (
            {},
            {
                "source.filter.transmission": {
                    "wavelength_nm": [350.0, 500.0, 600.0, 1100.0],
                    "value": [0.2, 0.2, 1.0, 1.0],
                }
            },
        )
    )
    assert warm.color_temperature_k < plain.color_temperature_k - 500
    assert warm.delivered_lm < plain.delivered_lm


def test_light_of_a_uva_lamp_is_judged_by_watts(document):
    report, _ = answered(
        document,
        {
            "source.lamp": {"preset": "uva_led_365nm"},
            "source.launch.form": "butt",
            "guide.fiber.preset": "silica_uv",
            "needs": {"target_uva_w_m2": 1.0},
        },
    )
    assert report.light.delivered_w > 0
    assert report.light.transmission == pytest.approx(0.0, abs=1e-6) or report.light.delivered_lm > 0
    assert report.needs[0].got > 0
    assert any("judge it by watts" in item.text for item in report.caveats)


def test_light_beyond_the_data_of_a_fiber_is_left_out_and_said(document):
    report, _ = answered(
        document,
        {"source.lamp.preset": "halogen_3200k", "source.launch.form": "butt", "guide.fiber.preset": "pmma_250um"},
    )
    said = next(item for item in report.caveats if item.where == "guide.fiber.attenuation")
    assert "400 to 700 nm" in said.text
    assert "is left out" in said.text


def test_guides_color_the_light_as_published_curves_say(document):
    """LED-B3 after 3 m of plastic: 4380 K, Ra 80.7; of NA 0.57 glass: 3990 K, Ra 84.1 (by an open color library)."""
    glass = {"wavelength_nm": [380.0, 400.0, 450.0, 500.0, 1100.0], "value": [1.3, 1.0, 0.35, 0.22, 0.22]}
    narrow = {
        "guide.fiber.na": 0.05,
        "source.launch.form": "matched",
        "source.launch.transmission": 1.0,
        "guide.bundle.length_m": 3.0,
    }
    report, _ = answered(document, {**BARE, **narrow, "guide.fiber.attenuation": glass})
    assert report.light.color_temperature_k == pytest.approx(3990, abs=15)
    assert report.light.color_rendering_index == pytest.approx(84.1, abs=0.5)
    report, _ = answered(document, {**BARE, **narrow, "guide.fiber.preset": "pmma_250um"})
    assert report.light.color_temperature_k == pytest.approx(4380, abs=15)
    assert report.light.color_rendering_index == pytest.approx(80.7, abs=0.5)


def test_a_taper_trades_area_for_cone(document):
    """Exit face 1.4 times as wide: the cone narrows to NA/1.4 and the flux stays; entry 2 times: takes NA/2."""
    base = {**BARE, "source.launch.form": "butt", "source.launch.gap_mm": 0.0, "source.lamp.emitter_mm": 1.0}
    plain, _ = answered(document, base)
    wide, _ = answered(document, {**base, "guide.bundle.exit_mm": 2.8})
    assert wide.light.exit_na == pytest.approx(plain.light.exit_na / 1.4, rel=1e-3)
    assert wide.light.delivered_lm == pytest.approx(plain.light.delivered_lm, rel=0.02)  # only Fresnel at other angles
    _, entry = answered(document, {**base, "guide.bundle.entry_mm": 4.0})
    assert entry["cone"].factor == pytest.approx((0.57 / 2) ** 2, rel=1e-9)


def test_a_lossy_wall_costs_light_and_steep_rays_most(document):
    base = {**BARE, "source.launch.form": "matched"}
    plain, _ = answered(document, base)
    lossy, steps = answered(document, {**base, "guide.bundle.bounce_loss_fraction": 1e-5})
    # about (4/pi) <tan> L/d = 10,700 reflections on average at 1.8 m and 46 um
    assert steps["wall reflections"].factor == pytest.approx(0.9, abs=0.02)
    assert lossy.light.exit_na < plain.light.exit_na


def test_a_tilted_exit_face_moves_the_brightest_point(document):
    straight, _ = answered(document, {"guide.bundle.bends": []})
    tilted, _ = answered(document, {"guide.bundle.bends": [], "guide.bundle.exit_tilt_deg": 15.0})
    assert tilted.target.center_lux < straight.target.center_lux
    # 15 degrees: steep rays are totally reflected, a few percent of the light
    assert 0.9 < tilted.light.delivered_lm / straight.light.delivered_lm < 1.0


@pytest.mark.parametrize(
    ("settings", "said"),
    [
        ({"guide.bundle.exit_mm": 1.0}, "such a taper would need an exit NA above 0.97, which etendue forbids"),
        ({"guide.bundle.exit_tilt_deg": 10.0, "scene.ports.form": "annulus"}, "needs round ports without a tilt"),
    ],
)
def test_impossible_ends_are_refused(document, settings, said):
    with pytest.raises(OutOfRange, match=said):
        presets.resolve(presets.edited(document, settings))
