"""The document that a person edits, and the design it stands for.

A document is the plain nested dict of a design file, with `preset = "..."` unresolved. `edited`
applies settings to it, `resolve` expands the presets, validates once, and records for every value
where it comes from. `open` and `saved` read and write it.
"""

import copy
import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from pydantic import BaseModel, ValidationError

from optics.fiberscope import COMPANIONS, FORMS, Fiberscope
from optics.spec import OutOfRange, refusal
from optics.tables import PRESETS, Sourced, nearest, preset, preset_names, read_toml

# Where a table may pull in a preset, and from which folder, in the order of the light.
FOLDERS = {
    "source.lamp": "lamps",
    "source.filter": "filters",
    "guide.cable.fiber": "fibers",
    "guide.fiber": "fibers",
    "scene.target": "targets",
    "image.bundle": "image_bundles",
    "image.chip": "chips",
    "viewer.camera": "cameras",
    "viewer.eye": "eyepieces",
}
CURVE = {"wavelength_nm", "value"}
HEADER = {"format": 1, "kind": "fiberscope"}

Document = dict[str, Any]


@dataclass(frozen=True, slots=True)
class Design:
    """A document, the fiberscope it stands for, and where each value comes from."""

    document: Document
    fiberscope: Fiberscope
    sourced: dict[str, Sourced]


def open(path_or_name: str | Path) -> Design:
    """The design of a file, or of a demo design by its name.

    >>> open("gearbox_tooth").fiberscope.setting
    'industrial'
    """
    where = find(path_or_name)
    return resolve(read_toml(where), str(path_or_name))


def find(path_or_name: str | Path) -> Path:
    """The file of a path or of a demo design's name."""
    path = Path(path_or_name)
    if path.is_file():
        return path
    names = preset_names("fiberscopes")
    if str(path_or_name) in names:
        return PRESETS / "fiberscopes" / f"{path_or_name}.toml"
    raise OutOfRange(
        f"{path_or_name} is no file and no demo design{nearest(str(path_or_name), list(names))}; "
        f"demo designs: {', '.join(names)}."
    )


def resolve(document: Document, where: str = "the design") -> Design:
    """The design that a document stands for: presets expanded, validated once, every value sourced."""
    for key, value in HEADER.items():
        if document.get(key) != value or isinstance(document.get(key), bool):
            raise OutOfRange(f"{where}: {key} is {document.get(key)!r}; it must be {value!r}.")
    sourced: dict[str, Sourced] = {}
    given = {key: value for key, value in document.items() if key not in HEADER}
    try:
        full = _expanded(given, "", sourced, where)
        fiberscope = Fiberscope.model_validate(full)
    except ValidationError as wrong:
        raise OutOfRange(f"{where}: {refusal(Fiberscope, wrong)}") from None
    sourced.update(_defaults(fiberscope, "", sourced))
    return Design(document, fiberscope, sourced)


def _expanded(table: Mapping[str, Any], path: str, sourced: dict[str, Sourced], where: str) -> dict[str, Any]:
    full: dict[str, Any] = {}
    name = table.get("preset")
    if name is not None:
        full = _from_preset(str(name), path, sourced, where)
    for key, value in table.items():
        at = f"{path}.{key}" if path else key
        if key == "preset":
            continue
        if isinstance(value, Mapping) and value and CURVE.issuperset(value):
            # an own curve stands for the preset's, tolerance and all
            full[key] = dict(value)
            sourced[at] = Sourced("curve", None, None, "own_scenario", where, "assumed")
        elif isinstance(value, Mapping):
            full[key] = _expanded(value, at, sourced, where)
        else:
            full[key] = [_item(item) for item in value] if isinstance(value, list) else value
            sourced[at] = Sourced(_plain(value), None, None, "own_scenario", where, "assumed")
    return full


def _item(value: Any) -> Any:
    return dict(value) if isinstance(value, Mapping) else value


def _plain(value: Any) -> Any:
    return tuple(value) if isinstance(value, list) and not any(isinstance(item, Mapping) for item in value) else value


def _from_preset(name: str, path: str, sourced: dict[str, Sourced], where: str) -> dict[str, Any]:
    folder = FOLDERS.get(path)
    if folder is None:
        raise OutOfRange(f"{where}: {path or 'the top level'} takes no preset; presets stand in: {', '.join(FOLDERS)}.")
    names = preset_names(folder)
    if name not in names:
        raise OutOfRange(
            f"{where}: {path}.preset is {name!r}{nearest(name, list(names))}; it must be one of: {', '.join(names)}."
        )
    found = preset(folder, name)
    full: dict[str, Any] = {}
    for key, value in found.values.items():
        full[key] = value.value
        sourced[f"{path}.{key}"] = value
    for key, curve in found.curves.items():
        full[key] = {"wavelength_nm": list(curve.wavelength_nm), "value": list(curve.value)}
        sourced[f"{path}.{key}"] = Sourced(
            f"curve, {curve.wavelength_nm[0]:g}-{curve.wavelength_nm[-1]:g} nm",
            curve.low_share,
            curve.high_share,
            curve.source,
            curve.at,
            curve.basis,
        )
    return full


