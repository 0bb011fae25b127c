"""Smaller is not always sharper: the curves against `size` at single places, where they stop and why, and what would help."""

import numpy as np
import pytest
from random_designs import CHIP
from scipy.special import erf

from optics import presets
from optics.chain.columns import columns
from optics.presets import edited, resolve, value_at
from optics.report.size import size
from optics.spec import OutOfRange
from optics.study.sharper import FLAT, over_all, over_f_number, over_flux, over_pitch
from optics.study.sharper_curves import contrasts, losses, needed_mtf, product_mtf, way_of
from optics.study.sharper_helps import helps
from optics.study.sharper_places import places
from optics.study.sharper_viewer import crack, kept_contrast_share, viewing
from optics.viewer.camera import rose_disc_um

SILICA = {"image.bundle.preset": "drawn_silica_3um"}
ON_CHIP = {"image.form": "chip", "image.chip": CHIP, "viewer": None}
EYE = {"viewer.form": "eye"}
RATED = {
    "source.launch.form": "rated",
    "source.launch.rated_lm": 40.0,
    "source.launch.reference_diameter_mm": 3.0,
    "source.launch.reference_na": 0.5,
}
DARK = {"source.lamp.flux_lm": 1e-9}
FORMS = {"demo": {}, "silica": SILICA, "chip": ON_CHIP, "eye": EYE, "rated": RATED}


@pytest.fixture(scope="module")
def made(document):
    return lambda settings: resolve(edited(document, settings)).fiberscope


def moved(document, curve, value) -> dict:
    """The settings of one place on a curve, by the words of its docstring."""
    found = {curve.path: float(value)}
    share = float(value) / curve.now
    if curve.path.endswith("pitch_um"):
        resolved = resolve(document).fiberscope.image.bundle
        found["image.bundle.core_um"] = resolved.core_um * share
    if curve.path.endswith("pixel_um"):
        found |= {
            f"image.chip.{side}": round(value_at(document, f"image.chip.{side}") / share)
            for side in ("columns", "rows")
        }
    if "flux" in curve.path and value_at(document, "source.launch.form") == "rated":
        found["source.launch.rated_lm"] = 40.0 * share
    return found


# The curves


@pytest.mark.parametrize("form", FORMS)
def test_curves_equal_size_at_single_places(document, form):
    own = edited(document, FORMS[form])
    for curve in over_all(resolve(own).fiberscope, 9):
        for row in (0, 4, len(curve.value) - 1):
            report = size(resolve(edited(own, moved(own, curve, curve.value[row]))).fiberscope)
            assert curve.resolved_lp_mm[row] == pytest.approx(report.summary.resolved_lp_mm or 0.0, rel=1e-9)
            assert curve.lattice_limit_lp_mm[row] == pytest.approx(report.detail.lattice_limit_lp_mm, rel=1e-9)
            if curve.resolved_lp_mm[row] > 0:
                assert curve.limited_by[row] == report.summary.limited_by


@pytest.mark.parametrize("form", FORMS)
def test_the_design_stands_on_its_curves(made, form):
    scope = made(FORMS[form])
    resolved = size(scope).summary.resolved_lp_mm
    for curve in over_all(scope, 15):
        assert (np.diff(curve.value) > 0).all()
        assert curve.now in curve.value
        assert curve.now_lp_mm == pytest.approx(resolved, rel=1e-9)
        assert curve.best_lp_mm >= curve.resolved_lp_mm.max() * (1 - 1e-6)


def test_a_solved_diameter_stays_what_it_is(made):
    scope = made({"image.bundle.diameter_mm": "solve", "body.section.outer_diameter_mm": 4.0})
    curve = over_pitch(scope, 9)
    assert curve.now_lp_mm == pytest.approx(size(scope).summary.resolved_lp_mm, rel=1e-9)


