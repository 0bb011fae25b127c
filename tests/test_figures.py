"""Every picture for every kind of design: it builds, says its units, clips nothing, and no words lie on other words."""

import argparse
import itertools
import re
from functools import lru_cache

import matplotlib
import numpy as np
import pytest
from matplotlib.text import Text
from random_designs import BARE, CABLE, CHIP

from optics import presets
from optics.commands import draw
from optics.figures import body, detail, export, light, strip, target, working_range
from optics.figures.canvas import spread
from optics.figures.palette import DARK, LIGHT, lamplight
from optics.report import views
from optics.report.size import size
from optics.spec import OutOfRange
from optics.study.working_range import over_distance

VARIANTS = {
    "demo": {},
    "cable": {
        **CABLE,
        "guide.bundle.broken_fraction": 0.1,
        "scene.cover": {"index": 1.52, "thickness_mm": 0.5},
        "source.filter.preset": "hot_mirror",
    },
    "chip": {"image.form": "chip", "image.chip": CHIP, "viewer": None},
    "eye": {"viewer.form": "eye"},
    "annulus, dark target": {
        "scene.ports.form": "annulus",
        "scene.target.preset": "sooted_metal",
        "needs.frame_hz": 30.0,
    },
    "crescent, water": {"scene.ports.form": "crescent", "scene.target.medium": "water"},
    "nothing resolved": {
        "source.lamp.flux_lm": 1.0,
        "source.launch.spot_mm": 3.0,
        "viewer.camera.longest_exposure_s": 1e-6,
    },
    "tilted": {"scene.target.tilt_deg": 35.0, "needs.target_min_lux": 50000.0},
    "bore": {"scene.target.form": "bore", "scene.target.bore_mm": 20.0},
    "too tight": {
        "body.section.outer_diameter_mm": 3.2,
        "body.section.channels": [{"inner_mm": 0.6, "wall_mm": 0.05}],
        "body.passage.rigid_tip_mm": 30.0,
    },
    "no needs": {"needs": {}},
    "no image": {"image": None, "viewer": None, "needs": {"target_center_lux": 2000.0}},
    "bare": {**BARE, "needs": {}},
    "ultraviolet": {
        "source.lamp.preset": "uva_led_365nm",
        "source.launch.form": "matched",
        "guide.fiber.preset": "silica_uv",
    },
}
DEMOS = presets.preset_names("fiberscopes")


@pytest.fixture(scope="module")
def made(document):
    @lru_cache
    def scope(name):
        return (
            presets.load(name)
            if name in DEMOS
            else presets.resolve(presets.edited(document, VARIANTS[name])).fiberscope
        )

    return scope


def pictures(scope):
    """(name, figure function) of every picture that a design has."""
    report = size(scope)
    yield "strip", lambda palette: strip.light_strip(report, palette=palette)
    yield "strip_narrow", lambda palette: strip.light_strip(report, palette=palette, narrow=True)
    yield "budget", lambda palette: light.budget(report, palette=palette)
    spectra = views.spectra(scope)
    yield "spectra", lambda palette: light.spectra(spectra, palette=palette)
    if scope.scene:
        landed, curves = views.target_map(scope, 41), over_distance(scope, 12)
        yield "target", lambda palette: target.irradiance_map(landed, palette=palette)
        yield "profile", lambda palette: target.profile(landed, palette=palette)
        yield "range", lambda palette: working_range.curves(curves, palette=palette)
    if scope.image:
        yield "ledger", lambda palette: detail.ledger(report, palette=palette)
    if scope.body:
        section, passage = views.section_view(scope), views.passage_view(scope)
        yield "section", lambda palette: body.section(section, palette=palette)
        if passage:
            yield "passage", lambda palette: body.passage(passage, palette=palette)


def words(figure):
    """(text, box in pixels) of every text that is drawn."""
    drawn, draw_one = [], Text.draw

    def recorded(self, renderer, *rest, **more):
        drawn.append(self)
        return draw_one(self, renderer, *rest, **more)

    renderer = figure.canvas.get_renderer()
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(Text, "draw", recorded)
        figure.draw(renderer)
    for item in dict.fromkeys(drawn):
        if item.get_visible() and item.get_text().strip():
            yield item.get_text(), item.get_window_extent(renderer)


