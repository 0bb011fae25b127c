"""Detail in the chain: limits by brute force, experience of the trade, and what cannot be."""

from itertools import pairwise

import numpy as np
import pytest

from optics import presets
from optics.chain import detail as chain_detail
from optics.chain.columns import columns
from optics.chain.evaluate import evaluate
from optics.chain.fit import fit
from optics.chain.light import light
from optics.chain.target import field_of_view, target
from optics.chain.way_back import way_back
from optics.report.size import size
from optics.spec import OutOfRange
from optics.viewer.detail import PARTS


def report(document, settings):
    return size(presets.resolve(presets.edited(document, settings)).fiberscope)


def test_the_part_that_limits_by_brute_force_on_200_designs(random_designs):
    """Each part made ideal in turn, its resolution sought on a dense scan of frequencies instead of by root finding."""
    designs = [design for design in random_designs(260) if design.image][:200]
    table = columns(designs)
    found = evaluate(table)
    seen = field_of_view(table)
    landed = target(table, light(table), fit(table, seen["image_mm"])[1], seen)
    parts, _ = way_back(table, landed.center_w_m2_nm, seen)
    share = np.linspace(0.0, 1.0, 4001)
    best = np.zeros((len(PARTS) + 1, len(designs)))
    uppers = np.array([chain_detail.upper_lp_mm(parts, ideal) for ideal in chain_detail.VARIANTS])
    for step in share:
        passes = chain_detail.margin(parts, uppers * step) >= 0
        best = np.where(passes, uppers * step, best)
    gain = np.where(chain_detail.present(parts), best[1:] - best[0], -np.inf)
    limited = found.limited_by()
    close = np.sort(gain, axis=0)[-2:]
    for row, part in enumerate(limited):
        if close[1, row] - close[0, row] > 3e-3 * uppers[:, row].max():  # not a tie within the scan's step
            assert PARTS[int(np.argmax(gain[:, row]))] == part, row


NARROW = {"wavelength_nm": [350.0, 450.0, 455.0, 460.0, 1100.0], "value": [0.0, 0.0, 1.0, 0.0, 0.0]}
RED = {"wavelength_nm": [350.0, 635.0, 640.0, 645.0, 1100.0], "value": [0.0, 0.0, 1.0, 0.0, 0.0]}


def test_red_is_worse_than_blue_on_a_fine_pitch(document):
    """At equal sensor signal (half the well in both): more exchange between cores and more diffraction."""
    fine = {
        "image.bundle.preset": "drawn_silica_3um",
        "viewer.camera.relay_magnification": 4.0,
        "viewer.camera.longest_exposure_s": 10.0,
    }
    blue, red = (
        report(
            document,
            {
                **fine,
                "source.lamp.flux_lm": None,
                "source.lamp.flux_w": 2.0,
                "source.lamp.spectrum": spectrum,
                "source.lamp.preset": None,
                "source.lamp.emitter_mm": 1.4,
                "source.lamp.cone_na": 1.0,
            },
        )
        for spectrum in (NARROW, RED)
    )
    assert blue.detail.snr == pytest.approx(red.detail.snr, rel=0.02)
    mixed = [next(line.contrast for line in one.detail.ledger if line.name == "crosstalk") for one in (blue, red)]
    assert mixed[1] < mixed[0]
    assert red.summary.resolved_lp_mm < blue.summary.resolved_lp_mm


def test_more_light_helps_until_the_lattice_or_the_lens_limits(document):
    resolved = [report(document, {"source.lamp.flux_lm": flux}) for flux in (1e-4, 1e-3, 1e-2, 1.0, 100.0, 600.0)]
    values = [one.summary.resolved_lp_mm for one in resolved]
    assert all(later >= earlier * (1 - 1e-9) for earlier, later in pairwise(values))
    assert values[-1] == pytest.approx(values[-2], rel=0.05)
    assert resolved[0].summary.limited_by == "light"
    assert resolved[-1].summary.limited_by in ("lattice", "objective")


def test_too_few_pixels_a_pitch_are_warned_of(document):
    few = report(document, {"viewer.camera.relay_magnification": 0.6})
    assert any("beat with the lattice" in item.text for item in few.caveats)
    assert not any("beat with the lattice" in item.text for item in report(document, {}).caveats)


@pytest.mark.parametrize(
    ("settings", "said"),
    [
        (
            {
                "image.objective.focal_mm": 12.0,
                "image.objective.f_number": 2.0,
                "image.objective.focus_mm": 60.0,
                "body.section.outer_diameter_mm": 5.0,
            },
            "wider than the tip",
        ),
        ({"body.section.objective_barrel_mm": 0.2}, "wider than the objective's barrel"),
        ({"image.bundle.core_um": 11.0}, "the core must be narrower than the pitch"),
        ({"viewer.camera.longest_exposure_s": 0.0}, "viewer.camera.longest_exposure_s is 0"),
        ({"viewer.camera.sensor_mm": 1.2}, "the camera's sensor cannot cover the bundle's picture"),
    ],
)
def test_what_cannot_be_seen_through_is_refused(document, settings, said):
    with pytest.raises(OutOfRange, match=said):
        presets.resolve(presets.edited(document, settings))
