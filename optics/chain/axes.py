"""Designs on axes of choices: their columns without a Fiberscope each, and every stage once for each distinct input.

`crossed` gathers the columns of combinations from the columns of each axis' choices; `holding` asks
the rules across fields as masks; `evaluate_axes` gives the numbers that `evaluate` gives, but runs
the body, the light, the target and the detail only on distinct inputs and gathers at the end.
"""

from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass, replace

import numpy as np

from optics.chain.columns import ABSENT, Columns, distinct_rows
from optics.chain.detail import detail
from optics.chain.evaluate import STEPS, Figures
from optics.chain.fit import TABLES as SECTION
from optics.chain.fit import fit
from optics.chain.light import Light, light
from optics.chain.solve import solved
from optics.chain.target import Lit, field_of_view, pupil_depth_mm, target
from optics.fiberscope import RULES, SOLVE
from optics.spec import OutOfRange
from optics.units import Flags

BLOCK = 128  # distinct inputs at a time: what fits the cache
# What each stage may read, with room to spare: a path too many costs a repetition, one too few a wrong number.
LIGHT = ("source.", "guide.", "scene.target.medium", "scene.cover.")
BODY = ("guide.", "scene.", "body.", "image.bundle.", "image.chip.", "image.tip.")
TARGET = ("scene.", "image.tip.")
DETAIL = ("image.", "viewer.", "scene.target.")

Progress = Callable[[float], bool | None]  # of the share done; False stops


@dataclass(frozen=True, slots=True)
class Axis:
    """The choices of one axis as rows of `table`, and the tables of the design file that they own."""

    prefixes: tuple[str, ...]
    table: Columns


def crossed(base: Columns, axes: list[tuple[Axis, np.ndarray]], count: int) -> Columns:
    """Columns of `count` combinations: of each axis the choice at the row numbers, all else as in the one row of `base`."""
    owned = tuple(prefix for axis, _ in axes for prefix in axis.prefixes)
    number, text, curve = {}, {}, {}
    for prefixes, table, rows in [((), base, np.zeros(count, int)), *((a.prefixes, a.table, rows) for a, rows in axes)]:

        def mine(path: str, prefixes: tuple[str, ...] = prefixes) -> bool:
            return path.startswith(prefixes) if prefixes else not path.startswith(owned)

        number.update({path: found[rows] for path, found in table.number.items() if mine(path)})
        text.update({path: found[rows] for path, found in table.text.items() if mine(path)})
        curve.update({path: replace(found, row=found.row[rows]) for path, found in table.curve.items() if mine(path)})
    return Columns(count, number, text, curve)


def holding(columns: Columns) -> Flags:
    """Whether all rules across fields hold, design by design [design]."""
    good = np.ones(columns.count, bool)
    for rule in RULES:
        values, there = [], np.ones(columns.count, bool)
        for path in rule.paths:
            found = columns.number.get(path)
            if found is None:
                found = columns.text.get(path)
            if found is None:
                there[:] = False
                break
            texts = found.dtype == object
            present = (
                (found != "") & (found != SOLVE) if texts else ~np.isnan(found).reshape(columns.count, -1).all(axis=1)
            )
            there &= present
            values.append(found)
        rows = np.flatnonzero(there)
        if rows.size:
            good[rows] &= rule.holds(*(found[rows] for found in values))
    return good


def evaluate_axes(columns: Columns, progress: Progress | None = None) -> tuple[Figures, Flags]:
    """(numbers and steps of every design, which designs are done): the numbers of `evaluate` without spectra and screening.

    `progress` is called with the share done after each block; when it returns False the rest is left out and its numbers
    are nan. Raises OutOfRange where a stage refuses a design.
    """
    columns = solved(columns)
    codes = _codes(columns)
    seen = field_of_view(columns)
    body, ports, ports_row = _fitted(columns, codes, seen)
    lit, lit_row = _lit(columns, codes)
    numbers = [_code(seen["field_radius_mm"]), _code(pupil_depth_mm(columns))]
    first, landed_row = _grouped([lit_row, ports_row, *numbers, codes.of(TARGET)])
    landed = _joined_lit(
        target(columns.take(rows), _lit_rows(lit, lit_row[rows]), _taken(ports, rows), _taken(seen, rows))
        for rows in _blocks(first)
    )
    first, told_row = _grouped([landed_row, codes.of(DETAIL)])
    told, ready = _told(columns, landed, landed_row, seen, first, progress)
    value = {name: found[lit_row] for name, found in lit.value.items()}
    value.update({name: found[landed_row] for name, found in landed.value.items()})
    value.update({name: found[told_row] for name, found in told.items()})
    value["frame_hz"] = 1.0 / value["exposure_s"]
    value["guide_diameter_mm"] = columns["guide.bundle.diameter_mm"]
    after = {step: lit.after_lm[step][lit_row] for step in STEPS if step in lit.after_lm}
    return Figures({**seen, **body, **value}, after, {}), ready[told_row]


def evaluate_possible(columns: Columns) -> tuple[Figures, Flags]:
    """As `evaluate_axes`, but a design that a stage refuses gets nan instead, found by halving."""
    try:
        if columns.count:
            return evaluate_axes(columns)
    except OutOfRange:
        pass
    if columns.count < 2:
        return Figures({}, {}, {}), np.zeros(columns.count, bool)
    half = columns.count // 2
    parts = [evaluate_possible(columns.take(rows)) for rows in np.split(np.arange(columns.count), [half])]
    return _joined([figures for figures, _ in parts], [len(good) for _, good in parts]), np.concatenate(
        [good for _, good in parts]
    )


