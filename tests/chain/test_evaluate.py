"""The chain as a whole: one design and many agree, energy falls, radiance is conserved, monotony, limits by brute force."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optics import presets
from optics.chain.columns import columns
from optics.chain.evaluate import evaluate
from optics.chain.light import light
from optics.report.size import size
from optics.source.lamp import etendue_mm2_sr
from optics.viewer.detail import PARTS


def sized(document, **changes):
    return size(
        presets.resolve(
            presets.edited(document, {key.replace("__", "."): value for key, value in changes.items()})
        ).fiberscope
    )


def test_many_designs_equal_one_by_one(random_designs):
    """Mixed forms, to 1e-9: the same code serves both."""
    designs = random_designs(120)
    many = evaluate(columns(designs))
    for row, design in enumerate(designs[::3]):
        one = evaluate(columns([design]))
        for name, found in many.value.items():
            both = float(found[3 * row]), float(one.value.get(name, np.array([np.nan]))[0])
            np.testing.assert_allclose(*both, rtol=1e-9, atol=1e-9, equal_nan=True, err_msg=name)
        for name, found in many.after_lm.items():
            alone = one.after_lm.get(name, np.array([np.nan]))[0]
            np.testing.assert_allclose(found[3 * row], alone, rtol=1e-9, equal_nan=True, err_msg=name)


def test_a_design_does_not_depend_on_its_neighbors(random_designs):
    designs = random_designs(40)
    there, back = evaluate(columns(designs)), evaluate(columns(designs[::-1]))
    for name, found in there.value.items():
        np.testing.assert_allclose(found, back.value[name][::-1], rtol=1e-9, atol=1e-9, equal_nan=True, err_msg=name)


def test_steps_multiply_and_never_grow(random_designs):
    for design in random_designs(60):
        light_of = size(design).light
        assert np.prod([step.factor for step in light_of.steps]) == pytest.approx(light_of.transmission, rel=1e-9)
        for step in light_of.steps:
            assert step.after_lm <= step.before_lm * (1 + 1e-12), step
        for before, after in zip(light_of.steps, light_of.steps[1:]):
            assert before.after_lm == after.before_lm
        assert light_of.steps[-1].after_lm == pytest.approx(light_of.delivered_lm, rel=1e-12)


def test_nothing_is_brighter_than_the_lamp(random_designs):
    """Radiance per angle bin of the delivered beam, over cores alone, against the lamp's, lumens over etendue."""
    table = columns(random_designs(120))
    lit = light(table)
    lamp = lit.after_lm["lamp"] / etendue_mm2_sr(
        diameter_mm=table["source.lamp.emitter_mm"], na=table["source.lamp.cone_na"]
    )
    per_bin = np.pi * lit.value["core_area_mm2"][:, None] * np.diff(lit.beam.sine2_edges, axis=1)
    assert np.all(lit.beam.bin_lm / per_bin <= lamp[:, None] * (1 + 1e-9))


@pytest.mark.parametrize("length", [0.5, 1.0, 2.0, 4.0])
def test_doubling_the_length_lowers_light_and_never_raises_detail(document, length):
    short = sized(document, guide__bundle__length_m=length, image__bundle__length_m=length)
    long = sized(document, guide__bundle__length_m=2 * length, image__bundle__length_m=2 * length)
    assert long.light.delivered_lm < short.light.delivered_lm
    assert long.target.center_lux < short.target.center_lux
    assert long.summary.resolved_lp_mm <= short.summary.resolved_lp_mm * (1 + 1e-9)


def test_halving_the_pitch_doubles_the_lattice_limit(document):
    coarse = sized(document, image__bundle__pitch_um=12.0, image__bundle__core_um=9.0)
    fine = sized(document, image__bundle__pitch_um=6.0, image__bundle__core_um=4.5)
    assert fine.detail.lattice_limit_lp_mm == pytest.approx(2 * coarse.detail.lattice_limit_lp_mm, rel=1e-12)
    assert fine.detail.pitch_at_target_mm == pytest.approx(coarse.detail.pitch_at_target_mm / 2, rel=1e-12)


