"""Problems worked by hand (geometry to 0.1 %, photometry of a given model to 1 %), each from the formulas alone."""

import numpy as np
import pytest

from optics.body.passage import longest_rigid_tip_mm, tube_bend_radius_mm
from optics.body.section import fill_fraction
from optics.guide.fiber import half_angle_deg, numerical_aperture
from optics.guide.packing import core_share, disc_count, hexagonal_packing_fraction
from optics.image.lattice import core_count, resolution_limit_lp_mm
from optics.image.objective import face_irradiance_factor
from optics.media.face import face_transmission
from optics.scene.exit_cone import ExitCone
from optics.scene.irradiance import plane_irradiance_w_m2
from optics.scene.ports import Disc
from optics.source.launch import cone_share
from optics.units import mm_from_um, transmission_from_db


def test_fibers_and_core_in_a_bundle():
    """30 um fiber, 27 um core, 2.0 mm bundle: 4031 by area, about 3,910 whole ones; core factor 0.81: 0.735, at random 0.664."""
    assert hexagonal_packing_fraction() * (2.0 / mm_from_um(30.0)) ** 2 == pytest.approx(4031, abs=0.5)
    assert disc_count(bundle_mm=2.0, fiber_mm=0.030) == pytest.approx(3910, rel=0.005)
    share = core_share(core_um=27.0, fiber_um=30.0)
    assert share == pytest.approx(0.81)
    assert hexagonal_packing_fraction() * share == pytest.approx(0.735, abs=5e-4)
    assert 0.82 * share == pytest.approx(0.664, abs=5e-4)


def test_aperture_of_a_lead_glass_fiber():
    """n 1.62/1.52: NA 0.560, half-angle 34.1 deg; a uniform cone of NA 0.66 loses 28 %."""
    na = numerical_aperture(core_index=1.62, clad_index=1.52)
    assert na == pytest.approx(0.560, abs=5e-4)
    assert half_angle_deg(na=na, outside_index=1.0) == pytest.approx(34.1, abs=0.05)
    taken = cone_share(sine2_edges=np.array([[0.0, float(na) ** 2]]), cone_na=np.array([0.66]))
    assert 1 - taken.sum() == pytest.approx(0.28, abs=0.005)


def test_what_a_face_passes_on():
    """1.8 m at 0.25 dB/m, packing 0.82 and core share 0.81, two faces at normal incidence: 0.534 of what falls on the face."""
    face = face_transmission(core_index=1.62, outside_index=1.0, na=1e-6)
    assert 0.82 * 0.81 * face**2 * transmission_from_db(0.25 * 1.8) == pytest.approx(0.534, rel=0.01)


def test_light_of_one_port():
    """10 lm from a 1.0 mm port of uniform radiance, NA 0.56, at 20 mm: 25,360 lx on axis; 0.494 of it at 13.0 mm."""
    port, cone = [Disc(0.0, 0.0, 0.5)], ExitCone.uniform(0.56)

    def lux(u):
        return plane_irradiance_w_m2(
            ports=port,
            cone=cone,
            power_w=10.0,
            distance_mm=20.0,
            tilt_deg=0.0,
            u_mm=np.asarray(u, float),
            v_mm=np.zeros(np.shape(u)),
        )

    assert float(lux(0.0)) == pytest.approx(25_360, rel=0.001)
    assert float(lux(13.0) / lux(0.0)) == pytest.approx(0.494, rel=0.001)
    radius = np.linspace(0.0, 14.1, 4001)
    field = lux(radius)
    mean = np.trapezoid(field * radius, radius) / (14.0**2 / 2)
    assert mean == pytest.approx(16_240, rel=0.01)
    assert float(lux(14.03)) == 0.0
    assert float(lux(14.01)) > 0.0


def test_cores_and_line_pairs_of_an_image_bundle():
    """0.95 mm, pitch 8 um, field 60 deg from the pupil, 20 mm: 12,790 cores, 72.2 lp/mm, 0.337 mm a line pair at the target."""
    assert core_count(diameter_mm=0.95, pitch_um=8.0) == pytest.approx(12_790, rel=0.001)
    limit = resolution_limit_lp_mm(pitch_um=8.0, direction_deg=30.0)
    assert limit == pytest.approx(72.2, abs=0.05)
    magnified = (0.95 / 2) / (20.0 * np.tan(np.deg2rad(30.0)))
    assert 1 / (limit * magnified) == pytest.approx(0.337, abs=5e-4)


def test_tip_and_tube_through_a_bend():
    """Bore 10, bend radius 15, 90 deg: a tip of 6 mm passes to 24.0 mm; a tube of 6 mm bends to 26.7 mm."""
    bend = {"bore_mm": 10.0, "centerline_radius_mm": 15.0, "bend_deg": 90.0}
    assert longest_rigid_tip_mm(**bend, tip_mm=6.0, edge_radius_mm=0.0) == pytest.approx(24.0, abs=0.05)
    assert tube_bend_radius_mm(**bend, tube_mm=6.0) == pytest.approx(26.7, abs=0.05)


def test_fill_of_a_section():
    """Lumen 4.9 with 1.3 image, 2.2 channel, two 1.2 light, four 0.6 wires: 8.52 of 18.86 mm2, 45 %."""
    parts = np.pi / 4 * (1.3**2 + 2.2**2 + 2 * 1.2**2 + 4 * 0.6**2)
    assert parts == pytest.approx(8.52, abs=0.005)
    assert fill_fraction(parts_mm2=parts, lumen_mm=4.9) == pytest.approx(0.45, abs=0.005)


def test_light_back_at_the_sensor():
    """1000 lx, reflectance 0.3, f/4, lens 0.85, bundle 0.45, relay x2: 0.45 lx at the sensor (no relay loss)."""
    face = 1000 * 0.3 / np.pi * face_irradiance_factor(f_number=4.0, magnification=0.0, transmission=0.85)
    assert face * 0.45 / 2**2 == pytest.approx(0.45, rel=0.01)
