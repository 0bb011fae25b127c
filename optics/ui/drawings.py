"""What the pages on light and fit ask beyond the answer: views and their pictures, kept by design, name and theme."""

from collections.abc import Callable
from typing import Any

import streamlit as st

from optics.fiberscope import Fiberscope
from optics.figures import bend, export, fit, guide
from optics.figures.palette import DARK, LIGHT
from optics.report import view_bend, view_fit, view_guide, view_handling, view_passage
from optics.spec import OutOfRange
from optics.ui.pictures import DPI, is_dark
from optics.ui.sketch import Sketch

KEPT_VIEWS, KEPT_PICTURES = 128, 96

VIEWS: dict[str, Callable[..., Any]] = {
    "cone": view_guide.cone_view,
    "color": view_guide.color_view,
    "bends": view_bend.bend_view,
    "trace": view_bend.bend_trace_view,
    "tube": view_fit.tube_view,
    "fill": view_fit.fill_view,
    "weights": view_fit.weights,
    "bending": view_handling.bending_view,
    "slides": view_handling.slides,
    "heats": view_handling.heats,
    "limits": view_passage.passage_limits,
    "limit": view_passage.limit_curve,
}
# How a view is drawn, and whether as dots (a PNG) for its many small parts.
FIGURES: dict[str, tuple[Callable[..., Any], bool]] = {
    "cone": (guide.cone, False),
    "color": (guide.chromaticity, False),
    "bends": (bend.bend_loss, False),
    "tube": (fit.sections, True),
    "limit": (fit.limit, False),
}


def view(name: str, here: Sketch, *asked: Any) -> Any:
    """A view of the present answer; None where the design has no such part, or the view refuses it."""
    return _view(name, here.report.design_hash, asked, here.design.fiberscope)


def show(name: str, here: Sketch, alt: str, *asked: Any) -> bool:
    """Show the picture of a view over the whole width; False where there is none."""
    picture = _picture(name, here.report.design_hash, is_dark(), asked, here.design.fiberscope)
    if picture is None:
        return False
    st.image(picture, width="stretch", alt=alt)
    return True


@st.cache_data(max_entries=KEPT_VIEWS, show_spinner=False)
def _view(name: str, design_hash: str, asked: tuple[Any, ...], _fiberscope: Fiberscope) -> Any:
    try:
        return VIEWS[name](_fiberscope, *asked)
    except OutOfRange:
        return None


@st.cache_data(max_entries=KEPT_PICTURES, show_spinner=False)
def _picture(
    name: str, design_hash: str, dark: bool, asked: tuple[Any, ...], _fiberscope: Fiberscope
) -> bytes | str | None:
    found = _view(name, design_hash, asked, _fiberscope)
    if found is None:
        return None
    draw, as_dots = FIGURES[name]
    figure = draw(found, palette=DARK if dark else LIGHT)
    return export.png(figure, DPI) if as_dots else export.svg(figure).decode("utf-8")
