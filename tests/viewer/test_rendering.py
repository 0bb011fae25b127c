"""The rendered view against closed forms: core share, contrast of gratings, aliases, noise, and what is counted."""

import numpy as np
import pytest

from optics.image.contrast import diffraction_mtf, disc_mtf, honeycomb_filter_mtf
from optics.image.coupled import ring_mtf, rings, table_shares
from optics.image.lattice import alias, core_area_fraction, resolution_limit_lp_mm
from optics.spec import OutOfRange
from optics.units import mm_from_um
from optics.viewer import mosaic as cores_of
from optics.viewer.off_axis import edge_acceptance_ratio, edge_cone, edge_f_number, edge_light_ratio, edge_snr
from optics.viewer.rendering import render, render_chip
from optics.viewer.sensor import read_out, smoothed
from optics.viewer.sight import sight_on_bore, sight_on_plane
from optics.viewer.spots import kept_share, smallest_spot_um

PITCH_UM, CORE_UM, IMAGE_UM, SAMPLES = 10.0, 7.5, 620.0, 384
SAMPLE_UM = 1.1 * IMAGE_UM / SAMPLES
ALONE = np.eye(1, len(rings()))[0]
PLAIN = {
    "light_ratio": np.ones((2, 2)), "sample_um": SAMPLE_UM, "lens_lp_mm": np.array([0.0, 1.0]), "lens_mtf": np.ones(2),
    "defocus_um": 0.0, "image_um": IMAGE_UM, "pitch_um": PITCH_UM, "core_um": CORE_UM, "turn_deg": 0.0, "jitter_share": 0.0,
    "dead_fraction": 0.0, "transmission_spread": 0.0, "exchange_share": ALONE, "veil_ratio": 0.0, "pixel_um": 2.1,
    "rows": 330, "columns": 330, "magnification": 0.05, "lit_level": 1.0, "full_well_e": 1e9, "dark_noise_e": 0.0,
    "gain_dn_e": 1.0, "noise": False, "seed": 1,
}  # fmt: skip
BUNDLE_ONLY = {
    *"image_um pitch_um core_um turn_deg jitter_share dead_fraction transmission_spread exchange_share veil_ratio".split()
}
CHIP = {name: value for name, value in PLAIN.items() if name not in {*BUNDLE_ONLY, "pixel_um", "rows", "columns"}}
FLAT = np.ones((SAMPLES, SAMPLES))


def places_um(count: int, step_um: float) -> tuple[np.ndarray, np.ndarray]:
    at = (np.arange(count) - (count - 1) / 2) * step_um
    return at[None, :], at[:, None]


def grating(
    frequency_lp_mm: float, direction_deg: float, samples: int = SAMPLES, sample_um: float = SAMPLE_UM
) -> np.ndarray:
    x, y = places_um(samples, sample_um)
    turn = np.deg2rad(direction_deg)
    return 0.5 + 0.4 * np.cos(2 * np.pi * mm_from_um(frequency_lp_mm * (x * np.cos(turn) + y * np.sin(turn))))


def window(count: int, pixel_um: float, radius_um: float) -> np.ndarray:
    """A round weight that falls smoothly to 0, so that what lies outside and the harmonics leak nothing."""
    away = np.hypot(*places_um(count, pixel_um)) / radius_um
    return np.where(away < 1, np.cos(np.pi * np.minimum(away, 1) / 2) ** 4, 0.0)


def contrast_of(
    image: np.ndarray, pixel_um: float, frequency_lp_mm: float, direction_deg: float, radius_um: float
) -> float:
    """Modulation of a picture at one frequency, over the 0.8 that the subject had; signed."""
    x, y = places_um(len(image), pixel_um)
    turn, weight = np.deg2rad(direction_deg), window(len(image), pixel_um, radius_um)
    wave = np.exp(-2j * np.pi * mm_from_um(frequency_lp_mm * (x * np.cos(turn) + y * np.sin(turn))))
    return 2 * float((image * weight * wave).sum().real / (image * weight).sum()) / 0.8


# Level


@pytest.mark.parametrize(("core_um", "pixel_um"), [(7.5, 2.1), (7.5, 4.7), (5.0, 1.0), (9.0, 3.3)])
def test_a_flat_field_returns_the_core_share(core_um, pixel_um):
    count = int(1.06 * IMAGE_UM / pixel_um)
    view = render(
        **{**PLAIN, "core_um": core_um, "pixel_um": pixel_um, "rows": count, "columns": count}, reflectance=FLAT
    )
    weight = window(count, pixel_um, 0.45 * IMAGE_UM)
    share = (view.image * weight).sum() / weight.sum()
    assert share == pytest.approx(core_area_fraction(core_um=core_um, pitch_um=PITCH_UM), rel=0.005)
    assert view.pixel_mm == pytest.approx(pixel_um / 1000 / 0.05)


