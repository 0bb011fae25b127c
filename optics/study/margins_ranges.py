"""The tolerances of a design: what its presets state and what the user gives, each held against what can be."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace

import numpy as np
from pydantic import BaseModel
from pydantic.fields import FieldInfo

from optics.chain.columns import Columns, columns
from optics.chain.solve import PATHS, solved
from optics.fiberscope import Fiberscope
from optics.presets import Design
from optics.spec import Curve, OutOfRange, allowed
from optics.tables import nearest

GIVEN = "given"  # basis of a tolerance that the user states
# A factor on a lamp's whole spectrum changes nothing: its flux is stated apart.
WITHOUT_EFFECT = ("source.lamp.spectrum",)
COMPARED = {"gt": np.greater, "ge": np.greater_equal, "lt": np.less, "le": np.less_equal}


@dataclass(frozen=True, slots=True)
class Tolerance:
    """The range of one value of the design; of a curve: of a factor on it (value 1)."""

    path: str
    value: float
    low: float
    high: float
    source: str
    basis: str
    curve: bool = False

    @property
    def soft(self) -> bool:
        """Whether the range is only assumed or remembered."""
        return self.basis in ("assumed", "remembered")


def tolerances(
    design: Design, given: Mapping[str, tuple[float, float]] | None = None, only: bool = False
) -> tuple[Tolerance, ...]:
    """The tolerances of a design: those of its presets (none with `only`), and those given by path in their stead.

    Raises OutOfRange: a given path that names no number or curve, or limits that leave out the nominal value.
    """
    given = given or {}
    scope, table, found = design.fiberscope, nominal_columns(design.fiberscope), {}
    for path, said in design.sourced.items():
        if only or path in given or path in WITHOUT_EFFECT or (said.low is None and said.high is None):
            continue
        curve = path in table.curve
        if curve and f"{path}.value" in design.sourced:
            continue  # a curve of the file's own, which the preset's tolerance does not concern
        if not curve and (isinstance(said.value, str | bool) or place(path)[0] not in table.number):
            continue
        value = 1.0 if curve else float(said.value)
        low, high = (value if end is None else float(end) for end in (said.low, said.high))
        if high > low:
            found[path] = Tolerance(path, value, low, high, said.source, said.basis, curve)
    return (*found.values(), *(_given(scope, path, *ends) for path, ends in given.items()))


def nominal_columns(scope: Fiberscope) -> Columns:
    """The one row of a design, with a part's diameter that is to be solved for settled once and for all.

    What is built is built to the nominal section; only the outer diameter follows from the parts as they come out.
    """
    table = columns([scope])
    if not any(path in table.text for path in PATHS):
        return table
    table = solved(table)
    return replace(table, text={path: found for path, found in table.text.items() if path not in PATHS})


def place(path: str) -> tuple[str, int | None]:
    """The column of a path, and the item in it where the path goes through a list.

    >>> place("guide.bundle.bends.0.radius_mm")
    ('guide.bundle.bends.radius_mm', 0)
    """
    items = [part for part in path.split(".") if part.isdigit()]
    return ".".join(part for part in path.split(".") if not part.isdigit()), int(items[0]) if items else None


def _given(scope: Fiberscope, path: str, low: float, high: float) -> Tolerance:
    """A tolerance that the user states, held against the field's own bounds."""
    if path.startswith("needs."):
        raise OutOfRange(f"--tolerance {path} is a need; only what the design is made of has a tolerance.")
    field, value = _field(scope, path)
    curve = isinstance(value, Curve)
    if not curve and type(value) is not float:
        is_what = "a whole number" if type(value) is int else "absent" if value is None else repr(value)
        raise OutOfRange(f"--tolerance {path}: the value is {is_what}; a tolerance needs a number or a curve.")
    nominal = 1.0 if curve else value
    about = "factors on the curve, around 1" if curve else f"limits around the nominal value {nominal:g}"
    if not low <= nominal <= high or low >= high:
        raise OutOfRange(f"--tolerance {path} is {low:g}:{high:g}; it must be {about}.")
    bounds = {} if curve else {key: bound for item in field.metadata for key, bound in _bounds(item)}
    for end in (low, high):
        if (curve and end < 0) or not all(COMPARED[key](end, bound) for key, bound in bounds.items()):
            must = "0 or more" if curve else allowed(field)
            raise OutOfRange(f"--tolerance {path} is {low:g}:{high:g}; both must be {must}.")
    return Tolerance(path, nominal, low, high, "--tolerance", GIVEN, curve)


def _bounds(item: object) -> Iterator[tuple[str, float]]:
    return ((key, bound) for key in COMPARED if (bound := getattr(item, key, None)) is not None)


def _field(scope: Fiberscope, path: str) -> tuple[FieldInfo, object]:
    """The field of a path and its value."""
    here, field, done = scope, None, []
    for part in path.split("."):
        known = list(type(here).model_fields) if isinstance(here, BaseModel) and not isinstance(here, Curve) else []
        if isinstance(here, tuple) and part.isdigit() and int(part) < len(here):
            here = here[int(part)]
        elif part in known:
            field, here = type(here).model_fields[part], getattr(here, part)
        else:
            there = ".".join(done) or "the design"
            raise OutOfRange(f"--tolerance {path} is not in the design: {there} has no {part!r}{nearest(part, known)}.")
        done.append(part)
    return field, here
