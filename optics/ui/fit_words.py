"""The fit in words: whether it passes and what would, how full the tube is, what sets its size, how it bends, what it stands."""

from dataclasses import replace

from optics.fiberscope import Fiberscope
from optics.report.answer import FitAnswer, Report
from optics.report.view_fit import FillView, Weight
from optics.report.view_handling import BendingView, Heat
from optics.report.view_passage import PassageLimits
from optics.ui.names import choice
from optics.ui.words import number, sentence_case

SPARE = 0.005  # of the lumen: less is said of no tube
SENSIBLE = 0.4  # of the tube's diameter: a thinner one is no way out


def verdict(report: Report, scope: Fiberscope, limits: PassageLimits | None) -> tuple[str, str, str]:
    """(mark, the answer, what stands behind it)."""
    fit, passage, tip = report.fit, scope.body.passage, report.summary.rigid_tip_mm
    tube = number(fit.outer_diameter_mm)
    if fit.needed_diameter_mm is not None:
        first = (
            f"The parts do not fit: they need a tube of {number(fit.needed_diameter_mm)} mm, this one has {tube} mm."
        )
        rest = f"They take a lumen of {number(fit.needed_lumen_mm)} mm, the tube leaves {number(fit.lumen_mm)} mm."
        return "✗", first, rest
    if passage is None or passage.bore_mm is None:
        return "○", f"The parts fit a tube of {tube} mm.", "No bore is asked for, so nothing is said of passing one."
    bore = number(passage.bore_mm)
    if fit.outer_diameter_mm > passage.bore_mm:
        return "✗", f"The tube of {tube} mm does not enter the bore of {bore} mm.", _instead(limits, None)
    if limits is None:
        return "✓", f"It fits and enters: a tube of {tube} mm in a bore of {bore} mm.", "No elbow is asked for."
    longest = number(limits.longest_tip_mm)
    flexes = f"the tube bends to {_apart(fit.bend_radius_mm, fit.passable_radius_mm)} mm"
    flexes += f", the bore gives {_apart(fit.passable_radius_mm, fit.bend_radius_mm)} mm"
    too_stiff = fit.bend_radius_mm > fit.passable_radius_mm
    if tip is not None and tip > limits.longest_tip_mm:
        first = f"The tip passes the bore, but its {number(tip)} mm are too long for the elbow: {longest} mm at most"
        if too_stiff:
            return "✗", f"{first}.", f"It is too stiff as well: {flexes}. {_instead(limits, tip)}"
        thin = limits.widest_tube_mm is not None and limits.widest_tube_mm > SENSIBLE * fit.outer_diameter_mm
        thinner = f", or a tube of {number(limits.widest_tube_mm)} mm" if thin else ""
        return "✗", f"{first}{thinner}.", _instead(replace(limits, widest_tube_mm=None), tip)
    if too_stiff:
        return (
            "✗",
            "The tip passes the bore, but the tube is too stiff for its elbow.",
            _sentence(flexes) + _instead(limits, tip),
        )
    room = (
        f"The tip of {number(tip)} mm has room, up to {longest} mm pass the elbow"
        if tip is not None
        else (f"A rigid tip of up to {longest} mm would pass the elbow")
    )
    return "✓", f"It fits and passes: a tube of {tube} mm in a bore of {bore} mm.", f"{room}; {flexes}."


def _instead(limits: PassageLimits | None, tip: float | None) -> str:
    """What would let it through: a thinner tube, a gentler bore."""
    ways = []
    if limits is not None and limits.widest_tube_mm is not None:
        ways.append(f"a tube of {number(limits.widest_tube_mm)} mm")
    if limits is not None and limits.least_centerline_mm is not None:
        ways.append(f"a bore that bends at {number(limits.least_centerline_mm)} mm")
    kept = f"With {number(tip)} mm of rigid tip " if tip is not None and ways else ""
    said = f"{' or '.join(ways)} would do." if ways else "The tube must become thinner."
    return kept + (said if kept else sentence_case(said))


def _sentence(clause: str) -> str:
    return f"{sentence_case(clause)}. "


