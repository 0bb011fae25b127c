"""The design in the address and in files: links, Back, page switches, opening and keeping."""

import pytest
from app_driver import DIAMETER, LENGTH, opened, put, ran, report, shown, unpacked

from optics import presets, published
from optics.ui import checked, link


def test_the_link_makes_the_same_design_in_a_fresh_tab():
    app = opened()
    for path, value in ((LENGTH, 3.0), (DIAMETER, 1.5), ("scene.target.distance_mm", 30.0)):
        put(app, path, value)
    text = app.query_params["d"]
    assert unpacked(text) == ["gearbox_tooth", {LENGTH: 3.0, DIAMETER: 1.5, "scene.target.distance_mm": 30.0}]
    assert report(opened(d=text)) == report(app)


def test_back_restores_older_designs():
    app = opened()
    first = app.query_params["d"]
    second = put(app, LENGTH, 3.0).query_params["d"]
    put(app, LENGTH, 4.0)
    for text, length in ((second, 3.0), (first, 1.8)):
        app.query_params["d"] = text
        assert ran(app).number_input(key=LENGTH).value == length


def test_a_link_that_comes_late_undoes_nothing():
    app = opened()
    early = app.query_params["d"]
    put(app, LENGTH, 3.0)
    app.query_params["d"] = early  # the browser had not yet heard of the change
    assert put(app, LENGTH, 4.0).number_input(key=LENGTH).value == 4.0
    assert unpacked(app.query_params["d"])[1] == {LENGTH: 4.0}


@pytest.mark.parametrize(
    "text",
    [
        "hello",
        "%%%",
        "eJyLjgUAARUAuQ",
        link.written("no_such_demo", {}),
        link.written("gearbox_tooth", {LENGTH: -1}),
        link.written("gearbox_tooth", {"a.b": 1}),
    ],
)
def test_a_wrong_link_is_one_sentence_and_the_default(text):
    app = opened()
    wrong = opened(d=text)
    assert len(wrong.warning) == 1
    assert shown(wrong) == shown(app)
    assert unpacked(wrong.query_params["d"]) == ["gearbox_tooth", {}]


def test_the_design_survives_a_page_switch(monkeypatch):
    app = opened()
    monkeypatch.setattr(checked, "rows", lambda: published.rows()[:5])
    checked.everything.clear()
    put(app, LENGTH, 3.0)
    app.switch_page("optics/ui/pages/checks.py")
    del app.query_params["d"]  # the browser drops it with the page
    assert "of 5 values agree" in " ".join(item.value for item in ran(app).markdown)
    checked.everything.clear()
    app.switch_page("optics/ui/pages/sizing.py")
    assert ran(app).number_input(key=LENGTH).value == 3.0


def test_a_design_file_comes_back_as_it_was_saved():
    app = opened()
    put(app, LENGTH, 3.0)
    text = presets.saved(app.session_state["sketch"].design.document)
    fresh = opened()
    fresh.file_uploader(key="file").upload("mine.toml", text.encode())
    assert report(ran(fresh)) == report(app)
    put(fresh, LENGTH, 4.0)
    again = opened(d=fresh.query_params["d"])
    assert report(again) == report(fresh)
    assert again.session_state["sketch"].opened == app.session_state["sketch"].document


def test_a_file_that_is_no_design_is_a_sentence():
    app = opened()
    app.file_uploader(key="file").upload("mine.toml", b"format = 1\nkind = 'teapot'\n")
    assert "teapot" in ran(app).warning[0].value
