import numpy as np
import pytest

from optics.image import contrast
from optics.spec import OutOfRange


def test_disc_against_averaging_over_a_disc():
    """Independent route: the mean of cos over strips of the disc."""
    nodes, weights = np.polynomial.legendre.leggauss(200)
    turn = np.pi / 2 * nodes  # x = sin(turn)/2 in diameters: the strip's length is cos(turn)
    x, w = 0.5 * np.sin(turn), weights * np.cos(turn) ** 2
    at = np.array([0.0, 1e-6, 10.0, 57.735, 120.0, 163.0, 250.0, 600.0])
    averaged = [(w * np.cos(2 * np.pi * 7.5e-3 * f * x)).sum() / w.sum() for f in at]
    assert np.allclose(contrast.disc_mtf(diameter_um=7.5, frequency_lp_mm=at), averaged, atol=1e-12)


def test_disc_and_pixel_turn_the_contrast_beyond_their_zeros():
    assert contrast.disc_mtf(diameter_um=10.0, frequency_lp_mm=100 * 3.8317 / np.pi * 1.1) < 0
    assert contrast.pixel_mtf(pixel_um=10.0, frequency_lp_mm=150.0) < 0
    assert contrast.disc_mtf(diameter_um=0.0, frequency_lp_mm=1e4) == 1.0
    assert contrast.motion_mtf(shift_um=0.0, frequency_lp_mm=1e4) == 1.0


def test_twice_a_disc_at_the_limit():
    once = contrast.disc_mtf(diameter_um=7.5, frequency_lp_mm=1000 / (np.sqrt(3) * 10))
    assert once**2 == pytest.approx(0.618, abs=5e-4)


def _pupil_mtf(phase, shift, size=1201):
    """Independent route: autocorrelation of a pupil sampled on a grid; phase(x, y) in waves, shift in diameters."""
    axis = np.linspace(-1.0, 1.0, size)
    x, y = np.meshgrid(axis, axis)

    def pupil(x, y):
        return np.where(x * x + y * y <= 1, np.exp(2j * np.pi * phase(x, y)), 0)

    return abs((pupil(x + shift, y) * pupil(x - shift, y).conj()).sum() / (x * x + y * y <= 1).sum())


def test_diffraction_against_the_autocorrelation_of_the_pupil():
    for part in (0.1, 0.35, 0.5, 0.8):
        formula = contrast.diffraction_mtf(f_number=5.0, wavelength_nm=500.0, frequency_lp_mm=part * 400.0)
        assert formula == pytest.approx(_pupil_mtf(lambda x, y: 0 * x, part), abs=2e-3)
    assert contrast.diffraction_mtf(f_number=5.0, wavelength_nm=500.0, frequency_lp_mm=500.0) == 0.0
    assert contrast.diffraction_mtf(f_number=5.0, wavelength_nm=500.0, frequency_lp_mm=0.0) == 1.0


KINDS = (
    lambda r2, x, y: np.sqrt(3) * (2 * r2 - 1),
    lambda r2, x, y: np.sqrt(5) * (6 * r2 * r2 - 6 * r2 + 1),
    lambda r2, x, y: np.sqrt(8) * (3 * r2 - 2) * x,
    lambda r2, x, y: np.sqrt(8) * (3 * r2 - 2) * y,
    lambda r2, x, y: np.sqrt(6) * (x * x - y * y),
    lambda r2, x, y: np.sqrt(6) * 2 * x * y,
    lambda r2, x, y: np.sqrt(8) * (x**3 - 3 * x * y * y),
    lambda r2, x, y: np.sqrt(7) * (20 * r2**3 - 30 * r2**2 + 12 * r2 - 1),
    lambda r2, x, y: np.sqrt(10) * (4 * r2 - 3) * (x * x - y * y),
)


