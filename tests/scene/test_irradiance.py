"""Irradiance of ports against closed forms, a plain sum over the port, and power that must add up."""

import numpy as np
import pytest

from optics.scene.exit_cone import ExitCone
from optics.scene.irradiance import bore_irradiance_w_m2, lit_points, plane_irradiance_w_m2, point_light
from optics.scene.ports import Annulus, Crescent, Disc, pieces, port_area_mm2, ring
from optics.spec import OutOfRange
from optics.units import w_m2_from_w_mm2

HALF = ExitCone.uniform(0.5)
BINS = ExitCone.binned(0.6, [0.4, 0.3, 0.2, 0.1])
ONE = (Disc(0.0, 0.0, 0.5),)


def plane(ports, cone, w, u=0.0, v=0.0, tilt_deg=0.0):
    return plane_irradiance_w_m2(ports=ports, cone=cone, power_w=1.0, distance_mm=w, tilt_deg=tilt_deg, u_mm=u, v_mm=v)


def summed(ports, cone, point, normal, count=1500):
    """Irradiance by summing small patches of every port, the plain way (W/m2 per watt)."""
    total, area = 0.0, sum(port_area_mm2(port) for port in ports)
    edges, density = np.array(cone.sine2_edges), np.array(cone.flux_share) / np.diff(cone.sine2_edges)
    for port in ports:
        for piece in pieces(port):
            disc = piece.disc
            r = disc.radius_mm * np.sqrt((np.arange(count) + 0.5) / count)
            phi = 2 * np.pi * (np.arange(count) * ((np.sqrt(5) - 1) / 2) % 1.0)
            r, phi = np.repeat(r, 16), (phi[:, None] + 2 * np.pi * np.arange(16) / 16).ravel()
            tilt, turn = np.deg2rad(disc.tilt_deg), np.deg2rad(disc.azimuth_deg)
            e1 = np.array([np.cos(tilt) * np.cos(turn), np.cos(tilt) * np.sin(turn), -np.sin(tilt)])
            e2 = np.array([-np.sin(turn), np.cos(turn), 0.0])
            spot = np.array([disc.x_mm, disc.y_mm, 0.0])[:, None] + np.outer(e1, r * np.cos(phi))
            spot = spot + np.outer(e2, r * np.sin(phi))
            ray = np.asarray(point, float)[:, None] - spot
            far2 = np.sum(ray**2, axis=0)
            leave = np.cross(e1, e2) @ ray / np.sqrt(far2)
            arrive = -np.asarray(normal, float) @ ray / np.sqrt(far2)
            s = 1 - leave**2
            bin_ = np.clip(np.searchsorted(edges, s, side="right") - 1, 0, density.size - 1)
            value = np.where((s < edges[-1]) & (s >= edges[0]) & (leave > 0), density[bin_], 0.0)
            total += piece.sign * np.pi * disc.radius_mm**2 * np.mean(value * leave * arrive / far2) / (np.pi * area)
    return w_m2_from_w_mm2(total)


def test_lambertian_disc_on_its_axis():
    """E/M = a^2/(a^2 + w^2), whatever the distance."""
    w = np.array([0.1, 0.5, 1.0, 3.0, 20.0])
    want = w_m2_from_w_mm2(1 / (np.pi * 0.25)) * 0.25 / (0.25 + w**2)
    np.testing.assert_allclose(plane(ONE, ExitCone.uniform(1.0), w), want, rtol=1e-12)


def test_far_away_a_port_is_a_point():
    """E = P cos^4(theta)/(pi NA^2 w^2) far from a small port."""
    w, u = 500.0, np.array([0.0, 100.0, 200.0])
    cos4 = (w * w / (w * w + u * u)) ** 2
    np.testing.assert_allclose(plane(ONE, HALF, w, u), w_m2_from_w_mm2(cos4 / (np.pi * 0.25 * w**2)), rtol=3e-6)


@pytest.mark.parametrize("cone", [HALF, BINS, ExitCone((0.05, 0.1, 0.3), (0.7, 0.3))])
@pytest.mark.parametrize(
    "ports",
    [
        ring(count=2, offset_mm=2.0, radius_mm=0.5, tilt_deg=0.0),
        (Annulus(1.0, 2.0),),
        (Crescent(0.4, 1.0, 1.5),),
        ring(count=3, offset_mm=1.5, radius_mm=0.5, tilt_deg=20.0),
    ],
)
def test_against_a_plain_sum(ports, cone):
    w, b, u, v = 4.0, np.deg2rad(15.0), 0.7, 1.1
    got = float(plane(ports, cone, w, u, v, 15.0))
    point, normal = (u * np.cos(b), v, w + u * np.sin(b)), (np.sin(b), 0.0, -np.cos(b))
    assert got == pytest.approx(summed(ports, cone, point, normal), rel=4e-3)
    wall = bore_irradiance_w_m2(ports=ports, cone=cone, power_w=1.0, bore_mm=7.0, z_mm=5.0, azimuth_deg=40.0)
    turn = np.deg2rad(40.0)
    point = (3.5 * np.cos(turn), 3.5 * np.sin(turn), 5.0)
    assert float(wall) == pytest.approx(summed(ports, cone, point, (-np.cos(turn), -np.sin(turn), 0.0)), rel=4e-3)


