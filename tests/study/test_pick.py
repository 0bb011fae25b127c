"""Pick: its sets make its numbers, nothing beats a pick, failures say what fails first, changes are the smallest that help."""

import json

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optics import presets
from optics.chain.axes import evaluate_possible, holding
from optics.chain.columns import columns
from optics.chain.evaluate import evaluate
from optics.needs import AT_MOST
from optics.report.size import size
from optics.spec import OutOfRange
from optics.study.pick import MOST, candidates, objectives, pick
from optics.study.pick_axes import widest_mm
from optics.study.pick_cost import cost_class
from optics.study.pick_front import pareto_rows
from optics.study.pick_knobs import KNOBS, usual_bounds
from optics.study.pick_needs import BESIDES, ORDER, margins, meeting
from optics.study.pick_parts import focal_mm, preferred

CANDIDATES = 500
DEMOS = ("gearbox_tooth", "airway_small_animal", "injector_hole", "turbine_casing")


@pytest.fixture(scope="module")
def found():
    """A function: the picks of a demo design among a seeded choice of candidates."""
    kept = {}

    def made(name):
        if name not in kept:
            kept[name] = pick(presets.open(name), most=CANDIDATES, nearest=16)
        return kept[name]

    return made


def sized(name, made):
    return size(presets.resolve(presets.edited(presets.open(name).document, made)).fiberscope)


def passes(report):
    return all(line.met for line in report.needs) and report.fit.passes is not False


@pytest.mark.parametrize("name", DEMOS)
def test_a_set_makes_the_summary(found, name):
    for each in found(name).picks[::3]:
        report = sized(name, each.set)
        for key in report.summary.__slots__:
            got, wanted = getattr(each.summary, key), getattr(report.summary, key)
            assert got == (wanted if isinstance(wanted, str | bool | None) else pytest.approx(wanted, rel=1e-9)), key
        assert each.delivered_lm == pytest.approx(report.light.delivered_lm, rel=1e-9)
        assert [line.name for line in each.needs] == [line.name for line in report.needs]
        assert passes(report)


def test_a_set_survives_the_command_line(found):
    """Text and back: what is typed after --set is what the set says."""
    for each in found("airway_small_animal").picks:
        assert dict(presets.parse_setting(f"{path}={value}") for path, value in each.set.items()) == each.set


def test_settings_given_stand_in_every_set():
    given = {"guide.bundle.length_m": 2.4, "source.launch.spot_mm": 2.6, "image.bundle.veil_ratio": 0.02}
    answer = pick(presets.open("gearbox_tooth"), given, most=250, nearest=0)
    assert answer.picks
    for each in answer.picks:
        assert each.set["guide.bundle.length_m"] == 2.4
        assert ("image.bundle.veil_ratio" in each.set) == (each.set.get("image.form") != "chip")
        report = sized("gearbox_tooth", each.set)
        assert report.summary.smallest_gap_mm == pytest.approx(each.summary.smallest_gap_mm, rel=1e-9)
        assert report.summary.target_center_lux == pytest.approx(each.summary.target_center_lux, rel=1e-9)


@settings(max_examples=4, deadline=None)
@given(
    length=st.floats(0.5, 4.0),
    distance=st.floats(11.0, 39.0),
    medium=st.sampled_from(["air", "water"]),
    field=st.floats(25.0, 70.0) | st.none(),
    wall=st.floats(0.1, 0.5),
    launch=st.sampled_from(["matched", "rated", "butt"]),
    seed=st.integers(0, 99),
)
def test_sets_of_any_job_make_their_numbers(length, distance, medium, field, wall, launch, seed):
    changes = {"guide.bundle.length_m": length, "scene.target.distance_mm": distance, "scene.target.medium": medium}
    changes |= {"needs.field_of_view_deg": field, "body.section.wall_mm": wall, "source.launch.form": launch}
    changes |= {"source.launch.transmission": 0.7} if launch == "matched" else {}
    changes |= {"source.launch.rated_lm": 20.0} if launch == "rated" else {}
    answer = pick(presets.open("gearbox_tooth"), changes, most=40, nearest=0, seed=seed)
    assert answer.met + len(answer.failed) == answer.candidates
    for each in answer.picks[::2]:
        summary = sized("gearbox_tooth", each.set).summary
        assert summary.target_center_lux == pytest.approx(each.summary.target_center_lux, rel=1e-9)
        assert summary.smallest_gap_mm == pytest.approx(each.summary.smallest_gap_mm, rel=1e-9)
        assert summary.outer_diameter_mm == pytest.approx(each.summary.outer_diameter_mm, rel=1e-9)


