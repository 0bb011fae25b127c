"""The data behind the pictures against routes of their own: means, energy, geometry, photon counts."""

import itertools

import numpy as np
import pytest

from optics import presets
from optics.report import views
from optics.report.size import size
from optics.spectrum import integral, photons_per_j

VARIANTS = {
    "as it is": {},
    "annulus": {"scene.ports.form": "annulus"},
    "crescent in water": {"scene.ports.form": "crescent", "scene.target.medium": "water"},
    "offset": {"scene.ports.count": 3, "scene.ports.offset_mm": 1.8},
    "close": {"scene.target.distance_mm": 10.0, "scene.target.near_mm": 5.0},
    "tilted": {"scene.target.tilt_deg": 35.0},
    "tilted ports": {"scene.ports.tilt_deg": 10.0},
    "placed": {
        "scene.ports.form": "placed",
        "scene.ports.ports": [
            {"x_mm": 1.6, "y_mm": 0.4, "diameter_mm": 1.5},
            {"x_mm": -1.4, "y_mm": 0.0, "diameter_mm": 1.4, "tilt_deg": 5.0},
        ],
    },
}
NO_IMAGE = {"image": None, "viewer": None}
DEMOS = presets.preset_names("fiberscopes")


@pytest.fixture(scope="module")
def made(document):
    return lambda **settings: presets.resolve(presets.edited(document, settings)).fiberscope


def in_field(view):
    """Which points of the map lie in the field of view: inside the closed line of its rim, by crossings."""
    u, v = np.meshgrid(view.u_mm, view.v_mm)
    inside = np.zeros(u.shape, bool)
    for x0, y0, x1, y1 in zip(
        view.field_u_mm, view.field_v_mm, np.roll(view.field_u_mm, -1), np.roll(view.field_v_mm, -1)
    ):
        if y0 != y1:
            inside ^= ((y0 > v) != (y1 > v)) & (u < x0 + (v - y0) * (x1 - x0) / (y1 - y0))
    return inside


