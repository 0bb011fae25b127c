"""The ray check: its own elements against closed forms, its noise, its independence, and that it catches what is wrong."""

import ast
import dataclasses
import json
from pathlib import Path

import numpy as np
import pytest

from optics import presets
from optics.__main__ import main
from optics.commands import check_rays
from optics.commands.check_lines import Line, step_lines
from optics.commands.check_rays import against_rays
from optics.fiberscope import Cover, Target
from optics.report.size import size
from optics.spec import OutOfRange
from optics.study.rays import Flock, evenly, lamp_flux, passed, redrawn
from optics.study.rays_count import BATCHES, Tally, trace_rays
from optics.study.rays_guide import along_wall, tapered
from optics.study.rays_target import PARTS, Place, landing, out_of_guide, part_areas_mm2
from optics.tables import preset_names

STUDY = Path(__file__).resolve().parents[2] / "optics/study"
BARE = {"scene": None, "image": None, "viewer": None, "body": None, "needs": None, "guide.bundle.bends": []}
BAND = (350.0, 1100.0)


def scope(document, **changes):
    return presets.resolve(presets.edited(document, changes)).fiberscope


def traced(fiberscope, rays=20_000, seed=1, **more):
    return trace_rays(fiberscope, place=None, rays=rays, seed=seed, in_lumens=True, band_nm=BAND, **more)


def flock(count, *, na=0.5, x_mm=0.0, y_mm=0.0, seed=1, random=None):
    """Rays of uniform radiance up to na, one batch after the other; the weights sum to 1."""
    random = random or np.random.default_rng(seed)
    batch = np.arange(count) * BATCHES // count
    each = np.zeros(count)
    na = na * np.sqrt(evenly(batch, random))
    return Flock(batch, each + 1 / count, each + 555.0, na, 2 * np.pi * evenly(batch, random), each + x_mm, each + y_mm)


# Independence


def test_the_rays_share_no_formula_with_the_chain():
    """Every file of the check, function-level imports counted: specs, tables, indices, the bend's trace, and each other."""
    files = sorted(STUDY.glob("rays*.py"))
    assert len(files) >= 4
    allowed = {"optics.units", "optics.spec", "optics.tables", "optics.media.index", "optics.guide.raytrace"}
    allowed |= {"optics.fiberscope", *(f"optics.study.{path.stem}" for path in files)}
    for path in files:
        for node in ast.walk(ast.parse(path.read_text())):
            names = [alias.name for alias in node.names] if isinstance(node, ast.Import) else []
            names += [node.module] if isinstance(node, ast.ImportFrom) else []
            for name in names:
                assert not name.startswith("optics") or name in allowed, f"{path.name} imports {name}"


def test_from_the_specs_only_tables_of_the_design_are_taken():
    """`fiberscope` hands on what it imports; a formula must not come in by that door."""
    from pydantic import BaseModel

    from optics import fiberscope

    for path in STUDY.glob("rays*.py"):
        for node in ast.walk(ast.parse(path.read_text())):
            if isinstance(node, ast.ImportFrom) and node.module == "optics.fiberscope":
                for alias in node.names:
                    found = getattr(fiberscope, alias.name)
                    assert isinstance(found, type), f"{path.name} takes {alias.name}"
                    assert issubclass(found, BaseModel), f"{path.name} takes {alias.name}"


# Elements against closed forms


def test_evenly_fills_every_part_of_each_batch_once():
    batch = np.repeat([0, 1, 5], [7, 1, 30])
    found = evenly(batch, np.random.default_rng(3))
    for one, count in ((0, 7), (1, 1), (5, 30)):
        assert np.floor(np.sort(found[batch == one]) * count).tolist() == list(range(count))


@pytest.mark.parametrize("count", [50, 1000, 30_000])
def test_redrawn_rays_keep_the_light_of_each_batch_and_its_mean_angle(count):
    start = flock(4000)
    start = start.times(0.2 + start.na)
    after = redrawn(start, count, np.random.default_rng(2))
    assert abs(len(after) - count) <= BATCHES
    before_sum, after_sum = (np.bincount(some.batch, some.weight, BATCHES) for some in (start, after))
    np.testing.assert_allclose(after_sum, before_sum, rtol=1e-12)
    assert after.weight @ after.na == pytest.approx(start.weight @ start.na, rel=0.4 / np.sqrt(count))


