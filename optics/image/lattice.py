"""The lattice of cores (hexagonal) or pixels (square): limits, counts and aliases.

A row of neighbors runs along direction 0. A grating's direction is that of its grating vector,
across the bars. The limit is the edge of the first cell of the reciprocal lattice: beyond it a
coarser pattern gives the same samples, and no processing tells the two apart.
"""

import math
from dataclasses import dataclass

import numpy as np

from optics.spec import not_negative, positive
from optics.units import Numbers, deg_from_rad, lp_mm_from_per_um, per_um_from_lp_mm, rad_from_deg, um_from_mm

HEXAGONAL_FRACTION = math.pi / (2.0 * math.sqrt(3.0))
# Reciprocal lattices for a pitch of 1: two basis vectors, one a row.
HEXAGONAL = np.array([[1.0, -1.0 / np.sqrt(3.0)], [0.0, 2.0 / np.sqrt(3.0)]])
SQUARE = np.eye(2)


@dataclass(frozen=True, slots=True)
class Alias:
    """The coarsest pattern that gives the same samples: its frequency and direction."""

    frequency_lp_mm: np.ndarray
    direction_deg: np.ndarray


def resolution_limit_lp_mm(*, pitch_um: Numbers, direction_deg: Numbers) -> np.ndarray:
    """Finest grating that a hexagonal lattice samples without an alias, by direction of the grating vector.

    1/(sqrt3 p cos d), d the angle to the nearest reciprocal vector (30 degrees from a row, and
    every 60): 1/(sqrt3 p) across the rows, worst; 2/(3p) along a row of neighbors, best.
    References: closed_form (first zone of the reciprocal lattice).

    >>> round(float(resolution_limit_lp_mm(pitch_um=10.0, direction_deg=30.0)), 3)
    57.735
    """
    positive(pitch_um=pitch_um)
    off_deg = np.mod(np.asarray(direction_deg, float), 60.0) - 30.0
    return lp_mm_from_per_um(1.0 / (np.sqrt(3.0) * np.asarray(pitch_um, float) * np.cos(rad_from_deg(off_deg))))


def square_limit_lp_mm(*, pitch_um: Numbers, direction_deg: Numbers) -> np.ndarray:
    """Finest grating that a square lattice samples without an alias: 1/(2p) along the rows (worst), sqrt2 more at 45.

    References: closed_form (first zone of the reciprocal lattice).

    >>> float(square_limit_lp_mm(pitch_um=2.0, direction_deg=0.0))
    250.0
    """
    positive(pitch_um=pitch_um)
    off_deg = np.mod(np.asarray(direction_deg, float) + 45.0, 90.0) - 45.0
    return lp_mm_from_per_um(0.5 / (np.asarray(pitch_um, float) * np.cos(rad_from_deg(off_deg))))


def core_count(*, diameter_mm: Numbers, pitch_um: Numbers) -> Numbers:
    """Cores in a round bundle by area: 0.9069 (D/p)^2; whole cores scatter about it by a few rows' ends.

    References: closed_form.

    >>> round(core_count(diameter_mm=0.95, pitch_um=8.0))
    12789
    """
    positive(diameter_mm=diameter_mm, pitch_um=pitch_um)
    return HEXAGONAL_FRACTION * (um_from_mm(diameter_mm) / pitch_um) ** 2


def core_area_fraction(*, core_um: Numbers, pitch_um: Numbers) -> Numbers:
    """Core area over face area: 0.9069 (d/p)^2. References: closed_form.

    >>> round(core_area_fraction(core_um=7.5, pitch_um=10.0), 4)
    0.5101
    """
    positive(core_um=core_um, pitch_um=pitch_um)
    return HEXAGONAL_FRACTION * (core_um / pitch_um) ** 2


