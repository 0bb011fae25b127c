"""The pages on light and fit: they answer for every kind of design, and what they show is what the formulas say."""

import itertools
from functools import lru_cache
from unittest.mock import patch

import numpy as np
import pytest
from app_driver import BLANK, opened, ran, report
from test_figures import VARIANTS, words

from optics import presets
from optics.body.passage import longest_rigid_tip_mm, tube_bend_radius_mm
from optics.figures import bend as bend_figure
from optics.figures import fit as fit_figure
from optics.figures import guide as guide_figure
from optics.report.size import size
from optics.report.view_bend import bend_trace_view, bend_view
from optics.report.view_fit import fill_view, tube_view, weights
from optics.report.view_guide import color_view, cone_view
from optics.report.view_handling import bending_view, heats, pushes, slides
from optics.report.view_passage import entry_tilts, limit_curve, passage_limits
from optics.study.levers import levers
from optics.ui import drawings, fit_words, link

DEMOS = presets.preset_names("fiberscopes")
PLASTIC = {
    "guide.fiber.preset": "pmma_1mm",
    "guide.bundle.packing_fraction": 0.5,
    "guide.bundle.bends": [
        {"radius_mm": 25.0, "angle_deg": 90.0},
        {"radius_mm": 30.0, "angle_deg": 90.0},
        {"radius_mm": 60.0, "angle_deg": 180.0, "repeats": 2},
    ],
}
DESIGNS = {
    **{name: (name, {}) for name in DEMOS},
    **{name: ("gearbox_tooth", settings) for name, settings in VARIANTS.items()},
    "plastic": ("gearbox_tooth", PLASTIC),
    "only a guide in its tube": ("gearbox_tooth", {"scene": None, "image": None, "viewer": None, "needs": {}}),
    "solved": ("gearbox_tooth", {"guide.bundle.diameter_mm": "solve", "body.section.outer_diameter_mm": 4.0}),
    "placed": ("gearbox_tooth", {"scene.ports.form": "placed"}),
    "no passage": ("gearbox_tooth", {"body.passage": None, "body.handling": None}),
    "straight bore": ("gearbox_tooth", {"body.passage": {"bore_mm": 8.0}}),
    "wider than the bore": ("gearbox_tooth", {"body.passage.bore_mm": 3.0}),
    "a free tip": (
        "gearbox_tooth",
        {"body.passage.rigid_tip_mm": None, "body.section.channels": [{"inner_mm": 1.2, "wall_mm": 0.1}]},
    ),
}
DRAWN = ["airway_small_animal", "injector_hole", "cable", "too tight", "bare", "ultraviolet", "plastic", "a free tip"]
OPENED = ["gearbox_tooth", "airway_small_animal", "turbine_casing", "injector_hole", "bare", "eye", "chip", "too tight"]


@lru_cache
def scope_of(name):
    demo, settings = DESIGNS[name]
    return presets.resolve(presets.edited(presets.open(demo).document, settings)).fiberscope


def page(name, which):
    demo, settings = DESIGNS[name]
    with patch.object(drawings, "_picture", lambda *_: BLANK):
        app = opened(d=link.written(demo, settings))
        app.switch_page(f"optics/ui/pages/{which}.py")
        return ran(app)


def again(app):
    with patch.object(drawings, "_picture", lambda *_: BLANK):
        return ran(app)


def text_of(app):
    return " ".join(item.value for item in (*app.header, *app.markdown)).replace("\\", "")


# The pages


@pytest.mark.parametrize("name", OPENED)
def test_the_light_page_answers(name):
    app = page(name, "light")
    said = report(app).light
    assert f"{said.delivered_lm:.3g} of " in app.header[0].value
    assert {"Delivered", "Exit NA", "Color", "Rendering"} <= {item.label for item in app.metric}
    assert len(app.table) >= 2


@pytest.mark.parametrize("name", OPENED)
def test_the_fit_page_answers(name):
    app = page(name, "fit")
    said = report(app).fit
    if said is None:
        assert "no body" in app.header[0].value
        return
    assert app.header[0].value[0] == ("✓" if said.passes else "✗")
    assert len(app.table) >= 6


