"""A comparison in words and rows for the screen: who leads in what, each difference with its reason, crossovers, the split."""

import re
from dataclasses import dataclass

from optics.needs import AT_MOST, NeedLine
from optics.report.answer import Report
from optics.study.compare import QUANTITIES, Difference
from optics.study.compare_cross import ALONG, RANGES, Crossover
from optics.ui.names import field_name
from optics.ui.rows import Columns, columns
from optics.ui.words import number, percent, plain, sentence_case, unit

NAMES = {
    "delivered_lm": "delivered light",
    "transmission": "share of the lamp's light",
    "exit_na": "exit NA",
    "color_temperature_k": "color temperature",
    "color_rendering_index": "color rendering index",
    "smallest_line_mm": "thinnest line",
    "target_mean_lux": "mean light in the field",
    "exposure_s": "exposure",
}
LEADS = {  # what people ask first: who is best in it, and whether less is better
    "target_center_lux": ("most light at the center", False),
    "delivered_lm": ("most light", False),
    "smallest_gap_mm": ("finest detail", True),
    "outer_diameter_mm": ("thinnest tube", True),
    "bend_radius_mm": ("tightest bend", True),
    "color_rendering_index": ("truest color", False),
}
AHEAD = {
    "delivered_lm": "more lumens",
    "color_temperature_k": "bluer light",
    "color_rendering_index": "truer colors",
    "smallest_gap_mm": "finer detail",
}
CLEAR = 0.01  # a lead below this share is none


@dataclass(frozen=True, slots=True)
class Side:
    """One number of all designs; None where one has no such number."""

    quantity: str
    values: tuple[float | None, ...]


def called(quantity: str) -> str:
    return NAMES.get(quantity) or field_name(quantity, f"needs.{quantity}")


def amount(quantity: str, value: float | None) -> str:
    if value is None:
        return "–"
    if quantity == "exposure_s" and value < 1:
        return f"{number(value * 1e3)} ms"
    sign = unit(quantity)
    return f"{number(value)}{'' if sign == '°' else ' '}{sign}".rstrip()


def sides(differences: tuple[Difference, ...], names: list[str]) -> list[Side]:
    """The numbers side by side, in the order of the light."""
    found = []
    for quantity in QUANTITIES:
        mine = {row.of: row for row in differences if row.quantity == quantity}
        if mine:
            reference = next(iter(mine.values())).reference
            found.append(
                Side(quantity, (reference, *(mine[name].value if name in mine else None for name in names[1:])))
            )
    return found


def side_table(found: list[Side], names: list[str]) -> Columns:
    """Each number that differs, of each design, with its change from the first."""
    rows = []
    for side in found:
        if not _same(side):
            cells = (_cell(side.quantity, value, side.values[0], place) for place, value in enumerate(side.values))
            rows.append((called(side.quantity), *cells))
    return columns(("", *(plain(name) for name in names)), rows)


def same_words(found: list[Side]) -> str:
    """The numbers that are the same in all."""
    same = [f"{called(side.quantity)} {amount(side.quantity, side.values[0])}" for side in found if _same(side)]
    return f"The same in all: {', '.join(same)}." if same else ""


def _same(side: Side) -> bool:
    return all(value is not None and not moved_by(value, side.values[0]) for value in side.values) and (
        side.values[0] != 0 or not any(side.values)
    )


def _cell(quantity: str, value: float | None, reference: float | None, place: int) -> str:
    said = plain(_whole(amount(quantity, value)))
    moved = "" if place == 0 else _whole(moved_by(value, reference))
    return f"{said} :gray[{plain(moved)}]" if moved else said


def _whole(said: str) -> str:
    """A number that keeps its unit beside it on a narrow screen."""
    return said.replace(" ", "\u00a0")


def moved_by(value: float | None, reference: float | None) -> str:
    """How far a number is from the reference's.

    >>> moved_by(1.2, 1.0), moved_by(12.0, 1.0), moved_by(1.0, 1.0), moved_by(None, 1.0), moved_by(0.05, 1.0)
    ('+20 %', '×12', '', '', '÷20')
    """
    if not value or not reference or abs(value / reference - 1) < 5e-4:
        return ""
    ratio = value / reference
    if ratio >= 3 or ratio <= 1 / 3:
        return f"×{ratio:.3g}" if ratio > 1 else f"÷{1 / ratio:.3g}"
    return percent(ratio - 1, 1 if abs(ratio - 1) < 0.1 else 0)


# The answer


def headline(reports: tuple[Report, ...], found: list[Side], names: list[str]) -> tuple[str, list[str]]:
    """The answer in one line: who meets what is asked, else who leads; and what stands behind it."""
    asked = [report for report in reports if report.needs]
    led = leaders(found, names)
    told = [_why(report, name) for report, name in zip(reports, names) if _misses(report)]
    if not asked:
        return _leading(led, names), [*told, *led.values()]
    good = [name for report, name in zip(reports, names) if not _misses(report)]
    if len(good) == len(names):
        first = f"{'Both' if len(names) == 2 else 'All'} meet what is asked of them"
    elif good:
        first = f"{_listed(good)} meet{'s' if len(good) == 1 else ''} all that is asked"
        first += ", the others do not" if len(names) - len(good) > 1 else ", the other does not"
    else:
        first = "None meets all that is asked"
    return f"{sentence_case(first)}.", [*told, *led.values()]