def said(figure):
    return " | ".join(text for text, _ in words(figure))


UNITS = {
    "strip": ("lm", "%"),
    "strip_narrow": ("lm", "%"),
    "budget": ("dB", "light left, lm"),
    "spectra": ("wavelength, nm", "W/nm"),
    "target": ("lux", "mm"),
    "profile": ("illuminance, lux", ", mm"),
    "range": ("illuminance, lux", "distance from the tip, mm"),
    "ledger": ("line pairs per mm",),
    "section": ("mm²", "mm"),
    "passage": ("mm",),
}


# Seconds each: a few in the normal run, the rest with -m slow.
QUICK = ("demo", "eye", "bare", "bore", "nothing resolved")
CHECKED = [pytest.param(name, marks=[] if name in QUICK else pytest.mark.slow) for name in [*VARIANTS, *DEMOS]]


@pytest.mark.parametrize("name", CHECKED)
def test_pictures_say_their_units_clip_nothing_and_keep_words_apart(made, name):
    for turn, (picture, figure_in) in enumerate(pictures(made(name))):
        figure = figure_in((LIGHT, DARK)[turn % 2])
        width, height = figure.get_size_inches() * figure.dpi
        found = list(words(figure))
        everything = " | ".join(text for text, _ in found)
        for unit in UNITS[picture]:
            if not (picture == "section" and unit == "mm²" and name == "too tight"):
                assert unit in everything, (picture, unit)
        assert not re.search(r"\b(nan|inf|None)\b", everything), picture
        for text, box in found:
            inside = box.x0 >= -1 and box.y0 >= -1 and box.x1 <= width + 1 and box.y1 <= height + 1
            assert inside, f"{picture}: {text!r} is cut off at {box}"
        for (text, box), (other, its) in itertools.combinations(found, 2):
            across = min(box.x1, its.x1) - max(box.x0, its.x0)
            down = min(box.y1, its.y1) - max(box.y0, its.y0)
            assert across <= 1.5 or down <= 2.5, f"{picture}: {text!r} lies on {other!r}"


def test_strip_tells_the_report(made):
    report = size(made("demo"))
    for narrow in (False, True):
        told = said(strip.light_strip(report, narrow=narrow))
        for step in report.light.steps[1:]:
            assert any(
                word in told
                for word in (step.name, step.name.split()[0], strip.words.SPLIT.get(step.name, "?").split("\n")[0])
            )
        for number in (
            f"{report.light.delivered_lm:.0f} lm",
            f"NA {report.light.exit_na:.3f}",
            f"{report.summary.smallest_gap_mm:.3g} mm",
        ):
            assert number in told
        assert f"limited by the {report.summary.limited_by}" in told.replace("\n", " ")
        assert "log scale" in told.replace("\n", " ")


def test_strip_thickness_is_what_it_states():
    for db in (5.0, 10.0, 40.0):
        assert strip.thickness(1.0, db) == 1.0
        assert strip.thickness(10 ** (-db / 20), db) == pytest.approx(0.5)
        assert 0 < strip.thickness(0.0, db) < 0.02


def test_strip_marks_what_is_not_met(made):
    missed = said(strip.light_strip(size(presets.load("injector_hole"))))
    assert "✗" in missed
    assert "✗" not in said(strip.light_strip(size(made("no needs"))))


def test_ledger_is_honest_about_no_limit_and_nothing_resolved(made):
    report = size(made("demo"))
    told = said(detail.ledger(report))
    assert told.count("no limit") == sum(line.limit_lp_mm is None for line in report.detail.ledger) > 0
    assert f"resolved {report.summary.resolved_lp_mm:.3g} lp/mm" in told
    assert "nothing resolved" in said(detail.ledger(size(made("nothing resolved"))))