def test_every_disc_keeps_its_area_and_nothing_is_lost_in_drawing():
    view = render(**{**PLAIN, "jitter_share": 0.03, "turn_deg": 11.0}, reflectance=FLAT)
    assert view.image.sum() * 2.1**2 == pytest.approx(view.cores * np.pi / 4 * CORE_UM**2, rel=1e-6)


def test_light_and_level_scale_the_picture():
    base = render(**PLAIN, reflectance=FLAT).image
    slope = np.array([[0.5, 1.5], [0.5, 1.5]])
    lit = render(**{**PLAIN, "light_ratio": slope, "lit_level": 300.0}, reflectance=FLAT).image
    x, _ = places_um(330, 2.1)
    ratio = lit / np.where(base > 0.99, 300.0 * base, np.inf)
    inside = ratio > 0
    expected = np.broadcast_to(1.0 + x / (1.1 * IMAGE_UM - SAMPLE_UM), ratio.shape)
    # a core averages over its disc: within half a core of the local light
    assert np.abs(ratio - expected)[inside].max() < 0.5 * CORE_UM / IMAGE_UM


def test_a_veil_lifts_the_dark_and_lowers_contrast_by_its_law():
    plain = render(**PLAIN, reflectance=grating(20.0, 30.0)).image
    veiled = render(**{**PLAIN, "veil_ratio": 0.25}, reflectance=grating(20.0, 30.0)).image
    before, after = (contrast_of(one, 2.1, 20.0, 30.0, 280.0) for one in (plain, veiled))
    assert after == pytest.approx(before / 1.25, rel=0.01)


# Contrast


@pytest.mark.parametrize("direction_deg", [0.0, 17.0, 30.0, 90.0])
@pytest.mark.parametrize("frequency_lp_mm", [15.0, 33.0, 46.0])
def test_a_grating_keeps_the_product_of_all_contrasts(frequency_lp_mm, direction_deg):
    shares = table_shares(coupling_over_spread=0.15)
    lens = np.linspace(0.0, 400.0, 400)
    view = render(
        **{
            **PLAIN,
            "exchange_share": shares,
            "lens_lp_mm": lens,
            "lens_mtf": diffraction_mtf(f_number=6.0, wavelength_nm=550.0, frequency_lp_mm=lens),
            "defocus_um": 6.0,
        },
        reflectance=grating(frequency_lp_mm, direction_deg),
    )
    turn = np.deg2rad(direction_deg)
    expected = (
        diffraction_mtf(f_number=6.0, wavelength_nm=550.0, frequency_lp_mm=frequency_lp_mm)
        * disc_mtf(diameter_um=6.0, frequency_lp_mm=frequency_lp_mm)
        * disc_mtf(diameter_um=CORE_UM, frequency_lp_mm=frequency_lp_mm) ** 2
        * ring_mtf(
            shares=shares, frequency_per_um=frequency_lp_mm / 1000, pitch_um=PITCH_UM, direction_deg=direction_deg
        )
        * np.sinc(2.1e-3 * frequency_lp_mm * np.cos(turn))
        * np.sinc(2.1e-3 * frequency_lp_mm * np.sin(turn))
    )
    # Over the whole face some of the exchange meets the rim; the window looks at the middle
    seen = contrast_of(view.image, 2.1, frequency_lp_mm, direction_deg, 250.0)
    assert seen == pytest.approx(float(expected), rel=0.01)


def test_coarse_pixels_take_their_own_share():
    for pixel_um in (1.3, 3.7):
        count = int(1.06 * IMAGE_UM / pixel_um)
        view = render(
            **{**PLAIN, "pixel_um": pixel_um, "rows": count, "columns": count}, reflectance=grating(40.0, 0.0)
        )
        expected = disc_mtf(diameter_um=CORE_UM, frequency_lp_mm=40.0) ** 2 * np.sinc(0.04 * pixel_um)
        assert contrast_of(view.image, pixel_um, 40.0, 0.0, 280.0) == pytest.approx(float(expected), rel=0.01)


