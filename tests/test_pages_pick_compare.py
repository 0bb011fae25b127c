"""The pages Pick and Compare in process: they answer for every design, and what they offer can be taken."""

import copy

import numpy as np
import pytest
from streamlit.testing.v1 import AppTest

from optics import presets
from optics.figures import compare as compare_figures
from optics.figures import pick as pick_figures
from optics.figures.palette import DARK, LIGHT
from optics.presets import value_at
from optics.report.size import size
from optics.study.compare import differences
from optics.study.pick import pick
from optics.study.split import split
from optics.tables import preset_names
from optics.ui import compare_parts, compare_words, link, pick_search, split_words

DEMOS = preset_names("fiberscopes")
BARE = {"scene": None, "image": None, "viewer": None, "body": None, "needs": None}
CANDIDATES = 400


def page(name: str) -> None:
    """One page alone in the app's frame."""
    import runpy

    import streamlit as st

    from optics.ui import sketch

    st.set_page_config(layout="wide")
    sketch.follow_link()
    runpy.run_path(f"optics/ui/pages/{name}.py")
    sketch.write_link()


def opened(name: str, demo: str, **changes) -> AppTest:
    app = AppTest.from_function(page, args=(name,), default_timeout=60)
    app.query_params["d"] = link.written(demo, changes.get("settings", {}))
    return ran(app)


def ran(app: AppTest) -> AppTest:
    app.run()
    assert not app.exception, app.exception[0].message
    return app


def click(app: AppTest, key: str) -> AppTest:
    app.button(key=key).click()
    return ran(app)


@pytest.fixture(autouse=True)
def few(monkeypatch):
    """A seeded choice of candidates, so that a search takes a fraction of a second."""
    monkeypatch.setattr(
        pick_search, "pick", lambda design, **asked: pick(design, most=CANDIDATES, **{**asked, "nearest": 12})
    )
    pick_search._shelf().clear()
    monkeypatch.setattr(compare_parts, "POINTS", 9)


@pytest.fixture
def no_crossings(monkeypatch):
    """The curves alone: the search for crossings has tests of its own, and takes most of the time."""
    monkeypatch.setattr(compare_parts, "crossed", lambda *_: ())


# Pick


@pytest.mark.parametrize("demo", DEMOS)
def test_a_search_answers_and_its_answer_can_be_taken(demo):
    app = opened("pick", demo)
    assert "Which" in app.header[0].value
    assert any("Asked" in item.value for item in app.markdown)
    click(app, "pick:search")
    one = app.session_state["pick"].last
    assert app.header[0].value[0] == ("✓" if one.found.met else "✗")
    assert f"{one.found.candidates:,} candidates" in app.header[0].value
    if one.found.picks:
        click(app, "pick:best:1")
        report = app.session_state["sketch"].report
        assert all(line.met for line in report.needs)
        assert report.summary.smallest_gap_mm == pytest.approx(one.found.picks[0].summary.smallest_gap_mm, rel=1e-9)
        assert app.session_state["sketch"].pinned is not None
        assert not app.warning, "what was taken from an answer does not make the answer old"
    assert app.dataframe if one.found.picks else app.button


def test_nothing_meets_and_what_to_relax_is_said_and_taken():
    app = click(opened("pick", "injector_hole"), "pick:search")
    one = app.session_state["pick"].last
    assert one.found.met == 0
    assert one.found.nearest_relaxation is not None
    assert any("elax" in item.value and "one does" in item.value for item in app.markdown)
    click(app, "pick:relax")
    report = app.session_state["sketch"].report
    assert all(line.met for line in report.needs)
    assert report.fit.passes is not False


def test_a_near_miss_passes_with_its_change():
    app = click(opened("pick", "turbine_casing"), "pick:search")
    near = app.session_state["pick"].last.near
    place = next(place for place, (each, _) in enumerate(near) if each.smallest_change is not None)
    click(app, f"pick:near:{place}")
    report = app.session_state["sketch"].report
    assert all(line.met for line in report.needs)
    assert report.fit.passes is not False


def test_a_changed_sketch_makes_the_answer_old_and_its_return_makes_it_new():
    app = click(opened("pick", "gearbox_tooth"), "pick:search")
    here = app.session_state["sketch"]
    assert not app.warning
    app.query_params["d"] = link.written("gearbox_tooth", {"guide.bundle.length_m": 2.5})
    ran(app)
    assert "pick:search" in [item.key for item in app.button]
    app.query_params["d"] = link.written("gearbox_tooth", {})
    ran(app)
    assert app.session_state["sketch"].document == here.document
    assert not app.warning
    assert "candidates" in app.header[0].value


def test_a_search_that_is_stopped_says_so(monkeypatch):
    def stopped(design, **asked):
        return pick(design, most=3000, nearest=5, progress=lambda share: share < 0.3)

    monkeypatch.setattr(pick_search, "pick", stopped)
    app = click(opened("pick", "gearbox_tooth"), "pick:search")
    assert app.session_state["pick"].last.found.stopped
    assert any("Stopped early" in item.value for item in app.caption)
    assert not any("No single number" in item.value for item in app.markdown), "that was not looked for"
    assert "pick:search" in [item.key for item in app.button], "the whole search can still be asked for"


