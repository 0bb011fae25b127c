"""Compare: differences and what makes them, families, crossovers against a fine scan of documents."""

import argparse
import json

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optics import presets
from optics.chain.columns import columns
from optics.chain.evaluate import evaluate
from optics.commands import compare as command
from optics.report.size import size
from optics.spec import OutOfRange
from optics.study.compare import QUANTITIES, compare, differences, distinct_names
from optics.study.compare_cross import LENGTH, RADIUS
from optics.study.compare_families import image_family, in_families


@pytest.fixture(scope="module")
def document():
    return presets.open("gearbox_tooth").document


@pytest.fixture(scope="module")
def families():
    made = in_families(presets.open("gearbox_tooth"))
    return made, compare(list(made.values()), list(made))


def changed(document, **settings):
    made = {path.replace("__", "."): value for path, value in settings.items()}
    return presets.resolve(presets.edited(document, made))


def told(designs, quantity):
    """What the second of two designs, b, says of one number."""
    return next(row for row in differences(designs, ["a", "b"])[1] if row.quantity == quantity)


# Differences


@pytest.mark.parametrize(
    ("settings", "quantity", "said"),
    [
        ({"source__lamp__flux_lm": 200.0}, "delivered_lm", "the lamp: 200 lm against 400 lm"),
        ({"guide__bundle__length_m": 6.0}, "delivered_lm", "the attenuation"),
        ({"guide__bundle__broken_fraction": 0.3}, "delivered_lm", "the broken fibers: x 0.700 against none"),
        ({"guide__bundle__bends": []}, "delivered_lm", "the bends: none against"),
        ({"guide__bundle__packing_fraction": 0.6}, "transmission", "the packing: x 0.600 against x 0.820"),
        ({"source__launch__spot_mm": 4.0}, "transmission", "the spot"),
        ({"guide__fiber__na": 0.4}, "exit_na", "the fiber's NA, 0.4 against 0.55"),
        ({"source__lamp": {"preset": "white_led_6500k", "emitter_mm": 1.4}}, "color_temperature_k", "the lamp itself"),
        ({"guide__fiber__preset": "high_index_na086"}, "color_temperature_k", "the attenuation by color"),
        ({"scene__target__distance_mm": 30.0}, "target_center_lux", "the distance in mm, 30 against 20"),
        ({"guide__bundle__broken_fraction": 0.3}, "target_center_lux", "the broken fibers"),
        ({"image__objective__focal_mm": 1.5}, "field_of_view_deg", "the image over its distance"),
        ({"image__objective__focal_mm": 1.5}, "smallest_gap_mm", "the scale of the picture"),
        ({"image__bundle__preset": "leached_glass_8um"}, "smallest_gap_mm", "the lattice, which alone allows"),
        (
            {"source__lamp__flux_lm": 0.05},
            "smallest_gap_mm",
            "the light: were it ideal in both, their detail would differ by 0%",
        ),
        ({"image__bundle__diameter_mm": 1.6}, "outer_diameter_mm", "the image part, 1.6 mm against 1 mm"),
        ({"body__section__wall_mm": 0.6}, "outer_diameter_mm", "both walls, 1.2 mm against 0.9 mm"),
        ({"image__bundle__preset": "drawn_silica_4um"}, "bend_radius_mm", "the strain of the image bundle, 125 mm"),
        ({"body__passage__rigid_tip_mm": 9.0}, "rigid_tip_mm", "the rigid tip as stated"),
    ],
)
def test_the_reason_is_what_was_changed(document, settings, quantity, said):
    row = told([presets.resolve(document), changed(document, **settings)], quantity)
    assert said in row.because
    assert row.difference == pytest.approx(row.value - row.reference)
    assert row.difference != 0


def test_the_same_design_twice_differs_in_nothing(document):
    found = compare([presets.resolve(document)] * 2)
    assert {row.difference for row in found.differences} == {0.0}
    assert {row.because for row in found.differences} == {"the same"}
    assert all(row.value is None and row.ahead == "" for row in found.crossovers)
    assert found.differences[0].of == "Gearbox tooth check (2)"


@settings(max_examples=15, deadline=None)
@given(length=st.floats(0.5, 20.0), flux=st.floats(20.0, 800.0), pitch=st.floats(9.0, 20.0))
def test_turned_around_the_differences_change_sign(document, length, flux, pitch):
    pair = [
        presets.resolve(document),
        changed(
            document,
            guide__bundle__length_m=length,
            source__lamp__flux_lm=min(flux, 400.0),
            image__bundle__pitch_um=pitch,
        ),
    ]
    there, back = differences(pair, ["a", "b"])[1], differences(pair[::-1], ["b", "a"])[1]
    for one, other in zip(there, back):
        assert one.quantity == other.quantity
        assert (one.value, one.reference) == (other.reference, other.value)
        assert one.difference is other.difference is None or one.difference == pytest.approx(-other.difference)


