"""The body in the chain: sections fit, ports come from the layout, diameters are solved for, passages decide."""

import numpy as np
import pytest

from optics import presets
from optics.chain.columns import columns
from optics.chain.fit import fit, section
from optics.chain.solve import solved
from optics.chain.target import image_size_mm
from optics.report.size import size
from optics.spec import OutOfRange
from optics.tables import preset_names


def fiberscope(document, **changes):
    return presets.resolve(
        presets.edited(document, {key.replace("__", "."): value for key, value in changes.items()})
    ).fiberscope


@pytest.mark.parametrize("name", preset_names("fiberscopes"))
def test_demo_designs_fit_their_tubes(name):
    report = size(presets.open(name).fiberscope)
    assert not [item for item in report.caveats if item.where == "body.section"]
    assert report.fit.outer_diameter_mm > report.fit.lumen_mm
    assert 0 < report.fit.free_area_mm2 < np.pi / 4 * report.fit.lumen_mm**2


def test_two_round_parts_make_the_closed_form(document):
    """Image 1.1 with jacket and one port of 2.0, clearance 0.05: the lumen is their sum and three clearances."""
    report = size(fiberscope(document, scene__ports__count=1, body__section__wires=[]))
    assert report.fit.lumen_mm == pytest.approx(1.1 + 2.0 + 3 * 0.05, rel=1e-12)
    assert report.fit.outer_diameter_mm == pytest.approx(report.fit.lumen_mm + 2 * 0.45, rel=1e-12)


def test_ports_touch_neither_the_image_part_nor_each_other(random_designs):
    table = columns([design for design in random_designs(80) if design.scene and design.scene.ports.form == "round"])
    _, ports = fit(table, image_size_mm(table))
    away = np.hypot(ports["x_mm"], ports["y_mm"])
    there = ports["radius_mm"] > 0
    image = image_size_mm(table)[:, None] / 2
    assert np.all((away >= image + ports["radius_mm"] - 1e-6) | ~there)


def test_a_tube_too_narrow_says_what_it_takes(document):
    report = size(fiberscope(document, body__section__outer_diameter_mm=3.0))
    said = next(item.text for item in report.caveats if item.where == "body.section")
    assert "it takes an outer diameter of 3.9" in said
    assert report.fit.passes is False


@pytest.mark.parametrize("path", ["guide.bundle.diameter_mm", "image.bundle.diameter_mm"])
def test_a_solved_diameter_is_the_most_that_fits(document, path):
    design = presets.resolve(
        presets.edited(document, {path: "solve", "body.section.outer_diameter_mm": 4.4})
    ).fiberscope
    table = solved(columns([design]))
    found = table[path]

    def fits(diameter):
        tried = table.replaced({path: np.array([diameter])})
        return section(tried, image_size_mm(tried))[0]["fits"][0] > 0

    assert fits(float(found[0]))
    assert not fits(float(found[0]) * 1.001)
    report = size(design)
    again = size(
        presets.resolve(
            presets.edited(document, {path: float(found[0]), "body.section.outer_diameter_mm": 4.4})
        ).fiberscope
    )
    assert report.summary == again.summary


@pytest.mark.parametrize(
    ("settings", "said"),
    [
        ({"guide.bundle.diameter_mm": "solve"}, "outer_diameter_mm must be a number"),
        (
            {
                "guide.bundle.diameter_mm": "solve",
                "image.bundle.diameter_mm": "solve",
                "body.section.outer_diameter_mm": 5.0,
            },
            "cannot both be solved for",
        ),
        ({"scene.ports.offset_mm": 0.9}, "the ports overlap the image bundle there"),
        ({"scene.ports.offset_mm": 0.6, "image": None, "viewer": None}, "the ports overlap each other there"),
        ({"body.passage.bore_mm": -1.0}, "body.passage.bore_mm is -1"),
        ({"guide.bundle.bends.0.radius_mm": 0.0}, "guide.bundle.bends.0.radius_mm is 0"),
    ],
)
def test_what_cannot_be_built_is_refused(document, settings, said):
    with pytest.raises(OutOfRange, match=said):
        presets.resolve(presets.edited(document, settings))


def test_no_room_at_all_is_one_sentence(document):
    tight = {"guide.bundle.diameter_mm": "solve", "body.section.outer_diameter_mm": 1.5}
    with pytest.raises(OutOfRange, match="the tube leaves too little room"):
        size(presets.resolve(presets.edited(document, tight)).fiberscope)


def test_a_tip_that_fits_the_bore_but_not_its_elbow_does_not_pass(document):
    long = size(fiberscope(document, body__passage__rigid_tip_mm=40.0))
    assert long.fit.outer_diameter_mm < 8.0
    assert long.fit.longest_rigid_tip_mm < 40.0
    assert long.fit.passes is False
    wide = size(fiberscope(document, body__passage__bore_mm=3.0))
    assert wide.fit.passes is False
    assert wide.fit.longest_rigid_tip_mm is None


def test_the_tube_bends_no_tighter_than_its_stiffest_part(document):
    rod = size(fiberscope(document, image__bundle__one_rod=True))
    free = size(fiberscope(document))
    assert rod.fit.bend_radius_mm == pytest.approx(1.0 / (2 * 0.0015), rel=1e-12)
    assert free.fit.bend_radius_mm == 25.0