def test_bars_of_the_ledger_and_the_budget_have_their_lengths(made):
    report = size(made("demo"))
    axes = detail.ledger(report).axes[0]
    end = axes.get_xlim()[1]
    drawn = [patch.get_width() for patch in axes.patches if hasattr(patch, "get_width")]
    assert drawn == pytest.approx(
        [end if line.limit_lp_mm is None else min(line.limit_lp_mm, end) for line in report.detail.ledger]
    )
    axes = light.budget(report).axes[0]
    losses = [
        patch.get_width()
        for patch in axes.patches
        if patch.get_facecolor()[:3] != matplotlib.colors.to_rgb(LIGHT.ghost)
    ]
    assert sum(losses) == pytest.approx(-10 * np.log10(report.light.transmission), rel=1e-9)


def test_map_shows_the_line_of_the_need_only_where_there_is_one(made):
    view = views.target_map(made("tilted"), 81)
    assert view.lux.min() < view.wanted_lux < view.lux.max()
    axes = target.irradiance_map(view).axes[0]
    lines = [path for one in axes.collections for path in one.get_paths() if len(path.vertices) > 3]
    values = np.concatenate([path.vertices for path in lines])
    at = [np.argmin(abs(view.u_mm - u)) for u in values[:, 0]], [np.argmin(abs(view.v_mm - v)) for v in values[:, 1]]
    assert np.median(view.lux[at[1], at[0]]) == pytest.approx(view.wanted_lux, rel=0.1)
    assert "dashed" not in said(target.irradiance_map(views.target_map(made("no needs"), 21)))


def test_section_is_to_scale(made):
    view = views.section_view(made("demo"))
    circles = [patch for patch in body.section(view).axes[0].patches if hasattr(patch, "radius")]
    scale = circles[0].radius / (view.outer_diameter_mm / 2)
    assert circles[1].radius == pytest.approx(view.lumen_mm / 2 * scale)
    middle = np.array(circles[0].center)
    for circle, part in zip(circles[3:], view.parts, strict=True):
        assert (*((np.array(circle.center) - middle) / scale), 2 * circle.radius / scale) == pytest.approx(
            (part.x_mm, part.y_mm, part.diameter_mm)
        )


def test_range_marks_where_needs_fail(made):
    scope = presets.load("turbine_casing")
    curves = over_distance(scope, 30)
    told = said(working_range.curves(curves))
    for name, at, side in curves.fails:
        if (
            at is not None
            and at > curves.distance_mm[0]
            and name in ("smallest_gap_mm", "target_center_lux", "evenness")
        ):
            assert f"{'beyond' if side == 'far' else 'below'} {at:.3g} mm" in told


# Palette and bytes


def luminance(color):
    rgb = np.array(matplotlib.colors.to_rgb(color))
    return np.where(rgb <= 0.04045, rgb / 12.92, ((rgb + 0.055) / 1.055) ** 2.4) @ [0.2126, 0.7152, 0.0722]


def contrast(first, second):
    """Contrast ratio of WCAG 2.1."""
    bright, dim = sorted((luminance(first), luminance(second)), reverse=True)
    return (bright + 0.05) / (dim + 0.05)


@pytest.mark.parametrize("palette", [LIGHT, DARK], ids=lambda palette: palette.name)
def test_words_read_well_on_their_paper(palette):
    assert contrast(palette.ink, palette.paper) >= 12
    assert contrast(palette.soft, palette.paper) >= 5.5
    assert contrast(palette.soft, palette.ghost) >= 4.5
    assert contrast(palette.accent, palette.paper) >= 3.4
    assert contrast(palette.on_light, palette.light) >= 4.5
    assert contrast(palette.on_back, palette.back) >= 4.5


def test_map_for_light_is_even_in_lightness():
    y = np.array([luminance(color) for color in lamplight().colors])
    lightness = np.where(y > 0.008856, 116 * np.cbrt(y) - 16, 903.3 * y)
    assert lightness[[0, -1]] == pytest.approx([10.0, 96.0], abs=0.3)
    assert np.diff(lightness) == pytest.approx(86.0 / 255, abs=0.03)