def test_numbers_are_those_of_size():
    names = ["gearbox_tooth", "airway_small_animal", "turbine_casing", "injector_hole"]
    reports, rows = differences([presets.open(name) for name in names], names)
    for name, report in zip(names, reports):
        alone = size(presets.open(name).fiberscope)
        assert report.summary.smallest_gap_mm == pytest.approx(alone.summary.smallest_gap_mm, rel=1e-9)
        assert report.light.delivered_lm == pytest.approx(alone.light.delivered_lm, rel=1e-9)
    assert len([row for row in rows if row.quantity == "delivered_lm"]) == 3
    assert {row.quantity for row in rows} <= set(QUANTITIES)


def test_a_number_that_one_does_not_have_is_said_so(document):
    bare = {table: None for table in ("scene", "image", "viewer", "body", "needs")}
    pair = [presets.resolve(document), presets.resolve(presets.edited(document, bare))]
    assert told(pair, "target_center_lux").because == "b has no scene"
    assert told(pair, "smallest_gap_mm").because == "b has no image"
    assert told(pair, "outer_diameter_mm").because == "b has no body"
    blind = changed(document, scene__target__detail_contrast=0.001)
    row = told([presets.resolve(document), blind], "smallest_gap_mm")
    assert (row.value, row.difference, row.because) == (None, None, "b resolves nothing")


def test_the_number_of_designs_is_checked(document):
    design = presets.resolve(document)
    for wrong in ([], [design], [design] * 5):
        with pytest.raises(OutOfRange, match=f"{len(wrong)} designs are given; compare takes 2 to 4"):
            compare(wrong)


def test_names_differ():
    assert distinct_names(["a", "b", "a", "a"]) == ["a", "b", "a (3)", "a (4)"]


# Families


def test_families_keep_what_is_not_of_the_family(families):
    made, _ = families
    own = presets.open("gearbox_tooth").fiberscope
    assert list(made) == ["glass", "silica", "plastic"]
    assert made["glass"].fiberscope == own
    for family, design in made.items():
        scope = design.fiberscope
        assert scope.guide.fiber.material == family
        assert image_family(scope.image.bundle) == family
        assert scope.guide.bundle.diameter_mm == own.guide.bundle.diameter_mm
        assert scope.guide.bundle.length_m == own.guide.bundle.length_m
        assert (scope.source, scope.scene, scope.viewer, scope.body) == (own.source, own.scene, own.viewer, own.body)


def test_families_put_new_values_over_old_ones():
    """A plastic design with values of its own becomes glass all through; few thick fibers pack by their number."""
    given = {"guide.fiber.preset": "pmma_250um", "guide.fiber.na": 0.45}
    given |= {"image.bundle.preset": "plastic_15um", "image.bundle.na": 0.48}
    made = in_families(presets.open("gearbox_tooth"), given)
    assert made["plastic"].fiberscope.guide.fiber.na == 0.45
    assert made["glass"].fiberscope.guide.fiber.na == 0.57
    assert made["glass"].fiberscope.image.bundle.na == 0.40
    thin = in_families(presets.open("gearbox_tooth"), {"guide.bundle.diameter_mm": 0.8})
    assert thin["plastic"].fiberscope.guide.bundle.packing_fraction == pytest.approx(7 * (0.25 / 0.8) ** 2, abs=1e-4)


def test_bare_guides_have_families_too(document):
    bare = {table: None for table in ("scene", "image", "viewer", "body", "needs")}
    made = in_families(presets.open("gearbox_tooth"), bare)
    found = compare(list(made.values()), list(made))
    assert [row.quantity for row in found.differences if row.of == "silica"] == [
        "delivered_lm",
        "transmission",
        "exit_na",
        "color_temperature_k",
        "color_rendering_index",
    ]
    assert any(row.value for row in found.crossovers if row.path == LENGTH)


def test_a_family_that_cannot_be_made_is_left_out():
    made = in_families(presets.open("gearbox_tooth"), {"guide.bundle.diameter_mm": 0.2})
    assert list(made) == ["glass", "silica"]


# Crossovers


LENGTHS = np.geomspace(0.1, 100.0, 201)


