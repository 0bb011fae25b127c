"""Margins: linear cases in closed form, plain random sampling, single designs one by one, rules, aging, refusals."""

import argparse
import json
import time

import numpy as np
import pytest

from optics import presets
from optics.chain.columns import columns
from optics.chain.evaluate import evaluate
from optics.commands import margins as command
from optics.report.size import size
from optics.spec import OutOfRange
from optics.study.margins import margins, met, numbers_of
from optics.study.margins_aging import Aged, aged_columns, aged_from
from optics.study.margins_causes import halved, halved_weight, halving_gains, orthonormal, variance_shares
from optics.study.margins_draw import applied, broken_rules, drawn, triangular_quantile
from optics.study.margins_ranges import Tolerance, nominal_columns, tolerances

BARE = {"scene": None, "image": None, "viewer": None, "body": None, "needs": None}
FLUX, PACKING, LENGTH = "source.lamp.flux_lm", "guide.bundle.packing_fraction", "guide.bundle.length_m"


def of(path, low, value, high, **more):
    return Tolerance(path, value, low, high, "assumed", "assumed", **more)


def moments(low, value, high):
    """Mean and variance of a triangular distribution: textbook closed forms."""
    mean = (low + value + high) / 3
    return mean, (low**2 + value**2 + high**2 - low * value - low * high - value * high) / 18


def changed(document, **settings):
    return presets.resolve(presets.edited(document, {key.replace("__", "."): value for key, value in settings.items()}))


@pytest.fixture(scope="module")
def gearbox():
    return presets.open("gearbox_tooth")


# Closed forms


@pytest.mark.parametrize("triangle", [(0.0, 1.0, 2.0), (0.5, 1.0, 3.0), (2.0, 2.0, 5.0), (-1.0, 4.0, 4.0)])
def test_the_triangle_has_its_textbook_moments(triangle):
    low, value, high = triangle
    share = (np.arange(200_000) + 0.5) / 200_000
    found = triangular_quantile(share=share, low=low, value=value, high=high)
    mean, variance = moments(*triangle)
    assert found.mean() == pytest.approx(mean, rel=1e-6)
    assert found.var() == pytest.approx(variance, rel=1e-5)
    assert low <= found.min() <= found.max() <= high
    assert np.all(np.diff(found) > 0)


@pytest.mark.parametrize("tolerance", [of("x", 0.5, 1.0, 3.0), of("x", 1.0, 1.0, 3.0), of("x", 3.0, 5.0, 5.0)])
def test_polynomials_and_halving_under_each_triangle(tolerance):
    """By brute quadrature: orthonormal, mean 0; the weights of halving have mean 1 and give the halved moments."""
    share = (np.arange(100_000) + 0.5) / 100_000
    values = triangular_quantile(share=share, low=tolerance.low, value=tolerance.value, high=tolerance.high)
    basis = orthonormal(tolerance, values, 3)
    np.testing.assert_allclose(basis.T @ basis / len(values), np.eye(3), atol=2e-4)
    np.testing.assert_allclose(basis.mean(axis=0), 0.0, atol=1e-4)
    weight = halved_weight(tolerance, values)
    mean, variance = moments(
        *(float(halved(tolerance, end)) for end in (tolerance.low, tolerance.value, tolerance.high))
    )
    assert weight.mean() == pytest.approx(1.0, abs=1e-6)
    assert (weight * values).mean() == pytest.approx(mean, rel=1e-5)
    assert (weight * (values - mean) ** 2).mean() == pytest.approx(variance, rel=1e-4)
    assert halved(tolerance, values).var() == pytest.approx(variance, rel=1e-4)


