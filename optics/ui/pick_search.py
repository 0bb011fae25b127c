"""The search behind the page: run in a thread that tells how far it is and can be stopped, and kept for a while by design."""

import dataclasses
import json
import threading
import time
from collections import OrderedDict
from dataclasses import dataclass, field

import numpy as np
import streamlit as st

from optics import presets
from optics.presets import Design, Document
from optics.spec import OutOfRange
from optics.study.pick import Failed, Failures, Picked, pick
from optics.study.pick_axes import axes
from optics.study.pick_settings import Settings
from optics.ui import pick_words as words
from optics.ui import sketch
from optics.ui.pick_tried import Tried
from optics.ui.pick_tried import tried as axis_tried
from optics.ui.sketch import Sketch

NEAREST, SHOWN = 60, 6  # failing candidates that are looked at, and shown
KEPT = 8  # searches
Key = tuple[str, str]


@dataclass(frozen=True, slots=True)
class Searched:
    """A search: the design that it is of, its picks in words, the nearest failures, the other candidates that do the job."""

    key: Key
    design: Design
    found: Picked
    made: tuple[words.Parts, ...]
    near: tuple[tuple[Failed, words.Parts], ...]
    relaxed: words.Parts | None
    others: np.ndarray
    seconds: float


@dataclass
class Job:
    """A search under way."""

    key: Key
    design: Design
    share: float = 0.0
    stop: bool = False
    done: Searched | None = None
    wrong: str | None = None
    thread: threading.Thread = field(default_factory=threading.Thread)

    def run(self) -> None:
        start = time.monotonic()
        try:
            found = pick(self.design, nearest=NEAREST, progress=self._tell)
            self.done = _searched(self.key, self.design, found, start)
        except OutOfRange as wrong:
            self.wrong = str(wrong)

    def _tell(self, share: float) -> bool:
        self.share = share
        return not self.stop


@dataclass
class Hunt:
    """What a session has searched of the design that was opened: the last answer, what is under way, what was taken from it."""

    opened: Document
    last: Searched | None = None
    job: Job | None = None
    taken: Document | None = None
    wrong: str | None = None


@dataclass(frozen=True, slots=True)
class Answer:
    """What there is to show; `old`: it is of another design than the present one."""

    searched: Searched | None
    old: bool
    wrong: str | None


def hunt() -> Hunt:
    """What this tab has searched; another design that is opened starts afresh."""
    here, found = sketch.current(), st.session_state.get("pick")
    if found is None or found.opened != here.opened:
        if found is not None and found.job is not None:
            found.job.stop = True
        found = st.session_state["pick"] = Hunt(here.opened)
    return found


@st.cache_resource(show_spinner=False)
def _shelf() -> "OrderedDict[Key, Searched]":
    """Whole searches, kept for a while."""
    return OrderedDict()


def key_of(design: Design, here: Sketch) -> Key:
    """What a search depends on: the design, and the names of its presets."""
    return here.report.design_hash, json.dumps(design.document, sort_keys=True, default=str)


def answer(here: Sketch) -> Answer:
    """The search of the present design, where there is one; else the last one."""
    mine, key = hunt(), key_of(here.design, here)
    if mine.job is not None and mine.job.key != key:
        mine.job.stop, mine.job = True, None
    if mine.job is not None:
        _wait(mine.job)
        mine.last, mine.wrong, mine.job = mine.job.done or mine.last, mine.job.wrong, None
    elif key in _shelf() and mine.taken != here.document:
        mine.last = _shelf()[key]
    last = mine.last
    old = last is not None and last.key != key and mine.taken != here.document
    return Answer(last, old, mine.wrong)


def start() -> None:
    """Begin the search of the present design."""
    sketch.touch()
    here, mine = sketch.current(), hunt()
    mine.job, mine.wrong, mine.taken = Job(key_of(here.design, here), here.design), None, None
    mine.job.thread = threading.Thread(target=mine.job.run, daemon=True)
    mine.job.thread.start()


def _stop() -> None:
    sketch.touch()
    if hunt().job is not None:
        hunt().job.stop = True


def _wait(job: Job) -> None:
    """Show how far the search is until it ends; a press of Stop, or of anything else, breaks in."""
    place = st.empty()
    with place.container():
        st.header("Searching", anchor=False)
        row = st.container(horizontal=True, vertical_alignment="center")
    with row:
        bar = st.progress(job.share, _progress(job))
        st.button("Stop", key="pick:stop", icon=":material/stop:", on_click=_stop, disabled=job.stop)
    while job.thread.is_alive():
        job.thread.join(0.1)
        bar.progress(min(job.share, 1.0), _progress(job))
    place.empty()
    if job.done is not None and not job.done.found.stopped:
        _shelf()[job.key] = job.done
        while len(_shelf()) > KEPT:
            _shelf().popitem(last=False)


def _progress(job: Job) -> str:
    if job.stop:
        return "Stopping"
    if job.share <= 0:
        return "Laying out the candidates"
    return (
        f"{job.share:.0%} of the candidates sent through the chain" if job.share < 1 else "Looking at those that fail"
    )


def _searched(key: Key, design: Design, found: Picked, start: float) -> Searched:
    def made(settings: Settings, *more: Settings) -> words.Parts:
        document = design.document
        for each in (settings, *more):
            document = presets.edited(document, each)
        return words.parts(document, presets.resolve(document).fiberscope)

    near = tuple((each, made(each.set)) for each in _unlike(found))
    relaxed = found.nearest_relaxation and made(found.nearest_relaxation.set)
    others = _others(found.failed)
    kept = dataclasses.replace(found, failed=tuple(each for each, _ in near))
    parts = tuple(made(each.set) for each in found.picks)
    return Searched(key, design, kept, parts, near, relaxed, others, time.monotonic() - start)


def _unlike(found: Picked) -> list[Failed]:
    """The nearest failures that differ in what fails or in what would help; those that can be helped first."""
    seen: dict[tuple[str, ...], Failed] = {}
    for each in found.failed[:NEAREST]:
        kind = each.first_reason.split(":")[0], each.smallest_change.path if each.smallest_change else ""
        seen.setdefault(kind, each)
    return sorted(seen.values(), key=lambda each: each.smallest_change is None)[:SHOWN]


def _others(failed: Failures) -> np.ndarray:
    """(light, gap) of the candidates that do the job, alike ones once [candidate, 2]."""
    gap = failed.figures["smallest_gap_mm"]
    met = np.ones(len(gap), bool)
    met[failed.rows] = False
    points = np.stack([failed.figures["center_lux"], gap], axis=1)[met]
    points = points[np.isfinite(points).all(axis=1) & (points > 0).all(axis=1)]
    _, first = np.unique(np.rint(np.log10(points) * 60), axis=0, return_index=True) if len(points) else (None, [])
    return points[first]


@st.cache_data(max_entries=32, show_spinner=False)
def tried(key: Key, _design: Design) -> tuple[Tried, ...]:
    """What a search goes through, axis by axis, the design's own choice first."""
    found = []
    for axis in axes(_design.document, _design.fiberscope):
        documents = [presets.edited(_design.document, settings) for settings in axis.settings]
        made = [words.parts(document, presets.resolve(document).fiberscope) for document in documents]
        found.append(axis_tried(axis.name, made))
    return tuple(found)
