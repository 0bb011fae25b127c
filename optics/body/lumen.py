"""The smallest lumen that holds given circles, for many sections at once.

With a clearance c between parts and to the wall the problem is that of circles of radius
r + c/2 in one of radius R, the lumen's being R + c/2. One circle: R = r. Two: R = r1 + r2, and
often the rest comes free beside them. Three that do not: the circle that encloses three touching
ones (Soddy). More: `placing` builds layouts in a few orders while the lumen closes in.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from optics.body.orders import orders
from optics.body.placing import placed
from optics.body.search import searched_layout
from optics.spec import not_negative, require
from optics.units import Flags, Numbers

_COARSE, _FINE = 6, 9  # halvings of the bracket while orders compete, then with the best one
_LONG_LIST = 8  # parts from which the quick mode of one section tries more orders
_BLOCK = 256  # sections worked on together, for the sake of memory
_FIRST = 1.25  # of the lower bound: most lumens lie below
_PLAIN = 0.004  # gain for which another order is taken up
_FREE = 1e-9  # slack within which a lumen counts as that of the two largest parts


@dataclass(frozen=True, slots=True)
class Layout:
    """Parts in the smallest lumen found: centers [..., part, 2] in the order given, first part upward.

    `comes_free`: the two widest parts alone need this lumen, the others find room beside them.
    """

    lumen_mm: Numbers
    centers_mm: np.ndarray
    comes_free: Flags


def smallest_lumens(*, diameters_mm: np.ndarray, clearance_mm: Numbers, at_wall: Flags | None = None) -> Layout:
    """Smallest lumens for lists of round parts [section, part]; a diameter of 0 stands for no part.

    Closed forms up to three parts. From four on the lumen is the least in which one of a few orders
    of placing succeeds: within about 0.4 % of the best known up to 7 parts, a percent or two beyond.
    `at_wall` marks parts that sit on the wall (pull wires). The same section gives the same layout,
    alone or among others. Raises OutOfRange for a negative diameter or clearance, or no part at all.
    References: closed_form (Descartes and Soddy for three), unequal_circles_2013 (compared).

    >>> parts = np.array([[3.0, 2.0, 0.0], [2.0, 2.0, 2.0]])
    >>> smallest_lumens(diameters_mm=parts, clearance_mm=0.0).lumen_mm.round(5).tolist()
    [5.0, 4.3094]
    """
    diameters = np.atleast_2d(np.asarray(diameters_mm, float))
    not_negative(diameters_mm=diameters, clearance_mm=clearance_mm)
    require("diameters_mm", diameters.max(axis=-1), "above 0 for at least one part", diameters.max(axis=-1) > 0)
    clearance = np.broadcast_to(np.asarray(clearance_mm, float), diameters.shape[:1])
    wall = np.zeros(diameters.shape, bool) if at_wall is None else np.broadcast_to(at_wall, diameters.shape)
    radii = np.where(diameters > 0, (diameters + clearance[:, None]) / 2, 0.0)
    counts = (radii > 0).sum(axis=1)
    radius, centers = np.zeros(len(radii)), np.zeros((*radii.shape, 2))
    for count, rows in _blocks(counts):
        order = np.argsort(-radii[rows], axis=1, kind="stable")[:, :count]
        sizes = np.take_along_axis(radii[rows], order, axis=1)
        found, x, y = _tightest(sizes, np.take_along_axis(wall[rows], order, axis=1))
        radius[rows] = found
        centers[rows[:, None], order, 0], centers[rows[:, None], order, 1] = x.T, y.T
    widest = np.sort(radii, axis=1)[:, -2:].sum(axis=1)
    free = (counts > 2) & (radius <= widest * (1 + _FREE))
    return Layout(2 * radius + clearance, upright(centers, radii), free)


def smallest_lumen(
    *,
    diameters_mm: np.ndarray,
    clearance_mm: float,
    thorough: bool,
    at_wall: Flags | None = None,
    progress: Callable[[float], None] | None = None,
) -> Layout:
    """Smallest lumen for one list of round parts, centers in the order given.

    Quick: `smallest_lumens`, and from 8 parts on some more orders of placing: milliseconds.
    Thorough: a search over the orders and a polish of the positions, up to a few seconds;
    `progress` is called with the share done.
    Both give the same layout every time. Raises OutOfRange as `smallest_lumens` does.
    References: unequal_circles_2013 (radii 1 to N).

    >>> found = smallest_lumen(diameters_mm=[2.0, 4.0, 6.0, 8.0, 10.0], clearance_mm=0.0, thorough=True)
    >>> round(float(found.lumen_mm) / 2, 6)
    9.001398
    """
    parts = np.asarray(diameters_mm, float)
    require("diameters_mm", parts.ndim, "one list of parts", parts.ndim == 1)
    wall = np.zeros(parts.shape, bool) if at_wall is None else np.asarray(at_wall, bool)
    quick = smallest_lumens(diameters_mm=parts[None], clearance_mm=clearance_mm, at_wall=wall[None])
    one = Layout(float(quick.lumen_mm[0]), quick.centers_mm[0], quick.comes_free[0])
    radii = np.where(parts > 0, (parts + clearance_mm) / 2, 0.0)
    count = (parts > 0).sum()
    if count < (4 if thorough else _LONG_LIST) or one.comes_free:
        return one
    order = np.argsort(-radii, kind="stable")[:count]
    x, y = one.centers_mm[order].T
    known = ((one.lumen_mm - clearance_mm) / 2, x, y)
    least = float(_beside_two(radii[order][None], wall[order][None])[0][0])
    lumen, x, y = searched_layout(radii[order], wall[order], least, known, thorough, progress)
    centers = np.zeros((len(parts), 2))
    centers[order, 0], centers[order, 1] = x, y
    free = lumen <= radii[order][:2].sum() * (1 + _FREE)
    return Layout(float(2 * lumen + clearance_mm), upright(centers[None], radii[None])[0], np.bool_(free))


def upright(centers: np.ndarray, radii: np.ndarray) -> np.ndarray:
    """Layouts turned and mirrored to one standing: the first part off the center upward, the next one right."""
    distance = np.sqrt((centers**2).sum(axis=-1))
    size = (distance + radii).max(axis=-1, keepdims=True)
    off = (distance > 1e-6 * size) & (radii > 0)
    rows, first = np.arange(len(centers)), off.argmax(axis=1)
    turned = off.any(axis=1)
    long = np.where(turned, distance[rows, first], 1.0)
    ux = np.where(turned, centers[rows, first, 0] / long, 0.0)[:, None]
    uy = np.where(turned, centers[rows, first, 1] / long, 1.0)[:, None]
    x = centers[..., 0] * uy - centers[..., 1] * ux
    y = centers[..., 0] * ux + centers[..., 1] * uy
    aside = (np.abs(x) > 1e-6 * size) & (radii > 0)
    side = np.where(np.take_along_axis(x, aside.argmax(axis=1)[:, None], axis=1) < 0, -1.0, 1.0)
    x[rows, first] = 0.0
    x = x * side
    return np.where((radii > 0)[..., None], np.stack([x, y], axis=-1), 0.0)


def _blocks(counts: np.ndarray):
    """Sections with the same number of parts, a few hundred at a time."""
    for count in np.unique(counts):
        rows = np.flatnonzero(counts == count)
        for start in range(0, len(rows), _BLOCK):
            yield count, rows[start : start + _BLOCK]


def _tightest(radii: np.ndarray, at_wall: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Lumen radius [section] and centers x, y [part, section] of parts sorted from the largest down."""
    count = radii.shape[1]
    if count == 1:
        return radii[:, 0], np.zeros((1, len(radii))), np.zeros((1, len(radii)))
    least, x, y, done = _beside_two(radii, at_wall)
    if count > 3 and not done.all():
        rest = ~done
        least[rest], x[:, rest], y[:, rest] = _closed_in(radii[rest], at_wall[rest], least[rest])
    return least, x, y


