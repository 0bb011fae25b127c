"""Tilted planes, bores and tilted ports: the same as the fast path where both hold, and what must be so."""

import numpy as np
import pytest

from optics.scene.exit_cone import ExitCone
from optics.scene.field import field_lighting
from optics.scene.irradiance import bore_irradiance_w_m2, plane_irradiance_w_m2
from optics.scene.ports import Annulus, Disc, ring
from optics.scene.surface import bore_field, first_light_mm, plane_field, seen_wall_mm
from optics.spec import OutOfRange

CONE = ExitCone.binned(0.55, np.linspace(1.0, 0.3, 12))
TWO = ring(count=2, offset_mm=1.6, radius_mm=0.45, tilt_deg=0.0)


def on_plane(ports, w, tilt_deg, radius, depth=1.0, flux=1.0):
    return plane_field(
        ports=[ports],
        sine2_edges=np.array([CONE.sine2_edges]),
        flux_lm=flux * np.array([CONE.flux_share]),
        distance_mm=np.array([w]),
        tilt_deg=np.array([tilt_deg]),
        field_radius_mm=np.array([radius]),
        pupil_depth_mm=np.array([depth]),
    )


@pytest.mark.parametrize("ports", [TWO, (Annulus(1.0, 1.4),), (Disc(0.0, 0.0, 0.5),)])
@pytest.mark.parametrize("w", [3.0, 12.0])
def test_facing_plane_as_the_fast_path(ports, w):
    slow = on_plane(ports, w, 0.0, 0.5 * w, flux=2.0).lighting
    fast = field_lighting(ports=ports, cone=CONE, flux_lm=2.0, distance_mm=w, field_radius_mm=0.5 * w)
    assert slow.center_lux[0] == pytest.approx(fast.center_lux, rel=1e-12)
    assert slow.mean_lux[0] == pytest.approx(fast.mean_lux, rel=2e-3)
    assert slow.least_lux[0] == pytest.approx(fast.least_lux, abs=5e-3 * fast.mean_lux)
    assert slow.unlit_share[0] == pytest.approx(fast.unlit_share, abs=3e-3)
    assert slow.first_lit_mm[0] == pytest.approx(fast.first_lit_mm, rel=1e-9)


def test_a_wide_field_on_a_tilted_plane_catches_all_the_light():
    """Mean times the area of the ellipse is the flux: the areas of the perspective are right."""
    w, b, radius, depth = 10.0, np.deg2rad(25.0), 12.0, 2.0
    got = on_plane(TWO, w, 25.0, radius, depth).lighting
    # The cone of the field cuts the plane in an ellipse: half-axes from the two ends of its diameter in x.
    ends = [(w + depth) * np.cos(b) / ((w + depth) * np.cos(b) - x * np.sin(b)) for x in (-radius, radius)]
    half = (ends[1] + ends[0]) * radius / (2 * np.cos(b))
    across = radius * np.sqrt(ends[0] * ends[1])
    assert got.mean_lux[0] * np.pi * half * across / 1e6 == pytest.approx(1.0, rel=5e-3)


def test_center_of_the_tilted_plane_and_per_bin():
    got = on_plane(TWO, 8.0, 30.0, 3.0)
    want = plane_irradiance_w_m2(ports=TWO, cone=CONE, power_w=1.0, distance_mm=8.0, tilt_deg=30.0, u_mm=0.0, v_mm=0.0)
    assert got.lighting.center_lux[0] == pytest.approx(float(want), rel=1e-12)
    assert 1e6 * float(got.center_per_mm2[0] @ np.array(CONE.flux_share)) == pytest.approx(float(want), rel=1e-12)