def _why(report: Report, name: str) -> str:
    """What a design misses, in one sentence."""
    return f"{sentence_case(name)} misses {_listed(_misses(report))}."


def _misses(report: Report) -> list[str]:
    """The needs that a design misses, with their numbers, and what it does not pass."""
    missed = [f"the {called(line.name)} ({_missed(line)})" for line in report.needs if not line.met]
    if report.fit is not None and report.fit.passes is False:
        missed.append("the bore")
    return missed


def _missed(line: NeedLine) -> str:
    got = "nothing" if line.got is None else amount(line.name, line.got)
    return f"{got}, {'at most' if line.name in AT_MOST else 'at least'} {amount(line.name, line.wanted)}"


def leaders(found: list[Side], names: list[str]) -> dict[str, str]:
    """What people ask first, and who is best in it by how much, as a sentence."""
    told = {}
    lit = any(side.quantity == "target_center_lux" for side in found)
    for side in found:
        if side.quantity not in LEADS or (side.quantity == "delivered_lm" and lit):
            continue
        what, least = LEADS[side.quantity]
        known = sorted(
            ((value, place) for place, value in enumerate(side.values) if value is not None), reverse=not least
        )
        if len(known) < 2:
            continue
        (first, place), (second, other) = known[:2]
        if max(first, second) > (1 + CLEAR) * min(first, second):
            said = f"{amount(side.quantity, first)} against {amount(side.quantity, second)} of {names[other]}"
            told[what] = f"{sentence_case(what)}: {names[place]}, {said}."
    return told


def _leading(led: dict[str, str], names: list[str]) -> str:
    if not led:
        return f"{sentence_case(_listed(names))} differ in nothing that is asked first."
    what, said = next(iter(led.items()))
    return f"{sentence_case(said.partition(': ')[2].partition(',')[0])} has the {what}."


def _listed(said: list[str]) -> str:
    return said[0] if len(said) == 1 else f"{', '.join(said[:-1])} and {said[-1]}"


def why(differences: tuple[Difference, ...], of: str) -> Columns:
    """What makes each difference of one design from the first."""
    rows = [
        (
            called(row.quantity),
            plain(_change(row)),
            plain(sentence_case(_typeset(row.because))),
        )
        for row in differences
        if row.of == of and row.because != "the same"
    ]
    return columns(("number", "difference", "why"), rows)


def _typeset(said: str) -> str:
    """A reason with true minus and times signs.

    >>> _typeset("mostly the cone: x 0.160 against x 1.000, by -10.1 K, not by 50%")
    'mostly the cone: × 0.160 against × 1.000, by −10.1 K, not by 50 %'
    """
    return re.sub(r"(?<=\d)%", " %", re.sub(r"(?<!\w)-(?=\d)", "−", said.replace(" x ", " × ")))


def _change(row: Difference) -> str:
    if row.difference is None:
        return "none" if row.value is None else amount(row.quantity, row.value)
    sign = "+" if row.difference > 0 else "−"
    share = moved_by(row.value, row.reference)
    return _whole(f"{sign}{amount(row.quantity, abs(row.difference))}") + (f" ({_whole(share)})" if share else "")


# Crossovers


def crossings(found: tuple[Crossover, ...], path: str) -> tuple[list[str], str]:
    """The crossovers along one path as sentences, nearest first; and where one stays ahead."""
    what, sign = ALONG[path]
    mine = [row for row in found if row.path == path]
    met: dict[tuple[str, str, str], list[str]] = {}
    for row in sorted((row for row in mine if row.value is not None), key=lambda row: row.value):
        met.setdefault((number(row.value), row.ahead, _other(row)), []).append(AHEAD[row.quantity])
    said = [
        f"**Beyond a {what} of {value} {sign}** {plain(ahead)} overtakes {plain(other)}\\: {_listed(gains)}."
        for (value, ahead, other), gains in met.items()
    ]
    low, high = RANGES[path]
    ahead: dict[str, list[str]] = {}
    for row in mine:
        if row.value is None and row.ahead:
            ahead.setdefault(f"{row.ahead} over {_other(row)}", []).append(AHEAD[row.quantity])
    if ahead:
        listed = "; ".join(f"{who}: {_listed(list(dict.fromkeys(what)))}" for who, what in ahead.items())
        return said, f"All along from {low:g} to {high:g} {sign}: {listed}."
    return said, "" if said else f"The {what} tells them nowhere apart, or not both have one."


def _other(row: Crossover) -> str:
    return row.between[1] if row.ahead == row.between[0] else row.between[0]
