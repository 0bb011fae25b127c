"""The section: its table, sums of areas, and parts in a tube of given diameter."""

import numpy as np
import pytest
from pydantic import ValidationError

from optics.body.section import (
    Section,
    available_lumen_mm,
    fill_fraction,
    fit_in_tube,
    jacketed_mm,
    outer_diameter_mm,
    part_list,
)
from optics.spec import OutOfRange

SECTION = {
    "outer_diameter_mm": "solve",
    "wall_mm": 0.45,
    "clearance_mm": 0.05,
    "channels": [{"inner_mm": 1.2, "wall_mm": 0.1}],
    "wires": [{"diameter_mm": 0.4, "count": 4, "at_wall": True}],
}


def test_table_as_a_file_gives_it():
    section = Section.model_validate(SECTION)
    assert section.outer_diameter_mm == "solve"
    assert section.free_fill_fraction == 0.55
    assert Section.model_validate({**SECTION, "outer_diameter_mm": 6.0}).outer_diameter_mm == 6.0


@pytest.mark.parametrize(
    "change",
    [
        {"outer_diameter_mm": "small"},
        {"outer_diameter_mm": -1.0},
        {"clearance_mm": -0.1},
        {"wires": [{"diameter_mm": 0.4, "count": 0}]},
        {"channels": [{"inner_mm": 1.2}]},
        {"color": "black"},
        {"wall_mm": float("nan")},
    ],
)
def test_table_refuses(change):
    with pytest.raises(ValidationError):
        Section.model_validate({**SECTION, **change})


def test_parts_written_out():
    parts = part_list(section=Section.model_validate(SECTION), image_mm=1.1)
    assert parts.names == ("image", "channel 1", "wire 1", "wire 1", "wire 1", "wire 1")
    np.testing.assert_allclose(parts.diameters_mm, [1.1, 1.4, 0.4, 0.4, 0.4, 0.4])
    assert parts.at_wall.tolist() == [False, False, True, True, True, True]
    assert part_list(section=Section.model_validate(SECTION), image_mm=0.0).names[0] == "channel 1"


def test_worked_sum_of_areas():
    """OD 6/ID 4.9 with 1.3 image, 2.2 channel, two 1.2 light, four 0.6 wires: 8.52 of 18.86 mm2, 45 %."""
    parts = np.pi / 4 * np.sum(np.square([1.3, 2.2, 1.2, 1.2, 0.6, 0.6, 0.6, 0.6]))
    assert parts == pytest.approx(8.52, abs=0.005)
    assert np.pi / 4 * 4.9**2 == pytest.approx(18.86, abs=0.005)
    assert fill_fraction(parts_mm2=parts, lumen_mm=4.9) == pytest.approx(0.45, abs=0.005)


def test_walls_and_lumen_are_inverse():
    assert available_lumen_mm(tube_mm=outer_diameter_mm(lumen_mm=4.9, wall_mm=0.55), wall_mm=0.55) == pytest.approx(4.9)
    with pytest.raises(OutOfRange, match="wall_mm is 3; it must be below half the outer diameter"):
        available_lumen_mm(tube_mm=6.0, wall_mm=3.0)


def test_jacket_or_barrel():
    assert jacketed_mm(bundle_mm=1.0, jacket_mm=0.05, barrel_mm=0.0) == pytest.approx(1.1)
    np.testing.assert_allclose(jacketed_mm(bundle_mm=1.0, jacket_mm=0.05, barrel_mm=np.array([0.9, 1.5])), [1.1, 1.5])


GIVEN = {
    "wall_mm": 0.55,
    "diameters_mm": [1.3, 2.2, 1.2, 1.2, 0.6, 0.6, 0.6, 0.6],
    "clearance_mm": 0.05,
    "at_wall": [False] * 4 + [True] * 4,
    "thorough": False,
}


def test_parts_in_a_given_tube():
    wide, narrow = (fit_in_tube(tube_mm=tube, **GIVEN) for tube in (6.0, 4.6))
    assert wide.fits
    assert not narrow.fits
    assert narrow.spare_mm < 0
    assert wide.needed_mm == narrow.needed_mm
    # in the wider lumen the wires stand at its wall and no gap is lost
    r, p = np.array(GIVEN["diameters_mm"]) / 2, wide.centers_mm
    np.testing.assert_allclose((np.hypot(*p.T) + r)[4:], 4.9 / 2 - 0.05, atol=1e-9)
    i, j = np.triu_indices(8, 1)
    assert (np.hypot(*(p[i] - p[j]).T) - r[i] - r[j]).min() > 0.05 - 1e-9


def test_refuses_a_part_larger_than_the_tube():
    with pytest.raises(OutOfRange) as said:
        fit_in_tube(tube_mm=3.0, **GIVEN)
    assert str(said.value) == "diameters_mm is 2.2; it must be at most 1.8 mm to enter this tube."