def test_fresnel_at_the_angles_that_are_known():
    """Normal incidence 4 n/(n+1)^2; at Brewster's angle only r_s = cos(2 theta); nothing beyond the critical angle."""
    n = 1.62
    assert passed(na=np.array([0.0]), from_index=1.0, to_index=n)[0] == pytest.approx(4 * n / (1 + n) ** 2, rel=1e-12)
    brewster = np.arctan(n)
    found = passed(na=np.sin(brewster)[None], from_index=1.0, to_index=n)[0]
    assert found == pytest.approx(1 - np.cos(2 * brewster) ** 2 / 2, rel=1e-12)
    assert passed(na=np.array([0.999999, 1.2]), from_index=n, to_index=1.0)[1] == 0
    back, forth = (passed(na=np.array([0.5]), from_index=a, to_index=b)[0] for a, b in ((1.0, n), (n, 1.0)))
    assert back == pytest.approx(forth, rel=1e-12)


def test_two_faces_of_a_filled_cone_as_tabulated():
    """n 1.492 and NA 0.50: 0.9227; 1.62 and 0.57: 0.8893; 1.80 and 0.86: 0.8239 (independent calculation: mean squared)."""
    for n, na, printed in ((1.492, 0.50, 0.9227), (1.62, 0.57, 0.8893), (1.80, 0.86, 0.8239)):
        rays = flock(20_000, na=na)
        one = rays.times(passed(na=rays.na, from_index=1.0, to_index=n)).weight.sum()
        assert one**2 == pytest.approx(printed, abs=6e-5)


def test_the_lamps_lumens_and_watts_belong_together(document):
    """CIE LED-B3 and 400 lm: the watts of the lamp by fine steps against those that size finds on its own grid."""
    design = scope(document)
    lumens, ends, upto = lamp_flux(design.source.lamp, in_lumens=True, band_nm=BAND)
    watts, *_ = lamp_flux(design.source.lamp, in_lumens=False, band_nm=BAND)
    assert lumens == pytest.approx(design.source.lamp.flux_lm, rel=1e-12)
    assert (upto[0], upto[-1], len(ends)) == (0.0, 1.0, len(upto))
    report = size(design)
    w_before = report.light.delivered_w / report.light.transmission  # roughly: the guide colors the light a little
    assert watts == pytest.approx(w_before, rel=0.05)


def steps_of(trace):
    return {step.name: step for step in trace.steps}


def near(counted, value, slack=0.0):
    assert abs(counted.value - value) <= 4 * counted.standard_error + slack * abs(value), (counted, value)


def test_spots_and_condensers_by_hand(document):
    """Closed forms: (D/d)^2, 1 - exp(-2 D^2/d^2), NA^2 ratios, and etendue of a matched condenser."""
    spot = {"source.launch.spot_mm": 4.0, "source.launch.cone_na": 0.8, "source.launch.transmission": 0.8}
    hat = steps_of(traced(scope(document, **BARE, **spot)))
    near(hat["condenser"].factor, 0.8, 1e-9)
    near(hat["cone"].factor, (0.57 / 0.8) ** 2, 1e-4)
    near(hat["spot"].factor, (2.0 / 4.0) ** 2, 1e-4)
    bell = steps_of(traced(scope(document, **BARE, **spot, **{"source.launch.profile": "gaussian"})))
    near(bell["spot"].factor, 1 - np.exp(-2 * 0.25), 1e-4)
    matched = {"source.launch.form": "matched", "source.launch.transmission": 0.9, "source.lamp.emitter_mm": 3.0}
    near(steps_of(traced(scope(document, **BARE, **matched)))["condenser"].factor, 0.9 * (2.0 * 0.57 / 3.0) ** 2, 1e-3)


def test_a_butt_coupled_emitter_by_the_overlap_of_two_discs(document):
    """All rays of one angle move the emitter's disc by gap tan(theta); averaged over sin^2 by a rule of this test."""
    gap, na, emitter, face = 0.8, 0.57, 1.4, 2.0
    sine2 = (np.arange(2000) + 0.5) / 2000 * na**2
    d = gap * np.sqrt(sine2 / (1 - sine2))
    a, b = emitter / 2, face / 2
    cut = np.maximum(d, b - a + 1e-12)
    one, two = ((cut**2 + r * r - s * s) / (2 * cut * r) for r, s in ((a, b), (b, a)))
    lens = sum(r * r * (np.arccos(c) - c * np.sqrt(1 - c * c)) for r, c in ((a, one), (b, two)))
    share = np.where(d <= b - a, 1.0, lens / (np.pi * a * a)).mean()
    launch = {"source.launch.form": "butt", "source.launch.gap_mm": gap, "source.lamp.emitter_mm": emitter}
    found = steps_of(traced(scope(document, **BARE, **launch), rays=40_000))
    near(found["cone"].factor, na**2, 1e-4)
    near(found["spot"].factor, share, 1e-4)


