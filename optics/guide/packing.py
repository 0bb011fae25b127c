"""How many fibers fit: lattices in discs and rings, best known packings of few, and the area laws.

The centers of fibers of diameter d lie in the opening eroded by d/2. A hexagonal lattice laid on
it at random holds, on average, (eroded area) / (sqrt(3)/2 d^2) of them, and a whole count that
varies with the offset is somewhere at least its mean: the best offset never falls below the law.
"""

import numpy as np

from optics.guide.lattice_count import best_annulus_count, best_disc_count
from optics.spec import not_negative, positive, require
from optics.tables import table
from optics.units import Numbers

TESTED = {"fibers_across": (1.0, 400.0)}  # bundle over fiber diameter: counts compared with brute force

_ROUND = 1e-9  # relative slack for fibers that just touch: a bundle of 3 d holds 7, not 6


def hexagonal_packing_fraction() -> float:
    """Area share of touching equal discs on an endless hexagonal lattice: pi / (2 sqrt 3).

    References: closed_form (Lagrange 1773; densest of all by Thue and Fejes Toth).

    >>> round(hexagonal_packing_fraction(), 4)
    0.9069
    """
    return float(np.pi / (2 * np.sqrt(3)))


def square_packing_fraction() -> float:
    """Area share of touching equal discs on an endless square lattice: pi / 4.

    References: closed_form.

    >>> round(square_packing_fraction(), 4)
    0.7854
    """
    return float(np.pi / 4)


def core_share(*, core_um: Numbers, fiber_um: Numbers) -> Numbers:
    """Core area over fiber area, (core / fiber)^2: a factor apart from the packing fraction.

    Raises OutOfRange when a diameter is not above 0 or the core exceeds the fiber.
    References: closed_form.

    >>> round(core_share(core_um=27.0, fiber_um=30.0), 6)
    0.81
    """
    positive(core_um=core_um, fiber_um=fiber_um)
    require("core_um", core_um, "at most the fiber's diameter", np.asarray(core_um) <= fiber_um)
    return (core_um / fiber_um) ** 2


def disc_packing_fraction(*, bundle_mm: Numbers, fiber_mm: Numbers) -> Numbers:
    """Fiber area over bundle area by the area law: 0.9069 (1 - d/D)^2, 0 where no fiber fits.

    The law of mean counts: a lattice at its best offset reaches it or more.
    References: closed_form.

    >>> round(float(disc_packing_fraction(bundle_mm=2.0, fiber_mm=0.03)), 3)
    0.88
    """
    positive(bundle_mm=bundle_mm, fiber_mm=fiber_mm)
    return hexagonal_packing_fraction() * np.maximum(1 - np.asarray(fiber_mm) / bundle_mm, 0.0) ** 2


def annulus_packing_fraction(*, inner_mm: Numbers, outer_mm: Numbers, fiber_mm: Numbers) -> Numbers:
    """Fiber area over ring area by the area law: 0.9069 (1 - d/gap), gap = (outer - inner)/2.

    Exact for the mean count of a lattice, since the eroded ring keeps its mean diameter.
    Parameters are diameters. Raises OutOfRange unless inner < outer. References: closed_form.

    >>> round(float(annulus_packing_fraction(inner_mm=2.0, outer_mm=3.0, fiber_mm=0.05)), 4)
    0.8162
    """
    _ring(inner_mm, outer_mm, fiber_mm)
    gap_mm = (np.asarray(outer_mm) - inner_mm) / 2
    return hexagonal_packing_fraction() * np.maximum(1 - fiber_mm / gap_mm, 0.0)


def fiber_count_law(*, centers_mm2: Numbers, fiber_mm: Numbers) -> np.ndarray:
    """Whole fibers on a lattice in any opening, from the area open to their centers.

    N = ceil(A_c / (sqrt(3)/2 d^2)): the best offset holds at least the mean, and a whole number.
    The area must have been eroded by half a fiber already (`body.fill.free_area_mm2`).
    Arrays broadcast; for an open area of 0 the count is 0. References: closed_form.

    >>> int(fiber_count_law(centers_mm2=np.pi / 4 * 1.97**2, fiber_mm=0.03))
    3911
    """
    not_negative(centers_mm2=centers_mm2)
    positive(fiber_mm=fiber_mm)
    mean = np.asarray(centers_mm2, float) / (np.sqrt(3) / 2 * np.asarray(fiber_mm, float) ** 2)
    return np.ceil(mean * (1 - _ROUND))


def circle_ratio(*, count: Numbers) -> Numbers:
    """Enclosing over enclosed radius R/r of the best known packing of 1 to 61 equal circles in a circle.

    Proved best for 1-14 and 19, best known otherwise. For more, count by `disc_count`.
    Raises OutOfRange unless count is whole and from 1 to 61.
    References: graham_1998 (table; proofs by others, 19 by Fodor 1999), lubachevsky_1997 (7, 19, 37, 61).

    >>> circle_ratio(count=7)
    3.0
    >>> round(circle_ratio(count=19), 5)
    4.8637
    """
    whole = np.asarray(count, float)
    ratios = table("circle_ratios")["ratio"]
    known = (whole == np.rint(whole)) & (whole >= 1) & (whole <= ratios.size)
    require("count", count, f"a whole number from 1 to {ratios.size}", known)
    found = ratios[np.rint(whole).astype(int) - 1]
    return found if np.ndim(count) else float(found)