def test_a_lever_can_be_tried_and_gives_what_it_says():
    app = page("gearbox_tooth", "light")
    best = next(
        lever for lever in levers(app.session_state["sketch"].design) if not lever.path.startswith("source.lamp")
    )
    app.button(key=f"lever:{best.words}").click()
    again(app)
    assert report(app).light.delivered_lm == pytest.approx(best.delivered_lm, rel=1e-9)
    assert app.session_state["sketch"].pinned is not None
    assert app.metric[0].delta == f"+{best.gain_share:.0%}".replace("%", " %")


def test_the_bends_can_be_traced():
    app = page("injector_hole", "light")
    app.button(key="light:trace").click()
    again(app)
    found = bend_trace_view(scope_of("injector_hole"), 1)
    assert f"rays {found.bends[-1].traced_share:.4f} ±" in text_of(app)
    assert any(f"{found.rays:,} rays, seed 1" in item.value for item in app.caption)
    app.button(key="light:trace").click()
    again(app)
    assert any("seed 2" in item.value for item in app.caption)


def test_what_varies_can_be_chosen():
    app = page("gearbox_tooth", "fit")
    for option in app.selectbox(key="fit:vary").options:
        app.selectbox(key="fit:vary").set_value(option)
        again(app)


def test_the_tip_that_passes_the_bore_but_not_its_elbow():
    scope = scope_of("injector_hole")
    mark, first, rest = fit_words.verdict(size(scope), scope, passage_limits(scope))
    assert mark == "✗"
    assert first == "The tip passes the bore, but its 8 mm are too long for the elbow: 5.81 mm at most."
    assert "too stiff as well" in rest
    stuck = presets.resolve(
        presets.edited(presets.open("gearbox_tooth").document, {"body.passage.rigid_tip_mm": 25.0})
    ).fiberscope
    _, first, _ = fit_words.verdict(size(stuck), stuck, passage_limits(stuck))
    assert "25 mm are too long for the elbow: 23.5 mm at most, or a tube of" in first


# The views: light


@pytest.mark.parametrize("name", [name for name in DESIGNS if name != "ultraviolet"])
def test_areas_of_the_cone_are_lumens(name):
    scope = scope_of(name)
    view, light = cone_view(scope), size(scope).light
    after = {step.name: step.after_lm for step in light.steps}
    launched, inside, leaves = view.stages
    assert launched.flux == pytest.approx(after["condenser"], rel=1e-12)
    assert leaves.flux == pytest.approx(light.delivered_lm, rel=1e-9)
    before = list(after)[list(after).index("exit face") - 1]
    assert inside.flux == pytest.approx(after[before], rel=1e-9)
    for stage in view.stages:
        area = float((stage.radiance_ratio * np.diff(stage.na**2)).sum())
        assert area * launched.flux / view.launch_na**2 == pytest.approx(stage.flux, rel=1e-9)
        assert (stage.radiance_ratio <= 1 + 1e-9).all()


def test_a_lamp_in_watts_is_told_in_watts():
    scope = scope_of("ultraviolet")
    view, light = cone_view(scope), size(scope).light
    assert view.unit == "W"
    assert view.stages[2].flux == pytest.approx(light.delivered_w, rel=1e-9)
    etendues = (scope.guide.bundle.diameter_mm * scope.guide.fiber.na / scope.source.lamp.emitter_mm) ** 2
    assert view.stages[0].flux == pytest.approx(
        scope.source.lamp.flux_w * scope.source.launch.transmission * etendues, rel=1e-6
    )


def test_the_color_of_a_known_lamp():
    """CIE illuminant LED-B3, on which the white 4000 K lamp rests: 4103 K, Ra about 85 (CIE 015:2018)."""
    view = color_view(scope_of("gearbox_tooth"))
    assert view.lamp.color_temperature_k == pytest.approx(4103, abs=1)
    assert view.lamp.color_rendering_index == pytest.approx(85, abs=0.6)


@pytest.mark.parametrize("name", DEMOS)
def test_the_color_is_the_reports(name):
    scope = scope_of(name)
    view, light = color_view(scope).delivered, size(scope).light
    assert view.color_temperature_k == pytest.approx(light.color_temperature_k, rel=1e-12)
    assert view.color_rendering_index == pytest.approx(light.color_rendering_index, rel=1e-12)


