"""The picture of a whole design against what the chain says of it: scale, light, signal, noise, contrast, counts."""

import copy

import numpy as np
import pytest

from optics import presets
from optics.chain.columns import columns
from optics.chain.target import field_of_view
from optics.figures.export import png
from optics.figures.palette import DARK
from optics.figures.view import coded, view
from optics.report.picture import view_of
from optics.report.picture_back import back_of
from optics.report.picture_front import front_of
from optics.report.size import size
from optics.report.views import target_map
from optics.spec import OutOfRange

RAW = {"subject": "flat", "width_px": 1000, "seed": 3, "smooth": None, "noise": False}


def scope(name: str = "gearbox_tooth", **changed):
    """A demo design with settings by path (dots as __); a chip or a bare guide drops what it cannot have."""
    document = copy.deepcopy(presets.open(name).document)
    settings = {path.replace("__", "."): value for path, value in changed.items()}
    if settings.get("image.form") == "chip":
        document.pop("viewer")
    return presets.resolve(presets.edited(document, settings)).fiberscope


def round_mean(picture, radius_share: float) -> float:
    """Mean of the view over a round part of its field, softly weighted."""
    rows, columns = picture.view.shape
    away = (
        np.hypot(np.arange(columns) - (columns - 1) / 2, (np.arange(rows) - (rows - 1) / 2)[:, None]) * picture.pixel_mm
    )
    weight = np.cos(np.pi / 2 * np.minimum(away / (radius_share * picture.field_mm / 2), 1)) ** 2
    return float((picture.view * weight).sum() / weight.sum())


# Scale


@pytest.mark.parametrize("name", ["gearbox_tooth", "airway_small_animal", "turbine_casing"])
def test_the_field_is_as_wide_as_the_chain_says(name):
    """In focus or not: the airway design is focused at 9 mm and looks at 10."""
    design = scope(name)
    picture = view_of(design, **RAW)
    assert picture.field_mm == pytest.approx(2 * size(design).target.field_radius_mm, rel=1e-6)
    assert picture.one_scale
    assert picture.pixel_mm * picture.view.shape[1] == pytest.approx(1.05 * picture.field_mm, rel=0.01)
    assert picture.sample_mm * len(picture.subject_reflectance) == pytest.approx(
        picture.pixel_mm * picture.view.shape[1], rel=0.06
    )


def test_a_barrel_under_water_looks_where_the_chain_says():
    from optics.report.picture_front import _sight

    design = scope(scene__target__medium="water", image__objective__mapping="f_theta")
    back = back_of(design)
    rim = _sight(design, back, back.image_mm * 1000, 3)
    assert rim.u_mm[1, 2] == pytest.approx(float(field_of_view(columns([design]))["field_radius_mm"][0]), rel=1e-9)


