"""Light over the field: the fast arrays against exact values on a fine grid, and batch against scalar."""

import time

import numpy as np
import pytest

from optics.scene.exit_cone import ExitCone
from optics.scene.field import Lighting, field_irradiance, field_lighting, lit_tangents, port_arrays
from optics.scene.irradiance import plane_irradiance_w_m2
from optics.scene.ports import Annulus, Crescent, Disc, ring
from optics.spec import OutOfRange

PORTS = {
    "one": (Disc(0.0, 0.0, 0.5),),
    "two": ring(count=2, offset_mm=1.6, radius_mm=0.45, tilt_deg=0.0),
    "five": ring(count=5, offset_mm=2.2, radius_mm=0.25, tilt_deg=0.0),
    "unlike": (Disc(1.5, 0.2, 0.5), Disc(-1.0, -1.2, 0.3), Disc(-1.1, 1.3, 0.2)),
    "annulus": (Annulus(1.0, 1.4),),
    "crescent": (Crescent(0.35, 0.9, 1.25),),
}


def cone(na, count, fall):
    share = 1.0 - fall * np.linspace(0, 1, count)
    return ExitCone.binned(na, share)


def fine(ports, cone, w, radius, rings=160, spokes=240):
    """Center, mean, least, unlit share on an even grid by area, with the rim."""
    r = radius * np.append(np.sqrt((np.arange(rings) + 0.5) / rings), 1.0)
    turn = 2 * np.pi * np.arange(spokes) / spokes
    given = {"ports": ports, "cone": cone, "power_w": 1.0, "distance_mm": w, "tilt_deg": 0.0}
    e = plane_irradiance_w_m2(**given, u_mm=np.outer(r, np.cos(turn)), v_mm=np.outer(r, np.sin(turn)))
    center = float(plane_irradiance_w_m2(**given, u_mm=0.0, v_mm=0.0))
    return center, e[:-1].mean(), min(e.min(), center), np.mean(e[:-1] == 0)


@pytest.mark.parametrize("name", PORTS)
@pytest.mark.parametrize(
    ("w", "omega", "na"), [(20.0, 24.0, 0.5), (4.0, 28.0, 0.5), (2.5, 20.0, 0.6), (8.0, 32.0, 0.5)]
)
def test_against_a_fine_grid(name, w, omega, na):
    shape, radius = cone(na, 25, 0.7), w * np.tan(np.deg2rad(omega))
    got = field_lighting(ports=PORTS[name], cone=shape, flux_lm=1.0, distance_mm=w, field_radius_mm=radius)
    center, mean, least, unlit = fine(PORTS[name], shape, w, radius)
    assert got.center_lux == pytest.approx(center, rel=1e-12)
    assert got.mean_lux == pytest.approx(mean, rel=1e-3)
    assert got.least_lux == pytest.approx(least, abs=3e-3 * mean)
    assert got.unlit_share == pytest.approx(unlit, abs=3e-3)
    assert got.evenness == pytest.approx(got.least_lux / got.mean_lux, rel=1e-12)


def test_hollow_cones_leave_a_dark_middle():
    hollow = ExitCone((0.0, 0.1, 0.25), (0.0, 1.0))
    got = field_lighting(ports=PORTS["one"], cone=hollow, flux_lm=1.0, distance_mm=20.0, field_radius_mm=9.0)
    center, mean, _, unlit = fine(PORTS["one"], hollow, 20.0, 9.0)
    assert (got.center_lux, got.least_lux, got.evenness) == (0.0, 0.0, 0.0)
    assert center == 0.0
    assert got.mean_lux == pytest.approx(mean, rel=1e-3)
    assert got.unlit_share == pytest.approx(unlit, abs=3e-3)


def test_a_mean_over_a_wide_field_is_all_the_light():
    for ports in PORTS.values():
        got = field_lighting(ports=ports, cone=cone(0.6, 20, 0.5), flux_lm=3.0, distance_mm=10.0, field_radius_mm=40.0)
        assert got.mean_lux == pytest.approx(3.0e6 / (np.pi * 40.0**2), rel=1e-9)
        assert got.least_lux == 0.0
        assert got.unlit_share > 0.9


def _batch(count=128, bins=32, ports=2):
    rng = np.random.default_rng(11)
    offset, turn = rng.uniform(0.8, 3, (count, 1)), 2 * np.pi * np.arange(ports) / ports
    radius = rng.uniform(0.2, 0.7, (count, 1)) * np.ones((1, ports))
    radius[::5, -1] *= ports == 1  # some designs with a port less
    z, na = rng.uniform(3, 25, count), rng.uniform(0.3, 0.65, count)
    given = {
        "port_x_mm": offset * np.cos(turn),
        "port_y_mm": offset * np.sin(turn),
        "port_radius_mm": radius,
        "sine2_edges": na[:, None] ** 2 * np.linspace(0, 1, bins + 1) ** 1.2,
        "distance_mm": z,
        "field_radius_mm": z * np.tan(rng.uniform(0.25, 0.6, count)),
    }
    flux = np.linspace(1, 0.2, bins) * rng.uniform(0.5, 1.0, (count, bins))
    flux[3] = 0.0
    return given, flux


