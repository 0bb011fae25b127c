"""Optical radiation: weights, limits, one case by hand for every line, and what is said of it."""

import dataclasses

import numpy as np
import pytest

from optics.scene.caution import EXCEEDS, lines
from optics.scene.exposure import (
    EDITIONS,
    Screening,
    actinic_weight,
    blue_light_weight,
    peak_factor,
    screening,
    thermal_weight,
)
from optics.scene.limits import (
    averaged_share,
    blue_light_limit_w_m2_sr,
    blue_light_small_limit_w_m2,
    infrared_eye_limit_w_m2,
    risk_group,
    skin_limit_w_m2,
    temperature_rise_k,
    thermal_limit_w_m2_sr,
)
from optics.spec import OutOfRange
from optics.spectrum import GRID_NM, QUADRATURE_NM, luminous_flux_lm, planck


def daylight(flux_lm, temperature_k=5600.0, high_nm=780.0):
    """A black body cut to 380-780 nm: as near to the blue share of an LED of 5600 K as the shortcut is."""
    power = np.where((GRID_NM >= 380) & (high_nm >= GRID_NM), planck(temperature_k=temperature_k), 0.0)
    return power * flux_lm / luminous_flux_lm(power)


def of(power, count=1, target=None, covered=(380.0, 780.0), **changed):
    given = {
        "exit_na": 0.56,
        "peak_factor": 1.0,
        "port_area_mm2": np.pi,
        "port_mm": 2.0,
        "tip_heat_w": 0.03,
        "tip_surface_mm2": 311.0,
        "face_heat_w": 0.5,
    } | changed
    arrays = {name: np.full(count, value) for name, value in given.items()}
    return screening(
        power_w_nm=np.tile(power, (count, 1)),
        target_w_m2_nm=np.tile(power * 100.0 if target is None else target, (count, 1)),
        covered=np.tile((covered[0] <= GRID_NM) & (covered[1] >= GRID_NM), (count, 1)),
        **arrays,
    )


def said(found, setting="industrial"):
    return {line.name: line for line in lines(screening=found, at=0, setting=setting)}


@pytest.mark.parametrize(("temperature_k", "mw_lm"), [(3000.0, 0.34), (5600.0, 0.90)])
def test_blue_light_of_a_lumen_by_the_shortcut(temperature_k, mw_lm):
    power = planck(temperature_k=temperature_k)
    blue = np.sum(power * QUADRATURE_NM * blue_light_weight(wavelength_nm=GRID_NM))
    assert 1e3 * blue / luminous_flux_lm(power) == pytest.approx(mw_lm, rel=0.01)


def test_weights_join_without_steps_where_they_should():
    for at in (500.0, 600.0):
        near = blue_light_weight(wavelength_nm=np.array([at - 1e-6, at, at + 1e-6]))
        np.testing.assert_allclose(near, near[1], rtol=1e-6)
    for at in (500.0, 700.0, 1050.0, 1150.0, 1200.0):
        near = thermal_weight(wavelength_nm=np.array([at - 1e-6, at + 1e-6]), edition=EDITIONS[0])
        assert near[0] == pytest.approx(near[1], rel=3e-3)
    np.testing.assert_array_equal(blue_light_weight(wavelength_nm=np.array([299.0, 701.0])), 0.0)
    np.testing.assert_array_equal(thermal_weight(wavelength_nm=np.array([379.0, 1401.0]), edition=EDITIONS[1]), 0.0)


def test_the_later_edition_never_weighs_more_up_to_500_nm():
    at = np.arange(380.0, 1400.0, 5.0)
    old, new = (thermal_weight(wavelength_nm=at, edition=edition) for edition in EDITIONS)
    assert np.all(new[at < 500] <= old[at < 500] + 1e-12)
    np.testing.assert_allclose(new[at >= 500], old[at >= 500])


