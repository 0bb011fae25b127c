"""The shared document of one browser tab, kept as one plain object in the session.

It is made once, from the link's `?d=` or from the default demo. Widgets take their values from it and write to it
through `change`; a document that cannot be sized is kept beside the last good answer, which stays in sight. The link
follows each good change; a link that the browser's Back brings again restores its design.
"""

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import streamlit as st

from optics import presets
from optics.presets import Design, Document
from optics.report.answer import Report
from optics.report.size import size
from optics.spec import OutOfRange
from optics.tables import preset_names
from optics.ui import link

DEFAULT_DEMO = "gearbox_tooth"
WHERE = "the design"


@dataclass(frozen=True, slots=True)
class Pinned:
    """The reference that headline numbers are compared with."""

    document: Document
    report: Report


@dataclass
class Sketch:
    """What a person works on."""

    demo: str
    file: dict[str, Any] | None  # what an opened file differs in from the demo design
    opened: Document
    document: Document
    design: Design  # the last good one
    report: Report  # of the last good one
    wrong: str | None = None  # why the present document cannot be sized
    notice: str | None = None  # said once, such as that a link could not be read
    pinned: Pinned | None = None
    link: str | None = None  # the last one written
    touched: bool = False  # a widget of this run changed something, so an older link is a late one, not Back


def current() -> Sketch:
    """The sketch of this tab."""
    return st.session_state["sketch"]


def follow_link() -> None:
    """Make the sketch, or restore what Back or a new link asks for. A page switch drops the link, not the sketch."""
    text = st.query_params.get("d")
    sketch: Sketch | None = st.session_state.get("sketch")
    if sketch is not None and (sketch.touched or text in (None, sketch.link)):
        sketch.touched = False
        return
    try:
        fresh = from_link(text) if text else opened_demo(DEFAULT_DEMO)
    except OutOfRange as wrong:
        fresh = opened_demo(DEFAULT_DEMO)
        fresh.notice = f"{_plain(wrong)} The design that opens first is shown instead."
    fresh.pinned = sketch.pinned if sketch else None
    st.session_state["sketch"] = fresh


def write_link() -> None:
    """Put the last good design into the address."""
    sketch = current()
    sketch.link = link_text(sketch)
    if st.query_params.get("d") != sketch.link:
        st.query_params["d"] = sketch.link


def link_text(sketch: Sketch) -> str:
    """The text of `?d=` for the last good design."""
    tables = [link.differences(sketch.opened, sketch.design.document)]
    return link.written(sketch.demo, *([sketch.file] if sketch.file is not None else []), *tables)


def from_link(text: str) -> Sketch:
    """The sketch of a link's text, checked like any file."""
    demo, settings = link.read(text)
    if demo not in preset_names("fiberscopes"):
        raise OutOfRange(
            f"The link's design starts from {demo!r}; demo designs: {', '.join(preset_names('fiberscopes'))}."
        )
    base = presets.open(demo).document
    file = settings[0] if len(settings) == 2 else None
    try:
        opened = presets.edited(base, file) if file is not None else base
        return _sized(demo, file, opened, presets.edited(opened, settings[-1]))
    except (TypeError, AttributeError, OverflowError, RecursionError):
        raise OutOfRange("The link's ?d= holds no design; it must name a demo design and its changes.") from None


def opened_demo(name: str) -> Sketch:
    document = presets.open(name).document
    return _sized(name, None, document, document)


def opened_file(content: bytes, name: str) -> Sketch:
    """The sketch of a design file's content, refused like any file."""
    import tomllib

    try:
        document = tomllib.loads(content.decode("utf-8"))
    except UnicodeDecodeError:
        raise OutOfRange(f"{name} is not text in UTF-8.") from None
    except tomllib.TOMLDecodeError as wrong:
        raise OutOfRange(f"{name} is not valid TOML: {wrong}.") from None
    sketch = _sized(DEFAULT_DEMO, None, document, document, name)
    sketch.file = link.differences(presets.open(DEFAULT_DEMO).document, document)
    return sketch


def _sized(demo: str, file: dict[str, Any] | None, opened: Document, document: Document, where: str = WHERE) -> Sketch:
    design = presets.resolve(document, where)
    return Sketch(demo, file, opened, document, design, size(design.fiberscope, design.sourced))


def change(document: Document) -> None:
    """Take a document as the present one; what cannot be sized leaves the last good answer in place."""
    sketch = current()
    sketch.document, sketch.notice, sketch.touched = document, None, True
    try:
        design = presets.resolve(document, WHERE)
        report = size(design.fiberscope, design.sourced)
    except OutOfRange as wrong:
        sketch.wrong = _plain(wrong)
        return
    sketch.design, sketch.report, sketch.wrong = design, report, None


def edit(how: Callable[..., Document], *arguments: Any) -> None:
    """Change the present document by one of the functions of `edits`; a refusal is a sentence, not a change."""
    touch()
    try:
        change(how(current().document, *arguments))
    except OutOfRange as wrong:
        current().wrong = _plain(wrong)


def touch() -> None:
    """Mark that this run comes from a widget, not from the browser's history."""
    current().touched = True


def replace(make: Callable[..., Sketch], *arguments: Any) -> None:
    """Open another design in place of the present one; the pinned reference stays."""
    old = current()
    old.touched = True
    try:
        fresh = make(*arguments)
    except OutOfRange as wrong:
        old.notice = _plain(wrong)
        return
    fresh.pinned, fresh.link, fresh.touched = old.pinned, old.link, True
    st.session_state["sketch"] = fresh


def pin() -> None:
    touch()
    sketch = current()
    sketch.pinned = Pinned(sketch.design.document, sketch.report)


def unpin() -> None:
    touch()
    current().pinned = None


def take_back() -> None:
    """Drop a change that cannot be sized."""
    change(current().design.document)


def _plain(wrong: OutOfRange) -> str:
    said = str(wrong).removeprefix(f"{WHERE}: ")
    return said[:1].upper() + said[1:] if " " in said.split(".")[0] else said
