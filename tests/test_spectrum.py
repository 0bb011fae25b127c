"""Photometry and color against an open color library, the CIE's own figures and closed forms."""

import colour
import numpy as np
import pytest
from scipy.constants import Stefan_Boltzmann
from scipy.optimize import minimize_scalar

from optics import spectrum
from optics.spec import Curve, OutOfRange, beyond
from optics.spectrum import (
    GRID_NM,
    QUADRATURE_NM,
    chromaticity,
    color_rendering_index,
    color_temperature_k,
    covered,
    duv,
    effective_wavelengths,
    integral,
    luminous_efficacy_lm_w,
    luminous_flux_lm,
    on_grid,
    photons_per_j,
    planck,
    planck_luminance_cd_m2,
)
from optics.tables import column, table

pytestmark = pytest.mark.filterwarnings("ignore:.*Aligning")  # the library says what it interpolates

LAMPS = table("cie_illuminants")
AT = LAMPS["wavelength_nm"]
# dB/m, straight lines between: a light-guide glass of NA 0.57, and a plastic fiber (pmma_fiber_table)
GLASS = Curve(wavelength_nm=[380, 400, 450, 500, 1100], value=[1.3, 1.0, 0.35, 0.22, 0.22])
PLASTIC = Curve(
    wavelength_nm=[400, 420, 450, 500, 520, 550, 570, 590, 600, 620, 650, 680, 700],
    value=[0.201, 0.143, 0.095, 0.070, 0.076, 0.103, 0.072, 0.080, 0.142, 0.441, 0.160, 0.284, 0.740],
)


def lamp(name):
    return on_grid(Curve(wavelength_nm=AT.tolist(), value=LAMPS[name].tolist()))


def through(curve, length_m):
    """LED-B3 after a length of fiber, on the grid."""
    return lamp("led_b3") * 10 ** (-on_grid(curve) * length_m / 10) * covered(curve)


def color(power, at=GRID_NM):
    return {"wavelength_nm": at, "power": power}


def library(power, at):
    """(CCT, Duv, Ra) by the library."""
    spectrum_there = colour.SpectralDistribution(dict(zip(at, power)))
    uv = colour.UCS_to_uv(colour.XYZ_to_UCS(colour.sd_to_XYZ(spectrum_there.copy())))
    return *colour.temperature.uv_to_CCT_Ohno2013(uv), colour.colour_rendering_index(spectrum_there.copy())


# Grid and integrals


def test_the_grid_and_its_rule():
    assert (GRID_NM[0], GRID_NM[-1], len(GRID_NM)) == (350.0, 1100.0, 151)
    assert not GRID_NM.flags.writeable
    assert integral(np.ones(151)) == pytest.approx(750.0, rel=1e-14)
    assert integral(power=GRID_NM) == pytest.approx((1100.0**2 - 350.0**2) / 2, rel=1e-14)
    stacked = np.outer(GRID_NM, [1.0, 2.0])
    assert integral(stacked, axis=0) == pytest.approx(np.array([1.0, 2.0]) * integral(GRID_NM))


def test_a_curve_on_the_grid_is_zero_outside_its_range():
    curve = Curve(wavelength_nm=[402.0, 500.0], value=[2.0, 4.0])
    inside = covered(curve)
    assert GRID_NM[inside][[0, -1]].tolist() == [405.0, 500.0]
    assert (on_grid(curve)[~inside] == 0).all()
    assert on_grid(curve)[GRID_NM == 451.0 - 1.0] == pytest.approx(2.0 + 2.0 * 48 / 98)


# Photometry


def test_sum_of_v_at_one_nanometer():
    """106.857 over 360-830 nm. Source: cie_018_2019."""
    assert column("cie_1931_observer", "y").sum() == pytest.approx(106.857, abs=5e-4)


def test_the_one_rule_and_what_another_rule_would_say():
    """Illuminant A over 380-780 nm: 156.2 lm/W by trapezoids, 154.1 by plain sums."""
    a = LAMPS["a"]
    assert luminous_efficacy_lm_w(**color(a, AT)) == pytest.approx(156.2, abs=0.05)
    v = np.interp(AT, column("cie_1931_observer", "wavelength_nm"), column("cie_1931_observer", "y"))
    assert 683 * (a * v).sum() / a.sum() == pytest.approx(154.1, abs=0.05)
    assert luminous_flux_lm(lamp("a")) == pytest.approx(683 * np.trapezoid(a * v, AT), rel=2e-6)