def test_limits_at_their_ends():
    assert blue_light_limit_w_m2_sr(exposure_s=1e4) == 100.0
    assert blue_light_limit_w_m2_sr(exposure_s=1e6) == 100.0
    assert blue_light_small_limit_w_m2(exposure_s=np.array([1.0, 100.0, 1e5])).tolist() == [100.0, 1.0, 1.0]
    assert thermal_limit_w_m2_sr(source_rad=0.1, exposure_s=100.0) == pytest.approx(280_000)
    # The two branches meet at 10 s within half a percent, as the round figures do.
    assert thermal_limit_w_m2_sr(source_rad=0.05, exposure_s=10.0) == pytest.approx(28_000 / 0.05, rel=5e-3)
    assert thermal_limit_w_m2_sr(source_rad=0.5, exposure_s=1.0) == thermal_limit_w_m2_sr(
        source_rad=0.1, exposure_s=1.0
    )
    assert thermal_limit_w_m2_sr(source_rad=1e-4, exposure_s=100.0) == pytest.approx(28_000 / 0.011)
    assert infrared_eye_limit_w_m2(exposure_s=1000.0) == pytest.approx(100.0, rel=0.02)
    assert skin_limit_w_m2(exposure_s=1.0) == 20_000.0
    with pytest.raises(OutOfRange, match="exposure_s is 20; it must be from 0 to 10"):
        skin_limit_w_m2(exposure_s=20.0)


def test_risk_groups():
    """Each boundary from both sides; a source under 11 mrad goes by irradiance."""
    wide = {"irradiance_w_m2": 0.0, "source_rad": 0.02}
    for long, short, own, group in (
        (99, 9e3, 3e6, 0),
        (101, 9e3, 3e6, 1),
        (101, 1.1e4, 3e6, 2),
        (101, 1.1e4, 4.1e6, 3),
    ):
        assert risk_group(long_w_m2_sr=long, short_w_m2_sr=short, true_w_m2_sr=own, **wide) == group
    for e, group in ((0.9, 0), (1.1, 2), (399.0, 2), (401.0, 3)):
        bright = {"long_w_m2_sr": 1e9, "short_w_m2_sr": 1e9, "true_w_m2_sr": 1e9}
        assert risk_group(**bright, irradiance_w_m2=e, source_rad=0.01) == group


def test_averaging_over_the_field_of_view():
    """A 1.2 mm port at 200 mm is 6 mrad: 0.30 and 0.0036 of its radiance."""
    port = {"source_mm2": np.pi * 0.6**2, "distance_mm": 200.0}
    assert averaged_share(field_rad=0.011, **port) == pytest.approx(0.30, abs=0.005)
    assert averaged_share(field_rad=0.1, **port) == pytest.approx(0.0036, rel=1e-9)
    assert averaged_share(field_rad=0.001, **port) == 1.0


def test_a_white_guide_by_hand():
    """150 lm of 5600 K from 2 mm, NA 0.56: each quantity from the shortcut, areas and angles."""
    blue_w = 150 * 0.90e-3
    area, etendue = np.pi * 1e-6, np.pi * np.pi * 1e-6 * 0.56**2
    found = of(daylight(150.0))
    radiance = blue_w / etendue
    by_hand = {
        "blue_w_m2_sr": radiance,
        "blue_11_mrad_w_m2_sr": radiance * (2.0 / 2.2) ** 2,
        "blue_100_mrad_w_m2_sr": radiance * (2.0 / 20.0) ** 2,
        "blue_w_m2": radiance * area / 0.2**2,
        "target_blue_w_m2": 100 * blue_w,
    }
    for name, value in by_hand.items():
        assert getattr(found, name)[0] == pytest.approx(value, rel=0.01), name
    assert found.source_rad[0] == pytest.approx(0.010)
    assert found.risk_group_index[0] == 2
    assert found.thermal_limit_w_m2_sr[0] == pytest.approx(28_000 / 0.011)
    # 5600 K within 380-780 nm has about 200 lm/W: three quarters of a watt over 3.14 mm2.
    power = 150 / 197
    assert found.power_w[0] == pytest.approx(power, rel=0.03)
    assert found.exit_w_mm2[0] == pytest.approx(power / np.pi, rel=0.03)
    assert found.exit_skin_w_m2[0] == pytest.approx(1e6 * power / np.pi, rel=0.03)
    assert found.target_skin_w_m2[0] == pytest.approx(100 * power, rel=0.03)
    assert found.tip_rise_k[0] == pytest.approx(9.6, abs=0.05)