def _defaults(spec: BaseModel, path: str, known: Mapping[str, Sourced]) -> Iterator[tuple[str, Sourced]]:
    """Sourced defaults that came into force because the document does not name the field."""
    for name, field in type(spec).model_fields.items():
        at, value = (f"{path}.{name}" if path else name), getattr(spec, name)
        if isinstance(value, BaseModel):
            yield from _defaults(value, at, known)
        elif name not in spec.model_fields_set and value is not None and at not in known:
            source = (field.json_schema_extra or {}).get("source", "assumed")
            yield at, Sourced(_plain(value), None, None, source, "default", "assumed")


# Editing


def parse_setting(text: str) -> tuple[str, Any]:
    """(path, value) of `path=value`; the value is read as TOML, else as text.

    >>> parse_setting("guide.bundle.length_m=3"), parse_setting("guide.fiber.preset=pmma_250um")
    (('guide.bundle.length_m', 3), ('guide.fiber.preset', 'pmma_250um'))
    """
    import tomllib

    path, equals, value = text.partition("=")
    if not equals or not re.fullmatch(r"[a-z0-9_]+(\.[a-z0-9_]+)*", path.strip()):
        raise OutOfRange(f"--set {text} is not of the form path=value, as in guide.bundle.length_m=3.")
    try:
        return path.strip(), tomllib.loads(f"value = {value}")["value"]
    except tomllib.TOMLDecodeError:
        return path.strip(), value.strip()


def edited(document: Document, settings: Mapping[str, Any]) -> Document:
    """A copy of the document with settings applied: forms first, then the rest; nothing is validated here.

    A changed `form` drops the fields that only the old form has and fills the declared starting
    values of the new one. List items go by index (`bends.0.radius_mm`). None removes the key.

    >>> edited({"a": {"b": 1}}, {"a.b": 2, "a.c": 3})
    {'a': {'b': 2, 'c': 3}}
    """
    fresh = copy.deepcopy(document)
    for path, value in sorted(settings.items(), key=lambda item: not item[0].endswith(".form")):
        holder, last = _holder(fresh, path)
        if isinstance(holder, list):
            _index(holder, last, path)
            holder[int(last)] = copy.deepcopy(value)
        elif value is None:
            holder.pop(last, None)
        else:
            if last == "form" and holder.get("form", _first_form(path)) != value:
                _change_form(holder, path.removesuffix(".form"), value)
                for other, table in COMPANIONS.get((path, value), {}).items():
                    _put(fresh, other, table)
            holder[last] = copy.deepcopy(value)
    return fresh


def _put(document: Document, key: str, table: dict[str, Any] | None) -> None:
    """A top-level table that another form needs, where there is none; or none, where it has no place (None)."""
    if table is None:
        document.pop(key, None)
    else:
        document.setdefault(key, copy.deepcopy(table))


def _holder(document: Document, path: str) -> tuple[Any, str]:
    """The table or list that holds the last part of a path; missing tables are made."""
    *parents, last = path.split(".")
    here: Any = document
    for depth, part in enumerate(parents):
        if isinstance(here, list):
            _index(here, part, path)
            here = here[int(part)]
        else:
            here = here.setdefault(part, {})
        if not isinstance(here, dict | list):
            raise OutOfRange(f"{path} does not exist: {'.'.join(parents[: depth + 1])} is a value, not a table.")
    return here, last


def _index(items: list, part: str, path: str) -> None:
    if not part.isdigit() or int(part) >= len(items):
        allowed = f"0 to {len(items) - 1}" if items else "none, the list is empty"
        raise OutOfRange(f"{path} names the list item {part!r}; allowed: {allowed}.")


def _first_form(path: str) -> str | None:
    """The form of a table that does not say it: the first, which is the default where there is one."""
    return next(iter(FORMS.get(path.removesuffix(".form"), {})), None)


def _change_form(table: dict[str, Any], path: str, form: str) -> None:
    """Drop what only the old form knows, fill the new form's starting values."""
    forms = FORMS.get(path, {})
    if form not in forms:
        return  # validation will say what is allowed
    model, starts = forms[form]
    for key in [key for key in table if key not in model.model_fields and key != "preset"]:
        del table[key]
    for key, value in starts.items():
        table.setdefault(key, copy.deepcopy(value))


def value_at(document: Document, path: str) -> Any:
    """The document's own value at a path, or None where it does not name one."""
    here: Any = document
    for part in path.split("."):
        if isinstance(here, list) and part.isdigit() and int(part) < len(here):
            here = here[int(part)]
        elif isinstance(here, Mapping) and part in here:
            here = here[part]
        else:
            return None
    return here


def saved(document: Document) -> str:
    """The document as the text of a design file, header first."""
    import tomli_w

    rest = {key: value for key, value in document.items() if key not in HEADER}
    return tomli_w.dumps({**HEADER, **rest})


def load(path_or_name: str | Path) -> Fiberscope:
    """The fiberscope of a file or of a demo design, without its document."""
    return open(path_or_name).fiberscope
