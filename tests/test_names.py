"""The unit is in the name: every field of a Spec or a result, every public number in and out of a formula."""

import dataclasses
import importlib
import inspect
import pkgutil
import types
import typing

import numpy as np
import pytest
from pydantic import BaseModel

import optics
from optics.units import AnyUnit, Flags, Numbers, unit_of

SKIPPED = {"ui", "commands", "figures", "__main__", "circles", "units", "tables", "spec", "published", "presets"}
# Names that stand for a number whose unit is named beside it, a random seed, or a whole-number count.
BARE = {
    "value",
    "limit",
    "wanted",
    "got",
    "margin",
    "low",
    "high",
    "standard_error",
    "count",
    "seed",
    "rays",
    # the square of a sine has no token of its own; a flux is in whatever unit it came in
    "sine2_edges",
    "flux",
}
MODULES = [
    importlib.import_module(found.name)
    for found in pkgutil.walk_packages(optics.__path__, "optics.")
    if found.name.split(".")[1] not in SKIPPED
]


def is_number(annotation) -> bool:
    """Whether an annotation says float or array of floats (whole numbers are counts, texts and Specs are not numbers)."""
    if annotation in (AnyUnit, Flags):
        return False
    if annotation in (float, np.ndarray) or annotation == Numbers:
        return True
    if isinstance(annotation, types.UnionType) or typing.get_origin(annotation) is typing.Union:
        return any(is_number(part) for part in typing.get_args(annotation) if part is not type(None))
    if typing.get_origin(annotation) is typing.Annotated:
        return is_number(typing.get_args(annotation)[0])
    return False


def named_in(module, kind):
    return [
        found
        for _, found in inspect.getmembers(module, kind)
        if found.__module__ == module.__name__ and not found.__name__.startswith("_")
    ]


@pytest.mark.parametrize("module", MODULES, ids=lambda module: module.__name__)
def test_fields_carry_their_unit(module):
    for cls in named_in(module, inspect.isclass):
        if issubclass(cls, BaseModel):
            fields = {name: field.annotation for name, field in cls.model_fields.items()}
        elif dataclasses.is_dataclass(cls):
            fields = typing.get_type_hints(cls, include_extras=True)
        else:
            continue
        for name, annotation in fields.items():
            if is_number(annotation) and name not in BARE and not name.startswith("_"):
                assert unit_of(name), f"{cls.__name__}.{name} does not end in a unit"


@pytest.mark.parametrize("module", MODULES, ids=lambda module: module.__name__)
def test_formulas_carry_their_units(module):
    for function in named_in(module, inspect.isfunction):
        hints = typing.get_type_hints(function, include_extras=True)
        returns = hints.pop("return", None)
        for name, annotation in hints.items():
            if annotation == Numbers and name not in BARE:
                assert unit_of(name), f"{function.__name__}({name}) does not end in a unit"
        if returns == Numbers:
            assert unit_of(function.__name__), f"{function.__name__} returns a number and does not end in its unit"


@pytest.mark.parametrize("module", MODULES, ids=lambda module: module.__name__)
def test_formulas_take_keywords_and_have_no_default_quantity(module):
    if module.__name__.split(".")[1] not in ("media", "source", "guide", "scene", "image", "viewer", "body"):
        return
    for function in named_in(module, inspect.isfunction):
        if Numbers not in typing.get_type_hints(function).values():
            continue
        for name, parameter in inspect.signature(function).parameters.items():
            assert parameter.kind is parameter.KEYWORD_ONLY, f"{function.__name__}({name}) must be keyword-only"
            if typing.get_type_hints(function).get(name) == Numbers:
                assert parameter.default is parameter.empty, f"{function.__name__}({name}) has a default quantity"
        assert not function.__name__.startswith(("calc_", "get_", "compute_"))
        assert function.__doc__, f"{function.__name__} says nothing of what it is"


def test_units_are_a_closed_list():
    assert unit_of("face_irradiance_w_m2") == "w_m2"
    assert unit_of("attenuation_db_m") == "db_m"
    assert unit_of("half_angle_deg") == "deg"
    assert unit_of("photons") == "1"
    assert unit_of("length") is None
