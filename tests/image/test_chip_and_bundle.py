import numpy as np
import pytest

from optics.image import chip
from optics.image.bundle import ImageBundle, exit_luminance_cd_m2
from optics.image.lattice import square_limit_lp_mm
from optics.spec import Curve, OutOfRange

CURVE = Curve(wavelength_nm=(400.0, 700.0), value=(0.5, 0.2))
GOOD = {
    "pitch_um": 10.0,
    "core_um": 7.5,
    "na": 0.5,
    "core_index": 1.6,
    "core_spread_fraction": 0.03,
    "attenuation": CURVE,
    "allowed_strain": 0.002,
    "highest_temperature_c": 120.0,
    "diameter_mm": 1.0,
    "length_m": 1.0,
}


def test_a_bundle_needs_no_more_than_its_sizes_glass_and_limits():
    bundle = ImageBundle(**GOOD)
    assert bundle.veil_ratio == 0.0
    assert not bundle.one_rod
    for name in GOOD:
        with pytest.raises(ValueError, match="Field required"):
            ImageBundle(**{key: value for key, value in GOOD.items() if key != name})


@pytest.mark.parametrize(
    ("name", "value"), [("pitch_um", 0.0), ("na", 1.6), ("core_spread_fraction", 0.6), ("length_m", -1.0)]
)
def test_a_bundle_refuses_the_impossible(name, value):
    with pytest.raises(ValueError, match=name):
        ImageBundle(**{**GOOD, name: value})


def test_luminance_is_kept_by_a_bundle_that_loses_nothing_and_keeps_the_cone():
    """A matte source of L fills the cone: E = pi L sin^2 at the entrance, so L comes out again; never more."""
    face = np.pi * 500.0 * 0.3**2
    assert exit_luminance_cd_m2(face_lux=face, transmission=1.0, cone_sine=0.3) == pytest.approx(500.0)
    widened = exit_luminance_cd_m2(face_lux=face, transmission=1.0, cone_sine=np.array([0.3, 0.4, 0.5]))
    assert (np.diff(widened) < 0).all()
    with pytest.raises(OutOfRange, match="cone_sine is 0; it must be above 0"):
        exit_luminance_cd_m2(face_lux=face, transmission=1.0, cone_sine=0.0)


def test_a_mosaic_halves_the_sampling_of_color():
    grey, color = (
        square_limit_lp_mm(pitch_um=chip.sampling_um(pixel_um=1.5, color_filter=mosaic), direction_deg=0.0)
        for mosaic in (False, True)
    )
    assert grey == pytest.approx(2 * color)
    assert grey == pytest.approx(1000 / 3.0)


def test_the_diagonal_of_the_chip():
    assert chip.diagonal_mm(columns=np.array([300, 400]), rows=np.array([400, 300]), pixel_um=2.0) == pytest.approx(
        [1.0, 1.0]
    )
    with pytest.raises(OutOfRange, match="pixel_um is 0"):
        chip.diagonal_mm(columns=3, rows=4, pixel_um=0.0)


def test_a_chip_counts_its_pixels_in_whole_numbers():
    good = {
        "pixel_um": 1.75,
        "columns": 400,
        "rows": 400,
        "full_well_e": 6000.0,
        "dark_noise_e": 4.0,
        "gain_dn_e": 0.2,
        "quantum_efficiency": 0.5,
        "longest_exposure_s": 0.033,
        "threshold_snr": 5.0,
    }
    assert chip.Chip(**good).color_filter
    with pytest.raises(ValueError, match="valid integer"):
        chip.Chip(**{**good, "columns": 400.5})
