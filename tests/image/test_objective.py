import numpy as np
import pytest

from optics.image import objective as lens
from optics.image.objective import Objective
from optics.spec import OutOfRange

RNG = np.random.default_rng(7)


def test_the_lens_formula_holds_and_magnification_is_the_ratio_of_distances():
    f, s = RNG.uniform(0.3, 5.0, 50), RNG.uniform(6.0, 300.0, 50)
    v = lens.image_distance_mm(focal_mm=f, focus_mm=s)
    assert np.allclose(1 / v + 1 / s, 1 / f, rtol=1e-13)
    assert np.allclose(lens.magnification(focal_mm=f, focus_mm=s), v / s, rtol=1e-13)


def test_blur_at_the_ends_of_the_depth_of_field_is_the_blur_allowed():
    f, n, c, s = (RNG.uniform(low, high, 200) for low, high in ((0.3, 3.0), (2.0, 11.0), (3.0, 25.0), (4.0, 80.0)))
    depth = lens.depth_of_field_mm(focal_mm=f, f_number=n, blur_um=c, focus_mm=s)
    for end in (depth.near_mm, depth.far_mm):
        finite = np.isfinite(end)
        blur = lens.defocus_blur_um(focal_mm=f, f_number=n, focus_mm=s, distance_mm=np.where(finite, end, 1.0))
        assert np.allclose(blur[finite], c[finite], rtol=1e-9)
    assert 20 < np.isfinite(depth.far_mm).sum() < 200
    assert (depth.near_mm < s).all()
    assert (depth.far_mm > s).all()


def test_far_end_is_infinite_from_the_hyperfocal_distance_on():
    hyperfocal = 1.0 / (4.0 * 0.01) + 1.0
    depth = lens.depth_of_field_mm(
        focal_mm=1.0, f_number=4.0, blur_um=10.0, focus_mm=np.array([hyperfocal - 1e-6, hyperfocal, 2 * hyperfocal])
    )
    assert np.isfinite(depth.far_mm).tolist() == [True, False, False]
    assert depth.near_mm[1] == pytest.approx(hyperfocal / 2, rel=1e-12)


def test_traced_blur_agrees():
    """Independent route: two rays through the edges of a pupil at the lens, cut by the focused image plane."""
    f, n, s, w = 1.3, 3.7, 11.0, 6.5
    at_image, own_image = f * s / (s - f), f * w / (w - f)
    edge = f / n / 2
    hit = [y + (0.0 - y) * at_image / own_image for y in (edge, -edge)]
    blur = lens.defocus_blur_um(focal_mm=f, f_number=n, focus_mm=s, distance_mm=w)
    assert blur == pytest.approx(abs(hit[0] - hit[1]) * 1000, rel=1e-12)


def test_working_f_number_between_pupil_at_the_lens_and_telecentric():
    at_lens = lens.working_f_number(focal_mm=2.0, f_number=4.0, magnification=0.1, exit_pupil_mm=2.2)
    telecentric = lens.working_f_number(focal_mm=2.0, f_number=4.0, magnification=0.1, exit_pupil_mm=np.inf)
    between = lens.working_f_number(focal_mm=2.0, f_number=4.0, magnification=0.1, exit_pupil_mm=5.0)
    assert at_lens == pytest.approx(4.4)
    assert telecentric == 4.0
    assert telecentric < between < at_lens
    same = lens.face_irradiance_factor(f_number=4.0, magnification=0.1, transmission=0.8)
    assert same == pytest.approx(lens.face_irradiance_factor(f_number=at_lens, magnification=0.0, transmission=0.8))


def test_chief_ray_needs_a_finite_pupil():
    sines = lens.chief_ray_sine(height_mm=0.5, exit_pupil_mm=np.array([1.0, 10.0, np.inf]))
    assert sines[0] == pytest.approx(np.sin(np.arctan(0.5)))
    assert sines[2] == 0.0
    assert (np.diff(sines) < 0).all()