@pytest.mark.parametrize("name", VARIANTS)
def test_map_agrees_with_the_report(made, name):
    scope = made(**VARIANTS[name])
    view, told = views.target_map(scope, 161), size(scope).target
    assert view.center_lux == pytest.approx(told.center_lux, rel=1e-3)
    assert view.lux[in_field(view)].mean() == pytest.approx(told.mean_lux, rel=0.01)
    assert view.lux[in_field(view)].min() >= told.min_lux * (1 - 0.01)
    assert view.profile_lux[len(view.profile_lux) // 2] == pytest.approx(
        np.interp(view.profile_mm[len(view.profile_mm) // 2], view.u_mm, view.lux[len(view.v_mm) // 2]), rel=0.01
    )


def test_all_the_light_lands_on_the_map_of_a_guide_without_image(made):
    scope = made(**NO_IMAGE)
    view = views.target_map(scope, 201)
    assert view.field_radius_mm is None
    assert view.field_u_mm.size == 0
    area_m2 = (view.u_mm[1] - view.u_mm[0]) * (view.v_mm[1] - view.v_mm[0]) * 1e-6
    assert view.lux.sum() * area_m2 == pytest.approx(size(scope).light.delivered_lm, rel=0.005)
    assert view.lux[0].max() == view.lux[:, 0].max() == 0.0  # dark beyond the lit disc


def test_rim_of_a_tilted_field_lies_on_the_cone_of_view(made):
    scope = made(**{"scene.target.tilt_deg": 35.0, "image.objective.pupil_depth_mm": 2.0})
    view, tilt = views.target_map(scope, 5), np.deg2rad(35.0)
    x, y = view.field_u_mm * np.cos(tilt), view.field_v_mm
    z = 20.0 + view.field_u_mm * np.sin(tilt)
    slope = np.hypot(x, y) / (z + 2.0)
    assert slope == pytest.approx(view.field_radius_mm / 22.0, rel=1e-9)


def test_map_of_a_bore(made):
    scope = made(**{"scene.target.form": "bore", "scene.target.bore_mm": 20.0})
    view, told = views.target_map(scope, 181), size(scope).target
    assert view.surface == "bore"
    assert np.ptp(view.u_mm) == pytest.approx(np.pi * 20.0)
    assert view.center_lux == pytest.approx(told.center_lux, rel=1e-3)
    seen = (view.v_mm >= view.field_v_mm[0]) & (view.v_mm <= view.field_v_mm[1])
    assert view.lux[seen].mean() == pytest.approx(told.mean_lux, rel=0.02)


def test_need_is_shown_and_the_stricter_place_counts(made):
    assert views.target_map(made(**{"needs.target_min_lux": 700.0}), 5).wanted_lux == 700.0
    assert views.target_map(made(**{"needs.target_center_lux": 900.0}), 5).wanted_lux == 900.0
    assert views.target_map(made(needs={}), 5).wanted_lux is None


def test_what_a_design_does_not_have_gives_none(made):
    bare = made(**NO_IMAGE, scene=None, body=None, needs={})
    assert views.target_map(bare) is views.section_view(bare) is views.passage_view(bare) is None
    assert views.spectra(bare).seen_w_nm.max() == 0.0


# The section

TUBES = {
    "as it is": {},
    "wide tube": {"body.section.outer_diameter_mm": 6.0},
    "channel": {"body.section.channels": [{"inner_mm": 1.2, "wall_mm": 0.1}], "scene.ports.count": 4},
    "annulus": {"scene.ports.form": "annulus"},
    "crescent": {"scene.ports.form": "crescent"},
    "placed": VARIANTS["placed"],
    "no image": NO_IMAGE,
}


@pytest.mark.parametrize("name", [*TUBES, *DEMOS])
def test_section_parts_lie_free_in_the_lumen(made, name):
    scope = made(**TUBES[name]) if name in TUBES else presets.load(name)
    view, told = views.section_view(scope), size(scope).fit
    assert (view.lumen_mm, view.outer_diameter_mm) == (told.lumen_mm, told.outer_diameter_mm)
    assert view.fits
    nested = ("cores", "opening", *(("image",) if name in ("annulus", "crescent", "turbine_casing") else ()))
    parts = [part for part in view.parts if part.kind not in nested]
    for at, part in enumerate(parts):
        assert np.hypot(part.x_mm, part.y_mm) + part.diameter_mm / 2 + view.clearance_mm <= view.lumen_mm / 2 + 1e-9
        for other in parts[:at]:
            apart = (
                np.hypot(part.x_mm - other.x_mm, part.y_mm - other.y_mm) - (part.diameter_mm + other.diameter_mm) / 2
            )
            assert apart >= (0.0 if name == "placed" else view.clearance_mm) - 1e-9, (part, other)
    light_mm2 = sum(np.pi / 4 * part.diameter_mm**2 for part in parts)
    if name != "placed":  # a placed port takes the whole circle around the objective
        assert view.free_area_mm2 == pytest.approx(np.pi / 4 * view.lumen_mm**2 - light_mm2, rel=1e-9)


@pytest.mark.parametrize("form", ["annulus", "crescent"])
def test_image_lies_inside_its_ring_where_the_light_is_reckoned_from(made, form):
    scope = made(**{"scene.ports.form": form})
    view = views.section_view(scope)
    ring, image = (next(part for part in view.parts if part.kind == kind) for kind in ("light", "image"))
    away = np.hypot(ring.x_mm - image.x_mm, ring.y_mm - image.y_mm)
    assert away + image.diameter_mm / 2 <= ring.diameter_mm / 2 + 1e-9
    assert away == pytest.approx(0.0 if form == "annulus" else (ring.diameter_mm - image.diameter_mm) / 2, abs=1e-9)
    assert np.pi / 4 * (ring.diameter_mm**2 - image.diameter_mm**2) == pytest.approx(np.pi / 4 * 2.0**2, rel=1e-9)


def test_wires_stand_on_the_wall_of_a_wide_tube(made):
    view = views.section_view(made(**TUBES["wide tube"]))
    wires = [part for part in view.parts if part.kind == "wire"]
    assert len(wires) == 4
    for wire in wires:
        assert np.hypot(wire.x_mm, wire.y_mm) + wire.diameter_mm / 2 + view.clearance_mm == pytest.approx(
            view.lumen_mm / 2
        )


def test_a_tube_that_is_too_narrow_says_so(made):
    view = views.section_view(made(**{"body.section.outer_diameter_mm": 3.2}))
    assert not view.fits
    assert view.needed_lumen_mm > view.lumen_mm == pytest.approx(2.3)


# The passage


def gaps(points, wall_x, wall_y):
    """Distance of each point from a polyline."""
    start, step = np.stack([wall_x[:-1], wall_y[:-1]], axis=1), np.stack([np.diff(wall_x), np.diff(wall_y)], axis=1)
    start, step = start[np.hypot(*step.T) > 1e-9], step[np.hypot(*step.T) > 1e-9]
    share = np.clip(((points[:, None] - start) * step).sum(-1) / (step**2).sum(-1), 0, 1)
    return np.hypot(*(points[:, None] - start - share[..., None] * step).transpose(2, 0, 1)).min(axis=1)


@pytest.mark.parametrize(
    "settings",
    [
        {},
        {"body.passage.edge_radius_mm": 0.4},
        {"body.passage.bend_deg": 40.0},
        {"body.passage.centerline_radius_mm": 4.0},
        {"body.passage.bend_deg": 150.0},
    ],
)
def test_longest_tip_touches_both_walls_and_crosses_none(made, settings):
    view = views.passage_view(made(**settings))
    tip = np.stack([view.longest_x_mm, view.longest_y_mm], axis=1)
    assert gaps(tip, view.outer_x_mm, view.outer_y_mm).min() == pytest.approx(0.0, abs=0.01)
    side = np.stack([np.linspace(a, b, 201) for a, b in itertools.pairwise(tip)]).reshape(-1, 2)
    to_inner, to_outer = gaps(side, view.inner_x_mm, view.inner_y_mm), gaps(side, view.outer_x_mm, view.outer_y_mm)
    assert to_inner.min() == pytest.approx(0.0, abs=0.01)
    assert to_inner + to_outer == pytest.approx(view.bore_mm, abs=0.02)  # more would be past a wall


def test_walls_are_a_bore_apart_and_the_tip_has_its_size(made):
    view = views.passage_view(made(**{"body.passage.edge_radius_mm": 0.3}))
    wall = np.stack([view.inner_x_mm, view.inner_y_mm], axis=1)[2:-2]
    assert gaps(wall, view.outer_x_mm, view.outer_y_mm) == pytest.approx(8.0, abs=0.01)
    tip = np.stack([view.tip_x_mm, view.tip_y_mm], axis=1)
    area = 0.5 * abs(np.sum(tip[:-1, 0] * tip[1:, 1] - tip[1:, 0] * tip[:-1, 1]))
    assert area == pytest.approx(12.0 * view.tip_diameter_mm - (4 - np.pi) * 0.3**2, rel=1e-3)


def test_straight_bore_and_a_tube_wider_than_it(made):
    straight = views.passage_view(made(**{"body.passage.centerline_radius_mm": None, "body.passage.bend_deg": None}))
    assert straight.longest_rigid_tip_mm is None
    assert straight.longest_x_mm.size == 0
    assert np.ptp(straight.inner_y_mm) < 1e-9
    wide = views.passage_view(made(**{"body.section.outer_diameter_mm": 9.0}))
    assert not wide.passes
    assert wide.tip_diameter_mm > wide.bore_mm


# Spectra


def test_spectra_hold_the_watts_of_the_report(made):
    scope = made()
    view, light = views.spectra(scope), size(scope).light
    assert integral(view.delivered_w_nm) == pytest.approx(light.delivered_w, rel=1e-9)
    assert (view.delivered_w_nm <= view.lamp_w_nm * (1 + 1e-12)).all()
    assert (view.seen_w_nm <= view.delivered_w_nm).all()
    assert view.seen_w_nm.max() > 0


def test_what_the_camera_takes_fills_half_its_well(made):
    """Photons of the whole picture, shared by cores and their pixels, over the exposure: half the full well."""
    scope = made()
    view, exposure = views.spectra(scope), size(scope).detail.exposure_s
    bundle, camera = scope.image.bundle, scope.viewer.camera
    cores = np.pi / (2 * np.sqrt(3)) * (1000 * bundle.diameter_mm / bundle.pitch_um) ** 2
    pixels = np.pi / 4 * bundle.core_um**2 / (camera.pixel_um / camera.relay_magnification) ** 2
    photons = integral(view.seen_w_nm * photons_per_j(wavelength_nm=view.wavelength_nm)) * exposure
    assert exposure < camera.longest_exposure_s
    assert photons / cores / pixels * camera.quantum_efficiency == pytest.approx(camera.full_well_e / 2, rel=1e-6)


@pytest.mark.parametrize(
    "settings",
    [
        {"viewer.form": "eye"},
        {"image.form": "chip", "image.chip": {"preset": "color_1um75"}, "viewer": None},
        {"scene.target.medium": "water"},
    ],
)
def test_spectra_of_other_viewers(made, settings):
    view = views.spectra(made(**settings))
    assert np.isfinite(view.seen_w_nm).all()
    assert view.seen_w_nm.max() > 0