def test_blur_that_varies_over_the_picture_is_its_own_in_each_place():
    """Half a field blurred by 2 um, half by 14: each keeps the contrast of its own disc."""
    blur = np.array([[2.0, 2.0, 14.0, 14.0]] * 2)
    view = render(**{**PLAIN, "defocus_um": blur}, reflectance=grating(40.0, 90.0))
    x, y = places_um(330, 2.1)
    for side, blur_um in ((-1, 2.0), (1, 14.0)):
        away = np.hypot(x - side * 200.0, y) / 100.0
        weight = np.where(away < 1, np.cos(np.pi * np.minimum(away, 1) / 2) ** 4, 0.0)
        wave = np.exp(-2j * np.pi * 0.04 * y)
        seen = 2 * (view.image * weight * wave).sum().real / (view.image * weight).sum() / 0.8
        expected = disc_mtf(diameter_um=CORE_UM, frequency_lp_mm=40.0) ** 2 * np.sinc(0.084)
        assert seen == pytest.approx(float(expected * disc_mtf(diameter_um=blur_um, frequency_lp_mm=40.0)), rel=0.02)


def test_a_spoiled_lattice_loses_nothing_on_average():
    """Jitter, spread and dead cores make the picture uneven, not paler in contrast."""
    spoiled = {"jitter_share": 0.03, "transmission_spread": 0.1, "dead_fraction": 0.02}
    seen = [
        contrast_of(
            render(**{**PLAIN, **spoiled, "seed": seed}, reflectance=grating(25.0, 10.0)).image, 2.1, 25.0, 10.0, 280.0
        )
        for seed in range(6)
    ]
    expected = float(disc_mtf(diameter_um=CORE_UM, frequency_lp_mm=25.0) ** 2) * np.sinc(
        0.0525 * np.cos(np.deg2rad(10))
    )
    assert np.mean(seen) == pytest.approx(expected, rel=0.02)


# Alias


def peak(image: np.ndarray, pixel_um: float, below_lp_mm: float) -> tuple[float, float]:
    """Frequency and direction of the strongest wave below a frequency, refined on its neighbors."""
    weight = window(len(image), pixel_um, 0.46 * IMAGE_UM)
    size = 2048
    flat = (image - (image * weight).sum() / weight.sum()) * weight
    wave = np.abs(np.fft.fftshift(np.fft.fft2(flat, (size, size))))
    at = np.fft.fftshift(np.fft.fftfreq(size, pixel_um / 1000))
    wave[np.hypot(at[None, :], at[:, None]) > below_lp_mm] = 0
    row, column = np.unravel_index(wave.argmax(), wave.shape)
    near = wave[row - 2 : row + 3, column - 2 : column + 3] ** 2
    fy, fx = (
        (near * at[row - 2 : row + 3, None]).sum() / near.sum(),
        (near * at[None, column - 2 : column + 3]).sum() / near.sum(),
    )
    return float(np.hypot(fx, fy)), float(np.mod(np.rad2deg(np.arctan2(fy, fx)), 180.0))


@pytest.mark.parametrize("turn_deg", [0.0, 13.0])
@pytest.mark.parametrize(("frequency_lp_mm", "direction_deg"), [(80.0, 30.0), (85.0, 5.0), (75.0, 50.0), (95.0, 22.0)])
def test_beyond_the_lattice_limit_the_alias_shows_where_the_lattice_says(frequency_lp_mm, direction_deg, turn_deg):
    said = alias(frequency_lp_mm=frequency_lp_mm, direction_deg=direction_deg, pitch_um=PITCH_UM)
    assert said.frequency_lp_mm < frequency_lp_mm  # an alias indeed
    view = render(**{**PLAIN, "turn_deg": turn_deg}, reflectance=grating(frequency_lp_mm, direction_deg + turn_deg))
    limit = float(resolution_limit_lp_mm(pitch_um=PITCH_UM, direction_deg=30.0))
    seen, direction = peak(view.image, 2.1, 1.05 * limit)
    assert seen == pytest.approx(float(said.frequency_lp_mm), abs=0.4)
    turned = np.mod(direction - turn_deg - float(said.direction_deg) + 90, 180) - 90
    assert abs(turned) < 1.0


def test_below_the_limit_the_grating_is_where_it_was():
    view = render(**{**PLAIN, "turn_deg": 13.0}, reflectance=grating(45.0, 40.0))
    seen, direction = peak(view.image, 2.1, 60.0)
    assert seen == pytest.approx(45.0, abs=0.4)
    assert direction == pytest.approx(40.0, abs=1.0)


# Noise