def test_radiation_that_is_not_seen_lowers_the_efficacy():
    wide = luminous_efficacy_lm_w(**color(planck(temperature_k=2856.0)))
    seen = (GRID_NM >= 380) & (GRID_NM <= 780)
    narrow = luminous_efficacy_lm_w(**color(planck(temperature_k=2856.0)[seen], GRID_NM[seen]))
    assert narrow == pytest.approx(156.2, abs=0.1)
    assert wide < 0.4 * narrow


def test_a_coarse_spectrum_is_a_polyline():
    """Two points say the same as all the grid points on the line between them."""
    inside = (GRID_NM >= 400) & (GRID_NM <= 700)
    fine = luminous_efficacy_lm_w(**color(GRID_NM[inside], GRID_NM[inside]))
    assert luminous_efficacy_lm_w(wavelength_nm=[400.0, 700.0], power=[400.0, 700.0]) == pytest.approx(fine, rel=1e-12)


def test_luminance_of_black_bodies():
    """19.75, 30.2, 51.3 and 2191 cd/mm2. Source: independent_calculation."""
    got = planck_luminance_cd_m2(temperature_k=np.array([2856.0, 3000.0, 3200.0, 6000.0])) / 1e6
    assert got == pytest.approx([19.75, 30.2, 51.3, 2191.0], rel=1.5e-3)


def test_efficacy_of_black_bodies_over_all_wavelengths():
    """54.7 lm/W at 4000 K and 95 at 7000 K (remembered from encyclopedias): pi L over sigma T^4."""
    t = np.array([4000.0, 7000.0])
    assert np.pi * planck_luminance_cd_m2(temperature_k=t) / (Stefan_Boltzmann * t**4) == pytest.approx(
        [54.7, 95.0], rel=2e-3
    )


def test_planck_law_has_wiens_displacement_and_a_fixed_crest():
    at = np.linspace(300.0, 3000.0, 27001)
    assert at[planck(temperature_k=3000.0, wavelength_nm=at).argmax()] == pytest.approx(2897.77e3 / 3000.0, rel=1e-4)
    assert planck(temperature_k=[500.0, 3000.0, 50000.0])[:, GRID_NM == 560.0] == pytest.approx(np.ones((3, 1)))
    # Hot: Rayleigh and Jeans, lambda^-4
    hot = planck(temperature_k=1e6, wavelength_nm=np.array([1000.0, 1100.0]))
    assert hot[1] / hot[0] == pytest.approx(1.1**-4, rel=2e-3)
    with pytest.raises(OutOfRange, match="temperature_k is -3; it must be from 100 to"):
        planck(temperature_k=-3.0)


def test_photons_of_white_light():
    """8,632 photons per um2 in a lux second of LED-B3 over 400-700 nm. Source: independent_calculation."""
    power, at = LAMPS["led_b3"], AT
    kept = (at >= 400) & (at <= 700)
    photons = np.trapezoid((power * photons_per_j(wavelength_nm=at))[kept], at[kept])
    lumens = luminous_efficacy_lm_w(**color(power[kept], at[kept])) * np.trapezoid(power[kept], at[kept])
    assert photons / lumens * 1e-12 == pytest.approx(8632, rel=1e-3)


# Color temperature and rendering


@pytest.mark.parametrize("name", [name for name in LAMPS if name != "wavelength_nm"])
def test_lamps_against_the_library(name):
    kelvin, apart, rendering = library(LAMPS[name], AT)
    assert color_temperature_k(**color(LAMPS[name], AT)) == pytest.approx(kelvin, abs=2.0)
    assert duv(**color(LAMPS[name], AT)) == pytest.approx(apart, abs=3e-5)
    # The library interpolates to 1 nm and takes an older color temperature: lines show the difference
    allowed = 0.3 if name in ("led_rgb1", "fl4") else 0.1
    assert color_rendering_index(**color(LAMPS[name], AT)) == pytest.approx(rendering, abs=allowed)


@pytest.mark.parametrize("length_m", [0.5, 3.0, 8.0])
@pytest.mark.parametrize("curve", [GLASS, PLASTIC])
def test_light_after_a_guide_against_the_library(curve, length_m):
    kept = (GRID_NM >= 380) & (GRID_NM <= 780)
    power = through(curve, length_m)
    kelvin, apart, rendering = library(power[kept], GRID_NM[kept])
    assert color_temperature_k(**color(power)) == pytest.approx(kelvin, abs=2.0)
    assert duv(**color(power)) == pytest.approx(apart, abs=3e-5)
    assert color_rendering_index(**color(power)) == pytest.approx(rendering, abs=0.1)


