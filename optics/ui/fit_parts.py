"""The words, tables and controls of the page on the fit."""

from dataclasses import replace

import streamlit as st

from optics.fiberscope import Fiberscope
from optics.report.answer import Report
from optics.report.view_fit import FillView, Weight
from optics.report.view_handling import FRICTION, BendingView, Bent, Heat, Slide, pushes
from optics.report.view_passage import PassageLimits, entry_tilts
from optics.ui import drawings, fit_words, headline
from optics.ui.rows import Columns, columns
from optics.ui.sketch import Sketch
from optics.ui.words import number, plain

NEEDS = ("outer_diameter_mm", "bend_radius_mm", "rigid_tip_mm")
SLIDING = "Parts off the axis slide along the tube in a bend toward their side: as much slack must find room."
PUSHING = "Over that in a straight bore, by friction alone: an orientation. Three or four quarter turns are the practical end."
VARIED = {
    "outer diameter of the tube": "outer_diameter_mm",
    "length of the rigid tip": "rigid_tip_mm",
    "bend radius of the bore": "centerline_radius_mm",
}


def answer(here: Sketch, limits: PassageLimits | None) -> None:
    """Whether it fits and passes, what would do where it does not, and what passing alone does not tell."""
    report, scope = here.report, here.design.fiberscope
    mark, first, rest = fit_words.verdict(report, scope, limits)
    st.header(f"{mark} {plain(first)}", anchor=False)
    st.markdown(plain(rest))
    for said in fit_words.warnings(*(drawings.view(name, here) for name in ("fill", "bending", "heats"))):
        st.markdown(f":orange[**✗ {plain(said)}**]")
    headline.needs(of_body(report))


def of_body(report: Report) -> Report:
    """The report with the needs that its body answers."""
    return replace(report, needs=tuple(line for line in report.needs if line.name in NEEDS))


def fill_table(fill: FillView) -> Columns:
    rows = [
        ("free behind the tip", f"{number(fill.free_area_mm2)} mm²"),
        ("light fibers take", f"{number(fill.fiber_area_mm2)} mm², {number(100 * fill.fill_fraction, 2)} %"),
        ("free-fill limit", f"{number(100 * fill.limit_fraction, 2)} %"),
        ("fibers", f"{fill.fiber_count:,}"),
        ("fibers that room and limit allow", f"{fill.held_count:,}"),
    ]
    return columns(("quantity", "value"), rows)


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
