import numpy as np
import pytest

from optics.image.lattice import resolution_limit_lp_mm
from optics.spec import OutOfRange
from optics.viewer import camera

SENSOR = {"quantum_efficiency": 0.6, "dark_noise_e": 3.0, "gain_dn_e": 0.1}


def test_signal_to_noise_against_drawing_pictures():
    """Independent route: Poisson electrons, normal dark noise, rounding to output steps."""
    rng = np.random.default_rng(2)
    for photons in (30.0, 300.0):
        electrons = rng.poisson(0.6 * photons, 400_000) + rng.normal(0, 3.0, 400_000)
        steps = np.rint(electrons * 0.1)
        drawn = 0.6 * photons * 0.1 / steps.std()
        assert camera.signal_to_noise(photons=photons, **SENSOR) == pytest.approx(drawn, rel=0.01)


def test_shot_noise_limits_bright_pixels_and_the_well_limits_all():
    bright = camera.signal_to_noise(photons=1e8, **SENSOR)
    assert bright == pytest.approx(np.sqrt(0.6e8), rel=1e-5)
    assert camera.signal_to_noise(photons=0.0, **SENSOR) == 0.0
    assert camera.greatest_snr(full_well_e=10_000.0) == 100.0


def test_a_cell_of_pixels_and_cores():
    one = camera.signal_to_noise(photons=500.0, **SENSOR)
    nine = camera.cell_signal_to_noise(
        photons=4500.0, pixel_count=9.0, core_count=1.0, transmission_spread=0.0, **SENSOR
    )
    assert nine == pytest.approx(3 * one)
    uneven = camera.cell_signal_to_noise(
        photons=1e9, pixel_count=9.0, core_count=np.array([1.0, 4.0, 16.0]), transmission_spread=0.05, **SENSOR
    )
    assert uneven == pytest.approx([20.0, 40.0, 80.0], rel=1e-3)


def test_uneven_cores_against_drawing_cells():
    """Independent route: cells of 7 cores of random throughput, shot noise, 12 dark pixels."""
    rng = np.random.default_rng(4)
    cores = 2000.0 / 7 * (1 + 0.08 * rng.standard_normal((200_000, 7)))
    cell = rng.poisson(0.6 * cores.clip(0)).sum(axis=1) + rng.normal(0, np.sqrt(12 * (9 + 1 / 0.12)), 200_000)
    got = camera.cell_signal_to_noise(
        photons=2000.0, pixel_count=12.0, core_count=7.0, transmission_spread=0.08, **SENSOR
    )
    assert got == pytest.approx(0.6 * 2000.0 / cell.std(), rel=0.01)


def test_exposure_is_short_in_light_and_longest_in_the_dark():
    given = {"quantum_efficiency": 0.5, "full_well_e": 10_000.0, "longest_exposure_s": 0.04}
    times = camera.exposure_s(second_photons=np.array([0.0, 1e3, 2.5e5, 1e6, 1e9]), **given)
    assert times == pytest.approx([0.04, 0.04, 0.04, 0.01, 1e-5])
    filled = 0.5 * 1e9 * times[-1]
    assert filled == pytest.approx(5_000.0)


def test_exposure_for_a_wanted_signal_inverts_the_noise():
    rate = np.array([1e4, 1e5, 1e7])
    for wanted in (3.0, 24.0, 80.0):
        time = camera.signal_exposure_s(second_photons=rate, wanted_snr=wanted, **SENSOR)
        assert np.allclose(camera.signal_to_noise(photons=rate * time, **SENSOR), wanted, rtol=1e-12)
    assert camera.signal_exposure_s(second_photons=0.0, wanted_snr=5.0, **SENSOR) == np.inf


def test_photons_carry_the_energy():
    photons = camera.pixel_photons(irradiance_w_m2=2.0, wavelength_nm=500.0, pixel_um=10.0, exposure_s=0.5)
    joule = 1.602176634e-19 * 1239.841984 / 500.0
    assert photons * joule == pytest.approx(2.0 * 1e-10 * 0.5, rel=1e-9)


