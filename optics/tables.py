"""Sourced tables and presets: the one TOML parser with provenance.

No number without a source: each value of a preset names the key of `presets/sources.toml` it
comes from, where in it, and on what basis. Files are read once; arrays handed out are read-only.
"""

import math
from dataclasses import dataclass
from functools import lru_cache
from itertools import pairwise
from pathlib import Path
from typing import Any

import numpy as np

from optics.spec import OutOfRange

PRESETS = Path(__file__).resolve().parent.parent / "presets"
BASES = ("read", "digitized", "derived", "assumed", "remembered")
# "trade": common practice, no source. "assumed": a choice of ours. "own_scenario": made up for a demonstration.
UNSOURCED = ("trade", "assumed", "own_scenario")
PLAIN = {"value", "low", "high", "source", "at", "basis", "note"}
CURVE = {"wavelength_nm", "value", "source", "at", "basis", "note", "tolerance_share", "low_share", "high_share"}
CODES = {"uint8": "<u1", "uint16": "<u2"}
TOP = {"kind", "name", "note", "values", "curve"}


@dataclass(frozen=True, slots=True)
class Sourced:
    """One value with its tolerance and where it comes from (a list of numbers becomes a tuple)."""

    value: float | int | str | bool | tuple[float, ...]
    low: float | None
    high: float | None
    source: str
    at: str
    basis: str


@dataclass(frozen=True, slots=True)
class SourcedCurve:
    """A curve over wavelength; low_share and high_share are factors on it (0.8 and 1.2 for +-20 %), or None."""

    wavelength_nm: tuple[float, ...]
    value: tuple[float, ...]
    source: str
    at: str
    basis: str
    low_share: float | None = None
    high_share: float | None = None


@dataclass(frozen=True, slots=True)
class Preset:
    """A family by construction and material: `values` by dotted name, `curves` by name."""

    kind: str
    name: str
    note: str
    values: dict[str, Sourced]
    curves: dict[str, SourcedCurve]


def read_toml(path: str | Path) -> dict[str, Any]:
    """The content of a TOML file; what cannot be read is one sentence with file and line."""
    import tomllib

    inside = Path(path).is_relative_to(PRESETS.parent)
    shown = Path(path).relative_to(PRESETS.parent).as_posix() if inside else str(path)
    try:
        return tomllib.loads(Path(path).read_text(encoding="utf-8"))
    except tomllib.TOMLDecodeError as wrong:
        raise OutOfRange(f"{shown} is not valid TOML: {wrong}.") from None
    except UnicodeDecodeError as wrong:
        line = wrong.object[: wrong.start].count(b"\n") + 1
        raise OutOfRange(f"{shown} is not text in UTF-8 (at line {line}).") from None
    except (OSError, ValueError):
        raise OutOfRange(f"{shown} cannot be read; it must be an existing TOML file.") from None


@lru_cache(maxsize=1)
def sources() -> dict[str, dict[str, Any]]:
    """Every source by its key, as `presets/sources.toml` has it."""
    return read_toml(PRESETS / "sources.toml")


def parse_preset(raw: dict[str, Any], where: str) -> Preset:
    """A preset from its plain dict; `where` names the file in messages. Refuses what has no source."""
    _known(raw, TOP, where, "the top level")
    raw = {"name": Path(where).stem, **raw}
    for key in ("kind", "name", "note"):
        if not isinstance(raw.get(key), str):
            raise OutOfRange(f"{where}: {key} is {raw.get(key)!r}; it must be a text.")
    values, curves = (_mapping(raw.get(key, {}), where, key) for key in ("values", "curve"))
    return Preset(
        *(raw[key] for key in ("kind", "name", "note")),
        values=dict(_walk(values, where, "")),
        curves={key: _curve(curve, where, f"curve.{key}") for key, curve in curves.items()},
    )