@pytest.mark.parametrize(
    ("mean_e", "dark_noise_e", "gain_dn_e"), [(0.0, 3.0, 0.4), (5.0, 2.0, 0.25), (4000.0, 2.4, 0.39), (60.0, 0.0, 0.13)]
)
def test_noise_is_what_emva_says(mean_e, dark_noise_e, gain_dn_e):
    """mu + sigma_d^2 + 1/(12 K^2) (EMVA 1288), where the noise spans more than half a step; a quarter of a million pixels."""
    frame = np.full((512, 512), mean_e)
    image, share = read_out(
        mean_e=frame, full_well_e=1e5, dark_noise_e=dark_noise_e, gain_dn_e=gain_dn_e, inside=frame >= 0, seed=5
    )
    assert image.mean(dtype=float) == pytest.approx(mean_e, abs=0.03 + 0.002 * mean_e)
    assert image.var(dtype=float) == pytest.approx(mean_e + dark_noise_e**2 + 1 / (12 * gain_dn_e**2), rel=0.02)
    assert share == 0.0
    steps = image * gain_dn_e
    assert np.abs(steps - np.rint(steps)).max() < 1e-2


def test_a_full_well_clips_and_is_counted():
    level = {"lit_level": 9000.0, "full_well_e": 8000.0, "noise": True}
    light = np.array([[0.2, 1.2], [0.2, 1.2]])
    view = render(**{**PLAIN, **level, "light_ratio": light}, reflectance=FLAT)
    assert view.image.max() == pytest.approx(8000.0, abs=1.0)
    mean = render(**{**PLAIN, "lit_level": 9000.0, "light_ratio": light}, reflectance=FLAT).image
    inside = np.hypot(*places_um(330, 2.1)) <= IMAGE_UM / 2
    assert view.saturated_share == pytest.approx((mean >= 8000)[inside].mean(), abs=0.01)
    assert 0.01 < view.saturated_share < 0.3
    quiet = render(**{**PLAIN, **level, "noise": False, "light_ratio": light}, reflectance=FLAT)
    assert quiet.image.max() == 8000.0
    assert quiet.saturated_share == pytest.approx(view.saturated_share, abs=0.01)


def test_the_same_seed_gives_the_same_picture_and_another_another():
    spoiled = {
        "jitter_share": 0.03,
        "transmission_spread": 0.1,
        "dead_fraction": 0.02,
        "noise": True,
        "lit_level": 500.0,
        "dark_noise_e": 3.0,
    }
    one, again, other = (render(**{**PLAIN, **spoiled, "seed": seed}, reflectance=FLAT) for seed in (3, 3, 4))
    assert np.array_equal(one.image, again.image)
    assert not np.array_equal(one.image, other.image)
    assert (one.cores, one.dead) == (other.cores, other.dead)


def test_noise_leaves_the_bundle_as_it_is():
    """The same seed has the same dead cores and the same spread with and without noise."""
    spoiled = {"jitter_share": 0.03, "transmission_spread": 0.2, "dead_fraction": 0.05, "lit_level": 1e5}
    noisy, quiet = (render(**{**PLAIN, **spoiled, "noise": noise}, reflectance=FLAT).image for noise in (True, False))
    assert np.abs(noisy - quiet).max() < 6 * np.sqrt(quiet.max())


# The bundle


def test_dead_cores_are_dark_and_counted():
    view = render(**{**PLAIN, "dead_fraction": 0.03}, reflectance=FLAT)
    assert view.dead == round(0.03 * view.cores)
    assert view.image.sum() * 2.1**2 == pytest.approx((view.cores - view.dead) * np.pi / 4 * CORE_UM**2, rel=1e-6)


def test_throughput_spread_has_mean_one_and_its_own_rms():
    made = cores_of.mosaic(
        pitch_um=3.0,
        image_um=600.0,
        turn_deg=0.0,
        jitter_share=0.02,
        dead_fraction=0.0,
        transmission_spread=0.3,
        seed=2,
    )
    assert made.throughput_ratio.mean() == pytest.approx(1.0, abs=0.01)
    assert made.throughput_ratio.std() == pytest.approx(0.3, rel=0.03)
    assert made.throughput_ratio.min() > 0


def test_exchange_loses_nothing_and_stays_inside_the_rim():
    made = cores_of.mosaic(
        pitch_um=10.0,
        image_um=300.0,
        turn_deg=20.0,
        jitter_share=0.0,
        dead_fraction=0.0,
        transmission_spread=0.0,
        seed=2,
    )
    shares = table_shares(coupling_over_spread=0.4)
    light = np.random.default_rng(0).random(len(made.x_um))
    after = cores_of.exchanged(light=light, cores=made, exchange_share=shares)
    assert after.sum() == pytest.approx(light.sum(), rel=1e-9)
    assert after.std() < light.std()
    even = cores_of.exchanged(light=np.ones(len(light)), cores=made, exchange_share=shares)
    assert even == pytest.approx(np.ones(len(light)), abs=1e-9)