def test_thermal_uv_and_infrared_by_hand():
    """A flat spectrum, where the weights integrate in closed form."""
    flat = np.full(GRID_NM.size, 1e-3)
    found = of(flat, covered=(350.0, 1100.0))
    at_200 = np.pi / 200.0**2 * 1e6 / (np.pi * np.pi * 0.56**2)  # W/m2 at 200 mm per W out of the guide
    assert found.infrared_w_m2[0] == pytest.approx(0.001 * 320.0 * at_200, rel=1e-9)
    assert found.uva_w_m2[0] == pytest.approx(0.001 * 50.0 * at_200, rel=1e-9)
    near = 500 / np.log(10) * (1 - 10**-0.7)  # integral of 10^((700 - x)/500) over 700 to 1050
    blue = np.sum(np.interp(np.arange(380, 500, 5.0), GRID_NM, blue_light_weight(wavelength_nm=GRID_NM))) * 5
    per_sr = 1e6 / (np.pi * np.pi * 0.56**2) * 0.001
    assert found.thermal_2006_w_m2_sr[0] == pytest.approx(per_sr * (10 * blue + 200 + near + 10), rel=0.01)
    assert found.actinic_w_m2[0] == pytest.approx(0.001 * at_200 * 5 * (4.27e-4 + 3.4e-4 + 1.0e-4), rel=0.15)


def test_every_line_names_its_edition_and_what_it_means():
    found = said(of(daylight(150.0)))
    group = found["risk group by blue light at 200 mm"]
    assert group.value == 2.0
    assert "says nothing of 5 mm" in group.because
    over = found["blue-light radiance averaged over 11 mrad at 200 mm"]
    assert over.because.startswith(EXCEEDS)
    assert "IEC 62471:2006, read second-hand" in over.because
    below = found["blue-light radiance of the exit itself"]
    assert below.because.startswith("below the screening figure for")
    assert "from memory" in found["retinal thermal radiance, weights of ICNIRP 2013"].because
    assert "needs a rationale" in found["irradiance at the exit face"].because
    power = found["optical power, groups IIA to IIC up to temperature class T4"]
    assert power.because.startswith("exceeds the screening figure")
    assert "licensed assessor" in power.because
    assert not any("hazardous" in line.because for line in found.values())
    for line in found.values():
        if line.value is not None and line.limit is not None and "optical power" not in line.name:
            assert ("exceeds" in line.because) == (line.value > line.limit), line


def test_not_assessed_where_the_data_end():
    """No zero stands for light that nobody has data on."""
    found = said(of(daylight(150.0)))
    for name in ("infrared at the eye at 200 mm", "actinic ultraviolet at 200 mm", "UV-A at the eye at 200 mm"):
        assert found[name].value is None
        assert found[name].because.startswith("not assessed")
    none = said(of(daylight(150.0), covered=(2000.0, 3000.0)))
    assert all(line.value is None for name, line in none.items() if "heat" not in name)
    narrow = said(of(daylight(150.0), covered=(450.0, 700.0), port_mm=3.0))
    assert narrow["blue-light radiance of the exit itself"].because.startswith("not assessed: this part alone")
    # What is in the data may exceed a figure all the same.
    assert narrow["blue-light radiance averaged over 11 mrad at 200 mm"].because.startswith(EXCEEDS)
    strong = said(of(np.full(GRID_NM.size, 1.0), covered=(350.0, 1100.0)))
    assert strong["infrared at the eye at 200 mm"].because.startswith(EXCEEDS)
    aimless = said(of(daylight(150.0), target=np.full(GRID_NM.size, np.nan)))
    assert aimless["irradiance at the target"].value is None
    unknown = said(of(daylight(150.0), tip_surface_mm2=np.nan, face_heat_w=np.nan))
    assert unknown["heat rise of the tip in still air"].value is None
    assert unknown["heat left at the input face"].value is None