def distinct_inputs(columns: Columns) -> dict[str, int]:
    """How many distinct sections and lights a set of designs has."""
    return {
        "sections": len(distinct_rows(columns, SECTION)[0]),
        "lights": len(_grouped([_codes(columns).of(LIGHT)])[0]),
    }


# Which designs share an input: whole numbers that tell the distinct values of a column apart


class _Codes:
    """Codes of the columns that are not the same in all designs, joined on demand."""

    def __init__(self, count: int, found: dict[str, np.ndarray]):
        self.count, self.found = count, found

    def of(self, prefixes: tuple[str, ...]) -> np.ndarray:
        """One code for everything under these tables."""
        parts = [code for path, code in self.found.items() if path.startswith(prefixes)]
        return _grouped(parts)[1] if parts else np.zeros(self.count, int)


def _codes(columns: Columns) -> _Codes:
    found = {}
    for path, column in sorted(columns.number.items()):
        filled = np.where(np.isnan(column), ABSENT, column).reshape(columns.count, -1)
        for item in range(filled.shape[1]):
            if (filled[:, item] != filled[0, item]).any():
                found[f"{path}.{item}"] = _code(filled[:, item])
    for path, column in sorted(columns.text.items()):
        if (column != column[0]).any():
            order = {text: place for place, text in enumerate(sorted(set(column.tolist())))}
            found[f"{path}.text"] = np.array([order[text] for text in column.tolist()])
    for path, curves in sorted(columns.curve.items()):
        if (curves.row != curves.row[0]).any():
            found[f"{path}.curve"] = curves.row - curves.row.min()
    return _Codes(columns.count, found)


def _code(column: np.ndarray) -> np.ndarray:
    return np.unique(np.where(np.isnan(column), ABSENT, column), return_inverse=True)[1].ravel()


def _grouped(parts: list[np.ndarray]) -> tuple[np.ndarray, np.ndarray]:
    """(first row of each distinct combination, for every row which of them it is)."""
    code = np.zeros(len(parts[0]), np.int64)
    for part in parts:
        size = int(part.max()) + 1
        if int(code.max()) >= (1 << 62) // size:
            code = np.unique(code, return_inverse=True)[1].ravel().astype(np.int64)
        code = code * size + part
    _, first, inverse = np.unique(code, return_index=True, return_inverse=True)
    return first, inverse.ravel()


def _blocks(rows: np.ndarray) -> Iterator[np.ndarray]:
    for start in range(0, len(rows), BLOCK):
        yield rows[start : start + BLOCK]


# The stages on distinct inputs


def _fitted(columns: Columns, codes: _Codes, seen: dict[str, np.ndarray]):
    """Numbers of the body, the ports, and a code of the ports alone [design]."""
    first, row = _grouped([codes.of(BODY), _code(seen["image_mm"])])
    body, ports = fit(columns.take(first), seen["image_mm"][first])
    layout = np.concatenate([ports[name] for name in sorted(ports)], axis=1)
    return _taken(body, row), _taken(ports, row), np.unique(layout, axis=0, return_inverse=True)[1].ravel()[row]


def _lit(columns: Columns, codes: _Codes) -> tuple[Light, np.ndarray]:
    first, row = _grouped([codes.of(LIGHT)])
    return _joined_light([light(columns.take(rows)) for rows in _blocks(first)]), row


def _told(columns, landed: Lit, landed_row, seen, first, progress):
    """The detail of the rows `first`, block by block until stopped, and which of them are ready."""
    found, ready = {}, np.zeros(len(first), bool)
    for start in range(0, len(first), BLOCK):
        rows = first[start : start + BLOCK]
        lit = Lit(landed.center_w_m2_nm[landed_row[rows]], {})
        for name, part in detail(columns.take(rows), lit, _taken(seen, rows)).items():
            found.setdefault(name, np.full(len(first), np.nan))[start : start + BLOCK] = part
        ready[start : start + BLOCK] = True
        if progress is not None and progress((start + len(rows)) / len(first)) is False:
            break
    return found, ready


def _taken(table: dict[str, np.ndarray], rows: np.ndarray) -> dict[str, np.ndarray]:
    return {name: found[rows] for name, found in table.items()}


def _lit_rows(lit: Light, rows: np.ndarray) -> Light:
    return replace(
        lit, beam=replace(lit.beam, power_w_nm=lit.beam.power_w_nm[rows], sine2_edges=lit.beam.sine2_edges[rows])
    )


def _joined_light(parts: list[Light]) -> Light:
    """Blocks of light as one; a step that a block does not have is nan there."""
    counts = [len(part.lamp_w_nm) for part in parts]
    beam = replace(
        parts[0].beam,
        power_w_nm=np.concatenate([part.beam.power_w_nm for part in parts]),
        sine2_edges=np.concatenate([part.beam.sine2_edges for part in parts]),
    )
    after = _stacked([part.after_lm for part in parts], counts)
    return Light(
        np.concatenate([part.lamp_w_nm for part in parts]),
        beam,
        after,
        _stacked([part.value for part in parts], counts),
    )


def _joined_lit(parts: Iterable[Lit]) -> Lit:
    parts = list(parts)
    counts = [len(part.center_w_m2_nm) for part in parts]
    return Lit(
        np.concatenate([part.center_w_m2_nm for part in parts]), _stacked([part.value for part in parts], counts)
    )


def _joined(parts: list[Figures], counts: list[int]) -> Figures:
    return Figures(
        _stacked([part.value for part in parts], counts), _stacked([part.after_lm for part in parts], counts), {}
    )


def _stacked(tables: list[dict[str, np.ndarray]], counts: list[int]) -> dict[str, np.ndarray]:
    names = dict.fromkeys(name for table in tables for name in table)
    return {
        name: np.concatenate([table.get(name, np.full(count, np.nan)) for table, count in zip(tables, counts)])
        for name in names
    }
