"""The rigid tip at its tightest in the elbow, and the walls around it: points for a picture.

In the plane of the bend, its center at the origin, the middle of the bend on +y: the center line
runs on a circle of radius Rc between -theta/2 and +theta/2 of the +y axis, and leaves on tangents.
"""

from dataclasses import dataclass

import numpy as np

from optics.body.passage import longest_rigid_tip_mm
from optics.spec import not_negative, positive
from optics.units import rad_from_deg


@dataclass(frozen=True, slots=True)
class TightestPose:
    """The longest tip where it touches: corners [4, 2] round its outline, and the three contacts [3, 2].

    Contacts: inner wall in the middle of the bend, outer wall left and right.
    """

    length_mm: float
    corners_mm: np.ndarray
    contacts_mm: np.ndarray


def tightest_pose(
    *, bore_mm: float, centerline_radius_mm: float, tip_mm: float, bend_deg: float, edge_radius_mm: float
) -> TightestPose:
    """The longest rigid tip of a diameter in the middle of the bend, where it touches three times.

    Raises OutOfRange as `longest_rigid_tip_mm`, and for a bend of 0.

    >>> pose = tightest_pose(bore_mm=10, centerline_radius_mm=15, tip_mm=6, bend_deg=90, edge_radius_mm=0)
    >>> np.hypot(*pose.contacts_mm.T).round(9).tolist()  # on the walls, of radius 10 and 20
    [10.0, 20.0, 20.0]
    """
    positive(bend_deg=bend_deg)
    length = float(
        longest_rigid_tip_mm(
            bore_mm=bore_mm,
            centerline_radius_mm=centerline_radius_mm,
            tip_mm=tip_mm,
            bend_deg=bend_deg,
            edge_radius_mm=edge_radius_mm,
        )
    )
    low, high, half = centerline_radius_mm - bore_mm / 2, centerline_radius_mm - bore_mm / 2 + tip_mm, length / 2
    corners = np.array([[-half, low], [half, low], [half, high], [-half, high]])
    edge = np.array([half - edge_radius_mm, high - edge_radius_mm])  # where the rounding of the end is centered
    turn = min(np.arctan2(edge[0], edge[1]), min(rad_from_deg(bend_deg) / 2, np.pi / 2))
    right = edge + edge_radius_mm * np.array([np.sin(turn), np.cos(turn)])
    return TightestPose(length, corners, np.array([[0.0, low], right * [-1, 1], right]))


def bore_walls_mm(
    *, bore_mm: float, centerline_radius_mm: float, bend_deg: float, leg_mm: float
) -> tuple[np.ndarray, np.ndarray]:
    """The inner and the outer wall of the elbow as lines of points [point, 2], with straight legs.

    >>> inner, outer = bore_walls_mm(bore_mm=10, centerline_radius_mm=15, bend_deg=90, leg_mm=5)
    >>> float(np.hypot(*inner[1:-1].T).max().round(6)), float(np.hypot(*outer[1:-1].T).max().round(6))
    (10.0, 20.0)
    """
    positive(bore_mm=bore_mm, centerline_radius_mm=centerline_radius_mm)
    not_negative(bend_deg=bend_deg, leg_mm=leg_mm)
    half = rad_from_deg(bend_deg) / 2
    turn = np.linspace(-half, half, 121)
    out, along = np.stack([np.sin(turn), np.cos(turn)], axis=1), np.array([np.cos(half), -np.sin(half)])

    def wall(radius):
        arc = radius * out
        return np.concatenate([[arc[0] + leg_mm * along * [-1, 1]], arc, [arc[-1] + leg_mm * along]])

    return wall(centerline_radius_mm - bore_mm / 2), wall(centerline_radius_mm + bore_mm / 2)
