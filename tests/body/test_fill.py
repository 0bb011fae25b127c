"""Free area: exact arcs against Monte Carlo and closed forms, and fibers under the free-fill limit."""

import numpy as np
import pytest

from optics.body.fill import filled, free_area_mm2, parts_of
from optics.circles import overlap_area
from optics.spec import OutOfRange


def random_parts(seed, count=6):
    draw = np.random.default_rng(seed)
    return np.column_stack([draw.uniform(-1.4, 1.4, (count, 2)), draw.uniform(0.3, 1.6, count)])


@pytest.mark.parametrize("seed", range(6))
def test_against_random_points(seed):
    parts, fiber, draw = random_parts(seed), 0.12, np.random.default_rng(seed + 50)
    points = draw.uniform(-1.5, 1.5, (400_000, 2))
    free = np.hypot(*points.T) < 1.5 - fiber / 2
    for x, y, d in parts:
        free &= np.hypot(points[:, 0] - x, points[:, 1] - y) > (d + fiber) / 2
    share = free.mean()
    error = 9 * np.sqrt(share * (1 - share) / len(points))
    assert free_area_mm2(lumen_mm=3.0, parts=parts, fiber_mm=fiber) == pytest.approx(9 * share, abs=4.5 * error)


def test_closed_forms():
    assert free_area_mm2(lumen_mm=4.0, parts=[], fiber_mm=0.4) == pytest.approx(np.pi * 1.8**2)
    ring = free_area_mm2(lumen_mm=4.0, parts=[(0.0, 0.0, 2.0)], fiber_mm=0.2)
    assert ring == pytest.approx(np.pi * (1.9**2 - 1.1**2))
    # two parts that overlap each other: their union is the sum less the lens
    two = free_area_mm2(lumen_mm=6.0, parts=[(0.5, 0, 2.0), (-0.5, 0, 2.0)], fiber_mm=0.0)
    lens = float(overlap_area(radius_1=1.0, radius_2=1.0, distance=1.0))
    assert two == pytest.approx(np.pi * 9 - 2 * np.pi + lens)
    # a part across the wall takes only what lies inside
    across = free_area_mm2(lumen_mm=4.0, parts=[(2.0, 0.0, 2.0)], fiber_mm=0.0)
    assert across == pytest.approx(np.pi * 4 - float(overlap_area(radius_1=2.0, radius_2=1.0, distance=2.0)))
    assert free_area_mm2(lumen_mm=4.0, parts=[(0.0, 0.0, 5.0)], fiber_mm=0.0) == 0.0
    assert free_area_mm2(lumen_mm=1.0, parts=[(0.0, 0.0, 0.4)], fiber_mm=1.2) == 0.0
    same = [(0.2, 0.1, 1.0)] * 3
    assert free_area_mm2(lumen_mm=4.0, parts=same, fiber_mm=0.1) == pytest.approx(np.pi * (1.95**2 - 0.55**2))


def test_touching_parts_and_wall():
    """Parts that just touch each other and the wall, as a layout leaves them."""
    parts = [(0.0, 1.0, 2.0), (0.0, -1.0, 2.0)]
    assert free_area_mm2(lumen_mm=4.0, parts=parts, fiber_mm=0.0) == pytest.approx(2 * np.pi, rel=1e-9)


def test_more_margin_never_opens_area():
    parts = random_parts(9)
    areas = free_area_mm2(lumen_mm=3.0, parts=np.tile(parts, (40, 1, 1)), fiber_mm=np.linspace(0, 1.0, 40))
    assert (np.diff(areas) <= 1e-12).all()
    one = [float(free_area_mm2(lumen_mm=3.0, parts=parts, fiber_mm=f)) for f in np.linspace(0, 1.0, 40)]
    np.testing.assert_allclose(areas, one, rtol=1e-12)


def test_fibers_by_room_and_by_limit():
    parts = parts_of(centers_mm=np.array([[0.0, 0.8], [0.0, -1.0]]), diameters_mm=[2.2, 1.3])
    loose = filled(lumen_mm=4.9, parts=parts, fiber_mm=0.05, free_fill_fraction=1.0)
    bending = filled(lumen_mm=4.9, parts=parts, fiber_mm=0.05, free_fill_fraction=0.55)
    one = np.pi / 4 * 0.05**2
    assert not loose.fill_limited
    assert bending.fill_limited
    assert bending.fiber_count == np.floor(0.55 * bending.free_area_mm2 / one)
    assert bending.light_area_mm2 == pytest.approx(0.55 * bending.free_area_mm2, rel=1e-3)
    assert loose.light_area_mm2 < 0.9069 * loose.free_area_mm2
    assert filled(lumen_mm=0.04, parts=[], fiber_mm=0.05, free_fill_fraction=1.0).fiber_count == 0


def test_refusals():
    with pytest.raises(OutOfRange, match="lumen_mm is 0; it must be above 0"):
        free_area_mm2(lumen_mm=0.0, parts=[], fiber_mm=0.0)
    with pytest.raises(OutOfRange, match="parts is -1; it must be 0 or more"):
        free_area_mm2(lumen_mm=2.0, parts=[(0.0, 0.0, -1.0)], fiber_mm=0.0)
    with pytest.raises(OutOfRange, match=r"free_fill_fraction is 1\.2; it must be from 0 to 1"):
        filled(lumen_mm=2.0, parts=[], fiber_mm=0.1, free_fill_fraction=1.2)
