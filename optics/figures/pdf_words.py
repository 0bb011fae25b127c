"""What the PDF report says: rows of words for its tables, from one design's answer. No drawing."""

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from optics.figures.canvas import seconds, three
from optics.needs import AT_MOST
from optics.presets import Document, value_at
from optics.report.answer import ExposureLine, Report
from optics.report.reasons import limit_reason
from optics.report.verdict import NAMES, UNITS
from optics.study.working_range import RangeCurves
from optics.tables import UNSOURCED, Sourced, sources
from optics.units import unit_of

MET, SHORT, OPEN, SOFT = "✓", "✗", "○", "≈"
SCREENING = "A screening estimate: it certifies nothing."
SOFT_BASES = ("assumed", "remembered")
BOOKS = {"trade": "common practice, no source", "assumed": "assumed", "own_scenario": "given by this design"}
ORDER = ("", "source", "guide", "scene", "image", "viewer", "body", "needs")

Pair = tuple[str, str]


@dataclass(frozen=True, slots=True)
class Need:
    """One need: a mark, its name, what is wanted and got, the margin in words and as a share (None: nothing reached)."""

    mark: str
    name: str
    wanted: str
    got: str
    margin: str
    margin_share: float | None
    met: bool


@dataclass(frozen=True, slots=True)
class Value:
    """One value in force: name, value, tolerance, source with the place in it, basis (soft ones marked)."""

    name: str
    value: str
    tolerance: str
    source: str
    basis: str
    soft: bool


@dataclass(frozen=True, slots=True)
class Table:
    """One table of the design: its preset, what the design gives itself, what came from elsewhere, or `same` as another's."""

    path: str
    preset: str
    given: tuple[Pair, ...]
    values: tuple[Value, ...]
    same: str = ""


def sentence_case(text: str) -> str:
    return text[:1].upper() + text[1:]


def parted(said: str) -> Pair:
    """The first clause of an answer, and the rest as sentences of its own.

    >>> parted("Meets all 7 needs; the closest is the rigid tip: 12 mm. More."), parted("Delivers 0.119 lm.")
    (('Meets all 7 needs.', 'The closest is the rigid tip: 12 mm. More.'), ('Delivers 0.119 lm.', ''))
    """
    found = re.match(r"(.+?)(?:[.;] |\.?$)(.*)", said)
    return found[1] + ".", sentence_case(found[2])


def with_unit(value: float | None, unit: str) -> str:
    if value is None:
        return "none"
    return f"{three(value).replace('-', '−')}{'' if unit == '°' else ' '}{unit}".rstrip()


def headline(report: Report) -> list[tuple[str, str, str]]:
    """(name, number, meaning) of the headline numbers that the design has."""
    summary, light = report.summary, report.light
    found = []
    if report.target:
        found.append(("Light at center", with_unit(summary.target_center_lux, "lx"), "where the axis meets the target"))
    if summary.evenness is not None:
        found.append(("Evenness", three(summary.evenness), "least over mean in the field"))
    if report.detail:
        found += [
            ("Smallest gap", with_unit(summary.smallest_gap_mm, "mm"), "half a line pair, worst direction"),
            ("Thinnest line", with_unit(summary.smallest_line_mm, "mm"), "a single dark line"),
            ("Field of view", with_unit(summary.field_of_view_deg, "°"), "full angle, in the medium"),
        ]
    if report.fit:
        found.append(("Outer diameter", with_unit(summary.outer_diameter_mm, "mm"), "of the insertion tube"))
        found.append(("Bend radius", with_unit(summary.bend_radius_mm, "mm"), "the least that the tube takes"))
    share = f"{three(light.transmission * 100)} % of the lamp's light"
    found.append(("Delivered", with_unit(light.delivered_lm, "lm"), share))
    if len(found) < 6:
        found += [
            ("Exit NA", three(light.exit_na), "holds 95 % of the lumens"),
            ("Color", with_unit(light.color_temperature_k, "K"), f"Ra {light.color_rendering_index:.0f}"),
            ("Power", with_unit(light.delivered_w, "W"), "out of the exit face"),
        ]
    return found[:8]


def needs(report: Report) -> list[Need]:
    """Each need with its margin, those that are short first, the shortest on top."""
    order = sorted(report.needs, key=lambda line: (line.met, float("-inf") if line.margin is None else line.margin))
    return [
        Need(
            MET if line.met else SHORT,
            sentence_case(NAMES[line.name].removeprefix("the ")),
            f"{'at most' if line.name in AT_MOST else 'at least'} {line.wanted:.4g}".replace("e+0", "e")
            + f" {_need_unit(line.name)}".rstrip(),
            "nothing" if line.got is None else with_unit(line.got, _need_unit(line.name)),
            margin(line.margin, line.name),
            line.margin,
            line.met,
        )
        for line in order
    ]


