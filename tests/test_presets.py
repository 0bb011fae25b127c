"""Presets, documents and designs: every file loads, every value is sourced, bad input is one sentence."""

import copy

import pytest

from optics import presets
from optics.spec import OutOfRange
from optics.tables import BASES, PRESETS, UNSOURCED, preset, preset_names, sources

FOLDERS = sorted(
    {*presets.FOLDERS.values()} - {folder for folder in presets.FOLDERS.values() if not (PRESETS / folder).exists()}
)
EVERY = [(folder, name) for folder in FOLDERS for name in preset_names(folder)]


@pytest.mark.parametrize(("folder", "name"), EVERY)
def test_every_preset_loads_and_every_value_has_a_source(folder, name):
    found = preset(folder, name)
    assert found.note
    for item in [*found.values.values(), *found.curves.values()]:
        assert item.source in sources() or item.source in UNSOURCED
        assert item.basis in BASES


@pytest.mark.parametrize("path", presets.FOLDERS)
def test_every_preset_makes_a_valid_design(path):
    """Each preset of a folder stands in its place in a demo design."""
    folder = presets.FOLDERS[path]
    base = presets.open("gearbox_tooth").document
    setup = {
        "guide.cable.fiber": {
            "guide.cable.diameter_mm": 3.0,
            "guide.cable.length_m": 2.0,
            "guide.cable.packing_fraction": 0.8,
            "guide.joint.gap_mm": 0.1,
            # matched, so that no fiber's cone collides with a stated spot
            "source.launch.form": "matched",
        },
        "viewer.eye": {"viewer.form": "eye"},
        "image.chip": {"image.form": "chip", "viewer": None},
        "source.lamp": {"source.launch.form": "butt"},
    }.get(path, {})
    for name in preset_names(folder) if (PRESETS / folder).exists() else ():
        design = presets.resolve(presets.edited(base, {**setup, f"{path}.preset": name}))
        assert any(key.startswith(path) for key in design.sourced)


@pytest.mark.parametrize("name", preset_names("fiberscopes"))
def test_demo_designs_resolve_and_say_that_they_are_invented(name):
    design = presets.open(name)
    assert "nvented" in design.fiberscope.note
    again = presets.resolve(__import__("tomllib").loads(presets.saved(design.document)))
    assert again.fiberscope == design.fiberscope


@pytest.fixture(scope="module")
def document():
    return presets.open("gearbox_tooth").document


def test_overrides_stand_above_the_preset(document):
    design = presets.resolve(
        presets.edited(document, {"guide.fiber.na": 0.5, "guide.fiber.preset": "lead_silicate_na066"})
    )
    assert design.fiberscope.guide.fiber.na == 0.5
    assert design.sourced["guide.fiber.na"].source == "own_scenario"
    assert design.sourced["guide.fiber.core_index"].source != "own_scenario"


def test_a_changed_form_drops_the_old_fields_and_starts_the_new(document):
    edited = presets.edited(document, {"source.launch.gap_mm": 0.7, "source.launch.form": "butt"})
    assert edited["source"]["launch"] == {"form": "butt", "gap_mm": 0.7}
    back = presets.resolve(presets.edited(edited, {"source.launch.form": "matched"}))
    assert back.fiberscope.source.launch.form == "matched"


def test_list_items_go_by_index(document):
    design = presets.resolve(presets.edited(document, {"guide.bundle.bends.0.radius_mm": 44.0}))
    assert design.fiberscope.guide.bundle.bends[0].radius_mm == 44.0
    with pytest.raises(OutOfRange, match=r"bends.3.radius_mm names the list item '3'; allowed: 0 to 0"):
        presets.edited(document, {"guide.bundle.bends.3.radius_mm": 44.0})


def test_editing_leaves_the_original_alone(document):
    before = copy.deepcopy(document)
    presets.edited(document, {"guide.bundle.length_m": 9.0, "guide.bundle.bends.0.radius_mm": 99.0})
    assert document == before


