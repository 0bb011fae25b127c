"""Designs on axes of choices: their columns without a Fiberscope each, and every stage once for each distinct input.

`crossed` gathers the columns of combinations from the columns of each axis' choices; `holding` asks
the rules across fields as masks; `evaluate_axes` gives the numbers that `evaluate` gives, but runs
the body, the light, the target and the detail only on distinct inputs and gathers at the end.
"""

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace

import numpy as np

from optics.chain.axes_parts import (
    Codes,
    code_of,
    codes_of,
    grouped,
    joined,
    joined_light,
    joined_lit,
    lit_rows,
    taken_rows,
)
from optics.chain.columns import Columns, distinct_rows
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

BLOCK = 256  # distinct inputs at a time: less has more overhead, more leaves the cache
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
    codes = codes_of(columns)
    seen = field_of_view(columns)
    body, ports, ports_row = _fitted(columns, codes, seen)
    lit, lit_row = _lit(columns, codes)
    numbers = [code_of(seen["field_radius_mm"]), code_of(pupil_depth_mm(columns))]
    first, landed_row = grouped([lit_row, ports_row, *numbers, codes.of(TARGET)])
    landed = joined_lit(
        target(columns.take(rows), lit_rows(lit, lit_row[rows]), taken_rows(ports, rows), taken_rows(seen, rows))
        for rows in _blocks(first)
    )
    first, told_row = grouped([landed_row, codes.of(DETAIL)])
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
    return joined([figures for figures, _ in parts], [len(good) for _, good in parts]), np.concatenate(
        [good for _, good in parts]
    )


def distinct_inputs(columns: Columns) -> dict[str, int]:
    """How many distinct sections and lights a set of designs has."""
    return {
        "sections": len(distinct_rows(columns, SECTION)[0]),
        "lights": len(grouped([codes_of(columns).of(LIGHT)])[0]),
    }


def _blocks(rows: np.ndarray) -> Iterator[np.ndarray]:
    for start in range(0, len(rows), BLOCK):
        yield rows[start : start + BLOCK]


def _fitted(columns: Columns, codes: Codes, seen: dict[str, np.ndarray]):
    """Numbers of the body, the ports, and a code of the ports alone [design]."""
    first, row = grouped([codes.of(BODY), code_of(seen["image_mm"])])
    body, ports = fit(columns.take(first), seen["image_mm"][first])
    layout = np.concatenate([ports[name] for name in sorted(ports)], axis=1)
    return taken_rows(body, row), taken_rows(ports, row), np.unique(layout, axis=0, return_inverse=True)[1].ravel()[row]


def _lit(columns: Columns, codes: Codes) -> tuple[Light, np.ndarray]:
    first, row = grouped([codes.of(LIGHT)])
    return joined_light([light(columns.take(rows)) for rows in _blocks(first)]), row


def _told(columns, landed: Lit, landed_row, seen, first, progress):
    """The detail of the rows `first`, block by block until stopped, and which of them are ready."""
    found, ready = {}, np.zeros(len(first), bool)
    for start in range(0, len(first), BLOCK):
        rows = first[start : start + BLOCK]
        lit = Lit(landed.center_w_m2_nm[landed_row[rows]], {})
        for name, part in detail(columns.take(rows), lit, taken_rows(seen, rows)).items():
            found.setdefault(name, np.full(len(first), np.nan))[start : start + BLOCK] = part
        ready[start : start + BLOCK] = True
        if progress is not None and progress((start + len(rows)) / len(first)) is False:
            break
    return found, ready
