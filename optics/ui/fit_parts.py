"""The words, tables and controls of the page on the fit."""

from dataclasses import replace

import streamlit as st

from optics.fiberscope import Fiberscope
from optics.report.answer import FitAnswer, Report
from optics.report.view_fit import FillView, Weight
from optics.report.view_handling import FRICTION, BendingView, Bent, Heat, Slide, pushes
from optics.report.view_passage import PassageLimits, entry_tilts
from optics.ui import drawings, headline
from optics.ui.names import choice
from optics.ui.rows import Columns, columns
from optics.ui.sketch import Sketch
from optics.ui.words import number, plain, sentence_case

NEEDS = ("outer_diameter_mm", "bend_radius_mm", "rigid_tip_mm")
SLIDING = "Parts off the axis slide along the tube in a bend toward their side: as much slack must find room."
PUSHING = "Over that in a straight bore, by friction alone: an orientation. Three or four quarter turns are the practical end."
SPARE = 0.005  # of the lumen: less is said of no tube
VARIED = {
    "outer diameter of the tube": "outer_diameter_mm",
    "length of the rigid tip": "rigid_tip_mm",
    "bend radius of the bore": "centerline_radius_mm",
}


def answer(report: Report, scope: Fiberscope, limits: PassageLimits | None, fill: FillView) -> None:
    """Whether it fits and passes, and what would do where it does not."""
    mark, first, rest = verdict(report, scope, limits)
    st.header(f"{mark} {plain(first)}", anchor=False)
    st.markdown(plain(rest))
    if fill.fits and fill.fill_fraction > fill.limit_fraction:
        st.markdown(f":orange[**✗ {plain(fill_words(fill))}**]")
    headline.needs(of_body(report))


def of_body(report: Report) -> Report:
    """The report with the needs that its body answers."""
    return replace(report, needs=tuple(line for line in report.needs if line.name in NEEDS))


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
        thinner = "" if limits.widest_tube_mm is None else f", or a tube of {number(limits.widest_tube_mm)} mm"
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
    if fill.fill_fraction <= fill.limit_fraction:
        return f"The light fibers take {share} % of what is free behind the tip, {limit} % at most: they move freely."
    return (
        f"The light fibers take {share} % of what is free behind the tip, {limit} % at most: they chafe and break in bends. "
        f"A lumen of {number(fill.full_lumen_mm)} mm would do."
    )


def fill_table(fill: FillView) -> Columns:
    rows = [
        ("free behind the tip", f"{number(fill.free_area_mm2)} mm²"),
        ("light fibers take", f"{number(fill.fiber_area_mm2)} mm², {number(100 * fill.fill_fraction, 2)} %"),
        ("free-fill limit", f"{number(100 * fill.limit_fraction, 2)} %"),
        ("fibers", f"{fill.fiber_count:,}"),
        ("fibers that room and limit allow", f"{fill.held_count:,}"),
    ]
    return columns(("quantity", "value"), rows)


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


def weight_table(found: tuple[Weight, ...]) -> Columns:
    rows = [
        (
            weight.name if weight.parts_count == 1 else f"{weight.parts_count} {weight.name}s",
            f"{number(weight.diameter_mm)} mm",
            "comes free" if weight.comes_free else f"−{number(weight.adds_mm, 2)} mm",
        )
        for weight in found
    ]
    return columns(("part", "diameter", "tube without it"), rows)


def vary(here: Sketch) -> None:
    """What just passes, over what is varied."""
    said = st.selectbox("What just passes the elbow, over the", list(VARIED), key="fit:vary")
    if not drawings.show("limit", here, "What just passes the bend of the bore", VARIED[said]):
        st.markdown("Nothing to draw: the tube does not enter the bore.")


def bending_words(view: BendingView) -> str:
    """Which part decides the least bend radius, and what the asked one does to the fibers."""
    decides = next(part for part in view.parts if part.decides)
    by = "the handling that is asked" if decides.name == "tube" else f"the strain of the {decides.name}"
    said = f"The tube bends to {number(view.least_radius_mm)} mm at least; {by} decides."
    if view.steered_radius_mm is not None:
        said += f" Steered to {number(view.steered_deg)}° its tip sweeps {number(view.steered_height_mm)} mm across."
        if view.steered_radius_mm < view.least_radius_mm * (1 - 1e-9):
            radius = number(view.steered_radius_mm)
            said += f" ✗ The steered part bends to {radius} mm, sharper than the {decides.name} allow for their life."
    return said


def bending_table(view: BendingView) -> Columns:
    asked = "strain" if view.asked_radius_mm is None else f"strain at {number(view.asked_radius_mm)} mm"
    return columns(("part", asked, "allowed", "least radius"), [_bent(part) for part in view.parts])


def _bent(part: Bent) -> tuple[str, ...]:
    strained = part.strain is not None and part.strain > part.allowed_strain
    share = "–" if part.strain is None else f"{'**✗** ' if strained else ''}{number(100 * part.strain, 2)} %"
    allowed = "–" if part.allowed_strain is None else f"{number(100 * part.allowed_strain, 2)} %"
    least = f"**{number(part.least_radius_mm)} mm**, decides" if part.decides else f"{number(part.least_radius_mm)} mm"
    return f"{part.name}, {part.bends_as}", share, allowed, least


def slide_table(found: tuple[Slide, ...], bend_deg: float) -> Columns:
    rows = [(slide.name, f"{number(slide.offset_mm)} mm", f"{number(slide.slide_mm)} mm") for slide in found]
    return columns(("part", "off the axis", f"slides in {number(bend_deg)}°"), rows)


def turned_deg(scope: Fiberscope) -> float:
    """The largest bend that the tube makes: the bore's or the steered one; a quarter turn where none is asked."""
    passage = scope.body.passage
    steered = passage.bending.angle_deg if passage and passage.bending else 0.0
    return max((passage.bend_deg if passage else None) or 0.0, steered) or 90.0


def heat_table(found: tuple[Heat, ...]) -> Columns:
    rows = [
        (
            "✓" if heat.stands else "**✗**",
            heat.name,
            f"{number(heat.stands_c)} °C",
            f"{number(heat.meets_c)} °C",
            "takes steam" if heat.stands_steam else "no steam",
        )
        for heat in found
    ]
    return columns(("", "part", "stands", "meets", "sterilization"), rows)


def heat_words(scope: Fiberscope, found: tuple[Heat, ...]) -> str:
    handling = scope.body.handling
    treated = "" if handling.sterilization == "none" else f" and {choice(handling.sterilization)} sterilization"
    bad = [heat.name for heat in found if not heat.stands]
    asked = f"{number(handling.highest_temperature_c)} °C{treated}"
    if bad:
        return f"✗ {_listed([f'the {name}' for name in bad])} cannot stand {asked}."
    both = "Guide and image bundle stand" if len(found) > 1 else "The guide stands"
    return f"✓ {both} {asked}, by temperature; moisture and chemistry need a trial."


def push_table(bend_deg: float) -> Columns:
    names = (f"bends of {number(bend_deg)}°", *(f"friction {mu:g}" for mu in FRICTION))
    return columns(
        names, [(str(push.bends_count), *(f"×{number(f)}" for f in push.factors)) for push in pushes(bend_deg)]
    )


def tilt_table(bore_mm: float, tip_mm: float) -> Columns:
    rows = [
        ("a thin wall" if thick == 0 else f"{number(thick)} mm thick", f"{number(lean)}°")
        for thick, lean in entry_tilts(bore_mm, tip_mm)
    ]
    return columns(("wall at the entry", "the tip may lean"), rows)
