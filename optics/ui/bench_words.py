"""The fit of a bench in words for the screen: the verdict, the fitted values, each reading."""

import csv
import re
from collections.abc import Mapping
from typing import Any

from optics.presets import Document, value_at
from optics.spec import OutOfRange
from optics.study.bench import Bench, Fitted, Residual
from optics.study.bench_readings import Readings, parsed
from optics.ui.names import place, spoken
from optics.ui.rows import Columns, columns
from optics.ui.words import number, sentence_case

TYPED = "the readings"  # the name of readings that came in no file
UNITS = {"length_m": "m", "bend_radius_mm": "mm", "distance_mm": "mm", "power_mw": "mW", "lux": "lx"}
KINDS = {  # what a fitted number is, and its unit
    "factor on the curve": "× its own curve",
    "dB/m at all wavelengths": "dB/m at all wavelengths",
    "numerical aperture": "",
    "transmission": "",
    "rated_lm": "lm",
    "flux_lm": "lm",
    "flux_w": "W",
}


def read(content: bytes, name: str) -> str:
    """The text of an uploaded file."""
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError:
        raise OutOfRange(f"{name} is not text in UTF-8; it must be a table such as length_m,power_mw.") from None


def readings(text: str, name: str) -> Readings:
    """The readings of a text, refused in one sentence."""
    try:
        return parsed(text, name)
    except csv.Error:
        raise OutOfRange(f"{name} is no table of numbers; it must have a header such as length_m,power_mw.") from None


def said(text: str) -> str:
    """A verdict or a refusal as the screen says it: a true plus-minus, no switches of the command, places in plain words.

    >>> said("Apart: row 3 by 9.1 standard errors; kept. With --without 3 the attenuation is 1.2 +- 0.1.")
    'Apart: row 3 by 9.1 standard errors; kept. Without it the attenuation is 1.2 ± 0.1.'
    """
    text = text.replace("+-", "±")
    text = re.sub(
        r"With ((?:--without \d+ ?)+)", lambda found: f"Without {'it' if found[1].count('--') == 1 else 'them'} ", text
    )
    text = spoken(text.replace("--without", "The row to leave out"))
    return text if re.match(r"\S*[._]", text) else sentence_case(text)  # names of files and columns stay as they are


def verdict(found: Bench) -> tuple[str, str, list[str]]:
    """(mark, the first clause, the rest by sentences) of the verdict."""
    whole = said(found.verdict)
    first, rest = re.match(r"(.+?)(?:[:.] )(.*)", whole, re.DOTALL).groups()
    lines = re.split(r"(?<=[a-z\d)%])\. (?=[A-Z])", rest)
    return "✓" if found.decided else "✗", f"{first}.", [f"{sentence_case(line).rstrip('.')}." for line in lines]


def about(found: Bench, name: str, text: str) -> str:
    """Which readings these are: '7 readings of power_mw against length_m, r.csv'; invented ones are called so."""
    count, out = len(found.residuals), len(found.left_out)
    told = f"{count} readings of {found.measured} against {found.varied}, {'typed in' if name == TYPED else name}"
    told += f"; {out} left out" if out else ""
    return f"Invented: {told}" if text.lstrip().startswith("# Invented") else sentence_case(told)


def fitted_table(found: Bench) -> Columns:
    """Each fitted value with its 95 % interval, and what the design had."""
    rows = [
        (
            place(item.path),
            number(item.before),
            f"**{number(item.value)}**",
            f"{number(item.low)} to {number(item.high)}",
            _unit(item),
        )
        for item in found.fitted
    ]
    return columns(("value", "before", "fitted", "95 % interval", "unit"), rows)


def _unit(item: Fitted) -> str:
    return KINDS.get(item.unit, item.unit)


def residual_table(found: Bench, all_of_them: Readings) -> Columns:
    """Every reading against the fit, those left out too."""
    used = {item.row: item for item in found.residuals}
    rows = []
    for row, line, at, got in zip(all_of_them.row, all_of_them.line, all_of_them.at, all_of_them.got):
        item = used.get(int(row))
        told = ("left out", "", "", "") if item is None else _against(item)
        rows.append((str(row), str(line), number(float(at), 4), number(float(got), 4), *told))
    names = [f"{_plain(name)}, {UNITS[name]}" for name in (found.varied, found.measured)]
    return columns(("row", "line", *names, "fit", "off by", "standard errors", ""), rows)


def _against(item: Residual) -> tuple[str, str, str, str]:
    off = f"{100 * item.residual / item.model:+.1f} %".replace("-", "−") if item.model else "no light"
    return number(item.model, 4), off, f"{item.normalized:+.1f}".replace("-", "−"), "✗ apart" if item.apart else ""


def _plain(name: str) -> str:
    return name.rpartition("_")[0].replace("_", " ") or name


def apart(row: int, all_of_them: Readings) -> str:
    """A reading that stands apart, or was left out, as the words of its checkbox."""
    place_of = all_of_them.row.tolist().index(row)
    at, got = float(all_of_them.at[place_of]), float(all_of_them.got[place_of])
    return f"Leave out row {row}: {number(got, 4)} {UNITS[all_of_them.measured]} at {number(at, 4)} {UNITS[all_of_them.varied]}"


def taken(document: Document, settings: Mapping[str, Any]) -> str:
    """What was taken into the design: 'Launch, transmission 0.68; Fiber, attenuation as a curve of its own'."""
    told = []
    for path in settings:
        value = value_at(document, path)
        if path != "note":
            told.append(f"{place(path)} {'as a curve of its own' if isinstance(value, Mapping) else number(value)}")
    return "; ".join(told)


def notes(found: Bench) -> list[str]:
    """The lines above a fitted design's file: what was fitted, from what and how sure."""
    return [
        f"# {item.path}: {item.value:.6g} +- {item.standard_error:.2g} ({item.unit}), fitted to {item.source}, {item.at}"
        for item in found.fitted
    ]
