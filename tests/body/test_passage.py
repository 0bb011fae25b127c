"""Passage: closed forms against a swept solid (sampled poses of a cylinder in a bent pipe), limits and refusals."""

import numpy as np
import pytest

from optics.body.passage import (
    longest_rigid_tip_mm,
    longest_through_mitre_mm,
    port_needed_mm,
    port_tilt_deg,
    push_factor,
    steered_height_mm,
    tube_bend_radius_mm,
)
from optics.spec import OutOfRange

ELBOW = {"bore_mm": 10.0, "centerline_radius_mm": 15.0, "bend_deg": 90.0}


def excess(points, bore, radius, bend):
    """How far points (x, y in the bend's plane, z) stand out of the pipe: distance to its axis less half the bore."""
    x, y, z = np.abs(points[..., 0]), points[..., 1], points[..., 2]
    half = bend / 2
    out, along = np.array([np.sin(half), np.cos(half)]), np.array([np.cos(half), -np.sin(half)])
    leg_x, leg_y = x - radius * out[0], y - radius * out[1]
    in_leg = np.hypot(leg_x * out[0] + leg_y * out[1], z)
    in_arc = np.hypot(np.hypot(x, y) - radius, z)
    return (
        np.where(np.arctan2(x, y) <= half, in_arc, np.where(leg_x * along[0] + leg_y * along[1] >= 0, in_leg, np.inf))
        - bore / 2
    )


def solid(length, tip, edge, angles):
    """Points on the surface of a cylinder along x with rounded ends, its axis through the origin."""
    side = np.linspace(-length / 2 + edge, length / 2 - edge, 161)
    turn = np.linspace(0, np.pi / 2, 9)
    profile = [(u, tip / 2) for u in side]
    for sign in (-1, 1):
        profile += [(sign * (length / 2 - edge + edge * np.sin(t)), tip / 2 - edge + edge * np.cos(t)) for t in turn]
    u, r = np.array(profile).T
    return np.stack(
        [np.repeat(u, len(angles)), np.outer(r, np.cos(angles)).ravel(), np.outer(r, np.sin(angles)).ravel()], axis=1
    )


def least_excess(length, tip, edge, station, bore, radius, bend):
    """The least by which the tip stands out, its middle on the cross-section at a station along the pipe's axis."""
    half = bend / 2
    if station <= half:
        out, along = np.array([np.sin(station), np.cos(station)]), np.array([np.cos(station), -np.sin(station)])
        on_axis = radius * out
    else:
        out, along = np.array([np.sin(half), np.cos(half)]), np.array([np.cos(half), -np.sin(half)])
        on_axis = radius * (out + (station - half) * along)

    def stands_out(points, shift, tilt):
        c, s = np.cos(tilt)[:, None], np.sin(tilt)[:, None]
        axis, up = points[:, 0] * c - points[:, 1] * s, points[:, 0] * s + points[:, 1] * c + shift[:, None]
        place = on_axis + axis[..., None] * along + up[..., None] * out
        z = np.broadcast_to(points[:, 2], axis.shape)
        return excess(np.concatenate([place, z[..., None]], axis=-1), bore, radius, bend).max(axis=1)

    flat = solid(length, tip, edge, np.array([0.0, np.pi]))
    shift, tilt, wide, steep = 0.0, 0.0, bore / 2, 0.6
    for _ in range(7):
        shifts, tilts = (
            a.ravel() for a in np.meshgrid(shift + wide * np.linspace(-1, 1, 9), tilt + steep * np.linspace(-1, 1, 9))
        )
        best = np.argmin(stands_out(flat, shifts, tilts))
        shift, tilt, wide, steep = shifts[best], tilts[best], wide / 3, steep / 3
    whole = solid(length, tip, edge, np.linspace(0, 2 * np.pi, 24, endpoint=False))
    return float(stands_out(whole, np.array([shift]), np.array([tilt]))[0])


def random_case(draw):
    bore = draw.uniform(4, 12)
    bend = np.deg2rad(draw.uniform(20, 170))
    radius, tip = bore * draw.uniform(0.6, 4.0), bore * draw.uniform(0.3, 0.92)
    edge = draw.choice([0.0, 0.1]) * tip
    return bore, radius, tip, bend, edge


