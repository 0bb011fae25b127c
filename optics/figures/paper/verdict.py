"""What the first page says: the answer in two parts, headline numbers, needs with their margins, what would meet them all."""

import re
from dataclasses import dataclass

from optics.figures.canvas import three
from optics.figures.paper.words import MET, SHORT, sentence_case, with_unit
from optics.needs import AT_MOST
from optics.report.answer import Report
from optics.report.verdict import NAMES, UNITS
from optics.study.smallest_change import Change
from optics.units import unit_of


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


def parted(said: str) -> tuple[str, str]:
    """The first clause of an answer, and the rest as sentences of its own.

    >>> parted("Meets all 7 needs; the closest is the rigid tip: 12 mm. More."), parted("Delivers 0.119 lm.")
    (('Meets all 7 needs.', 'The closest is the rigid tip: 12 mm. More.'), ('Delivers 0.119 lm.', ''))
    """
    found = re.match(r"(.+?)(?:[.;] |\.?$)(.*)", said)
    return found[1] + ".", sentence_case(found[2])


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
            f"{'at most' if line.name in AT_MOST else 'at least'} {_asked(line.wanted, _need_unit(line.name))}",
            "nothing" if line.got is None else with_unit(line.got, _need_unit(line.name)),
            margin(line.margin, line.name),
            line.margin,
            line.met,
        )
        for line in order
    ]


def _asked(value: float, unit: str) -> str:
    """A need as it was set, not rounded."""
    return f"{value:,.6g}{'' if unit == '°' else ' '}{unit}".rstrip()


def _need_unit(name: str) -> str:
    unit = unit_of(name) or ""
    return {"w_m2": "W/m²", "deg": "°"}.get(unit, UNITS.get(unit, ""))


def margin(share: float | None, name: str) -> str:
    """A relative margin in percent; as so many times what is wanted where percent stop helping.

    >>> margin(0.17, "rigid_tip_mm"), margin(-0.135, "evenness"), margin(172.4, "target_center_lux"), margin(None, "evenness")
    ('+17 %', '−14 %', '173 times', '–')
    >>> margin(-11.2, "smallest_gap_mm"), margin(0.001, "rigid_tip_mm")
    ('12.2 times', '0 %')
    """
    if share is None:
        return "–"
    if name not in AT_MOST and share > 2:
        return f"{1 + share:.3g} times"
    if share < -1:
        return f"{1 - share:.3g} times"
    return f"{share:+.0%}".replace("+0%", "0%").replace("%", " %").replace("-", "−")


def change(needs_met: bool | None, found: Change | None) -> str:
    """The smallest change of one number that would meet all needs, where some are not met."""
    if needs_met is not False:
        return ""
    if found is None:
        return "No single number, moved within what is usual, would meet all that is asked."
    unit = {"um": "µm", "deg": "°", "mm2": "mm²"}.get(unit_of(found.path) or "", unit_of(found.path) or "")
    unit = "" if unit in ("1", "count") else unit
    moved = f"{found.path} from {found.before:,.5g} to {found.after:,.5g} {unit}".rstrip()
    return f"The smallest change of one number that meets all that is asked: {moved}."
