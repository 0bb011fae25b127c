"""The tightest pose: what it touches lies on the walls, nothing of it outside."""

import numpy as np
import pytest

from optics.body.pose import bore_walls_mm, tightest_pose
from optics.spec import OutOfRange

CASES = [
    {"bore_mm": 10.0, "centerline_radius_mm": 15.0, "tip_mm": 6.0, "bend_deg": 90.0, "edge_radius_mm": 0.0},
    {"bore_mm": 10.0, "centerline_radius_mm": 15.0, "tip_mm": 4.0, "bend_deg": 90.0, "edge_radius_mm": 0.5},
    {"bore_mm": 8.0, "centerline_radius_mm": 4.0, "tip_mm": 5.0, "bend_deg": 60.0, "edge_radius_mm": 0.3},
]


def to_wall(points, case):
    """Distance of points from the center line of the elbow."""
    half, radius = np.deg2rad(case["bend_deg"]) / 2, case["centerline_radius_mm"]
    x, y = np.abs(points[:, 0]), points[:, 1]
    leg = np.abs(x * np.sin(half) + y * np.cos(half) - radius)
    return np.where(np.arctan2(x, y) <= half + 1e-12, np.abs(np.hypot(x, y) - radius), leg)


@pytest.mark.parametrize("case", CASES)
def test_contacts_lie_on_the_walls_and_on_the_tip(case):
    pose = tightest_pose(**case)
    np.testing.assert_allclose(to_wall(pose.contacts_mm, case), case["bore_mm"] / 2, atol=1e-9)
    np.testing.assert_allclose(pose.contacts_mm[1], pose.contacts_mm[2] * [-1, 1], atol=1e-12)
    # the outer contacts lie on the rounding of the end: its radius from its center
    center = pose.corners_mm[2] - case["edge_radius_mm"]
    assert np.hypot(*(pose.contacts_mm[2] - center)) == pytest.approx(case["edge_radius_mm"], abs=1e-9)
    width = pose.corners_mm[3] - pose.corners_mm[0]
    np.testing.assert_allclose(width, [0, case["tip_mm"]], atol=1e-12)
    assert pose.corners_mm[1, 0] - pose.corners_mm[0, 0] == pytest.approx(pose.length_mm)


def test_walls_are_a_bore_apart():
    inner, outer = bore_walls_mm(bore_mm=10.0, centerline_radius_mm=15.0, bend_deg=90.0, leg_mm=20.0)
    case = CASES[0]
    for wall in (inner, outer):
        np.testing.assert_allclose(to_wall(wall, case), 5.0, atol=1e-9)
    np.testing.assert_allclose(np.hypot(*(outer - inner).T), 10.0, atol=1e-9)


def test_a_straight_bore_has_no_tightest_pose():
    with pytest.raises(OutOfRange, match="bend_deg is 0; it must be above 0"):
        tightest_pose(**{**CASES[0], "bend_deg": 0.0})