def agrees_with_swept_solid(seed):
    bore, radius, tip, bend, edge = random_case(np.random.default_rng(seed))
    longest = float(
        longest_rigid_tip_mm(
            bore_mm=bore, centerline_radius_mm=radius, tip_mm=tip, bend_deg=np.rad2deg(bend), edge_radius_mm=edge
        )
    )
    blocked = least_excess(1.001 * longest, tip, edge, 0.0, bore, radius, bend)
    assert blocked > 0, (seed, "a tip 0.1 % longer passes the middle of the bend", blocked)
    for station in np.linspace(0, bend / 2 + longest / radius, 6):
        free = least_excess(0.999 * longest, tip, edge, station, bore, radius, bend)
        assert free < 2e-5 * bore, (seed, station, "a tip 0.1 % shorter is stopped", free)


@pytest.mark.parametrize("seed", range(20))
def test_longest_tip_agrees_with_a_swept_solid(seed):
    agrees_with_swept_solid(seed)


@pytest.mark.slow
@pytest.mark.parametrize("seed", range(100, 300))
def test_longest_tip_agrees_with_a_swept_solid_at_length(seed):
    agrees_with_swept_solid(seed)


@pytest.mark.parametrize("seed", range(20))
def test_tube_takes_the_largest_arc_that_stays_inside(seed):
    """Arcs of a radius, shifted along the bisector, with straight legs: sampled points against the play of the bore."""
    draw = np.random.default_rng(seed)
    bore, bend = draw.uniform(4, 12), np.deg2rad(draw.uniform(30, 175))
    radius, tube = bore * draw.uniform(0.6, 4), bore * draw.uniform(0.3, 0.95)
    largest = float(
        tube_bend_radius_mm(bore_mm=bore, centerline_radius_mm=radius, tube_mm=tube, bend_deg=np.rad2deg(bend))
    )
    turn = np.linspace(0, bend / 2, 400)

    def stands_out(arc):
        shifts = np.linspace(0, 2 * arc, 20001)[:, None]
        few = turn[np.r_[0:400:40, 399]]
        x, y = arc * np.sin(few), arc * np.cos(few) - shifts
        points = np.stack([np.broadcast_to(x, y.shape), y, np.zeros_like(y)], axis=-1)
        best = shifts[np.argmin(excess(points, bore - tube, radius, bend).max(axis=1)), 0]
        points = np.stack([arc * np.sin(turn), arc * np.cos(turn) - best, np.zeros_like(turn)], axis=-1)
        return excess(points, bore - tube, radius, bend).max()

    assert stands_out(largest * 0.998) < 1e-3 * (bore - tube)
    assert stands_out(largest * 1.002) > 0


def test_mitre_is_the_bend_with_its_inner_wall_shrunk():
    wide = longest_through_mitre_mm(bore_mm=10.0, tip_mm=8.0, bend_deg=90.0)
    assert wide == pytest.approx(2 * np.sqrt(100 - 64))
    near = [
        float(longest_through_mitre_mm(bore_mm=10.0, tip_mm=10 * np.cos(np.pi / 4) + d, bend_deg=90.0))
        for d in (-1e-9, 1e-9)
    ]
    assert near[0] == pytest.approx(near[1], abs=1e-6)


def test_limits():
    assert longest_rigid_tip_mm(**{**ELBOW, "bend_deg": 0.0}, tip_mm=6.0, edge_radius_mm=0.0) == np.inf
    assert longest_rigid_tip_mm(**ELBOW, tip_mm=10.0, edge_radius_mm=0.0) == pytest.approx(0.0)
    assert tube_bend_radius_mm(**ELBOW, tube_mm=10.0) == pytest.approx(15.0)
    assert tube_bend_radius_mm(**{**ELBOW, "bend_deg": 0.0}, tube_mm=6.0) == np.inf
    # both branches meet where the tip's ends stand at the ends of the arc
    tip = 20.0 * np.cos(np.pi / 4) - 10.0
    sides = [float(longest_rigid_tip_mm(**ELBOW, tip_mm=tip + d, edge_radius_mm=0.0)) for d in (-1e-9, 1e-9)]
    assert sides[0] == pytest.approx(sides[1], abs=1e-6)


