"""Generated subjects: sizes in millimeters, contrast, the same from the same numbers, and detail that does not break up."""

import numpy as np
import pytest

from optics.spec import OutOfRange
from optics.viewer import strokes, subjects
from optics.viewer.bars import bar_frequencies_lp_mm

GIVEN = {"width_mm": 20.0, "pixels": 400, "contrast": 0.5, "seed": 4}
MADE = {"cracks": subjects.crack_network, "gear": subjects.gear_edge, "vessels": subjects.vessel_tree}


@pytest.mark.parametrize("subject", subjects.SUBJECTS)
def test_every_subject_is_a_reflectance_and_the_same_again(subject):
    one, again = (subjects.subject_reflectance(subject=subject, **GIVEN) for _ in range(2))
    assert one.shape == (400, 400)
    assert 0 < one.min() <= one.max() <= 1.3
    assert np.array_equal(one, again)


@pytest.mark.parametrize("subject", MADE)
def test_another_seed_is_another_subject(subject):
    one, other = (subjects.subject_reflectance(subject=subject, **{**GIVEN, "seed": seed}) for seed in (4, 5))
    assert np.abs(one - other).max() > 0.3


@pytest.mark.parametrize("subject", MADE)
def test_shapes_are_shares_of_the_width(subject):
    """Twice the width shows the same, twice as large: nothing hangs on millimeters."""
    one, wide = (
        subjects.subject_reflectance(subject=subject, **{**GIVEN, "width_mm": width}) for width in (20.0, 40.0)
    )
    assert one == pytest.approx(wide, abs=1e-9)


@pytest.mark.parametrize("subject", ["bars", "cracks", "vessels"])
def test_finer_pixels_show_the_same_lines(subject):
    """Half the pixel, averaged in fours, is the coarser array: thin strokes fade, they do not break up or thicken."""
    plain = {**GIVEN, "contrast": 1.0}
    coarse, fine = (
        subjects.subject_reflectance(subject=subject, **{**plain, "pixels": pixels}) for pixels in (400, 800)
    )
    fine = fine.reshape(400, 2, 400, 2).mean(axis=(1, 3))
    dark = [1 - (one < 0.55) for one in (coarse, fine)]
    assert (1 - dark[0]).sum() == pytest.approx((1 - dark[1]).sum(), rel=0.06)
    ink = [np.clip(1 - one / np.median(one), 0, 1).mean() for one in (coarse, fine)]
    assert ink[0] == pytest.approx(ink[1], rel=0.12)


def test_contrast_is_michelsons():
    for contrast in (0.2, 0.8):
        bars = subjects.bar_target(width_mm=20.0, pixels=600, contrast=contrast)
        assert (bars.max() - bars.min()) / (bars.max() + bars.min()) == pytest.approx(contrast, abs=1e-9)
    assert strokes.dark_level(contrast=0.0) == 1.0
    assert strokes.dark_level(contrast=1.0) == 0.0


# Bars


def test_bars_follow_the_three_bar_series():
    """2^(G + (E - 1)/6) with whole G and E (MIL-STD-150A), a third of an octave apart."""
    for width_mm in (3.0, 20.0, 111.0):
        f = bar_frequencies_lp_mm(width_mm=width_mm)
        assert 6 * np.log2(f) == pytest.approx(np.rint(6 * np.log2(f)), abs=1e-9)
        assert f[1:] / f[:-1] == pytest.approx(np.full(9, 2 ** (1 / 3)))
        assert 1.0 <= f[0] * 2 * width_mm / 34 < 2 ** (1 / 6)


def test_the_coarsest_bars_have_their_period_and_are_five_times_as_long_as_wide():
    width_mm, pixels = 20.0, 2000
    bars = subjects.bar_target(width_mm=width_mm, pixels=pixels, contrast=1.0)
    step = width_mm / pixels
    bar = 0.5 / bar_frequencies_lp_mm(width_mm=width_mm)[0]
    rows = np.flatnonzero((bars < 0.5).any(axis=1))
    top = rows[-1]
    line = bars[top - int(0.5 * bar / step)] < 0.5  # through the upright bars and one level bar
    edges = np.flatnonzero(np.diff(line.astype(int)))
    runs = np.diff(edges) * step
    assert runs[:6] == pytest.approx(
        [bar, bar, bar, bar, bar, bar], abs=2 * step
    )  # bar and gap, and the gap between the two sets
    assert runs[6] == pytest.approx(5 * bar, abs=2 * step)
    column = bars[: top + 1, edges[0] + 2] < 0.5
    assert np.argmin(column[::-1]) * step == pytest.approx(5 * bar, abs=2 * step)