def test_the_best_is_closed_in_on(made):
    """Against a scan of 400 places; it does not hang on how coarse the first curve is."""
    scope = made(SILICA)
    fine = over_pitch(scope, 401)
    for count in (41, 61):
        curve = over_pitch(scope, count)
        assert curve.best_lp_mm >= fine.resolved_lp_mm.max() * (1 - 0.01)
        assert curve.best == pytest.approx(fine.best, rel=0.12)


# Where more of the same stops helping


def test_smaller_stops_being_sharper_where_crosstalk_takes_over(made):
    curve = over_pitch(made({**SILICA, "viewer.camera.relay_magnification": 6.0}))
    assert curve.stops
    assert curve.because == "crosstalk"
    assert 2.0 < curve.best < 3.2
    far_below = curve.resolved_lp_mm[curve.value < 0.6 * curve.best]
    assert far_below.max() < 0.75 * curve.best_lp_mm
    finer, best = (
        size(made({**SILICA, "image.bundle.pitch_um": pitch, "image.bundle.core_um": pitch * 2.0 / 3.2}))
        for pitch in (0.7 * curve.best, curve.best)
    )
    lost = {line.name: line.contrast for line in finer.detail.ledger}["crosstalk"]
    assert lost < {line.name: line.contrast for line in best.detail.ledger}["crosstalk"]
    assert finer.detail.lattice_limit_lp_mm > best.detail.lattice_limit_lp_mm


def test_cores_of_higher_na_may_stand_closer(made):
    relay = {"viewer.camera.relay_magnification": 6.0}
    low, high = (over_pitch(made({**SILICA, **relay, "image.bundle.na": na})) for na in (0.35, 0.5))
    assert high.best < low.best
    assert high.best_lp_mm > low.best_lp_mm


def test_an_endless_number_of_cores_is_told_by_area(made):
    curve = over_pitch(made({}), 9)
    assert curve.core_count == pytest.approx(np.pi / (2 * np.sqrt(3)) * (1000.0 / curve.value) ** 2)
    assert curve.pixels_per_pitch == pytest.approx(curve.value * 1.5 / 3.45)
    assert curve.few_pixels.tolist() == (curve.pixels_per_pitch < 4 / np.sqrt(3)).tolist()
    assert curve.pixels_per_pitch[0] == pytest.approx(2 / np.sqrt(3))


def test_more_light_helps_until_the_lattice_limits(made):
    curve = over_flux(made({}))
    assert (np.diff(curve.resolved_lp_mm) >= -1e-9 * curve.best_lp_mm).all()
    assert curve.because == "lattice"
    assert curve.resolved_lp_mm[-1] == pytest.approx(curve.now_lp_mm, rel=1e-6)
    dim = size(made({"source.lamp.flux_lm": float(curve.enough)}))
    assert dim.summary.resolved_lp_mm == pytest.approx(FLAT * curve.best_lp_mm, rel=0.01)


def test_more_light_helps_until_the_lens_limits(made):
    slow = {
        "image.bundle.pitch_um": 4.0,
        "image.bundle.core_um": 3.2,
        "image.bundle.na": 0.8,
        "image.objective.f_number": 40.0,
    }
    curve = over_flux(made(slow))
    assert curve.because == "objective"
    assert curve.limited_by[0] == "light"


def test_a_wider_stop_blurs_what_is_out_of_focus(made):
    blurred = {
        "scene.target.distance_mm": 8.0,
        "scene.target.near_mm": None,
        "image.objective.f_number": 2.0,
    }
    curve = over_f_number(made(blurred))
    assert curve.best > 4.0
    assert curve.because == "focus"
    assert over_f_number(made({})).best < 2.0


def test_nothing_is_resolved_in_the_dark(made):
    for curve in over_all(made(DARK), 11, ("pitch", "f_number")):
        assert curve.resolved_lp_mm.tolist() == [0.0] * len(curve.value)
        assert (curve.now_lp_mm, curve.best_lp_mm, curve.because, curve.stops) == (0.0, 0.0, None, False)
    light = over_flux(made(DARK))
    assert light.resolved_lp_mm[0] == 0
    assert light.best_lp_mm == pytest.approx(size(made({})).summary.resolved_lp_mm, rel=1e-3)