def test_two_meters_of_fiber_by_hand(document):
    """0.5 dB/m, 2 m, NA 0.57 in 1.62, filled: 0.7883 (independent calculation), core share 0.81."""
    flat = {"wavelength_nm": [350.0, 1100.0], "value": [0.5, 0.5]}
    changes = {"source.launch.form": "matched", "guide.bundle.length_m": 2.0, "guide.fiber.attenuation": flat}
    wide = {"guide.fiber.core_um": 45.0, "source.lamp.emitter_mm": 3.0}
    found = steps_of(traced(scope(document, **BARE, **changes, **wide)))
    assert found["attenuation"].factor.value == pytest.approx(0.7883, abs=1e-4)
    near(found["core share"].factor, 0.81, 1e-4)


def test_light_outside_the_data_of_a_fiber_is_left_out(document):
    short = {"wavelength_nm": [350.0, 555.0], "value": [0.0, 0.0]}
    found = steps_of(traced(scope(document, **BARE, **{"guide.fiber.attenuation": short})))
    assert 0.3 < found["attenuation"].factor.value < 0.6


def test_reflections_at_the_wall_number_four_over_pi_times_the_diameter_law(document):
    """Mean number (4/pi) L <tan>/d, skew rays included (closed form): small losses add up to it."""
    fiber = scope(document).guide.fiber
    bundle = scope(document, **{"guide.bundle.bounce_loss_fraction": 1e-9}).guide.bundle
    random, radius = np.random.default_rng(5), fiber.core_um / 2000
    rays = flock(60_000, na=fiber.na, random=random)
    away, turn = radius * np.sqrt(random.random(len(rays))), 2 * np.pi * random.random(len(rays))
    rays = rays.at(away * np.cos(turn), away * np.sin(turn))
    share = (fiber.na / fiber.core_index) ** 2
    tangent = (np.arcsin(np.sqrt(share)) - np.sqrt(share * (1 - share))) / share
    lost = 1 - along_wall(rays, fiber, bundle).weight.sum()
    assert lost / 1e-9 == pytest.approx(4 / np.pi * 1800.0 * tangent / (fiber.core_um / 1000), rel=5e-3)


def test_a_taper_keeps_diameter_times_sine():
    assert tapered(flock(100, na=0.2), 3.0, 1.0).na.max() == pytest.approx(3 * flock(100, na=0.2).na.max())


def test_a_ground_face_turns_the_light_as_snell_says():
    """asin(n sin d) - d of the axial ray (closed form), toward +x; beyond the critical angle nothing."""
    axial = flock(100, na=1e-9)
    leave = {"core_index": 1.492, "cover": None, "medium_index": 1.0, "random": np.random.default_rng(1)}
    out = out_of_guide(axial, **leave, tilt_deg=10.0, note=lambda *_: None)
    turned = np.arcsin(1.492 * np.sin(np.radians(10.0))) - np.radians(10.0)
    np.testing.assert_allclose(np.arcsin(out.na) * np.cos(out.azimuth_rad), turned, rtol=1e-6)
    assert np.degrees(turned) == pytest.approx(5.02, abs=0.005)
    assert len(out_of_guide(axial, **leave, tilt_deg=43.0, note=lambda *_: None)) == 0


# Flights to the target against integrals of another hand


def on_target(place, target, *, na=0.5, rays=160_000, cover=None, medium_index=1.0):
    """Counted irradiance of 1 W in a filled cone, per part and over the whole field (W/m2), and the standard errors."""
    random = np.random.default_rng(4)
    start = flock(rays, na=na, random=random)
    row, part = landing(start, place, target, cover, medium_index, random)
    areas, tally = part_areas_mm2(place, target) * 1e-6, Tally(BATCHES)
    tally.sent = np.bincount(start.batch, minlength=BATCHES).astype(float)
    light = [np.bincount(start.batch[row[part == k]], start.weight[row[part == k]], BATCHES) for k in range(PARTS)]
    parts = [(tally.counted(some, 0.0), area) for some, area in zip(light, areas)]
    whole = tally.counted(np.sum(light, axis=0), 0.0)
    return [(c.value / a, c.standard_error / a) for c, a in parts], (
        whole.value / areas.sum(),
        whole.standard_error / areas.sum(),
    )