def test_a_product_of_two_against_closed_form(document):
    """Delivered lumens go as flux times packing: mean, variance and its shares in closed form.

    Var(fp) = (Vf + mf^2)(Vp + mp^2) - mf^2 mp^2; the share of f alone is Vf mp^2, of both together Vf Vp.
    """
    triangles = (300.0, 400.0, 550.0), (0.7, 0.82, 0.85)
    ranges = tuple(of(path, *triangle) for path, triangle in zip((FLUX, PACKING), triangles))
    table = columns([changed(document, **BARE).fiberscope])
    found = drawn(table, ranges, 1000, 3)
    lumens = evaluate(applied(table, ranges, found.values))["delivered_lm"]
    one = float(evaluate(table)["delivered_lm"][0]) / (400.0 * 0.82)
    (flux, flux_var), (packing, packing_var) = (moments(*triangle) for triangle in triangles)
    total = (flux_var + flux**2) * (packing_var + packing**2) - flux**2 * packing**2
    assert lumens.mean() == pytest.approx(one * flux * packing, rel=1e-3)
    assert lumens.var() == pytest.approx(one**2 * total, rel=0.03)
    shares = variance_shares(ranges=ranges, values=found.values, result=lumens)
    np.testing.assert_allclose(
        [*shares.first_share, shares.together_share],
        [flux_var * packing**2 / total, packing_var * flux**2 / total, flux_var * packing_var / total],
        atol=1e-6,
    )
    assert shares.unexplained_share < 1e-9


def test_one_linear_need_and_its_halving_in_closed_form(document):
    """Light is linear in the lamp: 90 % of it is met with 0.82 under (300, 400, 500), with 0.98 under (350, 400, 450)."""
    lux = size(changed(document).fiberscope).summary.target_center_lux
    design = changed(document, needs={"target_center_lux": 0.9 * lux})
    found = margins(design, ranges=(of(FLUX, 300.0, 400.0, 500.0),), samples=400)
    (need,) = found.new.needs
    assert need.probability == found.new.all_needs == pytest.approx(0.82, abs=0.003)
    assert need.standard_error == pytest.approx(np.sqrt(0.82 * 0.18 / 400), rel=0.01)
    assert (found.tighten.path, found.tighten.low, found.tighten.high) == (FLUX, 350.0, 450.0)
    assert found.tighten.probability == pytest.approx(0.98, abs=0.003)
    assert found.tighten.gain_probability == pytest.approx(0.16, abs=0.006)
    assert found.causes[0].of == "target_center_lux"
    assert found.causes[0].drivers[0].share == pytest.approx(1.0, abs=1e-9)
    assert found.causes[0].soft_share == pytest.approx(1.0, abs=1e-9)


def test_the_foretold_gain_agrees_with_runs():
    """Halving foretold by weights against a second draw from the halved triangle, for a nonlinear rule."""
    ranges = (of("a", 0.0, 1.0, 2.0), of("b", 0.0, 0.5, 2.0), of("c", 0.0, 1.0, 1.5))

    def ok(values):
        return values[:, 0] * values[:, 1] + 0.2 * values[:, 2] ** 2 < 1.0

    random = np.random.default_rng(1)
    count = 200_000
    values = np.column_stack([random.triangular(item.low, item.value, item.high, count) for item in ranges])
    gains = halving_gains(ranges=ranges, values=values, met=ok(values))
    for row, item in enumerate(ranges):
        ends = (float(halved(item, end)) for end in (item.low, item.value, item.high))
        tried = values.copy()
        tried[:, row] = random.triangular(*ends, count)
        assert gains[row] == pytest.approx(ok(tried).mean() - ok(values).mean(), abs=0.006)


def test_shares_of_a_standard_function():
    """Sobol's g-function on flat inputs has closed-form indices; triangles need a test of their own: x + y^2 + x z."""
    ranges = tuple(of(name, -1.0, 0.0, 1.0) for name in "xyz")
    random = np.random.default_rng(5)
    values = random.triangular(-1.0, 0.0, 1.0, (4000, 3))
    x, y, z = values.T
    shares = variance_shares(ranges=ranges, values=values, result=x + y**2 + x * z)
    # E x^2 = 1/6, E x^4 = 1/15 under the symmetric triangle on (-1, 1)
    parts = np.array([1 / 6, 1 / 15 - 1 / 36, 0.0])
    total = parts.sum() + 1 / 36
    np.testing.assert_allclose(shares.first_share, parts / total, atol=1e-9)
    assert shares.together_share == pytest.approx(1 / 36 / total, abs=1e-9)


