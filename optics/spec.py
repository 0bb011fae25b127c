"""Spec: what a person or a file supplies. Caveats and refusals: how the tool speaks up.

Two kinds of wrong. Impossible (a negative length, an NA above the index) raises `OutOfRange`.
Outside the range that a formula's authors tested computes, and `beyond` finds the words for a
`Caveat`. Nothing is clipped in silence.
"""

import difflib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Any, Literal, get_args, get_origin

import numpy as np
from pydantic import BaseModel, ConfigDict, Field, ValidationError, model_validator
from pydantic.fields import FieldInfo
from pydantic_core import PydanticUndefined


class OutOfRange(ValueError):
    """An impossible value: the sentence names the argument, its value and what is allowed."""


class Spec(BaseModel):
    """Base of everything that a person or a file supplies: frozen, strict, nothing unknown."""

    model_config = ConfigDict(frozen=True, extra="forbid", strict=True, allow_inf_nan=False)


@dataclass(frozen=True, slots=True)
class Caveat:
    """A sentence about this design that the reader should know, and the path it is about."""

    where: str
    text: str


def quantity(
    meaning: str,
    *,
    default: Any = PydanticUndefined,
    usual: tuple[float, float] | None = None,
    source: str | None = None,
    common: bool = False,
    gt: float | None = None,
    ge: float | None = None,
    lt: float | None = None,
    le: float | None = None,
) -> Any:
    """One field of a Spec: its meaning, hard bounds (what is possible) and usual bounds.

    `usual` feeds sliders, pick and random designs; `common` marks the few controls that people
    move most; `source` is the key of a sourced default (or "trade", "assumed").
    """
    extra = {key: value for key, value in (("usual", usual), ("source", source), ("common", common)) if value}
    return Field(default=default, description=meaning, json_schema_extra=extra or None, gt=gt, ge=ge, lt=lt, le=le)


def require(name: str, value: Any, allowed: str, ok: Any) -> None:
    """Raise OutOfRange unless `ok` holds everywhere; the sentence shows the first bad value.

    >>> require("bore_mm", -1.0, "above 0", -1.0 > 0)
    Traceback (most recent call last):
    optics.spec.OutOfRange: bore_mm is -1; it must be above 0.
    """
    good = np.asarray(ok)
    if good.all():
        return
    values = np.broadcast_to(np.asarray(value, dtype=float), np.broadcast_shapes(good.shape, np.shape(value)))
    first = values[~np.broadcast_to(good, values.shape)].flat[0]
    raise OutOfRange(f"{name} is {first:g}; it must be {allowed}.")


def positive(**values: Any) -> None:
    """Each named value must be finite and above 0, everywhere."""
    for name, value in values.items():
        require(name, value, "above 0", np.isfinite(value) & (np.asarray(value) > 0))


def not_negative(**values: Any) -> None:
    """Each named value must be finite and 0 or more, everywhere."""
    for name, value in values.items():
        require(name, value, "0 or more", np.isfinite(value) & (np.asarray(value) >= 0))


def within(low: float, high: float, **values: Any) -> None:
    """Each named value must lie in [low, high], everywhere."""
    for name, value in values.items():
        array = np.asarray(value)
        require(name, value, f"from {low:g} to {high:g}", (array >= low) & (array <= high))


def beyond(tested: Mapping[str, tuple[float, float]], **values: float) -> list[str]:
    """One sentence for each value outside the range its formula was tested in.

    >>> beyond({"relative_bend": (0.0, 0.42)}, relative_bend=0.5)
    ['relative bend is 0.5, outside the tested 0 to 0.42']
    """
    said = []
    for name, value in values.items():
        low, high = tested[name]
        if not low <= value <= high:
            said.append(f"{name.replace('_', ' ')} is {value:.3g}, outside the tested {low:g} to {high:g}")
    return said


class Curve(Spec):
    """A sampled function of wavelength: strictly increasing abscissa; its ends are its valid range."""

    wavelength_nm: tuple[float, ...] = Field(strict=False, min_length=2, description="abscissa, strictly increasing")
    value: tuple[float, ...] = Field(strict=False, min_length=2, description="ordinate, in the unit of the curve's key")

    @model_validator(mode="after")
    def _increasing(self):
        if len(self.wavelength_nm) != len(self.value):
            raise ValueError(
                f"has {len(self.wavelength_nm)} wavelengths but {len(self.value)} values; it needs as many of each"
            )
        steps = np.diff(self.wavelength_nm)
        if not (steps > 0).all():
            at = int(np.argmin(steps > 0))
            raise ValueError(
                f"goes from {self.wavelength_nm[at]:g} to {self.wavelength_nm[at + 1]:g} nm; "
                "its wavelengths must be strictly increasing"
            )
        if min(self.value) < 0:
            raise ValueError(f"has the value {min(self.value):g}; each must be 0 or more")
        return self

    @cached_property
    def abscissa(self) -> np.ndarray:
        return np.array(self.wavelength_nm)

    @cached_property
    def ordinate(self) -> np.ndarray:
        return np.array(self.value)

    def __eq__(self, other: object) -> bool:
        return isinstance(other, Curve) and (self.wavelength_nm, self.value) == (other.wavelength_nm, other.value)

    def __hash__(self) -> int:
        return hash((self.wavelength_nm, self.value))


