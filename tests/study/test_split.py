"""Split: the best share against a scan made of documents one by one, what stays, how flat, and what is refused."""

import argparse
import json

import numpy as np
import pytest

from optics import presets
from optics.chain.columns import columns
from optics.chain.evaluate import evaluate
from optics.commands import split as command
from optics.report.size import size
from optics.spec import OutOfRange
from optics.study.split import split

STARVED = {"source.lamp.flux_lm": 2.0, "image.objective.f_number": 8.0, "scene.target.detail_contrast": 0.2}
AMPLE = {"source.lamp.flux_lm": 400.0}
CASES = {"starved": STARVED, "lattice": AMPLE}


@pytest.fixture(scope="module")
def document():
    return presets.open("gearbox_tooth").document


@pytest.fixture(scope="module")
def found():
    """A function: the split of the gearbox design in one of the cases, a tube of 4.2 mm."""
    kept = {}

    def made(case):
        if case not in kept:
            kept[case] = split(presets.open("gearbox_tooth"), CASES[case] | {"body.section.outer_diameter_mm": 4.2})
        return kept[case]

    return made


def brute(document, given, shares):
    """Gap at each share, from documents: areas, diameters and the focal length by formulas of their own."""
    base = presets.edited(document, given | {"body.section.outer_diameter_mm": 4.2})
    scope = presets.resolve(base).fiberscope
    lumen = 4.2 - 2 * scope.body.section.wall_mm
    usable = 0.55 * np.pi / 4 * (lumen**2 - 4 * 0.4**2)
    focal, focus, own = scope.image.objective.focal_mm, scope.image.objective.focus_mm, scope.image.bundle.diameter_mm
    tangent = own / 2 / (focal * focus / (focus - focal))  # of the half field
    designs = []
    for share in shares:
        image = np.sqrt(4 * share * usable / np.pi) - 2 * scope.body.section.image_jacket_mm
        behind = image / 2 / tangent
        guide = np.sqrt(4 * (1 - share) * usable / (np.pi * scope.guide.bundle.packing_fraction))
        made = {"image.bundle.diameter_mm": float(image), "guide.bundle.diameter_mm": float(guide)}
        made["image.objective.focal_mm"] = float(behind * focus / (behind + focus))
        designs.append(presets.resolve(presets.edited(base, made)).fiberscope)
    return np.nan_to_num(evaluate(columns(designs))["smallest_gap_mm"], nan=np.inf)


@pytest.mark.parametrize("case", CASES)
def test_the_best_share_is_that_of_a_scan(found, document, case):
    best = found(case).best
    coarse = np.arange(0.02, 0.99, 0.01)
    rough = coarse[np.argmin(brute(document, CASES[case], coarse))]
    shares = np.arange(max(rough - 0.02, 0.01), min(rough + 0.02, 0.997), 0.0005)
    gaps = brute(document, CASES[case], shares)
    assert best.image_fraction == pytest.approx(shares[np.argmin(gaps)], abs=0.005)
    assert best.smallest_gap_mm <= gaps.min() * (1 + 1e-6)


def test_the_two_cases_are_what_they_are_called(found):
    """Starved: the best lies inside and gives the light a good part. Lattice: the finest takes nearly all for the image."""
    starved, ample = found("starved"), found("lattice")
    assert 0.1 < starved.best.image_fraction < 0.9
    assert (
        starved.curve[-1].smallest_gap_mm is None
        or starved.curve[-1].smallest_gap_mm > 1.2 * starved.best.smallest_gap_mm
    )
    assert ample.best.limited_by == "lattice"
    assert ample.best.image_fraction > starved.best.image_fraction


def test_more_light_shifts_the_tube_to_the_image():
    best = [
        split(presets.open("gearbox_tooth"), STARVED | {"source.lamp.flux_lm": flux}, step=0.02).best.image_fraction
        for flux in (1.0, 3.0, 10.0, 100.0)
    ]
    assert best == sorted(best)
    assert best[-1] > best[0] + 0.02


@pytest.mark.parametrize("case", CASES)
def test_the_settings_make_the_best(found, document, case):
    best = found(case).best
    report = size(presets.resolve(presets.edited(document, best.set)).fiberscope)
    assert report.summary.smallest_gap_mm == pytest.approx(best.smallest_gap_mm, rel=1e-9)
    assert report.summary.target_center_lux == pytest.approx(best.target_center_lux, rel=1e-9)
    assert report.summary.limited_by == best.limited_by
    assert report.fit.outer_diameter_mm == pytest.approx(4.2, rel=1e-12)


