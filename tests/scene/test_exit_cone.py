"""The exit cone: shares, edges, and the NA that holds a share of the flux."""

import numpy as np
import pytest

from optics.scene.exit_cone import ExitCone, cone_na_holding
from optics.spec import OutOfRange


def test_a_uniform_cone_holds_its_flux_evenly_in_sine_squared():
    for share in (0.1, 0.5, 0.95, 1.0):
        assert ExitCone.uniform(0.5).na_holding(share) == pytest.approx(0.5 * np.sqrt(share), rel=1e-12)


def test_split_bins_change_nothing():
    whole, split = ExitCone((0.0, 0.1, 0.3), (0.5, 0.5)), ExitCone((0.0, 0.05, 0.1, 0.2, 0.3), (0.25, 0.25, 0.25, 0.25))
    for share in np.linspace(0.05, 1.0, 20):
        assert whole.na_holding(share) == pytest.approx(split.na_holding(share), rel=1e-9)


def test_holding_inverts_the_cumulated_flux():
    rng = np.random.default_rng(2)
    edges = np.concatenate([np.zeros((6, 1)), np.cumsum(rng.uniform(0.001, 0.02, (6, 30)), axis=1)], axis=1)
    flux = rng.uniform(0, 3, (6, 30))
    for share in (0.05, 0.5, 0.95):
        na = cone_na_holding(sine2_edges=edges, flux=flux, share=share)
        held = [np.interp(n * n, e, np.append(0, np.cumsum(f))) / f.sum() for n, e, f in zip(na, edges, flux)]
        np.testing.assert_allclose(held, share, rtol=1e-12)


def test_empty_bins_and_no_flux():
    edges = np.array([0.0, 0.1, 0.2, 0.3])
    assert float(cone_na_holding(sine2_edges=edges, flux=np.array([1.0, 0.0, 0.0]), share=1.0)) == np.sqrt(0.1)
    assert float(cone_na_holding(sine2_edges=edges, flux=np.zeros(3), share=0.95)) == 0.0
    flux = np.array([[0.0, 1.0, 0.0], [0.0, 0.0, 0.0], [1.0, 1.0, 2.0]])
    np.testing.assert_allclose(
        cone_na_holding(sine2_edges=edges, flux=flux, share=0.5), [np.sqrt(0.15), 0.0, np.sqrt(0.2)]
    )
    assert ExitCone((0.0, 0.1, 0.2, 0.3), (0.0, 1.0, 0.0)).lit_sine2_share == (0.1, 0.2)


@pytest.mark.parametrize(
    ("make", "sentence"),
    [
        (lambda: ExitCone.uniform(0.0), "na is 0; it must be above 0 and at most 1"),
        (lambda: ExitCone.uniform(1.2), "na is 1.2"),
        (lambda: ExitCone.uniform(float("nan")), "na is nan"),
        (lambda: ExitCone.binned(0.5, [0.0, 0.0]), "the sum of flux_share is 0"),
        (lambda: ExitCone((0.0, 0.2, 0.1), (0.5, 0.5)), "the rise of sine2_edges"),
        (lambda: ExitCone((0.0, 0.2), (0.5, 0.5)), "the number of flux_share values is 2; it must be 1"),
        (lambda: ExitCone((0.0, 0.2), (0.9,)), "the sum of flux_share is 0.9; it must be 1"),
        (lambda: ExitCone.uniform(0.5).na_holding(0.0), "share is 0"),
    ],
)
def test_refusals(make, sentence):
    with pytest.raises(OutOfRange, match=sentence):
        make()
