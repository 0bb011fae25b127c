"""What is left free in the lumen, and the light fibers that fill it."""

from dataclasses import dataclass

import numpy as np

from optics.circles import open_area
from optics.guide.packing import fiber_count_law
from optics.spec import not_negative, positive, require, within
from optics.units import Flags, Numbers


@dataclass(frozen=True, slots=True)
class Fill:
    """Fibers in the free area of a lumen. `fill_limited`: the free-fill limit, not the room, sets the count."""

    free_area_mm2: Numbers
    fiber_count: Numbers
    light_area_mm2: Numbers
    fill_limited: Flags


def free_area_mm2(*, lumen_mm: Numbers, parts: np.ndarray, fiber_mm: Numbers) -> np.ndarray:
    """Area of a lumen open to the centers of fibers between round parts; exact, by arcs.

    The lumen eroded by half a fiber less the parts grown by as much. `parts` are rows (x_mm, y_mm,
    diameter_mm) from the lumen's center [..., part, 3]; they may overlap each other and the wall;
    diameter 0 for none. `fiber_mm` 0 gives the plain free area.
    Raises OutOfRange for a lumen that is not above 0 and negative diameters.
    References: closed_form.

    >>> round(float(free_area_mm2(lumen_mm=4.0, parts=[(0.0, 0.0, 2.0)], fiber_mm=0.0) / np.pi), 9)
    3.0
    """
    x, y, diameter = _columns(parts)
    positive(lumen_mm=lumen_mm)
    not_negative(fiber_mm=fiber_mm, parts=diameter)
    return open_area(
        opening_radius=np.asarray(lumen_mm, float) / 2,
        x=x,
        y=y,
        radius=diameter / 2,
        margin=np.asarray(fiber_mm, float) / 2,
    )


def filled(*, lumen_mm: Numbers, parts: np.ndarray, fiber_mm: Numbers, free_fill_fraction: Numbers) -> Fill:
    """Whole fibers that the free area takes, by room for centers and by the free-fill limit.

    N = min(lattice count of the area open to centers, fill x free area / fiber area); the light
    area is N fibers. Fibers that fill a bending section tighter than its limit chafe and break.
    Arrays broadcast over sections. References: closed_form, trade (the limit).

    >>> both = filled(lumen_mm=2.0, parts=[(0.0, 0.0, 0.0)], fiber_mm=0.03, free_fill_fraction=np.array([1.0, 0.55]))
    >>> both.fiber_count.tolist(), both.fill_limited.tolist()
    ([3911.0, 2444.0], [False, True])
    """
    positive(fiber_mm=fiber_mm)
    within(0.0, 1.0, free_fill_fraction=free_fill_fraction)
    fiber_mm2 = np.pi / 4 * np.asarray(fiber_mm, float) ** 2
    free = free_area_mm2(lumen_mm=lumen_mm, parts=parts, fiber_mm=0.0)
    room = fiber_count_law(
        centers_mm2=free_area_mm2(lumen_mm=lumen_mm, parts=parts, fiber_mm=fiber_mm), fiber_mm=fiber_mm
    )
    limit = np.floor(free_fill_fraction * free / fiber_mm2 * (1 + 1e-12))
    count = np.minimum(room, limit)
    return Fill(free, count, count * fiber_mm2, limit < room)


def parts_of(*, centers_mm: np.ndarray, diameters_mm: np.ndarray) -> np.ndarray:
    """Rows (x_mm, y_mm, diameter_mm) [..., part, 3] from a layout's centers and its diameters."""
    return np.concatenate([centers_mm, np.asarray(diameters_mm, float)[..., None]], axis=-1)


def _columns(parts) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    rows = np.asarray(parts, float)
    if rows.size == 0:
        rows = np.zeros((1, 3))
    require("parts", rows.ndim, "rows of x_mm, y_mm, diameter_mm", rows.ndim >= 2 and rows.shape[-1] == 3)
    return rows[..., 0], rows[..., 1], rows[..., 2]