def test_what_has_no_image_is_refused(made):
    bare = made(dict.fromkeys(("scene", "image", "viewer", "body")))
    for study in (
        over_pitch,
        contrasts,
        places,
        viewing,
        lambda scope: crack(scope, 0.1),
        lambda scope: helps(scope, ()),
    ):
        with pytest.raises(OutOfRange, match="image is missing"):
            study(bare)
    with pytest.raises(OutOfRange, match="count is 2"):
        over_pitch(made({}), 2)


# The contrast behind it


@pytest.mark.parametrize("form", FORMS)
def test_what_is_left_meets_what_is_needed_where_it_is_resolved(made, form):
    scope = made(FORMS[form])
    report, seen = size(scope), contrasts(scope)
    way = way_of(columns([scope]))
    at = np.array([report.summary.resolved_lp_mm]) / way.size_ratio
    left, needed = float(product_mtf(way.parts, at)[0]), float(needed_mtf(way.parts, at)[0])
    if report.summary.resolved_lp_mm < 0.9999 * report.detail.lattice_limit_lp_mm:
        assert left == pytest.approx(needed, rel=1e-5)
    else:
        assert left >= needed
    ledger = {line.name: line.contrast for line in report.detail.ledger}
    for part, curve in seen.mtf.items():
        here = np.interp(report.summary.resolved_lp_mm, seen.frequency_lp_mm, curve)
        assert here == pytest.approx(ledger[part], abs=2e-3)
        assert curve[0] == pytest.approx(1.0 if part != "crosstalk" else curve[0])
    assert seen.product_mtf == pytest.approx(np.prod(list(seen.mtf.values()), axis=0))


def test_a_veil_takes_contrast_at_every_frequency(made):
    clear, veiled = (contrasts(made({"image.bundle.veil_ratio": ratio})) for ratio in (0.0, 0.25))
    assert veiled.product_mtf[0] == pytest.approx(0.8 * clear.product_mtf[0])


def test_costs_are_the_log_of_the_ledger(made):
    scope = made(SILICA)
    report = size(scope)
    cost = losses(way_of(columns([scope])), report.summary.resolved_lp_mm)
    for line in report.detail.ledger:
        if line.name != "light":
            assert float(cost[line.name][0]) == pytest.approx(-np.log(line.contrast), rel=1e-6, abs=1e-9)
    parts = sum(float(cost[line.name][0]) for line in report.detail.ledger if line.name != "light")
    assert parts == pytest.approx(-float(cost["light"][0]), rel=1e-4)


# What would help


@pytest.mark.parametrize(
    "settings",
    [
        {},
        {**SILICA, "needs.smallest_gap_mm": 0.1},
        {"source.lamp.flux_lm": 0.02},
        {"image.objective.focus_mm": 8.0},
        {"viewer.camera.relay_magnification": 0.5},
        EYE,
        ON_CHIP,
    ],
)
def test_each_help_is_what_size_gives(document, settings):
    own = edited(document, settings)
    scope = resolve(own).fiberscope
    now = size(scope)
    found = helps(scope, over_all(scope, 31))
    assert found
    for help in found:
        then = size(resolve(edited(own, help.settings)).fiberscope)
        assert then.summary.resolved_lp_mm == pytest.approx(help.resolved_lp_mm, rel=1e-9)
        assert then.summary.field_of_view_deg == pytest.approx(help.field_of_view_deg, rel=1e-9)
        assert help.gain_share == pytest.approx(help.resolved_lp_mm / now.summary.resolved_lp_mm - 1)
        met = {line.name for line in now.needs if line.met}
        assert set(help.breaks) >= {line.name for line in then.needs if not line.met and line.name in met}
    free = [help.resolved_lp_mm for help in found if not help.breaks]
    assert free == sorted(free, reverse=True)


