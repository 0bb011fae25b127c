"""Ports: areas, places, and the tables that people write."""

import numpy as np
import pytest
from pydantic import ValidationError

from optics.scene.ports import (
    Annulus,
    AnnulusPorts,
    Crescent,
    CrescentPorts,
    Disc,
    PlacedPorts,
    RoundPorts,
    outer_radius_mm,
    port_area_mm2,
    ring,
    round_port_radius_mm,
)
from optics.spec import OutOfRange


def test_areas_come_back():
    radius = round_port_radius_mm(area_mm2=3.1, count=4)
    assert 4 * port_area_mm2(Disc(1.0, 0.0, float(radius))) == pytest.approx(3.1, rel=1e-12)
    outer = float(outer_radius_mm(area_mm2=3.1, inner_mm=1.6))
    assert port_area_mm2(Annulus(0.8, outer)) == pytest.approx(3.1, rel=1e-12)
    assert port_area_mm2(Crescent(outer - 0.8, 0.8, outer)) == pytest.approx(3.1, rel=1e-12)


def test_a_ring_is_even_and_starts_on_x():
    ports = ring(count=5, offset_mm=2.0, radius_mm=0.3, tilt_deg=10.0)
    assert (ports[0].x_mm, ports[0].y_mm) == (2.0, 0.0)
    assert np.hypot([p.x_mm for p in ports], [p.y_mm for p in ports]) == pytest.approx(np.full(5, 2.0))
    assert sum(p.x_mm for p in ports) == pytest.approx(0.0, abs=1e-12)
    assert [p.azimuth_deg for p in ports] == [0.0, 72.0, 144.0, 216.0, 288.0]


def test_tables():
    assert RoundPorts(form="round", count=2).offset_mm is None
    assert AnnulusPorts(form="annulus").inner_mm is None
    assert CrescentPorts(form="crescent", inner_mm=1.2).offset_mm is None
    table = PlacedPorts(form="placed", ports=[{"x_mm": 1.0, "y_mm": -1.0, "diameter_mm": 0.8}])
    assert table.discs() == (Disc(1.0, -1.0, 0.4, 0.0, 0.0),)
    for wrong in ({"count": 0}, {"count": 2, "tilt_deg": 90.0}, {"count": 2, "shape": "x"}, {"count": 2.5}):
        with pytest.raises(ValidationError):
            RoundPorts(form="round", **wrong)
    with pytest.raises(ValidationError):
        PlacedPorts(form="placed", ports=[])


@pytest.mark.parametrize(
    ("make", "sentence"),
    [
        (lambda: Disc(0.0, 0.0, 0.0), "radius_mm is 0; it must be above 0"),
        (lambda: Disc(0.0, 0.0, 1.0, -5.0), "tilt_deg is -5"),
        (lambda: Annulus(1.0, 1.0), "outer_radius_mm is 1; it must be above inner_radius_mm"),
        (lambda: Crescent(0.6, 1.0, 1.5), "x_mm is 0.6; it must be from -0.5 to 0.5"),
        (lambda: ring(count=0, offset_mm=1.0, radius_mm=0.2, tilt_deg=0.0), "count is 0; it must be at least 1"),
        (lambda: round_port_radius_mm(area_mm2=-1.0, count=2), "area_mm2 is -1"),
    ],
)
def test_refusals(make, sentence):
    with pytest.raises(OutOfRange, match=sentence):
        make()