def test_the_bars_lie_within_the_field_of_view():
    bars = subjects.bar_target(width_mm=21.0, pixels=600, contrast=1.0)
    at = strokes.middles_mm(width_mm=21.0, pixels=600)
    away = np.hypot(at, at[:, None])
    assert away[bars < 0.9].max() < 10.0


def test_the_ruler_is_as_long_as_it_says():
    """1-2-5 millimeters: the longest level line of ink is 5 mm in 20."""
    bars = subjects.bar_target(width_mm=20.0, pixels=1000, contrast=1.0)
    lowest = bars[:300]
    longest = max(int((row < 0.6).sum()) for row in lowest)
    assert longest * 0.02 == pytest.approx(5.0, abs=0.13)


# Drawing


def test_boxes_have_their_exact_area():
    cover = np.zeros((100, 100))
    strokes.box(cover=cover, width_mm=10.0, left_mm=-1.234, low_mm=0.567, wide_mm=2.345, high_mm=0.0123)
    assert cover.sum() * 0.01 == pytest.approx(2.345 * 0.0123)
    strokes.box(cover=cover, width_mm=10.0, left_mm=8.0, low_mm=8.0, wide_mm=1.0, high_mm=1.0)  # outside: nothing
    assert cover.sum() * 0.01 == pytest.approx(2.345 * 0.0123)


@pytest.mark.parametrize("thick_mm", [0.02, 0.07, 0.35, 1.1])
def test_strokes_have_about_their_area_even_below_a_pixel(thick_mm):
    cover = np.zeros((200, 200))
    ends = np.array([[-3.1, -2.2], [2.7, 3.4]])
    strokes.stroke(cover=cover, width_mm=10.0, ends_mm=ends, thick_mm=(thick_mm, thick_mm))
    length = np.hypot(*(ends[1] - ends[0]))
    expected = length * thick_mm + np.pi / 4 * thick_mm**2
    assert cover.sum() * 0.05**2 == pytest.approx(expected, rel=0.15 if thick_mm < 0.1 else 0.02)


def test_letters_are_as_wide_as_they_say():
    cover = np.zeros((200, 200))
    wide = strokes.text(cover=cover, width_mm=10.0, said="4.2", left_mm=-2.0, low_mm=-1.0, high_mm=1.4)
    columns, rows = np.flatnonzero(cover.any(axis=0)), np.flatnonzero(cover.any(axis=1))
    assert (columns[-1] + 1 - columns[0]) * 0.05 == pytest.approx(wide, abs=0.06)
    assert (rows[-1] + 1 - rows[0]) * 0.05 == pytest.approx(1.4, abs=0.06)
    assert len(set(strokes.LETTERS.values())) == len(strokes.LETTERS)


def test_mottle_is_even_and_falls_with_frequency():
    field = strokes.mottle(pixels=256, slope=1.5, seed=1)
    assert field.mean() == pytest.approx(0.0, abs=1e-12)
    assert field.std() == pytest.approx(1.0)
    wave = np.abs(np.fft.rfft2(field)) ** 2
    radius = np.hypot(np.fft.rfftfreq(256)[None, :], np.fft.fftfreq(256)[:, None])
    low, high = (wave[(radius > f) & (radius < 1.3 * f)].mean() for f in (0.02, 0.2))
    assert np.log10(low / high) == pytest.approx(3.0, abs=0.35)  # amplitude f^-1.5: power f^-3


# Refusals


@pytest.mark.parametrize(
    ("changed", "said"),
    [
        ({"subject": "moon"}, "subject is 'moon'; it must be one of bars, cracks, gear, vessels, flat"),
        ({"width_mm": 0.0}, "width_mm is 0"),
        ({"pixels": 4}, "pixels is 4"),
        ({"contrast": 1.2}, "contrast is 1.2"),
    ],
)
def test_what_cannot_be_is_refused(changed, said):
    with pytest.raises(OutOfRange, match=said):
        subjects.subject_reflectance(**{"subject": "bars", **GIVEN, **changed})
