"""The cross-section: what lies in the tube, how small the tube can be, and what is left for fibers.

Mechanisms next door: `lumen` (the smallest lumen for given circles), `fill` (the area left free and
the fibers in it); both can be called from here.
"""

from dataclasses import dataclass
from typing import Annotated, Literal

import numpy as np
from pydantic import Field

from optics.body.fill import filled, free_area_mm2
from optics.body.lumen import Layout, smallest_lumen, smallest_lumens
from optics.spec import Spec, not_negative, positive, quantity, require
from optics.units import Flags, Numbers

__all__ = [
    "Channel",
    "Layout",
    "PartList",
    "Section",
    "TubeFit",
    "Wire",
    "available_lumen_mm",
    "fill_fraction",
    "filled",
    "fit_in_tube",
    "free_area_mm2",
    "jacketed_mm",
    "outer_diameter_mm",
    "part_list",
    "smallest_lumen",
    "smallest_lumens",
]


class Channel(Spec):
    """A working channel: a tube of its own in the lumen."""

    inner_mm: float = quantity("inner diameter", usual=(0.4, 3.2), gt=0, le=50, common=True)
    wall_mm: float = quantity("wall on each side", usual=(0.05, 0.3), ge=0, le=10)


class Wire(Spec):
    """Pull wires (with their guides) of one diameter."""

    diameter_mm: float = quantity("outer diameter, guide tube included", usual=(0.2, 0.8), gt=0, le=10)
    count: int = quantity("how many", usual=(1, 4), ge=1, le=12)
    at_wall: bool = Field(default=True, description="fixed on the wall of the lumen; false: anywhere in it")


class Section(Spec):
    """The section of the insertion tube."""

    outer_diameter_mm: Annotated[float, Field(gt=0, le=100)] | Literal["solve"] = Field(
        default="solve",
        description='outer diameter over the covering, or "solve" for the least that holds the parts',
        json_schema_extra={"usual": (0.8, 12.0), "common": True},
    )
    wall_mm: float = quantity("wall on each side: tube, braid and covering together", usual=(0.05, 0.7), ge=0, le=20)
    clearance_mm: float = quantity("least gap between parts, and between parts and wall", usual=(0.0, 0.15), ge=0, le=5)
    image_jacket_mm: float = quantity(
        "wall around the image bundle, added to its radius; 0: bare",
        default=0.0,
        usual=(0, 0.15),
        source="assumed",
        ge=0,
        le=5,
    )
    objective_barrel_mm: float | None = quantity(
        "outer diameter of the objective's barrel; absent: no wider than the jacketed bundle",
        default=None,
        usual=(0.5, 4),
        gt=0,
        le=50,
    )
    channels: tuple[Channel, ...] = Field(default=(), strict=False, max_length=4, description="working channels")
    wires: tuple[Wire, ...] = Field(default=(), strict=False, max_length=4, description="pull wires, by sort")
    free_fill_fraction: float = quantity(
        "most of the free area that fibers may take: 0.55 in a bending section, 0.70 passive, 0.85 in a glued tip",
        default=0.55,
        usual=(0.3, 0.85),
        source="trade",
        gt=0,
        le=1,
    )


def outer_diameter_mm(*, lumen_mm: Numbers, wall_mm: Numbers) -> Numbers:
    """Outer diameter of a tube: lumen and two walls.

    >>> round(outer_diameter_mm(lumen_mm=4.9, wall_mm=0.55), 6)
    6.0
    """
    positive(lumen_mm=lumen_mm)
    not_negative(wall_mm=wall_mm)
    return lumen_mm + 2 * wall_mm


def available_lumen_mm(*, tube_mm: Numbers, wall_mm: Numbers) -> Numbers:
    """Lumen that a tube of a given outer diameter leaves inside its walls.

    Raises OutOfRange when the walls leave nothing.

    >>> round(available_lumen_mm(tube_mm=6.0, wall_mm=0.55), 6)
    4.9
    """
    positive(tube_mm=tube_mm)
    not_negative(wall_mm=wall_mm)
    require("wall_mm", wall_mm, "below half the outer diameter", 2 * np.asarray(wall_mm) < tube_mm)
    return tube_mm - 2 * wall_mm


