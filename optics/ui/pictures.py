"""Pictures of an answer, kept for a while by design, name and theme; a picture that is not there yet is left out.

Lines and letters go out as SVG, which draws in a third of the time of a PNG and is sharp on any screen and in print;
maps go out as PNG.
"""

import importlib
from collections.abc import Callable
from typing import Any

import streamlit as st

from optics.presets import Design
from optics.report.answer import Report
from optics.spec import OutOfRange

DPI = 200  # of a PNG: two device pixels for each pixel of the page
MAPS = ("map",)
KEPT = 160


def is_dark() -> bool:
    """Whether the page is shown dark."""
    return st.context.theme.type == "dark"


def show(name: str, design: Design, report: Report, alt: str) -> bool:
    """Show one picture over the whole width; False where there is none."""
    picture = _picture(name, report.design_hash, is_dark(), design, report)
    if picture is None:
        return False
    st.image(picture, width="stretch", alt=alt)
    return True


@st.cache_data(max_entries=KEPT, show_spinner=False)
def _picture(name: str, design_hash: str, dark: bool, _design: Design, _report: Report) -> bytes | str | None:
    try:
        return _drawn(name, dark, _design, _report)
    except (ModuleNotFoundError, AttributeError) as missing:
        if "optics." in str(missing) or "has no attribute" in str(missing):
            return None
        raise
    except OutOfRange:
        return None


def _drawn(name: str, dark: bool, design: Design, report: Report) -> bytes | str:
    palette = importlib.import_module("optics.figures.palette")
    export = importlib.import_module("optics.figures.export")
    figure = FIGURES[name](design, report, palette.DARK if dark else palette.LIGHT)
    return export.png(figure, DPI) if name in MAPS else export.svg(figure).decode("utf-8")


def _figure(module: str, function: str) -> Callable[..., Any]:
    return getattr(importlib.import_module(f"optics.figures.{module}"), function)


def _view(function: str, *arguments: Any) -> Any:
    return getattr(importlib.import_module("optics.report.views"), function)(*arguments)


MAP_POINTS, CURVE_POINTS = 121, 41

FIGURES: dict[str, Callable[[Design, Report, Any], Any]] = {
    "strip": lambda design, report, palette: _figure("strip", "light_strip")(report, palette=palette, narrow=False),
    "strip_narrow": lambda design, report, palette: _figure("strip", "light_strip")(report, palette=palette, narrow=True),
    "budget": lambda design, report, palette: _figure("light", "budget")(report, palette=palette),
    "spectra": lambda design, report, palette: _figure("light", "spectra")(_view("spectra", design.fiberscope), palette=palette),
    "map": lambda design, report, palette: _figure("target", "irradiance_map")(_view("target_map", design.fiberscope, MAP_POINTS), palette=palette),
    "profile": lambda design, report, palette: _figure("target", "profile")(_view("target_map", design.fiberscope, MAP_POINTS), palette=palette),
    "ledger": lambda design, report, palette: _figure("detail", "ledger")(report, palette=palette),
    "section": lambda design, report, palette: _figure("body", "section")(_view("section_view", design.fiberscope), palette=palette),
    "passage": lambda design, report, palette: _figure("body", "passage")(_view("passage_view", design.fiberscope), palette=palette),
    "range": lambda design, report, palette: _figure("working_range", "curves")(
        importlib.import_module("optics.study.working_range").over_distance(design.fiberscope, CURVE_POINTS), palette=palette
    ),
}
