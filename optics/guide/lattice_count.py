"""Counting points of a hexagonal lattice: the search behind `packing.disc_count` and `annulus_count`.

Lengths are ratios to the lattice constant (one fiber diameter). A count depends on where the
center of the opening lies in the cell; by the lattice's symmetry one twelfth of the cell holds
all cases: the triangle of a lattice point, the middle of an edge and the middle of a hole.
"""

from functools import lru_cache

import numpy as np

_ROUND = 1e-9  # slack for points that lie on the rim
_EXACT_RADIUS = 45.0  # up to here the best offset in a disc is found exactly
_ROW = np.sqrt(3) / 2  # distance of lattice rows, and area of the cell


@lru_cache(maxsize=4096)
def best_disc_count(radius_ratio: float) -> int:
    """Most lattice points that a disc of this radius can cover; 0 for a negative radius."""
    if radius_ratio < -_ROUND:
        return 0
    radius = max(radius_ratio, 0.0)
    least = int(np.ceil(np.pi * radius**2 / _ROW * (1 - _ROUND)))
    offsets = _rim_offsets(radius) if radius <= _EXACT_RADIUS else _even_offsets(64)
    return max(1, least, int(_points_within(radius + _ROUND, offsets).max()))


@lru_cache(maxsize=4096)
def best_annulus_count(inner_ratio: float, outer_ratio: float) -> int:
    """Most points between two radii that a lattice or concentric rings put there; 0 if inner > outer."""
    if inner_ratio > outer_ratio + _ROUND:
        return 0
    outer = max(outer_ratio, inner_ratio)
    least = int(np.ceil(np.pi * (outer**2 - inner_ratio**2) / _ROW * (1 - _ROUND)))
    offsets = _even_offsets(24)
    on_lattice = _points_within(outer + _ROUND, offsets) - _points_within(inner_ratio - _ROUND, offsets)
    return max(least, int(on_lattice.max()), _full_rings(inner_ratio, outer), _nested_rings(inner_ratio, outer))


def _points_within(radius: float, offsets: np.ndarray) -> np.ndarray:
    """Lattice points within the radius of each offset, counted row by row."""
    reach = int(np.ceil((radius + 1) / _ROW))
    row = np.arange(-reach, reach + 1)
    half_square = radius**2 - (row * _ROW - offsets[:, 1:2]) ** 2
    half = np.sqrt(np.maximum(half_square, 0.0))
    center = offsets[:, 0:1] - 0.5 * (row % 2)
    inside = np.floor(center + half) - np.ceil(center - half) + 1
    return np.where(half_square >= 0, inside, 0).sum(axis=1).astype(int)


def _even_offsets(steps: int) -> np.ndarray:
    """Offsets spread evenly over the triangle, its corners among them."""
    first, second = np.meshgrid(np.arange(steps + 1), np.arange(steps + 1), indexing="ij")
    keep = first + second <= steps
    edge, hole = np.array([0.5, 0.0]), np.array([0.5, 0.5 / np.sqrt(3)])
    return (first[keep, None] * edge + second[keep, None] * hole) / steps


def _rim_offsets(radius: float) -> np.ndarray:
    """All offsets in the triangle with two lattice points on the rim, and its corners.

    The points covered change only where one crosses the rim. From a best offset the center can be
    moved, losing none, until two lie on the rim: the crossings of circles drawn round the points.
    """
    reach = int(np.ceil(radius + 2))
    row, column = np.meshgrid(np.arange(-2 * reach, 2 * reach + 1), np.arange(-2 * reach, 2 * reach + 1))
    points = np.stack([column.ravel() + 0.5 * (row.ravel() % 2), row.ravel() * _ROW], axis=1)
    distance = np.hypot(*(points - [0.35, 0.12]).T)
    points = points[np.abs(distance - radius) < 0.4]  # the triangle lies within 0.4 of (0.35, 0.12)
    corners = np.array([[0.0, 0.0], [0.5, 0.0], [0.5, 0.5 / np.sqrt(3)]])
    first, second = np.triu_indices(len(points), 1)
    apart = points[second] - points[first]
    squared = (apart**2).sum(axis=1)
    close = squared <= 4 * radius**2 * (1 + _ROUND)
    first, second, apart, squared = first[close], second[close], apart[close], squared[close]
    middle = (points[first] + points[second]) / 2
    aside = np.sqrt(np.maximum(radius**2 / squared - 0.25, 0.0))[:, None] * np.stack(
        [-apart[:, 1], apart[:, 0]], axis=1
    )
    crossings = np.concatenate([middle + aside, middle - aside])
    x, y = crossings.T
    inside = (x <= 0.5 + _ROUND) & (y >= -_ROUND) & (y <= x / np.sqrt(3) + _ROUND)
    return np.concatenate([corners, crossings[inside]])


def _on_ring(radius: float) -> int:
    """Points at mutual distance 1 or more on a circle."""
    if radius < 0.5 - _ROUND:
        return 1
    return int(np.pi / np.arcsin(min(0.5 / radius, 1.0)) + _ROUND)


def _full_rings(inner: float, outer: float) -> int:
    """Concentric rings one constant apart from the outer wall inward, each as full as it goes."""
    rings = int(outer - inner + _ROUND) + 1
    return sum(_on_ring(outer - k) for k in range(rings))


def _nested_rings(inner: float, outer: float) -> int:
    """Rings of equal number, each turned by half a step into the gaps of the one outside it: the best number."""
    return max(
        (number * len(nested_radii(inner, outer, number)) for number in range(_on_ring(outer), 2, -1)), default=0
    )


def nested_radii(inner: float, outer: float, number: int) -> list[float]:
    """Radii of nested rings of so many points each, from the outer wall inward, all distances 1 or more.

    A ring touches the one outside it, unless the ring two steps out, with points at the same
    angles, is less than 1 away.
    """
    half_step, radii, radius = np.pi / number, [], outer
    while radius >= inner - _ROUND and 2 * radius * np.sin(half_step) >= 1 - _ROUND:
        radii.append(radius)
        aside = 1 - (radius * np.sin(half_step)) ** 2
        nested = radius * np.cos(half_step) - np.sqrt(max(aside, 0.0))
        radius = nested if len(radii) < 2 else min(nested, radii[-2] - 1)
    return radii