def place(discs, radius=5.0, depth=0.0, tilts=None, start=0.0, end=0.0):
    x, y, r = (np.array(part, float) for part in zip(*discs))
    tilt, azimuth = (np.array(part, float) for part in zip(*(tilts or [(0.0, 0.0)] * len(x))))
    return Place(x, y, r, tilt, azimuth, radius, depth, start, end)


def plane(distance, tilt=0.0, **more):
    reflectance = {"wavelength_nm": [380.0, 780.0], "value": [0.5, 0.5]}
    return Target.model_validate({"distance_mm": distance, "tilt_deg": tilt, "reflectance": reflectance, **more})


FIELDS = [
    # discs (x, y, r), NA, distance, half field deg, mean W/m2: independent integration, three digits and more
    ([(0.0, 0.0, 0.5)], 0.5, 20.0, 25.0, 2613.476),
    ([(0.0, 0.0, 0.5)], 0.5, 20.0, 35.0, 1623.067),
    ([(2.0, 0.0, 0.5), (-2.0, 0.0, 0.5)], 0.5, 3.0, 30.0, 32126.38),
    ([(2 * np.cos(k), 2 * np.sin(k), 0.25) for k in np.arange(6) * np.pi / 3], 0.5, 5.0, 35.0, 19748.79),
    ([(2.0, 0.0, 0.5), (-2.0, 0.0, 0.5)], 0.375009, 5.0, 30.0, 26977.44),
]


@pytest.mark.parametrize(("discs", "na", "distance", "half", "mean"), FIELDS)
def test_fields_of_facing_planes_as_integrated(discs, na, distance, half, mean):
    _, (found, error) = on_target(place(discs, distance * np.tan(np.radians(half))), plane(distance), na=na)
    assert error < 0.01 * mean
    assert abs(found - mean) < 4 * error + 1e-4 * mean


POINTS = [
    # a small field around the axis takes the value of the point: ports, NA, target, W/m2 (independent integration)
    ([(0.0, 0.0, 0.5)], 0.5, plane(20.0, 20.0), 2989.2662),
    ([(0.0, 0.0, 2.0), (0.0, 0.0, -1.0)], 0.5, plane(10.0), 12121.473),
    ([(2.0, 0.0, 0.5), (-2.0, 0.0, 0.5)], 0.5, plane(5.0), 37657.957),
]


@pytest.mark.parametrize(("discs", "na", "target", "value"), POINTS)
def test_points_on_the_axis_as_integrated(discs, na, target, value):
    small = 0.06 * target.distance_mm
    _, (found, error) = on_target(place(discs, small), target, na=na, rays=120_000)
    assert abs(found - value) < 4 * error + 0.015 * value  # the field is not quite a point
    assert error < 0.04 * value


def test_two_ports_leave_the_axis_exactly_dark_close_up():
    _, (found, _) = on_target(place([(2.0, 0.0, 0.5), (-2.0, 0.0, 0.5)], 0.2), plane(2.0))
    assert found == 0


def test_bore_walls_by_the_share_that_lands():
    """On the axis of a bore a ray of angle theta lands at B/(2 tan theta): shares of sin^2 between two depths."""
    bore = plane(10.0, form="bore", bore_mm=10.0)
    parts, _ = on_target(place([(0.0, 0.0, 1e-6)], start=9.0, end=29.0), bore, na=0.5)
    edges = 9.0 + 5.0 * np.arange(PARTS + 1)
    sine2 = np.minimum(1 / (1 + (edges / 5.0) ** 2), 0.25)
    for (found, error), share in zip(parts, -np.diff(sine2) / 0.25):
        wanted = share / (np.pi * 10.0 * 5.0 * 1e-6)
        assert abs(found - wanted) < 4 * error + 1e-4 * wanted


def test_a_tilted_port_shines_where_it_points():
    """Port and target turned alike about the origin see each other as before: 20 degrees, in the small."""
    facing, _ = on_target(place([(0.0, 0.0, 0.2)], 1.0), plane(20.0), na=0.1, rays=40_000)
    turned, _ = on_target(place([(0.0, 0.0, 0.2)], 9.0, tilts=[(20.0, 0.0)]), plane(20.0), na=0.1, rays=40_000)
    assert turned[0][0] < 0.2 * facing[0][0]
    assert sum(value for value, _ in turned[2:]) > 0