def _need_unit(name: str) -> str:
    unit = unit_of(name) or ""
    return {"w_m2": "W/m²", "deg": "°"}.get(unit, UNITS.get(unit, ""))


def margin(share: float | None, name: str) -> str:
    """A relative margin in percent; as a multiple where percent stop helping.

    >>> margin(0.17, "rigid_tip_mm"), margin(-0.135, "evenness"), margin(172.4, "target_center_lux"), margin(None, "evenness")
    ('+17 %', '−14 %', '173 times', 'nothing reached')
    """
    if share is None:
        return "nothing reached"
    if name not in AT_MOST and share > 2:
        return f"{1 + share:.3g} times"
    return f"{share:+.0%}".replace("%", " %").replace("-", "−")


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
            ("resolved at the target", summary.resolved_lp_mm, "lp/mm"),
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
            ("free area", found.free_area_mm2, "mm²"),
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
    unit = "" if line.unit == "1" else re.sub(r"(?<=m)2", "²", line.unit)
    value = "not assessed" if line.value is None else with_unit(line.value, unit)
    return screened(line), sentence_case(line.name), value, with_unit(line.limit, unit), sentence_case(line.because) + "."


def screening_count(report: Report) -> str:
    marks = [screened(line) for line in report.exposure]
    return (
        f"{marks.count(SHORT)} of {len(marks)} lines exceed their screening figure {SHORT}, {marks.count(MET)} stay below it {MET}, "
        f"{marks.count(OPEN)} have no figure or no data {OPEN}. {SCREENING} The current edition of each standard and "
        "measurement decide."
    )


# Every value and where it comes from


def softness(sourced: Mapping[str, Sourced]) -> str:
    """How many of the values that the design does not state itself rest on memory or on an assumption."""
    elsewhere = [found for found in sourced.values() if found.source != "own_scenario"]
    soft = sum(found.basis in SOFT_BASES for found in elsewhere)
    return (
        f"{soft} of {len(elsewhere)} values from presets and defaults are remembered or assumed {SOFT}; the others are read, "
        "digitized or derived."
    )


def tables(document: Document, sourced: Mapping[str, Sourced]) -> Iterator[Table]:
    """Every value in force by the design's tables, in the order of the light; a table that repeats another says so."""
    groups: dict[str, dict[str, Sourced]] = {}
    for path, found in sourced.items():
        table, _, name = path.rpartition(".")
        groups.setdefault(table, {})[name] = found
    told: dict[tuple[tuple[str, Sourced], ...], str] = {}
    for path in sorted(groups, key=lambda path: ORDER.index(path.partition(".")[0])):
        group = groups[path]
        given = tuple((name, exact(found.value)) for name, found in group.items() if found.source == "own_scenario")
        elsewhere = tuple((name, found) for name, found in group.items() if found.source != "own_scenario")
        preset = value_at(document, f"{path}.preset") or ""
        key = tuple((name, Sourced(repr(found.value), *_rest(found))) for name, found in elsewhere)
        same = told.setdefault(key, path) if len(elsewhere) > 2 else path
        values = tuple(_value(name, found) for name, found in elsewhere) if same == path else ()
        yield Table(path, str(preset), given, values, "" if same == path else same)


def _rest(found: Sourced) -> tuple[Any, ...]:
    return found.low, found.high, found.source, found.at, found.basis


def _value(name: str, found: Sourced) -> Value:
    curve = isinstance(found.value, str) and found.value.startswith("curve")
    bounds = [None if bound is None else ("×" if curve else "") + f"{bound:.6g}" for bound in (found.low, found.high)]
    tolerance = "" if bounds == [None, None] else " – ".join(bound or "…" for bound in bounds)
    soft = found.basis in SOFT_BASES
    return Value(name, exact(found.value), tolerance, source(found), f"{SOFT} {found.basis}" if soft else found.basis, soft)


def source(found: Sourced) -> str:
    """The title of a value's source and the place in it."""
    book = sources().get(found.source, {})
    title = BOOKS[found.source] if found.source in UNSOURCED else ", ".join(
        str(book[key]) for key in ("title", "year") if book.get(key)
    )  # fmt: skip
    return f"{title or found.source}: {found.at}" if found.at else title or found.source


def exact(value: Any) -> str:
    """A value as it was given, never rounded to other than what is meant.

    >>> exact(1.8), exact(400.0), exact("solve"), exact(True), exact([{"radius_mm": 30.0, "angle_deg": 90.0}]), exact([])
    ('1.8', '400', 'solve', 'yes', '(radius_mm 30, angle_deg 90)', 'none')
    """
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, Mapping):
        return "(" + ", ".join(f"{key} {exact(item)}" for key, item in value.items()) + ")"
    if isinstance(value, list | tuple):
        return ", ".join(exact(item) for item in value) or "none"
    return f"{value:.6g}" if isinstance(value, float | int) else str(value)