def hexagonal_count(*, ring_count: Numbers) -> Numbers:
    """Circles in a hexagonal arrangement of so many rings around one: 1 + 3 k (k + 1).

    >>> [hexagonal_count(ring_count=k) for k in (1, 2, 3, 4, 5)]
    [7, 19, 37, 61, 91]
    """
    not_negative(ring_count=ring_count)
    return 1 + 3 * ring_count * (ring_count + 1)


def curved_hexagonal_ratio(*, ring_count: Numbers) -> Numbers:
    """R/r of the curved hexagonal packing of 1 + 3 k (k + 1) circles: 1 + 1/sin(pi / 6k).

    Its outermost ring is a regular polygon of 6 k touching circles. Best known up to k = 5;
    from k = 6 on other packings are denser. References: lubachevsky_1997.

    >>> [round(float(curved_hexagonal_ratio(ring_count=k)), 4) for k in (1, 2, 3, 4, 5)]
    [3.0, 4.8637, 6.7588, 8.6613, 10.5668]
    """
    require("ring_count", ring_count, "1 or more", np.asarray(ring_count) >= 1)
    return 1 + 1 / np.sin(np.pi / (6 * np.asarray(ring_count, float)))


def curved_hexagonal_fraction(*, ring_count: Numbers) -> Numbers:
    """Area share of the curved hexagonal packing in its circle: (1 + 3 k (k + 1)) / ratio^2, pi^2/12 in the limit.

    References: lubachevsky_1997.

    >>> round(float(curved_hexagonal_fraction(ring_count=1)), 4)
    0.7778
    """
    return hexagonal_count(ring_count=ring_count) / curved_hexagonal_ratio(ring_count=ring_count) ** 2


def ferrule_count(*, bundle_mm: float, fiber_mm: float) -> int:
    """Whole fibers of a few in a round ferrule, by the best known packings (61 at most are told apart).

    The largest N up to 61 whose R/r does not exceed bundle/fiber; 0 when not one fits.
    References: graham_1998.

    >>> ferrule_count(bundle_mm=1.0, fiber_mm=0.205)
    19
    """
    positive(bundle_mm=bundle_mm, fiber_mm=fiber_mm)
    ratios = table("circle_ratios")["ratio"]
    return int(np.searchsorted(ratios - 5e-6, bundle_mm / fiber_mm, side="right"))


def disc_count(*, bundle_mm: float, fiber_mm: float) -> int:
    """Whole fibers on a hexagonal lattice in a round bundle, at the best offset.

    Up to 45 fibers of radius the best offset is exact: the count changes where a
    lattice point crosses the rim, so the best offset can be moved until two lie on it, and by
    symmetry within one twelfth of the cell. Beyond, the best of many offsets, and never below
    the area law 0.9069 (D - d)^2/d^2, which the best offset cannot fall below.
    Returns 0 when not one fits. Few fibers pack better off the lattice: `ferrule_count`.
    References: closed_form.

    >>> disc_count(bundle_mm=3.0, fiber_mm=1.0), disc_count(bundle_mm=0.9, fiber_mm=1.0)
    (7, 0)
    >>> 3911 <= disc_count(bundle_mm=2.0, fiber_mm=0.03) <= 3930
    True
    """
    positive(bundle_mm=bundle_mm, fiber_mm=fiber_mm)
    return best_disc_count(round((bundle_mm / fiber_mm - 1) / 2, 12))


def annulus_count(*, inner_mm: float, outer_mm: float, fiber_mm: float) -> int:
    """Whole fibers in a ring between two diameters: on a lattice or in concentric rings, the better.

    Rings: the outermost against the outer wall, either each as full as it goes at a spacing of one
    fiber, or all with the same number and nested in the gaps of their neighbors. In gaps under
    about seven fibers these beat the lattice. Never below the area law; 0 when not one fits.
    Parameters are diameters. Raises OutOfRange unless 0 <= inner < outer. References: closed_form.

    >>> annulus_count(inner_mm=1.0, outer_mm=3.0, fiber_mm=1.0), annulus_count(inner_mm=2.0, outer_mm=3.0, fiber_mm=0.6)
    (6, 0)
    """
    _ring(inner_mm, outer_mm, fiber_mm)
    if inner_mm == 0:
        return disc_count(bundle_mm=outer_mm, fiber_mm=fiber_mm)
    return best_annulus_count(round((inner_mm / fiber_mm + 1) / 2, 12), round((outer_mm / fiber_mm - 1) / 2, 12))


def _ring(inner_mm: Numbers, outer_mm: Numbers, fiber_mm: Numbers) -> None:
    not_negative(inner_mm=inner_mm)
    positive(outer_mm=outer_mm, fiber_mm=fiber_mm)
    require("inner_mm", inner_mm, "below the outer diameter", np.asarray(inner_mm) < outer_mm)