def test_more_room_never_shortens_the_tip():
    draw = np.random.default_rng(3)
    bore = draw.uniform(4, 12, 500)
    case = {
        "centerline_radius_mm": bore * draw.uniform(0.7, 4, 500),
        "tip_mm": bore * draw.uniform(0.3, 0.95, 500),
        "bend_deg": draw.uniform(10, 180, 500),
        "edge_radius_mm": np.zeros(500),
    }
    plain = longest_rigid_tip_mm(bore_mm=bore, **case)
    assert (longest_rigid_tip_mm(bore_mm=bore * 1.02, **case) > plain).all()
    assert (longest_rigid_tip_mm(bore_mm=bore, **{**case, "tip_mm": case["tip_mm"] * 0.98}) > plain).all()
    assert (longest_rigid_tip_mm(bore_mm=bore, **{**case, "bend_deg": case["bend_deg"] * 0.9}) >= plain).all()
    assert (longest_rigid_tip_mm(bore_mm=bore, **{**case, "edge_radius_mm": case["tip_mm"] * 0.1}) > plain).all()
    assert (
        longest_rigid_tip_mm(bore_mm=bore, **case)
        >= longest_through_mitre_mm(bore_mm=bore, tip_mm=case["tip_mm"], bend_deg=case["bend_deg"])
    ).all()
    one = [float(longest_rigid_tip_mm(bore_mm=bore[i], **{k: v[i] for k, v in case.items()})) for i in range(20)]
    np.testing.assert_allclose(plain[:20], one, rtol=1e-12)


def test_port_tilt_and_port_needed_are_inverse():
    tilt = port_tilt_deg(port_mm=8.0, thickness_mm=np.array([0.0, 2.0, 10.0]), tip_mm=6.0)
    assert tilt[0] == pytest.approx(np.rad2deg(np.arccos(6 / 8)))
    np.testing.assert_allclose(port_needed_mm(tilt_deg=tilt, thickness_mm=np.array([0.0, 2.0, 10.0]), tip_mm=6.0), 8.0)
    assert port_tilt_deg(port_mm=6.0, thickness_mm=5.0, tip_mm=6.0) == pytest.approx(0.0, abs=1e-6)


def test_port_tilt_agrees_with_a_solid_cylinder():
    """The rims of the hole are circles; a tilted cylinder cuts their planes in ellipses that must lie inside."""
    tilt = np.deg2rad(float(port_tilt_deg(port_mm=8.0, thickness_mm=10.0, tip_mm=6.0)))
    round_ = np.linspace(0, 2 * np.pi, 2001)
    for share, inside in ((0.999, True), (1.001, False)):
        angle = tilt * share
        x = 3 / np.cos(angle) * np.cos(round_) + 5 * np.tan(angle)
        assert (np.hypot(x, 3 * np.sin(round_)).max() < 4.0) == inside


def test_push_and_steering():
    assert push_factor(friction_factor=0.0, bend_deg=720.0) == 1.0
    twice = push_factor(friction_factor=0.2, bend_deg=90.0) ** 2
    assert push_factor(friction_factor=0.2, bend_deg=180.0) == pytest.approx(float(twice))
    height = steered_height_mm(
        bending_radius_mm=15.0, angle_deg=np.linspace(0, 180, 37), rigid_tip_mm=10.0, tube_mm=6.0
    )
    assert height[0] == pytest.approx(6.0)
    assert height[-1] == pytest.approx(36.0)
    # the outline drawn point by point: arc and tip, both sides
    for angle, got in zip(np.deg2rad(np.linspace(0, 180, 37)), height):
        turn = np.linspace(0, angle, 400)
        outer = [15 * (1 - np.cos(turn)) + side * 3 * np.cos(turn) for side in (-1, 1)]
        end = [15 * (1 - np.cos(angle)) + 10 * np.sin(angle) + side * 3 * np.cos(angle) for side in (-1, 1)]
        assert got == pytest.approx(3 + max(np.max(outer), *end), rel=1e-9)


@pytest.mark.parametrize(
    ("change", "sentence"),
    [
        ({"tip_mm": 11.0}, "tip_mm is 11; it must be at most the bore's diameter."),
        ({"bore_mm": -1.0}, "bore_mm is -1; it must be above 0."),
        ({"centerline_radius_mm": 4.0}, "centerline_radius_mm is 4; it must be at least half the bore's diameter."),
        ({"edge_radius_mm": 4.0}, "edge_radius_mm is 4; it must be at most half the tip's diameter."),
        ({"bend_deg": -5.0}, "bend_deg is -5; it must be from 0 to 360."),
        ({"centerline_radius_mm": 0.0}, "centerline_radius_mm is 0; it must be above 0."),
    ],
)
def test_refusals(change, sentence):
    with pytest.raises(OutOfRange) as said:
        longest_rigid_tip_mm(**{**ELBOW, "tip_mm": 6.0, "edge_radius_mm": 0.0, **change})
    assert str(said.value) == sentence


def test_refuses_a_tube_wider_than_the_bore():
    with pytest.raises(OutOfRange, match="tube_mm is 12; it must be at most the bore's diameter"):
        tube_bend_radius_mm(**ELBOW, tube_mm=12.0)
