"""What the tables of the design file are made of, read from the Specs: kinds of fields, bounds, tables in order."""

import math
from collections.abc import Iterator
from dataclasses import dataclass
from types import NoneType
from typing import Annotated, Any, Literal, get_args, get_origin

from pydantic.fields import FieldInfo

from optics.fiberscope import FORMS, Fiberscope
from optics.presets import Document, value_at
from optics.spec import Curve, Spec


@dataclass(frozen=True, slots=True)
class Bounds:
    """What is possible (None: no bound) and what is usual."""

    low: float | None
    high: float | None
    usual: tuple[float, float] | None


@dataclass(frozen=True, slots=True)
class Table:
    """One table of the design file: where it stands, its Spec, and whether it can be left out."""

    path: str
    model: type[Spec]
    optional: bool


def members(annotation: Any) -> tuple[Any, ...]:
    """The types that a field may be, without None; Annotated opened."""
    if get_origin(annotation) is Annotated:
        return members(get_args(annotation)[0])
    if annotation is Literal or get_origin(annotation) in (Literal, tuple):
        return (annotation,)
    parts = tuple(part for part in get_args(annotation) if part is not NoneType)
    return tuple(found for part in parts for found in members(part)) if parts else (annotation,)


def kind(field: FieldInfo) -> str:
    """table, list, curve, choice, solve (a number or a word), switch, whole, number or text."""
    found = members(field.annotation)
    first = found[0]
    if all(isinstance(item, type) and issubclass(item, Spec) for item in found):
        return "curve" if first is Curve else "table"
    if get_origin(first) is tuple:
        return "list"
    if len(found) == 2 and float in found:
        return "solve"
    if get_origin(first) is Literal:
        return "choice"
    return {bool: "switch", int: "whole", float: "number"}.get(first, "text")


def choices(field: FieldInfo) -> tuple[str, ...]:
    """The words that a choice allows."""
    return next(get_args(item) for item in members(field.annotation) if get_origin(item) is Literal)


def item_model(field: FieldInfo) -> type[Spec]:
    """The Spec of a list's items."""
    return get_args(members(field.annotation)[0])[0]


def most_items(field: FieldInfo) -> int | None:
    """The most items that a list may hold."""
    return next((item.max_length for item in field.metadata if hasattr(item, "max_length")), None)


def fewest_items(field: FieldInfo) -> int:
    return next((item.min_length for item in field.metadata if hasattr(item, "min_length")), 0)


def is_required(field: FieldInfo) -> bool:
    return field.is_required()


def is_optional(field: FieldInfo) -> bool:
    """Whether None is a value of the field."""
    return NoneType in get_args(field.annotation)


def extra(field: FieldInfo, key: str) -> Any:
    return (field.json_schema_extra or {}).get(key)


def bounds(field: FieldInfo) -> Bounds:
    """Hard and usual bounds of a number."""
    limits = list(field.metadata)
    for part in get_args(field.annotation):
        limits += [item for given in getattr(part, "__metadata__", ()) for item in getattr(given, "metadata", ())]
    low = next(
        (bound for item in limits for key in ("ge", "gt") if (bound := getattr(item, key, None)) is not None), None
    )
    high = next(
        (bound for item in limits for key in ("le", "lt") if (bound := getattr(item, key, None)) is not None), None
    )
    usual = extra(field, "usual")
    return Bounds(low, high, tuple(map(float, usual)) if usual else None)


def default_form(path: str) -> str | None:
    """The form of a tagged table that does not name one."""
    forms = FORMS[path]
    default = next(iter(forms.values()))[0].model_fields["form"].default
    return default if default in forms else None


def spec_of(path: str, document: Document | None = None) -> type[Spec] | None:
    """The Spec of a table by its path; of a tagged one that of the document's form, else the first that knows the rest."""
    here: list[type[Spec]] = [Fiberscope]
    for depth, key in enumerate(parts := path.split("."), start=1):
        if key.isdigit():
            continue
        field = next((model.model_fields[key] for model in here if key in model.model_fields), None)
        if field is None:
            return None
        found = members(field.annotation)
        here = (
            [item_model(field)]
            if get_origin(found[0]) is tuple
            else [m for m in found if isinstance(m, type) and issubclass(m, Spec)]
        )
        at = ".".join(parts[:depth])
        form = value_at(document, f"{at}.form") if document and at in FORMS else None
        if form in FORMS.get(at, {}):
            here = [FORMS[at][form][0]]
    return here[0] if here else None


def tables(document: Document, path: str) -> Iterator[Table]:
    """The tables that stand in the document at and below a path, in the order of the light."""
    model = spec_of(path, document)
    yield Table(path, model, False)
    for key, field in model.model_fields.items():
        at = f"{path}.{key}"
        if kind(field) == "table" and (not is_optional(field) or value_at(document, at) is not None):
            below = list(tables(document, at))
            yield Table(at, below[0].model, is_optional(field))
            yield from below[1:]


def absent(document: Document, path: str) -> Iterator[tuple[str, FieldInfo]]:
    """(path, field) of the optional tables at and below a path that the document leaves out."""
    for table in tables(document, path):
        for key, field in table.model.model_fields.items():
            if kind(field) == "table" and is_optional(field) and value_at(document, f"{table.path}.{key}") is None:
                yield f"{table.path}.{key}", field


def step(span: float) -> float:
    """A round step for a span: about a hundredth of it, as 1, 2 or 5 times a power of ten.

    >>> step(5.7), step(0.8), step(2980.0)
    (0.05, 0.005, 20.0)
    """
    power = 10.0 ** math.floor(math.log10(span / 100))
    return float(f"{max(factor * power for factor in (1, 2, 5) if factor * power <= span / 100 * 1.0000001):.3g}")