@pytest.mark.parametrize("waves", [0.05, 0.07, 0.1])
def test_the_aberration_factor_is_the_mean_of_computed_lenses(waves):
    """Defocus, spherical, coma, astigmatism, trefoil and two of the next order, by autocorrelation of the pupil."""
    for part in (0.1, 0.2, 0.4, 0.7):
        ideal = _pupil_mtf(lambda x, y: 0 * x, part, 301)
        real = [
            _pupil_mtf(lambda x, y: waves * kind(x * x + y * y, x, y), part, 301) / ideal  # noqa: B023
            for kind in KINDS
        ]
        factor = contrast.aberration_mtf(
            wavefront_error_nm=waves * 500.0, f_number=5.0, wavelength_nm=500.0, frequency_lp_mm=part * 400.0
        )
        assert factor == pytest.approx(np.mean(real), abs=0.5 * waves)
        assert min(real) - 0.01 < factor < max(real) + 0.01


def test_no_aberration_changes_nothing_and_coarse_patterns_hardly_feel_any():
    at = {"f_number": 5.0, "wavelength_nm": 550.0}
    assert contrast.aberration_mtf(wavefront_error_nm=0.0, frequency_lp_mm=50.0, **at) == 1.0
    assert contrast.aberration_mtf(wavefront_error_nm=90.0, frequency_lp_mm=1.0, **at) > 0.99
    with pytest.raises(OutOfRange, match="wavefront_error_nm is -1; it must be 0 or more"):
        contrast.aberration_mtf(wavefront_error_nm=-1.0, frequency_lp_mm=1.0, **at)


def test_geometric_defocus_times_diffraction_is_cautious_and_meets_the_wave_result_for_strong_defocus():
    """Independent route: a pupil with a quadratic phase. At a quarter wave the product is cautious."""
    wavelength_um, n = 0.5, 5.0
    for waves, tolerance in ((0.25, 0.12), (2.0, 0.06)):
        # edge phase W of a defocus dz: W = dz/(8 N^2); blur disc dz/N
        blur_um = waves * wavelength_um * 8.0 * n * n / n
        for part in (0.05, 0.15, 0.3):
            wave = _pupil_mtf(lambda x, y: waves * (x * x + y * y), part, 801)  # noqa: B023
            disc = contrast.disc_mtf(diameter_um=blur_um, frequency_lp_mm=part * 400.0)
            product = disc * contrast.diffraction_mtf(f_number=n, wavelength_nm=500.0, frequency_lp_mm=part * 400.0)
            assert abs(product) == pytest.approx(wave, abs=tolerance)
            if waves < 1:
                assert product <= wave + 5e-3


def test_a_veil_is_what_a_bright_floor_does_to_a_grating():
    x = np.linspace(0, 2 * np.pi, 1001)
    lit = 1 + 0.6 * np.cos(x) + 0.25
    measured = (lit.max() - lit.min()) / (lit.max() + lit.min())
    assert 0.6 * contrast.veil_contrast(veil_ratio=0.25) == pytest.approx(measured)


def test_the_honeycomb_filter_leaves_what_it_says_at_the_honeycomb():
    first = 2000 / (np.sqrt(3) * 8.0)
    left = contrast.honeycomb_filter_mtf(
        residual_contrast=0.02, pitch_um=8.0, frequency_lp_mm=np.array([0.0, first / 2, first])
    )
    assert left == pytest.approx([1.0, 0.02**0.25, 0.02])
    with pytest.raises(OutOfRange, match="residual_contrast is 0; it must be above 0"):
        contrast.honeycomb_filter_mtf(residual_contrast=0.0, pitch_um=8.0, frequency_lp_mm=1.0)


def test_bar_targets_invert():
    group, element = np.meshgrid(np.arange(-2, 8), np.arange(1, 7))
    found = contrast.three_bar_element(frequency_lp_mm=contrast.three_bar_lp_mm(group=group, element=element))
    assert (found.group == group).all()
    assert (found.element == element).all()
    with pytest.raises(OutOfRange, match="element is 7; it must be from 1 to 6"):
        contrast.three_bar_lp_mm(group=0, element=7)