@pytest.mark.usefixtures("no_crossings")
@pytest.mark.parametrize("name", ["pick", "compare"])
def test_a_bare_light_guide_is_told_what_can_be_done(name):
    app = opened(name, "gearbox_tooth", settings=BARE)
    assert app.session_state["sketch"].report.detail is None
    if name == "pick":
        click(app, "pick:search")
        assert app.header[0].value.startswith("✓")
        assert app.session_state["pick"].last.found.picks[0].summary.smallest_gap_mm is None
    else:
        assert any("no tube" in item.value for item in app.markdown)
        assert app.header


# Compare


def test_crossings_are_sentences():
    app = opened("compare", "gearbox_tooth")
    assert any("**Beyond a length of" in item.value and "overtakes" in item.value for item in app.markdown)


@pytest.mark.usefixtures("no_crossings")
@pytest.mark.parametrize("demo", DEMOS)
def test_families_and_split_answer(demo):
    app = opened("compare", demo)
    assert app.header[0].value.endswith(".")
    assert {tab.label for tab in app.tabs} == {"silica", "plastic"}
    assert any("overtakes" in item.value for item in app.subheader)
    before = app.session_state["sketch"].report.summary
    click(app, "compare:best")
    after = app.session_state["sketch"].report.summary
    assert before.smallest_gap_mm is None or after.smallest_gap_mm <= before.smallest_gap_mm * (1 + 1e-9)
    assert app.session_state["sketch"].pinned is not None


@pytest.mark.usefixtures("no_crossings")
def test_designs_side_by_side():
    app = opened("compare", "gearbox_tooth")
    app.button_group(key="compare:mode").set_value("designs")
    ran(app)
    app.multiselect(key="compare:designs").set_value(["sketch", "turbine_casing", "airway_small_animal"])
    ran(app)
    assert len(app.tabs) == 2
    app.multiselect(key="compare:designs").set_value(["sketch"])
    ran(app)
    assert "Nothing is compared yet" in app.header[0].value


def test_a_share_that_keeps_the_light_meets_both_needs():
    design = presets.open("gearbox_tooth")
    document = presets.edited(design.document, {"needs.target_center_lux": 50_000.0})
    design = presets.resolve(document)
    good = split_words.keeping(split(design), design.fiberscope)
    assert good
    for point in (good[0], good[-1]):
        assert point.target_center_lux >= 50_000.0
        assert point.smallest_gap_mm <= 0.25
    assert "met from" in split_words.keeping_words(split(design), design.fiberscope)


def test_who_meets_what_is_asked_comes_first():
    design = presets.open("gearbox_tooth")
    worse = presets.resolve(presets.edited(design.document, {"image.bundle.pitch_um": 20.0}))
    names = ["fine", "coarse"]
    reports, told = differences([design, worse], names)
    first, behind = compare_words.headline(reports, compare_words.sides(told, names), names)
    assert first == "Fine meets all that is asked, the other does not."
    assert behind[0].startswith("Coarse misses the smallest gap")
    assert size(worse.fiberscope).summary.needs_met is False


# Figures


def test_the_figures_draw_with_gaps_in_their_numbers():
    dots = tuple(pick_figures.Dot(n, 10.0**n, np.nan if n == 2 else 0.1 * n, 3.0 + n, n) for n in range(1, 6))
    nan = float("nan")
    for palette in (LIGHT, DARK):
        view = pick_figures.Front(dots, np.array([[100.0, 0.2]]), dots[0], 500.0, nan, "light, lx", (1, 3))
        axes = pick_figures.front(view, palette=palette).axes[0]
        low, high = axes.get_ylim()
        assert low > high, "finer is upward"
        assert {text.get_text() for text in axes.texts} == {"1", "3"}
        bare = pick_figures.Front(dots[:1], np.zeros((0, 2)), None, nan, nan, "light, lm", (1,))
        pick_figures.front(bare, palette=palette)
        bars = pick_figures.failing({"evenness": 3, "the tube is wider than the bore": 7}, palette=palette).axes[0]
        assert [patch.get_width() for patch in bars.patches] == [3, 7]
    shades = [sum(int(pick_figures.shade(each, LIGHT)[k : k + 2], 16) for k in (1, 3, 5)) for each in range(1, 6)]
    assert shades == sorted(shades, reverse=True), "dearer is darker"


def test_curves_of_designs_and_shares_draw():
    places = np.geomspace(0.1, 100, 9)
    values = np.stack([100 / places, np.full(9, 20.0)])
    values[0, -1] = np.nan
    view = compare_figures.Along(
        "light, lm", "length, m", places, ("glass", "silica"), values, (1.8, np.nan), ((5.0, 20.0),)
    )
    axes = compare_figures.along(view).axes[0]
    assert {text.get_text() for text in axes.texts} == {"glass", "silica"}
    share = np.linspace(0.1, 0.9, 9)
    shared = compare_figures.Shared(
        share, 0.2 / share, 1000 * (1 - share), share < 2, (0.9, 0.22, 100.0), (0.8, 0.9), (0.3, 0.6, 700.0), 0.4, 300.0
    )
    assert len(compare_figures.shared(shared, palette=DARK).axes) == 2
    nothing = compare_figures.Shared(
        share, share * np.nan, share, share < 2, None, None, (0.3, np.nan, np.nan), np.nan, np.nan
    )
    compare_figures.shared(nothing)


def test_documents_are_left_alone():
    document = presets.open("gearbox_tooth").document
    before = copy.deepcopy(document)
    pick(presets.resolve(document), most=50, nearest=3)
    assert document == before
    assert value_at(document, "guide.fiber.preset")