def test_png_is_as_wide_as_asked_and_the_same_every_time(made):
    report = size(made("demo"))
    first, again = (export.png(strip.light_strip(report)) for _ in range(2))
    assert first == again
    assert first.startswith(b"\x89PNG")
    assert int.from_bytes(first[16:20], "big") == 1200
    narrow = export.png(strip.light_strip(report, narrow=True))
    assert int.from_bytes(narrow[16:20], "big") == 390


@pytest.mark.parametrize("kind", [export.svg, export.pdf])
def test_svg_and_pdf_are_reproducible_and_bear_no_date(made, kind):
    curves = over_distance(made("demo"), 5)
    view = views.target_map(made("demo"), 11)
    for figure in (lambda: working_range.curves(curves), lambda: target.irradiance_map(view)):
        first, again = kind(figure()), kind(figure())
        assert first == again
        assert b"CreationDate" not in first
        assert b"dc:date" not in first


def test_drawing_leaves_the_shared_settings_alone(made):
    before = dict(matplotlib.rcParams)
    for _, figure_in in pictures(made("demo")):
        export.svg(figure_in(DARK))
    assert dict(matplotlib.rcParams) == before


def test_places_are_spread_in_order_and_kept_inside():
    rng = np.random.default_rng(3)
    for _ in range(50):
        wanted = rng.uniform(0, 10, 7).tolist()
        placed = spread(wanted, 0.9, 0.5, 9.5)
        order = np.argsort(wanted, kind="stable")
        assert (np.diff(np.array(placed)[order]) >= 0.9 - 1e-6).all()
        assert min(placed) >= 0.5 - 1e-6
        assert max(placed) <= 9.5 + 1e-6


# The command


def drawn(*arguments):
    parser = argparse.ArgumentParser()
    draw.add_arguments(parser)
    return draw.run(parser.parse_args(list(map(str, arguments))))


@pytest.mark.parametrize("name", draw.FIGURES)
def test_draw_writes_every_picture(tmp_path, capsys, name):
    to = tmp_path / f"{name}.png"
    assert drawn("gearbox_tooth", name, "--to", to, "--dpi", 50, "--dark") == 0
    assert to.read_bytes().startswith(b"\x89PNG")
    assert capsys.readouterr().out.strip() == str(to)


def test_draw_by_suffix_and_over_nothing_without_force(tmp_path):
    for suffix, start in ((".svg", b"<?xml"), (".pdf", b"%PDF")):
        assert drawn("gearbox_tooth", "section", "--to", tmp_path / f"a{suffix}") == 0
        assert (tmp_path / f"a{suffix}").read_bytes().startswith(start)
    with pytest.raises(OutOfRange, match="exists already; --force writes over it"):
        drawn("gearbox_tooth", "section", "--to", tmp_path / "a.svg")
    before = (tmp_path / "a.svg").read_bytes()
    assert (
        drawn(
            "gearbox_tooth", "section", "--to", tmp_path / "a.svg", "--force", "--set", "guide.bundle.diameter_mm=1.5"
        )
        == 0
    )
    assert (tmp_path / "a.svg").read_bytes() != before


@pytest.mark.parametrize(
    ("arguments", "sentence"),
    [
        (("stripe", "--to", "x.png"), r"FIGURE is 'stripe' \(nearest: strip\); it must be one of: strip,"),
        (("strip", "--to", "x.gif"), r"x.gif does not end in one of: .png, .svg, .pdf"),
        (("strip", "--to", "x.png", "--dpi", "5"), r"--dpi is 5; it must be from 30 to 600"),
        (("ledger", "--to", "x.png", "--set", "image=0"), "image is 0"),
        (("strip", "--to", "no/such/folder/x.png"), "cannot be written: no such file or directory"),
    ],
)
def test_draw_refuses_in_one_sentence(tmp_path, monkeypatch, arguments, sentence):
    monkeypatch.chdir(tmp_path)
    with pytest.raises(OutOfRange, match=sentence):
        drawn("gearbox_tooth", *arguments)
    assert not list(tmp_path.iterdir())


def test_draw_says_what_a_design_lacks(tmp_path, made):
    for name in ("target", "range", "ledger", "section", "passage"):
        with pytest.raises(OutOfRange, match=rf"{name} needs \[.*which this design does not have"):
            draw._drawn(made("bare"), name)