def test_weak_light_is_below_either_figure():
    """20 mW over 3 mm2: above 5 mW/mm2, but below 35 mW, and below it is either of the two."""
    weak = daylight(150.0)
    weak = weak * 0.020 / of(weak).power_w[0]
    name = "optical power, groups IIA to IIC up to temperature class T4"
    assert of(weak).exit_w_mm2[0] > 0.005
    line = said(of(weak))[name]
    assert line.because.startswith("below the screening figure for groups IIA to IIC")
    assert said(of(weak))["optical power, temperature class T6 and carbon disulfide"].because.startswith("exceeds")
    # Above 35 mW, but spread so thin that the other figure holds.
    assert said(of(weak * 3, port_area_mm2=20.0, port_mm=5.0))[name].because.startswith("below")


def test_the_setting_chooses_the_lines():
    clinical, industrial = said(of(daylight(150.0)), "clinical"), said(of(daylight(150.0)))
    assert not any("optical power" in name for name in clinical)
    assert sum("optical power" in name for name in industrial) == 3
    assert clinical["heat rise of the tip in still air"].because.startswith(EXCEEDS)
    assert industrial["heat rise of the tip in still air"].limit is None
    assert said(of(daylight(9.0), tip_heat_w=0.003), "clinical")[
        "heat rise of the tip in still air"
    ].because.startswith("below")


def test_more_light_is_more_of_everything_and_no_light_is_none():
    one, two, none = of(daylight(100.0)), of(daylight(200.0)), of(np.zeros(GRID_NM.size), exit_na=0.0)
    for name in ("power_w", "blue_w_m2_sr", "blue_w_m2", "thermal_2006_w_m2_sr", "exit_w_mm2", "target_skin_w_m2"):
        assert getattr(two, name)[0] == pytest.approx(2 * getattr(one, name)[0], rel=1e-12)
        assert getattr(none, name)[0] == 0.0
    assert none.risk_group_index[0] == 0


def test_batch_equals_scalar():
    rng = np.random.default_rng(1)
    count = 30
    given = {
        "power_w_nm": rng.uniform(0, 2e-3, (count, GRID_NM.size)),
        "target_w_m2_nm": rng.uniform(0, 1, (count, GRID_NM.size)),
        "covered": np.ones((count, GRID_NM.size), bool),
        "exit_na": rng.uniform(0.2, 0.8, count),
        "peak_factor": rng.uniform(1, 2, count),
        "port_area_mm2": rng.uniform(0.2, 8, count),
        "port_mm": rng.uniform(0.5, 3, count),
        "tip_heat_w": rng.uniform(0, 0.1, count),
        "tip_surface_mm2": rng.uniform(50, 500, count),
        "face_heat_w": rng.uniform(0, 1, count),
    }
    every = screening(**given)
    for at in (0, 13, 29):
        one = screening(**{name: value[at : at + 1] for name, value in given.items()})
        for field in dataclasses.fields(Screening):
            assert getattr(one, field.name)[0] == pytest.approx(getattr(every, field.name)[at], rel=1e-12)


def test_peak_of_a_cone():
    edges = np.array([[0.0, 0.1, 0.2, 0.4]] * 2)
    flux = np.array([[1.0, 1.0, 2.0], [0.0, 0.0, 0.0]])
    np.testing.assert_allclose(peak_factor(sine2_edges=edges, flux=flux, na=np.sqrt([0.4, 0.4])), [1.0, 1.0])


def test_refusals():
    with pytest.raises(OutOfRange, match="edition is 'iec'; it must be one of"):
        thermal_weight(wavelength_nm=500.0, edition="iec")
    with pytest.raises(OutOfRange, match="wavelength_nm is 300; it must be from 320"):
        actinic_weight(wavelength_nm=300.0)
    with pytest.raises(OutOfRange, match="port_area_mm2 is 0"):
        of(daylight(1.0), port_area_mm2=0.0)
    with pytest.raises(OutOfRange, match="surface_mm2 is -1"):
        temperature_rise_k(absorbed_w=1.0, film_w_m2_k=10.0, surface_mm2=-1.0)
