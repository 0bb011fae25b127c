"""Tapers, tilted faces and lossy walls, each by another route."""

import numpy as np
import pytest

from optics.guide.ends import reflection_transmission, tapered_na, tilt_deviation_deg, tilted_face_transmission
from optics.guide.fiber import bounces_per_m
from optics.spec import OutOfRange

CASE = {"length_m": 2.0, "core_um": 50.0, "core_index": 1.62}


def test_a_taper_and_back_is_no_taper():
    there = tapered_na(na=0.3, from_mm=2.0, to_mm=3.0)
    assert tapered_na(na=there, from_mm=3.0, to_mm=2.0) == pytest.approx(0.3)


def test_tilt_follows_snell_ray_by_ray():
    for tilt in (0.0, 5.0, 20.0):
        turned = tilt_deviation_deg(core_index=1.62, outside_index=1.0, tilt_deg=tilt)
        assert np.sin(np.deg2rad(tilt + turned)) == pytest.approx(1.62 * np.sin(np.deg2rad(tilt)))


def test_few_losses_follow_the_mean_number_of_reflections():
    """For a small loss 1 - T is the loss times the mean count; over a filled cone that is the closed form."""
    sine2 = (np.arange(4000) + 0.5) / 4000 * 0.57**2
    left = reflection_transmission(loss_fraction=1e-9, ray_na=np.sqrt(sine2), **CASE).mean()
    count = bounces_per_m(na=0.57, core_index=1.62, core_um=50.0) * 2.0
    assert (1 - left) / 1e-9 == pytest.approx(float(count), rel=2e-3)


def test_against_rays_with_random_chords():
    rng = np.random.default_rng(7)
    place = np.sqrt(rng.random(400_000))
    turn = rng.random(400_000) * 2 * np.pi
    half_chord = np.sqrt(1 - (place * np.sin(turn)) ** 2)  # of the chord through a random point in a random direction
    sine = 0.4 / 1.62
    across = 2.0 * sine / np.sqrt(1 - sine**2) / 50e-6 / half_chord
    traced = np.mean((1 - 2e-5) ** across)
    assert reflection_transmission(loss_fraction=2e-5, ray_na=0.4, **CASE) == pytest.approx(traced, abs=1e-3)


def test_no_loss_and_axial_rays_lose_nothing():
    assert reflection_transmission(loss_fraction=0.0, ray_na=0.5, **CASE) == pytest.approx(1.0)
    assert reflection_transmission(loss_fraction=0.01, ray_na=0.0, **CASE) == pytest.approx(1.0)


@pytest.mark.parametrize("wrong", [{"loss_fraction": -0.1, "ray_na": 0.1}, {"loss_fraction": 0.1, "ray_na": 1.7}])
def test_refusals(wrong):
    with pytest.raises(OutOfRange):
        reflection_transmission(**wrong, **CASE)
    with pytest.raises(OutOfRange, match="axial ray"):
        tilt_deviation_deg(core_index=1.8, outside_index=1.0, tilt_deg=40.0)


def test_a_tilted_face_without_tilt_is_a_face():
    from optics.media.face import ray_face_transmission

    for na in (0.0, 0.3, 0.57):
        flat = ray_face_transmission(core_index=1.62, outside_index=1.0, ray_na=na)
        assert tilted_face_transmission(core_index=1.62, outside_index=1.0, ray_na=na, tilt_deg=0.0) == pytest.approx(
            flat, abs=1e-12
        )


def test_a_tilted_face_reflects_steep_rays_wholly():
    steep = {"core_index": 1.62, "outside_index": 1.0, "ray_na": 0.57}
    assert tilted_face_transmission(**steep, tilt_deg=25.0) < tilted_face_transmission(**steep, tilt_deg=10.0) - 0.02
