"""The tables of an answer as rows of words and numbers, in the order of the light."""

import re
from collections.abc import Mapping

from optics.report.answer import ExposureLine, Report
from optics.report.reasons import limit_reason
from optics.tables import UNSOURCED, Sourced, sources
from optics.ui.origin import SOFT, UNSOURCED_WORDS
from optics.ui.words import exact, field_name, number, plain, unit

Columns = dict[str, list[str]]


def columns(names: tuple[str, ...], rows: list[tuple[str, ...]]) -> Columns:
    """Rows turned into named columns."""
    return {name: [row[place] for row in rows] for place, name in enumerate(names)}


def steps(report: Report) -> Columns:
    rows = [(step.name, number(step.after_lm), f"×{step.factor:.3f}", plain(step.because)) for step in report.light.steps]
    return columns(("step", "lm after", "factor", "why"), rows)


def _quantities(rows: list[tuple[str, float | str | bool | None, str]]) -> Columns:
    shown = [(name, f"{number(value)} {sign}".rstrip()) for name, value, sign in rows if value is not None]
    return columns(("quantity", "value"), shown)


def light(report: Report) -> Columns:
    found = report.light
    return _quantities([
        ("delivered at the exit face", found.delivered_lm, "lm"), ("delivered, all wavelengths", found.delivered_w, "W"),
        ("share of the lamp's light", found.transmission, ""), ("exit NA, 95 % of the light", found.exit_na, ""),
        ("color temperature", found.color_temperature_k, "K"), ("color rendering index", found.color_rendering_index, ""),
    ])  # fmt: skip


def target(report: Report) -> Columns:
    found = report.target
    return _quantities([
        ("at the center", found.center_lux, "lx"), ("mean over the field of view", found.mean_lux, "lx"),
        ("least in the field of view", found.min_lux, "lx"), ("evenness, least over mean", found.evenness, ""),
        ("field without light", found.unlit_fraction, "of its area"), ("irradiance at the center", found.center_w_m2, "W/m²"),
        ("radius of the field", found.field_radius_mm, "mm"), ("light reaches the axis from", found.first_lit_mm, "mm"),
    ])  # fmt: skip


def detail(report: Report) -> Columns:
    found, summary = report.detail, report.summary
    return _quantities([
        ("resolved at the target", summary.resolved_lp_mm, "lp/mm"), ("smallest gap", summary.smallest_gap_mm, "mm"),
        ("thinnest dark line", summary.smallest_line_mm, "mm"), ("one core pitch at the target", found.pitch_at_target_mm, "mm"),
        ("lattice limit at the target", found.lattice_limit_lp_mm, "lp/mm"), ("signal to noise of one core", found.snr, ""),
        ("exposure", found.exposure_s, "s"), ("sharp from", found.near_mm, "mm"),
        ("sharp to", found.far_mm if found.far_mm is not None else "far away", "mm" if found.far_mm is not None else ""),
        ("field of view", summary.field_of_view_deg, "°"),
    ])  # fmt: skip


def ledger(report: Report) -> Columns:
    rows = [
        (f"**{line.name}**, limits" if line.name == report.summary.limited_by else line.name, number(line.contrast),
         "no limit" if line.limit_lp_mm is None else number(line.limit_lp_mm))
        for line in report.detail.ledger
    ]  # fmt: skip
    return columns(("part", "contrast there", "alone allows, lp/mm"), rows)


def limit_words(report: Report) -> str:
    """What limits the detail, and what would help."""
    part = report.summary.limited_by
    return f"The {part} limits: {limit_reason(part)}." if part else "No detail is resolved."


def fit(report: Report) -> Columns:
    found, summary = report.fit, report.summary
    return _quantities([
        ("outer diameter", found.outer_diameter_mm, "mm"), ("lumen", found.lumen_mm, "mm"), ("free area", found.free_area_mm2, "mm²"),
        ("light area, fibers", found.light_area_mm2, "mm²"), ("whole fibers", found.fiber_count, ""), ("rigid tip", summary.rigid_tip_mm, "mm"),
        ("longest rigid tip that passes", found.longest_rigid_tip_mm, "mm"), ("least bend radius of the tube", found.bend_radius_mm, "mm"),
        ("bend radius that the bore gives", found.passable_radius_mm, "mm"), ("passes the bore", found.passes, ""),
    ])  # fmt: skip


def screening(report: Report) -> Columns:
    rows = [(_screened(line), line.name, _in_unit(line.value, line.unit, "not assessed"), _in_unit(line.limit, line.unit, "none"), plain(line.because))
            for line in report.exposure]  # fmt: skip
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
        ("✓ met" if line.met else "**✗ short**", field_name(line.name, f"needs.{line.name}"), f"{number(line.wanted, 4)} {unit(line.name)}".rstrip(),
         "nothing" if line.got is None else f"{number(line.got)} {unit(line.name)}".rstrip(), margin(line.margin))
        for line in report.needs
    ]  # fmt: skip
    return columns(("", "need", "wanted", "got", "margin"), rows)


def margin(value: float | None) -> str:
    """A relative margin in words: percent, and times where percent says nothing.

    >>> margin(0.17), margin(-0.135), margin(172.4), margin(None)
    ('+17 %', '−14 %', '×173', '–')
    """
    if value is None:
        return "–"
    return f"×{value + 1:.3g}" if value >= 2 else f"{value:+.0%}".replace("%", " %").replace("-", "−")


def provenance(sourced: Mapping[str, Sourced]) -> Columns:
    """Every value in force with its tolerance and where it comes from."""
    return columns(("path", "value", "low", "high", "source", "place", "basis"), [_provenance(path, found) for path, found in sourced.items()])


def _provenance(path: str, found: Sourced) -> tuple[str, ...]:
    low, high = ("" if bound is None else f"{bound:g}" for bound in (found.low, found.high))
    if found.source == "own_scenario":
        return path, exact(found.value), low, high, "this design", "", "given"
    return path, exact(found.value), low, high, book(found.source), found.at, f"{'≈ ' if found.basis in SOFT else ''}{found.basis}"


def book(key: str) -> str:
    """A source by its title."""
    return UNSOURCED_WORDS[key].lower() if key in UNSOURCED else str(sources().get(key, {}).get("title", key))


def softness(sourced: Mapping[str, Sourced]) -> str:
    """How many of the values that the design does not state itself rest on memory or on an assumption."""
    given = [found for found in sourced.values() if found.source != "own_scenario"]
    soft = sum(found.basis in SOFT for found in given)
    return f"{soft} of {len(given)} values from presets and defaults ({soft / max(len(given), 1):.0%}) are remembered or assumed ≈; the others are read, digitized or derived."
