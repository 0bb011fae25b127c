"""The design as a thing to open, name, keep and hand on: demo designs, design files, the JSON report."""

import json

import streamlit as st

from optics import presets
from optics.fiberscope import Fiberscope
from optics.presets import value_at
from optics.tables import preset_names
from optics.ui import fields, sketch
from optics.ui.binding import bound_to
from optics.ui.link import differences
from optics.ui.names import place
from optics.ui.words import plain, with_unit


def fold() -> None:
    """The first fold of the sidebar."""
    here = sketch.current()
    scope = here.design.fiberscope
    with st.expander(f"**Design**  \n:small[{plain(scope.name)}, {scope.setting}]", key="fold:design"):
        _open(here)
        for name in ("name", "setting", "note"):
            fields.show(name, Fiberscope.model_fields[name])
        _changes(here)
        _keep(here)


def _open(here: sketch.Sketch) -> None:
    names = preset_names("fiberscopes")
    key = bound_to("demo", here.demo if here.file is None else None)
    st.selectbox(
        "Open a demo design", names, key=key, format_func=demo_name, placeholder="an opened file", on_change=_open_demo
    )
    st.file_uploader("Open a design file", type="toml", key="file", on_change=_open_file)


def demo_name(name: str) -> str:
    return str(presets.open(name).document.get("name", name))


def _open_demo() -> None:
    if st.session_state["demo"]:
        sketch.replace(sketch.opened_demo, st.session_state["demo"])


def _open_file() -> None:
    upload = st.session_state["file"]
    if upload is not None:
        sketch.replace(sketch.opened_file, upload.getvalue(), upload.name)


def _changes(here: sketch.Sketch) -> None:
    """What differs from the design that was opened, and the way back for all of it."""
    changed = differences(here.opened, here.document)
    if not changed:
        return
    st.markdown(f"{len(changed)} change{'s' if len(changed) > 1 else ''} since opening")
    st.caption("  \n".join(_change(path, value_at(here.opened, path), value) for path, value in changed.items()))
    st.button(
        "Set everything back",
        key="all:back",
        type="tertiary",
        icon=":material/undo:",
        on_click=sketch.change,
        args=(here.opened,),
    )


def _change(path: str, old: object, new: object) -> str:
    name = path.rpartition(".")[2]
    return plain(f"{place(path)}: {with_unit(old, name)} → {with_unit(new, name)}")


def _keep(here: sketch.Sketch) -> None:
    """Downloads of the last good design, built when asked for."""
    design, report = here.design, here.report
    stem = "_".join(design.fiberscope.name.lower().split()) or "design"
    st.download_button(
        "Download the design",
        lambda: presets.saved(design.document),
        f"{stem}.toml",
        "application/toml",
        key="keep:design",
        icon=":material/download:",
        on_click="ignore",
        width="stretch",
    )
    st.download_button(
        "Download the report, JSON",
        lambda: json.dumps(report.as_dict(), indent=2, allow_nan=False),
        f"{stem}.json",
        "application/json",
        key="keep:report",
        icon=":material/download:",
        on_click="ignore",
        width="stretch",
    )