def test_exchange_equals_a_direct_sum_over_pairs():
    made = cores_of.mosaic(
        pitch_um=10.0,
        image_um=400.0,
        turn_deg=35.0,
        jitter_share=0.0,
        dead_fraction=0.0,
        transmission_spread=0.0,
        seed=2,
    )
    shares = table_shares(coupling_over_spread=0.3)
    light = np.random.default_rng(1).random(len(made.x_um))
    apart = np.hypot(made.x_um[:, None] - made.x_um, made.y_um[:, None] - made.y_um) / 10.0
    given = np.zeros_like(apart)
    for ring, share in zip(rings(), shares):
        given[np.abs(apart - np.hypot(*ring[0])) < 1e-6] = share
    beyond = 1.0 - sum(share * len(ring) for ring, share in zip(rings(), shares))
    stays = 1.0 - beyond - given.sum(axis=0)
    expected = given @ light + stays * light + beyond * light.mean()
    assert cores_of.exchanged(light=light, cores=made, exchange_share=shares) == pytest.approx(expected, abs=1e-9)


def test_disc_areas_against_a_count_of_points():
    """Coverage of each pixel by a disc, against a fine grid of points."""
    stamps = cores_of.disc_stamps(disc_pixels=2.7)
    places = len(stamps)
    fine = (np.arange(400) + 0.5) / 400
    row, column = 5, 11
    x = np.arange(-2, 3)[None, :, None, None] + fine[None, None, None, :] - (column + 0.5) / places
    y = np.arange(-2, 3)[:, None, None, None] + fine[None, None, :, None] - (row + 0.5) / places
    counted = (np.hypot(x, y) <= 1.35).mean(axis=(2, 3))
    assert stamps[row, column] == pytest.approx(counted, abs=2e-3)
    assert stamps.sum(axis=(2, 3)) == pytest.approx(np.full((places, places), np.pi / 4 * 2.7**2), rel=1e-9)


def test_what_a_core_collects_is_the_mean_over_its_disc():
    """Spline and filter against direct averaging of a smooth subject over 2,000 points of the disc."""
    made = cores_of.mosaic(
        pitch_um=10.0,
        image_um=100.0,
        turn_deg=9.0,
        jitter_share=0.05,
        dead_fraction=0.0,
        transmission_spread=0.0,
        seed=2,
    )
    angle, radius = 2.399963 * np.arange(2000), 0.5 * CORE_UM * np.sqrt((np.arange(2000) + 0.5) / 2000)
    x = made.x_um[:, None] + radius * np.cos(angle)
    y = made.y_um[:, None] + radius * np.sin(angle)
    wave = 2 * np.pi / (SAMPLES * SAMPLE_UM)  # whole periods over the subject, which is taken as periodic

    def subject(x, y):
        return 1.0 + 0.5 * np.cos(wave * (31 * x + 17 * y)) + 0.3 * np.sin(wave * (8 * x - 40 * y))

    view = render(
        **{
            **PLAIN,
            "image_um": 100.0,
            "turn_deg": 9.0,
            "jitter_share": 0.05,
            "seed": 2,
            "pixel_um": 0.5,
            "rows": 240,
            "columns": 240,
        },
        reflectance=subject(*places_um(SAMPLES, SAMPLE_UM)),
    )
    row, column = (np.rint(at / 0.5 + 119.5).astype(int) for at in (made.y_um, made.x_um))
    assert view.image[row, column] == pytest.approx(subject(x, y).mean(axis=1), rel=2e-3)


# The sensor at the tip


@pytest.mark.parametrize("direction_deg", [0.0, 35.0])
def test_a_chip_keeps_lens_times_pixel(direction_deg):
    lens = np.linspace(0.0, 600.0, 400)
    mtf = diffraction_mtf(f_number=4.0, wavelength_nm=550.0, frequency_lp_mm=lens)
    view = render_chip(
        **{**CHIP, "lens_lp_mm": lens, "lens_mtf": mtf, "defocus_um": 3.0},
        reflectance=grating(60.0, direction_deg), pixel_um=3.1, rows=200, columns=200,
    )  # fmt: skip
    turn = np.deg2rad(direction_deg)
    expected = (
        diffraction_mtf(f_number=4.0, wavelength_nm=550.0, frequency_lp_mm=60.0)
        * disc_mtf(diameter_um=3.0, frequency_lp_mm=60.0)
        * np.sinc(0.186 * np.cos(turn))
        * np.sinc(0.186 * np.sin(turn))
    )
    assert contrast_of(view.image, 3.1, 60.0, direction_deg, 300.0) == pytest.approx(float(expected), rel=0.01)
    assert (view.cores, view.dead) == (0, 0)


