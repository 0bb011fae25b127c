"""The page on detail in process: it answers for every kind of design, and follows what people do to it."""

import itertools
import re
from contextlib import ExitStack
from unittest.mock import patch

import pytest
from app_driver import BLANK, DEMO, click, opened, put, ran, report
from random_designs import CHIP
from test_figures import words

from optics import presets
from optics.figures import image
from optics.figures import sharper as sharper_figure
from optics.figures.palette import DARK
from optics.report.picture import view_of
from optics.report.size import size
from optics.study.sharper import over_all
from optics.study.sharper_curves import contrasts
from optics.study.sharper_helps import Help
from optics.tables import preset_names
from optics.ui import detail_parts, detail_words, link, pictures
from optics.ui.words import number

PAGE = "optics/ui/pages/detail.py"
BARE = dict.fromkeys(("scene", "image", "viewer", "body"))
KINDS = {
    "eye": {"viewer.form": "eye"},
    "chip": {"image.form": "chip", "image.chip": CHIP, "viewer": None},
    "dark": {"source.lamp.flux_lm": 1e-6},
    "few pixels": {"viewer.camera.relay_magnification": 0.6},
    "water": {"scene.target.medium": "water"},
    "bore": {"scene.target.form": "bore", "scene.target.bore_mm": 20.0},
    "no needs": {"needs": {}},
}


def small(scope, **how):
    """The view in few pixels."""
    return view_of(scope, **{**how, "width_px": 64})


@pytest.fixture
def blank():
    """Blank sheets for all pictures of the page: drawing takes most of the time."""
    with ExitStack() as stack:
        stack.enter_context(patch.object(pictures, "_picture", lambda *_: BLANK))
        stack.enter_context(patch.object(detail_parts, "_chart", lambda *_: BLANK))
        stack.enter_context(patch.object(detail_parts, "_drawn", lambda *_: BLANK))
        stack.enter_context(patch.object(detail_parts, "view_of", small))
        yield


def page(demo: str = "gearbox_tooth", settings: dict | None = None, drawn: bool = False):
    app = opened(d=link.written(demo, settings or {}))
    app.switch_page(PAGE)
    return ran(app, drawn)


def said(app) -> str:
    """Everything that the page says in words, markup marks left off."""
    kinds = (app.header, app.subheader, app.markdown, app.caption)
    return "\n".join(item.value for kind in kinds for item in kind).replace("\\", "")


def tables(app) -> list:
    return [item.value for item in app.table]


@pytest.mark.parametrize("name", preset_names("fiberscopes"))
def test_every_demo_is_answered(name, blank):
    app = page(name)
    assert app.header[0].value[0] in "✓✗"
    assert "Most would come from" in said(app)
    assert len(app.get("image")) == 6


def test_the_pictures_are_drawn():
    assert len(page("airway_small_animal", drawn=True).get("image")) == 6


def test_the_answer_is_that_of_size(blank):
    app, seen = page(), size(presets.open("gearbox_tooth").fiberscope).summary
    assert number(seen.smallest_gap_mm) in app.header[0].value
    shown = {item.label: item.value for item in app.metric}
    assert shown["Smallest gap"] == f"{number(seen.smallest_gap_mm)} mm"
    assert shown["Thinnest line"] == f"{number(seen.smallest_line_mm)} mm"
    assert "lattice limits" in said(app)


@pytest.mark.parametrize("kind", KINDS)
def test_every_kind_of_design_is_answered(kind, blank):
    app = page(settings=KINDS[kind])
    assert "Smaller is not always sharper" in said(app)
    assert ("The eye" in said(app)) is (kind == "eye")
    assert ("✗" in app.header[0].value) is (kind == "dark")
    assert ("beat with the cores, worst" in said(app)) is (kind == "few pixels")
    assert ("No edge is reckoned" in said(app)) is (kind == "bore")


def test_a_bare_light_guide_says_so_in_a_line(blank):
    app = page(settings=BARE)
    assert app.header[0].value == "No image: this design is a light guide alone."
    assert not app.get("image")
    assert not app.metric


def test_the_view_follows_its_controls(blank):
    app = page()
    asked = []
    with patch.object(detail_parts, "view_of", lambda scope, **how: asked.append(how) or small(scope, **how)):
        for key, value in (("detail:subject", "cracks"), ("detail:smooth", 0.03)):
            app.selectbox(key=key).set_value(value)
            ran(app)
        app.toggle(key="detail:noise").set_value(False)
        app.number_input(key="detail:seed").set_value(7)
        app.button_group(key="detail:zoom").set_value(4)
        ran(app)
    assert asked[-1] == {"subject": "cracks", "width_px": 1600, "seed": 7, "smooth": 0.03, "noise": False}
    assert "noise not drawn" in said(app)
    assert "Smoothed to 3 % of the honeycomb: that keeps" in said(app)


def test_the_choices_survive_another_page(blank):
    app = page()
    app.selectbox(key="detail:subject").set_value("gear")
    ran(app).switch_page("optics/ui/pages/sizing.py")
    ran(app).switch_page(PAGE)
    assert ran(app).selectbox(key="detail:subject").value == "gear"