def _beside_two(radii: np.ndarray, at_wall: np.ndarray):
    """Lower bound from the three widest parts, and the layouts of all sections where it is reached plainly.

    The two widest lie across the lumen; a third, and a fourth on the other side, fit in the gap
    beside them up to the radius r1 r2 (r1 + r2)/(r1^2 + r1 r2 + r2^2), in its middle or at its wall.
    """
    count, r1, r2 = radii.shape[1], radii[:, 0], radii[:, 1]
    lumen = r1 + r2
    x, y = np.zeros((count, len(radii))), np.zeros((count, len(radii)))
    y[0], y[1] = r2, -r1
    gap = r1 * r2 * lumen / (r1 * r1 + r1 * r2 + r2 * r2)
    if count == 2:
        return lumen, x, y, np.ones(len(radii), bool)
    third = radii[:, 2]
    fits = third <= gap * (1 + 1e-12)
    middle_y = (r2 - r1) * (lumen + gap) / lumen
    middle_x = np.sqrt(np.maximum((lumen - gap) ** 2 - middle_y**2, 0.0))
    for i in range(2, min(count, 4)):
        out = np.where(at_wall[:, i], (lumen - radii[:, i]) / (lumen - gap), 1.0) * (1.0 if i == 2 else -1.0)
        x[i], y[i] = middle_x * out, middle_y * np.abs(out)
    around = _enclosing_three(r1, r2, third)
    least = np.where(fits, lumen, around)
    if count == 3:
        first, second = _touching_two(around, r1, r2), _touching_two(around, r1, third)
        x[0], y[0] = np.where(fits, x[0], 0.0), np.where(fits, y[0], around - r1)
        x[1], y[1] = np.where(fits, x[1], first[0]), np.where(fits, y[1], first[1])
        x[2], y[2] = np.where(fits, x[2], -second[0]), np.where(fits, y[2], second[1])
    return least, x, y, fits if count == 4 else np.full(len(radii), count == 3)