def check_provenance(entry: dict[str, Any], where: str, key: str) -> tuple[str, str, str]:
    """(source, at, basis) of an entry, each checked."""
    known = sources()
    source, at, basis = entry.get("source"), entry.get("at", ""), entry.get("basis")
    if source not in UNSOURCED and source not in known:
        said = "no source" if source is None else f"the source {source!r}{nearest(str(source), list(known))}"
        raise OutOfRange(
            f"{where}: {key} has {said}; it must be a key of presets/sources.toml, trade, assumed or own_scenario."
        )
    if basis not in BASES:
        raise OutOfRange(f"{where}: {key} has the basis {basis!r}; it must be one of {', '.join(BASES)}.")
    if not isinstance(at, str):
        raise OutOfRange(f"{where}: {key} has at = {at!r}; it must be a text (page, table, equation).")
    return source, at, basis


def nearest(word: str, known: list[str]) -> str:
    """The words "(nearest: ...)" with the known word that looks most like this one, or nothing."""
    import difflib

    found = difflib.get_close_matches(word, known, n=1, cutoff=0.4)
    return f" (nearest: {found[0]})" if found else ""


@lru_cache(maxsize=64)
def preset_names(folder: str) -> tuple[str, ...]:
    """The presets of one folder, in order of name."""
    return tuple(sorted(path.stem for path in (PRESETS / folder).glob("*.toml")))


@lru_cache(maxsize=512)
def preset(folder: str, name: str) -> Preset:
    """One preset by folder and name."""
    return parse_preset(read_toml(_file(folder, name)), f"presets/{folder}/{name}.toml")


@lru_cache(maxsize=128)
def table(name: str) -> dict[str, np.ndarray]:
    """The columns of presets/tables/NAME.toml, read-only arrays of equal length."""
    raw, where = _raw_table(name)
    columns = {key: _frozen(_numbers(column, where, key)) for key, column in raw.get("columns", {}).items()}
    lengths = {key: len(column) for key, column in columns.items()}
    if not columns or len(set(lengths.values())) > 1:
        raise OutOfRange(f"{where}: [columns] has the lengths {lengths}; it must have columns of one length.")
    return columns


def column(table_name: str, name: str) -> np.ndarray:
    """One column of a table."""
    columns = table(table_name)
    if name not in columns:
        listed = f"{nearest(name, list(columns))}; it has: {', '.join(columns)}"
        raise OutOfRange(f"presets/tables/{table_name}.toml has no column {name!r}{listed}.")
    return columns[name]


@lru_cache(maxsize=32)
def packed(name: str) -> np.ndarray:
    """A packed table (see `pack`) of presets/tables/, as a read-only array."""
    return _frozen(unpack(*_raw_table(name)))


def pack(array: np.ndarray, low: float, high: float, dtype: str = "uint16") -> dict[str, Any]:
    """What a packed table holds: value = low + (high - low) code/maxcode, codes deflated, in base64.

    >>> unpack(pack(np.array([[0.0, 0.5], [0.25, 1.0]]), 0.0, 1.0), "here").round(4).tolist()
    [[0.0, 0.5], [0.25, 1.0]]
    """
    import base64
    import zlib

    array = np.asarray(array, dtype=float)
    if dtype not in CODES or not high > low or not ((array >= low) & (array <= high)).all():
        allowed = f"low and high must enclose the values, dtype be one of {', '.join(CODES)}"
        raise OutOfRange(f"pack: low is {low:g}, high {high:g}, dtype {dtype!r}; {allowed}.")
    codes = np.rint((array - low) / (high - low) * np.iinfo(CODES[dtype]).max).astype(CODES[dtype])
    text = base64.b64encode(zlib.compress(codes.tobytes(), 9)).decode()
    return {"shape": list(array.shape), "low": float(low), "high": float(high), "dtype": dtype, "bytes": text}


def unpack(raw: dict[str, Any], where: str) -> np.ndarray:
    """The array that `pack` packed (to half a code)."""
    import base64
    import zlib

    try:
        kind = CODES[raw["dtype"]]
        codes = np.frombuffer(zlib.decompress(base64.b64decode(raw["bytes"])), dtype=kind).reshape(raw["shape"])
        return raw["low"] + (raw["high"] - raw["low"]) * (codes / np.iinfo(kind).max)
    except (KeyError, TypeError, ValueError, zlib.error) as wrong:
        raise OutOfRange(f"{where}: its packed array cannot be read ({type(wrong).__name__}: {wrong}).") from None


