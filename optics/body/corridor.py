"""A rigid tip through two bends in a row: no closed form, so poses are searched.

The bends lie in one plane, a straight piece between them; a positive angle turns left, a negative
one right. A tip passes if from one cross-section of the bore to the next its middle finds a place
and a slant at which it fits. The longest that does is the least, over the cross-sections, of the
longest that fits there: with one bend this is the closed form of `passage`.
"""

from dataclasses import dataclass

import numpy as np

from optics.spec import not_negative, positive, require
from optics.units import rad_from_deg

TESTED = {"bend_deg": (10.0, 180.0), "tip_over_bore": (0.2, 0.95), "centerline_over_bore": (0.5, 5.0)}

_STEPS, _HALVINGS = 40, 16  # along a tip's edge to the wall, then toward the crossing
_GRID, _ZOOMS, _NARROWER = 11, 6, 2.5  # places and slants tried, and how they close in


@dataclass(frozen=True, slots=True)
class Bend:
    """One bend of a bore's center line: radius, and angle (positive to the left)."""

    radius_mm: float
    bend_deg: float


def longest_through_two_bends_mm(
    *, bore_mm: float, tip_mm: float, first: Bend, second: Bend, straight_mm: float
) -> float:
    """Longest rigid tip that passes two bends in one plane with a straight piece between; about a second.

    To about 0.1 %. Never more than either bend alone lets through. Raises OutOfRange for a tip
    wider than the bore, and a center-line radius below half the bore.
    References: closed_form (one bend; two like ones in a row are one), independent search otherwise.
    """
    positive(bore_mm=bore_mm, tip_mm=tip_mm)
    not_negative(straight_mm=straight_mm)
    require("tip_mm", tip_mm, "below the bore's diameter", tip_mm < bore_mm)
    for bend in (first, second):
        require("radius_mm", bend.radius_mm, "at least half the bore's diameter", bend.radius_mm >= bore_mm / 2)
        require("bend_deg", abs(bend.bend_deg), "from above 0 to 180", 0 < abs(bend.bend_deg) <= 180)
    pieces = _pieces(first, second, straight_mm)
    start, end = pieces[1].at, pieces[-1].at
    reach = 4 * (first.radius_mm + second.radius_mm + bore_mm + straight_mm)

    def lengths(stations, zooms):
        return np.array([2 * _longest_at(pieces, s, bore_mm, tip_mm, reach, zooms) for s in stations])

    stations = np.linspace(start, end, 33)
    longest = lengths(stations, 4)
    for _ in range(3):  # close in on the narrowest cross-section
        k = int(np.argmin(longest))
        stations = np.linspace(stations[max(k - 1, 0)], stations[min(k + 1, len(stations) - 1)], 7)
        longest = lengths(stations, _ZOOMS)
    return float(longest.min())


@dataclass(frozen=True, slots=True)
class _Piece:
    """A straight (turn 0) or an arc of the center line: where it starts, its heading, length and curvature."""

    at: float
    x: float
    y: float
    heading: float
    length: float
    curvature: float

    def point(self, along):
        """Place and heading after so much of the piece."""
        turn = self.curvature * along
        if self.curvature == 0:
            return self.x + along * np.cos(self.heading), self.y + along * np.sin(self.heading), self.heading
        r = 1 / self.curvature
        x = self.x + r * (np.sin(self.heading + turn) - np.sin(self.heading))
        return x, self.y - r * (np.cos(self.heading + turn) - np.cos(self.heading)), self.heading + turn

    def distance(self, x, y):
        """Distance of points from the piece, infinite where they lie beyond its ends."""
        dx, dy = x - self.x, y - self.y
        ahead = dx * np.cos(self.heading) + dy * np.sin(self.heading)
        left = dy * np.cos(self.heading) - dx * np.sin(self.heading)
        if self.curvature == 0:
            return np.where((ahead >= -1e-9) & (ahead <= self.length + 1e-9), np.abs(left), np.inf)
        r = 1 / abs(self.curvature)
        left = left * np.sign(self.curvature)
        turn = np.arctan2(ahead, r - left)
        inside = (turn >= -1e-9) & (turn <= self.length / r + 1e-9)
        return np.where(inside, np.abs(np.hypot(ahead, r - left) - r), np.inf)


def _pieces(first: Bend, second: Bend, straight_mm: float) -> list[_Piece]:
    """The center line: a long leg, the first bend, the straight, the second bend, a long leg."""
    leg = 1e3 * (first.radius_mm + second.radius_mm + straight_mm)
    shapes = [(leg, 0.0)]
    for bend, after in ((first, straight_mm), (second, leg)):
        turn = rad_from_deg(bend.bend_deg)
        shapes += [(bend.radius_mm * abs(turn), np.sign(turn) / bend.radius_mm), (after, 0.0)]
    pieces, at, x, y, heading = [], -leg, -leg, 0.0, 0.0
    for length, curvature in shapes:
        pieces.append(_Piece(at, x, y, heading, length, curvature))
        x, y, heading = pieces[-1].point(length)
        at += length
    return pieces


def _longest_at(pieces, station, bore, tip, reach, zooms) -> float:
    """Half the longest tip whose middle lies on one cross-section, over its places and slants."""
    piece = next(p for p in reversed(pieces) if station >= p.at - 1e-12)
    x, y, heading = piece.point(station - piece.at)
    place, slant, wide, steep, best = 0.0, 0.0, (bore - tip) / 2, 0.7, 0.0
    spread = np.linspace(-1, 1, _GRID)
    for _ in range(zooms):
        places, slants = (a.ravel() for a in np.meshgrid(place + wide * spread, slant + steep * spread))
        px, py = x - places * np.sin(heading), y + places * np.cos(heading)
        ahead, behind = (_room(pieces, px, py, heading + slants, way, bore, tip, reach) for way in (1, -1))
        room = np.minimum(ahead, behind)
        k = int(np.argmax(room))
        place, slant, best = places[k], slants[k], max(best, float(room[k]))
        wide, steep = wide / _NARROWER, steep / _NARROWER
    return best


def _room(pieces, x, y, heading, way, bore, tip, reach):
    """How far both edges of a tip run inside the bore, forward (way 1) or backward (-1) from its middle."""
    c, s = np.cos(heading), np.sin(heading)

    def inside(far):
        good = True
        for side in (-tip / 2, tip / 2):
            ex, ey = x + way * far * c - side * s, y + way * far * s + side * c
            nearest = np.minimum.reduce([piece.distance(ex, ey) for piece in pieces if piece.length > 0])
            good = good & (nearest <= bore / 2 * (1 + 1e-12))
        return good

    low, high, going = np.zeros_like(x), np.full_like(x, reach), np.ones(x.shape, bool)
    for far in reach * (np.arange(_STEPS) / (_STEPS - 1)) ** 2:
        good = inside(np.full_like(x, far))
        high = np.where(going & ~good, far, high)
        low, going = np.where(going & good, far, low), going & good
    for _ in range(_HALVINGS):
        middle = (low + high) / 2
        good = inside(middle)
        low, high = np.where(good, middle, low), np.where(good, high, middle)
    return low