def test_an_open_need_is_aimed_at(document):
    own = edited(document, {"needs.smallest_gap_mm": 0.19})
    scope = resolve(own).fiberscope
    finer = next(help for help in helps(scope, over_all(scope)) if "image.bundle.pitch_um" in help.settings)
    assert 0.97 * 0.19 < finer.smallest_gap_mm <= 0.19


def test_refocusing_helps_what_is_out_of_focus(document):
    own = edited(document, {"image.objective.focus_mm": 5.0, "image.objective.f_number": 2.0})
    scope = resolve(own).fiberscope
    assert size(scope).summary.limited_by == "focus"
    assert any(help.settings == {"image.objective.focus_mm": 20.0} for help in helps(scope, over_all(scope)))


def test_a_finer_pitch_brings_pixels_enough(document):
    scope = resolve(document).fiberscope
    finer = helps(scope, over_all(scope))[0].settings
    pixels = finer["image.bundle.pitch_um"] * finer["viewer.camera.relay_magnification"] / 3.45
    assert 4 / np.sqrt(3) <= pixels < 2.4


# Places, viewer, single things


def test_places_are_what_size_gives_there(document):
    scope = resolve(document).fiberscope
    near, work, far, edge = places(scope)
    assert (near.distance_mm, work.distance_mm, far.distance_mm) == (10.0, 20.0, 40.0)
    for place in (near, work, far):
        alone = {"scene.target.near_mm": None, "scene.target.far_mm": None}
        there = size(resolve(edited(document, {**alone, "scene.target.distance_mm": place.distance_mm})).fiberscope)
        assert place.resolved_lp_mm == pytest.approx(there.summary.resolved_lp_mm, rel=1e-9)
        assert place.lux == pytest.approx(there.target.center_lux, rel=1e-9)
        assert (place.snr, place.limited_by) == (pytest.approx(there.detail.snr), there.summary.limited_by)
    assert edge.resolved_lp_mm < work.resolved_lp_mm
    assert edge.lux == pytest.approx(size(scope).target.min_lux, rel=1e-3)


@pytest.mark.parametrize("mapping", ["tan", "f_theta"])
@pytest.mark.parametrize("medium", ["air", "water"])
def test_the_edge_of_a_narrow_field_is_its_middle(made, mapping, medium):
    narrow = {
        "image.bundle.diameter_mm": 0.12,
        "image.objective.focal_mm": 5.0,
        "image.objective.mapping": mapping,
        "scene.target.medium": medium,
        "image.objective.pupil_depth_mm": 1.0,
    }
    _, work, _, edge = places(made(narrow))
    assert edge.resolved_lp_mm == pytest.approx(work.resolved_lp_mm, rel=2e-3)


def test_the_edge_of_a_wide_field_loses_the_lens_cutoff(made):
    """A slow lens alone limits: with "tan" its cutoff along the radius falls by cos^3 of the half field."""
    slow = {
        **ON_CHIP,
        "image.objective.f_number": 60.0,
        "image.chip": {**CHIP, "threshold_snr": 0.05, "color_filter": False},
        "scene.target.detail_contrast": 1.0,
    }
    scope = made(slow)
    half = np.deg2rad(size(scope).summary.field_of_view_deg / 2)
    _, work, _, edge = places(scope)
    assert work.limited_by == "objective"
    assert edge.resolved_lp_mm / work.resolved_lp_mm == pytest.approx(np.cos(half) ** 3, rel=0.03)


@pytest.mark.parametrize(
    "settings", [{"scene.target.tilt_deg": 20.0}, {"scene.target.form": "bore", "scene.target.bore_mm": 20.0}]
)
def test_no_edge_where_there_is_no_facing_field(made, settings):
    assert [place.name for place in places(made(settings))] == ["near", "work", "far"]


