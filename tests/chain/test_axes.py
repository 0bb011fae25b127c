"""Designs on axes: the same numbers as one by one, whatever is shared; rules as masks; stopped and refused designs."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optics import presets
from optics.chain.axes import Axis, crossed, evaluate_axes, evaluate_possible, holding
from optics.chain.columns import columns
from optics.chain.evaluate import evaluate
from optics.spec import OutOfRange

WHOLE = ("count", "repeats", "columns", "rows", "steam", "one_rod", "color_filter", "at_wall", "reflections")


def same(found, wanted, rows=slice(None)):
    for name, value in found.value.items():
        np.testing.assert_allclose(
            value, wanted.value[name][rows], rtol=1e-12, atol=1e-12, equal_nan=True, err_msg=name
        )
    for name, value in found.after_lm.items():
        np.testing.assert_allclose(value, wanted.after_lm[name][rows], rtol=1e-12, equal_nan=True, err_msg=name)


def test_the_numbers_of_evaluate(random_designs):
    """Mixed forms, several blocks, every stage shared or not."""
    table = columns(random_designs(120))
    found, done = evaluate_axes(table)
    assert done.all()
    same(found, evaluate(table))


@pytest.mark.parametrize("name", ["gearbox_tooth", "airway_small_animal", "turbine_casing"])
def test_every_number_is_seen(name):
    """Each number of a design moved alone by 3 %: no stage may take it for shared."""
    table = columns([presets.open(name).fiberscope])
    paths = [path for path in table.number if path.rpartition(".")[2] not in WHOLE and not path.startswith("needs.")]
    moved = table.take(np.zeros(len(paths) + 1, int))
    numbers = {}
    for row, path in enumerate(paths, 1):
        column = moved.number[path].copy()
        column[row] = column[row] * 0.97
        numbers[path] = column
    moved = moved.replaced(numbers)
    good = np.flatnonzero(holding(moved))
    moved = moved.take(good)
    found, _ = evaluate_axes(moved)
    same(found, evaluate(moved))


def test_crossed_columns_are_those_of_the_documents(document):
    """A product of two axes, made without a design each, against the designs made one by one."""
    fibers, stops = {"pmma_250um": 1.0, "silica_na022": 2.5}, (2.8, 5.6)
    guide = [{"guide.fiber.preset": fiber, "guide.bundle.length_m": length} for fiber, length in fibers.items()]
    lens = [{"image.objective.f_number": one} for one in stops]

    def scopes(settings):
        return [presets.resolve(presets.edited(document, each)).fiberscope for each in settings]

    axes = [Axis(("guide.",), columns(scopes(guide))), Axis(("image.",), columns(scopes(lens)))]
    rows = np.array([[0, 0], [0, 1], [1, 0], [1, 1]])
    table = crossed(columns(scopes([{}])), [(axis, rows[:, at]) for at, axis in enumerate(axes)], 4)
    same(evaluate(table), evaluate(columns(scopes([guide[i] | lens[j] for i, j in rows]))))


MOVED = {
    "image.bundle.core_um": (2.0, 20.0),
    "image.bundle.pitch_um": (2.0, 20.0),
    "image.bundle.na": (0.2, 1.49),
    "guide.fiber.na": (0.2, 1.49),
    "guide.fiber.core_um": (10.0, 100.0),
    "image.objective.focus_mm": (0.5, 5.0),
    "image.objective.focal_mm": (0.5, 25.0),
    "guide.bundle.diameter_mm": (0.02, 2.0),
    "image.bundle.diameter_mm": (0.01, 1.0),
    "source.launch.spot_mm": (0.5, 3.0),
    "body.section.outer_diameter_mm": (0.5, 6.0),
}


@settings(max_examples=60, deadline=None)
@given(values=st.fixed_dictionaries({}, optional={path: st.floats(*ends) for path, ends in MOVED.items()}))
def test_masks_say_what_the_validator_says(document, values):
    table = columns([presets.open("gearbox_tooth").fiberscope])
    mask = holding(table.replaced({path: np.array([value]) for path, value in values.items()}))[0]
    try:
        presets.resolve(presets.edited(document, values))
        valid = True
    except OutOfRange:
        valid = False
    assert mask == valid


def test_a_refused_design_does_not_take_others_along(document):
    wide = {"image.objective.mapping": "f_theta", "image.objective.focal_mm": 0.2, "image.bundle.diameter_mm": 1.6}
    designs = [
        presets.resolve(presets.edited(document, each)).fiberscope
        for each in ({}, wide, {"guide.bundle.length_m": 3.0})
    ]
    with pytest.raises(OutOfRange):
        evaluate(columns(designs))
    found, ready = evaluate_possible(columns(designs))
    assert ready.tolist() == [True, False, True]
    alone = evaluate(columns([designs[0], designs[2]]))
    for name in ("center_lux", "smallest_gap_mm", "outer_diameter_mm"):
        np.testing.assert_allclose(found[name][[0, 2]], alone[name], rtol=1e-12)


def test_a_stopped_run_says_what_is_done(random_designs):
    table = columns([design for design in random_designs(300) if design.image is not None])
    shares = []
    found, done = evaluate_axes(table, lambda share: shares.append(share) or len(shares) < 1)
    assert len(shares) == 1
    assert 0 < done.sum() < table.count
    whole = evaluate(table)
    np.testing.assert_allclose(found["smallest_gap_mm"][done], whole["smallest_gap_mm"][done], rtol=1e-12)
    assert np.isnan(found["resolved_lp_mm"][~done]).all()