@pytest.mark.parametrize(
    ("curve", "kelvin", "rendering"), [(GLASS, 3990, 84.1), (PLASTIC, 4380, 80.7)], ids=["glass", "plastic"]
)
def test_three_meters_color_the_light(curve, kelvin, rendering):
    """Source: independent_calculation (an open color library)."""
    assert color_temperature_k(**color(lamp("led_b3"))) == pytest.approx(4103, abs=1)
    assert color_temperature_k(**color(through(curve, 3.0))) == pytest.approx(kelvin, abs=15)
    assert color_rendering_index(**color(through(curve, 3.0))) == pytest.approx(rendering, abs=0.5)


def test_black_bodies_have_their_own_temperature_and_render_perfectly():
    t = np.array([1200.0, 2000.0, 2856.0, 4000.0, 4990.0])
    assert color_temperature_k(**color(planck(temperature_k=t))) == pytest.approx(t, rel=1e-5)
    assert duv(**color(planck(temperature_k=t))) == pytest.approx(np.zeros(5), abs=1e-6)
    assert color_rendering_index(**color(planck(temperature_k=t))) == pytest.approx(np.full(5, 100.0), abs=1e-2)
    fine = np.arange(380.0, 780.5, 1.0)
    white = planck(temperature_k=3000.0, wavelength_nm=fine)
    assert color_rendering_index(**color(white, fine)) == pytest.approx(100.0, abs=0.05)


@pytest.mark.parametrize("apart", [-0.05, -0.01, -0.0019, 0.0, 0.0019, 0.0021, 0.03, 0.05])
@pytest.mark.parametrize("kelvin", [1100.0, 2700.0, 5000.0, 9000.0, 50000.0])
def test_nearest_point_against_a_direct_search(kelvin, apart):
    """A step off the locus at right angles, and the least distance by a bounded minimizer."""

    def uv(log_t):
        return np.array(chromaticity(**color(planck(temperature_k=np.exp(log_t))))[2:])

    middle = np.log(kelvin)
    along = uv(middle + 1e-4) - uv(middle - 1e-4)
    target = uv(middle) + apart * np.array([along[1], -along[0]]) / np.hypot(*along) * np.sign(along[1] or 1.0)
    # Never more than 5 % away: the step is at right angles
    bounds = (max(middle - 0.05, np.log(1000.0)), middle + 0.05)
    best = minimize_scalar(
        lambda t: np.hypot(*(uv(t) - target)), bounds=bounds, method="bounded", options={"xatol": 1e-9}
    )
    got = spectrum._nearest_on_locus(spectrum.Chromaticity(0.0, 0.0, *target))
    assert got[0] == pytest.approx(np.exp(best.x), rel=5e-5)
    assert abs(got[1]) == pytest.approx(best.fun, abs=1e-6)


def test_greenish_light_lies_above_the_locus_and_pinkish_below():
    green = np.exp(-(((GRID_NM - 530.0) / 40.0) ** 2))
    white = lamp("led_b3")
    assert duv(**color(white + 5.0 * green)) > 0.005 > 0 > duv(**color(white * (1.0 - 0.6 * green))) + 0.003


def test_far_colors_give_a_number_within_the_ends_and_words():
    lines = np.eye(151)[[int((w - 350.0) / 5.0) for w in (450.0, 530.0, 640.0)]]
    kelvin, apart = color_temperature_k(**color(lines)), duv(**color(lines))
    assert np.isfinite(apart).all()
    assert (kelvin >= 1000.0).all()
    assert (kelvin <= 100_000.0).all()
    assert kelvin[2] < 2000.0 < 20_000.0 < kelvin[0]
    # The end of the table, and the distance to that end
    ends = [np.array(chromaticity(**color(planck(temperature_k=t)))[2:]) for t in spectrum.LOCUS_K]
    blue = np.array(chromaticity(**color(lines[0]))[2:])
    assert kelvin[0] == pytest.approx(100_000.0)
    assert apart[0] == pytest.approx(-np.hypot(*(blue - ends[1])), rel=1e-9)
    assert "outside the tested" in beyond(spectrum.TESTED, distance_from_locus=float(apart[1]))[0]
    assert np.isfinite(color_rendering_index(**color(lines))).all()


def test_no_light_is_zero_never_nan():
    dark = np.zeros((2, 151))
    dark[1] = lamp("led_b3")
    # Infrared alone has power but no color
    infrared = np.where(GRID_NM > 850.0, 1.0, 0.0)
    for power in (dark, np.stack([infrared, dark[1]])):
        for formula in (color_temperature_k, color_rendering_index, luminous_efficacy_lm_w, duv):
            got = formula(**color(power))
            assert got[0] == 0.0
            assert got[1] != 0.0
    assert chromaticity(**color(dark[0])) == (0.0, 0.0, 0.0, 0.0)