def _enclosing_three(r1, r2, r3):
    """Radius of the circle around three touching ones: Descartes' theorem with the negative curvature."""
    product, pairs = r1 * r2 * r3, r1 * r2 + r2 * r3 + r3 * r1
    below = 2 * np.sqrt(product * (r1 + r2 + r3)) - pairs
    return np.where(below > 0, product / np.where(below > 0, below, 1.0), r1 + r2)


def _touching_two(lumen, top, other):
    """x > 0 and y of a part on the wall that touches the part at the top of the wall."""
    far, near = lumen - other, lumen - top
    y = (far * far + near * near - (top + other) ** 2) / (2 * np.where(near > 0, near, 1.0))
    return np.sqrt(np.maximum(far * far - y * y, 0.0)), y


def _closed_in(radii: np.ndarray, at_wall: np.ndarray, least: np.ndarray):
    """The lumen closed in on by halving: with one order, then with all others that do plainly better.

    Radii [section, circle]. A lane is one order tried for one section; sections that reach the
    lower bound leave.
    """
    sections, count = radii.shape
    order, tie = orders(count)

    def fits(rows, number, lumen):
        pick = (rows, order[number].T)
        return placed(radii[pick], at_wall[pick], lumen, tie[number])

    def halved(rows, number, low, high, times):
        for _ in range(times):
            middle = (low + high) / 2
            good = fits(rows, number, middle)[2]
            low, high = np.where(good, low, middle), np.where(good, middle, high)
        return high

    everyone, high = np.arange(sections), radii.sum(axis=1)
    which, best = np.zeros(sections, int), high.copy()
    for plain in (0, 1):  # by descending size: does the rest come free?
        rows = np.flatnonzero(best > least)
        rows = rows[fits(rows, np.full(len(rows), plain), least[rows])[2]]
        which[rows], best[rows] = plain, least[rows]
    rows = np.flatnonzero(best > least)
    which[rows] = 2
    below = fits(rows, which[rows], least[rows] * _FIRST)[2]
    low, high = np.where(below, 1.0, _FIRST) * least[rows], np.where(below, _FIRST * least[rows], high[rows])
    best[rows] = halved(rows, which[rows], low, high, _COARSE)

    rows, number = (a.ravel() for a in np.meshgrid(rows, np.delete(np.arange(len(order)), 2), indexing="ij"))
    target = np.maximum(least, best * (1 - _PLAIN))
    good = fits(rows, number, target[rows])[2]
    rows, number = rows[good], number[good]
    lumen = halved(rows, number, least[rows], target[rows], _COARSE)
    for lane in np.lexsort((-number, -lumen)):  # the best last; of equal ones the earlier order
        which[rows[lane]], best[rows[lane]] = number[lane], lumen[lane]

    rows = np.flatnonzero((best > least) & (best < least * (1 + 2 * _PLAIN)))
    best[rows] = np.where(fits(rows, which[rows], least[rows])[2], least[rows], best[rows])
    rows = np.flatnonzero(best > least)
    best[rows] = halved(rows, which[rows], np.maximum(least, best * (1 - 2 * _PLAIN))[rows], best[rows], _FINE)
    x, y, good = fits(everyone, which, best)
    require("diameters_mm", 2 * radii[:, 0], "in a part list that the placing rules can lay out", good)
    back = np.argsort(order[which].T, axis=0)
    return best, np.take_along_axis(x, back, axis=0), np.take_along_axis(y, back, axis=0)