# Independent routes


def plainly_sampled(design, count, seed):
    """Needs met by plain random sampling: numpy's own triangles, rule of the spot by hand, curves scaled as whole arrays."""
    random = np.random.default_rng(seed)
    ranges = tolerances(design)
    table = columns([design.fiberscope])
    spot = design.fiberscope.source.launch
    values = np.column_stack([random.triangular(item.low, item.value, item.high, 2 * count) for item in ranges])
    emitter = values[:, [item.path for item in ranges].index("source.lamp.emitter_mm")]
    allowed = spot.transmission * emitter**2 <= (spot.spot_mm * spot.cone_na) ** 2
    kept = values[allowed][:count]
    return met(design.fiberscope.needs, numbers_of(applied(table, ranges, kept)))


def agree(found, plain, count):
    for need in found.new.needs:
        other = plain[need.name].mean()
        error = np.hypot(need.standard_error, np.sqrt(max(other * (1 - other), 1 / count) / count))
        assert abs(need.probability - other) < 3.5 * error, need.name


def test_few_samples_agree_with_plain_random_sampling(gearbox):
    found = margins(gearbox, samples=300, seed=1)
    assert 0.5 < found.new.needs[0].probability < 0.95
    agree(found, plainly_sampled(gearbox, 1200, 11), 1200)


@pytest.mark.slow
def test_2000_samples_agree_with_20000_plain_ones(gearbox):
    found = margins(gearbox, samples=2000)
    plain = plainly_sampled(gearbox, 20_000, 12)
    agree(found, plain, 20_000)
    both = np.logical_and.reduce(list(plain.values())).mean()
    assert abs(found.new.all_needs - both) < 3.5 * np.hypot(
        found.new.all_needs_standard_error, np.sqrt(both * (1 - both) / 20_000)
    )


@pytest.mark.slow
def test_2000_samples_take_less_than_five_seconds(gearbox):
    took = []
    for _ in range(3):
        start = time.process_time()
        margins(gearbox, samples=2000)
        took.append(time.process_time() - start)
    assert np.median(took) < 5.0


def test_each_sample_is_the_size_of_its_own_document(gearbox):
    """A few samples written out as documents, curves too: the same numbers by `size`."""
    given = {"guide.bundle.bends.0.radius_mm": (25.0, 32.0), "guide.bundle.diameter_mm": (1.9, 2.1)}
    ranges = tolerances(gearbox, given)
    table = columns([gearbox.fiberscope])
    values = drawn(table, ranges, 4, 7).values
    numbers = numbers_of(applied(table, ranges, values))
    for row, sample in enumerate(values):
        settings = {}
        for item, value in zip(ranges, sample):
            if item.curve:
                *tables, last = item.path.split(".")
                curve = gearbox.fiberscope
                for part in (*tables, last):
                    curve = getattr(curve, part)
                scaled = [value * one for one in curve.value]
                settings[item.path] = {"wavelength_nm": list(curve.wavelength_nm), "value": scaled}
            else:
                settings[item.path] = float(value)
        report = size(presets.resolve(presets.edited(gearbox.document, settings)).fiberscope)
        assert numbers["delivered_lm"][row] == pytest.approx(report.light.delivered_lm, rel=1e-9)
        for name in ("target_center_lux", "evenness", "smallest_gap_mm", "outer_diameter_mm", "bend_radius_mm"):
            assert numbers[name][row] == pytest.approx(getattr(report.summary, name), rel=1e-9), name


# What is varied, and what can exist


