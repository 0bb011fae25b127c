"""Packing: best offsets against a brute search, area laws as bounds, best known ratios against closed forms."""

import numpy as np
import pytest

from optics.guide.lattice_count import nested_radii
from optics.guide.packing import (
    annulus_count,
    annulus_packing_fraction,
    circle_ratio,
    core_share,
    curved_hexagonal_ratio,
    disc_count,
    disc_packing_fraction,
    ferrule_count,
    fiber_count_law,
    hexagonal_count,
    hexagonal_packing_fraction,
    square_packing_fraction,
)
from optics.spec import OutOfRange


def brute_count(inner, outer, offsets):
    """Lattice points between two radii of each offset, point by point: the slow way."""
    reach = int(outer) + 3
    column, row = np.meshgrid(np.arange(-2 * reach, 2 * reach + 1), np.arange(-2 * reach, 2 * reach + 1))
    x, y = (column + 0.5 * row).ravel(), (row * np.sqrt(3) / 2).ravel()
    distance = np.hypot(x - offsets[:, :1], y - offsets[:, 1:])
    return ((distance <= outer + 1e-9) & (distance >= inner - 1e-9)).sum(axis=1)


@pytest.mark.parametrize("across", [1.0, 1.5, 2.0, 2.6, 3.0, 3.7, 5.0, 6.2, 9.4, 14.7, 23.0])
def test_disc_count_is_the_best_of_many_offsets(across):
    offsets = np.random.default_rng(1).uniform(0, 1, (3000, 2)) @ np.array([[1.0, 0.0], [0.5, np.sqrt(3) / 2]])
    offsets = np.concatenate([offsets, [[0.0, 0.0], [0.5, 0.0], [0.5, 0.5 / np.sqrt(3)]]])
    found = disc_count(bundle_mm=across, fiber_mm=1.0)
    tried = brute_count(0.0, (across - 1) / 2, offsets)
    assert found >= tried.max()
    assert found <= tried.max() + max(1, 0.004 * found)  # an exact best offset may be a single point


def test_disc_count_lies_between_the_laws():
    for across in np.linspace(1.0, 130.0, 60):
        found = disc_count(bundle_mm=across, fiber_mm=1.0)
        assert (
            hexagonal_packing_fraction() * (across - 1) ** 2 <= found <= hexagonal_packing_fraction() * across**2 + 1e-9
            or found == 1
        )


def test_worked_bundle():
    """30 um fibers in 2.0 mm: 4031 by area over area, about 3,910 whole ones."""
    assert round(hexagonal_packing_fraction() * (2.0 / 0.03) ** 2) == 4031
    assert 3911 <= disc_count(bundle_mm=2.0, fiber_mm=0.03) < 3930
    assert core_share(core_um=27.0, fiber_um=30.0) * hexagonal_packing_fraction() == pytest.approx(0.735, abs=5e-4)


def test_counts_where_fibers_just_touch():
    assert [disc_count(bundle_mm=d, fiber_mm=0.1) for d in (0.099, 0.1, 0.2, 0.3, 0.5)] == [0, 1, 2, 7, 19]
    assert disc_count(bundle_mm=0.7, fiber_mm=0.1) == 37
    assert annulus_count(inner_mm=0.1, outer_mm=0.3, fiber_mm=0.1) == 6
    assert annulus_count(inner_mm=0.1, outer_mm=0.29, fiber_mm=0.1) == 0


@pytest.mark.parametrize(
    ("inner", "outer"), [(2.0, 9.0), (5.0, 9.5), (10.0, 14.0), (20.0, 24.6), (6.0, 30.0), (0.0, 7.0)]
)
def test_annulus_count_is_no_less_than_lattice_rings_and_law(inner, outer):
    found = annulus_count(inner_mm=inner, outer_mm=outer, fiber_mm=1.0)
    offsets = np.random.default_rng(2).uniform(0, 1, (400, 2))
    assert found >= brute_count((inner + 1) / 2 if inner else 0.0, (outer - 1) / 2, offsets).max() - 0.01 * found
    law = annulus_packing_fraction(inner_mm=inner, outer_mm=outer, fiber_mm=1.0) * (outer**2 - inner**2)
    assert law * (1 - 1e-9) <= found or inner == 0
    assert found <= hexagonal_packing_fraction() * (outer**2 - inner**2) * 1.25


def test_rings_beat_the_lattice_in_narrow_gaps():
    """A gap of one fiber holds a full ring; the lattice law would say none. Nested rings pass a gap of 1.9."""
    ring = annulus_count(inner_mm=10.0, outer_mm=12.0, fiber_mm=1.0)
    assert ring == int(np.pi / np.arcsin(1 / 11))
    assert float(annulus_packing_fraction(inner_mm=10.0, outer_mm=12.0, fiber_mm=1.0)) == 0.0
    assert annulus_count(inner_mm=10.0, outer_mm=13.8, fiber_mm=1.0) > ring * 1.8


