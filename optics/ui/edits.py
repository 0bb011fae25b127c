"""What a person can do to the document, one function each: a document in, a fresh document out.

Tables that only stand together come and go together, so that each step leaves a design that can be sized.
"""

import math
from typing import Any

from optics import presets
from optics.fiberscope import FORMS
from optics.presets import FOLDERS, Document, value_at
from optics.spec import Spec
from optics.tables import preset, preset_names
from optics.ui.shape import default_form, extra, is_required, kind, members, spec_of

# What a new table or a new list item starts from, where the middle of the usual range would be an odd choice.
STARTS: dict[str, dict[str, Any]] = {
    "guide.cable": {
        "fiber": {"preset": "lead_silicate_na057"},
        "diameter_mm": 3.5,
        "length_m": 2.5,
        "packing_fraction": 0.82,
    },
    "guide.joint": {"gap_mm": 0.1},
    "guide.bundle.bends": {"radius_mm": 30.0, "angle_deg": 90.0},
    "scene.cover": {"index": 1.52, "thickness_mm": 0.5},
    "scene.ports.ports": {"x_mm": 1.5, "y_mm": 0.0, "diameter_mm": 1.0},
    "image.tip": {"view_deg": 90.0, "glass_path_mm": 1.5, "index": 1.52, "transmission": 0.9, "added_length_mm": 1.5},
    "body.section.channels": {"inner_mm": 1.2, "wall_mm": 0.1},
    "body.section.wires": {"diameter_mm": 0.4, "count": 4},
    "body.handling": {"bend_radius_mm": 30.0},
    "body.passage.bending": {"radius_mm": 15.0, "angle_deg": 120.0, "length_mm": 30.0},
}
# A table, and what it needs (added with it) or carries (removed with it).
NEEDED = {
    "guide.cable": ("guide.joint",),
    "guide.joint": ("guide.cable",),
    "image": ("scene", "viewer"),
    "viewer": ("image",),
}
CARRIED = {
    "guide.cable": ("guide.joint",),
    "guide.joint": ("guide.cable",),
    "scene": ("image", "viewer"),
    "image": ("viewer",),
    "viewer": ("image",),
}


def with_value(document: Document, path: str, value: Any, named: bool, unnamed_value: Any) -> Document:
    """One value changed. A value that the opened design leaves to its preset, and that equals it again, is unnamed again."""
    if not named and value == unnamed_value:
        value = None
    return _with(document, path, value)


def _with(document: Document, path: str, value: Any) -> Document:
    """One setting applied; None where nothing stands leaves the document as it is."""
    nothing = value is None and value_at(document, path) is None
    return document if nothing else presets.edited(document, {path: value})


def with_preset(document: Document, path: str, name: str) -> Document:
    """Another preset for a table: all its values come in force, also over what the old one's were changed to."""
    folder = FOLDERS[path]
    old = value_at(document, f"{path}.preset")
    supplied = {
        key for known in (old, name) if known for key in (*preset(folder, known).values, *preset(folder, known).curves)
    }
    dropped = {f"{path}.{key}": None for key in supplied if value_at(document, f"{path}.{key}") is not None}
    return presets.edited(document, {**dropped, f"{path}.preset": name})


def with_form(document: Document, path: str, form: str) -> Document:
    """Another form of a tagged table, with what that form cannot do without, and what it cannot stand with removed."""
    named = presets.edited(document, {f"{path}.form": value_at(document, f"{path}.form") or default_form(path)})
    fresh = presets.edited(named, {f"{path}.form": form})
    table = value_at(fresh, path)
    for key, value in start_of(FORMS[path][form][0], path).items():
        table.setdefault(key, value)
    if path == "image":
        fresh = with_table(fresh, "viewer") if form == "bundle" else without_table(fresh, "viewer", carried=())
    return fresh


def with_table(document: Document, path: str) -> Document:
    """An optional table added, with those that it needs; what is there stays as it is."""
    if value_at(document, path) is not None:
        return document
    fresh = presets.edited(document, {path: _table_start(path)})
    for needed in NEEDED.get(path, ()):
        fresh = with_table(fresh, needed)
    return fresh


def without_table(document: Document, path: str, carried: tuple[str, ...] | None = None) -> Document:
    """An optional table removed, with those that cannot stand without it."""
    gone = (path, *(CARRIED.get(path, ()) if carried is None else carried))
    return presets.edited(document, {name: None for name in gone if value_at(document, name) is not None})


def with_item(document: Document, path: str) -> Document:
    """One more item at the end of a list, like the last one."""
    items = value_at(document, path) or []
    return presets.edited(document, {path: [*items, dict(items[-1]) if items else dict(STARTS[path])]})


def without_item(document: Document, path: str, index: int) -> Document:
    """A list without one of its items."""
    items = value_at(document, path) or []
    return presets.edited(document, {path: [item for number, item in enumerate(items) if number != index]})


def set_back(document: Document, opened: Document, path: str) -> Document:
    """A path as it is in the design that was opened."""
    if path.endswith(".form"):
        path = path.removesuffix(".form")
    return _with(document, path, value_at(opened, path))


def _table_start(path: str) -> dict[str, Any]:
    if "." not in path:  # a whole part of the instrument: as the first demo design has it
        return dict(value_at(presets.open("gearbox_tooth").document, path))
    return dict(STARTS[path]) if path in STARTS else start_of(spec_of(path), path)


def start_of(model: type[Spec], path: str = "") -> dict[str, Any]:
    """What a table cannot do without: its folder's first preset, and the middle of each usual range."""
    names = preset_names(FOLDERS[path]) if path in FOLDERS else ()
    supplied = preset(FOLDERS[path], names[0]).values if names else {}
    start: dict[str, Any] = {"preset": names[0]} if names else {}
    for key, field in model.model_fields.items():
        if not is_required(field) or key in supplied:
            continue
        usual = extra(field, "usual")
        if kind(field) == "table":
            start[key] = start_of(members(field.annotation)[0], f"{path}.{key}")
        elif kind(field) == "switch":
            start[key] = False
        elif usual:
            middle = math.sqrt(usual[0] * usual[1]) if usual[0] > 0 else (usual[0] + usual[1]) / 2
            start[key] = round(middle) if field.annotation is int else float(f"{middle:.2g}")
    return start