def scanned(document, path, values):
    """The numbers of one design over values of a path, from documents."""
    made = [presets.resolve(presets.edited(document, {path: float(value)})).fiberscope for value in values]
    return evaluate(columns(made))


@pytest.fixture(scope="module")
def by_length(families):
    return {name: scanned(design.document, LENGTH, LENGTHS) for name, design in families[0].items()}


@pytest.mark.parametrize("pair", [("glass", "silica"), ("glass", "plastic"), ("silica", "plastic")])
@pytest.mark.parametrize(
    ("quantity", "number"), [("delivered_lm", "delivered_lm"), ("smallest_gap_mm", "resolved_lp_mm")]
)
def test_crossovers_in_length_are_those_of_a_fine_scan(families, by_length, pair, quantity, number):
    first, second = (by_length[name][number] for name in pair)
    sign = np.sign(np.where(np.isclose(first, second, rtol=1e-9), 0.0, first - second))
    flips = [at for at in range(1, len(sign)) if sign[at] * sign[at - 1] < 0]
    rows = [row for row in families[1].crossovers if (row.quantity, row.path, row.between) == (quantity, LENGTH, pair)]
    if not flips:
        assert [row.value for row in rows] == [None]
        return
    assert len(rows) == len(flips)
    for row, at in zip(rows, flips):
        assert LENGTHS[at - 1] <= row.value <= LENGTHS[at]
        assert row.ahead == pair[int(sign[at] < 0)]


def test_at_a_crossover_both_give_the_same(families):
    found = [row for row in families[1].crossovers if row.value is not None and row.quantity == "delivered_lm"]
    assert found
    for row in found:
        both = [scanned(families[0][name].document, row.path, [row.value])["delivered_lm"][0] for name in row.between]
        assert both[0] == pytest.approx(both[1], rel=1e-6)


def test_a_crossover_in_bend_radius(document):
    """A wide cone loses more in a sharp bend: the one with more fiber wins when straight, the other when bent."""
    wide = changed(
        document, guide__fiber__core_um=480.0, guide__fiber__fiber_um=500.0, guide__bundle__packing_fraction=0.84
    )
    narrow = changed(
        document, guide__fiber__core_um=20.0, guide__fiber__fiber_um=22.0, guide__bundle__packing_fraction=0.84
    )
    found = compare([wide, narrow], ["thick", "thin"])
    row = next(row for row in found.crossovers if (row.quantity, row.path) == ("delivered_lm", RADIUS))
    radii = np.geomspace(2.0, 200.0, 151)
    first, second = (scanned(design.document, RADIUS, radii)["delivered_lm"] for design in (wide, narrow))
    flips = np.flatnonzero(np.diff(np.sign(first - second)))
    assert len(flips) == 1
    assert radii[flips[0]] <= row.value <= radii[flips[0] + 1]
    assert row.ahead == "thick"


def test_without_a_bend_in_both_there_is_no_crossover(document):
    found = compare([presets.resolve(document), changed(document, guide__bundle__bends=[])], ["a", "b"])
    rows = [row for row in found.crossovers if row.path == RADIUS]
    assert len(rows) == 4
    assert all(row.value is None and "not both have a bend" in row.words for row in rows)


# The command


def run(capsys, *arguments):
    parser = argparse.ArgumentParser()
    command.add_arguments(parser)
    status = command.run(parser.parse_args(arguments))
    return status, capsys.readouterr().out


def test_the_command_gives_every_key(capsys):
    status, out = run(capsys, "gearbox_tooth", "turbine_casing", "--json")
    answer = json.loads(out)
    assert status == 0
    assert set(answer) == {"designs", "differences", "crossovers"}
    assert [design["name"] for design in answer["designs"]] == ["Gearbox tooth check", "Turbine casing"]
    assert set(answer["differences"][0]) == {"quantity", "of", "against", "value", "reference", "difference", "because"}
    assert set(answer["crossovers"][0]) >= {"quantity", "path", "value"}
    assert "NaN" not in out
    assert "Infinity" not in out


def test_the_command_reads_as_text(capsys):
    status, out = run(capsys, "gearbox_tooth", "--families", "--set", "guide.bundle.length_m=2.5")
    assert status == 0
    for said in ("glass | silica", "What makes the differences", "mostly the cone", "beyond"):
        assert said in out
    with pytest.raises(OutOfRange, match="compare --families takes one"):
        run(capsys, "gearbox_tooth", "turbine_casing", "--families")
    with pytest.raises(OutOfRange, match="compare takes 2 to 4"):
        run(capsys, "gearbox_tooth")
