import numpy as np
import pytest

from optics.spec import OutOfRange
from optics.viewer import eye


def test_the_longer_form_against_an_open_color_library():
    colour = pytest.importorskip("colour")
    from colour.contrast import (
        contrast_sensitivity_function_Barten1999,
        pupil_diameter_Barten1999,
        retinal_illuminance_Barten1999,
        sigma_Barten1999,
    )

    assert colour is not None
    u = np.array([0.5, 1.0, 4.0, 12.0, 30.0])
    for luminance, field in ((1.0, 10.0), (20.0, 60.0), (300.0, 5.0)):
        pupil = pupil_diameter_Barten1999(luminance, field, field)
        assert eye.pupil_diameter_mm(luminance_cd_m2=luminance, field_deg=field) == pytest.approx(
            float(pupil), rel=1e-12
        )
        expected = contrast_sensitivity_function_Barten1999(
            u,
            sigma=sigma_Barten1999(0.5 / 60, 0.08 / 60, pupil),
            E=retinal_illuminance_Barten1999(luminance, pupil),
            X_0=field,
        )
        got = eye.barten_1999_contrast_sensitivity(
            frequency_cpd=u, luminance_cd_m2=luminance, field_deg=field, pupil_mm=float(pupil)
        )
        assert np.allclose(got, expected, rtol=1e-9)


def test_the_two_published_forms_stay_near_each_other():
    """The shorter form holds typical constants of the longer: within a factor of 1.6 from 1 to 20 cycles per degree."""
    u = np.linspace(1.0, 20.0, 20)
    for luminance in (10.0, 100.0):
        pupil = eye.pupil_diameter_mm(luminance_cd_m2=luminance, field_deg=20.0)
        short = eye.contrast_sensitivity(frequency_cpd=u, luminance_cd_m2=luminance, field_deg=20.0)
        long = eye.barten_1999_contrast_sensitivity(
            frequency_cpd=u, luminance_cd_m2=luminance, field_deg=20.0, pupil_mm=pupil
        )
        assert (np.abs(np.log(short / long)) < np.log(1.6)).all()


def test_more_light_and_a_larger_field_help_and_there_is_a_best_frequency():
    u = np.geomspace(0.1, 50.0, 200)
    dim, bright = (
        eye.contrast_sensitivity(frequency_cpd=u, luminance_cd_m2=level, field_deg=10.0) for level in (1.0, 100.0)
    )
    assert (bright > dim).all()
    assert (eye.contrast_sensitivity(frequency_cpd=u, luminance_cd_m2=100.0, field_deg=30.0) > bright).all()
    best = u[np.argmax(bright)]
    assert 1.0 < best < 10.0
    assert bright[-1] < 2.0


def test_one_eye_needs_more_contrast():
    two = eye.contrast_sensitivity(frequency_cpd=4.0, luminance_cd_m2=100.0, field_deg=10.0)
    assert eye.one_eye_threshold_contrast(sensitivity=two) * two == pytest.approx(np.sqrt(2))


def test_angles_in_the_eyepiece_agree():
    """A grating of one period per pitch has as many cycles per degree as a degree holds pitches."""
    pitch = eye.angular_pitch_arcmin(pitch_um=10.0, eyepiece_focal_mm=25.0)
    cycles = eye.seen_frequency_cpd(frequency_lp_mm=100.0, eyepiece_focal_mm=25.0)
    assert cycles == pytest.approx(60.0 / pitch)
    field = eye.apparent_field_deg(image_mm=0.01, eyepiece_focal_mm=25.0)
    assert field * 60 == pytest.approx(pitch, rel=1e-6)
    assert eye.eyepiece_magnification(eyepiece_focal_mm=20.0) == 12.5


def test_luminance_is_never_raised_and_falls_with_a_small_exit_pupil():
    given = {"face_cd_m2": 200.0, "transmission": 0.9, "eyepiece_focal_mm": 25.0, "pupil_mm": 4.0}
    seen = eye.seen_luminance_cd_m2(cone_sine=np.array([0.04, 0.08, 0.3]), **given)
    assert seen == pytest.approx([45.0, 180.0, 180.0])
    assert eye.pupil_diameter_mm(luminance_cd_m2=1e-4, field_deg=10.0) < 8.0
    assert eye.pupil_diameter_mm(luminance_cd_m2=1e5, field_deg=60.0) > 2.0


def test_refusals():
    with pytest.raises(OutOfRange, match="frequency_cpd is 0; it must be above 0"):
        eye.contrast_sensitivity(frequency_cpd=0.0, luminance_cd_m2=1.0, field_deg=1.0)
    with pytest.raises(OutOfRange, match="luminance_cd_m2 is -1"):
        eye.contrast_sensitivity(frequency_cpd=1.0, luminance_cd_m2=-1.0, field_deg=1.0)
    with pytest.raises(ValueError, match="eyepiece_focal_mm"):
        eye.Eye(eyepiece_focal_mm=0.5)