# From a failed validation to one sentence


def allowed(field: FieldInfo) -> str:
    """What a field of a Spec allows, in words.

    >>> class Lens(Spec):
    ...     focal_mm: float = quantity("focal length", gt=0, le=50)
    >>> allowed(Lens.model_fields["focal_mm"])
    'above 0 and at most 50'
    """
    words = {"gt": "above {:g}", "ge": "at least {:g}", "lt": "below {:g}", "le": "at most {:g}"}
    said = [
        text.format(bound)
        for item in field.metadata
        for key, text in words.items()
        if (bound := getattr(item, key, None)) is not None
    ]
    return " and ".join(said)


def refusal(model: type[BaseModel], wrong: ValidationError) -> str:
    """The first error of a validation as one sentence: path, value, what is allowed (and the nearest known name)."""
    error = min(wrong.errors(), key=lambda item: item["type"] == "missing")
    path, owner, field = _walk(model, error["loc"])
    context, value, kind = error.get("ctx", {}), error["input"], error["type"]
    if kind == "missing":
        return f"{path} is missing; it is {field.description}." if field else f"{path} is missing."
    if kind == "extra_forbidden":
        known = list(owner.model_fields) if owner else []
        near = difflib.get_close_matches(str(error["loc"][-1]), known, n=1, cutoff=0.5)
        hint = f" (nearest: {near[0]})" if near else ""
        return f"{path} is not a known key{hint}; known here: {', '.join(known)}."
    if kind == "union_tag_not_found":
        return f"{path}.form is missing; it must be one of {_tags(field)}."
    if kind == "union_tag_invalid":
        return f"{path}.form is {context.get('tag')!r}; it must be one of {_tags(field)}."
    if kind == "literal_error":
        return f"{path} is {value!r}; it must be {context['expected']}."
    if kind == "value_error":
        said = str(context["error"])
        return f"{path} {said}." if path else said
    bounds = field and allowed(field)
    number = (
        "a finite number" if "float" in kind or kind == "finite_number" else "a whole number" if "int" in kind else ""
    )
    if number or kind in ("greater_than", "greater_than_equal", "less_than", "less_than_equal"):
        shown = f"{value:g}" if isinstance(value, float | int) and not isinstance(value, bool) else repr(value)
        return f"{path} is {shown}; it must be {' '.join(filter(None, (number, bounds)))}."
    return f"{path} is {value!r}: {error['msg'][0].lower()}{error['msg'][1:]}."


def _tags(field: FieldInfo | None) -> str:
    members = _members(field.annotation) if field else []
    return ", ".join(sorted({tag for member in members for tag in _form_of(member)}))


def _form_of(member: Any) -> tuple[str, ...]:
    form = getattr(member, "model_fields", {}).get("form")
    return get_args(form.annotation) if form else ()


def _members(annotation: Any) -> list[Any]:
    """The types an annotation may be, unions and tuples opened."""
    inner = [part for part in get_args(annotation) if part not in (type(None), Ellipsis)]
    if not inner or annotation is None or get_origin(annotation) is Literal:
        return [annotation]
    return [member for part in inner for member in _members(part)]


def _walk(model: Any, loc: tuple) -> tuple[str, Any, FieldInfo | None]:
    """(dotted path without union tags, the Spec that owns its last part, the field) of an error's place."""
    path: list[str] = []
    owner, field, here = None, None, [model]
    for part in loc:
        specs = [item for item in here if isinstance(item, type) and issubclass(item, BaseModel)]
        holder = next((item for item in specs if part in item.model_fields), None)
        tagged = [item for item in specs if part in _form_of(item)]
        if isinstance(part, int):
            path.append(str(part))
        elif tagged and (len(here) > 1 or holder is None):
            here = tagged
        elif holder is not None:
            owner, field, here = holder, holder.model_fields[part], _members(holder.model_fields[part].annotation)
            path.append(part)
        elif specs:
            owner, field = specs[0], None
            path.append(str(part))
    return ".".join(path), owner, field