def test_values_that_override_a_preset_are_set_anew(found):
    """The airway's lamp is a preset with 500 lm; another lamp must not keep them."""
    other = [each for each in found("airway_small_animal").picks if "source.lamp.preset" in each.set]
    assert other
    for each in other:
        assert each.set["source.lamp.flux_lm"] != 500.0


def test_the_design_as_it_stands_is_a_candidate():
    design = presets.open("turbine_casing")
    made, _ = candidates(design, {}, most=10, seed=0)
    assert made.settings(0) == {}
    one = evaluate(columns([design.fiberscope]))
    for name in ("center_lux", "smallest_gap_mm", "outer_diameter_mm", "delivered_lm"):
        assert evaluate(made.table.take(np.array([0])))[name][0] == pytest.approx(one[name][0], rel=1e-12)


def test_the_same_every_time_and_a_seed_of_its_own():
    design = presets.open("gearbox_tooth")
    first, second = (pick(design, most=150, nearest=3, seed=3) for _ in range(2))
    assert first.picks == second.picks
    assert list(first.failed) == list(second.failed)
    made = [tuple(map(tuple, candidates(design, {}, most=150, seed=seed)[0].choice)) for seed in (3, 4)]
    assert made[0] != made[1]
    assert len(set(made[0])) == 150


# The Pareto set


@settings(max_examples=80, deadline=None)
@given(rows=st.lists(st.tuples(*[st.integers(0, 4)] * 3), min_size=1, max_size=60))
def test_the_front_is_what_pairs_say(rows):
    small = np.array(rows, float)
    front = set(pareto_rows(small).tolist())
    for row, mine in enumerate(small):
        beaten = any((other <= mine).all() and (other < mine).any() for other in small)
        earlier = any((other == mine).all() for other in small[:row])
        assert (row in front) == (not beaten and not earlier)


@pytest.mark.parametrize("name", ["gearbox_tooth", "airway_small_animal"])
def test_nothing_that_does_the_job_beats_a_pick(found, name):
    """Against all candidates, each with every other, on the chain's own numbers."""
    design = presets.open(name)
    made, _ = candidates(design, {}, most=CANDIDATES, seed=0)
    figures = evaluate(made.table)
    met = np.flatnonzero(meeting(margins(design.fiberscope.needs, made.table, figures)))
    small = objectives(figures, cost_class(made.table), met)
    rows = [tuple(small[at]) for at in range(len(met)) if not _beaten(small, small[at])]
    keys = ("smallest_gap_mm", "target_center_lux", "outer_diameter_mm", "bend_radius_mm")
    picked = [[*(getattr(each.summary, key) for key in keys), each.cost_class] for each in found(name).picks]
    wanted = np.array(sorted(set(rows))) * [1, -1, 1, 1, 1]
    assert len(picked) == len(wanted)
    for row in np.array(picked):
        assert np.isclose(wanted, row, rtol=1e-7).all(axis=1).sum() == 1


def _beaten(small, mine):
    return bool(((small <= mine).all(axis=1) & (small < mine).any(axis=1)).any())


