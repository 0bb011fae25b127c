"""The app in process: what people do to it, and that the answer follows."""

import pytest
from app_driver import DEMO, DIAMETER, LENGTH, click, opened, put, ran, report, shown, unpacked

from optics import presets
from optics.presets import value_at
from optics.report.size import size
from optics.tables import preset_names
from optics.ui import link
from optics.ui.sections import SECTIONS
from optics.ui.titles import PARTS
from optics.ui.words import number


def test_the_first_page_answers():
    app = opened()
    said = size(presets.open("gearbox_tooth").fiberscope)
    assert app.header[0].value[0] in "✓✗"
    assert shown(app)["Light at center"] == f"{number(said.summary.target_center_lux)} lx"
    assert shown(app)["Limited by"] == said.summary.limited_by
    assert any("Industrial use" in item.value for item in app.markdown)


@pytest.mark.parametrize(
    ("path", "value", "read", "rises"),
    [
        (LENGTH, 5.0, lambda r: r.light.delivered_lm, False),
        (DIAMETER, 1.4, lambda r: r.light.delivered_lm, False),
        (DIAMETER, 2.6, lambda r: r.fit.outer_diameter_mm, True),
        ("source.lamp.flux_lm", 800.0, lambda r: r.target.center_lux, True),
        ("scene.target.distance_mm", 35.0, lambda r: r.target.center_lux, False),
        ("image.bundle.pitch_um", 12.0, lambda r: r.summary.smallest_gap_mm, True),
    ],
)
def test_numbers_move_the_right_way(path, value, read, rises):
    app = opened()
    before = read(report(app))
    after = read(report(put(app, path, value)))
    assert (after > before) is rises
    assert app.number_input(key=path).value == value


def test_a_lamp_of_another_family_brings_its_own_values():
    app = opened()
    put(app, "source.lamp.flux_lm", 90.0)
    app.selectbox(key="source.lamp.preset").set_value("white_led_3000k")
    assert "brighter than its lamp allows" in ran(app).error[0].value
    assert report(click(app, "wrong:match")).light.color_temperature_k < 3500
    assert value_at(app.session_state["sketch"].document, "source.lamp.flux_lm") is None


def test_slider_and_box_are_one_value():
    app = opened()
    slider = next(item for item in app.slider if item.key.startswith(f"{DIAMETER}:slider"))
    slider.set_value(2.5)
    assert ran(app).number_input(key=DIAMETER).value == 2.5


def test_a_value_beyond_the_usual_stays_possible():
    app = opened()
    put(app, DIAMETER, 9.0)
    assert next(item for item in app.slider if item.key.startswith(f"{DIAMETER}:slider")).max == 9.0


def test_a_wrong_value_is_a_sentence_and_the_last_answer_stays():
    app = opened()
    before = shown(app)
    put(app, LENGTH, -1.0)
    assert "it must be above 0" in app.error[0].value
    assert shown(app) == before
    assert app.number_input(key=LENGTH).value == -1.0
    assert unpacked(app.query_params["d"])[1] == {}
    click(app, "wrong:back")
    assert not app.error
    assert app.number_input(key=LENGTH).value == 1.8


@pytest.mark.parametrize("value", [-1, 0, 10**9])
def test_no_number_breaks_the_page(value):
    app = opened()
    for part in PARTS:
        app.session_state[f"{part}:more"] = True
    ran(app)
    assert len(app.number_input) > 60
    for box in app.number_input:
        box.set_value(value)
    assert ran(app).error


def test_a_rule_across_fields_is_a_sentence_too():
    app = opened()
    put(app, "image.objective.focus_mm", 0.5)
    assert "the focus must lie beyond the focal length" in app.error[0].value


def test_a_cleared_box_changes_nothing():
    app = opened()
    app.number_input(key=LENGTH).set_value(None)
    assert ran(app).number_input(key=LENGTH).value == 1.8


def test_a_change_is_marked_and_can_be_set_back():
    app = opened()
    assert "●" not in app.number_input(key=LENGTH).label
    put(app, LENGTH, 3.0)
    assert "●" in app.number_input(key=LENGTH).label
    assert "1.8 m" in app.button(key=f"{LENGTH}:back").label
    click(app, f"{LENGTH}:back")
    assert app.number_input(key=LENGTH).value == 1.8
    assert app.session_state["sketch"].document == DEMO


def test_soft_values_are_marked_and_say_where_they_come_from():
    app = opened()
    box = app.number_input(key="image.bundle.pitch_um")
    assert "≈" in box.label
    assert "Common practice, no source" in box.help
    put(app, "image.bundle.pitch_um", 9.0)
    assert "≈" not in app.number_input(key="image.bundle.pitch_um").label


def test_a_pinned_reference_shows_the_change():
    app = opened()
    click(app, "pin")
    put(app, "source.lamp.flux_lm", 800.0)
    moved = {item.label: item.delta for item in app.metric}
    assert moved["Delivered"] == "+100 %"
    assert moved["Outer diameter"] == "as pinned"
    click(app, "pin:back")
    assert app.number_input(key="source.lamp.flux_lm").value == 400.0
    click(app, "pin:off")
    assert not any(item.delta for item in app.metric)


def test_what_was_added_is_not_marked_value_by_value():
    app = opened()
    click(app, "guide.bundle.bends:add")
    assert "●" not in app.number_input(key="guide.bundle.bends.1.radius_mm").label
    click(app, "guide.bundle.bends:back")
    assert app.session_state["sketch"].document == DEMO


SHOWN = [
    pytest.param(name, marks=[] if name in ("gearbox_tooth", "injector_hole") else pytest.mark.slow)
    for name in preset_names("fiberscopes")
]


@pytest.mark.parametrize("name", SHOWN)
def test_every_section_of_every_demo_is_shown(name):
    app = opened(drawn=True, d=link.written(name, {}))
    assert app.get("image"), "the light strip is missing"
    for section in SECTIONS:
        app.session_state["section"] = section
        ran(app, drawn=True)


def test_a_bare_light_guide_still_answers():
    app = opened(d=link.written("gearbox_tooth", {part: None for part in ("scene", "image", "viewer", "body")}))
    assert app.header[0].value.startswith(("✗", "○"))
    assert "Delivered" in shown(app)
    for section in SECTIONS:
        app.session_state["section"] = section
        ran(app)
    assert report(click(app, "viewer:add")).detail is not None


def test_lists_and_tables_are_added_and_removed():
    app = opened()
    for add, remove in (
        ("guide.bundle.bends:add", "guide.bundle.bends.1:remove"),
        ("guide.cable:add", "guide.cable:remove"),
    ):
        click(app, add)
        assert app.session_state["sketch"].document != DEMO
        click(app, remove)
        assert app.session_state["sketch"].document == DEMO
