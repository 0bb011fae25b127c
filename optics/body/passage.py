"""Passage through a bore with an elbow: the longest rigid tip, and the bend the flexible part must take.

A rigid tip is a cylinder, the bore a round pipe whose center line runs straight, along an arc of
radius Rc through the angle theta, and straight again. The plane of the bend decides: out of it the
gap between tip and bore only grows. With Ri = Rc - B/2 and Ro = Rc + B/2 the tip's side touches the
inner wall in the middle of the bend while the corners of its ends touch the outer wall.
"""

import numpy as np
from pydantic import Field

from optics.spec import Spec, not_negative, positive, quantity, require, within
from optics.units import Numbers, rad_from_deg

# Ranges in which sampled poses of a solid agree with the closed forms
TESTED = {"bend_deg": (10.0, 180.0), "tip_over_bore": (0.2, 0.97), "centerline_over_bore": (0.5, 10.0)}


class Bending(Spec):
    """The part behind the rigid tip that wires steer."""

    radius_mm: float = quantity("least bend radius of the steered part, on its axis", usual=(5, 50), gt=0, le=1000)
    angle_deg: float = quantity("largest steering angle", usual=(60, 210), gt=0, le=360)
    length_mm: float = quantity("length of the steered part along its axis", usual=(10, 80), gt=0, le=1000)


class Passage(Spec):
    """The way in: a bore and its elbow, and the rigid tip that must pass. All keys are optional."""

    bore_mm: float | None = quantity(
        "inner diameter of the narrowest bore; absent: no bore to pass", default=None, usual=(2, 30), gt=0, le=1000
    )
    centerline_radius_mm: float | None = quantity(
        "bend radius of the bore's center line, at least half the bore (a mitred elbow); absent: straight",
        default=None,
        usual=(3, 100),
        gt=0,
        le=10000,
    )
    bend_deg: float | None = quantity(
        "angle of the bore's bend; absent: straight", default=None, usual=(15, 180), gt=0, le=360
    )
    rigid_tip_mm: float | None = quantity(
        "length of the rigid tip; absent: not given", default=None, usual=(3, 25), gt=0, le=500, common=True
    )
    edge_radius_mm: float = quantity(
        "rounding of the tip's end edges; 0 is sharp", default=0.0, usual=(0, 1), source="assumed", ge=0, le=50
    )
    bending: Bending | None = Field(default=None, description="the part steered by wires; absent: none")


def longest_rigid_tip_mm(
    *,
    bore_mm: Numbers,
    centerline_radius_mm: Numbers,
    tip_mm: Numbers,
    bend_deg: Numbers,
    edge_radius_mm: Numbers,
) -> np.ndarray:
    """Longest rigid tip of a diameter that passes a bend in a round bore; infinite for a bend of 0.

    Short tips lie wholly in the arc: 2 sqrt(Ro^2 - (Ri + D)^2), where acos((Ri + D)/Ro) <= theta/2;
    longer ones reach into the straight legs: 2 [Ro - (Ri + D) cos(theta/2)] / sin(theta/2).
    Ends rounded by e: Ro - e and Ri + D - e in place of Ro and Ri + D, then + 2 e.
    Parameters: diameters; the center-line radius at least half the bore; the edge radius at most
    half the tip. Raises OutOfRange otherwise, and for a tip wider than the bore.
    References: closed_form (contact of a rectangle with an annular corridor).

    >>> round(float(longest_rigid_tip_mm(
    ...     bore_mm=10, centerline_radius_mm=15, tip_mm=6, bend_deg=90, edge_radius_mm=0)), 3)
    24.0
    """
    _fits(bore_mm, tip_mm)
    _bend(bore_mm, centerline_radius_mm, bend_deg)
    within(0.0, np.inf, edge_radius_mm=edge_radius_mm)
    edge = np.asarray(edge_radius_mm, float)
    require("edge_radius_mm", edge, "at most half the tip's diameter", edge <= np.asarray(tip_mm) / 2)
    outer = np.asarray(centerline_radius_mm, float) + np.asarray(bore_mm) / 2 - edge
    inner = np.asarray(centerline_radius_mm, float) - np.asarray(bore_mm) / 2 + tip_mm - edge
    half = np.minimum(rad_from_deg(np.asarray(bend_deg, float)) / 2, np.pi / 2)
    in_arc = 2 * np.sqrt(np.maximum(outer**2 - inner**2, 0.0))
    in_legs = 2 * (outer - inner * np.cos(half)) / np.where(half > 0, np.sin(half), 1.0)
    reaches = inner < outer * np.cos(half)
    return np.where(half > 0, np.where(reaches, in_legs, in_arc), np.inf) + 2 * edge


