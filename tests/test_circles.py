"""Unions and overlaps of circles: closed forms, a second route by strips, and inclusion and exclusion."""

import numpy as np
import pytest

from optics.circles import free_arcs, open_area, overlap_area, union_area


def by_strips(x, y, r, strips=200_001):
    """Area of the union from the lengths of its sections, one vertical line after another."""
    grid = np.linspace((x - r).min(), (x + r).max(), strips)
    grid = (grid[1:] + grid[:-1]) / 2
    half = np.sqrt(np.maximum(r[:, None] ** 2 - (grid - x[:, None]) ** 2, 0.0))
    low, high = y[:, None] - half, np.where(half > 0, y[:, None] + half, -np.inf)
    order = np.argsort(low, axis=0)
    low, high = np.take_along_axis(low, order, 0), np.take_along_axis(high, order, 0)
    covered, top = np.zeros_like(grid), np.full_like(grid, -np.inf)
    for a, b in zip(low, high):
        covered += np.maximum(b - np.maximum(a, top), 0.0)
        top = np.maximum(top, b)
    return covered.sum() * (grid[1] - grid[0])


@pytest.mark.parametrize("seed", range(8))
def test_union_against_strips(seed):
    draw = np.random.default_rng(seed)
    x, y, r = draw.uniform(-1, 1, 9), draw.uniform(-1, 1, 9), draw.uniform(0.05, 0.7, 9)
    assert union_area(x=x, y=y, radius=r) == pytest.approx(by_strips(x, y, r), rel=2e-6)


def test_union_of_two_is_the_sum_less_the_overlap():
    draw = np.random.default_rng(1)
    d, r1, r2 = draw.uniform(0, 3, 200), draw.uniform(0.1, 1.5, 200), draw.uniform(0.1, 1.5, 200)
    union = union_area(x=np.stack([0 * d, d], -1), y=np.zeros((200, 2)), radius=np.stack([r1, r2], -1))
    overlap = overlap_area(radius_1=r1, radius_2=r2, distance=d)
    np.testing.assert_allclose(union, np.pi * (r1**2 + r2**2) - overlap, rtol=1e-12)


def test_special_places():
    assert union_area(x=[0.0, 0.0], y=[0.0, 0.0], radius=[1.0, 1.0]) == pytest.approx(np.pi)
    assert union_area(x=[0.0, 0.3], y=[0.0, 0.0], radius=[1.0, 0.5]) == pytest.approx(np.pi)
    assert union_area(x=[0.0, 0.5], y=[0.0, 0.0], radius=[1.0, 0.5]) == pytest.approx(np.pi)  # touches from inside
    assert union_area(x=[0.0, 2.0], y=[0.0, 0.0], radius=[1.0, 1.0]) == pytest.approx(2 * np.pi)
    assert union_area(x=[0.0, 9.0], y=[0.0, 0.0], radius=[1.0, 0.0]) == pytest.approx(np.pi)
    # three circles through one point, their centers around it
    turn = np.array([0, 2, 4]) * np.pi / 3
    flower = union_area(x=np.cos(turn), y=np.sin(turn), radius=np.ones(3))
    lens = float(overlap_area(radius_1=1.0, radius_2=1.0, distance=np.sqrt(3.0)))
    assert flower == pytest.approx(3 * np.pi - 3 * lens)


def test_union_does_not_depend_on_place_or_order():
    draw = np.random.default_rng(5)
    x, y, r = draw.uniform(-1, 1, 7), draw.uniform(-1, 1, 7), draw.uniform(0.1, 0.6, 7)
    plain, mixed = union_area(x=x, y=y, radius=r), draw.permutation(7)
    assert union_area(x=x[mixed] + 3, y=y[mixed] - 2, radius=r[mixed]) == pytest.approx(float(plain), rel=1e-12)
    many = union_area(x=np.tile(x, (50, 1)), y=np.tile(y, (50, 1)), radius=np.tile(r, (50, 1)))
    np.testing.assert_allclose(many, plain, rtol=1e-12)


def test_free_arcs_lie_on_the_rim_of_the_union():
    draw = np.random.default_rng(2)
    x, y, r = draw.uniform(-1, 1, 6), draw.uniform(-1, 1, 6), draw.uniform(0.2, 0.7, 6)
    start, end, free = free_arcs(x=x, y=y, radius=r)
    for i, k in np.argwhere(free & (end - start > 1e-6)):
        inside = np.linspace(start[i, k], end[i, k], 7)[1:-1]
        px, py = x[i] + r[i] * np.cos(inside), y[i] + r[i] * np.sin(inside)
        others = np.arange(6) != i
        assert (np.hypot(px[:, None] - x[others], py[:, None] - y[others]) >= r[others] - 1e-9).all()


def test_open_area_broadcasts_over_margins():
    margins = np.array([0.0, 0.1, 0.5, 3.0])
    areas = open_area(opening_radius=2.0, x=[0.0], y=[0.0], radius=[0.5], margin=margins)
    np.testing.assert_allclose(areas, np.pi * np.maximum((2 - margins) ** 2 - (0.5 + margins) ** 2, 0) * (margins < 2))
