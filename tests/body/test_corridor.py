"""Two bends in a row: where they act alone or as one the closed form is met; order and side do not matter."""

import numpy as np
import pytest

from optics.body.corridor import Bend, longest_through_two_bends_mm
from optics.body.passage import longest_rigid_tip_mm
from optics.spec import OutOfRange


def two(first, second, straight, bore=10.0, tip=6.0):
    return longest_through_two_bends_mm(
        bore_mm=bore, tip_mm=tip, first=Bend(*first), second=Bend(*second), straight_mm=straight
    )


def one(radius, bend, bore=10.0, tip=6.0):
    return float(
        longest_rigid_tip_mm(bore_mm=bore, centerline_radius_mm=radius, tip_mm=tip, bend_deg=bend, edge_radius_mm=0.0)
    )


@pytest.mark.parametrize("side", [pytest.param(1, marks=pytest.mark.slow), -1])
def test_far_apart_the_tighter_bend_decides(side):
    assert two((15.0, 90.0), (25.0, side * 60.0), 150.0) == pytest.approx(one(15.0, 90.0), rel=1e-3)


@pytest.mark.parametrize(
    ("bore", "tip", "radius", "bend"), [(10.0, 6.0, 15.0, 45.0), (10.0, 4.0, 15.0, 60.0), (6.0, 4.5, 20.0, 35.0)]
)
def test_two_like_bends_without_a_straight_are_one(bore, tip, radius, bend):
    assert two((radius, bend), (radius, bend), 0.0, bore, tip) == pytest.approx(
        one(radius, 2 * bend, bore, tip), rel=1e-3
    )


def test_order_and_side_do_not_matter():
    plain = two((12.0, 40.0), (20.0, -30.0), 4.0)
    assert two((20.0, -30.0), (12.0, 40.0), 4.0) == pytest.approx(plain, rel=2e-3)
    assert two((12.0, -40.0), (20.0, 30.0), 4.0) == pytest.approx(plain, rel=1e-6)


@pytest.mark.slow
def test_a_straight_between_like_bends_helps():
    lengths = [two((15.0, 45.0), (15.0, 45.0), straight) for straight in (0.0, 5.0, 15.0)]
    assert lengths == sorted(lengths)
    assert lengths[-1] <= one(15.0, 45.0) * 1.001


def test_slight_bends_that_undo_each_other_leave_a_straight_way():
    assert two((15.0, 12.0), (15.0, -12.0), 0.0) == np.inf


def test_refusals():
    with pytest.raises(OutOfRange, match="tip_mm is 10; it must be below the bore's diameter"):
        two((15.0, 90.0), (15.0, 90.0), 0.0, tip=10.0)
    with pytest.raises(OutOfRange, match="radius_mm is 3; it must be at least half the bore's diameter"):
        two((3.0, 90.0), (15.0, 90.0), 0.0)