def test_presets_and_the_user_state_the_tolerances(gearbox):
    own = {item.path: item for item in tolerances(gearbox)}
    assert (own[FLUX].low, own[FLUX].value, own[FLUX].high, own[FLUX].basis) == (300.0, 400.0, 500.0, "remembered")
    assert own["guide.fiber.attenuation"].curve
    assert own["guide.fiber.attenuation"].soft
    assert not own["scene.target.reflectance"].soft
    assert LENGTH not in own
    given = tolerances(gearbox, {FLUX: (390.0, 410.0), LENGTH: (1.7, 1.9)})
    assert {item.path: (item.low, item.high, item.basis) for item in given if item.basis == "given"} == {
        FLUX: (390.0, 410.0, "given"),
        LENGTH: (1.7, 1.9, "given"),
    }
    assert len(given) == len(own) + 1
    assert [item.path for item in tolerances(gearbox, {LENGTH: (1.7, 1.9)}, only=True)] == [LENGTH]


def test_samples_that_cannot_exist_are_drawn_again_and_counted(gearbox):
    """Core below fiber, core below pitch: every sample obeys; the share that broke the rule is the one in closed form."""
    ranges = (of("guide.fiber.core_um", 44.0, 46.0, 54.0), of("image.bundle.pitch_um", 9.5, 10.0, 10.5))
    table = columns([gearbox.fiberscope])
    found = drawn(table, ranges, 2000, 0)
    assert found.values[:, 0].max() < 50.0
    assert not broken_rules(applied(table, ranges, found.values))
    # beyond 50 lies (54 - 50)^2 / ((54 - 44)(54 - 46)) = 0.2 of the triangle
    assert found.redrawn == pytest.approx(400, abs=1)
    ((said, times),) = found.because
    assert "guide.fiber.core_um" in said
    assert times == found.redrawn


def test_a_reflectance_never_exceeds_one(document):
    white = changed(document, scene__target__preset="white_paint")
    ranges = (of("scene.target.reflectance", 0.5, 1.0, 3.0, curve=True),)
    table = columns([white.fiberscope])
    found = drawn(table, ranges, 200, 0)
    assert found.redrawn > 0
    assert applied(table, ranges, found.values).spectrum("scene.target.reflectance").max() <= 1.0


def test_tolerances_that_leave_nothing_are_refused(gearbox):
    ranges = (of("guide.fiber.core_um", 60.0, 61.0, 62.0),)
    with pytest.raises(OutOfRange, match=r"100% of the samples are designs that cannot exist .*guide.fiber.core_um"):
        drawn(columns([gearbox.fiberscope]), ranges, 100, 0)


@pytest.mark.parametrize(
    ("path", "ends", "said"),
    [
        ("guide.bundle.lenth_m", (1.0, 2.0), r"guide.bundle has no 'lenth_m' \(nearest: length_m\)"),
        (LENGTH, (2.0, 3.0), "it must be limits around the nominal value 1.8"),
        (LENGTH, (1.8, 1.8), "it must be limits around the nominal value 1.8"),
        (LENGTH, (-1.0, 3.0), "both must be above 0 and at most 1000"),
        ("scene.ports.count", (1.0, 3.0), "the value is a whole number"),
        ("body.section.outer_diameter_mm", (3.0, 4.0), "the value is 'solve'"),
        ("scene.ports.offset_mm", (1.0, 2.0), "the value is absent"),
        ("guide.fiber.attenuation", (1.2, 1.4), "factors on the curve, around 1"),
        ("guide.fiber.attenuation", (-0.5, 1.4), "both must be 0 or more"),
        ("guide.bundle.bends.3.radius_mm", (20.0, 40.0), "guide.bundle.bends has no '3'"),
        ("needs.evenness", (0.1, 0.5), "is a need"),
    ],
)
def test_impossible_tolerances_are_refused(gearbox, path, ends, said):
    with pytest.raises(OutOfRange, match=said):
        tolerances(gearbox, {path: ends})


