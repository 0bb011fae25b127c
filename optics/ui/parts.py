"""The widgets of one part of the instrument, table by table: preset and form first, then the fields that people move."""

import streamlit as st
from pydantic.fields import FieldInfo

from optics.fiberscope import FORMS
from optics.presets import FOLDERS, value_at
from optics.tables import preset, preset_names
from optics.ui import edits, fields, sketch
from optics.ui.binding import bound_to, complaint, is_changed, marked, way_back
from optics.ui.names import FORMS as FORM_WORDS
from optics.ui.names import TABLES, choice, field_name, preset_name
from optics.ui.shape import Table, absent, default_form, extra, fewest_items, item_model, kind, most_items, tables
from optics.ui.words import plain

REMOVABLE = ("scene", "image", "viewer", "body")  # whole parts that a design can do without
ONE_ROW = 22  # letters of choices that stand beside each other in the sidebar
PAIRED = ("guide.joint",)  # comes and goes with its table


def show(part: str) -> None:
    """All widgets of one part: the common ones, what can be added, and the rest under More."""
    document = sketch.current().document
    if value_at(document, part) is None and part != "needs":
        st.caption(f"This design has no {TABLES[part].lower()}.")
        _add(part)
        return
    found = list(tables(document, part))
    titled = sum(bool(_common(table) or _head(table)) for table in found) > 1
    for table in found:
        _common_fields(table, titled)
    for path, _ in absent(document, part):
        if path not in PAIRED:
            _add(path)
    more = st.expander("More", type="compact", key=f"{part}:more", on_change=sketch.touch)
    if more.open:
        with more:
            for table in found:
                _rest(table, titled)
            if part in REMOVABLE:
                _remove(part)


def _head(table: Table) -> bool:
    """Whether a table starts with a choice of preset or form."""
    return table.path in FORMS or bool(table.path in FOLDERS and preset_names(FOLDERS[table.path]))


def _common(table: Table) -> dict[str, FieldInfo]:
    """The fields that people move, the lists, and the needs that are set."""
    return {
        name: field
        for name, field in table.model.model_fields.items()
        if _is_field(field) and _is_common(table, name, field)
    }


def _is_field(field: FieldInfo) -> bool:
    return kind(field) not in ("table",)


def _is_common(table: Table, name: str, field: FieldInfo) -> bool:
    if kind(field) == "list":
        return True
    is_set = table.path == "needs" and value_at(sketch.current().document, f"needs.{name}") is not None
    return name != "form" and bool(extra(field, "common") or is_set)


def _common_fields(table: Table, titled: bool) -> None:
    common = _common(table)
    if not common and not _head(table) and not table.optional:
        return
    if (titled and "." in table.path) or table.optional:
        st.markdown(f"**{TABLES.get(table.path, field_name(table.path.rpartition('.')[2]))}**")
    if table.path in FORMS:
        _form(table.path)
    if table.path in FOLDERS:
        _preset(table.path)
    for name, field in common.items():
        if kind(field) == "list":
            _list(f"{table.path}.{name}", field)
        else:
            fields.show(f"{table.path}.{name}", field, slider=True)
    if table.optional and table.path not in PAIRED:
        _remove(table.path)


def _rest(table: Table, titled: bool) -> None:
    """Every field that is not among the common ones."""
    common = _common(table)
    rest = {
        name: field
        for name, field in table.model.model_fields.items()
        if _is_field(field) and name not in common and name != "form"
    }
    if not rest:
        return
    if titled:
        st.markdown(f"**{TABLES.get(table.path, field_name(table.path.rpartition('.')[2]))}**")
    for name, field in rest.items():
        if kind(field) == "list":
            _list(f"{table.path}.{name}", field)
        else:
            fields.show(f"{table.path}.{name}", field)


def _form(path: str) -> None:
    """The choice among the forms of a table."""
    forms = list(FORMS[path])
    key = bound_to(f"{path}.form", value_at(sketch.current().document, f"{path}.form") or default_form(path))
    text, common = (
        marked(f"{path}.form", FORM_WORDS[path]),
        {"key": key, "format_func": choice, "on_change": _commit_form, "args": (path, key)},
    )
    if sum(len(choice(form)) for form in forms) > ONE_ROW:
        st.selectbox(text, forms, **common)
    else:
        st.segmented_control(text, forms, required=True, **common)
    if is_changed(f"{path}.form"):
        way_back(f"{path}.form")


def _commit_form(path: str, key: str) -> None:
    if st.session_state[key]:
        sketch.edit(edits.with_form, path, st.session_state[key])


def _preset(path: str) -> None:
    """The choice of a preset, with what each one stands for."""
    folder = FOLDERS[path]
    names = preset_names(folder)
    present = value_at(sketch.current().document, f"{path}.preset")
    if not names or present is None:
        return
    notes = "\n".join(f"- **{preset_name(name)}**\\: {plain(preset(folder, name).note)}" for name in names)
    key = bound_to(f"{path}.preset", present)
    with st.container(gap="xxsmall"):
        st.selectbox(
            marked(f"{path}.preset", "family"),
            names,
            key=key,
            format_func=preset_name,
            help=notes,
            on_change=_commit_preset,
            args=(path, key),
        )
        if present in names:
            st.caption(plain(preset(folder, present).note))
        way_back(f"{path}.preset")


def _commit_preset(path: str, key: str) -> None:
    sketch.edit(edits.with_preset, path, st.session_state[key])


def _list(path: str, field: FieldInfo) -> None:
    """A list of small tables: each with its fields in a row, a way to remove it, and a way to add one."""
    items = value_at(sketch.current().document, path) or []
    word = TABLES.get(path, field_name(path.rpartition(".")[2]))
    for index in range(len(items)):
        with st.container(border=True, gap="xxsmall"):
            with st.container(horizontal=True, vertical_alignment="center", horizontal_alignment="distribute"):
                st.markdown(f"{word} {index + 1}" if len(items) > 1 else word)
                st.button(
                    "Remove",
                    key=f"{path}.{index}:remove",
                    type="tertiary",
                    icon=":material/close:",
                    help=f"Remove {word.lower()} {index + 1}",
                    disabled=len(items) <= fewest_items(field),
                    on_click=sketch.edit,
                    args=(edits.without_item, path, index),
                )
            _item(f"{path}.{index}", field)
    if most_items(field) is None or len(items) < most_items(field):
        st.button(
            f"Add {word.lower()}",
            key=f"{path}:add",
            type="tertiary",
            icon=":material/add:",
            on_click=sketch.edit,
            args=(edits.with_item, path),
        )
    if is_changed(path):
        way_back(path)
    complaint(path)


def _item(path: str, field: FieldInfo) -> None:
    """The fields of one list item, two in a row."""
    with st.grid(2, min_column_width=90, gap="small", vertical_alignment="bottom"):
        for name, inner in item_model(field).model_fields.items():
            fields.show(f"{path}.{name}", inner, item=True)


def _add(path: str) -> None:
    st.button(
        f"Add {TABLES.get(path, path).lower()}",
        key=f"{path}:add",
        type="tertiary",
        icon=":material/add:",
        on_click=sketch.edit,
        args=(edits.with_table, path),
    )


def _remove(path: str) -> None:
    st.button(
        f"Remove {TABLES.get(path, path).lower()}",
        key=f"{path}:remove",
        type="tertiary",
        icon=":material/close:",
        on_click=sketch.edit,
        args=(edits.without_table, path),
    )