def test_a_camera_in_numbers(made):
    report, seen = size(made({})), viewing(made({}))
    assert (seen.snr, seen.exposure_s) == (report.detail.snr, report.detail.exposure_s)
    assert seen.well_share == pytest.approx(0.5)
    assert seen.frame_hz * seen.exposure_s == pytest.approx(1.0)
    assert seen.beat_mm is None
    few = viewing(made({"viewer.camera.relay_magnification": 0.6}))
    assert few.pixels_per_pitch == pytest.approx(10 * 0.6 / 3.45)
    assert few.even_relay_magnification * 10 / 3.45 == pytest.approx(4 / np.sqrt(3))
    assert few.beat_mm > size(made({})).detail.pitch_at_target_mm
    assert viewing(made({"source.lamp.flux_lm": 0.01})).well_share < 0.1


def test_an_eye_in_numbers(made):
    seen = viewing(made({**EYE, "viewer.eye.eyepiece_focal_mm": 25.0}))
    assert seen.eyepiece_magnification == 10.0
    assert seen.angular_pitch_arcmin == pytest.approx(1.375, abs=5e-4)
    assert (seen.snr, seen.exposure_s, seen.spot_mm, seen.pixels_per_pitch) == (None, None, None, None)
    assert seen.seen_cd_m2 > 0


def test_a_large_spot_follows_the_counted_light(made):
    """Far above the blur: Rose's law in the quanta that the signal to noise stands for, read noise and all."""
    scope = made({"scene.target.detail_contrast": 0.01})
    seen, pitch = viewing(scope), 10.0
    quanta = seen.snr**2 / (np.sqrt(3) / 2 * pitch**2)
    alone = rose_disc_um(contrast=0.01, threshold_snr=5.0, quanta_per_um2=quanta) / 1000
    magnified = pitch / 1000 / size(scope).detail.pitch_at_target_mm
    assert seen.spot_mm * magnified == pytest.approx(alone, rel=0.03)
    assert viewing(made({"scene.target.detail_contrast": 0.1})).spot_mm < seen.spot_mm
    assert viewing(made(DARK)).spot_mm is None


def test_a_thin_crack_keeps_contrast_by_its_width(made):
    scope = made({})
    thin, twice = crack(scope, 0.002), crack(scope, 0.004)
    assert twice.kept_share == pytest.approx(2 * thin.kept_share, rel=2e-3)
    assert not thin.seen
    kept = [crack(scope, width).kept_share for width in (0.02, 0.05, 0.1, 0.2, 0.4, 3.0)]
    assert kept == sorted(kept)
    assert kept[-1] == pytest.approx(1.0, abs=0.01)
    assert crack(made({"image.bundle.veil_ratio": 0.25}), 3.0).kept_share == pytest.approx(0.8, abs=0.01)


def test_a_crack_is_seen_and_parted_as_the_headline_says(made):
    report, scope = size(made({})), made({})
    gap, line = report.summary.smallest_gap_mm, report.summary.smallest_line_mm
    assert [crack(scope, width).seen for width in (0.99 * line, 1.01 * line)] == [False, True]
    assert [crack(scope, width).parted for width in (0.99 * gap, 1.01 * gap)] == [False, True]
    assert not crack(made(DARK), 1.0).seen


def test_a_line_through_a_gaussian_blur():
    """Against the error function: MTF exp(-(f/f0)^2) spreads a line as a Gaussian."""
    frequency = np.linspace(0.0, 1500.0, 3001)
    for width in (0.5, 3.0, 20.0):
        kept = kept_contrast_share(width_um=width, frequency_lp_mm=frequency, mtf=np.exp(-((frequency / 100.0) ** 2)))
        assert kept == pytest.approx(erf(np.pi * width * 0.1 / 2), rel=1e-4)


def test_every_demo_is_answered():
    from optics.tables import preset_names

    for name in preset_names("fiberscopes"):
        scope = presets.open(name).fiberscope
        curves = over_all(scope, 31)
        assert all(curve.best_lp_mm >= curve.now_lp_mm * (1 - 1e-6) > 0 for curve in curves)
        assert helps(scope, curves)
        assert len(places(scope)) >= 3
