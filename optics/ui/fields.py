"""One widget for one field of a Spec: its value from the document, its bounds, help and marks from the Spec and the sources."""

import math
from typing import Any

import streamlit as st
from pydantic.fields import FieldInfo

from optics.ui import edits, sketch
from optics.ui.binding import bound_to, commit, complaint, marked, way_back
from optics.ui.names import choice, field_name, label
from optics.ui.origin import Origin, help_text, origin, told
from optics.ui.shape import bounds, choices, is_optional, kind, step
from optics.ui.words import sentence_case

WIDE_SPAN = 30.0  # from this ratio of its usual bounds on, a slider moves in even ratios
STOPS = 60  # of such a slider
BOX_WIDTH = 88  # pixels; narrow enough that the box shows no buttons beside its slider


def show(path: str, field: FieldInfo, *, slider: bool = False, item: bool = False) -> None:
    """The widget of one field, with its mark, its way back, and what is wrong with it."""
    found = origin(sketch.current().document, path, field)
    with st.container(gap="xxsmall"):
        WIDGETS[kind(field)](path, field, found, slider)
        if not item:
            way_back(path, found)
        complaint(path)


def _box(path: str, field: FieldInfo, found: Origin, text: str, **more: Any) -> None:
    """A box for a number, with a step from the usual bounds; what is impossible is refused with a sentence, not by the box."""
    whole = kind(field) == "whole"
    as_number = int if whole else float
    value = None if not isinstance(found.value, int | float) else as_number(found.value)
    key, needed = path, not is_optional(field)
    if not needed or key in st.session_state:
        bound_to(key, value)
    st.number_input(
        text,
        step=1 if whole else _step(bounds(field).usual, value),
        format="%d" if whole else "%g",
        value=value if needed else None,
        key=key,
        help=help_text(field, path.rpartition(".")[2], found),
        placeholder="not set",
        on_change=commit,
        args=(path, key, field),
        **more,
    )


def _step(usual: tuple[float, float] | None, value: float | None) -> float:
    if usual is None:
        return step(10 * abs(value or 1.0))
    low, high = usual
    return step(5 * max(value or low, low) if low > 0 and high / low > WIDE_SPAN else high - low)


def _number(path: str, field: FieldInfo, found: Origin, slider: bool) -> None:
    text = marked(path, label(path.rpartition(".")[2], path), found)
    usual = bounds(field).usual
    if not slider or usual is None or not isinstance(found.value, int | float):
        _box(path, field, found, text)
        return
    with st.container(horizontal=True, vertical_alignment="bottom", gap="small", wrap=False):
        _slider(path, field, found, text, usual)
        _box(path, field, found, text, label_visibility="collapsed", width=BOX_WIDTH)


def _slider(path: str, field: FieldInfo, found: Origin, text: str, usual: tuple[float, float]) -> None:
    """A slider over the usual bounds, widened to hold the present value."""
    whole, value = kind(field) == "whole", found.value
    low, high = min(usual[0], value), max(usual[1], value)
    asked = help_text(field, path.rpartition(".")[2], found)
    if usual[0] > 0 and usual[1] / usual[0] > WIDE_SPAN and not whole:
        stops = _stops(usual, float(value))
        key = bound_to(f"{path}:slider", float(value))
        st.select_slider(
            text,
            stops,
            key=key,
            help=asked,
            format_func=lambda stop: f"{stop:.10g}",
            on_change=commit,
            args=(path, key, field),
        )
        return
    as_number = int if whole else float
    key = bound_to(f"{path}:slider:{low:g}:{high:g}", as_number(value))
    st.slider(
        text,
        as_number(low),
        as_number(high),
        step=1 if whole else step(usual[1] - usual[0]),
        format="%d" if whole else "%g",
        key=key,
        help=asked,
        on_change=commit,
        args=(path, key, field),
    )


def _stops(usual: tuple[float, float], value: float) -> list[float]:
    """Round stops in about even ratios over the usual bounds, and the present value."""
    low, high = usual
    even = (low * (high / low) ** (number / STOPS) for number in range(STOPS + 1))
    return sorted({value, low, high, *(float(f"{stop:.2g}") for stop in even)})


def _switch(path: str, field: FieldInfo, found: Origin, slider: bool) -> None:
    key = bound_to(path, bool(found.value))
    name = path.rpartition(".")[2]
    st.toggle(
        marked(path, field_name(name), found),
        key=key,
        help=help_text(field, name, found),
        on_change=commit,
        args=(path, key, field),
    )


def _choice(path: str, field: FieldInfo, found: Origin, slider: bool) -> None:
    name, key = path.rpartition(".")[2], bound_to(path, found.value)
    st.selectbox(
        marked(path, field_name(name), found),
        choices(field),
        key=key,
        format_func=choice,
        help=help_text(field, name, found),
        on_change=commit,
        args=(path, key, field),
    )


def _solve(path: str, field: FieldInfo, found: Origin, slider: bool) -> None:
    """A number, or the word that leaves it to be solved for."""
    word, name = choices(field)[0], path.rpartition(".")[2]
    solving = found.value == word
    key = bound_to(f"{path}:solve", solving)
    st.toggle(
        marked(path, f"least {field_name(name)} that holds the parts", found),
        key=key,
        help=help_text(field, name, found),
        on_change=_commit_solve,
        args=(path, key, word),
    )
    if not solving:
        _number(path, field, found, slider)


def _commit_solve(path: str, key: str, word: str) -> None:
    fit = sketch.current().report.fit
    number = math.ceil(100 * fit.outer_diameter_mm) / 100 if fit else 6.0
    sketch.edit(edits.with_value, path, word if st.session_state[key] else number, True, None)


def _text(path: str, field: FieldInfo, found: Origin, slider: bool) -> None:
    key = bound_to(path, found.value or "")
    st.text_input(marked(path, path.rpartition(".")[2]), key=key, on_change=commit, args=(path, key, field))


def _curve(path: str, field: FieldInfo, found: Origin, slider: bool) -> None:
    """A curve is shown by its range and source; it is changed in the design file or by another preset."""
    sourced = sketch.current().design.sourced.get(path)
    if sourced is not None:
        st.caption(
            f"{sentence_case(field_name(path.rpartition('.')[2]))}: {sourced.value}",
            help=f"{field.description}.\n\n{told(sourced)}",
        )


WIDGETS = {
    "number": _number,
    "whole": _number,
    "switch": _switch,
    "choice": _choice,
    "solve": _solve,
    "text": _text,
    "curve": _curve,
}
