"""What the page of the bench is made of: the readings of this tab, the fit, its picture, and the fit in the design."""

import re
from dataclasses import dataclass
from typing import Any

import numpy as np
import streamlit as st

from optics import presets
from optics.figures import bench as figures
from optics.figures import export
from optics.figures.palette import DARK, LIGHT
from optics.presets import Design, Document, value_at
from optics.spec import OutOfRange
from optics.study.bench import Bench, bench
from optics.study.bench_model import Model
from optics.study.bench_readings import Readings
from optics.ui import bench_words as words
from optics.ui import pictures, sketch

KEPT = 24
NOT_FITTED = "These readings go so far against the design's own model that no number fits them; look at units, settings and rows."
POINTS, MOST_LINES = 41, 4  # of a line of the model; lines for different angles turned


@dataclass(frozen=True, slots=True)
class Taken:
    """A fit that stands in the design: the settings that it made, and what stood there before."""

    settings: dict[str, Any]
    before: dict[str, Any]


@dataclass
class Lab:
    """The readings of this tab, and what is asked of them."""

    text: str = ""
    name: str = words.TYPED
    flat: bool = False
    left_out: tuple[int, ...] = ()
    refused: str | None = None  # why a file could not be read
    taken: Taken | None = None
    uploads: int = 0  # a new number gives an empty uploader


@dataclass(frozen=True, slots=True)
class Outcome:
    """The readings and their fit; or why there is none."""

    readings: Readings | None = None
    found: Bench | None = None
    wrong: str | None = None


def lab() -> Lab:
    if "bench" not in st.session_state:
        st.session_state["bench"] = Lab()
    return st.session_state["bench"]


def take_readings(text: str, name: str, empty_uploader: bool = True) -> None:
    """Other readings in place of the present ones; a fit that stands in the design stays there."""
    sketch.touch()
    old = lab()
    st.session_state["bench"] = Lab(text, name, taken=old.taken, uploads=old.uploads + empty_uploader)


def take_upload(key: str) -> None:
    upload = st.session_state[key]
    if upload is None:
        take_readings("", words.TYPED)
        return
    try:
        take_readings(words.read(upload.getvalue(), upload.name), upload.name, empty_uploader=False)
    except OutOfRange as wrong:
        take_readings("", upload.name, empty_uploader=False)
        lab().refused = words.said(str(wrong))


def take_typed(key: str) -> None:
    take_readings(st.session_state[key], words.TYPED)


def leave_out(rows: tuple[int, ...]) -> None:
    sketch.touch()
    lab().left_out = tuple(sorted(rows))


# The fit


def base(here: sketch.Sketch) -> Design:
    """The design that readings are held against: without the fit, where one was taken into it."""
    here_taken = lab().taken
    if here_taken is None:
        return here.design
    if not _stands(here.document, here_taken):  # changed or set back since
        lab().taken = None
        return here.design
    try:
        return presets.resolve(presets.edited(here.design.document, here_taken.before), "the design")
    except OutOfRange:
        return here.design


def outcome(design: Design) -> Outcome:
    """The readings fitted, or one sentence on why they are not."""
    asked = lab()
    if asked.refused or not asked.text.strip():
        return Outcome(wrong=asked.refused)
    try:
        readings = words.readings(asked.text, asked.name)
    except OutOfRange as wrong:
        return Outcome(wrong=words.said(str(wrong)))
    flat = asked.flat and readings.varied == "length_m"
    try:
        found = _fit(design.document, asked.text, asked.name, flat, asked.left_out, design, readings)
    except OutOfRange as wrong:
        return Outcome(readings, wrong=words.said(str(wrong)))
    return Outcome(readings, found)


@st.cache_data(max_entries=KEPT, show_spinner=False)
def _fit(
    document: Document,
    text: str,
    name: str,
    flat: bool,
    left_out: tuple[int, ...],
    _design: Design,
    _readings: Readings,
) -> Bench:
    try:
        with np.errstate(all="ignore"):
            found = bench(_design, _readings, source=name, flat=flat, without=left_out)
    except (ArithmeticError, ValueError) as wrong:
        if isinstance(wrong, OutOfRange):
            raise
        raise OutOfRange(NOT_FITTED) from None
    if re.search(r"\b(nan|inf)\b", found.verdict):
        raise OutOfRange(NOT_FITTED)
    return found