def cell_core_count(*, frequency_lp_mm: Numbers, pitch_um: Numbers) -> np.ndarray:
    """Cores in a cell of half a period square, never less than one: (1/2f)^2/((sqrt3/2) p^2).

    References: closed_form.

    >>> round(float(cell_core_count(frequency_lp_mm=5.0, pitch_um=10.0)), 2)
    115.47
    """
    positive(frequency_lp_mm=frequency_lp_mm, pitch_um=pitch_um)
    half_periods = 2.0 * per_um_from_lp_mm(frequency_lp_mm) * pitch_um
    return np.maximum(2.0 / (np.sqrt(3.0) * half_periods**2), 1.0)


def cell_pixel_count(*, frequency_lp_mm: Numbers, pixel_um: Numbers) -> np.ndarray:
    """Pixels of a square lattice in a cell of half a period square, never less than one.

    References: closed_form.

    >>> round(float(cell_pixel_count(frequency_lp_mm=50.0, pixel_um=2.0)), 6)
    25.0
    """
    positive(frequency_lp_mm=frequency_lp_mm, pixel_um=pixel_um)
    return np.maximum(1.0 / (2.0 * per_um_from_lp_mm(frequency_lp_mm) * pixel_um) ** 2, 1.0)


def alias(*, frequency_lp_mm: Numbers, direction_deg: Numbers, pitch_um: Numbers) -> Alias:
    """What a grating beyond the limit of a hexagonal lattice looks like; below the limit, itself.

    The shortest of f - G over the reciprocal vectors G (two-dimensional search). References: closed_form.

    >>> seen = alias(frequency_lp_mm=80.0, direction_deg=30.0, pitch_um=10.0)
    >>> round(float(seen.frequency_lp_mm), 2), round(2 * 57.735 - 80.0, 2)
    (35.47, 35.47)
    """
    return _shortest(frequency_lp_mm, direction_deg, pitch_um, HEXAGONAL)


def square_alias(*, frequency_lp_mm: Numbers, direction_deg: Numbers, pitch_um: Numbers) -> Alias:
    """What a grating beyond the limit of a square lattice looks like; below the limit, itself.

    References: closed_form.

    >>> round(float(square_alias(frequency_lp_mm=300.0, direction_deg=0.0, pitch_um=2.0).frequency_lp_mm), 6)
    200.0
    """
    return _shortest(frequency_lp_mm, direction_deg, pitch_um, SQUARE)


def _shortest(frequency_lp_mm, direction_deg, pitch_um, basis) -> Alias:
    """Shortest f - G: to the nearest in reciprocal coordinates, then its eight neighbors (enough for both lattices)."""
    positive(pitch_um=pitch_um)
    not_negative(frequency_lp_mm=frequency_lp_mm)
    pitch = np.asarray(pitch_um, float)
    turn = rad_from_deg(np.asarray(direction_deg, float))
    size = per_um_from_lp_mm(np.asarray(frequency_lp_mm, float)) * pitch
    wave = np.stack(np.broadcast_arrays(size * np.cos(turn), size * np.sin(turn)), axis=-1)
    near = wave - np.rint(wave @ np.linalg.inv(basis)) @ basis
    steps = np.array([(i, j) for i in (0, -1, 1) for j in (0, -1, 1)], float) @ basis
    candidates = near[..., None, :] + steps
    # Ties (a wave on the zone's edge) go to the wave itself: the tolerance keeps rounding from choosing.
    length = np.hypot(candidates[..., 0], candidates[..., 1]) + 1e-12 * np.arange(len(steps))
    best = np.take_along_axis(candidates, length.argmin(axis=-1)[..., None, None], axis=-2)[..., 0, :]
    best = np.where((np.hypot(best[..., 0], best[..., 1]) < size - 1e-12)[..., None], best, wave)
    found = lp_mm_from_per_um(np.hypot(best[..., 0], best[..., 1]) / pitch)
    return Alias(found, np.mod(deg_from_rad(np.arctan2(best[..., 1], best[..., 0])), 180.0))