def test_a_chip_that_sees_an_even_field_is_even():
    view = render_chip(**CHIP, reflectance=FLAT, pixel_um=2.0, rows=150, columns=200)
    assert view.image.shape == (150, 200)
    assert view.image == pytest.approx(np.ones((150, 200)), abs=1e-5)


def test_a_chip_with_blur_that_varies_keeps_each_its_own():
    blur = np.array([[1.0, 1.0, 9.0, 9.0]] * 2)
    view = render_chip(
        **{**CHIP, "defocus_um": blur}, reflectance=grating(50.0, 90.0), pixel_um=2.0, rows=300, columns=300
    )
    _, y = places_um(300, 2.0)
    wave = np.exp(-2j * np.pi * 0.05 * y)
    for columns, blur_um in ((slice(10, 90), 1.0), (slice(210, 290), 9.0)):
        part = view.image[:, columns] * window(300, 2.0, 290.0)[:, 150:151]
        seen = 2 * abs((part * wave).sum() / part.sum()) / 0.8
        expected = disc_mtf(diameter_um=blur_um, frequency_lp_mm=50.0) * np.sinc(0.1)
        assert seen == pytest.approx(float(expected), rel=0.02)


# The honeycomb, smoothed


@pytest.mark.parametrize("residual_contrast", [0.01, 0.1])
def test_smoothing_leaves_so_much_of_the_honeycomb_and_costs_its_fourth_root(residual_contrast):
    grate = render(**PLAIN, reflectance=grating(50.0, 30.0)).image
    flat = render(**PLAIN, reflectance=FLAT).image
    out, even = (
        smoothed(image=one, residual_contrast=residual_contrast, pitch_um=PITCH_UM, pixel_um=2.1)
        for one in (grate, flat)
    )
    first = 2000 / (np.sqrt(3) * PITCH_UM)
    before, after = (contrast_of(one, 2.1, first, 90.0, 280.0) for one in (flat, even.image))
    assert after / before == pytest.approx(residual_contrast, rel=0.02)
    kept = contrast_of(out.image, 2.1, 50.0, 30.0, 280.0) / contrast_of(grate, 2.1, 50.0, 30.0, 280.0)
    expected = honeycomb_filter_mtf(residual_contrast=residual_contrast, pitch_um=PITCH_UM, frequency_lp_mm=50.0)
    assert kept == pytest.approx(float(expected), rel=0.01)
    assert out.limit_contrast == pytest.approx(residual_contrast**0.25, rel=1e-9)


def test_smoothing_lowers_white_noise_by_what_it_says():
    rng = np.random.default_rng(0)
    noise = rng.standard_normal((600, 600))
    out = smoothed(image=noise, residual_contrast=0.02, pitch_um=8.0, pixel_um=2.0)
    assert out.image[50:-50, 50:-50].std() == pytest.approx(out.noise_ratio, rel=0.02)


# Refusals


@pytest.mark.parametrize(
    ("changed", "named"),
    [
        ({"core_um": 12.0}, "core_um is 12"),
        ({"pixel_um": -1.0}, "pixel_um is -1"),
        ({"dead_fraction": 1.5}, "dead_fraction is 1.5"),
        ({"light_ratio": np.full((2, 2), -1.0)}, "light_ratio is -1"),
        ({"lens_lp_mm": np.array([1.0, 2.0])}, "lens_lp_mm is 1"),
        ({"veil_ratio": -0.1}, "veil_ratio is -0.1"),
        ({"full_well_e": 0.0}, "full_well_e is 0"),
        ({"defocus_um": -3.0}, "defocus_um is -3"),
    ],
)
def test_impossible_input_is_refused_by_name(changed, named):
    with pytest.raises(OutOfRange, match=named):
        render(**{**PLAIN, **changed}, reflectance=FLAT)


# The line of sight