def test_bends_lose_less_than_the_mode_count_says_and_less_the_gentler():
    for name in ("plastic", "injector_hole", "gearbox_tooth"):
        view = bend_view(scope_of(name))
        loss = view.loss_db[view.tested]
        assert (np.diff(loss) <= 1e-9).all()
        filled = view.launch_na == view.fiber_na  # the mode count knows no skew rays beside an under-filled cone
        assert (loss <= view.bound_db[view.tested] + (1e-9 if filled else 0.01)).all()


def test_one_millimeter_plastic_at_25_mm():
    """X = 0.356 at NA 0.50: rays lose 0.55 dB, the mode count 1.9 dB (independent_trace, gloge_1972)."""
    view = bend_view(scope_of("plastic"))
    assert view.own[0].loss_db == pytest.approx(0.55, abs=0.03)
    assert float(np.interp(25.0, view.radius_mm, view.bound_db)) == pytest.approx(1.9, abs=0.1)
    assert view.breaking_radius_mm == pytest.approx(1.0 / (2 * 0.02))


@pytest.mark.parametrize("name", ["injector_hole", pytest.param("plastic", marks=pytest.mark.slow)])
def test_rays_and_kernel_agree(name):
    found = bend_trace_view(scope_of(name), 3)
    for bend in found.bends:
        assert abs(bend.kernel_share - bend.traced_share) <= 0.012 + 3 * bend.standard_error
        assert bend.kernel_na == pytest.approx(bend.traced_na, rel=0.07)
    assert bend_trace_view(scope_of(name), 3) == found
    assert found.rays <= 50_000


def test_a_guide_without_bends_has_nothing_to_trace():
    scope = presets.resolve(
        presets.edited(presets.open("gearbox_tooth").document, {"guide.bundle.bends": []})
    ).fiberscope
    assert bend_trace_view(scope, 1) is None
    assert bend_view(scope).own == ()


# The views: fit


def with_body():
    return [name for name in DESIGNS if scope_of(name).body is not None]


@pytest.mark.parametrize("name", with_body())
def test_fibers_lie_in_what_is_free(name):
    scope = scope_of(name)
    view, fit = tube_view(scope), size(scope).fit
    x, y, radius = view.fiber_x_mm, view.fiber_y_mm, view.fiber_mm / 2
    assert view.fits is (fit.needed_diameter_mm is None)
    assert len(x) == (view.fibers_count if view.fits else 0)
    if not len(x):
        return
    assert np.hypot(x, y).max() + radius <= view.lumen_mm / 2 * (1 + 1e-9)
    for part in view.tube:
        if part.kind in ("image", "channel", "wire"):
            away = np.hypot(x - part.x_mm, y - part.y_mm)
            assert away.min() >= part.diameter_mm / 2 + radius - 1e-9
    first, second = np.triu_indices(min(len(x), 300), 1)
    if len(x) > 1:
        assert np.hypot(x[first] - x[second], y[first] - y[second]).min() >= view.fiber_mm * (1 - 1e-9)


@pytest.mark.parametrize("name", ["gearbox_tooth", "airway_small_animal", "turbine_casing"])
def test_the_free_area_by_throwing_points(name):
    scope = scope_of(name)
    view, fill = tube_view(scope), fill_view(scope)
    random = np.random.default_rng(5)
    x, y = (random.random((2, 400_000)) - 0.5) * view.lumen_mm
    free = np.hypot(x, y) <= view.lumen_mm / 2
    for part in view.tube:
        if part.kind in ("image", "channel", "wire"):
            free &= np.hypot(x - part.x_mm, y - part.y_mm) > part.diameter_mm / 2
    assert fill.free_area_mm2 == pytest.approx(free.mean() * view.lumen_mm**2, rel=0.01)
    assert fill.fill_fraction == pytest.approx(fill.fiber_area_mm2 / fill.free_area_mm2)
    assert fill.fiber_area_mm2 == pytest.approx(np.pi / 4 * view.fiber_mm**2 * fill.fiber_count, rel=1e-9)


