"""A rigid tip through two bends in a row: no closed form, so poses are searched.

The bends lie in one plane, a straight piece between them; a positive angle turns left, a negative
one right. A tip passes if from one cross-section of the bore to the next its middle finds a place
and a slant at which it fits. The longest that does is the least, over the cross-sections, of the
longest that fits there: with one bend this is the closed form of `passage`.
"""

from dataclasses import dataclass

import numpy as np

from optics.body.passage import longest_rigid_tip_mm
from optics.spec import not_negative, positive, require
from optics.units import rad_from_deg

TESTED = {"bend_deg": (10.0, 180.0), "tip_over_bore": (0.2, 0.95), "centerline_over_bore": (0.5, 5.0)}

_ENDS = 1e-9  # mm by which pieces overlap at their joints
_STEPS, _HALVINGS = 160, 10  # along a tip's edge to the wall, then toward the crossing
_GRID, _ZOOMS, _NARROWER = 11, 6, 2.5  # places and slants tried, and how they close in


@dataclass(frozen=True, slots=True)
class Bend:
    """One bend of a bore's center line: radius, and angle (positive to the left)."""

    radius_mm: float
    bend_deg: float


def longest_through_two_bends_mm(
    *, bore_mm: float, tip_mm: float, first: Bend, second: Bend, straight_mm: float
) -> float:
    """Longest rigid tip that passes two bends in one plane with a straight piece between; half a second.

    To about 0.1 %. Raises OutOfRange for a tip as wide as the bore, and a center-line radius below
    half the bore. Infinite where a tip of four times what one bend allows still passes (two slight
    bends that undo each other leave a straight way).
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
    alone = max(
        float(
            longest_rigid_tip_mm(
                bore_mm=bore_mm,
                centerline_radius_mm=bend.radius_mm,
                tip_mm=tip_mm,
                bend_deg=abs(bend.bend_deg),
                edge_radius_mm=0.0,
            )
        )
        for bend in (first, second)
    )
    reach = 2 * alone + straight_mm

    stations = np.linspace(start, end, 41)
    longest = _longest_at(pieces, stations, bore_mm, tip_mm, reach, 4)
    for _ in range(2):  # close in on the narrowest cross-section
        k = int(np.argmin(longest))
        stations = np.linspace(stations[max(k - 1, 0)], stations[min(k + 1, len(stations) - 1)], 9)
        longest = _longest_at(pieces, stations, bore_mm, tip_mm, reach, _ZOOMS)
    found = float(longest.min())
    return found if found < 1.99 * reach else np.inf


@dataclass(frozen=True, slots=True)
class _Piece:
    """A straight (turn 0) or an arc of the center line: where it starts, its heading, length and curvature."""

    at: float
    x: float
    y: float
    heading: float
    length: float
    curvature: float

    def point_at(self, station):
        """The same, after so much of the whole center line."""
        return self.point(station - self.at)

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
        c, s = np.cos(self.heading), np.sin(self.heading)
        dx, dy = x - self.x, y - self.y
        ahead, left = dx * c + dy * s, dy * c - dx * s
        if self.curvature == 0:
            return np.where((ahead >= -_ENDS) & (ahead <= self.length + _ENDS), np.abs(left), np.inf)
        r, turn = 1 / abs(self.curvature), self.length * abs(self.curvature)
        out = r - left if self.curvature > 0 else r + left  # from the arc's center, along its first radius
        inside = (ahead >= -_ENDS) & (ahead * np.cos(turn) - out * np.sin(turn) <= _ENDS)
        return np.where(inside, np.abs(np.sqrt(ahead * ahead + out * out) - r), np.inf)


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


def _longest_at(pieces, stations, bore, tip, reach, zooms) -> np.ndarray:
    """The longest tip whose middle lies on each cross-section, over its places and slants."""
    at = [next(p for p in reversed(pieces) if station >= p.at - _ENDS).point_at(station) for station in stations]
    x, y, heading = (column[:, None] for column in np.array(at).T)
    place, slant, best = np.zeros_like(x), np.zeros_like(x), np.zeros(len(stations))
    wide, steep = (bore - tip) / 2, 0.7
    spread, rows = np.linspace(-1, 1, _GRID), np.arange(len(stations))
    across, turned = (a.ravel() for a in np.meshgrid(spread, spread))
    for _ in range(zooms):
        places, slants = place + wide * across, slant + steep * turned
        px, py = x - places * np.sin(heading), y + places * np.cos(heading)
        ahead, behind = (_room(pieces, px, py, heading + slants, way, bore, tip, reach) for way in (1, -1))
        room = np.minimum(ahead, behind)
        k = room.argmax(axis=1)
        place, slant, best = places[rows, k, None], slants[rows, k, None], np.maximum(best, room[rows, k])
        wide, steep = wide / _NARROWER, steep / _NARROWER
    return 2 * best


def _room(pieces, x, y, heading, way, bore, tip, reach):
    """How far both edges of a tip run inside the bore, forward (way 1) or backward (-1) from its middle."""
    c, s = np.cos(heading), np.sin(heading)

    def inside(far, c, s, x, y):
        good = True
        for side in (-tip / 2, tip / 2):
            ex, ey = x + way * far * c - side * s, y + way * far * s + side * c
            nearest = np.minimum.reduce([piece.distance(ex, ey) for piece in pieces if piece.length > 0])
            good = good & (nearest <= bore / 2 * (1 + 1e-12))
        return good

    low, high = np.zeros(x.shape), np.full(x.shape, float(reach))
    going = np.arange(x.size)
    for far in reach * np.linspace(0, 1, _STEPS):
        if going.size == 0:
            break
        good = inside(far, *(a.ravel()[going] for a in (c, s, x, y)))
        high.ravel()[going[~good]] = far
        going = going[good]
        low.ravel()[going] = far
    for _ in range(_HALVINGS):
        middle = (low + high) / 2
        good = inside(middle, c, s, x, y)
        low, high = np.where(good, middle, low), np.where(good, high, middle)
    return low
