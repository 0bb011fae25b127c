"""Attenuation over a path, and its growth in thin fibers."""

import numpy as np
import pytest

from optics.media.loss import attenuation_transmission, wall_scaled_loss_db_m
from optics.spec import OutOfRange
from optics.units import transmission_from_db


def test_two_lengths_in_a_row_are_one_length():
    loss, stretch = np.linspace(0.0, 3.0, 7), np.array([[1.0], [1.15]])
    parts = [attenuation_transmission(loss_db_m=loss, length_m=m, stretch=stretch) for m in (0.7, 1.1, 1.8)]
    assert parts[0] * parts[1] == pytest.approx(parts[2], rel=1e-14)
    assert parts[2].shape == (2, 7)


def test_it_is_the_decibel_law_and_falls_with_each_of_the_three():
    assert attenuation_transmission(loss_db_m=0.25, length_m=2.0, stretch=1.03) == pytest.approx(
        transmission_from_db(0.515), rel=1e-14
    )
    assert attenuation_transmission(loss_db_m=0.0, length_m=5.0, stretch=1.2) == 1.0
    assert attenuation_transmission(loss_db_m=3.0, length_m=0.0, stretch=1.2) == 1.0
    base = {"loss_db_m": 0.3, "length_m": 2.0, "stretch": 1.05}
    for name in base:
        assert attenuation_transmission(**{**base, name: base[name] * 1.1}) < attenuation_transmission(**base)


def test_cone_mean_of_a_filled_cone():
    """n 1.62, NA 0.57, 0.5 dB/m, 2 m: 0.7883 against 0.7943 on axis. Source: independent_calculation."""
    square = (np.arange(20000) + 0.5) / 20000 * (0.57 / 1.62) ** 2
    through = attenuation_transmission(loss_db_m=0.5, length_m=2.0, stretch=1 / np.sqrt(1 - square))
    assert through.mean() == pytest.approx(0.7883, abs=5e-5)


def test_wall_loss_meets_the_measured_fiber_and_the_bulk():
    known = {"bulk_db_m": 0.05, "reference_db_m": 0.45, "reference_um": 70.0}
    assert wall_scaled_loss_db_m(**known, core_um=70.0) == pytest.approx(0.45)
    assert wall_scaled_loss_db_m(**known, core_um=1e9) == pytest.approx(0.05, abs=1e-6)
    thin = wall_scaled_loss_db_m(**known, core_um=np.array([15.0, 30.0, 60.0]))
    assert (np.diff(thin) < 0).all()
    # The excess over bulk goes as one over the diameter
    assert (thin - 0.05) * np.array([15.0, 30.0, 60.0]) == pytest.approx(0.4 * 70.0)


def test_refusals():
    good = {"loss_db_m": 0.3, "length_m": 2.0, "stretch": 1.05}
    for name, bad, allowed in (
        ("loss_db_m", -0.1, "0 or more"),
        ("length_m", -1.0, "0 or more"),
        ("stretch", 0.9, "1 or more"),
    ):
        with pytest.raises(OutOfRange, match=f"{name} is {bad:g}; it must be {allowed}"):
            attenuation_transmission(**{**good, name: bad})
    with pytest.raises(OutOfRange, match=r"reference_db_m is 0\.01; it must be not below bulk_db_m"):
        wall_scaled_loss_db_m(bulk_db_m=0.05, reference_db_m=0.01, reference_um=70.0, core_um=30.0)
    with pytest.raises(OutOfRange, match="core_um is 0; it must be above 0"):
        wall_scaled_loss_db_m(bulk_db_m=0.05, reference_db_m=0.45, reference_um=70.0, core_um=0.0)