@pytest.mark.parametrize("ports", [1, 2, 6])
def test_batch_equals_scalar(ports):
    given, flux = _batch(ports=ports)
    every = field_irradiance(**given)
    over = every.under(flux)
    for at in (0, 3, 5, 77, 127):
        one = field_irradiance(**{name: value[at : at + 1] for name, value in given.items()})
        np.testing.assert_allclose(one.center_per_mm2[0], every.center_per_mm2[at], rtol=1e-12)
        np.testing.assert_allclose(one.mean_per_mm2[0], every.mean_per_mm2[at], rtol=1e-12)
        alone = one.under(flux[at : at + 1])
        for name in Lighting.__slots__:
            assert getattr(alone, name)[0] == pytest.approx(getattr(over, name)[at], rel=1e-12)


def test_no_flux_lights_nothing():
    given, flux = _batch()
    over = field_irradiance(**given).under(flux)
    assert (over.center_lux[3], over.mean_lux[3], over.evenness[3], over.unlit_share[3]) == (0.0, 0.0, 0.0, 1.0)
    assert over.first_lit_mm[3] == np.inf
    assert all(np.all(np.isfinite(getattr(over, name)[4:])) for name in Lighting.__slots__)


def test_padding_and_order_of_ports_change_nothing():
    given, flux = _batch(ports=3)
    plain = field_irradiance(**given).under(flux)
    padded = {name: np.pad(v, ((0, 0), (0, 2))) if name.startswith("port") else v for name, v in given.items()}
    wide = field_irradiance(**padded).under(flux)
    for name in ("center_lux", "mean_lux", "least_lux", "unlit_share", "first_lit_mm"):
        np.testing.assert_allclose(getattr(wide, name), getattr(plain, name), rtol=1e-12)
    mirrored = field_irradiance(**given | {"port_y_mm": -given["port_y_mm"]}).under(flux)
    np.testing.assert_allclose(mirrored.mean_lux, plain.mean_lux, rtol=1e-12)
    np.testing.assert_allclose(mirrored.least_lux, plain.least_lux, rtol=1e-9, atol=1e-9 * plain.mean_lux.max())


def test_first_light_is_where_the_center_ceases_to_be_dark():
    shape = ExitCone.uniform(0.5)
    for name in ("two", "annulus", "crescent", "unlike"):
        given = {"ports": PORTS[name], "cone": shape, "flux_lm": 1.0, "field_radius_mm": 1.0}
        first = field_lighting(**given, distance_mm=5.0).first_lit_mm
        assert field_lighting(**given, distance_mm=first * 0.999).center_lux == 0.0
        assert field_lighting(**given, distance_mm=first * 1.001).center_lux > 0.0
    assert (
        field_lighting(ports=PORTS["one"], cone=shape, flux_lm=1.0, distance_mm=5.0, field_radius_mm=1.0).first_lit_mm
        == 0
    )


def test_worked_port_at_twenty_millimeters():
    """10 lm from a 1.0 mm port of uniform radiance, NA 0.56: 25,360 lx on axis, 16,240 lx mean to 14 mm."""
    given = {"ports": PORTS["one"], "cone": ExitCone.uniform(0.56), "flux_lm": 10.0, "distance_mm": 20.0}
    got = field_lighting(**given, field_radius_mm=14.0)
    assert got.center_lux == pytest.approx(25360, rel=1e-3)
    assert got.mean_lux == pytest.approx(16240, rel=1e-3)
    assert got.unlit_share == 0.0
    assert field_lighting(**given, field_radius_mm=14.03).unlit_share > 0.0


def test_tangents_of_the_lit_cone():
    edges = np.array([[0.0, 0.1, 0.2, 0.5], [0.0, 0.1, 0.2, 1.0]])
    start, end = lit_tangents(sine2_edges=edges, flux=np.array([[0.0, 1.0, 0.0], [1.0, 0.0, 1.0]]))
    np.testing.assert_allclose(start, [np.sqrt(0.1 / 0.9), 0.0])
    np.testing.assert_allclose(end, [np.sqrt(0.2 / 0.8), np.inf])


def test_refusals():
    with pytest.raises(OutOfRange, match="a port is tilted"):
        port_arrays([(Disc(0.0, 0.0, 1.0, 5.0),)])
    with pytest.raises(OutOfRange, match="must be the only port"):
        port_arrays([(Annulus(1.0, 2.0), Disc(3.0, 0.0, 0.5))])
    with pytest.raises(OutOfRange, match="field_radius_mm is -1; it must be above 0"):
        field_lighting(
            ports=PORTS["one"], cone=ExitCone.uniform(0.5), flux_lm=1.0, distance_mm=5.0, field_radius_mm=-1.0
        )
    given, flux = _batch(ports=3)
    cut = given["port_radius_mm"] * np.array([1.0, 1.0, -0.5])
    with pytest.raises(OutOfRange, match="the number of discs is 3; it must be 2 where one is cut out of the first"):
        field_irradiance(**given | {"port_radius_mm": cut})
    with pytest.raises(OutOfRange, match="flux_lm is -1"):
        field_irradiance(**given).under(-np.ones_like(flux))


@pytest.mark.slow
def test_speed():
    given, flux = _batch()
    field_irradiance(**given).under(flux)
    start = time.perf_counter()
    for _ in range(5):
        field_irradiance(**given).under(flux)
    assert (time.perf_counter() - start) / 5 / len(flux) < 0.3e-3