def test_a_crack_is_told_by_its_width(blank):
    app = page()
    for width, told in ((0.02, "lost in the noise"), (0.1, "run together"), (0.5, "told apart")):
        app.number_input(key="detail:crack").set_value(width)
        assert told in said(ran(app))


def test_what_helps_can_be_tried_and_compared(blank):
    app = page()
    before = report(app).summary.smallest_gap_mm
    click(app, "help:image.bundle.pitch_um")
    assert report(app).summary.smallest_gap_mm < 0.7 * before
    assert app.session_state["sketch"].pinned.report.summary.smallest_gap_mm == before
    moved = {item.label: item.delta for item in app.metric}
    assert moved["Smallest gap"].startswith("−")
    click(app, "pin:back")
    assert app.session_state["sketch"].document == DEMO


def test_the_page_follows_a_change_and_keeps_the_last_answer(blank):
    app = page()
    before = app.header[0].value
    put(app, "image.bundle.pitch_um", 12.0)
    after = app.header[0].value
    assert after != before
    put(app, "image.bundle.pitch_um", -1.0)
    assert app.error
    assert app.header[0].value == after


def test_where_smaller_hardly_helps_it_is_said(blank):
    app = page(settings={"image.bundle.preset": "drawn_silica_3um"})
    assert "A finer pitch alone gains" in said(app)
    assert "crosstalk takes over" in said(app)
    assert "A finer pitch alone gains" not in said(page())


def test_words_of_changes():
    help = Help({"image.objective.focal_mm": 1.25}, 2.8, 0.179, 0.27, 41.1, "lattice", ())
    assert detail_words.help_words((help,)) == (
        "Most would come from a focal length of 1.25 mm: a gap of 0.179 mm over a field of 41.1°."
    )
    assert "reaches the 0.1 mm asked" in detail_words.help_words((help,), 0.1)
    assert "reaches" not in detail_words.help_words((help,), 0.2)
    assert "without giving up a need" in detail_words.help_words(())


def test_tables_have_a_row_for_each_place(blank):
    app = page()
    assert [len(found) for found in tables(app)] == [5, 4]


# The pictures


FIGURE_KINDS = {
    **{kind: KINDS[kind] for kind in ("eye", "chip", "dark", "no needs")},
    "demo": {},
    "fine": {"image.bundle.preset": "drawn_silica_3um"},
    "out of focus": {"scene.target.distance_mm": 8.0, "scene.target.near_mm": None, "image.objective.f_number": 2.0},
    "coarse": {"image.bundle.pitch_um": 40.0, "image.bundle.core_um": 30.0},
    "dim": {"source.lamp.flux_lm": 0.003},
}


@pytest.mark.parametrize("kind", FIGURE_KINDS)
def test_pictures_clip_nothing_and_keep_words_apart(kind):
    scope = presets.resolve(presets.edited(DEMO, FIGURE_KINDS[kind])).fiberscope
    curves, wanted = over_all(scope, 41), scope.needs.smallest_gap_mm
    shown = {"top_lp_mm": max(curve.best_lp_mm for curve in curves), "wanted_lp_mm": 0.5 / wanted if wanted else None}
    for figure, unit in (
        (image.contrasts(contrasts(scope), palette=DARK), "line pairs per mm"),
        (sharper_figure.sharper(curves[:1], panel_in=detail_parts.PITCH_IN, **shown), "pitch, µm"),
        (sharper_figure.sharper(curves[1:], **shown, palette=DARK), "light, lm"),
    ):
        width, height = figure.get_size_inches() * figure.dpi
        found = list(words(figure))
        assert any(unit in text for text, _ in found)
        assert not any(re.search(r"\b(nan|inf|None)\b", text) for text, _ in found)
        for text, box in found:
            inside = box.x0 >= -1 and box.y0 >= -1 and box.x1 <= width + 1 and box.y1 <= height + 1
            assert inside, f"{text!r} is cut off"
        for (text, box), (other, its) in itertools.combinations(found, 2):
            across = min(box.x1, its.x1) - max(box.x0, its.x0)
            down = min(box.y1, its.y1) - max(box.y0, its.y0)
            assert across <= 1.5 or down <= 2.5, f"{text!r} lies on {other!r}"


def test_the_pictures_say_what_takes_over():
    fine, plain = (
        over_all(presets.resolve(presets.edited(DEMO, FIGURE_KINDS[kind])).fiberscope, 41) for kind in ("fine", "demo")
    )
    assert sharper_figure.what_it_says(fine[0]) == "Smaller than 2.8 µm gains little: crosstalk limits"
    assert sharper_figure.what_it_says(plain[0]) == "Smaller stops being sharper near 3.8 µm: crosstalk takes over"
    assert sharper_figure.what_it_says(plain[2]).startswith("More light than ")
    told = [text.strip() for text, _ in words(image.contrasts(contrasts(presets.load("gearbox_tooth"))))]
    assert "needed" in told
    assert any(text.startswith("the lattice ends at 3.04") for text in told)