def jacketed_mm(*, bundle_mm: Numbers, jacket_mm: Numbers, barrel_mm: Numbers) -> Numbers:
    """Diameter that the image part takes: the jacketed bundle or the objective's barrel, the wider.

    A barrel of 0 stands for none.

    >>> jacketed_mm(bundle_mm=1.0, jacket_mm=0.05, barrel_mm=1.3)
    1.3
    """
    positive(bundle_mm=bundle_mm)
    not_negative(jacket_mm=jacket_mm, barrel_mm=barrel_mm)
    wider = np.maximum(np.asarray(bundle_mm) + 2 * jacket_mm, barrel_mm)
    return wider if wider.ndim else float(wider)


def fill_fraction(*, parts_mm2: Numbers, lumen_mm: Numbers) -> Numbers:
    """Area of the parts over that of the lumen: the first sum of a layout, before any geometry.

    >>> areas = np.pi / 4 * (1.3**2 + 2.2**2 + 2 * 1.2**2 + 4 * 0.6**2)
    >>> round(float(areas), 2), round(float(fill_fraction(parts_mm2=areas, lumen_mm=4.9)), 2)
    (8.52, 0.45)
    """
    not_negative(parts_mm2=parts_mm2)
    positive(lumen_mm=lumen_mm)
    return parts_mm2 / (np.pi / 4 * np.asarray(lumen_mm) ** 2)


@dataclass(frozen=True, slots=True)
class PartList:
    """What lies in the lumen, the image part first: words, diameters [part] and which sit on the wall."""

    names: tuple[str, ...]
    diameters_mm: np.ndarray
    at_wall: Flags


def part_list(*, section: Section, image_mm: float) -> PartList:
    """The round parts of a section around an image part of a given diameter, wires written out one by one.

    An `image_mm` of 0 stands for a section without one (a bare light guide).
    """
    not_negative(image_mm=image_mm)
    image = [("image", image_mm, False)] if image_mm else []
    channels = [(f"channel {n}", c.inner_mm + 2 * c.wall_mm, False) for n, c in enumerate(section.channels, 1)]
    wires = [(f"wire {n}", w.diameter_mm, w.at_wall) for n, w in enumerate(section.wires, 1) for _ in range(w.count)]
    names, diameters, walled = (
        zip(*(image + channels + wires), strict=True) if image + channels + wires else ((), (), ())
    )
    return PartList(names, np.array(diameters, float), np.array(walled, bool))


@dataclass(frozen=True, slots=True)
class TubeFit:
    """Parts in a tube of given outer diameter: spare = lumen less what they need; negative does not fit."""

    lumen_mm: float
    needed_mm: float
    spare_mm: float
    fits: Flags
    centers_mm: np.ndarray


def fit_in_tube(
    *, tube_mm: float, wall_mm: float, diameters_mm: np.ndarray, clearance_mm: float, at_wall: Flags, thorough: bool
) -> TubeFit:
    """Whether parts fit a given tube: what its walls leave against the smallest lumen that holds them.

    In a wider lumen than needed the parts keep their places, those at the wall move out to it (which
    only widens the gaps). Raises OutOfRange for walls that leave no lumen, and for a part that
    could not enter the lumen even alone.

    >>> fit = fit_in_tube(tube_mm=6.0, wall_mm=0.5, diameters_mm=[2.2, 1.3], clearance_mm=0.05,
    ...                   at_wall=[False, False], thorough=False)
    >>> round(fit.needed_mm, 3), round(fit.spare_mm, 3), bool(fit.fits)
    (3.65, 1.35, True)
    """
    lumen = available_lumen_mm(tube_mm=tube_mm, wall_mm=wall_mm)
    parts, walled = np.asarray(diameters_mm, float), np.asarray(at_wall, bool)
    room = lumen - 2 * clearance_mm
    require("diameters_mm", parts, f"at most {room:.4g} mm to enter this tube", parts <= room * (1 + 1e-9))
    found = smallest_lumen(diameters_mm=parts, clearance_mm=clearance_mm, thorough=thorough, at_wall=walled)
    spare = lumen - found.lumen_mm
    away = np.hypot(found.centers_mm[:, 0], found.centers_mm[:, 1])
    moved = walled & (spare > 0) & (away > 0)
    out = np.where(moved, 1 + max(spare, 0.0) / 2 / np.where(moved, away, 1.0), 1.0)
    return TubeFit(lumen, found.lumen_mm, spare, np.bool_(spare >= -1e-9 * lumen), found.centers_mm * out[:, None])
