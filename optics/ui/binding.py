"""What ties a widget to the document: its key and value, its marks, its way back, its complaint, and the write on a change."""

import re
from typing import Any

import streamlit as st
from pydantic.fields import FieldInfo

from optics.presets import value_at
from optics.ui import edits, sketch
from optics.ui.names import preset_name, spoken
from optics.ui.origin import Origin, origin
from optics.ui.shape import is_optional
from optics.ui.words import plain, sentence_case, with_unit

CHANGED, SOFT = ":primary[●]", ":gray[≈]"


def bound_to(key: str, value: Any) -> str:
    """The key of a widget, after making sure that the widget shows what the document says.

    The value is set in every run, changed or not: a run that is replaced before the browser has drawn it would
    else leave a widget with its own default, which the browser then sends back as if a person had chosen it.
    """
    st.session_state[key] = value
    return key


def is_changed(path: str) -> bool:
    """Whether the document says something else at a path, or below it, than the design that was opened.

    Within a table or list item that was added as a whole, nothing is: what changed is that it is there.
    """
    here = sketch.current()
    table = path.rpartition(".")[0]
    if "." in table and value_at(here.opened, table) is None:
        return False
    return value_at(here.document, path) != value_at(here.opened, path)


def marked(path: str, text: str, found: Origin | None = None) -> str:
    """A label with its marks: changed, or soft."""
    if is_changed(path) or (found is not None and found.overrides):
        return f"{sentence_case(text)} {CHANGED}"
    return f"{sentence_case(text)} {SOFT}" if found is not None and found.soft else sentence_case(text)


def way_back(path: str, found: Origin | None = None) -> None:
    """A button back to the opened design's value, or to the preset's; nothing where nothing was changed."""
    name = path.rpartition(".")[2]
    if is_changed(path):
        here = sketch.current()
        old = value_at(here.opened, path)
        if old is None and found is not None and found.behind is not None:
            old = found.behind.value
        st.button(
            _back_label(path, old),
            key=f"{path}:back",
            type="tertiary",
            icon=":material/undo:",
            on_click=sketch.edit,
            args=(edits.set_back, here.opened, path),
        )
    elif found is not None and found.overrides:
        st.button(
            f"Take the preset's {with_unit(found.behind.value, name)}",
            key=f"{path}:back",
            type="tertiary",
            icon=":material/undo:",
            on_click=sketch.edit,
            args=(edits.set_back, {}, path),
        )


def _back_label(path: str, old: Any) -> str:
    """What the way back leads to, where that is one value."""
    if isinstance(old, list | dict):
        return "Set back"
    name = path.rpartition(".")[2]
    said = preset_name(str(old)) if name == "preset" else with_unit(old, name)
    return f"Set back to {'not set' if old is None else said}"


def complaint(path: str) -> None:
    """The sentence about the present document, where it is about this path."""
    wrong = sketch.current().wrong
    if wrong and re.search(rf"(?<![\w.]){re.escape(path)}(?![\w.])", wrong):
        st.caption(f":red[✗ {plain(spoken(wrong))}]")


def commit(path: str, key: str, field: FieldInfo) -> None:
    """Write a widget's value into the document; a cleared required field is no value."""
    value = st.session_state[key]
    if isinstance(value, float):
        value = float(f"{value:.10g}")
    if value is None and not is_optional(field):
        return
    here = sketch.current()
    behind, named = origin(here.document, path, field).behind, value_at(here.opened, path) is not None
    sketch.edit(edits.with_value, path, value, named, behind.value if behind else None)