def test_a_cover_moves_the_light_outward():
    """A point behind t of glass: a ray lands t tan(theta') + w tan(theta) off the axis (Snell)."""
    cover = Cover(index=1.5, thickness_mm=4.0)
    reach = 4.0 * np.tan(np.arcsin(0.4 / 1.5)) + 20.0 * np.tan(np.arcsin(0.4))
    point = place([(0.0, 0.0, 1e-6)], reach * 1.0001)
    inside, _ = landing(flock(5000, na=0.4), point, plane(20.0), cover, 1.0, np.random.default_rng(1))
    assert len(inside) == 5000
    smaller = place([(0.0, 0.0, 1e-6)], reach * 0.99)
    assert len(landing(flock(5000, na=0.4), smaller, plane(20.0), cover, 1.0, np.random.default_rng(1))[0]) < 4995


def test_areas_of_a_tilted_field_by_summing_small_pieces():
    target, field = plane(20.0, 35.0), place([(0.0, 0.0, 0.5)], 6.0, depth=2.0)
    share, turn = (np.arange(800)[:, None] + 0.5) / 800, 2 * np.pi * (np.arange(400) + 0.5) / 400
    x, lean = share * 6.0 * np.cos(turn), np.radians(35.0)
    stretch = 22.0 / (22.0 - x * np.tan(lean))
    piece = stretch**3 * share * 36.0 / 800 * 2 * np.pi / 400 / np.cos(lean)
    np.testing.assert_allclose(part_areas_mm2(field, target), piece.reshape(PARTS, -1).sum(axis=1), rtol=1e-5)


# The whole way: demo designs, random designs


@pytest.mark.parametrize("name", preset_names("fiberscopes"))
def test_demo_designs_agree(name):
    found = against_rays(presets.load(name), rays=5_000, seed=1)
    assert [line.as_dict() for line in found.wrong] == []
    assert len(found.target) == 1 + PARTS


@pytest.mark.slow
@pytest.mark.parametrize("name", preset_names("fiberscopes"))
@pytest.mark.parametrize("seed", [1, 2])
def test_demo_designs_agree_with_many_rays(name, seed):
    found = against_rays(presets.load(name), rays=200_000, seed=seed)
    assert [line.as_dict() for line in found.wrong] == []
    steps = {line.name: line for line in found.steps}
    assert all(line.standard_error <= 0.0025 * line.size for line in steps.values())
    assert found.target[0].standard_error <= 0.005 * found.target[0].size


def test_random_designs_agree(random_designs):
    for seed, design in enumerate(random_designs(3)):
        assert [line.as_dict() for line in against_rays(design, rays=3_000, seed=seed).wrong] == []


@pytest.mark.slow
def test_fifty_random_designs_agree(random_designs):
    wrong = {}
    for seed, design in enumerate(random_designs(50)):
        found = against_rays(design, rays=60_000, seed=seed).wrong
        wrong |= {seed: [line.as_dict() for line in found]} if found else {}
    assert wrong == {}


FORMS = [
    {"source.launch.form": "butt", "source.launch.gap_mm": 1.0, "source.filter": {"preset": "hot_mirror"}},
    {"source.launch.form": "rated", "source.launch.rated_lm": 30.0, "guide.bundle.entry_mm": 3.0},
    {"source.launch.form": "matched", "guide.bundle.exit_mm": 2.6, "guide.bundle.bounce_loss_fraction": 1e-5},
    {"scene.target.tilt_deg": 40.0, "scene.ports.tilt_deg": 10.0, "scene.target.medium": "oil"},
    {"scene.ports.form": "crescent", "image": None, "viewer": None},
    {"scene.target": {"preset": "sooted_metal", "form": "bore", "bore_mm": 14.0, "distance_mm": 12.0, "near_mm": 5.0}},
]


@pytest.mark.parametrize("changes", FORMS)
def test_every_form_agrees(document, changes):
    found = against_rays(scope(document, **{"guide.bundle.bends": [], **changes}), rays=20_000, seed=3)
    assert [line.as_dict() for line in found.wrong] == []
    assert found.target


