"""The tables of an answer as rows of words and numbers, in the order of the light."""

import math
import re

from optics.report.answer import ExposureLine, Report
from optics.report.reasons import limit_reason
from optics.study.working_range import RangeCurves
from optics.ui.names import field_name
from optics.ui.words import number, percent, plain, unit

Columns = dict[str, list[str]]


def columns(names: tuple[str, ...], rows: list[tuple[str, ...]]) -> Columns:
    """Rows turned into named columns."""
    return {name: [row[place] for row in rows] for place, name in enumerate(names)}


def steps(report: Report) -> Columns:
    rows = [
        (step.name, number(step.after_lm), f"×{step.factor:.3f}", plain(step.because)) for step in report.light.steps
    ]
    return columns(("step", "lm after", "factor", "why"), rows)


def _quantities(rows: list[tuple[str, float | str | bool | None, str]]) -> Columns:
    shown = [
        (name, f"{number(value)}{'' if sign == '°' else ' '}{sign}".rstrip())
        for name, value, sign in rows
        if value is not None
    ]
    return columns(("quantity", "value"), shown)


def light(report: Report) -> Columns:
    found = report.light
    return _quantities(
        [
            ("delivered at the exit face", found.delivered_lm, "lm"),
            ("delivered, all wavelengths", found.delivered_w, "W"),
            ("share of the lamp's light", found.transmission, ""),
            ("exit NA, 95 % of the light", found.exit_na, ""),
            ("color temperature", found.color_temperature_k, "K"),
            ("color rendering index", found.color_rendering_index, ""),
        ]
    )


def target(report: Report) -> Columns:
    found = report.target
    return _quantities(
        [
            ("at the center", found.center_lux, "lx"),
            ("mean over the field of view", found.mean_lux, "lx"),
            ("least in the field of view", found.min_lux, "lx"),
            ("evenness, least over mean", found.evenness, ""),
            ("field without light", found.unlit_fraction, "of its area"),
            ("irradiance at the center", found.center_w_m2, "W/m²"),
            ("radius of the field", found.field_radius_mm, "mm"),
            ("light reaches the axis from", found.first_lit_mm, "mm"),
        ]
    )


def detail(report: Report) -> Columns:
    found, summary = report.detail, report.summary
    return _quantities(
        [
            ("resolved at the target", summary.resolved_lp_mm, "lp/mm"),
            ("smallest gap", summary.smallest_gap_mm, "mm"),
            ("thinnest dark line", summary.smallest_line_mm, "mm"),
            ("one core pitch at the target", found.pitch_at_target_mm, "mm"),
            ("lattice limit at the target", found.lattice_limit_lp_mm, "lp/mm"),
            ("signal to noise of one core", found.snr, ""),
            ("exposure", found.exposure_s, "s"),
            ("sharp from", found.near_mm, "mm"),
            (
                "sharp to",
                found.far_mm if found.far_mm is not None else "far away",
                "mm" if found.far_mm is not None else "",
            ),
            ("field of view", summary.field_of_view_deg, "°"),
        ]
    )


def ledger(report: Report) -> Columns:
    rows = [
        (
            f"**{line.name}**, limits" if line.name == report.summary.limited_by else line.name,
            number(line.contrast),
            "no limit" if line.limit_lp_mm is None else number(line.limit_lp_mm),
        )
        for line in report.detail.ledger
    ]
    return columns(("part", "contrast there", "alone allows, lp/mm"), rows)


def limit_words(report: Report) -> str:
    """What limits the detail, and what would help."""
    part = report.summary.limited_by
    return f"The {part} limits: {limit_reason(part)}." if part else "No detail is resolved."


def section(report: Report) -> Columns:
    found = report.fit
    return _quantities(
        [
            ("outer diameter", found.outer_diameter_mm, "mm"),
            ("lumen", found.lumen_mm, "mm"),
            ("free area", found.free_area_mm2, "mm²"),
            ("light area, fibers", found.light_area_mm2, "mm²"),
            ("whole fibers", found.fiber_count, ""),
        ]
    )