def test_a_diameter_to_be_solved_for_is_settled_once(document):
    """The guide is built to the nominal section; a thicker wall then makes the tube no longer hold it."""
    design = changed(document, guide__bundle__diameter_mm="solve", body__section__outer_diameter_mm=4.2)
    ranges = tolerances(design, {"body.section.wall_mm": (0.44, 0.46)}, only=True)
    table = nominal_columns(design.fiberscope)
    figures = evaluate(applied(table, ranges, np.array([[0.44], [0.46]])))
    assert figures["guide_diameter_mm"][0] == figures["guide_diameter_mm"][1]
    assert figures["fits"].tolist() == [1.0, 0.0]
    assert figures["guide_diameter_mm"][0] == pytest.approx(
        float(evaluate(columns([design.fiberscope]))["guide_diameter_mm"][0])
    )


# Aging


def test_aging_acts_as_in_single_designs(gearbox, document):
    """Lamp and broken fibers multiply; browning and both against documents of their own."""
    table = columns([gearbox.fiberscope])
    new = numbers_of(table)
    dim = numbers_of(aged_columns(table, Aged(broken_fraction=0.1, lamp_share=0.5), table))
    assert dim["delivered_lm"][0] == pytest.approx(0.45 * new["delivered_lm"][0], rel=1e-12)
    curve = gearbox.fiberscope.guide.fiber.attenuation
    image = gearbox.fiberscope.image.bundle.attenuation
    settings = {
        "guide.fiber.attenuation": {"wavelength_nm": curve.wavelength_nm, "value": [x + 0.3 for x in curve.value]},
        "image.bundle.attenuation": {"wavelength_nm": image.wavelength_nm, "value": [x + 0.3 for x in image.value]},
    }
    by_hand = size(presets.resolve(presets.edited(document, settings)).fiberscope)
    brown = numbers_of(aged_columns(table, Aged(browning_db_m=0.3), table))
    assert brown["delivered_lm"][0] == pytest.approx(by_hand.light.delivered_lm, rel=1e-9)
    assert brown["smallest_gap_mm"][0] == pytest.approx(by_hand.summary.smallest_gap_mm, rel=1e-9)


def test_dark_cores_are_unevenness_by_brute_force(gearbox):
    """A million cores with a spread of 5 %, one in fifty dark: standard deviation over mean."""
    table = columns([gearbox.fiberscope])
    stated = gearbox.fiberscope.image.bundle.dead_fraction
    aged = aged_columns(table, Aged(dead_fraction=0.02 + stated), table)
    random = np.random.default_rng(2)
    cores = (1 + 0.05 * random.standard_normal(1_000_000)) * (random.random(1_000_000) >= 0.02)
    assert aged["image.bundle.transmission_spread"][0] == pytest.approx(cores.std() / cores.mean(), rel=0.01)
    same = aged_columns(table, Aged(dead_fraction=stated), table)
    assert same["image.bundle.transmission_spread"][0] == pytest.approx(0.05, rel=1e-12)


def test_a_rated_lamp_ages_with_its_rating(document):
    design = changed(document, source__launch__form="rated", source__launch__rated_lm=2.0)
    table = columns([design.fiberscope])
    whole, half = (numbers_of(aged_columns(table, Aged(lamp_share=share), table)) for share in (1.0, 0.5))
    assert half["delivered_lm"][0] == pytest.approx(0.5 * whole["delivered_lm"][0], rel=1e-12)


def test_aged_stands_beside_new(gearbox):
    found = margins(gearbox, samples=150, aging=aged_from("lamp=0.5,browning_db_m=0.1"))
    answer = found.as_dict()
    assert [need["name"] for need in answer["aged"]["needs"]] == [need["name"] for need in answer["needs"]]
    assert answer["aged"]["all_needs"] <= answer["all_needs"]
    assert answer["aged"]["condition"]["lamp_share"] == 0.5


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("lamb=0.5", r"nearest: lamp"),
        ("lamp=x", "--aged lamp is 'x'; it must be a number"),
        ("lamp=1.5", "it must be above 0 and at most 1"),
        ("broken_fraction=1", "from 0 to below 1"),
        ("browning_db_m=-1", "0 or more"),
        ("", "--aged is empty"),
    ],
)
def test_impossible_aging_is_refused(text, said):
    with pytest.raises(OutOfRange, match=said):
        aged_from(text)


