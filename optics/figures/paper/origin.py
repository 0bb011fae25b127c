"""Every value of a design in words: what it is, how far it may be off, and where it comes from. No drawing."""

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from optics.presets import Document, value_at
from optics.tables import UNSOURCED, Sourced, sources

SOFT, SOFT_BASES = "≈", ("assumed", "remembered")
BOOKS = {"trade": "practice", "assumed": "", "own_scenario": "given by this design"}
ORDER = ("", "source", "guide", "scene", "image", "viewer", "body", "needs")

Pair = tuple[str, str]


@dataclass(frozen=True, slots=True)
class Value:
    """One value in force: name, value (of a curve its range), tolerance, source with the place in it, basis."""

    name: str
    value: str
    tolerance: str
    source: str
    basis: str
    soft: bool


@dataclass(frozen=True, slots=True)
class Table:
    """One table of the design: its preset, what the design gives itself, what came from elsewhere, what was left at defaults.

    `same`: another table whose values from elsewhere are the same, one by one; they are told there.
    """

    path: str
    preset: str
    given: tuple[Pair, ...]
    values: tuple[Value, ...]
    defaults: tuple[Pair, ...] = ()
    same: str = ""


def softness(sourced: Mapping[str, Sourced]) -> str:
    """How many of the values that the design does not state itself rest on memory or on an assumption."""
    elsewhere = [found for found in sourced.values() if found.source != "own_scenario"]
    soft = sum(found.basis in SOFT_BASES for found in elsewhere)
    return (
        f"{soft} of {len(elsewhere)} values from presets and defaults are remembered or assumed {SOFT}; the others are read, "
        "digitized or derived."
    )


def tables(document: Document, sourced: Mapping[str, Sourced]) -> Iterator[Table]:
    """Every value in force by the design's tables, in the order of the light; a table that repeats another says so."""
    groups: dict[str, dict[str, Sourced]] = {}
    for path, found in sourced.items():
        table, _, name = path.rpartition(".")
        groups.setdefault(table, {})[name] = found
    told: dict[tuple[tuple[str, Sourced], ...], str] = {}
    for path in sorted(groups, key=lambda path: ORDER.index(path.partition(".")[0])):
        group = groups[path]
        given = tuple((name, exact(found.value)) for name, found in group.items() if found.source == "own_scenario")
        left = {name: exact(found.value) for name, found in group.items() if _by_default(found)}
        elsewhere = tuple(
            (name, found) for name, found in group.items() if found.source != "own_scenario" and name not in left
        )
        preset = value_at(document, f"{path}.preset") or ""
        key = tuple((name, Sourced(repr(found.value), *_rest(found))) for name, found in elsewhere)
        same = told.setdefault(key, path) if len(elsewhere) > 2 else path
        values = tuple(_value(name, found) for name, found in elsewhere) if same == path else ()
        yield Table(path, str(preset), given, values, tuple(left.items()), "" if same == path else same)


def _by_default(found: Sourced) -> bool:
    """Whether a value came into force because nobody named one, and is no more than assumed."""
    return found.source in UNSOURCED and (found.at, found.basis) == ("default", "assumed")


def _rest(found: Sourced) -> tuple[Any, ...]:
    return found.low, found.high, found.source, found.at, found.basis


def _value(name: str, found: Sourced) -> Value:
    curve = isinstance(found.value, str) and found.value.startswith("curve")
    bounds = [None if bound is None else ("×" if curve else "") + f"{bound:.6g}" for bound in (found.low, found.high)]
    tolerance = "" if bounds == [None, None] else " – ".join(bound or "…" for bound in bounds)
    soft = found.basis in SOFT_BASES
    value = re.sub(r"curve, (\d+)-(\d+) nm", r"\1–\2 nm", found.value) if curve else exact(found.value)
    return Value(name, value, tolerance, source(found), found.basis, soft)


def source(found: Sourced) -> str:
    """The title of a value's source and the place in it."""
    book = sources().get(found.source, {})
    title = BOOKS[found.source] if found.source in UNSOURCED else ", ".join(
        str(book[key]) for key in ("title", "year") if book.get(key)
    )  # fmt: skip
    return ": ".join(filter(None, (title, found.at)))


def exact(value: Any) -> str:
    """A value as it was given, never rounded to other than what is meant.

    >>> exact(1.8), exact(400.0), exact("solve"), exact(True), exact([{"radius_mm": 30.0, "angle_deg": 90.0}]), exact([])
    ('1.8', '400', 'solve', 'yes', '(radius_mm 30, angle_deg 90)', 'none')
    """
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, Mapping):
        return "(" + ", ".join(f"{key} {exact(item)}" for key, item in value.items()) + ")"
    if isinstance(value, list | tuple):
        return ", ".join(exact(item) for item in value) or "none"
    return f"{value:.6g}" if isinstance(value, float | int) else str(value)