def test_photons_of_white_light_per_lux():
    """Published arithmetic for illuminant LED-B3: 8,632 photons on one um2 in one lux second, 400-700 nm."""
    colour = pytest.importorskip("colour")
    nm = np.arange(380.0, 781.0, 5.0)
    power = colour.SDS_ILLUMINANTS["LED-B3"].copy().align(colour.SpectralShape(380, 780, 5)).values
    seen = colour.SDS_LEFS["CIE 1924 Photopic Standard Observer"].copy().align(colour.SpectralShape(380, 780, 5)).values
    per_lux = power / (683.002 * np.trapezoid(seen * power, nm))
    inside = (nm >= 400) & (nm <= 700)
    photons = camera.pixel_photons(irradiance_w_m2=per_lux, wavelength_nm=nm, pixel_um=1.0, exposure_s=1.0)
    assert np.trapezoid(photons[inside], nm[inside]) == pytest.approx(8632, rel=0.003)


def test_no_beat_from_the_least_pixels_per_pitch_on_and_the_slowest_at_half_of_it():
    turns = np.linspace(0.0, 90.0, 31)
    for pixels in (camera.LEAST_PIXELS_PER_PITCH, 2.5, 4.0):
        assert (camera.beat_lp_mm(pitch_um=10.0, pixels_per_pitch=pixels + 1e-9, turn_deg=turns) == 0).all()
    lattice = float(resolution_limit_lp_mm(pitch_um=10.0, direction_deg=30.0))
    near_worst = camera.beat_lp_mm(pitch_um=10.0, pixels_per_pitch=1.02 * camera.WORST_PIXELS_PER_PITCH, turn_deg=0.0)
    assert 0 < near_worst < 0.1 * lattice
    coarse = camera.beat_lp_mm(pitch_um=10.0, pixels_per_pitch=1.8, turn_deg=0.0)
    assert near_worst < coarse


def test_the_beat_is_seen_in_a_sampled_honeycomb():
    """Independent route: one order of the honeycomb sampled on pixels; the strongest line of its spectrum."""
    pixels = 1.6
    first = 2 / np.sqrt(3)  # per pitch
    count, step = 4096, 1 / pixels
    samples = np.cos(2 * np.pi * first * np.arange(count) * step)
    line = np.argmax(np.abs(np.fft.rfft(samples * np.hanning(count)))) / (count * step)
    # the order along the rows of pixels, 90 degrees from a row of cores
    beat = camera.beat_lp_mm(pitch_um=10.0, pixels_per_pitch=pixels, turn_deg=90.0)
    assert beat <= line * 100 * (1 + 1e-3)
    assert line * 100 == pytest.approx(pixels * 100 - first * 100, rel=1e-3)


def test_pixels_per_pitch_and_the_share_of_the_cone():
    assert camera.pixels_per_pitch(pitch_um=8.0, pixel_um=3.45, relay_magnification=1.0) == pytest.approx(
        2.319, abs=1e-3
    )
    shares = camera.relay_fraction(relay_na=np.array([0.1, 0.25, 0.5]), cone_sine=0.25)
    assert shares == pytest.approx([0.16, 1.0, 1.0])
    assert camera.frame_hz(exposure_s=0.02) == pytest.approx(50.0)


def test_rose_disc_against_counting_quanta():
    """Independent route: draws of the quanta in a disc and in as large a surround; signal over noise is k."""
    rng = np.random.default_rng(6)
    density, contrast = 1.5, 0.2
    disc = camera.rose_disc_um(contrast=contrast, threshold_snr=5.0, quanta_per_um2=density)
    area = np.pi / 4 * disc**2
    assert contrast * density * area / rng.poisson(density * area, 200_000).std() == pytest.approx(5.0, rel=0.01)


def test_refusals():
    with pytest.raises(OutOfRange, match="photons is -1; it must be 0 or more"):
        camera.signal_to_noise(photons=-1.0, **SENSOR)
    with pytest.raises(OutOfRange, match=r"quantum_efficiency is 1\.2; it must be from 0 to 1"):
        camera.signal_to_noise(photons=1.0, **{**SENSOR, "quantum_efficiency": 1.2})
    with pytest.raises(ValueError, match="relay_na"):
        camera.Camera(
            pixel_um=3.0,
            full_well_e=1e4,
            dark_noise_e=2.0,
            gain_dn_e=0.4,
            quantum_efficiency=0.6,
            relay_magnification=1.0,
            relay_na=1.0,
            longest_exposure_s=0.03,
            threshold_snr=5.0,
        )
