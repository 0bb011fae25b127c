import numpy as np
import pytest

from optics.image import field, tip
from optics.image.objective import image_distance_mm
from optics.spec import OutOfRange


def test_the_focal_length_in_place_of_the_image_distance_is_off_by_5_and_25_percent():
    for focus, excess in ((20.0, 0.05), (5.0, 0.25)):
        v = image_distance_mm(focal_mm=1.0, focus_mm=focus)
        right, wrong = (
            np.tan(np.deg2rad(field.field_half_angle_deg(image_mm=0.1, image_distance_mm=d, mapping="tan")))
            for d in (v, 1.0)
        )
        assert wrong / right - 1 == pytest.approx(excess, abs=0.003)


def test_a_worked_field():
    """0.95 mm image seen 60 degrees wide from the pupil, at 20 mm, pitch 8 um: 0.337 mm per line pair."""
    v = 0.95 / 2 / np.tan(np.deg2rad(30.0))
    half = field.field_half_angle_deg(image_mm=0.95, image_distance_mm=v, mapping="tan")
    assert half == pytest.approx(30.0)
    radius = field.field_radius_mm(half_angle_deg=half, distance_mm=20.0, pupil_depth_mm=0.0, index=1.0)
    assert radius / (0.95 / 2) / 72.17 == pytest.approx(0.337, abs=0.0005)


def test_the_radius_on_the_target_is_that_of_the_traced_edge_ray():
    """Independent route: the edge ray, refracted at the window by Snell's law in vector form."""
    half, depth, distance, index = np.deg2rad(40.0), 1.2, 15.0, 1.3334
    incoming = np.array([np.sin(half), np.cos(half)])
    ratio, along = 1 / index, incoming[1]
    outgoing = ratio * incoming + (np.sqrt(1 - ratio**2 * (1 - along**2)) - ratio * along) * np.array([0.0, 1.0])
    expected = depth * incoming[0] / incoming[1] + distance * outgoing[0] / outgoing[1]
    got = field.field_radius_mm(half_angle_deg=40.0, distance_mm=distance, pupil_depth_mm=depth, index=index)
    assert got == pytest.approx(expected, rel=1e-12)


def test_two_planes_find_the_field_wherever_the_pupil_lies_and_the_window_method_overstates_it():
    for depth in (0.0, 0.5, 2.0):
        near, far = (
            field.field_radius_mm(half_angle_deg=42.0, distance_mm=d, pupil_depth_mm=depth, index=1.0)
            for d in (8.0, 20.0)
        )
        planes = field.field_from_planes_deg(near_radius_mm=near, far_radius_mm=far, near_mm=8.0, far_mm=20.0)
        assert planes == pytest.approx(84.0, rel=1e-12)
        window = field.field_from_window_deg(radius_mm=far, distance_mm=20.0)
        assert window >= planes - 1e-9
        assert (window > planes + 0.1) == (depth > 0)


def test_water_narrows_every_field_and_turns_tan_into_a_pincushion():
    half = np.linspace(5.0, 70.0, 14)
    inside = field.refracted_half_angle_deg(half_angle_deg=half, index=1.3334)
    assert (inside < half).all()
    assert (field.edge_distortion_ratio(half_angle_deg=half, index=1.3334, mapping="tan") > 0).all()
    air = field.edge_distortion_ratio(half_angle_deg=half, index=1.0, mapping="f_theta")
    water = field.edge_distortion_ratio(half_angle_deg=half, index=1.3334, mapping="f_theta")
    assert (np.abs(water) < np.abs(air)).all()


def test_distortion_vanishes_toward_the_center():
    for mapping in ("tan", "f_theta"):
        assert abs(field.edge_distortion_ratio(half_angle_deg=0.01, index=1.33, mapping=mapping)) < 1e-7


def test_a_barrel_fitted_in_air_shrinks_under_water_as_measured():
    """Published (Sci. Rep. 2020, s41598-020-62657-w): -24.2 % in air becomes -8.6 % in water; f_theta predicts -6 %."""
    angles = np.linspace(10.0, 60.0, 5001)
    air = field.edge_distortion_ratio(half_angle_deg=angles, index=1.0, mapping="f_theta")
    fitted = np.interp(0.242, -air, angles)
    water = field.edge_distortion_ratio(half_angle_deg=fitted, index=1.333, mapping="f_theta")
    assert water == pytest.approx(-0.086, abs=0.03)


def test_f_theta_holds_90_degrees_and_refuses_more():
    assert field.field_half_angle_deg(image_mm=np.pi / 2, image_distance_mm=1.0, mapping="f_theta") == pytest.approx(
        45.0
    )
    with pytest.raises(OutOfRange, match="image_mm is 4; it must be below pi times"):
        field.field_half_angle_deg(image_mm=4.0, image_distance_mm=1.0, mapping="f_theta")
    with pytest.raises(OutOfRange, match="half_angle_deg is 90; it must be below 90"):
        field.refracted_half_angle_deg(half_angle_deg=90.0, index=1.3)
    with pytest.raises(OutOfRange, match="far_mm is 5; it must be beyond near_mm"):
        field.field_from_planes_deg(near_radius_mm=1.0, far_radius_mm=2.0, near_mm=5.0, far_mm=5.0)


def test_glass_in_front_looks_shorter_by_its_index():
    """Independent route: a paraxial ray through a plate."""
    slope, thickness, index = 1e-4, 3.0, 1.62
    assert tip.reduced_path_mm(glass_path_mm=thickness, index=index) == pytest.approx(
        thickness * np.tan(np.arcsin(np.sin(np.arctan(slope)) / index)) / slope, rel=1e-6
    )


def test_a_tip_counts_its_reflections():
    assert [tip.mirror_image(view_deg=view, reflections=n) for view, n in ((0.0, None), (90.0, None), (90.0, 2))] == [
        False,
        True,
        False,
    ]
    made = tip.Tip(view_deg=90.0, glass_path_mm=1.0, index=1.52, transmission=0.9, added_length_mm=2.0)
    assert made.reflections is None
    with pytest.raises(ValueError, match="less than or equal to 180"):
        tip.Tip(view_deg=200.0, glass_path_mm=1.0, index=1.52, transmission=0.9, added_length_mm=2.0)