def test_a_fuller_limit_needs_no_larger_lumen_than_one_that_just_holds():
    """In the lumen that would do, the fibers take just the limit."""
    fill = fill_view(scope_of("turbine_casing"))
    lumen = tube_view(scope_of("turbine_casing")).lumen_mm
    free = fill.free_area_mm2 + np.pi / 4 * (fill.full_lumen_mm**2 - lumen**2)
    assert fill.fiber_area_mm2 / free == pytest.approx(fill.limit_fraction, rel=1e-9)


def test_two_parts_side_by_side_both_set_the_tube():
    """A bundle of 0.81 mm and a port of 0.80 mm with gaps of 0.03 mm: without one the other needs itself and two gaps."""
    found = {weight.name: weight for weight in weights(scope_of("injector_hole"))}
    assert found["image part"].adds_mm == pytest.approx(0.81 + 0.03, abs=1e-9)
    assert found["light port"].adds_mm == pytest.approx(0.80 + 0.03, abs=1e-9)
    assert not any(weight.comes_free for weight in found.values())


def test_wires_between_the_ports_come_free():
    found = {weight.name: weight for weight in weights(scope_of("gearbox_tooth"))}
    assert found["wire"].comes_free
    assert found["wire"].parts_count == 4
    assert not found["light port"].comes_free


@pytest.mark.parametrize("name", with_body())
def test_the_least_bend_radius_is_the_reports(name):
    scope = scope_of(name)
    view, fit = bending_view(scope), size(scope).fit
    assert view.least_radius_mm == pytest.approx(fit.bend_radius_mm, rel=1e-12)
    assert sum(part.decides for part in view.parts) >= 1
    for part in view.parts:
        if part.strain is not None:
            assert part.strain == pytest.approx(part.diameter_um / 2000 / view.asked_radius_mm, rel=1e-12)


def test_slides_pushes_and_leans_by_hand():
    found = slides(scope_of("gearbox_tooth"), 90.0)
    for slide in found:
        assert slide.slide_mm == pytest.approx(slide.offset_mm * np.pi / 2, rel=1e-12)
    assert pushes(90.0)[3].factors[1] == pytest.approx(6.586, abs=1e-3)  # e^(0.3 x 2 pi)
    assert entry_tilts(8.0, 6.0)[0] == (0.0, pytest.approx(np.degrees(np.arccos(6 / 8))))


def test_steam_is_not_for_plastic():
    settings = {"guide.fiber.preset": "pmma_250um", "body.handling.sterilization": "steam"}
    scope = presets.resolve(presets.edited(presets.open("gearbox_tooth").document, settings)).fiberscope
    guide = next(heat for heat in heats(scope) if heat.name == "guide fibers")
    assert not guide.stands
    assert guide.meets_c == 134.0


# Passage: each limit put back gives what it was a limit of


@pytest.mark.parametrize("name", ["gearbox_tooth", "airway_small_animal", "turbine_casing", "injector_hole"])
def test_what_would_do_does_just_do(name):
    scope = scope_of(name)
    limits, fit, passage = passage_limits(scope), size(scope).fit, scope.body.passage
    bore = {"bore_mm": passage.bore_mm, "bend_deg": passage.bend_deg}
    tip = passage.rigid_tip_mm + (scope.image.tip.added_length_mm if scope.image.tip else 0.0)

    def longest(tube_mm, centerline_mm):
        edge = min(passage.edge_radius_mm, tube_mm / 2)
        return float(
            longest_rigid_tip_mm(**bore, centerline_radius_mm=centerline_mm, tip_mm=tube_mm, edge_radius_mm=edge)
        )

    def takes(tube_mm, centerline_mm):
        return float(tube_bend_radius_mm(**bore, centerline_radius_mm=centerline_mm, tube_mm=tube_mm))

    own = passage.centerline_radius_mm
    assert limits.longest_tip_mm == pytest.approx(fit.longest_rigid_tip_mm, rel=1e-12)
    for tube, radius in ((limits.widest_tube_mm, own), (fit.outer_diameter_mm, limits.least_centerline_mm)):
        spare_tip, spare_bend = longest(tube, radius) - tip, takes(tube, radius) - fit.bend_radius_mm
        assert spare_tip >= -1e-6
        assert spare_bend >= -1e-6
        at_its_end = tube == pytest.approx(passage.bore_mm) or radius == pytest.approx(passage.bore_mm / 2)
        assert min(spare_tip, spare_bend) == pytest.approx(0.0, abs=1e-6) or at_its_end


