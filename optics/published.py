"""Published values as rows: each holds one formula against a number that somebody else printed."""

import importlib
from dataclasses import dataclass
from decimal import Decimal
from typing import Any

import numpy as np

from optics.spec import OutOfRange
from optics.tables import BASES, PRESETS, UNSOURCED, read_toml, sources

KEYS = {"quantity", "given", "field", "item", "printed", "at", "because", "tolerance", "differs", "basis"}


@dataclass(frozen=True, slots=True)
class Row:
    """One printed value: of which function, for which arguments, where it stands, and how near we must come."""

    source: str
    quantity: str
    given: dict[str, Any]
    field: str | None
    item: int | None
    printed: str
    at: str
    tolerance: float
    because: str | None
    differs: str | None
    basis: str

    @property
    def name(self) -> str:
        return f"{self.source}: {self.quantity} = {self.printed}" + (f" ({self.at})" if self.at else "")


@dataclass(frozen=True, slots=True)
class Checked:
    """A row and what the formula gives; both in the unit of the quantity's name."""

    row: Row
    got: float
    met: bool


def rows() -> list[Row]:
    """All rows of presets/published/, by source."""
    return [row for path in sorted((PRESETS / "published").glob("*.toml")) for row in _rows_of(path)]


def check(row: Row) -> Checked:
    """The row's formula evaluated, and whether it agrees with what is printed."""
    *path, function = row.quantity.split(".")
    found = _found(path, function)
    answer = found(**{key: _argument(value) for key, value in row.given.items()}) if callable(found) else found
    if row.field:
        answer = getattr(answer, row.field)
    if row.item is not None:
        answer = np.asarray(answer)[row.item]
    got = float(np.asarray(answer).reshape(-1)[0]) if np.size(answer) == 1 else float("nan")
    return Checked(row, got, bool(abs(got - float(row.printed)) <= row.tolerance * (1 + 1e-9)))


def half_unit(printed: str) -> float:
    """Half a unit of the last printed digit.

    >>> half_unit("0.9069"), half_unit("4731"), half_unit("1.879e-4")
    (5e-05, 0.5, 5e-08)
    """
    return float(Decimal(5) * Decimal(10) ** (Decimal(printed).as_tuple().exponent - 1))


def _rows_of(path) -> list[Row]:
    raw, where = read_toml(path), f"presets/published/{path.name}"
    source = raw.get("source")
    if source not in sources() and source not in UNSOURCED:
        raise OutOfRange(f"{where}: source is {source!r}; it must be a key of presets/sources.toml.")
    return [_row(entry, source, f"{where}, row {number}") for number, entry in enumerate(raw.get("row", []), start=1)]


def _row(entry: dict[str, Any], source: str, where: str) -> Row:
    for key in entry:
        if key not in KEYS:
            raise OutOfRange(f"{where}: {key} is not a known key; known: {', '.join(sorted(KEYS))}.")
    if not isinstance(entry.get("printed"), str) or "quantity" not in entry:
        raise OutOfRange(f"{where}: printed is {entry.get('printed')!r}; it must be a text with the digits as printed.")
    if "tolerance" in entry and "because" not in entry:
        raise OutOfRange(
            f"{where}: tolerance is {entry['tolerance']}; a tolerance of its own needs a reason (because)."
        )
    basis = entry.get("basis", "read")
    if basis not in BASES:
        raise OutOfRange(f"{where}: basis is {basis!r}; it must be one of {', '.join(BASES)}.")
    return Row(
        source,
        entry["quantity"],
        entry.get("given", {}),
        entry.get("field"),
        entry.get("item"),
        entry["printed"],
        entry.get("at", ""),
        float(entry.get("tolerance", half_unit(entry["printed"]))),
        entry.get("because"),
        entry.get("differs"),
        basis,
    )


def _found(path: list[str], name: str) -> Any:
    """The function, or the attribute of a class, at a dotted path under `optics`."""
    try:
        return getattr(importlib.import_module(".".join(["optics", *path])), name)
    except ModuleNotFoundError:
        return getattr(_found(path[:-1], path[-1]), name)


def _argument(value: Any) -> Any:
    """Lists of numbers become arrays; `{ make = "scene.ports.Disc", ... }` builds that object."""
    if isinstance(value, dict) and "make" in value:
        *path, name = value["make"].split(".")
        return _found(path, name)(**{key: _argument(item) for key, item in value.items() if key != "make"})
    if isinstance(value, list):
        items = [_argument(item) for item in value]
        return np.array(items, dtype=float) if items and all(isinstance(item, int | float) for item in items) else items
    return value