def test_bars_of_the_subject_keep_their_size_in_the_view():
    """Upright bars of the coarsest pattern: the strongest wave across them is at their frequency at the target."""
    from optics.viewer.bars import bar_frequencies_lp_mm

    picture = view_of(scope("turbine_casing"), **{**RAW, "subject": "bars", "smooth": 0.01})
    rows, count = picture.view.shape
    coarsest = bar_frequencies_lp_mm(width_mm=picture.sample_mm * len(picture.subject_reflectance))[0]
    bar = 0.5 / coarsest / picture.pixel_mm
    # where the target's first pattern lies: 0.30 of the width up, its middle half of 5 bars below
    top = int(rows / 2 + 0.30 * picture.sample_mm * len(picture.subject_reflectance) / picture.pixel_mm)
    line = picture.view[int(top - 3.5 * bar) : int(top - 1.5 * bar), : count // 2].mean(axis=0)
    dark = 1 - line / np.maximum(np.convolve(line, np.ones(int(6 * bar)) / int(6 * bar), "same"), 1)
    middle = dark[int(count / 2 - 0.30 * count) : int(count / 2 - 0.30 * count + 7 * bar)]
    at = np.arange(len(middle)) * picture.pixel_mm
    tried = np.linspace(0.5 * coarsest, 1.6 * coarsest, 300)
    strength = [abs((middle * np.hanning(len(middle)) * np.exp(-2j * np.pi * f * at)).sum()) for f in tried]
    assert tried[int(np.argmax(strength))] == pytest.approx(coarsest, rel=0.08)


# Light


def test_the_level_is_half_a_well_where_the_exposure_fills_it():
    design = scope()
    picture, camera = view_of(design, **RAW), design.viewer.camera
    assert picture.exposure_s == pytest.approx(size(design).detail.exposure_s, rel=1e-9)
    bundle = design.image.bundle
    share = 0.9069 * (bundle.core_um / bundle.pitch_um) ** 2
    alive = 1 - picture.dead / picture.cores
    assert round_mean(picture, 0.2) == pytest.approx(0.5 * camera.full_well_e * share * alive, rel=0.03)


def test_light_falls_toward_the_rim_as_the_target_map_and_the_lens_say():
    """A facing plane: illuminance of the map times cos^4 w, over that in the middle."""
    design = scope()
    picture, mapped = view_of(design, **{**RAW, "smooth": 0.001}), target_map(design, 121)
    at = 0.8 * picture.field_mm / 2
    half = np.arctan(at / 20.0)
    for angle in (0.0, np.pi / 2, 2.3):
        u, v = at * np.cos(angle), at * np.sin(angle)
        lux = mapped.lux[np.argmin(np.abs(mapped.v_mm - v)), np.argmin(np.abs(mapped.u_mm - u))] / mapped.center_lux

        def local(x, y):
            row, column = (
                round(c / picture.pixel_mm + (n - 1) / 2)
                for c, n in ((y, picture.view.shape[0]), (x, picture.view.shape[1]))
            )
            return picture.view[row - 12 : row + 13, column - 12 : column + 13].mean()

        assert local(u, v) / local(0.0, 0.0) == pytest.approx(lux * np.cos(half) ** 4, rel=0.05)


def test_cores_at_the_rim_lose_the_tilted_cone_of_a_near_pupil():
    far, near = (view_of(scope(image__objective__exit_pupil_mm=e), **{**RAW, "smooth": 0.001}) for e in (100.0, 1.1))
    rows = far.view.shape[0]
    edge = np.s_[rows // 2 - 12 : rows // 2 + 13, int(0.93 * rows) - 12 : int(0.93 * rows) + 13]
    middle = np.s_[rows // 2 - 12 : rows // 2 + 13, rows // 2 - 12 : rows // 2 + 13]
    kept = [one.view[edge].mean() / one.view[middle].mean() for one in (far, near)]
    assert kept[1] < 0.6 * kept[0]


def test_the_signal_and_its_noise_are_the_chains():
    """Dim light, cores all alike: a cell of pixels scatters over exposures as the chain's SNR says."""
    design = scope(source__lamp__flux_lm=0.02, image__bundle__transmission_spread=0.0, image__bundle__dead_fraction=0.0)
    told = size(design).detail
    bundle, back = design.image.bundle, back_of(design)
    pitches = 1000 * back.image_mm / bundle.pitch_um
    cell = np.sqrt(3) / 2 * bundle.pitch_um**2 / back.pixel_um**2
    sums = []
    for seed in range(6):
        # the middle of the field
        picture = view_of(design, **{**RAW, "noise": True, "seed": seed})
        quiet = view_of(design, **{**RAW, "seed": seed})
        middle, span = picture.view.shape[0] // 2, int(0.1 * pitches * np.sqrt(cell))
        part = np.s_[middle - span : middle + span, middle - span : middle + span]
        sums.append((picture.view[part] - quiet.view[part], quiet.view[part]))
    noise, signal = np.concatenate([n.ravel() for n, _ in sums]), np.concatenate([s.ravel() for _, s in sums])
    snr = signal.mean() * cell / np.sqrt(noise.var() * cell)
    assert snr == pytest.approx(told.snr, rel=0.03)


def test_a_dark_middle_is_lit_from_the_sides_and_fills_wells_there():
    picture = view_of(
        scope(scene__target__distance_mm=2.0, scene__target__near_mm=2.0, scene__ports__offset_mm=3.0), **RAW
    )
    middle = picture.view.shape[0] // 2
    assert picture.view[middle - 5 : middle + 6, middle - 5 : middle + 6].max() < 0.02 * picture.view.max()
    assert np.isfinite(picture.view).all()
    assert any("its middle is dark" in said for said in picture.words)


def test_a_field_without_light_is_black_and_said_to_be():
    picture = view_of(
        scope(scene__target__distance_mm=2.0, scene__target__near_mm=2.0, scene__ports__offset_mm=3.4), **RAW
    )
    assert picture.view.max() == 0.0
    assert "No light of the scope's own reaches the field of view." in picture.words


def test_saturation_is_counted_and_said():
    picture = view_of(
        scope(scene__target__distance_mm=3.0, scene__target__near_mm=3.0, scene__ports__offset_mm=2.5),
        **{**RAW, "noise": True},
    )
    assert picture.saturated_share > 0.05
    assert any("saturated" in said for said in picture.words)


# Contrast


def test_the_lens_is_the_chains_at_what_is_resolved():
    design = scope()
    report, back = size(design), back_of(design)
    at_image = report.summary.resolved_lp_mm / back.magnification
    said = {line.name: line.contrast for line in report.detail.ledger}
    assert np.interp(at_image, back.lens_lp_mm, back.lens_mtf) == pytest.approx(said["objective"], rel=2e-3)


def test_blur_grows_away_from_a_tilted_plane_s_middle():
    design = scope(scene__target__tilt_deg=50.0)
    front = front_of(design, back_of(design), subject="flat", side_um=1050.0, samples=320, seed=1)
    blur = front.defocus_um
    assert blur[32, 32] < 0.2  # the middle is in focus
    assert blur[32, 0] > 3.0
    assert blur[32, -1] > 1.0
    assert not front.one_scale


def test_smoothing_says_what_it_costs():
    raw, smooth = (view_of(scope(), **{**RAW, "smooth": share}) for share in (None, 0.01))
    rows = raw.view.shape[0]
    part = np.s_[rows // 2 - 60 : rows // 2 + 60, rows // 2 - 60 : rows // 2 + 60]
    assert smooth.view[part].std() < 0.25 * raw.view[part].std()
    assert any("keeps 0.32 of the contrast at the lattice limit" in said for said in smooth.words)


# Forms


def test_a_chip_sees_without_cores():
    picture = view_of(scope(image__form="chip"), **{**RAW, "subject": "bars", "noise": True, "smooth": 0.1})
    chip = scope(image__form="chip").image.chip
    assert picture.view.shape == (chip.rows, chip.columns)
    assert (picture.viewer, picture.cores, picture.field_mm) == ("chip", 0, None)
    assert any("no honeycomb" in said for said in picture.words)


def test_an_eye_sees_luminance_without_noise():
    design = scope(viewer__form="eye")
    one, other = (view_of(design, **{**RAW, "noise": noise, "width_px": 400}) for noise in (True, False))
    assert np.array_equal(one.view, other.view)
    assert one.exposure_s is None
    from optics.chain.evaluate import evaluate

    told = float(evaluate(columns([design])).value["seen_cd_m2"][0])
    alive = 1 - one.dead / one.cores
    assert round_mean(one, 0.2) == pytest.approx(told * alive, rel=0.03)
    assert any("is resolved on axis" in said for said in one.words)


def test_a_bore_is_dark_down_its_axis_and_has_no_scale():
    picture = view_of(scope(scene__target__form="bore", scene__target__bore_mm=16.0), **{**RAW, "subject": "cracks"})
    middle = picture.view.shape[0] // 2
    assert picture.view[middle - 8 : middle + 9, middle - 8 : middle + 9].mean() < 0.02 * picture.view.mean()
    assert picture.wall
    assert not picture.one_scale


def test_a_mirror_turns_the_view_and_not_the_subject():
    tip = {
        "image__tip": {
            "view_deg": 90.0,
            "glass_path_mm": 0.0,
            "index": 1.0,
            "transmission": 1.0,
            "added_length_mm": 0.0,
        }
    }
    straight = {"image__tip": {**tip["image__tip"], "view_deg": 0.0}}
    ahead, aside = (view_of(scope(**one), **{**RAW, "subject": "gear"}) for one in (straight, tip))
    assert np.array_equal(ahead.view[:, ::-1], aside.view)
    assert np.array_equal(ahead.subject_reflectance, aside.subject_reflectance)
    assert aside.mirrored
    assert "mirror image" in " ".join(aside.words)


def test_fewer_pixels_hold_the_same_electrons():
    fine, coarse = (view_of(scope(), **{**RAW, "width_px": width}) for width in (1000, 160))
    assert coarse.view.shape[0] <= 160
    assert coarse.view.sum() == pytest.approx(fine.view.sum(), rel=0.01)
    assert any("the sum of 3 x 3" in said for said in coarse.words)


def test_a_bundle_of_too_many_cores_shows_its_middle_and_says_so():
    picture = view_of(scope("turbine_casing", image__bundle__diameter_mm=5.0), **{**RAW, "width_px": 600})
    assert 190_000 < picture.cores <= 200_500
    assert any(said.startswith("Only the middle") for said in picture.words)


def test_a_diameter_that_is_solved_for_is_the_chains():
    design = scope(image__bundle__diameter_mm="solve", body__section__outer_diameter_mm=4.2)
    picture = view_of(design, **RAW)
    assert picture.field_mm == pytest.approx(2 * size(design).target.field_radius_mm, rel=1e-6)


def test_the_same_seed_gives_the_same_picture():
    given = {**RAW, "subject": "cracks", "noise": True}
    one, again, other = (view_of(scope("airway_small_animal"), **{**given, "seed": seed}) for seed in (3, 3, 4))
    assert np.array_equal(one.view, again.view)
    assert one.words == again.words
    assert not np.array_equal(one.view, other.view)


def test_red_tissue_is_red_to_a_color_camera_and_grey_to_a_grey_one():
    assert view_of(scope("gearbox_tooth"), **RAW).tint == (1.0, 1.0, 1.0)
    red, green, blue = view_of(scope("airway_small_animal"), **RAW).tint
    assert red == 1.0
    assert blue < green < 0.7


def test_without_an_image_there_is_no_picture():
    document = {
        name: part
        for name, part in presets.open("gearbox_tooth").document.items()
        if name not in ("image", "viewer", "needs", "body")
    }
    assert view_of(presets.resolve(document).fiberscope, **RAW) is None


@pytest.mark.parametrize(
    ("changed", "said"),
    [
        ({"subject": "moon"}, "subject is 'moon'"),
        ({"width_px": 8}, "width_px is 8"),
        ({"smooth": 1.5}, "smooth is 1.5"),
    ],
)
def test_what_cannot_be_is_refused(changed, said):
    with pytest.raises(OutOfRange, match=said):
        view_of(scope(), **{**RAW, **changed})


# The figure


def test_the_figure_is_the_same_each_time_and_keeps_its_words_inside():
    picture = view_of(scope(), **{**RAW, "subject": "gear", "smooth": 0.02, "width_px": 300})
    one, again = (png(view(picture)) for _ in range(2))
    assert one == again
    for width_in in (3.2, 5.2):
        figure = view(picture, width_in=width_in, palette=DARK)
        figure.canvas.draw()
        sheet = figure.bbox
        for axes in figure.axes:
            for text in axes.texts:
                box = text.get_window_extent()
                assert box.x0 >= sheet.x0 - 1
                assert box.x1 <= sheet.x1 + 1, text.get_text()


def test_both_panels_have_one_scale_and_the_bar_fits_it():
    picture = view_of(scope(), **{**RAW, "width_px": 300})
    figure = view(picture)
    left, right = figure.axes[1:3]
    assert left.get_xlim() == right.get_xlim()
    bar = figure.axes[0].patches[0].get_width()
    said = float(next(text.get_text() for text in figure.axes[0].texts if "mm" in text.get_text()).split()[0])
    wide_in = left.get_position().width * figure.get_size_inches()[0]
    assert bar / wide_in == pytest.approx(said / np.ptp(left.get_xlim()))


def test_zoom_shows_the_middle_larger():
    picture = view_of(scope(), **{**RAW, "width_px": 300})
    near, far = (np.ptp(view(picture, zoom=zoom).axes[1].get_xlim()) for zoom in (4.0, 1.0))
    assert far == pytest.approx(4 * near)


def test_levels_are_coded_as_srgb():
    """Half of white in light is 188 of 255, 0.2140 is 127.5 (IEC 61966-2-1)."""
    bytes_of = coded(np.array([[0.0, 0.5, 0.214, 1.0, 2.0]]), 1.0, (1.0, 1.0, 1.0))
    assert bytes_of[0, :, 0].tolist() == [0, 188, 127, 255, 255] or bytes_of[0, :, 0].tolist() == [
        0,
        188,
        128,
        255,
        255,
    ]