def test_a_bare_light_guide_has_steps_and_no_target(document):
    found = against_rays(scope(document, **BARE), rays=4_000, seed=1)
    assert found.steps[-1].name == "exit face"
    assert (found.target, found.power, found.wrong) == ((), (), [])


def test_a_lamp_outside_the_visible_is_compared_in_watts(document):
    lamp = {"source.lamp": {"preset": "uva_led_365nm"}, "source.launch.form": "butt", "guide.fiber.preset": "silica_uv"}
    found = against_rays(scope(document, **{**BARE, **lamp}), rays=20_000, seed=1)
    assert [line.as_dict() for line in found.wrong] == []
    assert found.power[0].size > 1e-3
    assert found.power[0].rays == pytest.approx(found.power[0].size, rel=0.01)


def test_no_light_at_all_agrees_with_none(document):
    dark = {"guide.fiber.attenuation": {"wavelength_nm": [900.0, 1100.0], "value": [0.1, 0.1]}}
    found = against_rays(scope(document, **dark), rays=500, seed=1)
    assert found.wrong == []
    assert found.steps[-1].rays == 0
    assert found.target[0].rays == 0


# What is wrong is caught


@pytest.fixture(scope="module")
def traces():
    """A trace of each demo design, without its target."""
    return {
        name: (size(presets.load(name)).light.steps, traced(presets.load(name), rays=12_000))
        for name in preset_names("fiberscopes")
    }


@pytest.mark.parametrize("name", preset_names("fiberscopes"))
@pytest.mark.parametrize("factor", [1.05, 1 / 1.05])
def test_a_wrong_factor_in_any_step_is_caught(traces, name, factor):
    """Once in what one step leaves, and once carried on through all that follow."""
    steps, trace = traces[name]
    bends = sum(bend.repeats for bend in presets.load(name).guide.bundle.bends)
    assert all(line.agrees for line in step_lines(steps, trace, bends))
    for wrong in range(len(steps)):
        alone = [
            dataclasses.replace(s, after_lm=s.after_lm * (factor if k == wrong else 1)) for k, s in enumerate(steps)
        ]
        onward = [
            dataclasses.replace(s, after_lm=s.after_lm * (factor if k >= wrong else 1)) for k, s in enumerate(steps)
        ]
        for tampered in (alone, onward):
            line = step_lines(tampered, trace, bends)[wrong]
            assert not line.agrees, line
            assert line.verdict.startswith("DIFFERS")


def test_a_wrong_illuminance_is_caught(document, monkeypatch):
    design = scope(document, **{"guide.bundle.bends": []})
    honest = size(design)

    def brighter(fiberscope):
        return dataclasses.replace(
            honest, target=dataclasses.replace(honest.target, mean_lux=1.05 * honest.target.mean_lux)
        )

    monkeypatch.setattr(check_rays, "size", brighter)
    assert "mean over the field" in [line.name for line in against_rays(design, rays=20_000, seed=1).wrong]


def test_a_step_that_the_rays_do_not_have_is_refused(traces):
    steps, trace = traces["gearbox_tooth"]
    with pytest.raises(OutOfRange, match="the rays went through lamp"):
        step_lines(steps[:-1], trace, 2)


def test_agreement_is_the_rule_and_nothing_wider():
    def line(rays, error=0.0, bends=0, scale=0.0):
        return Line("joint", "lm", 100.0, rays, error, bends, scale=scale)

    assert line(100.99).agrees
    assert not line(101.01).agrees
    assert line(103.9, error=1.0).agrees
    assert not line(104.1, error=1.0).agrees
    assert line(103.9, bends=2).agrees
    assert not line(104.1, bends=2).agrees
    assert line(104.9, scale=500.0).agrees
    assert not line(105.1, scale=500.0).agrees


@pytest.mark.slow
def test_standard_errors_are_honest(document):
    """Over 24 seeds the scatter of each number is the standard error that it states, and there is no bias."""
    design = scope(document, **{"guide.bundle.bends": [], "source.launch.form": "butt", "source.launch.gap_mm": 1.0})
    pulls = []
    for seed in range(24):
        found = against_rays(design, rays=10_000, seed=seed)
        pulls.append([(a.rays - a.size) / a.standard_error for a in (*found.steps, *found.target) if a.standard_error])
    pulls = np.array(pulls)
    assert np.all(np.abs(pulls.mean(axis=0)) < 4 / np.sqrt(24))
    assert np.all((pulls.std(axis=0) > 0.5) & (pulls.std(axis=0) < 1.7))