REFUSALS = [
    ({"guide.bundle.lenth_m": 2.0}, r"guide.bundle.lenth_m is not a known key \(nearest: length_m\)"),
    ({"guide.fiber.na": 1.7}, r"guide.fiber.na is 1.7"),
    (
        {"guide.fiber.na": 1.45, "guide.fiber.core_index": 1.4},
        r"guide.fiber.na is 1.45 and guide.fiber.core_index is 1.4; the NA must be below",
    ),
    ({"guide.bundle.length_m": -1.0}, r"guide.bundle.length_m is -1; it must be a?.*above 0"),
    ({"guide.bundle.length_m": 0.0}, r"guide.bundle.length_m is 0"),
    ({"guide.bundle.length_m": float("inf")}, r"guide.bundle.length_m is inf; it must be a finite number"),
    ({"guide.bundle.length_m": float("nan")}, r"guide.bundle.length_m is nan; it must be a finite number"),
    ({"guide.bundle.length_m": "long"}, r"guide.bundle.length_m is 'long'; it must be a finite number"),
    (
        {"guide.fiber.preset": "pmma_250"},
        r"guide.fiber.preset is 'pmma_250' \(nearest: pmma_250um\); it must be one of",
    ),
    (
        {"guide.fiber.attenuation": {"wavelength_nm": [400.0, 500.0, 450.0], "value": [1.0, 1.0, 1.0]}},
        r"guide.fiber.attenuation goes from 500 to 450 nm; its wavelengths must be strictly increasing",
    ),
    (
        {"guide.fiber.core_um": 60.0},
        r"guide.fiber.core_um is 60 and guide.fiber.fiber_um is 50; the core must be at most as wide",
    ),
    (
        {"image.bundle.diameter_mm": 0.02},
        r"image.bundle.diameter_mm is 0.02 and image.bundle.pitch_um is 10; an image bundle must have at least 7 cores",
    ),
    (
        {"image.objective.focus_mm": 0.8},
        r"image.objective.focus_mm is 0.8 and image.objective.focal_mm is 1; the focus must lie beyond",
    ),
    (
        {"source.launch.spot_mm": 0.5},
        r"source.launch.spot_mm is 0.5 and source.launch.cone_na is 0.55; such a spot is brighter than its lamp allows",
    ),
    ({"source.launch.form": "laser"}, r"source.launch.form is 'laser'; it must be one of butt, matched, rated, spot"),
    (
        {"scene.cover": {"index": 1.5, "thickness_mm": 0.3, "spread_na": 0.45}},
        r"scene.cover.spread_na is 0.45 and guide.fiber.na is 0.57; the guide's NA and the spread together",
    ),
    ({"setting": "office"}, r"setting is 'office'; it must be 'industrial' or 'clinical'"),
    ({"scene.target.medium": "mud"}, r"scene.target.medium is 'mud'"),
    ({"body.section.outer_diameter_mm": "wide"}, r"body.section.outer_diameter_mm is 'wide'"),
    ({"body.section.clearance_mm": -0.1}, r"body.section.clearance_mm is -0.1; it must be .*at least 0"),
    ({"guide.cable.length_m": 2.0}, r"guide.cable.fiber is missing"),
    ({"viewer": None}, r"viewer is missing; an image bundle needs a camera or an eye"),
    ({"format": 2}, r"format is 2; it must be 1"),
    ({"guide.bundle.preset": "x"}, r"guide.bundle takes no preset"),
    ({"scene.ports.count": 2.5}, r"scene.ports.count is 2.5; it must be a whole number"),
    (
        {"body.section.wall_mm": 2.0, "body.section.outer_diameter_mm": 3.0},
        r"body.section.wall_mm is 2 and body.section.outer_diameter_mm is 3; the walls leave no lumen",
    ),
]


@pytest.mark.parametrize(
    ("settings", "said"),
    REFUSALS,
    ids=[next(iter(settings)) + f"_{number}" for number, (settings, _) in enumerate(REFUSALS)],
)
def test_bad_input_is_one_sentence(document, settings, said):
    with pytest.raises(OutOfRange, match=said) as wrong:
        presets.resolve(presets.edited(document, settings), "here.toml")
    assert "\n" not in str(wrong.value)
    assert "Error" not in str(wrong.value)


def test_settings_are_read_as_toml_or_text():
    assert presets.parse_setting("a.b=3") == ("a.b", 3)
    assert presets.parse_setting("a.b = true") == ("a.b", True)
    assert presets.parse_setting("a.b=solve") == ("a.b", "solve")
    assert presets.parse_setting("a.b=[1, 2]") == ("a.b", [1, 2])
    with pytest.raises(OutOfRange, match="is not of the form path=value"):
        presets.parse_setting("a.b")