def test_accepted_share_against_counting_rays():
    """Independent route: rays uniform in direction cosines, counted."""
    rng = np.random.default_rng(3)
    radius, turn = np.sqrt(rng.random(400_000)), 2 * np.pi * rng.random(400_000)
    for core, cone, tilt in ((0.39, 0.25, 0.30), (0.39, 0.125, 0.447), (0.5, 0.1, 0.2), (0.2, 0.5, 0.1)):
        x, y = tilt + cone * radius * np.cos(turn), cone * radius * np.sin(turn)
        counted = np.mean(x * x + y * y < core * core)
        share = lens.accepted_fraction(core_na=core, cone_sine=cone, tilt_sine=tilt)
        assert share == pytest.approx(counted, abs=0.003)


def test_a_pupil_at_the_lens_starves_the_edge_and_a_telecentric_lens_does_not():
    tilt = lens.chief_ray_sine(height_mm=0.5, exit_pupil_mm=1.0)
    edge = lens.accepted_fraction(core_na=0.39, cone_sine=0.125, tilt_sine=tilt)
    assert edge == pytest.approx(0.20, abs=0.02)
    assert lens.accepted_fraction(core_na=0.39, cone_sine=0.125, tilt_sine=0.0) == 1.0


def test_a_worked_light_budget_of_the_way_back():
    """1000 lx on reflectance 0.3; f/4, lens 0.85, bundle 0.45, relay x2: 0.45 lx on the sensor."""
    face = 0.3 * 1000.0 / np.pi * lens.face_irradiance_factor(f_number=4.0, magnification=0.0, transmission=0.85)
    assert face * 0.45 / 2.0**2 == pytest.approx(0.45, abs=0.005)


def test_apparent_distance_in_a_medium():
    assert lens.apparent_distance_mm(distance_mm=13.333, pupil_depth_mm=0.5, index=1.3333) == pytest.approx(
        10.5, abs=1e-3
    )
    assert lens.apparent_distance_mm(distance_mm=7.0, pupil_depth_mm=0.5, index=1.0) == 7.5


def test_one_design_equals_its_place_among_many():
    many = {"focal_mm": RNG.uniform(0.5, 2, 9), "f_number": RNG.uniform(2, 8, 9), "focus_mm": RNG.uniform(5, 50, 9)}
    batch = lens.depth_of_field_mm(blur_um=8.0, **many)
    for k in range(9):
        one = lens.depth_of_field_mm(blur_um=8.0, **{name: float(values[k]) for name, values in many.items()})
        assert float(one.near_mm) == pytest.approx(batch.near_mm[k], rel=1e-12)
        assert float(one.far_mm) == pytest.approx(batch.far_mm[k], rel=1e-12)


@pytest.mark.parametrize(
    ("call", "said"),
    [
        (lambda: lens.magnification(focal_mm=2.0, focus_mm=2.0), "focus_mm is 2; it must be beyond the focal length"),
        (lambda: lens.image_distance_mm(focal_mm=-1.0, focus_mm=2.0), "focal_mm is -1; it must be above 0"),
        (
            lambda: lens.accepted_fraction(core_na=0.4, cone_sine=1.2, tilt_sine=0.0),
            "cone_sine is 1.2; it must be 1 or",
        ),
        (
            lambda: lens.accepted_fraction(core_na=0.4, cone_sine=0.2, tilt_sine=-0.1),
            "tilt_sine is -0.1; it must be from",
        ),
        (
            lambda: lens.working_f_number(focal_mm=1.0, f_number=4.0, magnification=0.5, exit_pupil_mm=0.4),
            "exit_pupil_mm is 0.4",
        ),
        (lambda: lens.apparent_distance_mm(distance_mm=1.0, pupil_depth_mm=0.0, index=0.9), "index is 0.9"),
    ],
)
def test_the_impossible_is_refused_in_words(call, said):
    with pytest.raises(OutOfRange, match=said):
        call()


def test_the_table_of_a_design_is_strict():
    good = Objective(focal_mm=1.0, f_number=4.0, focus_mm=20.0)
    assert good.exit_pupil_mm is None
    assert good.mapping == "tan"
    with pytest.raises(ValueError, match="fisheye"):
        Objective(focal_mm=1.0, f_number=4.0, focus_mm=20.0, mapping="fisheye")
    with pytest.raises(ValueError, match="greater than 0"):
        Objective(focal_mm=0.0, f_number=4.0, focus_mm=20.0)