def test_a_facing_plane_is_seen_at_the_scale_of_the_chief_ray():
    behind = 1.0526316
    seen = sight_on_plane(
        x_mm=np.array([0.1, 0.0]), y_mm=np.array([0.0, 0.2]), image_distance_mm=behind, mapping="tan", distance_mm=25.0,
        pupil_depth_mm=1.0, index=1.0, tilt_deg=0.0,
    )  # fmt: skip
    # by similar triangles through the middle of the pupil, in focus or not
    assert seen.u_mm == pytest.approx([0.1 * 26.0 / behind, 0.0])
    assert seen.v_mm == pytest.approx([0.0, 0.2 * 26.0 / behind])


def test_a_tilted_plane_is_met_by_tracing_the_ray():
    """The point found lies on the plane and on the refracted ray, by direct geometry in three dimensions."""
    x, y, behind, depth, n, w, b = 0.31, -0.22, 1.05, 1.5, 1.333, 12.0, np.deg2rad(40.0)
    seen = sight_on_plane(
        x_mm=x,
        y_mm=y,
        image_distance_mm=behind,
        mapping="tan",
        distance_mm=w,
        pupil_depth_mm=depth,
        index=n,
        tilt_deg=40.0,
    )
    point = np.array([float(seen.u_mm) * np.cos(b), float(seen.v_mm), w + float(seen.u_mm) * np.sin(b)])
    inside = np.array([x, y, behind]) / np.hypot(np.hypot(x, y), behind)
    face = inside * depth / inside[2]
    outside = np.array([inside[0] / n, inside[1] / n, 0.0])
    outside[2] = np.sqrt(1 - outside @ outside)
    away = point - np.array([face[0], face[1], 0.0])
    assert np.cross(away / np.linalg.norm(away), outside) == pytest.approx(np.zeros(3), abs=1e-9)


def test_a_plane_beyond_its_horizon_is_not_met():
    seen = sight_on_plane(
        x_mm=np.array([0.9, -0.9]),
        y_mm=0.0,
        image_distance_mm=1.0,
        mapping="tan",
        distance_mm=10.0,
        pupil_depth_mm=0.0,
        index=1.0,
        tilt_deg=60.0,
    )
    assert seen.meets.tolist() == [False, True]
    assert np.isfinite(seen.u_mm).all()


def test_a_bore_is_seen_all_around_and_its_far_end_not():
    turn = np.linspace(0, 2 * np.pi, 9)[:-1]
    seen = sight_on_bore(
        x_mm=0.4 * np.cos(turn),
        y_mm=0.4 * np.sin(turn),
        image_distance_mm=1.0,
        mapping="f_theta",
        bore_mm=12.0,
        pupil_depth_mm=0.5,
        index=1.0,
        farthest_mm=200.0,
    )
    assert seen.v_mm == pytest.approx(np.full(8, (6.0 - 0.5 * np.tan(0.4)) / np.tan(0.4)))
    assert np.exp(1j * seen.u_mm / 6.0) == pytest.approx(np.exp(1j * turn))
    middle = sight_on_bore(
        x_mm=0.0,
        y_mm=0.0,
        image_distance_mm=1.0,
        mapping="tan",
        bore_mm=12.0,
        pupil_depth_mm=0.5,
        index=1.0,
        farthest_mm=200.0,
    )
    assert not middle.meets


# Off the axis


def test_light_at_the_edge_follows_from_the_solid_angle_of_a_pixel():
    """cos w dOmega/dA by differences of the mapping, against the closed form."""
    w, step = np.deg2rad(33.0), 1e-5
    for mapping, height in (("tan", np.tan), ("f_theta", lambda angle: angle)):
        area = np.pi * (height(w + step) ** 2 - height(w - step) ** 2)
        solid = 2 * np.pi * (np.cos(w - step) - np.cos(w + step))
        expected = np.cos(w) * solid / area
        assert float(edge_light_ratio(half_angle_deg=33.0, mapping=mapping)) == pytest.approx(expected, rel=1e-6)


def test_on_axis_nothing_is_lost():
    for mapping in ("tan", "f_theta"):
        cone = edge_cone(half_angle_deg=0.0, mapping=mapping)
        assert (float(cone.meridional_ratio), float(cone.sagittal_ratio)) == (1.0, 1.0)
        assert float(edge_f_number(f_number=4.0, half_angle_deg=0.0, mapping=mapping)) == 4.0
    assert float(edge_acceptance_ratio(height_mm=0.0, exit_pupil_mm=3.0, core_na=0.4, cone_sine=0.125)) == 1.0
    assert float(edge_acceptance_ratio(height_mm=0.5, exit_pupil_mm=np.inf, core_na=0.4, cone_sine=0.125)) == 1.0


