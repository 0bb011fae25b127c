"""The app in process: what people do to it, and that the answer follows."""

import base64
import itertools
import json
import random
import zlib
from pathlib import Path

import pytest
from streamlit.testing.v1 import AppTest

from optics import presets, published
from optics.fiberscope import FORMS
from optics.presets import value_at
from optics.report.size import size
from optics.spec import OutOfRange
from optics.tables import preset_names
from optics.ui import checked, edits, link, pictures, shape
from optics.ui.sections import SECTIONS
from optics.ui.titles import PARTS
from optics.ui.words import number

APP = Path(__file__).resolve().parents[1] / "app.py"
DEMO = presets.open("gearbox_tooth").document
LENGTH, DIAMETER = "guide.bundle.length_m", "guide.bundle.diameter_mm"


def opened(**query: str) -> AppTest:
    app = AppTest.from_file(str(APP), default_timeout=30)
    for key, text in query.items():
        app.query_params[key] = text
    return ran(app)


def ran(app: AppTest) -> AppTest:
    app.run()
    assert not app.exception, app.exception[0].message
    return app


def put(app: AppTest, path: str, value: float) -> AppTest:
    app.number_input(key=path).set_value(value)
    return ran(app)


def click(app: AppTest, key: str) -> AppTest:
    app.button(key=key).click()
    return ran(app)


def report(app: AppTest):
    return app.session_state["sketch"].report


def shown(app: AppTest) -> dict[str, str]:
    return {item.label: item.value for item in app.metric}


def unpacked(text: str) -> list:
    """The content of a link, by the standard library alone."""
    return json.loads(zlib.decompress(base64.urlsafe_b64decode(text + "=" * (-len(text) % 4))))


@pytest.fixture(autouse=True)
def quick(request, monkeypatch):
    """Pictures as blank sheets, but where they are what is tested: drawing takes most of a run."""
    if "drawn" not in request.fixturenames:
        monkeypatch.setattr(pictures, "_picture", lambda *_: '<svg xmlns="http://www.w3.org/2000/svg" width="4" height="4"></svg>')


@pytest.fixture
def drawn() -> None:
    """Asks for real pictures."""


@pytest.fixture
def app() -> AppTest:
    return opened()


def test_the_first_page_answers(app):
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
def test_numbers_move_the_right_way(app, path, value, read, rises):
    before = read(report(app))
    after = read(report(put(app, path, value)))
    assert (after > before) is rises
    assert app.number_input(key=path).value == value


def test_a_lamp_of_another_family_brings_its_own_values(app):
    put(app, "source.lamp.flux_lm", 90.0)
    app.selectbox(key="source.lamp.preset").set_value("white_led_3000k")
    assert "brighter than its lamp allows" in ran(app).error[0].value
    assert report(click(app, "wrong:match")).light.color_temperature_k < 3500
    assert value_at(app.session_state["sketch"].document, "source.lamp.flux_lm") is None


def test_slider_and_box_are_one_value(app):
    slider = next(item for item in app.slider if item.key.startswith(f"{DIAMETER}:slider"))
    slider.set_value(2.5)
    assert ran(app).number_input(key=DIAMETER).value == 2.5


def test_a_value_beyond_the_usual_stays_possible(app):
    put(app, DIAMETER, 9.0)
    assert next(item for item in app.slider if item.key.startswith(f"{DIAMETER}:slider")).max == 9.0


def test_the_link_makes_the_same_design_in_a_fresh_tab(app):
    for path, value in ((LENGTH, 3.0), (DIAMETER, 1.5), ("scene.target.distance_mm", 30.0)):
        put(app, path, value)
    text = app.query_params["d"]
    assert unpacked(text) == ["gearbox_tooth", {LENGTH: 3.0, DIAMETER: 1.5, "scene.target.distance_mm": 30.0}]
    assert report(opened(d=text)) == report(app)


def test_back_restores_older_designs(app):
    first = app.query_params["d"]
    second = put(app, LENGTH, 3.0).query_params["d"]
    put(app, LENGTH, 4.0)
    for text, length in ((second, 3.0), (first, 1.8)):
        app.query_params["d"] = text
        assert ran(app).number_input(key=LENGTH).value == length


def test_a_link_that_comes_late_undoes_nothing(app):
    early = app.query_params["d"]
    put(app, LENGTH, 3.0)
    app.query_params["d"] = early  # the browser had not yet heard of the change
    assert put(app, LENGTH, 4.0).number_input(key=LENGTH).value == 4.0
    assert unpacked(app.query_params["d"])[1] == {LENGTH: 4.0}


@pytest.mark.parametrize(
    "text",
    ["hello", "%%%", "eJyLjgUAARUAuQ", link.written("no_such_demo", {}), link.written("gearbox_tooth", {LENGTH: -1}), link.written("gearbox_tooth", {"a.b": 1})],
)
def test_a_wrong_link_is_one_sentence_and_the_default(app, text):
    wrong = opened(d=text)
    assert len(wrong.warning) == 1
    assert shown(wrong) == shown(app)
    assert unpacked(wrong.query_params["d"]) == ["gearbox_tooth", {}]


def test_links_of_odd_content_are_refused_never_raised():
    odd = [[], {}, "x", True, 10**400, -1, {"a": {"b": [1]}}, [1, [2]], [[[]]], "solve"]
    for path, value in itertools.product(("source", "image.form", "guide.bundle.bends", "guide.bundle.bends.0.radius_mm", "name", "format", "x.y"), odd):
        wrong = opened_sketch(link.written("gearbox_tooth", {path: value}))
        assert wrong is None or wrong.report


