"""Levers: each is what `size` says of the changed design, ranked, possible, and the ones that hand calculation expects."""

import math
from functools import lru_cache

import pytest
from random_designs import BARE, CABLE, drawn

from optics import presets
from optics.report.size import size
from optics.spec import OutOfRange
from optics.study.levers import levers
from optics.tables import preset_names

VARIANTS = {
    **{name: (name, {}) for name in preset_names("fiberscopes")},
    "cable": ("gearbox_tooth", {**CABLE, "guide.joint.offset_mm": 0.3, "guide.bundle.broken_fraction": 0.1}),
    "bare": ("gearbox_tooth", {**BARE, "needs": {}}),
    "butt": ("gearbox_tooth", {"source.launch.form": "butt", "source.launch.gap_mm": 1.0}),
    "rated": ("gearbox_tooth", {"source.launch.form": "rated", "source.launch.rated_lm": 20.0}),
    "overfilled": ("gearbox_tooth", {"source.launch.cone_na": 0.7, "source.launch.spot_mm": 3.0}),
    "gaussian": ("gearbox_tooth", {"source.launch.profile": "gaussian", "source.launch.spot_mm": 4.0}),
    "ultraviolet": (
        "gearbox_tooth",
        {
            "source.lamp.preset": "uva_led_365nm",
            "source.launch.form": "matched",
            "guide.fiber.preset": "silica_uv",
            "source.filter.preset": "uva_pass",
        },
    ),
    "covered, tapered": (
        "gearbox_tooth",
        {"scene.cover": {"index": 1.52, "thickness_mm": 0.5}, "guide.bundle.bounce_loss_fraction": 1e-5},
    ),
    "solved": (
        "gearbox_tooth",
        {"guide.bundle.diameter_mm": "solve", "body.section.outer_diameter_mm": 4.0},
    ),
}


def design(name: str, settings: dict) -> presets.Design:
    return presets.resolve(presets.edited(presets.open(name).document, settings))


def named(found, path: str):
    return [lever for lever in found if lever.path == path]


def design_with(here: presets.Design, settings: dict) -> presets.Design:
    return presets.resolve(presets.edited(here.document, settings))


@lru_cache
def answers(variant: str):
    """The design's report, and each lever with the report of its changed design."""
    here = design(*VARIANTS[variant])
    return size(here.fiberscope), [
        (lever, size(design_with(here, lever.settings).fiberscope)) for lever in levers(here)
    ]


@pytest.mark.parametrize(
    "variant", [pytest.param(name, marks=pytest.mark.slow if name == "solved" else []) for name in VARIANTS]
)
def test_each_is_what_size_says_of_the_changed_design(variant):
    now, found = answers(variant)
    assert found
    by_watts = design(*VARIANTS[variant]).fiberscope.source.lamp.flux_lm is None
    for lever, then in found:
        assert lever.delivered_lm == pytest.approx(then.light.delivered_lm, rel=1e-9)
        assert lever.delivered_w == pytest.approx(then.light.delivered_w, rel=1e-9)
        measure = "delivered_w" if by_watts else "delivered_lm"
        gain = getattr(then.light, measure) / getattr(now.light, measure) - 1
        assert lever.gain_share == pytest.approx(gain, rel=1e-9)
        assert lever.gain_share > 0
        if then.target:
            assert lever.center_lux == pytest.approx(then.target.center_lux, rel=1e-9)
            assert lever.unlit_fraction == pytest.approx(then.target.unlit_fraction, rel=1e-9)


@pytest.mark.parametrize("variant", VARIANTS)
def test_sorted_and_said_once(variant):
    found = [lever for lever, _ in answers(variant)[1]]
    assert [lever.gain_share for lever in found] == sorted((lever.gain_share for lever in found), reverse=True)
    assert len({lever.words for lever in found}) == len(found)


@pytest.mark.parametrize("variant", VARIANTS)
def test_none_spoils_what_stood(variant):
    """What is lost of the needs is named; fitting, passing, heat, steam and the strain of bends are kept."""
    before, found = answers(variant)
    for lever, after in found:
        met = {line.name for line in before.needs if line.met}
        assert set(lever.breaks) == {line.name for line in after.needs if line.name in met and not line.met}
        if before.fit and before.fit.passes:
            assert after.fit.passes
        said = [caveat.text for caveat in after.caveats if "strains the fiber" in caveat.text]
        assert not said or any("strains the fiber" in caveat.text for caveat in before.caveats)


