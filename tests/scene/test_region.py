"""The part of a disc that a cone lets a point see, against plain integration along the cone's circle."""

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optics.scene.region import disc_view


def integrated(z, d, a, s, count=20001):
    """Both factors by the midpoint rule over the radius of the cone's circle, in pieces between its kinks."""
    rho = z * np.sqrt(s / (1 - s))
    ends = [0.0, min(abs(d - a), rho), min(d + a, rho), rho]
    facing = sideways = 0.0
    for low, high in pairwise(ends):
        # Roots at both ends of a piece: substitute r = middle - half cos(x).
        x = (np.arange(count) + 0.5) / count * np.pi
        r = (low + high) / 2 - (high - low) / 2 * np.cos(x)
        weight = (high - low) / 2 * np.sin(x) * np.pi / count
        arc = np.arccos(np.clip((d * d + r * r - a * a) / np.maximum(2 * d * r, 1e-300), -1, 1))
        facing += np.sum(weight * 2 * arc * r * z * z / (r * r + z * z) ** 2) / np.pi
        sideways += np.sum(weight * 2 * np.sin(arc) * r * r * z / (r * r + z * z) ** 2) / (np.pi * d)
    return facing, sideways


lengths = st.floats(0.05, 20.0)


@settings(max_examples=60, deadline=None)
@given(z=lengths, d=lengths, a=lengths, s=st.floats(0.01, 0.95))
def test_both_factors(z, d, a, s):
    seen = disc_view(height_mm=z, offset_mm=d, radius_mm=a, cone_sine2_share=[s], lateral=True)
    facing, sideways = integrated(z, d, a, s)
    assert seen.facing_factor[0] == pytest.approx(facing, rel=1e-6, abs=1e-9)
    assert seen.lateral_per_mm[0] == pytest.approx(sideways, rel=1e-6, abs=1e-8)


@settings(max_examples=60, deadline=None)
@given(z=lengths, d=st.floats(0.0, 20.0), a=lengths)
def test_more_cone_never_shows_less(z, d, a):
    s = np.linspace(0.0, 1.0, 200)
    seen = disc_view(height_mm=z, offset_mm=d, radius_mm=a, cone_sine2_share=s, lateral=False).facing_factor
    assert np.all(np.diff(seen) >= -1e-12)
    assert np.all(seen <= s + 1e-12)


def test_limits():
    """Nothing behind, nothing of a disc without size, all of the cone in front of a wide disc."""
    s = np.array([0.1, 0.5])
    for z, a, want in ((-1.0, 1.0, 0.0), (0.0, 1.0, 0.0), (1.0, 0.0, 0.0), (1.0, 100.0, s)):
        seen = disc_view(height_mm=z, offset_mm=0.3, radius_mm=a, cone_sine2_share=s, lateral=True)
        np.testing.assert_allclose(seen.facing_factor, want * np.ones(2), atol=1e-15)


def test_the_middle_of_a_disc_is_no_special_place():
    """The lateral factor over the offset has a limit on the axis."""
    d = np.array([0.0, 1e-9, 1e-6, 1e-3])
    seen = disc_view(height_mm=2.0, offset_mm=d, radius_mm=0.5, cone_sine2_share=[0.9], lateral=True)
    np.testing.assert_allclose(seen.lateral_per_mm[:, 0], seen.lateral_per_mm[0, 0], rtol=1e-6)
    assert seen.lateral_per_mm[0, 0] > 0