@pytest.mark.parametrize("name", ["gearbox_tooth", "injector_hole"])
def test_the_curves_hold_the_design_and_fall_with_the_tube(name):
    scope = scope_of(name)
    report_fit = size(scope).fit
    wide, long, bent = (
        limit_curve(scope, vary) for vary in ("outer_diameter_mm", "rigid_tip_mm", "centerline_radius_mm")
    )
    assert (np.diff(wide.passable) < 0).all()
    assert (np.diff(bent.passable) > 0).all()
    known = np.isfinite(long.passable)
    assert (np.diff(long.passable[known]) < 0).all()
    for curve in (wide, bent):
        at_own = float(np.interp(curve.own[0], curve.varied, curve.passable))
        assert at_own == pytest.approx(report_fit.longest_rigid_tip_mm, rel=2e-3)
        assert curve.passes is report_fit.passes
    back = np.interp(long.passable[known], wide.varied, wide.passable)
    inside = (long.passable[known] > wide.varied[0]) & (long.passable[known] < 0.9 * wide.varied[-1])
    assert back[inside] == pytest.approx(long.varied[known][inside], rel=0.01)


def test_the_worked_elbow():
    """Bore 10, bend radius 15, 90 degrees: a tip of 24.0 mm lets a tube of 6 mm just pass (hand calculation)."""
    settings = {
        "body.passage": {"bore_mm": 10.0, "centerline_radius_mm": 15.0, "bend_deg": 90.0, "rigid_tip_mm": 24.0},
        "body.handling": None,
    }
    scope = presets.resolve(presets.edited(presets.open("gearbox_tooth").document, settings)).fiberscope
    curve = limit_curve(scope, "rigid_tip_mm")
    assert passage_limits(scope).widest_tube_mm == pytest.approx(6.0, abs=1e-6)
    assert float(np.interp(24.0, curve.varied, curve.passable)) == pytest.approx(6.0, abs=0.01)


# Pictures


def pictures(name):
    scope = scope_of(name)
    yield "cone", guide_figure.cone(cone_view(scope))
    yield "color", guide_figure.chromaticity(color_view(scope))
    yield "bends", bend_figure.bend_loss(bend_view(scope))
    if scope.body:
        yield "sections", fit_figure.sections(tube_view(scope))
        for vary in ("outer_diameter_mm", "rigid_tip_mm", "centerline_radius_mm"):
            curve = limit_curve(scope, vary)
            if curve is not None:
                yield vary, fit_figure.limit(curve)


@pytest.mark.parametrize(
    "name", [*DRAWN, *(pytest.param(n, marks=pytest.mark.slow) for n in DESIGNS if n not in DRAWN)]
)
def test_pictures_clip_nothing_and_keep_words_apart(name):
    for picture, figure in pictures(name):
        width, height = figure.get_size_inches() * figure.dpi
        found = list(words(figure))
        for text, box in found:
            assert "nan" not in text, picture
            inside = box.x0 >= -1 and box.y0 >= -1 and box.x1 <= width + 1 and box.y1 <= height + 1
            assert inside, f"{picture}: {text!r} is cut off"
        for (text, box), (other, its) in itertools.combinations(found, 2):
            across, down = (min(box.x1, its.x1) - max(box.x0, its.x0), min(box.y1, its.y1) - max(box.y0, its.y0))
            assert across <= 1.5 or down <= 2.5, f"{picture}: {text!r} lies on {other!r}"


def test_circles_are_drawn_to_scale():
    view = tube_view(scope_of("airway_small_animal"))
    axes = fit_figure.sections(view).axes[0]
    drawn = sorted({round(patch.radius, 6) for patch in axes.patches if hasattr(patch, "radius")}, reverse=True)
    scale = drawn[0] / (view.outer_diameter_mm / 2)
    for part in (*view.tip, *view.tube):
        assert min(abs(radius - scale * part.diameter_mm / 2) for radius in drawn) < 1e-5
