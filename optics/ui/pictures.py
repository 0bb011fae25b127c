"""Pictures of an answer, kept for a while by design, name and theme; a picture that a design has no use for is left out.

Lines and letters go out as SVG, which draws in a third of the time of a PNG and is sharp on any screen and in print;
maps go out as PNG.
"""

from collections.abc import Callable
from typing import Any

import streamlit as st

from optics.fiberscope import Fiberscope
from optics.figures import body, detail, export, light, strip, target, working_range
from optics.figures.palette import DARK, LIGHT
from optics.presets import Design
from optics.report import views
from optics.report.answer import Report
from optics.spec import OutOfRange
from optics.study.working_range import RangeCurves, over_distance

DPI = 200  # of a PNG: two device pixels for each pixel of the page
MAPS = ("map",)
KEPT = 160
MAP_POINTS, CURVE_POINTS = 121, 41


def is_dark() -> bool:
    """Whether the page is shown dark."""
    return st.context.theme.type == "dark"


def show(name: str, design: Design, report: Report, alt: str) -> bool:
    """Show one picture over the whole width; False where there is none."""
    picture = _picture(name, report.design_hash, is_dark(), design.fiberscope, report)
    if picture is None:
        return False
    st.image(picture, width="stretch", alt=alt)
    return True


@st.cache_data(max_entries=KEPT, show_spinner=False)
def _picture(name: str, design_hash: str, dark: bool, _fiberscope: Fiberscope, _report: Report) -> bytes | str | None:
    seen, draw = FIGURES[name]
    try:
        found = seen(_fiberscope, _report)
        if found is None:
            return None
        figure = draw(found, palette=DARK if dark else LIGHT)
    except OutOfRange:
        return None
    return export.png(figure, DPI) if name in MAPS else export.svg(figure).decode("utf-8")


@st.cache_data(max_entries=16, show_spinner=False)
def range_curves(design_hash: str, _fiberscope: Fiberscope) -> RangeCurves | None:
    """The numbers over the working distance, for the picture and for its table."""
    try:
        return over_distance(_fiberscope, CURVE_POINTS)
    except OutOfRange:
        return None


def _report(fiberscope: Fiberscope, report: Report) -> Report:
    return report


def _map(fiberscope: Fiberscope, report: Report) -> views.TargetMap | None:
    return views.target_map(fiberscope, MAP_POINTS)


# What each picture shows, and how it is drawn.
FIGURES: dict[str, tuple[Callable[[Fiberscope, Report], Any], Callable[..., Any]]] = {
    "strip": (_report, strip.light_strip),
    "strip_narrow": (_report, lambda report, palette: strip.light_strip(report, palette=palette, narrow=True)),
    "budget": (_report, light.budget),
    "spectra": (lambda fiberscope, _: views.spectra(fiberscope), light.spectra),
    "map": (_map, target.irradiance_map),
    "profile": (_map, target.profile),
    "ledger": (_report, detail.ledger),
    "section": (lambda fiberscope, _: views.section_view(fiberscope), body.section),
    "passage": (lambda fiberscope, _: views.passage_view(fiberscope), body.passage),
    "range": (lambda fiberscope, report: range_curves(report.design_hash, fiberscope), working_range.curves),
}