def opened_sketch(text: str):
    from optics.ui import sketch

    try:
        return sketch.from_link(text)
    except OutOfRange as refused:
        assert "\n" not in str(refused)
        return None


def test_a_wrong_value_is_a_sentence_and_the_last_answer_stays(app):
    before = shown(app)
    put(app, LENGTH, -1.0)
    assert "it must be above 0" in app.error[0].value
    assert shown(app) == before
    assert app.number_input(key=LENGTH).value == -1.0
    assert unpacked(app.query_params["d"])[1] == {}
    click(app, "wrong:back")
    assert not app.error
    assert app.number_input(key=LENGTH).value == 1.8


def test_a_rule_across_fields_is_a_sentence_too(app):
    put(app, "image.objective.focus_mm", 0.5)
    assert "the focus must lie beyond the focal length" in app.error[0].value


def test_a_cleared_box_changes_nothing(app):
    app.number_input(key=LENGTH).set_value(None)
    assert ran(app).number_input(key=LENGTH).value == 1.8


def test_a_change_is_marked_and_can_be_set_back(app):
    assert "●" not in app.number_input(key=LENGTH).label
    put(app, LENGTH, 3.0)
    assert "●" in app.number_input(key=LENGTH).label
    assert "1.8 m" in app.button(key=f"{LENGTH}:back").label
    click(app, f"{LENGTH}:back")
    assert app.number_input(key=LENGTH).value == 1.8
    assert app.session_state["sketch"].document == DEMO


def test_soft_values_are_marked_and_say_where_they_come_from(app):
    box = app.number_input(key="image.bundle.pitch_um")
    assert "≈" in box.label
    assert "Common practice, no source" in box.help
    put(app, "image.bundle.pitch_um", 9.0)
    assert "≈" not in app.number_input(key="image.bundle.pitch_um").label


def test_a_pinned_reference_shows_the_change(app):
    click(app, "pin")
    put(app, "source.lamp.flux_lm", 800.0)
    moved = {item.label: item.delta for item in app.metric}
    assert moved["Delivered"] == "+100 %"
    assert moved["Outer diameter"] == "as pinned"
    click(app, "pin:back")
    assert app.number_input(key="source.lamp.flux_lm").value == 400.0
    click(app, "pin:off")
    assert not any(item.delta for item in app.metric)


def test_the_design_survives_a_page_switch(app, monkeypatch):
    monkeypatch.setattr(checked, "rows", lambda: published.rows()[:5])
    checked.everything.clear()
    put(app, LENGTH, 3.0)
    app.switch_page("optics/ui/pages/checks.py")
    del app.query_params["d"]  # the browser drops it with the page
    assert "of 5 values agree" in " ".join(item.value for item in ran(app).markdown)
    checked.everything.clear()
    app.switch_page("optics/ui/pages/sizing.py")
    assert ran(app).number_input(key=LENGTH).value == 3.0


def test_a_design_file_comes_back_as_it_was_saved(app):
    put(app, LENGTH, 3.0)
    text = presets.saved(app.session_state["sketch"].design.document)
    fresh = opened()
    fresh.file_uploader(key="file").upload("mine.toml", text.encode())
    assert report(ran(fresh)) == report(app)
    put(fresh, LENGTH, 4.0)
    again = opened(d=fresh.query_params["d"])
    assert report(again) == report(fresh)
    assert again.session_state["sketch"].opened == app.session_state["sketch"].document


def test_a_file_that_is_no_design_is_a_sentence(app):
    app.file_uploader(key="file").upload("mine.toml", b"format = 1\nkind = 'teapot'\n")
    assert "teapot" in ran(app).warning[0].value


@pytest.mark.parametrize("name", preset_names("fiberscopes"))
def test_every_section_of_every_demo_is_shown(drawn, name):
    app = opened(d=link.written(name, {}))
    assert app.get("image"), "the light strip is missing"
    for section in SECTIONS:
        app.session_state["section"] = section
        ran(app)


def test_a_bare_light_guide_still_answers():
    app = opened(d=link.written("gearbox_tooth", {part: None for part in ("scene", "image", "viewer", "body")}))
    assert app.header[0].value.startswith(("✗", "○"))
    assert "Delivered" in shown(app)
    for section in SECTIONS:
        app.session_state["section"] = section
        ran(app)
    assert report(click(app, "viewer:add")).detail is not None


def test_lists_and_tables_are_added_and_removed(app):
    for add, remove in (("guide.bundle.bends:add", "guide.bundle.bends.1:remove"), ("guide.cable:add", "guide.cable:remove")):
        click(app, add)
        assert app.session_state["sketch"].document != DEMO
        click(app, remove)
        assert app.session_state["sketch"].document == DEMO


@pytest.mark.parametrize("path", FORMS)
def test_each_form_of_a_table_can_be_sized(path):
    for form in FORMS[path]:
        document = edits.with_form(DEMO, path, form)
        assert presets.resolve(document).fiberscope
        assert presets.edited(DEMO, link.differences(DEMO, document)) == document


def test_each_optional_table_can_be_added_and_taken_away():
    for part in PARTS:
        for path, _ in shape.absent(DEMO, part):
            document = edits.with_table(DEMO, path)
            assert presets.resolve(document).fiberscope
            assert edits.without_table(document, path) == DEMO


def test_differences_bring_any_document_about():
    draw = random.Random(5)
    names = [name for name in preset_names("fiberscopes")]
    for _ in range(40):
        base, other = (presets.open(draw.choice(names)).document for _ in range(2))
        for path in draw.sample([path for path in FORMS if value_at(other, path)], 2):
            other = edits.with_form(other, path, draw.choice(list(FORMS[path])))
        assert presets.edited(base, link.differences(base, other)) == other
