"""The smallest lumen: closed forms, published instances, quick against thorough, and never an overlap."""

import time

import numpy as np
import pytest

from optics.body.lumen import smallest_lumen, smallest_lumens
from optics.spec import OutOfRange
from optics.tables import table


def least_gaps(diameters, clearance, found, at_wall=None):
    """Smallest gap left beyond the clearance: between parts and to the wall; and what wall parts stand off it."""
    real = np.asarray(diameters) > 0
    r, p = np.asarray(diameters, float)[real] / 2, found.centers_mm[real]
    i, j = np.triu_indices(len(r), 1)
    between = np.hypot(*(p[i] - p[j]).T) - r[i] - r[j] - clearance
    to_wall = found.lumen_mm / 2 - np.hypot(*p.T) - r - clearance
    off = np.abs(to_wall[np.asarray(at_wall)[real]]) if at_wall is not None else np.zeros(1)
    return between.min(initial=np.inf), to_wall.min(), off.max(initial=0.0)


def part_set(seed, count):
    return np.random.default_rng(1000 * count + seed).uniform(0.3, 2.0, count)


def solve(diameters, thorough, clearance=0.05, at_wall=None):
    return smallest_lumen(diameters_mm=diameters, clearance_mm=clearance, thorough=thorough, at_wall=at_wall)


def test_closed_forms():
    assert solve([1.2], False).lumen_mm == pytest.approx(1.3)
    assert solve([2.0, 1.0], False).lumen_mm == pytest.approx(3.15)
    three = solve([2.0, 2.0, 2.0], False, clearance=0.0)
    assert three.lumen_mm == pytest.approx(2 * (1 + 2 / np.sqrt(3)), rel=1e-12)
    assert not three.comes_free


def test_third_part_comes_free_up_to_the_gap():
    r1, r2 = 1.5, 1.0
    gap = r1 * r2 * (r1 + r2) / (r1**2 + r1 * r2 + r2**2)
    inside, outside = (solve([2 * r1, 2 * r2, 2 * gap * f], False, clearance=0.0) for f in (0.999, 1.001))
    assert inside.comes_free
    assert inside.lumen_mm == pytest.approx(5.0, rel=1e-12)
    assert not outside.comes_free
    assert 5.0 < outside.lumen_mm < 5.01
    # where it comes free the third part lies in the middle of the gap: equal gaps to both parts and the wall
    small = solve([2 * r1, 2 * r2, 0.6], False, clearance=0.0)
    p = small.centers_mm
    gaps = [np.hypot(*(p[2] - p[0])) - r1 - 0.3, np.hypot(*(p[2] - p[1])) - r2 - 0.3, 2.5 - np.hypot(*p[2]) - 0.3]
    np.testing.assert_allclose(gaps, gap - 0.3, atol=1e-9)


def test_two_equal_parts_beside_lie_mirrored():
    found = solve([2.0, 2.4, 0.5, 0.5], False)
    np.testing.assert_allclose(found.centers_mm[2], found.centers_mm[3] * [-1, 1], atol=1e-12)


@pytest.mark.parametrize(("count", "radius"), [(5, 9.001398), (7, 13.462111)])
def test_published_instances_to_six_digits(count, radius):
    """Radii 1 to N: arXiv 1306.0694."""
    found = solve(2.0 * np.arange(1, count + 1), True, clearance=0.0)
    assert found.lumen_mm / 2 == pytest.approx(radius, abs=1.5e-6)


def test_published_instance_of_ten():
    shares = []
    found = smallest_lumen(diameters_mm=2.0 * np.arange(1, 11), clearance_mm=0.0, thorough=True, progress=shares.append)
    assert found.lumen_mm / 2 == pytest.approx(22.000193, rel=1e-5)
    assert shares == sorted(shares)
    assert 0 < shares[-1] <= 1


@pytest.mark.parametrize("count", [2, 3, 4, 5, 6, 7, 8, 9, 10])
def test_equal_circles_reach_the_best_known_packing(count):
    """The table of best known ratios, found by others (Graham et al. 1998)."""
    best = table("circle_ratios")["ratio"][count - 1]
    assert solve(np.full(count, 2.0), True, clearance=0.0).lumen_mm / 2 == pytest.approx(best, abs=1e-5)


@pytest.mark.parametrize("count", range(3, 11))
@pytest.mark.parametrize("seed", range(2))
def test_quick_is_near_thorough(count, seed):
    quick_is_near_thorough(count, seed)


@pytest.mark.slow
@pytest.mark.parametrize("count", range(3, 11))
@pytest.mark.parametrize("seed", range(2, 12))
def test_quick_is_near_thorough_at_length(count, seed):
    quick_is_near_thorough(count, seed)


