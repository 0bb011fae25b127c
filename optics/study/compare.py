"""Two to four designs side by side: each number with its difference and what makes it, and where one overtakes the other."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from optics.chain.columns import columns
from optics.chain.evaluate import evaluate
from optics.fiberscope import Fiberscope
from optics.presets import Design
from optics.report.answer import Report
from optics.report.size import report_of
from optics.spec import OutOfRange
from optics.study.compare_cross import Crossover, crossovers
from optics.study.compare_words import because
from optics.units import AnyUnit

FEWEST, MOST = 2, 4
# The numbers that are compared, in the order of the light, and where the report has them.
QUANTITIES = {
    "delivered_lm": "light",
    "transmission": "light",
    "exit_na": "light",
    "color_temperature_k": "light",
    "color_rendering_index": "light",
    "target_center_lux": "summary",
    "target_mean_lux": "summary",
    "target_min_lux": "summary",
    "evenness": "summary",
    "field_of_view_deg": "summary",
    "smallest_gap_mm": "summary",
    "smallest_line_mm": "summary",
    "exposure_s": "detail",
    "outer_diameter_mm": "summary",
    "bend_radius_mm": "summary",
    "rigid_tip_mm": "summary",
}
ALIKE = 1e-9  # relative difference below which two numbers are the same


@dataclass(frozen=True, slots=True)
class Difference:
    """One number of a design against the same of the first; None where a design has no such number (nothing resolved).

    `difference` is value less reference, in the unit of the quantity; `because` names the step of the light, or the part
    of the way back or of the body, that makes most of it.
    """

    quantity: str
    of: str
    against: str
    value: AnyUnit | None
    reference: AnyUnit | None
    difference: AnyUnit | None
    because: str


@dataclass(frozen=True, slots=True)
class Comparison:
    """The designs as reports, the differences of each from the first, and the crossovers of each pair."""

    designs: tuple[Report, ...]
    differences: tuple[Difference, ...]
    crossovers: tuple[Crossover, ...]

    def as_dict(self) -> dict[str, Any]:
        """The JSON of `compare`."""
        kept = "design_hash name setting summary light target detail fit needs".split()
        return {
            "designs": [{key: whole[key] for key in kept} for whole in (report.as_dict() for report in self.designs)],
            "differences": [{key: getattr(row, key) for key in Difference.__slots__} for row in self.differences],
            "crossovers": [{key: getattr(row, key) for key in Crossover.__slots__} for row in self.crossovers],
        }


def compare(designs: Sequence[Design], names: Sequence[str] | None = None) -> Comparison:
    """Two to four designs against the first; `names` to call them by (absent: their own).

    Raises OutOfRange for another number of designs.
    """
    if not FEWEST <= len(designs) <= MOST:
        raise OutOfRange(f"{len(designs)} designs are given; compare takes {FEWEST} to {MOST}.")
    called = distinct_names(names or [design.fiberscope.name for design in designs])
    reports, rows = differences(designs, called)
    return Comparison(reports, rows, crossovers([design.fiberscope for design in designs], called))


def differences(designs: Sequence[Design], names: Sequence[str]) -> tuple[tuple[Report, ...], tuple[Difference, ...]]:
    """The designs as reports, and the numbers of each against the first."""
    scopes = [design.fiberscope for design in designs]
    figures = evaluate(columns(scopes))
    reports = tuple(report_of(scope, figures, row, designs[row].sourced) for row, scope in enumerate(scopes))
    told = [
        {
            "scope": scope,
            "report": reports[row],
            "value": {name: float(found[row]) for name, found in figures.value.items()},
            "lamp": figures.spectrum_w_nm["lamp"][row],
            "name": names[row],
        }
        for row, scope in enumerate(scopes)
    ]
    rows = (_difference(quantity, part, told[0], other) for quantity, part in QUANTITIES.items() for other in told[1:])
    return reports, tuple(row for row in rows if row is not None)


def distinct_names(names: Sequence[str]) -> list[str]:
    """Names that differ: a repeated one gets its number.

    >>> distinct_names(["scope", "probe", "scope"])
    ['scope', 'probe', 'scope (3)']
    """
    return [name if names.index(name) == place else f"{name} ({place + 1})" for place, name in enumerate(list(names))]


def _difference(quantity: str, part: str, first: Mapping[str, Any], other: Mapping[str, Any]) -> Difference | None:
    reference, value = (_number(each["report"], part, quantity) for each in (first, other))
    if reference is None and value is None:
        return None
    if reference is None or value is None:
        lacking = first if reference is None else other
        said = _lacking(quantity, lacking["scope"], lacking["name"])
        return Difference(quantity, other["name"], first["name"], value, reference, None, said)
    alike = abs(value - reference) <= ALIKE * max(abs(value), abs(reference))
    said = "the same" if alike else because(quantity, first, other)
    return Difference(quantity, other["name"], first["name"], value, reference, value - reference, said)


def _number(report: Report, part: str, quantity: str) -> float | None:
    table = getattr(report, part)
    return None if table is None else getattr(table, quantity)


def _lacking(quantity: str, scope: Fiberscope, name: str) -> str:
    table = {
        "smallest_gap_mm": "image",
        "smallest_line_mm": "image",
        "exposure_s": "image",
        "field_of_view_deg": "image",
    }
    holder = table.get(quantity, "scene" if quantity.startswith(("target", "evenness")) else "body")
    if getattr(scope, holder) is None:
        return f"{name} has no {holder}"
    return f"{name} resolves nothing" if quantity.startswith("smallest") else f"{name} has no such number"