@pytest.mark.parametrize("case", CASES)
def test_area_and_field_stay(found, document, case):
    answer = found(case)
    packing, jacket = 0.82, 0.05
    field = size(presets.resolve(presets.edited(document, CASES[case])).fiberscope).summary.field_of_view_deg
    for point in answer.curve:
        image = np.pi / 4 * (point.image_diameter_mm + 2 * jacket) ** 2
        fibers = np.pi / 4 * packing * point.guide_diameter_mm**2
        assert image + fibers == pytest.approx(answer.shared_area_mm2, rel=1e-9)
        assert image / answer.shared_area_mm2 == pytest.approx(point.image_fraction, rel=1e-9)
    made = answer.best.set
    assert size(presets.resolve(presets.edited(document, made)).fiberscope).summary.field_of_view_deg == pytest.approx(
        field, rel=1e-9
    )


def test_a_tube_that_is_solved_for_holds_the_design_itself(document):
    """At its present share the curve passes through the design as it stands."""
    for name in ("gearbox_tooth", "turbine_casing"):
        answer = split(presets.open(name), step=0.02)
        own = size(presets.open(name).fiberscope)
        assert answer.solved
        assert answer.outer_diameter_mm == pytest.approx(own.fit.outer_diameter_mm, rel=1e-12)
        assert answer.now_gap_mm == pytest.approx(own.summary.smallest_gap_mm, rel=1e-12)
        shares = np.array([point.image_fraction for point in answer.curve])
        gaps = np.array([point.smallest_gap_mm for point in answer.curve])
        assert np.interp(answer.now_fraction, shares, gaps) == pytest.approx(answer.now_gap_mm, rel=0.01)


@pytest.mark.parametrize("case", CASES)
def test_the_flat_stretch_is_within_five_percent(found, case):
    answer = found(case)
    low, high, best = answer.flat_from_fraction, answer.flat_to_fraction, answer.best
    assert low <= best.image_fraction <= high
    for point in answer.curve:
        if low < point.image_fraction < high:
            assert point.smallest_gap_mm <= 1.05 * best.smallest_gap_mm * (1 + 1e-9)
    outside = [p for p in answer.curve if p.image_fraction < low and p.smallest_gap_mm is not None]
    assert outside[-1].smallest_gap_mm > 1.05 * best.smallest_gap_mm


def test_nothing_resolved_is_an_answer():
    answer = split(presets.open("gearbox_tooth"), {"scene.target.detail_contrast": 0.001}, step=0.05)
    assert answer.best is None
    assert answer.flat_from_fraction is None
    assert all(point.smallest_gap_mm is None for point in answer.curve)
    assert "Nothing is resolved" in command.written(answer, "x")


def test_a_guide_that_is_solved_for_is_a_start_like_any(document):
    given = {"guide.bundle.diameter_mm": "solve", "body.section.outer_diameter_mm": 4.2}
    answer = split(presets.open("gearbox_tooth"), given, step=0.05)
    fixed = split(presets.open("gearbox_tooth"), {"body.section.outer_diameter_mm": 4.2}, step=0.05)
    assert answer.best.image_fraction == pytest.approx(fixed.best.image_fraction, abs=1e-6)
    report = size(presets.resolve(presets.edited(document, answer.best.set)).fiberscope)
    assert report.summary.smallest_gap_mm == pytest.approx(answer.best.smallest_gap_mm, rel=1e-9)


@pytest.mark.parametrize(
    ("given", "said"),
    [
        ({"image.form": "chip"}, "image.form is 'chip'"),
        ({"body": None, "needs": None}, "body is missing"),
        ({"image": None, "viewer": None, "needs": None}, "image is missing"),
        ({"scene.ports.form": "placed"}, "placed"),
    ],
)
def test_designs_without_a_share_are_refused(given, said):
    with pytest.raises(OutOfRange, match=said):
        split(presets.open("gearbox_tooth"), given)


def test_wrong_steps_are_refused():
    for step in (0.0, 0.5, -1.0):
        with pytest.raises(OutOfRange, match="step"):
            split(presets.open("gearbox_tooth"), step=step)


def test_the_command(capsys):
    parser = argparse.ArgumentParser()
    command.add_arguments(parser)
    assert command.run(parser.parse_args(["gearbox_tooth", "--json", "--step", "0.05"])) == 0
    answer = json.loads(capsys.readouterr().out)
    assert set(answer) >= {"curve", "best", "flat_from_fraction", "flat_to_fraction"}
    assert set(answer["curve"][0]) >= {"image_fraction", "smallest_gap_mm", "target_center_lux"}
    assert set(answer["best"]) >= {"image_fraction", "smallest_gap_mm", "target_center_lux", "set"}
    assert command.run(parser.parse_args(["gearbox_tooth", "--step", "0.05", "--set", "source.lamp.flux_lm=1"])) == 0
    out = capsys.readouterr().out
    assert "Finest with" in out
    assert "--set image.bundle.diameter_mm=" in out