def test_more_rays_less_noise(document):
    few, many = (traced(scope(document, **BARE), rays=rays).steps[3].after.standard_error for rays in (1_000, 64_000))
    assert many < few / 4


# The command line


def run(capsys, *arguments):
    try:
        status = main(["check", *arguments])
    except SystemExit as stop:
        status = stop.code
    out = capsys.readouterr()
    return status, out.out, out.err


SMALL = ("--rays", "2000", "--seed", "3", "--set", "guide.bundle.bends=[]")


def test_json_has_the_steps_of_size(capsys, document):
    status, out, err = run(capsys, "gearbox_tooth", *SMALL, "--json")
    assert (status, err) == (0, "")
    answer = json.loads(out)
    keys = {"name", "size_lm", "rays_lm", "standard_error_lm"}
    assert all(keys <= set(step) for step in answer["steps"])
    ours = size(scope(document, **{"guide.bundle.bends": []})).light.steps
    assert [(step["name"], step["size_lm"]) for step in answer["steps"]] == [
        (step.name, step.after_lm) for step in ours
    ]
    assert all({"name", "size_lux", "rays_lux", "standard_error_lux"} <= set(line) for line in answer["target"])
    assert (answer["rays"], answer["seed"], answer["agrees"]) == (2000, 3, True)
    assert run(capsys, "gearbox_tooth", *SMALL, "--json")[1] == out
    assert run(capsys, "gearbox_tooth", *SMALL, "--seed", "4", "--json")[1] != out


def test_the_table_reads_well(capsys):
    status, out, _ = run(capsys, "gearbox_tooth", *SMALL)
    assert status == 0
    for words in (
        "2,000 rays, seed 3",
        "size, lm",
        "+- std error",
        "exit face",
        "mean over the field",
        "Every number agrees",
    ):
        assert words in out
    assert max(map(len, out.splitlines())) <= 110


def test_disagreement_is_status_1_and_one_sentence(capsys, monkeypatch):
    def dimmer(fiberscope):
        honest = size(fiberscope)
        steps = [
            dataclasses.replace(s, after_lm=s.after_lm / 1.05) if s.name == "packing" else s for s in honest.light.steps
        ]
        return dataclasses.replace(honest, light=dataclasses.replace(honest.light, steps=tuple(steps)))

    monkeypatch.setattr(check_rays, "size", dimmer)
    status, out, err = run(capsys, "gearbox_tooth", *SMALL)
    assert status == 1
    assert "DIFFERS, this step alone by +5.00%" in out
    assert err.startswith("packing: this step passes 0.78")
    assert err.count("\n") == 1
    status, out, err = run(capsys, "gearbox_tooth", *SMALL, "--json")
    assert (status, json.loads(out)["agrees"], err.count("\n")) == (1, False, 1)


BAD = [
    (("gearbox_tooth", "--rays", "0"), "--rays is 0; it must be a whole number from 100"),
    (("gearbox_tooth", "--rays", "-5"), "--rays is -5"),
    (("gearbox_tooth", "--rays", "many"), "--rays is many; it must be a whole number"),
    (("gearbox_tooth", "--rays", "1e5"), "--rays is 1e5; it must be a whole number"),
    (("gearbox_tooth", "--rays", "1" + "0" * 400), "it must be a whole number from 100"),
    (("gearbox_tooth", "--seed", "-1"), "--seed is -1; it must be a whole number from 0"),
    (("gearbox_tooth", "--seed", "x"), "--seed is x; it must be a whole number"),
    (("gearbox_teeth", "--rays", "1000"), "nearest: gearbox_tooth"),
    (("gearbox_tooth", "--set", "guide.bundle.length_m=-2"), "guide.bundle.length_m is -2"),
    (("--rays", "1000"), "--rays is given without a design"),
    (("--seed", "1"), "--seed is given without a design"),
]


@pytest.mark.parametrize(("arguments", "said"), BAD)
def test_bad_input_is_one_sentence_and_status_1(capsys, arguments, said):
    status, out, err = run(capsys, *arguments)
    assert (status, out) == (1, "")
    assert said in err
    assert err.count("\n") == 1


def test_numbers_of_rays_and_seeds_are_checked_in_the_function_too(document):
    with pytest.raises(OutOfRange, match="rays is 0"):
        traced(scope(document), rays=0)
    with pytest.raises(OutOfRange, match="seed is -1"):
        traced(scope(document), rays=1000, seed=-1)