def longest_through_mitre_mm(*, bore_mm: Numbers, tip_mm: Numbers, bend_deg: Numbers) -> np.ndarray:
    """Longest rigid tip through a mitred elbow, its inner corner sharp; infinite for a bend of 0.

    2 (B - D cos(theta/2))/sin(theta/2); for D > B cos(theta/2), 2 sqrt(B^2 - D^2): the bend with its
    inner wall shrunk to a point. Raises OutOfRange for a tip wider than the bore.
    References: closed_form.

    >>> float(longest_through_mitre_mm(bore_mm=10.0, tip_mm=6.0, bend_deg=90.0).round(4))
    16.2843
    """
    return longest_rigid_tip_mm(
        bore_mm=bore_mm,
        centerline_radius_mm=np.asarray(bore_mm, float) / 2,
        tip_mm=tip_mm,
        bend_deg=bend_deg,
        edge_radius_mm=0.0,
    )


def tube_bend_radius_mm(
    *, bore_mm: Numbers, centerline_radius_mm: Numbers, tube_mm: Numbers, bend_deg: Numbers
) -> np.ndarray:
    """Largest bend radius a flexible tube can take in a bend of the bore; infinite for a bend of 0.

    Rc + ((B - d)/2) cot^2(theta/4): the arc that touches the inner wall in the middle of the bend
    and leaves the outer walls of both legs at its ends. A tube that bends to this radius passes.
    Raises OutOfRange for a tube wider than the bore. References: closed_form.

    >>> round(float(tube_bend_radius_mm(bore_mm=10, centerline_radius_mm=15, tube_mm=6, bend_deg=90)), 1)
    26.7
    """
    positive(tube_mm=tube_mm)
    require("tube_mm", tube_mm, "at most the bore's diameter", np.asarray(tube_mm) <= bore_mm)
    _bend(bore_mm, centerline_radius_mm, bend_deg)
    quarter = rad_from_deg(np.asarray(bend_deg, float)) / 4
    play = (np.asarray(bore_mm, float) - tube_mm) / 2
    opening = np.where(quarter > 0, 1 / np.tan(np.where(quarter > 0, quarter, 1.0)) ** 2, np.inf)
    return centerline_radius_mm + np.where(play > 0, play * np.where(play > 0, opening, 0.0), 0.0)


def port_tilt_deg(*, port_mm: Numbers, thickness_mm: Numbers, tip_mm: Numbers) -> np.ndarray:
    """Largest tilt of a rigid tip in a round hole through a wall.

    From D = B cos(phi) - t sin(phi): phi = acos(D / sqrt(B^2 + t^2)) - atan(t / B). A thin wall
    (t = 0) gives acos(D/B). Raises OutOfRange for a tip wider than the hole.
    References: closed_form.

    >>> round(float(port_tilt_deg(port_mm=8.0, thickness_mm=10.0, tip_mm=6.0)), 2)
    10.72
    """
    positive(port_mm=port_mm, tip_mm=tip_mm)
    not_negative(thickness_mm=thickness_mm)
    require("tip_mm", tip_mm, "at most the port's diameter", np.asarray(tip_mm) <= port_mm)
    diagonal = np.hypot(port_mm, thickness_mm)
    return np.rad2deg(np.arccos(tip_mm / diagonal) - np.arctan2(thickness_mm, port_mm))