def quick_is_near_thorough(count, seed):
    parts = part_set(seed, count)
    at_wall = np.arange(count) > count - 1 - seed % 3
    quick, again, best = (solve(parts, way, at_wall=at_wall) for way in (False, False, True))
    assert best.lumen_mm <= quick.lumen_mm * (1 + 1e-9) <= best.lumen_mm * 1.02
    assert quick.lumen_mm == again.lumen_mm
    assert np.array_equal(quick.centers_mm, again.centers_mm)
    for found in (quick, best):
        between, to_wall, off = least_gaps(parts, 0.05, found, at_wall)
        assert between > -1e-6
        assert to_wall > -1e-6
        assert off < 1e-6
    assert best.lumen_mm >= (np.sort(parts)[-2:].sum() + 0.15) * (1 - 1e-9)


def test_thorough_gives_the_same_answer_every_time():
    one, two = (solve(part_set(5, 7), True) for _ in range(2))
    assert one.lumen_mm == two.lumen_mm
    assert np.array_equal(one.centers_mm, two.centers_mm)


def test_alone_and_among_others_to_the_last_bit():
    draw = np.random.default_rng(8)
    parts = draw.uniform(0.3, 2.0, (60, 7)) * (draw.random((60, 7)) < 0.75)
    parts[:, 0] = 1.0
    clearance, wall = draw.uniform(0, 0.1, 60), draw.random((60, 7)) < 0.3
    many = smallest_lumens(diameters_mm=parts, clearance_mm=clearance, at_wall=wall)
    for i in range(60):
        one = smallest_lumens(diameters_mm=parts[i : i + 1], clearance_mm=clearance[i], at_wall=wall[i : i + 1])
        assert one.lumen_mm[0] == many.lumen_mm[i]
        assert np.array_equal(one.centers_mm[0], many.centers_mm[i])
        short = parts[i][parts[i] > 0]
        single = smallest_lumen(
            diameters_mm=short, clearance_mm=clearance[i], thorough=False, at_wall=wall[i][parts[i] > 0]
        )
        assert single.lumen_mm == many.lumen_mm[i]
        assert np.array_equal(single.centers_mm, many.centers_mm[i][parts[i] > 0])


def test_standing_first_part_up_and_parts_in_the_order_given():
    parts = part_set(3, 6)
    found = solve(parts, False)
    assert found.centers_mm[0, 0] == 0
    assert found.centers_mm[0, 1] > 0
    turned = solve(parts[::-1], False)
    assert turned.lumen_mm == pytest.approx(found.lumen_mm, rel=1e-12)


def test_clearance_grows_the_lumen_as_wider_parts_do():
    parts = part_set(4, 5)
    tight = solve(parts + 0.1, False, clearance=0.0)
    assert solve(parts, False, clearance=0.1).lumen_mm == pytest.approx(tight.lumen_mm + 0.1, rel=1e-12)


def test_wires_at_the_wall_cost_nothing_where_there_is_room():
    parts, wall = [2.2, 1.3, 0.4, 0.4, 0.4, 0.4], [False, False, True, True, True, True]
    found = solve(parts, False, at_wall=wall)
    assert found.comes_free
    assert found.lumen_mm == pytest.approx(3.5 + 0.15)
    assert least_gaps(parts, 0.05, found, wall)[2] < 1e-9
    # a ring of wires alone: the polygon of their centers
    ring = solve([0.5] * 7, False, clearance=0.0, at_wall=[True] * 7)
    assert ring.lumen_mm == pytest.approx(0.5 * (1 + 1 / np.sin(np.pi / 7)), rel=1e-4)
    # one thick part in the middle of six wires that fill the ring
    full = solve([1.0] * 7, False, clearance=0.0, at_wall=[False] + [True] * 6)
    assert full.lumen_mm == pytest.approx(3.0, rel=1e-4)


def test_scale():
    parts = part_set(6, 6)
    assert solve(parts * 10, False, clearance=0.5).lumen_mm == pytest.approx(
        10 * solve(parts, False).lumen_mm, rel=1e-9
    )


def test_quick_is_quick():
    """Medians with a wide allowance for a busy machine: a few ms at 4 parts, tens of ms at 10."""
    for count, most_s in ((4, 0.03), (10, 0.3)):
        solve(part_set(0, count), False)
        spent = []
        for seed in range(5):
            start = time.perf_counter()
            solve(part_set(seed, count), False)
            spent.append(time.perf_counter() - start)
        assert np.median(spent) < most_s


@pytest.mark.parametrize(
    ("parts", "clearance", "sentence"),
    [
        ([1.0, -0.5], 0.05, "diameters_mm is -0.5; it must be 0 or more."),
        ([1.0, 0.5], -0.05, "clearance_mm is -0.05; it must be 0 or more."),
        ([0.0, 0.0], 0.05, "diameters_mm is 0; it must be above 0 for at least one part."),
        ([np.nan], 0.05, "diameters_mm is nan; it must be 0 or more."),
    ],
)
def test_refusals(parts, clearance, sentence):
    with pytest.raises(OutOfRange) as said:
        solve(parts, False, clearance=clearance)
    assert str(said.value) == sentence
