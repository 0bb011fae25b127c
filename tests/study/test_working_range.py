"""The working range against `size` at single distances: the curves, and where each need starts to fail."""

import numpy as np
import pytest

from optics import presets
from optics.report.size import size
from optics.spec import OutOfRange
from optics.study.working_range import EXACT, over_distance

RANGE = {"scene.target.near_mm": 6.0, "scene.target.far_mm": 150.0}
NEEDS = {
    "smallest_gap_mm": 0.26,
    "target_center_lux": 60000.0,
    "target_min_lux": 30000.0,
    "evenness": 0.6,
    "frame_hz": 400.0,
    "outer_diameter_mm": 6.0,
}


@pytest.fixture(scope="module")
def made(document):
    return lambda settings: presets.resolve(presets.edited(document, settings)).fiberscope


@pytest.fixture(scope="module")
def at_distance(made):
    """The report of the same design at one distance, as `size` gives it."""

    def report(settings, distance_mm):
        alone = {"scene.target.near_mm": None, "scene.target.far_mm": None, "scene.target.distance_mm": distance_mm}
        return size(made({**settings, **alone}))

    return report


@pytest.mark.parametrize(
    "settings",
    [
        {},
        {"viewer.form": "eye"},
        {"scene.target.tilt_deg": 20.0},
        {"scene.target.medium": "water", "scene.ports.form": "annulus"},
    ],
)
def test_curves_equal_size_at_single_distances(made, at_distance, settings):
    settings = {**RANGE, "scene.target.near_mm": 8.0, **settings}
    curves = over_distance(made(settings), 12)
    for row in (0, 5, 11):
        report = at_distance(settings, float(curves.distance_mm[row]))
        told, summary, detail = report.target, report.summary, report.detail
        same = {
            "center_lux": told.center_lux,
            "mean_lux": told.mean_lux,
            "least_lux": told.min_lux,
            "evenness": told.evenness,
            "unlit_fraction": told.unlit_fraction,
            "field_radius_mm": told.field_radius_mm,
            "smallest_gap_mm": summary.smallest_gap_mm,
            "smallest_line_mm": summary.smallest_line_mm,
            "resolved_lp_mm": summary.resolved_lp_mm,
            "exposure_s": detail.exposure_s,
            "snr": detail.snr,
        }
        for name, wanted in same.items():
            got = getattr(curves, name)[row]
            assert np.isnan(got) if wanted is None else got == pytest.approx(wanted, rel=1e-9, abs=1e-12), name


def test_range_runs_from_near_to_far_or_from_half_to_twice(made):
    curves = over_distance(made(RANGE), 20)
    assert curves.distance_mm[[0, -1]].tolist() == [6.0, 150.0]
    assert np.diff(np.log(curves.distance_mm)) == pytest.approx(np.log(25.0) / 19)
    curves = over_distance(made({"scene.target.near_mm": 15.0, "scene.target.far_mm": None}), 9)
    assert curves.distance_mm[[0, -1]].tolist() == [15.0, 40.0]
    assert np.diff(curves.distance_mm) == pytest.approx(25.0 / 8)
    curves = over_distance(made({"scene.target.near_mm": None, "scene.target.far_mm": None}), 2)
    assert curves.distance_mm.tolist() == [10.0, 40.0]


def test_needs_start_to_fail_where_size_says_so(made, at_distance):
    settings = {**RANGE, **{f"needs.{name}": wanted for name, wanted in NEEDS.items()}}
    curves = over_distance(made(settings), 40)
    names = [name for name, *_ in curves.fails]
    assert set(names) == set(NEEDS) - {"outer_diameter_mm"}
    assert [name for name, at, _ in curves.fails if at is not None] != []

    def met(name, distance):
        return next(line.met for line in at_distance(settings, distance).needs if line.name == name)

    for name, at, side in curves.fails:
        if at is None:
            assert met(name, 150.0 if side == "far" else 6.0)
        else:
            assert met(name, at)
            beyond = at * (1 + 1.01 * EXACT) if side == "far" else at / (1 + 1.01 * EXACT)
            assert not met(name, beyond), (name, side)


def test_a_need_met_nowhere_fails_from_the_near_end_on(made):
    fails = over_distance(made({**RANGE, "needs": {"target_center_lux": 1e9}}), 5).fails
    assert fails == (("target_center_lux", 6.0, "far"),)


def test_no_needs_no_failures(made):
    curves = over_distance(made({**RANGE, "needs": {}}), 5)
    assert curves.fails == curves.needs == ()


def test_center_falls_with_the_square_of_a_long_distance(made):
    curves = over_distance(made({"scene.target.near_mm": 20.0, "scene.target.far_mm": 4000.0}), 30)
    assert curves.center_lux[-1] * curves.distance_mm[-1] ** 2 == pytest.approx(
        curves.center_lux[-5] * curves.distance_mm[-5] ** 2, rel=1e-3
    )
    assert (np.diff(curves.center_lux) < 0).all()


def test_a_guide_without_target_is_refused(made):
    bare = made({"scene": None, "image": None, "viewer": None, "body": None, "needs": {}})
    with pytest.raises(OutOfRange, match="a working range needs a target"):
        over_distance(bare)
    with pytest.raises(OutOfRange, match="count is 1; it must be at least 2"):
        over_distance(made({}), 1)