@settings(max_examples=40, deadline=None)
@given(loose=st.floats(0.02, 0.5), share=st.floats(0.3, 1.0), lux=st.floats(100.0, 1e5), more=st.floats(1.0, 5.0))
def test_asking_for_more_never_lets_more_through(spread, loose, share, lux, more):
    made, figures, needs = spread
    easy = needs.model_copy(update={"smallest_gap_mm": loose, "target_center_lux": lux})
    hard = needs.model_copy(update={"smallest_gap_mm": loose * share, "target_center_lux": lux * more})
    easy, hard = (meeting(margins(each, made.table, figures)) for each in (easy, hard))
    assert not (hard & ~easy).any()


@pytest.fixture(scope="module")
def spread():
    design = presets.open("gearbox_tooth")
    made, _ = candidates(design, {}, most=400, seed=1)
    return made, evaluate_possible(made.table)[0], design.fiberscope.needs


# What fails, and what would help


@pytest.mark.parametrize("name", DEMOS)
def test_what_fails_first_is_first_in_the_order_of_the_light(found, name):
    from optics.report.verdict import NAMES

    failed = found(name).failed
    for each in failed[:: max(len(failed) // 12, 1)]:
        report = sized(name, each.set)
        unmet = {line.name for line in report.needs if not line.met}
        first = next((need for need in ORDER if need in unmet), None)
        if first is None:
            assert report.fit.passes is False or "stand" in each.first_reason
        else:
            assert each.first_reason.startswith(f"{NAMES[first]}: ")


def test_every_candidate_is_met_or_failed(found):
    for name in DEMOS:
        answer = found(name)
        assert answer.met + len(answer.failed) == answer.candidates == CANDIDATES
        assert sum(answer.failing.values()) == len(answer.failed)
        assert len(answer.picks) <= answer.met


@pytest.mark.parametrize("name", DEMOS)
def test_a_change_is_enough_and_less_of_it_is_not(found, name):
    changed = [each for each in found(name).failed[:16] if each.smallest_change]
    for each in changed[::3]:
        change = each.smallest_change
        assert not passes(sized(name, each.set))
        assert passes(sized(name, each.set | {change.path: change.after}))
        less = change.before + 0.98 * (change.after - change.before)
        assert not passes(sized(name, each.set | {change.path: less}))
    assert changed


def test_no_smaller_change_of_one_number_helps(found):
    """A fine scan of every number that pick may turn, up to just below the change that it names."""
    name = "airway_small_animal"
    needs, scanned = presets.open(name).fiberscope.needs, 0
    for each in [each for each in found(name).failed[:16] if each.smallest_change][::8]:
        table = columns([presets.resolve(presets.edited(presets.open(name).document, each.set)).fiberscope])
        change = each.smallest_change
        most = abs(np.log(change.after / change.before)) * 0.97
        for knob in KNOBS:
            start = table[knob.path][0]
            if not start > 0:
                continue
            tried = start * np.exp(np.linspace(-most, most, 41))
            low, high = usual_bounds(knob.path)
            tried = tried[(tried >= min(low, start)) & (tried <= max(high, start))]
            many = table.take(np.zeros(len(tried), int)).replaced({knob.path: tried})
            many = many.take(np.flatnonzero(holding(many)))
            figures, ready = evaluate_possible(many)
            assert not (ready & meeting(margins(needs, many, figures))).any(), (knob.path, change)
            scanned += many.count
    assert scanned > 500


def test_knobs_are_numbers_with_usual_bounds():
    for knob in KNOBS:
        low, high = usual_bounds(knob.path)
        assert low < high
        assert set(knob.up) | set(knob.down) <= {*ORDER, *BESIDES}


# Never an empty page


def relaxed_passes(name, relaxation, more=1.0):
    """Whether the candidate passes with all limits relaxed, each only a share `more` of the way."""
    changes = {c.path: c.before + more * (c.after - c.before) for c in relaxation.relax}
    return passes(sized(name, relaxation.set | changes))


def test_nothing_fits_so_a_limit_gives_way(found):
    answer = found("injector_hole")
    assert not answer.picks
    assert answer.nearest_relaxation.relax
    assert relaxed_passes("injector_hole", answer.nearest_relaxation)
    assert not relaxed_passes("injector_hole", answer.nearest_relaxation, more=0.97)


@pytest.mark.parametrize(
    "given",
    [
        {"needs.smallest_gap_mm": 0.004},
        {"needs.target_center_lux": 5e8},
        {"needs.smallest_gap_mm": 0.004, "needs.outer_diameter_mm": 1.0},
        {"body.passage.bore_mm": 2.0, "needs.outer_diameter_mm": 6.0},
    ],
)
def test_the_relaxation_is_just_enough(given):
    name = "gearbox_tooth"
    answer = pick(presets.open(name), given, most=250, nearest=0)
    assert not answer.met
    assert relaxed_passes(name, answer.nearest_relaxation)
    assert not relaxed_passes(name, answer.nearest_relaxation, more=0.97)
    assert {change.path for change in answer.nearest_relaxation.relax} >= {
        path for path in given if path in ("needs.smallest_gap_mm", "needs.target_center_lux")
    }


def test_one_need_is_relaxed_where_one_is_enough():
    answer = pick(presets.open("gearbox_tooth"), {"needs.smallest_gap_mm": 0.004}, most=250, nearest=0)
    assert [change.path for change in answer.nearest_relaxation.relax] == ["needs.smallest_gap_mm"]


# What may be chosen


def test_impossible_combinations_are_masked():
    """Placed ports have room for small guides only; the rest is masked, and what stays resolves."""
    ports = [{"x_mm": side * 1.4, "y_mm": 0.0, "diameter_mm": 1.0} for side in (1, -1)]
    given = {"scene.ports.form": "placed", "scene.ports.ports": ports, "guide.bundle.diameter_mm": 1.2}
    answer = pick(presets.open("gearbox_tooth"), given, most=600, nearest=0)
    assert answer.impossible > 100
    assert answer.candidates + answer.impossible == 600
    document = presets.open("gearbox_tooth").document
    for each in [*answer.picks, *answer.failed[::25]]:
        presets.resolve(presets.edited(document, each.set))


def test_heat_and_steam_rule_materials_out():
    base = {"body.handling.bend_radius_mm": 25.0}
    hot = pick(
        presets.open("gearbox_tooth"), base | {"body.handling.highest_temperature_c": 110.0}, most=500, nearest=0
    )
    steamed = pick(presets.open("gearbox_tooth"), base | {"body.handling.sterilization": "steam"}, most=500, nearest=0)
    for answer, said in ((hot, "stand the heat"), (steamed, "stand steam")):
        assert any(said in each.first_reason for each in answer.failed)
        for each in answer.picks:
            scope = presets.resolve(presets.edited(presets.open("gearbox_tooth").document, each.set)).fiberscope
            assert scope.guide.fiber.highest_temperature_c >= 110.0
            assert answer is hot or scope.guide.fiber.steam


def test_ultraviolet_work_gets_ultraviolet_lamps():
    given = {"needs.smallest_gap_mm": None, "needs.target_uva_w_m2": 10.0, "source.lamp": {"preset": "uva_led_365nm"}}
    given |= {"needs.target_center_lux": None, "needs.evenness": None}
    given |= {
        "source.launch.form": "butt",
        "guide.fiber.preset": "silica_uv",
        "needs.target_center_lux": None,
        "needs.evenness": None,
    }
    answer = pick(presets.open("gearbox_tooth"), given, most=300, nearest=0)
    assert answer.picks
    for each in answer.picks:
        assert each.set.get("source.lamp.preset", "uva_led_365nm") in ("uva_led_365nm", "short_arc_xenon")
        assert next(line.got for line in each.needs if line.name == "target_uva_w_m2") >= 10.0


def test_without_needs_everything_passes():
    answer = pick(presets.open("gearbox_tooth"), {"needs": {}, "body.passage": {}}, most=200, nearest=3)
    assert answer.met + len(answer.failed) == 200
    assert answer.picks[0].summary.needs_met is None


def test_a_bare_light_guide_has_guides_and_lamps_to_choose_from():
    bare = {table: None for table in ("scene", "image", "viewer", "body", "needs")}
    answer = pick(presets.open("gearbox_tooth"), bare, most=150, nearest=0)
    assert answer.met == answer.candidates == 24 * 4 + 1
    assert max(each.delivered_lm for each in answer.picks) > 100
    assert all(each.summary.smallest_gap_mm is None for each in answer.picks)


def test_a_chip_design_may_become_a_bundle_and_back():
    chip = presets.resolve(presets.edited(presets.open("gearbox_tooth").document, {"image.form": "chip"}))
    answer = pick(chip, most=300, nearest=0)
    for each in answer.picks:
        scope = presets.resolve(presets.edited(chip.document, each.set)).fiberscope
        assert (scope.viewer is None) == (scope.image.form == "chip")
    forms = {each.set.get("image.form", "chip") for each in [*answer.picks, *answer.failed]}
    assert forms == {"bundle", "chip"}


def test_lenses_are_made_for_the_field_of_view():
    """Focal lengths to three digits: the field that is wanted within what the digits allow, in air and in water."""
    for medium in ("air", "water"):
        settings = {"scene.target.medium": medium, "image.objective.pupil_depth_mm": 0.4}
        design = presets.resolve(presets.edited(presets.open("gearbox_tooth").document, settings))
        for wanted in (30.0, 55.0):
            focal = focal_mm(design.fiberscope, image_mm=1.25, field_of_view_deg=wanted)
            made = {"image.bundle.diameter_mm": 1.25, "image.objective.focal_mm": focal}
            report = size(presets.resolve(presets.edited(design.document, made)).fiberscope)
            assert report.summary.field_of_view_deg == pytest.approx(wanted, rel=6e-3)


@given(number=st.floats(0.011, 99.0))
def test_preferred_numbers_are_near_and_few(number):
    chosen = preferred(number)
    assert abs(np.log(chosen / number)) <= np.log(1.6 / 1.25) / 2 * 1.001  # half the widest step of the series
    assert preferred(chosen) == chosen


def test_the_tube_is_the_tightest_limit():
    document = presets.open("gearbox_tooth").document

    def widest(**given):
        changes = {path.replace("__", "."): value for path, value in given.items()}
        return widest_mm(presets.resolve(presets.edited(document, changes)).fiberscope)

    assert widest() == 6.0
    assert widest(needs__outer_diameter_mm=9.0) == 8.0  # the bore
    assert widest(body__section__outer_diameter_mm=4.5) == 4.5
    assert widest(needs=None, body__passage=None) == pytest.approx(3.92, abs=0.05)  # as solved


def test_cost_classes_follow_the_parts():
    def of(**parts):
        changes = {
            "guide.fiber.preset": parts["guide"],
            "source.lamp.preset": parts["lamp"],
            "source.launch.form": "matched",
        }
        if parts["image"] == "chip":
            changes |= {"image.form": "chip"}
        else:
            changes |= {"image.bundle.preset": parts["image"]}
        document = presets.edited(presets.open("gearbox_tooth").document, changes)
        return int(cost_class(columns([presets.resolve(document).fiberscope]))[0])

    assert of(guide="pmma_250um", lamp="white_led_4000k", image="plastic_15um") == 1
    assert of(guide="silica_na022", lamp="laser_phosphor_white", image="leached_glass_8um") == 5
    guides, lamps = (
        ("pmma_250um", "lead_silicate_na057", "silica_na022"),
        ("halogen_3200k", "metal_halide", "short_arc_xenon"),
    )
    for image in ("plastic_15um", "drawn_silica_3um", "leached_glass_8um", "chip"):
        by_guide = [of(guide=guide, lamp="white_led_4000k", image=image) for guide in guides]
        assert by_guide == sorted(by_guide)
        by_lamp = [of(guide="pmma_250um", lamp=lamp, image=image) for lamp in lamps]
        assert by_lamp == sorted(by_lamp)


# How it is asked


def test_it_can_be_stopped():
    shares = []
    answer = pick(
        presets.open("gearbox_tooth"), most=900, progress=lambda share: shares.append(share) or len(shares) < 2
    )
    assert answer.stopped
    assert len(shares) == 2
    assert 0 < answer.candidates < 900
    assert answer.met + len(answer.failed) == answer.candidates
    whole = []
    pick(presets.open("gearbox_tooth"), most=300, nearest=0, progress=whole.append)
    assert whole == sorted(whole)
    assert whole[-1] == 1.0


def test_wrong_counts_and_settings_are_refused():
    for wrong in ({"most": 0}, {"seed": -1}):
        with pytest.raises(OutOfRange, match=next(iter(wrong))):
            pick(presets.open("gearbox_tooth"), **wrong)
    with pytest.raises(OutOfRange, match="length_m"):
        pick(presets.open("gearbox_tooth"), {"guide.bundle.length_m": -1.0})


def run(capsys, *arguments):
    """(exit status, standard output, standard error) of the command."""
    import argparse

    from optics.commands import pick as command

    parser = argparse.ArgumentParser()
    command.add_arguments(parser)
    try:
        status = command.run(parser.parse_args(arguments))
    except OutOfRange as wrong:
        return 1, capsys.readouterr().out, str(wrong)
    out = capsys.readouterr()
    return status, out.out, out.err


def test_the_command_gives_every_key(capsys):
    status, out, _ = run(capsys, "injector_hole", "--json", "--most", "90", "--nearest", "5")
    answer = json.loads(out)
    assert status == 0
    assert set(answer) >= {"picks", "failed", "candidates", "nearest_relaxation"}
    assert answer["candidates"] == 90
    assert set(answer["failed"][0]) == {"set", "first_reason", "smallest_change"}
    assert set(answer["nearest_relaxation"]["relax"][0]) == {"path", "from", "to"}
    assert "NaN" not in out
    assert "Infinity" not in out
    picks = json.loads(run(capsys, "gearbox_tooth", "--json", "--most", "90", "--nearest", "5")[1])
    assert picks["nearest_relaxation"] is None
    for each in picks["picks"]:
        assert set(each) >= {"set", "summary", "needs", "cost_class"}
        assert each["cost_class"] in (1, 2, 3, 4, 5)
        assert set(each["needs"][0]) == {"name", "wanted", "got", "margin", "met"}
    changes = [each["smallest_change"] for each in picks["failed"] if each["smallest_change"]]
    assert all(set(change) == {"path", "from", "to"} for change in changes)


def test_the_command_reads_as_text(capsys):
    status, out, _ = run(capsys, "gearbox_tooth", "--most", "120", "--nearest", "4", "--show", "3")
    assert status == 0
    assert "candidates meet everything" in out
    assert "--set guide.bundle.diameter_mm=" in out
    assert "What fails first" in out
    status, out, _ = run(capsys, "injector_hole", "--most", "120", "--nearest", "4")
    assert "relax " in out
    assert run(capsys, "gearbox_tooth", "--most", "0")[::2] == (1, "most is 0; it must be at least 1.")
    assert run(capsys, "nowhere")[0] == 1


def test_a_chip_is_made_by_its_settings_alone(found):
    """The document's own editing, as the command line does it: no viewer is left over."""
    chips = [each for each in found("gearbox_tooth").picks if each.set.get("image.form") == "chip"]
    assert chips
    document = presets.open("gearbox_tooth").document
    for each in chips[:3]:
        report = size(presets.resolve(presets.edited(document, each.set)).fiberscope)
        assert report.summary.smallest_gap_mm == pytest.approx(each.summary.smallest_gap_mm, rel=1e-9)


@pytest.mark.slow
def test_ten_thousand_candidates():
    answer = pick(presets.open("gearbox_tooth"))
    assert 10_000 < answer.candidates <= MOST
    assert answer.lights < 120
    assert answer.sections < 400


def test_at_most_needs_are_known():
    assert set(AT_MOST) <= set(ORDER)
