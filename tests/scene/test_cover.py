"""The window over the ports, and the closed forms of coverage."""

import numpy as np
import pytest
from pydantic import ValidationError

from optics.scene.cover import Cover, apparent_thickness_mm, spread_share, thrown_back_mm
from optics.scene.coverage import fills_from_mm, first_lit_mm, fully_lit_mm, glint_distance_mm
from optics.scene.exit_cone import ExitCone
from optics.scene.field import field_lighting
from optics.scene.ports import Disc
from optics.scene.target import Target
from optics.spec import OutOfRange


def test_light_thrown_back_by_a_ray():
    """The ray itself: down and up again at the angle inside."""
    angle = np.arcsin(0.5 / 1.52)
    assert thrown_back_mm(thickness_mm=0.8, na=0.5, index=1.52) == pytest.approx(1.6 * np.tan(angle), rel=1e-12)
    with pytest.raises(OutOfRange, match=r"na is 1\.6; it must be below the index of the cover"):
        thrown_back_mm(thickness_mm=0.8, na=1.6, index=1.52)


def test_apparent_thickness():
    for na in (0.0, 0.3, 0.6):
        inside, outside = np.arcsin(max(na, 1e-6) / 1.5), np.arcsin(max(na, 1e-6) / 1.333)
        got = apparent_thickness_mm(thickness_mm=1.0, na=na, index=1.5, outside_index=1.333)
        assert got == pytest.approx(np.tan(inside) / np.tan(outside), rel=1e-9)
    assert apparent_thickness_mm(thickness_mm=1.0, na=0.4, index=1.333, outside_index=1.333) == pytest.approx(1.0)


def test_spreading_keeps_the_flux_and_widens_the_cone():
    edges, wide = np.linspace(0, 0.25, 11), np.linspace(0, 0.7**2, 41)
    share = spread_share(sine2_edges=edges, spread_na=0.2, spread_edges=wide)
    np.testing.assert_allclose(share.sum(axis=1), 1.0, rtol=1e-12)
    assert np.all(share >= -1e-15)

    # A sum of independent kicks in the plane of sines: the mean squares add up (q^2/2 for a disc).
    def mean_square(flux, over):
        return float(np.sum(flux * (over[1:] + over[:-1]) / 2))

    flux = np.full(10, 0.1)
    assert mean_square(flux @ share, wide) == pytest.approx(mean_square(flux, edges) + 0.2**2 / 2, rel=2e-3)


def test_spreading_by_random_kicks():
    rng = np.random.default_rng(8)
    r = np.sqrt(rng.uniform(0.1, 0.15, 400_000))
    kick, turn = 0.3 * np.sqrt(rng.random(r.size)), 2 * np.pi * rng.random(r.size)
    s = r * r + kick * kick + 2 * r * kick * np.cos(turn)
    wide = np.linspace(0, (np.sqrt(0.15) + 0.3) ** 2, 21)
    share = spread_share(sine2_edges=np.array([0.1, 0.15]), spread_na=0.3, spread_edges=wide)
    np.testing.assert_allclose(share[0], np.histogram(s, wide)[0] / r.size, atol=2e-3)


def test_spreading_in_a_batch_is_the_same():
    edges = np.stack([np.linspace(0, 0.2, 6), np.linspace(0, 0.3, 6)])
    wide = np.stack([np.linspace(0, 0.5, 9), np.linspace(0, 0.6, 9)])
    both = spread_share(sine2_edges=edges, spread_na=np.array([0.1, 0.2]), spread_edges=wide)
    for at, q in enumerate((0.1, 0.2)):
        one = spread_share(sine2_edges=edges[at], spread_na=q, spread_edges=wide[at])
        np.testing.assert_allclose(one, both[at], rtol=1e-12, atol=1e-15)
    # what is spread beyond the last edge is lost, never counted twice
    assert spread_share(sine2_edges=edges[0], spread_na=0.8, spread_edges=wide[0]).sum(axis=-1).max() <= 1 + 1e-12


def test_coverage_is_what_the_light_does():
    """The closed forms against the irradiance itself."""
    port, alpha = (Disc(2.0, 0.0, 0.5),), 30.0
    given = {"offset_mm": 2.0, "port_radius_mm": 0.5, "half_angle_deg": alpha}
    shape = {"ports": port, "cone": ExitCone.uniform(0.5), "flux_lm": 1.0}
    first, full = float(first_lit_mm(**given)), float(fully_lit_mm(**given))
    assert field_lighting(**shape, distance_mm=first * 0.999, field_radius_mm=0.1).center_lux == 0.0
    assert field_lighting(**shape, distance_mm=first * 1.001, field_radius_mm=0.1).center_lux > 0.0

    # From full lighting on, widening the cone adds nothing but dilution by NA^2.
    def center(na, w):
        return field_lighting(**shape | {"cone": ExitCone.uniform(na)}, distance_mm=w, field_radius_mm=0.1).center_lux

    assert center(0.5, full * 1.001) * 0.25 == pytest.approx(center(0.6, full * 1.001) * 0.36, rel=1e-12)
    assert center(0.5, full * 0.98) * 0.25 < center(0.6, full * 0.98) * 0.36
    fills = float(fills_from_mm(**given, field_half_angle_deg=20.0))
    for factor, dark in ((0.99, True), (1.01, False)):
        w = fills * factor
        got = field_lighting(**shape, distance_mm=w, field_radius_mm=w * np.tan(np.deg2rad(20.0)))
        assert (got.unlit_share > 1e-9) == dark
    assert float(fills_from_mm(**given, field_half_angle_deg=35.0)) == np.inf


def test_the_glint_by_mirroring_the_port():
    for w in (1.0, 1.7320508, 4.0):
        seen_at = np.rad2deg(np.arctan(2.0 / (2 * w)))
        assert (seen_at < 30.0) == (w > float(glint_distance_mm(offset_mm=2.0, field_half_angle_deg=30.0)))
    with pytest.raises(OutOfRange, match="field_half_angle_deg is 90"):
        glint_distance_mm(offset_mm=2.0, field_half_angle_deg=90.0)


def test_tables():
    grey = {"wavelength_nm": [350.0, 1100.0], "value": [0.3, 0.3]}
    plane = Target(distance_mm=20.0, reflectance=grey)
    assert (plane.form, plane.medium, plane.near_mm) == ("plane", "air", None)
    assert Target(form="bore", bore_mm=10.0, distance_mm=20.0, reflectance=grey).bore_mm == 10.0
    for wrong, said in (
        ({"form": "bore"}, "a bore needs it"),
        ({"bore_mm": 10.0}, "only a bore has one"),
        ({"form": "bore", "bore_mm": 10.0, "tilt_deg": 5.0}, "only a plane can be tilted"),
        ({"reflectance": {"wavelength_nm": [350.0, 1100.0], "value": [0.3, 1.3]}}, "it must be at most 1"),
        ({"medium": "mud"}, "medium"),
        ({"specular_share": 1.2}, "specular_share"),
    ):
        with pytest.raises(ValidationError, match=said):
            Target(**{"distance_mm": 20.0, "reflectance": grey} | wrong)
    with pytest.raises(ValidationError):
        Cover(index=0.9, thickness_mm=0.5)