# The picture


def show(design: Design, got: Outcome) -> None:
    """Readings and model, before and after the fit."""
    asked = lab()
    key = (asked.text, str(asked.flat), repr(asked.left_out))
    picture = _drawn(design.document, key, pictures.is_dark(), design, got.readings, got.found)
    st.image(picture, width="stretch", alt="Readings against the model before and after the fit, residuals below")


@st.cache_data(max_entries=2 * KEPT, show_spinner=False)
def _drawn(
    document: Document, key: tuple[str, ...], dark: bool, _design: Design, _readings: Readings, _found: Bench
) -> str:
    figure = figures.readings(view(_design, _readings, _found), palette=DARK if dark else LIGHT)
    return export.svg(figure).decode("utf-8")


def view(design: Design, readings: Readings, found: Bench) -> figures.BenchView:
    """What the picture shows: readings used and left out, and the model of the design as it was and as fitted."""
    used = found.residuals
    got, residual, normalized = (
        np.array([getattr(item, name) for item in used]) for name in ("measured", "residual", "normalized")
    )
    rows = np.array([item.row for item in used])
    points = figures.Points(
        np.array([item.at for item in used]),
        got,
        _errors(readings, rows, got, residual, normalized),
        normalized,
        rows,
        np.array([item.apart for item in used]),
    )
    left = tuple(
        (int(row), float(at), float(read))
        for row, at, read in zip(readings.row, readings.at, readings.got)
        if row not in rows
    )
    return figures.BenchView(readings.varied, readings.measured, points, _lines(design, readings, found), left)


def _errors(
    readings: Readings, rows: np.ndarray, got: np.ndarray, residual: np.ndarray, normalized: np.ndarray
) -> np.ndarray:
    """The standard error of each reading: as stated, else the share of a reading that their scatter gives to all."""
    if readings.error is not None:
        return readings.error[np.isin(readings.row, rows)]
    told = normalized != 0
    share = float(np.median(residual[told] / normalized[told] / got[told])) if told.any() else 0.0
    return share * got


def _lines(design: Design, readings: Readings, found: Bench) -> tuple[figures.Line, ...]:
    """The model over the whole range, a line for each angle turned; none where there are too many."""
    low, high = float(readings.at.min()), float(readings.at.max())
    at = np.linspace(low, high, POINTS) if readings.varied == "length_m" else np.geomspace(low, high, POINTS)
    turned = [None] if readings.turned_deg is None else sorted(set(readings.turned_deg.tolist()))
    if len(turned) > MOST_LINES or high <= low:
        return ()
    fitted, count, lines = presets.resolve(found.document), np.arange(1, POINTS + 1), []
    for angle in turned:
        angles = None if angle is None else np.full(POINTS, angle)
        asked = Readings(readings.varied, readings.measured, at, np.ones(POINTS), None, angles, count, count)
        before, after = (Model(one, asked, None).at(0.0)[0] for one in (design, fitted))
        lines.append(figures.Line(at, before, after, f"{angle:g}°" if len(turned) > 1 else ""))
    return tuple(lines)


# The fit in the design


def take_fit(design: Design, found: Bench) -> None:
    """The fit as changes of the design; a fit that stood there before goes out first."""
    settings = {**found.overrides, "note": found.document["note"]}
    old = lab().taken.before if lab().taken else {}
    before = {**old, **{path: value_at(design.document, path) for path in settings}}
    lab().taken = Taken(settings, before)
    sketch.edit(presets.edited, {**old, **settings})


def take_out() -> None:
    """What stood in the design before the fit, in its place again; other changes stay."""
    old = lab().taken
    lab().taken = None
    if old is not None:
        sketch.edit(presets.edited, old.before)


def is_taken(found: Bench) -> bool:
    """Whether this very fit stands in the design."""
    old = lab().taken
    return old is not None and all(old.settings.get(path) == value for path, value in found.overrides.items())


def _stands(document: Document, taken: Taken) -> bool:
    return all(value_at(document, path) == value for path, value in taken.settings.items() if path != "note")


def fitted_file(found: Bench) -> str:
    """The fitted design as a file, with what was fitted and how sure above it."""
    return "\n".join([*words.notes(found), "", presets.saved(found.document)])