def test_color_does_not_depend_on_brightness_and_each_row_is_on_its_own():
    rng = np.random.default_rng(3)
    power = lamp("led_b3") * np.exp(-rng.uniform(0, 2, (2, 3, 1)) * (500.0 / GRID_NM) ** 4)
    for formula in (color_temperature_k, duv, color_rendering_index, luminous_efficacy_lm_w):
        batch = formula(**color(power))
        assert batch.shape == (2, 3)
        assert batch == pytest.approx(formula(**color(power * 1e-9)), rel=1e-9)
        assert formula(**color(power[1, 2])) == pytest.approx(batch[1, 2], rel=1e-12)
        assert np.ndim(formula(**color(power[1, 2]))) == 0


def test_refusals():
    for change, sentence in (
        ({"power": [1.0, 2.0, 3.0]}, r"power has the shape \(3,\); its last axis must be that of wavelength_nm"),
        ({"power": [1.0, -1.0]}, "power is -1; it must be 0 or more"),
        ({"wavelength_nm": [500.0, 400.0]}, "a step of wavelength_nm is -100; it must be above 0"),
        ({"wavelength_nm": [0.0, 400.0]}, "wavelength_nm is 0; it must be finite, above 0"),
        ({"wavelength_nm": [400.0], "power": [1.0]}, "must be that of wavelength_nm, 2 or more"),
    ):
        with pytest.raises(OutOfRange, match=sentence):
            color_temperature_k(**{"wavelength_nm": [400.0, 500.0], "power": [1.0, 1.0], **change})


# Few wavelengths for many


def spectra():
    rng = np.random.default_rng(5)
    return lamp("led_b3") * np.exp(-rng.uniform(0, 3, (40, 1)) * (500.0 / GRID_NM) ** 4)


@pytest.mark.parametrize("count", [1, 2, 3, 5])
def test_nodes_are_exact_for_polynomials(count):
    weight = spectra()
    nodes, share = effective_wavelengths(weight=weight, count=count)
    assert nodes.shape == share.shape == (40, count)
    x, grid = (nodes - 600.0) / 100.0, (GRID_NM - 600.0) / 100.0
    for degree in range(2 * count):
        mean = integral(weight * grid**degree) / integral(weight)
        assert (share * x**degree).sum(axis=-1) == pytest.approx(mean, rel=1e-9, abs=1e-9)


def test_a_few_nodes_serve_smooth_functions_of_wavelength():
    weight = spectra()
    nodes, share = effective_wavelengths(weight=weight, count=4)
    for function in (lambda w: w**-2.0, lambda w: np.exp(-3 * (w / 550.0) ** 2), lambda w: np.cos(w / 150.0) + 2.0):
        mean = integral(weight * function(GRID_NM)) / integral(weight)
        assert (share * function(nodes)).sum(axis=-1) == pytest.approx(mean, rel=1e-4)


def test_nodes_of_lines_and_of_darkness():
    one, two = np.zeros(151), np.zeros(151)
    one[30], two[30], two[60] = 1.0, 1.0, 3.0
    nodes, share = effective_wavelengths(weight=np.stack([one, two, np.zeros(151)]), count=4)
    assert np.isfinite(nodes).all()
    assert (nodes >= 350.0).all()
    assert (nodes <= 1100.0).all()
    assert share.sum(axis=-1) == pytest.approx([1.0, 1.0, 0.0])
    assert nodes[0][share[0] > 1e-9] == pytest.approx([GRID_NM[30]])
    assert nodes[1][share[1] > 1e-9] == pytest.approx([GRID_NM[30], GRID_NM[60]])
    assert share[1][share[1] > 1e-9] == pytest.approx([0.25, 0.75])
    alone = effective_wavelengths(weight=two, count=4)
    assert alone.share @ alone.wavelength_nm == pytest.approx((share * nodes).sum(axis=-1)[1], rel=1e-12)
    for bad, sentence in (({"count": 0}, "count is 0; it must be from 1"), ({"weight": -two}, "weight is -1")):
        with pytest.raises(OutOfRange, match=sentence):
            effective_wavelengths(**{"weight": two, "count": 2, **bad})


def test_the_weights_of_the_rule_are_those_of_the_grid():
    assert spectrum._weights(GRID_NM.tobytes())[:, 3] == pytest.approx(QUADRATURE_NM, rel=1e-14)