def test_bore_wall():
    given = {"bore_mm": np.array([12.0]), "distance_mm": np.array([15.0])}
    given |= {"sine2_edges": np.array([CONE.sine2_edges]), "flux_lm": np.array([CONE.flux_share])}
    got = bore_field(ports=[TWO], from_mm=np.array([10.0]), to_mm=np.array([30.0]), **given).lighting
    z, turn = np.linspace(10.0, 30.0, 801), np.linspace(0, 360, 121)[:-1]
    e = bore_irradiance_w_m2(ports=TWO, cone=CONE, power_w=1.0, bore_mm=12.0, z_mm=z[:, None], azimuth_deg=turn)
    assert got.mean_lux[0] == pytest.approx(np.mean((e[1:] + e[:-1]) / 2), rel=2e-3)
    assert got.least_lux[0] == pytest.approx(e.min(), abs=5e-3 * e.mean())
    assert got.center_lux[0] == pytest.approx(np.mean(e[200]), rel=1e-3)
    # Too near the tip the wall is dark; where nothing is seen there is nothing to be even.
    close = bore_field(ports=[TWO], from_mm=np.array([2.0]), to_mm=np.array([30.0]), **given).lighting
    assert (close.least_lux[0], close.evenness[0]) == (0.0, 0.0)
    assert close.unlit_share[0] == pytest.approx(np.interp(0, [0, 1], [0.17, 0]), abs=0.06)
    unseen = bore_field(ports=[TWO], from_mm=np.array([40.0]), to_mm=np.array([30.0]), **given).lighting
    assert (unseen.mean_lux[0], unseen.evenness[0], unseen.unlit_share[0]) == (0.0, 0.0, 1.0)


def test_what_of_the_wall_is_seen():
    start, end = seen_wall_mm(
        bore_mm=12.0, field_radius_mm=8.0, distance_mm=14.0, pupil_depth_mm=2.0, near_mm=3.0, far_mm=25.0
    )
    # The ray from the pupil through the rim of the field at 14 mm meets the wall of radius 6 at 6/8 of the way.
    assert (float(start), float(end)) == (pytest.approx(0.75 * 16.0 - 2.0), 25.0)


@pytest.mark.parametrize("tilt_deg", [0.0, 10.0, 25.0])
@pytest.mark.parametrize("azimuth_deg", [0.0, 90.0, 180.0])
def test_first_light_of_a_tilted_port_is_where_the_axis_ceases_to_be_dark(tilt_deg, azimuth_deg):
    port, cone = (Disc(2.0, 0.0, 0.5, tilt_deg, azimuth_deg),), ExitCone.uniform(0.5)
    first = first_light_mm(ports=port, sine2_share=0.25)
    given = {"ports": port, "cone": cone, "power_w": 1.0, "tilt_deg": 0.0, "u_mm": 0.0, "v_mm": 0.0}
    assert float(plane_irradiance_w_m2(distance_mm=first * 0.999, **given)) == 0.0
    assert float(plane_irradiance_w_m2(distance_mm=first * 1.001, **given)) > 0.0


def test_first_light_never_or_at_once():
    assert first_light_mm(ports=Disc(2.0, 0.0, 0.5, 50.0, 0.0), sine2_share=0.25) == np.inf
    assert first_light_mm(ports=Disc(0.3, 0.0, 0.5), sine2_share=0.25) == 0.0
    assert first_light_mm(ports=TWO, sine2_share=0.0) == np.inf
    assert first_light_mm(ports=TWO, sine2_share=1.0) == pytest.approx(0.0, abs=1e-9)


def test_no_flux():
    got = on_plane(TWO, 8.0, 30.0, 3.0, flux=0.0)
    assert (got.lighting.mean_lux[0], got.lighting.unlit_share[0], got.lighting.evenness[0]) == (0.0, 1.0, 0.0)
    assert not got.center_per_mm2.any()


def test_refusals():
    with pytest.raises(OutOfRange, match="field_radius_mm is 9; it must be so small that the plane cuts"):
        on_plane(TWO, 5.0, 60.0, 9.0)
    with pytest.raises(OutOfRange, match=r"bore_mm is 4; it must be above 4\.1"):
        bore_field(
            ports=[TWO],
            sine2_edges=np.array([CONE.sine2_edges]),
            flux_lm=np.array([CONE.flux_share]),
            bore_mm=np.array([4.0]),
            distance_mm=np.array([5.0]),
            from_mm=np.array([3.0]),
            to_mm=np.array([9.0]),
        )
