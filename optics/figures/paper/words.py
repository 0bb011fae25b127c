"""What the PDF report says: rows of words for its tables, from one design's answer. No drawing."""

import re
from typing import Any

from optics.figures.canvas import seconds, three
from optics.report.answer import ExposureLine, Report
from optics.report.reasons import limit_reason
from optics.report.verdict import NAMES
from optics.study.working_range import RangeCurves

MET, SHORT, OPEN = "✓", "✗", "○"
SCREENING = "A screening estimate: it certifies nothing."
RAISED = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")

Pair = tuple[str, str]


def sentence_case(text: str) -> str:
    return text[:1].upper() + text[1:]


def typeset(text: str) -> str:
    """Units and signs of a sentence as they are printed.

    >>> typeset("2 x 90 deg at 30 mm, core 46 of 50 um; 35 mW/mm2, 3.3e-08 W/(m2 sr)")
    '2 × 90° at 30 mm, core 46 of 50 µm; 35 mW/mm², 3.3·10⁻⁸ W/(m² sr)'
    """
    for old, new in ((r"(?<=\d) x (?=\d)", " × "), (r"(?<=\d) deg\b", "°"), (r"(?<=\d )um\b", "µm"),
                     (r"(?<=[/(]m)2\b", "²"), (r"(?<=mm)2\b", "²")):  # fmt: skip
        text = re.sub(old, new, text)
    return re.sub(r"e([-+]\d+)\b", lambda found: "·10" + str(int(found[1])).translate(RAISED), text)


def with_unit(value: float | None, unit: str) -> str:
    if value is None:
        return "none"
    return f"{three(value).replace('-', '−')}{'' if unit == '°' else ' '}{unit}".rstrip()


def _pairs(rows: list[tuple[str, Any, str]]) -> list[Pair]:
    shown = []
    for name, value, unit in rows:
        if value is not None:
            said = ("yes" if value else "no") if isinstance(value, bool) else value
            shown.append((name, said if isinstance(said, str) else with_unit(said, unit)))
    return shown


def light(report: Report) -> list[Pair]:
    found = report.light
    return _pairs(
        [
            ("delivered at the exit face", found.delivered_lm, "lm"),
            ("delivered, all wavelengths", found.delivered_w, "W"),
            ("share of the lamp's light", found.transmission * 100, "%"),
            ("exit NA, holds 95 % of the lumens", found.exit_na, ""),
            ("color temperature", found.color_temperature_k, "K"),
            ("color rendering index", found.color_rendering_index, ""),
        ]
    )


def target(report: Report) -> list[Pair]:
    found = report.target
    return _pairs(
        [
            ("at the center", found.center_lux, "lx"),
            ("mean over the field of view", found.mean_lux, "lx"),
            ("least in the field of view", found.min_lux, "lx"),
            ("evenness, least over mean", found.evenness, ""),
            ("field without light, of its area", found.unlit_fraction, ""),
            ("irradiance at the center", found.center_w_m2, "W/m²"),
            ("radius of the field", found.field_radius_mm, "mm"),
            ("light reaches the axis from", found.first_lit_mm, "mm"),
        ]
    )


def detail(report: Report) -> list[Pair]:
    found, summary = report.detail, report.summary
    return _pairs(
        [
            ("resolved at the target", summary.resolved_lp_mm or "none", "lp/mm"),
            ("smallest gap", "none" if summary.smallest_gap_mm is None else summary.smallest_gap_mm, "mm"),
            ("thinnest dark line", "none" if summary.smallest_line_mm is None else summary.smallest_line_mm, "mm"),
            ("one pitch at the target", found.pitch_at_target_mm, "mm"),
            ("lattice limit at the target", found.lattice_limit_lp_mm, "lp/mm"),
            ("signal to noise of one core", found.snr, ""),
            ("exposure", None if found.exposure_s is None else seconds(found.exposure_s), ""),
            ("sharp from", found.near_mm, "mm"),
            ("sharp to", "far away" if found.far_mm is None else found.far_mm, "mm"),
        ]
    )


def limits(report: Report) -> str:
    """What limits the detail, and what would help."""
    part = report.summary.limited_by
    return f"The {part} limits: {limit_reason(part)}." if part else "No detail is resolved."


def fit(report: Report) -> list[Pair]:
    found = report.fit
    return _pairs(
        [
            ("outer diameter", found.outer_diameter_mm, "mm"),
            ("lumen", found.lumen_mm, "mm"),
            ("free area", "none" if found.free_area_mm2 <= 0 else found.free_area_mm2, "mm²"),
            ("light area, fibers", found.light_area_mm2, "mm²"),
            ("whole fibers", f"{found.fiber_count:,}", ""),
        ]
    )


def passage(report: Report) -> list[Pair]:
    found, summary = report.fit, report.summary
    return _pairs(
        [
            ("passes the bore", found.passes, ""),
            ("rigid tip", summary.rigid_tip_mm, "mm"),
            ("longest rigid tip that passes", found.longest_rigid_tip_mm, "mm"),
            ("least bend radius of the tube", found.bend_radius_mm, "mm"),
            ("bend radius that the bore gives", found.passable_radius_mm, "mm"),
        ]
    )


def working_range(curves: RangeCurves) -> list[str]:
    """Where each need begins to fail on the way near and far."""
    ends: dict[str, list[str]] = {}
    for name, distance, side in curves.fails:
        ends.setdefault(name, [])
        if side == "far" and distance is not None and distance <= curves.distance_mm[0]:
            ends[name].append("anywhere in the range")
        elif distance is not None:
            ends[name].append(f"{'beyond' if side == 'far' else 'nearer than'} {three(distance)} mm")
    said = [
        f"{SHORT if where else MET} {sentence_case(NAMES[name].removeprefix('the '))}: "
        + (f"not met {' and '.join(where)}." if where else "met throughout.")
        for name, where in ends.items()
    ]
    return said or ["No need that the distance moves is set."]


def screened(line: ExposureLine) -> str:
    """A mark that works in grey: over the figure, under it, or nothing to hold it against."""
    if line.value is None or line.limit is None:
        return OPEN
    return SHORT if line.value > line.limit else MET


def screening(line: ExposureLine) -> tuple[str, str, str, str, str]:
    """(mark, name, value, screening figure, why) of one line."""
    unit = "" if line.unit == "1" else typeset(line.unit).replace("m2", "m²")
    value = "not assessed" if line.value is None else with_unit(line.value, unit)
    figure = "–" if line.limit is None else with_unit(line.limit, unit if line.value is None else "")
    return screened(line), sentence_case(line.name), value, figure, sentence_case(typeset(line.because)) + "."


def screening_count(report: Report) -> str:
    """How many lines are over, below, and open; what that is worth."""
    marks = [screened(line) for line in report.exposure]
    over, below, unknown = (marks.count(mark) for mark in (SHORT, MET, OPEN))
    return (
        f"{over} of {len(marks)} lines exceed their screening figure {SHORT}, {below} stay below it {MET}, {unknown} have no "
        f"figure or no data {OPEN}. {SCREENING} The current edition of each standard and measurement decide."
    )