@pytest.mark.parametrize(
    "ports", [ONE, (Annulus(0.5, 1.2),), ring(count=3, offset_mm=1.0, radius_mm=0.3, tilt_deg=10.0)]
)
def test_all_the_light_lands_on_a_wide_plane(ports):
    r = np.sqrt((np.arange(400) + 0.5) / 400) * 16.0
    turn = 2 * np.pi * (np.arange(240) + 0.5) / 240
    e = plane(ports, BINS, 10.0, np.outer(r, np.cos(turn)), np.outer(r, np.sin(turn)))
    power = np.mean(e) / w_m2_from_w_mm2(1.0) * np.pi * 16.0**2
    assert power == pytest.approx(1.0, rel=5e-4)


def test_all_the_light_lands_in_a_bore():
    """A Lambertian face at one end of a long bore: all but the part that leaves through the far end."""
    z = (np.arange(4000) + 0.5) / 4000 * 200.0
    turn = (np.arange(24) + 0.5) / 24 * 360.0
    port = (Disc(1.0, 0.0, 0.5),)
    e = bore_irradiance_w_m2(
        ports=port, cone=ExitCone.uniform(1.0), power_w=1.0, bore_mm=10.0, z_mm=z[:, None], azimuth_deg=turn
    )
    power = np.mean(e) / w_m2_from_w_mm2(1.0) * np.pi * 10.0 * 200.0
    assert power == pytest.approx(1.0 - 25.0 / (25.0 + 200.0**2), rel=2e-4)


def test_bins_add_up_to_the_whole():
    point, normal = (0.8, -0.4, 6.0), (0.2, 0.1, -np.sqrt(0.95))
    ports = ring(count=3, offset_mm=1.5, radius_mm=0.4, tilt_deg=15.0)
    each = point_light(ports=ports, cone=BINS, point_mm=point, normal=normal, bins=True)
    whole = point_light(ports=ports, cone=BINS, point_mm=point, normal=normal, bins=False)
    assert float(each @ np.array(BINS.flux_share)) == pytest.approx(float(whole), rel=1e-12)


def test_a_tilted_port_is_a_tilted_target():
    """A disc tilted by b toward +x before a plane across its own axis is a facing port."""
    tilt = np.deg2rad(25.0)
    tilted = (Disc(0.0, 0.0, 0.5, 25.0, 0.0),)
    along, across = np.array([np.sin(tilt), 0.0, np.cos(tilt)]), np.array([np.cos(tilt), 0.0, -np.sin(tilt)])
    for u in (0.0, 1.0, 2.5):
        at = 6.0 * along + u * across
        got = point_light(ports=tilted, cone=BINS, point_mm=tuple(at), normal=tuple(-along), bins=False)
        assert w_m2_from_w_mm2(float(got)) == pytest.approx(float(plane(ONE, BINS, 6.0, u)), rel=1e-12)


def test_dark_is_exactly_zero_and_agrees_with_the_circles():
    u, v = np.meshgrid(np.linspace(-8, 8, 81), np.linspace(-8, 8, 81))
    for ports in (ring(count=2, offset_mm=2.0, radius_mm=0.5, tilt_deg=0.0), (Annulus(3.0, 3.2),)):
        e = plane(ports, HALF, 3.0, u, v)
        lit = lit_points(ports=ports, cone=HALF, point_mm=(u, v, np.full(u.shape, 3.0)))
        assert np.array_equal(e > 0, lit)
        assert 0.05 < lit.mean() < 0.95
    assert float(plane(ring(count=2, offset_mm=2.0, radius_mm=0.5, tilt_deg=0.0), HALF, 2.0)) == 0.0


def test_scalar_equals_array_element():
    rng = np.random.default_rng(4)
    u, v = rng.uniform(-3, 3, (2, 500))
    ports = ring(count=6, offset_mm=2.0, radius_mm=0.25, tilt_deg=0.0)
    every = plane(ports, BINS, 5.0, u, v, 10.0)
    for at in (0, 123, 499):
        assert float(plane(ports, BINS, 5.0, u[at], v[at], 10.0)) == pytest.approx(every[at], rel=1e-12)


def test_on_a_tilted_plane_the_brightest_point_is_off_the_axis():
    u = np.linspace(-9, 9, 361)
    assert u[np.argmax(plane(ONE, HALF, 20.0, u, 0.0, 20.0))] < -3.0


@pytest.mark.parametrize(
    ("change", "sentence"),
    [
        ({"distance_mm": 0.0}, "distance_mm is 0; it must be above 0."),
        ({"power_w": -1.0}, "power_w is -1; it must be 0 or more."),
        ({"tilt_deg": 90.0}, "tilt_deg is 90; it must be above -90 and below 90."),
        ({"tilt_deg": 80.0, "distance_mm": 1.0}, "distance_mm is 1; it must be such that every port lies in front"),
        ({"ports": ()}, "ports is (); it must hold at least one"),
    ],
)
def test_refusals(change, sentence):
    given = {"ports": ring(count=2, offset_mm=2.0, radius_mm=0.5, tilt_deg=0.0), "cone": HALF, "power_w": 1.0}
    given |= {"distance_mm": 5.0, "tilt_deg": 0.0, "u_mm": 0.0, "v_mm": 0.0}
    with pytest.raises(OutOfRange, match=sentence.replace("(", r"\(").replace(")", r"\)")):
        plane_irradiance_w_m2(**given | change)
    with pytest.raises(OutOfRange, match="bore_mm is 4; it must be above 5"):
        bore_irradiance_w_m2(ports=given["ports"], cone=HALF, power_w=1.0, bore_mm=4.0, z_mm=3.0, azimuth_deg=0.0)
