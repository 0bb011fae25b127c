"""Which designs are compared: the sketch, the pinned reference, demo designs, an opened file, or one design in its families."""

from dataclasses import dataclass

import streamlit as st

from optics import presets
from optics.fiberscope import Fiberscope
from optics.presets import Design
from optics.report.size import design_hash
from optics.spec import OutOfRange
from optics.study.compare import MOST, distinct_names
from optics.study.compare_families import in_families
from optics.tables import preset_names
from optics.ui import sketch
from optics.ui.files import demo_name
from optics.ui.sketch import Sketch
from optics.ui.words import plain

MODES = {"families": "In glass, silica and plastic", "designs": "Side by side"}
SKETCH, PINNED, FILE = "sketch", "pinned", "file"
KEPT = {"persist_state": "session", "on_change": sketch.touch}


@dataclass(frozen=True, slots=True)
class Chosen:
    """What is compared: designs and what to call them; or why it is not."""

    designs: tuple[Design, ...]
    names: tuple[str, ...]
    wrong: str | None = None

    @property
    def key(self) -> tuple[str, ...]:
        return (*(design_hash(design.fiberscope) for design in self.designs), *self.names)

    @property
    def scopes(self) -> list[Fiberscope]:
        return [design.fiberscope for design in self.designs]


def choose(here: Sketch) -> Chosen:
    """The controls, and what they ask for."""
    first = "designs" if here.pinned is not None else "families"
    with st.container(horizontal=True, vertical_alignment="bottom", gap="medium"):
        mode = st.segmented_control(
            "Compare", MODES, default=first, format_func=MODES.get, key="compare:mode", required=True, **KEPT
        )
        if mode == "designs":
            options = [SKETCH, *([PINNED] if here.pinned else []), *preset_names("fiberscopes")]
            options += [FILE] if _file() is not None else []
            known = [name for name in st.session_state.get("compare:designs", []) if name in options]
            if "compare:designs" in st.session_state and known != st.session_state["compare:designs"]:
                st.session_state["compare:designs"] = known
            picked = st.multiselect(
                "Designs, the first is what the others are held against", options, default=_start(here),
                format_func=lambda name: _called(name, here), max_selections=MOST, key="compare:designs", width=620, **KEPT,
            )  # fmt: skip
    if mode == "families":
        return _families(here)
    with st.expander("Bring another design file", key="compare:bring"):
        st.file_uploader(
            "Another design file", type="toml", key="compare:file", on_change=_opened, label_visibility="collapsed"
        )
        wrong = st.session_state.get("compare:refused")
        if wrong:
            st.error(plain(wrong), icon=":material/error:")
    if len(picked) < 2:
        return Chosen((), (), "Choose two to four designs. Pin the sketch before you change it, and both stand here.")
    found = [_design(name, here) for name in picked]
    return Chosen(tuple(found), tuple(distinct_names([_called(name, here) for name in picked])))


def _start(here: Sketch) -> list[str]:
    """What is compared at first: the sketch with the pinned reference, else with the demo design it began as or another."""
    if here.pinned is not None:
        return [PINNED, SKETCH]
    changed = here.document != here.opened and here.file is None
    other = here.demo if changed else next(name for name in preset_names("fiberscopes") if name != here.demo)
    return [other, SKETCH]


def _called(name: str, here: Sketch) -> str:
    if name == SKETCH:
        return "the sketch"
    if name == PINNED:
        return "the pinned reference"
    return _file()[0] if name == FILE else demo_name(name)


def _design(name: str, here: Sketch) -> Design:
    if name == SKETCH:
        return here.design
    if name == PINNED:
        return presets.resolve(here.pinned.document)
    return _file()[1] if name == FILE else presets.open(name)


def _file() -> tuple[str, Design] | None:
    return st.session_state.get("compare:opened")


def _opened() -> None:
    sketch.touch()
    upload = st.session_state["compare:file"]
    if upload is None:
        return
    try:
        fresh = sketch.opened_file(upload.getvalue(), upload.name)
    except OutOfRange as wrong:
        st.session_state["compare:refused"] = str(wrong)
        return
    st.session_state["compare:refused"] = None
    st.session_state["compare:opened"] = (fresh.design.fiberscope.name, fresh.design)
    st.session_state["compare:designs"] = [*st.session_state.get("compare:designs", []), FILE][-MOST:]


def _families(here: Sketch) -> Chosen:
    try:
        made = _made(here.report.design_hash, here.design)
    except OutOfRange as wrong:
        return Chosen((), (), f"This design cannot be made in two families: {wrong}")
    return Chosen(tuple(made.values()), tuple(made))


@st.cache_data(max_entries=24, show_spinner=False)
def _made(key: str, _design: Design) -> dict[str, Design]:
    return in_families(_design)