def port_needed_mm(*, tilt_deg: Numbers, thickness_mm: Numbers, tip_mm: Numbers) -> np.ndarray:
    """Least diameter of a hole that lets a rigid tip through its wall at a tilt: D/cos(phi) + t tan(phi).

    >>> round(float(port_needed_mm(tilt_deg=10.7215, thickness_mm=10.0, tip_mm=6.0)), 2)
    8.0
    """
    positive(tip_mm=tip_mm)
    not_negative(thickness_mm=thickness_mm)
    require("tilt_deg", tilt_deg, "from 0 to below 90", (np.asarray(tilt_deg) >= 0) & (np.asarray(tilt_deg) < 90))
    tilt = rad_from_deg(np.asarray(tilt_deg, float))
    return tip_mm / np.cos(tilt) + thickness_mm * np.tan(tilt)


def push_factor(*, friction_factor: Numbers, bend_deg: Numbers) -> np.ndarray:
    """How the push force grows through bends of a total angle: e^(mu theta), the capstan law.

    A tube with no stiffness of its own; weight and springing back add to it. Three or four quarter
    bends are the practical end. References: closed_form (Euler 1762, Eytelwein).

    >>> round(float(push_factor(friction_factor=0.3, bend_deg=360.0)), 2)
    6.59
    """
    not_negative(friction_factor=friction_factor, bend_deg=bend_deg)
    return np.exp(np.asarray(friction_factor) * rad_from_deg(np.asarray(bend_deg, float)))


def steered_height_mm(
    *, bending_radius_mm: Numbers, angle_deg: Numbers, rigid_tip_mm: Numbers, tube_mm: Numbers
) -> np.ndarray:
    """Room across, from the straight tube's far side to the tip's outermost edge, that steering takes.

    The steered part bends on an arc of radius R through the angle a, the rigid tip L follows on the
    tangent: D/2 + R (1 - cos a) + L sin a + (D/2) |cos a|; past a quarter turn the highest point is
    where the outer edge is highest on the way. A cavity less wide than this stops the turn.
    References: closed_form.

    >>> round(float(steered_height_mm(bending_radius_mm=15, angle_deg=90, rigid_tip_mm=10, tube_mm=6)), 3)
    28.0
    """
    positive(bending_radius_mm=bending_radius_mm, tube_mm=tube_mm)
    not_negative(angle_deg=angle_deg, rigid_tip_mm=rigid_tip_mm)
    angle, radius = rad_from_deg(np.asarray(angle_deg, float)), np.asarray(bending_radius_mm, float)
    half = np.asarray(tube_mm, float) / 2
    end = radius * (1 - np.cos(angle)) + rigid_tip_mm * np.sin(angle)
    reach = end + half * np.abs(np.cos(angle))
    # the arc's own outer edge, once it has passed the top, stays the highest
    arc = np.where(angle >= np.pi, 2 * radius + half, radius * (1 - np.cos(angle)) + half * np.abs(np.cos(angle)))
    return half + np.maximum(reach, arc)


def _fits(bore_mm: Numbers, tip_mm: Numbers) -> None:
    positive(bore_mm=bore_mm, tip_mm=tip_mm)
    require("tip_mm", tip_mm, "at most the bore's diameter", np.asarray(tip_mm) <= bore_mm)


def _bend(bore_mm: Numbers, centerline_radius_mm: Numbers, bend_deg: Numbers) -> None:
    positive(bore_mm=bore_mm, centerline_radius_mm=centerline_radius_mm)
    open_inside = np.asarray(centerline_radius_mm) >= np.asarray(bore_mm) / 2
    require("centerline_radius_mm", centerline_radius_mm, "at least half the bore's diameter", open_inside)
    within(0.0, 360.0, bend_deg=bend_deg)