def _apart(value: float, other: float) -> str:
    """A number in as many digits as tell it from another."""
    return number(value, 3 if number(value) != number(other) else 5)


def fill_words(fill: FillView) -> str:
    """How full the tube is, against what its fibers stand."""
    share, limit = number(100 * fill.fill_fraction, 2), number(100 * fill.limit_fraction, 2)
    where = "is free behind the tip" if fill.fits else "would be free behind the tip in a lumen that holds the parts"
    said = f"The light fibers take {share} % of what {where}, {limit} % at most"
    if fill.fill_fraction <= fill.limit_fraction:
        return f"{said}: they move freely."
    return f"{said}: they chafe and break in bends. A lumen of {number(fill.full_lumen_mm)} mm would do."


def weight_words(found: tuple[Weight, ...], fit: FitAnswer) -> str:
    """What sets the tube's diameter, what comes free, and what a given tube has to spare."""
    setting = [weight for weight in found if not weight.comes_free]
    free = [weight for weight in found if weight.comes_free]
    if not setting:
        return ""
    said = f"{_listed([_named(weight) for weight in setting])} {_plural(setting, 'sets', 'set')} the diameter."
    if free:
        said += (
            f" {_listed([_named(weight) for weight in free])} {_plural(free, 'comes', 'come')} free, beside the others."
        )
    spare = fit.lumen_mm - fit.needed_lumen_mm
    return said + (f" The tube leaves them {number(spare, 2)} mm to spare." if spare > SPARE * fit.lumen_mm else "")


def _plural(group: list[Weight], one: str, several: str) -> str:
    return one if len(group) == 1 and group[0].parts_count == 1 else several


def _named(weight: Weight) -> str:
    return f"the {weight.name}" if weight.parts_count == 1 else f"the {weight.parts_count} {weight.name}s"


def _listed(names: list[str]) -> str:
    said = " and ".join([", ".join(names[:-1]), names[-1]] if len(names) > 1 else names)
    return said[:1].upper() + said[1:]


def bending_words(view: BendingView) -> str:
    """Which part decides the least bend radius, and what steering takes."""
    decides = next(part for part in view.parts if part.decides)
    by = "the handling that is asked" if decides.name == "tube" else f"the strain of the {decides.name}"
    said = f"The tube bends to {number(view.least_radius_mm)} mm at least; {by} decides."
    if view.steered_radius_mm is not None:
        said += f" Steered to {number(view.steered_deg)}° its tip sweeps {number(view.steered_height_mm)} mm across."
    return said


def warnings(fill: FillView, bending: BendingView, heats: tuple[Heat, ...]) -> list[str]:
    """What passing alone does not tell: fibers packed too full, steered too sharply, or too hot."""
    said = []
    if fill.fits and fill.fill_fraction > fill.limit_fraction:
        said.append(fill_words(fill))
    if bending.steered_radius_mm is not None:
        strained = [
            part for part in bending.parts if part.allowed_strain and part.least_radius_mm > bending.steered_radius_mm
        ]
        if strained:
            names = " and the ".join(part.name for part in strained)
            least = number(max(part.least_radius_mm for part in strained))
            said.append(
                f"The steered part bends to {number(bending.steered_radius_mm)} mm, where the {names} would be strained too far; "
                f"they stand {least} mm."
            )
    bad = [heat.name for heat in heats if not heat.stands]
    if bad:
        said.append(f"The {' and the '.join(bad)} cannot stand the heat or the sterilization that is asked.")
    return said


def heat_words(scope: Fiberscope, found: tuple[Heat, ...]) -> str:
    handling = scope.body.handling
    treated = "" if handling.sterilization == "none" else f" and {choice(handling.sterilization)} sterilization"
    bad = [heat.name for heat in found if not heat.stands]
    asked = f"{number(handling.highest_temperature_c)} °C{treated}"
    if bad:
        return f"✗ {_listed([f'the {name}' for name in bad])} cannot stand {asked}."
    both = "Guide and image bundle stand" if len(found) > 1 else "The guide stands"
    return f"✓ {both} {asked}, by temperature; moisture and chemistry need a trial."
