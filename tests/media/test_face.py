"""Fresnel: closed limits, a second route by complex admittances, and adaptive integration."""

import numpy as np
import pytest
from scipy.integrate import quad

from optics.media.face import face_transmission, fresnel_reflectance, ray_face_transmission
from optics.spec import OutOfRange


def by_admittance(from_index, to_index, sine):
    """Mean reflectance of s and p light from the tilted admittances of both sides."""
    inside = np.sqrt(1 - sine**2 + 0j)
    outside = np.sqrt(1 - (from_index * sine / to_index) ** 2 + 0j)
    s = (from_index * inside - to_index * outside) / (from_index * inside + to_index * outside)
    p = (from_index / inside - to_index / outside) / (from_index / inside + to_index / outside)
    return (abs(s) ** 2 + abs(p) ** 2) / 2


@pytest.mark.parametrize(("one", "other"), [(1.0, 1.5), (1.62, 1.0), (1.8, 1.333), (1.333, 1.4585)])
def test_reflectance_against_admittances_also_beyond_the_critical_angle(one, other):
    sine = np.linspace(0.0, 0.999, 400)
    got = fresnel_reflectance(from_index=one, to_index=other, sine=sine)
    assert got == pytest.approx(by_admittance(one, other, sine), abs=1e-12)


def test_normal_and_brewster_and_grazing():
    n = 1.5
    normal = fresnel_reflectance(from_index=1.0, to_index=n, sine=0.0)
    assert normal == pytest.approx(((n - 1) / (n + 1)) ** 2, rel=1e-14)
    # At Brewster's angle only s light comes back: half of ((n^2 - 1)/(n^2 + 1))^2
    brewster = fresnel_reflectance(from_index=1.0, to_index=n, sine=n / np.hypot(1, n))
    assert brewster == pytest.approx(((n**2 - 1) / (n**2 + 1)) ** 2 / 2, rel=1e-12)
    assert fresnel_reflectance(from_index=1.0, to_index=n, sine=1.0) == pytest.approx(1.0)
    assert fresnel_reflectance(from_index=n, to_index=1.0, sine=0.9) == 1.0


@pytest.mark.parametrize("na", [0.0, 0.2, 0.7, 0.99])
def test_a_face_is_the_same_both_ways(na):
    there = ray_face_transmission(core_index=1.62, outside_index=1.0, ray_na=na)
    back = fresnel_reflectance(from_index=1.0, to_index=1.62, sine=na)
    assert there == pytest.approx(1 - back, rel=1e-13)
    assert there == pytest.approx(1 - fresnel_reflectance(from_index=1.62, to_index=1.0, sine=na / 1.62), rel=1e-13)


@pytest.mark.parametrize(
    ("core_index", "na", "two"), [(1.492, 0.50, 0.9227), (1.62, 0.57, 0.8893), (1.80, 0.86, 0.8239)]
)
def test_two_faces_of_a_guide_in_air(core_index, na, two):
    """Source: independent_calculation."""
    assert face_transmission(core_index=core_index, outside_index=1.0, na=na) ** 2 == pytest.approx(two, abs=5e-5)


@pytest.mark.parametrize(
    ("core", "outside", "na"),
    [
        (1.492, 1.0, 0.5),
        (1.8, 1.0, 0.9999),
        (1.62, 1.333, 0.66),
        (1.333, 1.62, 0.66),
        (1.5, 1.499, 1.4),
        (1.6, 1.4, 1.4),
    ],
)
def test_cone_mean_against_adaptive_integration(core, outside, na):
    def passed(square):
        return float(ray_face_transmission(core_index=core, outside_index=outside, ray_na=np.sqrt(square)))

    mean = quad(passed, 0.0, na**2, epsabs=1e-12, epsrel=1e-12, limit=400)[0] / na**2
    assert face_transmission(core_index=core, outside_index=outside, na=na) == pytest.approx(mean, abs=1e-9)


def test_limits_of_the_cone_mean():
    assert face_transmission(core_index=1.5, outside_index=1.5, na=1.3) == pytest.approx(1.0, abs=1e-14)
    narrow = face_transmission(core_index=1.5, outside_index=1.0, na=1e-6)
    assert narrow == pytest.approx(0.96, abs=1e-12)
    wide = face_transmission(core_index=1.5, outside_index=1.0, na=np.linspace(0.1, 1.0, 30))
    assert (np.diff(wide) < 0).all()


def test_scalar_equals_array_element():
    core, na = np.array([[1.492], [1.62], [1.80]]), np.array([0.22, 0.5, 0.86])
    got = face_transmission(core_index=core, outside_index=1.0, na=na)
    assert got.shape == (3, 3)
    alone = face_transmission(core_index=1.62, outside_index=1.0, na=0.5)
    assert np.ndim(alone) == 0
    assert alone == pytest.approx(got[1, 1], rel=1e-13)


def test_total_reflection_and_other_refusals():
    with pytest.raises(OutOfRange, match=r"na is 1\.2; it must be at most the lower index of the face"):
        face_transmission(core_index=1.8, outside_index=1.0, na=1.2)
    assert ray_face_transmission(core_index=1.8, outside_index=1.0, ray_na=1.2) == 0.0
    assert ray_face_transmission(core_index=1.8, outside_index=1.0, ray_na=1.0) == 0.0
    with pytest.raises(OutOfRange, match=r"ray_na is 1\.9; it must be core_index at most"):
        ray_face_transmission(core_index=1.8, outside_index=1.0, ray_na=1.9)
    with pytest.raises(OutOfRange, match=r"sine is 1\.1; it must be from 0 to 1"):
        fresnel_reflectance(from_index=1.0, to_index=1.5, sine=1.1)
    with pytest.raises(OutOfRange, match="core_index is 0; it must be above 0"):
        face_transmission(core_index=0.0, outside_index=1.0, na=0.5)