def test_cores_at_the_edge_take_a_fifth_of_a_cone_from_a_pupil_at_the_lens():
    """f 1 mm, image 1 mm, f/4, pupil at the lens, NA 0.39: about 20 % (independent_calculation)."""
    kept = edge_acceptance_ratio(height_mm=0.5, exit_pupil_mm=1.0, core_na=0.39, cone_sine=0.125)
    assert float(kept) == pytest.approx(0.20, abs=0.01)
    falling = edge_acceptance_ratio(height_mm=np.linspace(0, 0.6, 20), exit_pupil_mm=1.0, core_na=0.39, cone_sine=0.125)
    assert (np.diff(falling) <= 1e-12).all()


def test_noise_at_the_edge_joins_its_limits():
    shot = edge_snr(signal_ratio=0.25, even_snr=40.0, shot_share=1.0, transmission_spread=0.0)
    read = edge_snr(signal_ratio=0.25, even_snr=40.0, shot_share=0.0, transmission_spread=0.0)
    uneven = edge_snr(signal_ratio=0.25, even_snr=1e6, shot_share=1.0, transmission_spread=0.05)
    assert (float(shot), float(read)) == (20.0, 10.0)
    assert float(uneven) == pytest.approx(20.0, rel=1e-6)
    assert float(edge_snr(signal_ratio=0.0, even_snr=40.0, shot_share=0.5, transmission_spread=0.1)) == 0.0


# Round spots

NODES = np.linspace(0.0, 130.0, 1500)[1:]


@pytest.mark.parametrize("diameter_um", [1.0, 6.0, 25.0, 150.0])
def test_the_energy_of_a_blurred_disc_against_direct_integration(diameter_um):
    mtf = disc_mtf(diameter_um=9.0, frequency_lp_mm=NODES)
    disc = disc_mtf(diameter_um=diameter_um, frequency_lp_mm=NODES)
    f = NODES / 1000
    direct = np.pi / 4 * diameter_um**2 * np.trapezoid(np.r_[0.0, (disc * mtf) ** 2 * 2 * np.pi * f], np.r_[0.0, f])
    assert float(kept_share(diameter_um=diameter_um, frequency_lp_mm=NODES, mtf=mtf)) == pytest.approx(direct, rel=1e-3)


def test_twenty_four_gauss_nodes_are_enough():
    nodes = 65.0 * (np.polynomial.legendre.leggauss(24)[0] + 1)
    for diameter_um in (2.0, 12.0, 80.0):
        fine, coarse = (
            float(
                kept_share(diameter_um=diameter_um, frequency_lp_mm=f, mtf=disc_mtf(diameter_um=9.0, frequency_lp_mm=f))
            )
            for f in (NODES, nodes)
        )
        assert coarse == pytest.approx(fine, rel=0.005)


def test_the_smallest_spot_is_at_threshold_and_never_below_roses():
    snr = np.geomspace(2.0, 3000.0, 40)
    mtf = disc_mtf(diameter_um=9.0, frequency_lp_mm=NODES)
    given = {"contrast": 0.3, "cell_um2": 86.6, "threshold_snr": 5.0}
    found = smallest_spot_um(**given, snr=snr, frequency_lp_mm=NODES[:, None], mtf=mtf[:, None])
    kept = kept_share(diameter_um=found, frequency_lp_mm=NODES[:, None], mtf=mtf[:, None])
    assert 0.3 * snr * np.sqrt(np.pi / 4 * found**2 * kept / 86.6) == pytest.approx(np.full(40, 5.0), rel=1e-9)
    assert (np.diff(found) < 0).all()
    rose = 2 * 5.0 / (0.3 * snr) * np.sqrt(86.6 / np.pi)
    assert (found >= rose).all()
    assert found[0] == pytest.approx(rose[0], rel=0.05)  # a large spot does not mind the blur
    one = smallest_spot_um(**given, snr=snr[7], frequency_lp_mm=NODES, mtf=mtf)
    assert float(one) == pytest.approx(found[7], rel=1e-12)


def test_a_spot_below_the_blur_needs_contrast_times_area():
    """Far below the blur the product of contrast and area is what counts (Ricco)."""
    mtf = disc_mtf(diameter_um=9.0, frequency_lp_mm=NODES)
    low, high = (
        float(smallest_spot_um(contrast=c, snr=1e5, cell_um2=86.6, threshold_snr=5.0, frequency_lp_mm=NODES, mtf=mtf))
        for c in (0.1, 0.4)
    )
    assert low / high == pytest.approx(2.0, rel=0.01)