def test_fewer_dead_cores_than_new_are_refused(gearbox):
    with pytest.raises(OutOfRange, match=r"at least 0.002"):
        margins(gearbox, samples=100, aging=Aged(dead_fraction=0.001))


# The whole answer


def run(capsys, *arguments):
    parser = argparse.ArgumentParser()
    command.add_arguments(parser)
    status = command.run(parser.parse_args(arguments))
    return status, capsys.readouterr().out


def test_the_json_answer(capsys):
    arguments = ("gearbox_tooth", "--samples", "200", "--json", "--tolerance", "guide.bundle.length_m=1.7:1.9")
    (status, first), (_, second) = (run(capsys, *arguments) for _ in range(2))
    assert status == 0
    assert first == second
    assert "NaN" not in first
    answer = json.loads(first)
    assert all({"name", "probability", "standard_error"} <= set(need) for need in answer["needs"])
    assert 0 <= answer["all_needs"] <= min(need["probability"] for need in answer["needs"])
    shares = [driver["share"] for driver in answer["drivers"]]
    assert shares == sorted(shares, reverse=True)
    assert sum(shares) + answer["together_share"] + answer["unexplained_share"] == pytest.approx(1.0, abs=1e-9)
    assert {"path", "share", "basis"} <= set(answer["drivers"][0])
    assert "image.bundle.transmission_spread" in answer["soft"]
    assert any(item["path"] == LENGTH and item["basis"] == "given" for item in answer["tolerances"])
    other = json.loads(run(capsys, *arguments, "--seed", "5")[1])
    assert other["needs"] != answer["needs"]
    assert abs(other["all_needs"] - answer["all_needs"]) < 5 * answer["all_needs_standard_error"]


def test_the_text_reads_well(capsys):
    _, out = run(capsys, "gearbox_tooth", "--samples", "200", "--aged", "lamp=0.7,dead_fraction=0.003")
    for words in (
        "All 7 needs are met in",
        "aged in",
        "What moves smallest_gap_mm",
        "What to tighten",
        "assumed or remembered",
    ):
        assert words in out
    assert "nan" not in out
    assert max(map(len, out.splitlines())) <= 140


def test_nothing_resolved_is_told_not_hidden(document):
    dark = changed(document, source__lamp__flux_lm=1e-6, needs={"smallest_gap_mm": 0.2})
    found = margins(dark, samples=100)
    answer = found.as_dict()
    assert answer["all_needs"] == 0
    json.dumps(answer, allow_nan=False)
    assert "missed in every sample" in answer["tighten_because"]


def test_a_bare_guide_has_margins_too(document):
    found = margins(changed(document, **BARE), samples=200)
    assert found.new.all_needs is None
    assert found.causes[0].of == "delivered_lm"
    assert found.causes[0].drivers[0].path == FLUX
    assert "no needs" in found.tighten_because


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (("--samples", "10"), "--samples is 10; it must be from 100 to 100,000"),
        (("--seed", "-1"), "--seed is -1"),
        (("--tolerance", "guide.bundle.length_m"), "is not of the form path=low:high"),
        (("--tolerance", "guide.bundle.length_m=1:nan"), "is not of the form path=low:high"),
        (("--only",), "states no tolerances"),
    ],
)
def test_bad_arguments_are_one_sentence(capsys, arguments, said):
    with pytest.raises(OutOfRange, match=said) as wrong:
        run(capsys, "gearbox_tooth", *arguments)
    assert "\n" not in str(wrong.value)