def test_a_spot_as_wide_as_the_face_gives_the_ratio_of_areas():
    """A top-hat spot of 2.4 mm on 2.0 mm of fiber loses all outside: 2.4^2/2.0^2 = 1.44 comes back."""
    here = design("gearbox_tooth", {"source.lamp.emitter_mm": 1.0})
    (lever, *_) = named(levers(here), "source.launch.spot_mm")
    assert (lever.before, lever.after) == (2.4, 2.0)
    assert lever.gain_share == pytest.approx(0.44, abs=1e-9)
    assert lever.words == "a spot of 2 mm instead of 2.4 mm: +44 % light"


def test_no_spot_brighter_than_the_lamp():
    """The smallest spot is the lamp's: emitter x sqrt(condenser) / cone; there the radiance is the lamp's own."""
    here = presets.open("gearbox_tooth")
    spots = [lever for lever in named(levers(here), "source.launch.spot_mm") if len(lever.settings) == 1]
    least = 1.4 * math.sqrt(0.85) / 0.55
    assert spots[0].after == pytest.approx(least, rel=1e-3)
    assert spots[0].after >= least
    with pytest.raises(OutOfRange, match="brighter than its lamp"):
        design_with(here, {"source.launch.spot_mm": spots[0].after * 0.995})


def test_packing_and_broken_fibers_give_their_ratios():
    found = levers(design(*VARIANTS["cable"]))
    bundle = {lever.after: lever.gain_share for lever in named(found, "guide.bundle.packing_fraction")}
    assert bundle[0.85] == pytest.approx(0.85 / 0.82 - 1, abs=1e-9)
    assert bundle[0.95] == pytest.approx(0.95 / 0.82 - 1, abs=1e-9)
    (whole,) = named(found, "guide.bundle.broken_fraction")
    assert whole.gain_share == pytest.approx(1 / 0.9 - 1, abs=1e-9)


def test_a_cone_within_the_fiber_gives_the_ratio_of_solid_angles():
    here = design(
        "gearbox_tooth", {"source.lamp.emitter_mm": 0.5, "source.launch.cone_na": 0.7, "source.launch.spot_mm": 2.0}
    )
    (lever,) = named(levers(here), "source.launch.cone_na")
    assert lever.after == 0.57
    assert lever.gain_share == pytest.approx((0.7 / 0.57) ** 2 - 1, rel=1e-9)


def test_a_centered_joint_and_one_guide_are_told_of_a_cable():
    name, settings = VARIANTS["cable"]
    found = levers(design(name, {**settings, "guide.cable.diameter_mm": 2.0}))
    assert {"guide.joint.gap_mm", "guide.joint.offset_mm", "guide.cable"} <= {lever.path for lever in found}


def test_thick_fibers_are_packed_no_tighter_than_they_go():
    """Two ports of 1.41 mm hold one 1 mm fiber each: half of the face at most."""
    here = design("gearbox_tooth", {"guide.bundle.packing_fraction": 0.3, "guide.bundle.bends": []})
    for lever in levers(here):
        if lever.after == "pmma_1mm":
            assert lever.settings.get("guide.bundle.packing_fraction", 0.3) <= 2 * 1.0**2 / 2.0**2


@pytest.mark.parametrize("seed", range(6))
def test_random_designs(seed):
    document = presets.edited(presets.open("gearbox_tooth").document, drawn(seed))
    try:
        here = presets.resolve(document)
        now = size(here.fiberscope).light.delivered_lm
    except OutOfRange:
        pytest.skip("an impossible draw")
    for lever in levers(here)[:2]:
        assert lever.delivered_lm == pytest.approx(
            size(design_with(here, lever.settings).fiberscope).light.delivered_lm, rel=1e-9
        )
        assert lever.delivered_lm > now
        assert all(isinstance(value, float | int | str | list | dict | None) for value in lever.as_dict().values())