@pytest.mark.parametrize(("inner", "outer"), [(3.0, 4.7), (5.5, 7.45), (2.0, 2.6), (10.5, 16.0)])
def test_nested_rings_do_not_overlap(inner, outer):
    """Every point of the rings drawn, all distances checked."""
    for number in range(3, int(2 * np.pi * outer)):
        radii = nested_radii(inner, outer, number)
        assert all(inner - 1e-9 <= radius <= outer for radius in radii)
        turn = 2 * np.pi * np.arange(number) / number
        points = np.concatenate(
            [r * np.exp(1j * (turn + np.pi / number * (k % 2))) for k, r in enumerate(radii)] or [[]]
        )
        apart = np.abs(points[:, None] - points) + 9.0 * np.eye(len(points))
        assert apart.min(initial=9.0) >= 1 - 1e-8


def test_rings_stay_within_ratios_best_known():
    """No ring arrangement of a whole disc beats the best known packings."""
    for count in (7, 12, 19, 30, 37, 61):
        ratio = circle_ratio(count=count)
        assert disc_count(bundle_mm=ratio * (1 - 1e-5), fiber_mm=1.0) <= count


def test_best_known_ratios_against_closed_forms():
    sine = lambda degrees: np.sin(np.deg2rad(degrees))  # noqa: E731
    closed = {
        2: 2.0,
        3: 1 + 2 / np.sqrt(3),
        4: 1 + np.sqrt(2),
        5: 1 + 1 / sine(36),
        6: 3.0,
        7: 3.0,
        8: 1 + 1 / sine(180 / 7),
        9: 1 + np.sqrt(2 * (2 + np.sqrt(2))),
        11: 1 + 1 / sine(20),
        13: 2 + np.sqrt(5),
        15: 1 + np.sqrt(6 + 2 / np.sqrt(5) + 4 * np.sqrt(1 + 2 / np.sqrt(5))),
        18: 1 + np.sqrt(2) + np.sqrt(6),
        19: 1 + np.sqrt(2) + np.sqrt(6),
    }
    for count, ratio in closed.items():
        assert circle_ratio(count=count) == pytest.approx(ratio, abs=6e-6), count
    for rings in (1, 2, 3, 4):
        count = hexagonal_count(ring_count=rings)
        assert circle_ratio(count=count) == pytest.approx(float(curved_hexagonal_ratio(ring_count=rings)), abs=6e-6)


def test_best_known_ratios_grow_and_stay_below_full_density():
    counts = np.arange(1, 62)
    ratios = circle_ratio(count=counts)
    assert (np.diff(ratios) >= 0).all()
    assert (counts / ratios**2 < hexagonal_packing_fraction()).all() or ratios[0] == 1
    assert (counts[1:] / ratios[1:] ** 2 < hexagonal_packing_fraction()).all()
    for count in (7, 19, 20, 61):
        assert ferrule_count(bundle_mm=circle_ratio(count=count), fiber_mm=1.0) == (19 if count == 18 else count)
        assert ferrule_count(bundle_mm=circle_ratio(count=count), fiber_mm=1.0) >= disc_count(
            bundle_mm=circle_ratio(count=count), fiber_mm=1.0
        )
    assert ferrule_count(bundle_mm=0.9, fiber_mm=1.0) == 0


def test_law_of_counts_is_the_mean_over_offsets():
    offsets = np.random.default_rng(4).uniform(0, 1, (4000, 2)) @ np.array([[1.0, 0.0], [0.5, np.sqrt(3) / 2]])
    counts = brute_count(0.0, 7.3, offsets)
    mean = np.pi * 7.3**2 / (np.sqrt(3) / 2)
    assert counts.mean() == pytest.approx(mean, abs=4 * counts.std() / np.sqrt(4000))
    assert fiber_count_law(centers_mm2=np.pi * 7.3**2, fiber_mm=1.0) == np.ceil(mean)
    np.testing.assert_array_equal(fiber_count_law(centers_mm2=np.array([0.0, 1e-9, 1.0]), fiber_mm=1.0), [0, 1, 2])


def test_packing_fractions():
    assert square_packing_fraction() < hexagonal_packing_fraction()
    assert disc_packing_fraction(bundle_mm=1.0, fiber_mm=2.0) == 0.0
    assert disc_packing_fraction(bundle_mm=1e6, fiber_mm=1.0) == pytest.approx(hexagonal_packing_fraction(), rel=1e-5)
    wide = annulus_packing_fraction(inner_mm=1e-9, outer_mm=2.0, fiber_mm=0.1)
    assert wide == pytest.approx(hexagonal_packing_fraction() * 0.9)


@pytest.mark.parametrize(
    ("call", "sentence"),
    [
        (lambda: circle_ratio(count=62), "count is 62; it must be a whole number from 1 to 61."),
        (lambda: circle_ratio(count=2.5), "count is 2.5; it must be a whole number from 1 to 61."),
        (lambda: core_share(core_um=31.0, fiber_um=30.0), "core_um is 31; it must be at most the fiber's diameter."),
        (lambda: disc_count(bundle_mm=-1.0, fiber_mm=0.1), "bundle_mm is -1; it must be above 0."),
        (
            lambda: annulus_count(inner_mm=3.0, outer_mm=2.0, fiber_mm=0.1),
            "inner_mm is 3; it must be below the outer diameter.",
        ),
    ],
)
def test_refusals(call, sentence):
    with pytest.raises(OutOfRange) as said:
        call()
    assert str(said.value) == sentence