def passage(report: Report) -> Columns:
    found, summary = report.fit, report.summary
    return _quantities(
        [
            ("passes the bore", found.passes, ""),
            ("rigid tip", summary.rigid_tip_mm, "mm"),
            ("longest rigid tip that passes", found.longest_rigid_tip_mm, "mm"),
            ("least bend radius of the tube", found.bend_radius_mm, "mm"),
            ("bend radius that the bore gives", found.passable_radius_mm, "mm"),
        ]
    )


def working_range(curves: RangeCurves) -> Columns:
    """The curves at every fifth distance."""
    shown = zip(
        *(
            values[::5].tolist()
            for values in (curves.distance_mm, curves.center_lux, curves.least_lux, curves.smallest_gap_mm)
        )
    )
    rows = [tuple(number(value) if math.isfinite(value) else "–" for value in row) for row in shown]
    return columns(("distance, mm", "center, lx", "least, lx", "smallest gap, mm"), rows)


def range_words(curves: RangeCurves) -> list[str]:
    """Where each need begins to fail on the way near and far."""
    ends: dict[str, list[str]] = {}
    for name, distance, side in curves.fails:
        ends.setdefault(name, [])
        if side == "far" and distance is not None and distance <= curves.distance_mm[0]:
            ends[name].append("anywhere")
        elif distance is not None:
            ends[name].append(f"{'beyond' if side == 'far' else 'nearer than'} {number(distance)} mm")
    words = [_range_line(field_name(name, f"needs.{name}"), where) for name, where in ends.items()]
    return words or ["No need that the distance moves is set."]


def _range_line(need: str, where: list[str]) -> str:
    return f"✗ **{need}**: not met {' and '.join(where)}" if where else f"✓ **{need}**: met throughout"


def screening(report: Report) -> Columns:
    rows = [
        (
            _screened(line),
            line.name,
            _in_unit(line.value, line.unit, "not assessed"),
            _in_unit(line.limit, line.unit, "none"),
            plain(line.because),
        )
        for line in report.exposure
    ]
    return columns(("", "line", "value", "screening figure", "why"), rows)


def _screened(line: ExposureLine) -> str:
    """A mark that works in grey: over the figure, under it, or nothing to hold it against."""
    if line.value is None or line.limit is None:
        return "○"
    return "**✗**" if line.value > line.limit else "✓"


def _in_unit(value: float | None, sign: str, otherwise: str) -> str:
    sign = "" if sign == "1" else re.sub(r"(?<=m)2", "²", sign)
    return otherwise if value is None else f"{number(value)} {sign}".rstrip()


def screening_words(report: Report) -> str:
    over = sum(_screened(line) == "**✗**" for line in report.exposure)
    unknown = sum(_screened(line) == "○" for line in report.exposure)
    return f"{over} of {len(report.exposure)} lines exceed their screening figure ✗; {unknown} have no figure or no data ○."


def needs(report: Report) -> Columns:
    rows = [
        (
            "✓ met" if line.met else "**✗ short**",
            field_name(line.name, f"needs.{line.name}"),
            f"{number(line.wanted, 4)} {unit(line.name)}".rstrip(),
            "nothing" if line.got is None else f"{number(line.got)} {unit(line.name)}".rstrip(),
            margin(line.margin),
        )
        for line in report.needs
    ]
    return columns(("", "need", "wanted", "got", "margin"), rows)


def margin(value: float | None) -> str:
    """A relative margin in words: percent, and times where percent says nothing.

    >>> margin(0.17), margin(-0.135), margin(172.4), margin(None)
    ('+17 %', '−14 %', '×173', '–')
    """
    if value is None:
        return "–"
    return f"×{value + 1:.3g}" if value >= 2 else percent(value)
