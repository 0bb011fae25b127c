"""What the reader should know about this design's numbers, gathered in the order of the light; the setting's caution last."""

from collections import Counter
from collections.abc import Iterator, Mapping

from optics.fiberscope import Fiberscope
from optics.report.caveats_back import of_body, of_detail
from optics.report.caveats_light import of_bends, of_coverage, of_lamp, of_ports
from optics.spec import Caveat
from optics.tables import Sourced

CAUTIONS = {
    "industrial": (
        "Bright light at the exit face can hurt eyes and skin, the face and the cable's ends get hot, and a lamp-fed guide "
        "is not exempt in explosive atmospheres. This is a screening estimate; local codes and licensed practice decide."
    ),
    "clinical": (
        "A clinical device requires regulated design review; this is a screening estimate and certifies nothing. Light, heat "
        "and sterilization at the patient are judged by the current standards and by measurement."
    ),
}


def caveats(
    fiberscope: Fiberscope,
    value: Mapping[str, float],
    sourced: Mapping[str, Sourced] | None,
) -> tuple[Caveat, ...]:
    """All caveats of one design, in the order of the light; the setting's caution last."""
    found = [
        *of_lamp(fiberscope, value),
        *of_coverage(fiberscope),
        *of_bends(fiberscope),
        *of_ports(fiberscope, value),
        *of_detail(fiberscope, value),
        *of_body(fiberscope, value),
        *_basis(sourced),
    ]
    return (*found, Caveat("setting", CAUTIONS[fiberscope.setting]))


def _basis(sourced: Mapping[str, Sourced] | None) -> Iterator[Caveat]:
    """How many of the values in force rest on memory or on an assumption."""
    if not sourced:
        return
    bases = Counter(item.basis for item in sourced.values() if item.source != "own_scenario")
    soft = bases["remembered"] + bases["assumed"]
    if soft:
        paths = [path for path, item in sourced.items() if item.basis == "remembered" and item.low is not None]
        named = ", ".join(paths[:4]) + (" and more" if len(paths) > 4 else "")
        yield Caveat(
            "sources",
            f"{soft} of {sum(bases.values())} preset values are remembered or assumed"
            + (f" (such as {named})." if named else "."),
        )
