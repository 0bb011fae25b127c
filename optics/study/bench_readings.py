"""Readings from a bench: a table of text into arrays, with one sentence for each thing that can be wrong with it.

The first line names the columns, units in the names. Three kinds of readings are known, by what was varied:
`length_m` and `bend_radius_mm` with `power_mw`, `distance_mm` with `lux`. A standard error of each reading and,
for bends, the angle turned may stand beside them. Lines that start with # are notes.
"""

import csv
from dataclasses import dataclass

import numpy as np

from optics.spec import OutOfRange
from optics.tables import nearest
from optics.units import AnyUnit

MEASURED = {"length_m": "power_mw", "bend_radius_mm": "power_mw", "distance_mm": "lux"}
ERRORS = {"power_mw": "standard_error_mw", "lux": "standard_error_lux"}
TURNED = "bend_deg"
COLUMNS = (*MEASURED, "power_mw", "lux", *ERRORS.values(), TURNED)
LEAST = 2  # readings
UNITS = {"m": "meters", "mm": "millimeters", "mw": "milliwatts", "lux": "lux", "deg": "degrees"}


@dataclass(frozen=True, slots=True)
class Readings:
    """What was varied, what was measured, one entry a reading; `error` None where no standard errors are stated.

    `row` counts the readings from 1, `line` is the line of the file that each stands in.
    """

    varied: str
    measured: str
    at: AnyUnit
    got: AnyUnit
    error: AnyUnit | None
    turned_deg: np.ndarray | None
    row: AnyUnit
    line: AnyUnit

    def without(self, rows: tuple[int, ...]) -> "Readings":
        """The readings less those of the rows named."""
        for row in rows:
            if row not in self.row:
                raise OutOfRange(f"--without is {row}; it must be the number of a reading, 1 to {len(self.row)}.")
        return self.take(~np.isin(self.row, rows))

    def take(self, kept: AnyUnit) -> "Readings":
        """Some of the readings, by mask."""
        if kept.sum() < LEAST:
            raise OutOfRange(f"{int(kept.sum())} reading is left; a fit needs at least {LEAST}.")
        parts = (None if part is None else part[kept] for part in (self.at, self.got, self.error, self.turned_deg))
        return Readings(self.varied, self.measured, *parts, self.row[kept], self.line[kept])


def parsed(text: str, where: str) -> Readings:
    """The readings of a file's text; `where` names the file in messages.

    Raises OutOfRange, one sentence: no header, an unknown column or unit, gaps, text, numbers that cannot be,
    fewer than two readings.
    """
    lines = [
        (number, line) for number, line in enumerate(text.splitlines(), 1) if line.strip() and not line.startswith("#")
    ]
    if not lines:
        raise OutOfRange(
            f"{where} is empty; it must have a header such as length_m,power_mw and a line for each reading."
        )
    header = lines[0][1]
    mark = next((mark for mark in ",;\t" if mark in header), ",")
    names = [name.strip() for name in next(csv.reader([header], delimiter=mark))]
    varied, measured = _kind(names, where)
    if len(lines) - 1 < LEAST:
        count = f"{len(lines) - 1} reading" + ("" if len(lines) == 2 else "s")
        raise OutOfRange(f"{where} has {count}; a fit needs at least {LEAST}.")
    cells = np.array([_numbers(line, names, mark, row, where) for row, (_, line) in enumerate(lines[1:], 1)])
    columns = dict(zip(names, cells.T))
    rows = np.arange(1, len(cells) + 1)
    at = np.array([number for number, _ in lines[1:]])
    return Readings(
        varied,
        measured,
        columns[varied],
        columns[measured],
        columns.get(ERRORS[measured]),
        columns.get(TURNED),
        rows,
        at,
    )


def _kind(names: list[str], where: str) -> tuple[str, str]:
    """(what was varied, what was measured), from the names of the columns."""
    for name in names:
        if name not in COLUMNS:
            raise OutOfRange(f"{where} has the column {name!r}{_meant(name)}; known columns: {', '.join(COLUMNS)}.")
        if names.count(name) > 1:
            raise OutOfRange(f"{where} has the column {name} {names.count(name)} times; it may stand once.")
    varied = [name for name in MEASURED if name in names]
    if len(varied) != 1:
        has = " and ".join(varied) or "none"
        raise OutOfRange(f"{where} must have one of the columns {', '.join(MEASURED)}; it has {has}.")
    measured = MEASURED[varied[0]]
    if measured not in names:
        raise OutOfRange(f"{where} has {varied[0]} but no column {measured}, which goes with it.")
    fitting = {varied[0], measured, ERRORS[measured]} | ({TURNED} if varied[0] == "bend_radius_mm" else set())
    for name in names:
        if name not in fitting:
            raise OutOfRange(f"{where} has the column {name}, which does not go with {varied[0]} and {measured}.")
    return varied[0], measured


def _meant(name: str) -> str:
    """What an unknown column may have meant: the same quantity in the unit that is known here, else the nearest name."""
    for known in sorted(COLUMNS, key=len, reverse=True):
        stem, _, unit = known.rpartition("_")
        if stem and (name == stem or name.startswith(f"{stem}_")):
            return f" in a unit that is not known here: it must be {known}, in {UNITS[unit]}"
    return nearest(name, list(COLUMNS))


def _numbers(line: str, names: list[str], mark: str, row: int, where: str) -> list[float]:
    """The numbers of one line, each held against what its column can be."""
    cells = [cell.strip() for cell in next(csv.reader([line], delimiter=mark))]
    if len(cells) != len(names):
        raise OutOfRange(
            f"{where}, row {row}: it has {len(cells)} cells under {len(names)} columns ({', '.join(names)})."
        )
    return [_number(cell, name, row, where) for name, cell in zip(names, cells)]


def _number(cell: str, name: str, row: int, where: str) -> float:
    if not cell:
        raise OutOfRange(f"{where}, row {row}: {name} is missing; every reading needs it.")
    try:
        value = float(cell)
    except ValueError:
        raise OutOfRange(
            f"{where}, row {row}: {name} is {cell!r}; it must be a number, with a point for decimals."
        ) from None
    least, words = (0.0, "0 or more") if name == TURNED else (np.nextafter(0.0, 1.0), "above 0")
    if not np.isfinite(value) or value < least:
        raise OutOfRange(f"{where}, row {row}: {name} is {cell}; it must be a finite number {words}.")
    return value
