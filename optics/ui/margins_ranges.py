"""The tolerances in force as a table to edit: what the presets state, what the person enters, and the way back."""

import math
from collections.abc import Mapping

import streamlit as st

from optics.fiberscope import Fiberscope
from optics.presets import Design
from optics.study.margins_ranges import Tolerance, tolerances
from optics.ui.names import place
from optics.ui.origin import SOFT
from optics.ui.words import unit

Given = dict[str, tuple[float, float] | None]  # limits by path; None: held at the nominal value


def in_force(design: Design, given: Mapping[str, tuple[float, float] | None]) -> tuple[Tolerance, ...]:
    """The tolerances of the presets, with those entered in their stead.

    Raises OutOfRange: limits that the design, as it now stands, does not allow.
    """
    moved = {path: ends for path, ends in given.items() if ends is not None}
    return tuple(item for item in tolerances(design, moved) if given.get(item.path, ()) is not None)


def entered(design: Design, given: Given, path: str, low: float | None, high: float | None) -> Given:
    """What is given after low and high of one value were typed: an empty end is the nominal value, two are no tolerance.

    Raises OutOfRange: limits that leave out the nominal value, or that cannot be.
    """
    own = {item.path: item for item in tolerances(design)}.get(path)
    nominal = own.value if own else value_in(design.fiberscope, path)
    low, high = (nominal if end is None or math.isnan(end) else end for end in (low, high))
    rest = {key: ends for key, ends in given.items() if key != path}
    if low == high == nominal:
        return {**rest, path: None} if own else rest
    if own and (low, high) == (own.low, own.high):
        return rest
    tolerances(design, {path: (low, high)}, only=True)
    return {**rest, path: (low, high)}


def value_in(scope: Fiberscope, path: str) -> float | None:
    """The number that a design has at a path; None where it has none."""
    here = scope
    for part in path.split("."):
        here = getattr(here, part, None)
    return here if type(here) is float else None


def rows(design: Design, given: Given, everything: bool) -> list[tuple[str, float | None, float, float | None, str]]:
    """(path, low, nominal, high, basis) in the order of the design; with `everything` also values without a tolerance."""
    own = {item.path: item for item in tolerances(design)}
    found = []
    for path in dict.fromkeys([*design.sourced, *given]):
        item, nominal = own.get(path), value_in(design.fiberscope, path)
        if path in given:
            low, high = given[path] or (None, None)
            found.append(
                (path, low, item.value if item else nominal, high, "held, entered ●" if low is None else "entered ●")
            )
        elif item:
            found.append(
                (path, item.low, item.value, item.high, f"≈ {item.basis}" if item.basis in SOFT else item.basis)
            )
        elif everything and nominal is not None and not path.startswith("needs."):
            found.append((path, None, nominal, None, "none stated"))
    return [row for row in found if row[2] is not None]


def table(design: Design, given: Given, everything: bool, key: str, on_change) -> None:
    """The table to edit; `on_change(path, low, high)` is told each change."""
    found = rows(design, given, everything)
    own = {item.path: item for item in tolerances(design) if item.curve}
    columns = {
        "value": [place(path) for path, *_ in found],
        "low": [_number(low) for _, low, *_ in found],
        "nominal": [nominal for _, _, nominal, *_ in found],
        "high": [_number(high) for *_, high, _ in found],
        "unit": ["× curve" if path in own else unit(path.rpartition(".")[2]) for path, *_ in found],
        "basis": [basis for *_, basis in found],
    }
    config = st.column_config
    st.data_editor(
        columns,
        key=key,
        height=min(36 * (len(found) + 1) + 2, 460),
        hide_index=True,
        disabled=["value", "nominal", "unit", "basis"],
        alt="Tolerances in force: low and high can be edited",
        on_change=_told,
        args=(key, found, on_change),
        column_config={
            "value": config.TextColumn(pinned=True),
            **{
                name: config.NumberColumn(format="%.6g", width="small", help=said)
                for name, said in (
                    ("low", "Least value. Click to enter your own; empty: the nominal value."),
                    ("nominal", "As the design has it; changed in the sidebar."),
                    ("high", "Greatest value. Click to enter your own; empty: the nominal value."),
                )
            },
            "unit": config.TextColumn(width="small"),
        },
    )


def _number(value: float | None) -> float:
    return math.nan if value is None else value


def _told(key: str, found: list[tuple[str, float | None, float, float | None, str]], on_change) -> None:
    for row, cells in st.session_state[key]["edited_rows"].items():
        path, low, _, high, _ = found[int(row)]
        on_change(path, cells.get("low", low), cells.get("high", high))


def entered_words(design: Design, path: str) -> str:
    """What the way back of an entered tolerance leads to."""
    own = {item.path: item for item in tolerances(design)}.get(path)
    back = f"{own.low:g}–{own.high:g}" if own else "no tolerance"
    return f"{place(path)}: back to {back}"