def _raw_table(name: str) -> tuple[dict[str, Any], str]:
    raw, where = read_toml(_file("tables", name)), f"presets/tables/{name}.toml"
    check_provenance(raw, where, "the table")
    return raw, where


def _file(folder: str, name: str) -> Path:
    names = preset_names(folder)
    if name not in names:
        listed = ", ".join(names) or "none"
        raise OutOfRange(f"presets/{folder} has no {name!r}{nearest(str(name), list(names))}; it has: {listed}.")
    return PRESETS / folder / f"{name}.toml"


def _walk(tables: dict[str, Any], where: str, prefix: str):
    """(dotted name, Sourced) of every leaf; a table with a key `value` is a leaf."""
    for key, entry in tables.items():
        dotted = f"{prefix}{key}"
        if "value" in _mapping(entry, where, f"values.{dotted}") or PLAIN.issuperset(entry):
            yield dotted, _sourced(entry, where, f"values.{dotted}")
        else:
            yield from _walk(entry, where, f"{dotted}.")


def _sourced(entry: dict[str, Any], where: str, key: str) -> Sourced:
    _known(entry, PLAIN, where, key)
    value = entry.get("value")
    if isinstance(value, list):
        value = _numbers(value, where, key)
    elif not isinstance(value, str | bool):
        _number(value, where, key)
    low, high = entry.get("low"), entry.get("high")
    for number in (low, high, value) if (low, high) != (None, None) else ():
        if number is not None:
            _number(number, where, f"{key}, as it has a tolerance,")
    if (low is not None and low > value) or (high is not None and high < value):
        raise OutOfRange(f"{where}: {key} is {value:g} with low {low} and high {high}; it must lie between them.")
    return Sourced(value, low, high, *check_provenance(entry, where, key))


def _curve(entry: Any, where: str, key: str) -> SourcedCurve:
    _known(_mapping(entry, where, key), CURVE, where, key)
    at_nm, value = (_numbers(entry.get(column), where, f"{key}.{column}") for column in ("wavelength_nm", "value"))
    if len(at_nm) != len(value) or len(value) < 2:
        said = f"{len(at_nm)} wavelengths and {len(value)} values"
        raise OutOfRange(f"{where}: {key} has {said}; it must have as many of each, 2 or more.")
    for before, after in pairwise(at_nm):
        if after <= before:
            raise OutOfRange(f"{where}: {key} goes from {before:g} to {after:g} nm; it must be strictly increasing.")
    tolerance, low, high = (entry.get(name) for name in ("tolerance_share", "low_share", "high_share"))
    if tolerance is not None:
        low, high = 1.0 - _number(tolerance, where, key), 1.0 + tolerance
    if (
        not 0.0
        <= _number(1.0 if low is None else low, where, key)
        <= 1.0
        <= _number(1.0 if high is None else high, where, key)
    ):
        raise OutOfRange(f"{where}: {key} has the tolerance factors {low} and {high}; they must enclose 1, from 0 up.")
    return SourcedCurve(at_nm, value, *check_provenance(entry, where, key), low, high)


def _known(entry: dict[str, Any], known: set[str], where: str, key: str) -> None:
    for found in entry:
        if found not in known:
            said = f"the unknown key {found!r}{nearest(found, sorted(known))}"
            raise OutOfRange(f"{where}: {key} has {said}; it may have {', '.join(sorted(known))}.")


def _mapping(entry: Any, where: str, key: str) -> dict[str, Any]:
    if isinstance(entry, dict):
        return entry
    raise OutOfRange(f"{where}: {key} is {entry!r}; it must be a table with value, source, at and basis.")


def _number(value: Any, where: str, key: str) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float) or not math.isfinite(value):
        raise OutOfRange(f"{where}: {key} is {value!r}; it must be a finite number.")
    return value


def _numbers(values: Any, where: str, key: str) -> tuple[float, ...]:
    if not isinstance(values, list):
        raise OutOfRange(f"{where}: {key} is {values!r}; it must be a list of numbers.")
    return tuple(float(_number(value, where, key)) for value in values)


def _frozen(values: Any) -> np.ndarray:
    array = np.array(values, dtype=float)
    array.flags.writeable = False
    return array