@settings(max_examples=25, deadline=None)
@given(
    length=st.floats(0.2, 8.0),
    diameter=st.floats(0.5, 4.0),
    flux=st.floats(10.0, 3000.0),
    distance=st.floats(11.0, 39.0),
)
def test_light_is_linear_in_the_lamp_and_falls_with_distance(length, diameter, flux, distance):
    base = presets.open("gearbox_tooth").document
    change = {
        "guide.bundle.length_m": length,
        "guide.bundle.diameter_mm": diameter,
        "source.lamp.flux_lm": flux,
        "scene.target.distance_mm": distance,
        "scene.target.far_mm": 80.0,
    }
    designs = [
        change,
        {**change, "source.lamp.flux_lm": 2 * flux},
        {**change, "scene.target.distance_mm": 1.2 * distance},
    ]
    found = evaluate(columns([presets.resolve(presets.edited(base, item)).fiberscope for item in designs]))
    lumens, lux = found["delivered_lm"], found["center_lux"]
    assert 0 < lumens[0] < flux
    assert lumens[1] == pytest.approx(2 * lumens[0], rel=1e-12)
    assert lux[1] == pytest.approx(2 * lux[0], rel=1e-12)
    assert lux[2] < lux[0]
    assert found["resolved_lp_mm"][1] >= found["resolved_lp_mm"][0] * (1 - 1e-9)


def test_in_the_dark_nothing_is_resolved_and_light_limits(document):
    dark = sized(document, source__lamp__flux_lm=1e-9)
    assert dark.summary.resolved_lp_mm == 0
    assert dark.summary.smallest_gap_mm is None
    assert dark.summary.smallest_line_mm is None
    assert dark.summary.limited_by == "light"
    assert dark.detail.snr < 0.01


def test_the_part_that_limits_is_the_one_whose_ideal_gains_most(random_designs):
    table = columns(random_designs(120))
    found = evaluate(table)
    order = np.array([found[f"gain.{part}"] for part in PARTS])
    limited = found.limited_by()
    for row, part in enumerate(limited):
        if part is None:
            assert np.isnan(order[:, row]).all()
            continue
        gains = np.nan_to_num(order[:, row], nan=-np.inf)
        assert gains[PARTS.index(part)] >= gains.max() - 1e-6 * max(found["resolved_lp_mm"][row], 1.0)


def test_at_what_is_resolved_contrast_meets_what_is_needed(document):
    """The rule of the interface, from the reported numbers alone: contrast x MTF = threshold/SNR of a half-period cell."""
    report = sized(document, scene__target__detail_contrast=0.25, source__lamp__flux_lm=0.005)
    assert report.summary.limited_by == "light"
    product = 0.25 * np.prod([line.contrast for line in report.detail.ledger])
    half_period = 0.5 / report.summary.resolved_lp_mm
    cores = max(1.0, half_period**2 / (np.sqrt(3) / 2 * report.detail.pitch_at_target_mm**2))
    assert product == pytest.approx(5.0 / (report.detail.snr * np.sqrt(cores)), rel=1e-6)


def test_a_bare_light_guide_ends_at_the_exit_face(document):
    report = sized(document, scene=None, image=None, viewer=None, body=None, needs=None)
    answer = report.as_dict()
    assert answer["target"] is None
    assert answer["detail"] is None
    assert answer["fit"] is None
    assert answer["summary"]["needs_met"] is None
    assert report.light.steps[-1].name == "exit face"


def test_water_narrows_the_field_and_less_light_is_reflected_at_the_exit(document):
    air, water = sized(document), sized(document, scene__target__medium="water")
    assert water.summary.field_of_view_deg < air.summary.field_of_view_deg
    assert water.light.delivered_lm > air.light.delivered_lm


@pytest.mark.slow
def test_nothing_is_brighter_than_the_lamp_in_10000_designs(document):
    """Radiance per angle bin of the delivered beam over the cores alone, against the lamp's."""
    from random_designs import first_valid

    table = columns(first_valid(document, 10_000))
    for start in range(0, table.count, 500):
        few = table.take(np.arange(start, start + 500))
        lit = light(few)
        lamp = lit.after_lm["lamp"] / etendue_mm2_sr(
            diameter_mm=few["source.lamp.emitter_mm"], na=few["source.lamp.cone_na"]
        )
        per_bin = np.pi * lit.value["core_area_mm2"][:, None] * np.diff(lit.beam.sine2_edges, axis=1)
        assert np.all(lit.beam.bin_lm / per_bin <= lamp[:, None] * (1 + 1e-9))
