"""What the page of the search is made of: the search itself (in a thread, can be stopped), its pictures, table and buttons."""

import dataclasses
import json
import threading
import time
from collections import OrderedDict
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import streamlit as st

from optics import presets
from optics.figures import export
from optics.figures import pick as figures
from optics.figures.palette import DARK, LIGHT
from optics.presets import Design, Document
from optics.spec import OutOfRange
from optics.study.pick import Failed, Failures, Picked, pick
from optics.study.pick_axes import axes
from optics.study.pick_settings import Settings
from optics.ui import pick_words as words
from optics.ui import sketch
from optics.ui.pictures import is_dark
from optics.ui.sketch import Sketch
from optics.ui.words import number, plain

NEAREST, SHOWN = 60, 6  # failing candidates that are looked at, and shown
KEPT = 8  # searches
TAKE, NOW = ":material/arrow_forward: Take", "in the sketch"
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
    """What this session has searched; another design that is opened starts afresh."""
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
    with place.container(horizontal=True, vertical_alignment="center"):
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
    return f"{job.share:.0%} of the candidates sent through the chain" if job.share < 1 else "Looking at those that fail"


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
    """The nearest failures that differ in what fails, in what would help, or in the image; those that can be helped first."""
    seen: dict[tuple[str, ...], Failed] = {}
    for each in found.failed[:NEAREST]:
        image = str(each.set.get("image.bundle.preset")), str(each.set.get("image.form"))
        kind = each.first_reason.split(":")[0], each.smallest_change.path if each.smallest_change else ""
        seen.setdefault((*kind, *image), each)
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
def sizes(key: Key, _design: Design) -> dict[str, int]:
    """How many choices each axis of a search has, the design's own among them."""
    return {axis.name: len(axis.settings) for axis in axes(_design.document, _design.fiberscope)}


# Buttons


def search(found: Answer) -> None:
    """The button that searches; at rest while the answer is that of the present design."""
    fresh = found.searched is not None and not found.old
    partial = fresh and found.searched.found.stopped
    st.button(
        "Search again" if found.old or partial else "Search", key="pick:search", icon=":material/search:",
        type="secondary" if fresh and not partial else "primary", disabled=fresh and not partial, on_click=start,
        help="Sends every sensible combination of light guide, lamp, light ports, image and lens through the whole chain: "
        "some seconds.",
    )  # fmt: skip


def take(one: Searched, *settings: Settings) -> None:
    """Take a candidate into the sketch; what was there before is pinned as reference, if nothing is."""
    document = one.design.document
    for each in settings:
        document = presets.edited(document, each)
    if sketch.current().pinned is None:
        sketch.pin()
    hunt().taken = document
    sketch.edit(lambda _: document)


def take_button(text: str, key: str, one: Searched, *settings: Settings, kind: str = "tertiary") -> None:
    st.button(
        text, key=key, type=kind, icon=":material/arrow_forward:", on_click=take, args=(one, *settings),
        help="Takes it into the sketch. The design before it is pinned as reference, if none is.",
    )  # fmt: skip


def _take_row(one: Searched) -> None:
    sketch.touch()
    clicked = st.session_state["pick:row"]
    if clicked is not None:
        take(one, one.found.picks[clicked.row].set)


# What is shown


def show_front(one: Searched, here: Sketch) -> None:
    """The picks as a picture, the present design on it."""
    view = front(one, here)
    key = (one.key, here.report.design_hash, is_dark())
    st.image(_drawn_front(key, view), width="stretch", alt="The picks: smallest gap over light at the target")
    st.caption(" · ".join(f"**{number_}** {plain(said)}" for number_, said in told(one).items()))


@st.cache_data(max_entries=48, show_spinner=False)
def _drawn_front(key: tuple[Any, ...], _view: figures.Front) -> str:
    return export.svg(figures.front(_view, palette=DARK if key[-1] else LIGHT)).decode("utf-8")


def front(one: Searched, here: Sketch) -> figures.Front:
    lit = any(each.summary.target_center_lux for each in one.found.picks)
    dots = tuple(
        figures.Dot(
            row,
            _nan(each.summary.target_center_lux if lit else each.delivered_lm),
            _nan(each.summary.smallest_gap_mm),
            _nan(each.summary.outer_diameter_mm),
            each.cost_class,
        )
        for row, each in enumerate(one.found.picks, start=1)
    )
    summary, needs = here.report.summary, here.design.fiberscope.needs
    light = summary.target_center_lux if lit else here.report.light.delivered_lm
    own = figures.Dot(0, _nan(light), _nan(summary.smallest_gap_mm), _nan(summary.outer_diameter_mm), 1)
    return figures.Front(
        dots, one.others, own if np.isfinite(own.light) and np.isfinite(own.gap_mm) else None,
        _nan(needs.target_center_lux) if lit else np.nan, _nan(needs.smallest_gap_mm),
        "light at the center of the target, lx" if lit else "light delivered, lm", tuple(told(one)),
    )  # fmt: skip


def _nan(value: float | None) -> float:
    return np.nan if value is None else float(value)


def told(one: Searched) -> dict[int, str]:
    """The picks that are best in something, by their row in the table."""
    picks, best = one.found.picks, {1: ["plainest"]}

    def add(name: str, read: Any) -> None:
        known = [(read(each), row) for row, each in enumerate(picks, start=1) if read(each) is not None]
        if known:
            best.setdefault(min(known)[1], []).append(name)

    add("finest", lambda each: each.summary.smallest_gap_mm)
    add("brightest", lambda each: -(each.summary.target_center_lux or each.delivered_lm))
    add("thinnest", lambda each: each.summary.outer_diameter_mm)
    return {row: " and ".join(names) for row, names in sorted(best.items())}


def show_failing(one: Searched) -> None:
    counts = words.failing(one.found)
    picture = _drawn_failing((one.key, one.seconds, is_dark()), counts)
    st.image(picture, width="stretch", alt="What the candidates fail first, in the order of the light")


@st.cache_data(max_entries=24, show_spinner=False)
def _drawn_failing(key: tuple[Any, ...], _counts: dict[str, int]) -> str:
    return export.svg(figures.failing(_counts, palette=DARK if key[-1] else LIGHT)).decode("utf-8")


def table(one: Searched, here: Sketch) -> None:
    """The picks row by row, each to be taken."""
    documents = [presets.edited(one.design.document, each.set) for each in one.found.picks]
    rows = [
        {
            "": NOW if documents[place] == here.document else TAKE,
            "row": place + 1,
            "light guide": made.guide,
            "image": made.image or None,
            "lens": made.lens or None,
            "lamp": made.lamp,
            "gap, mm": _shown(each.summary.smallest_gap_mm),
            "light, lx": _shown(each.summary.target_center_lux),
            "light, lm": _shown(each.delivered_lm),
            "tube, mm": _shown(each.summary.outer_diameter_mm),
            "bend, mm": _shown(each.summary.bend_radius_mm),
            "closest need": words.closest(each.needs) or None,
            "cost class": str(each.cost_class),
        }
        for place, (each, made) in enumerate(zip(one.found.picks, one.made))
    ]
    names = [name for name in rows[0] if any(row[name] is not None for row in rows)]
    if "light, lx" in names:
        names.remove("light, lm")
    right = {name: st.column_config.TextColumn(alignment="right") for name in names if name.endswith(("mm", "lx", "lm"))}
    st.dataframe(
        {name: [row[name] for row in rows] for name in names},
        hide_index=True,
        alt="The picks with their parts and numbers",
        column_config={
            "": st.column_config.ButtonColumn(
                type="tertiary", pinned=True, key="pick:row", on_click=_take_row, args=(one,), width=110,
                help="Takes this pick into the sketch. The design before it is pinned as reference, if none is.",
            ),
            "row": st.column_config.NumberColumn(width=44, help="Number in the picture."),
            **right,
        },
    )  # fmt: skip


def _shown(value: float | None) -> str | None:
    return None if value is None else number(value)


def nearly(one: Searched) -> None:
    """The nearest misses, each with the smallest single change that helps, to be tried."""
    for place, (each, made) in enumerate(one.near):
        with st.container(horizontal=True, vertical_alignment="center", gap="small", wrap=False):
            st.markdown(words.nearly(each, made), width="stretch")
            if each.smallest_change is not None:
                change = {each.smallest_change.path: each.smallest_change.after}
                take_button("Try", f"pick:near:{place}", one, each.set, change)


def relax(one: Searched) -> None:
    """Nothing does the job: what to relax, and the candidate that then does."""
    st.markdown(words.relaxed(one.found))
    moved = one.found.nearest_relaxation
    if moved is not None:
        st.markdown(f":gray[{plain(str(one.relaxed))}]")
        eased = {change.path: change.after for change in moved.relax}
        take_button("Relax it and take this one", "pick:relax", one, moved.set, eased)


def state(found: Answer) -> None:
    """Whether the answer is that of the present design."""
    if found.wrong:
        st.error(plain(found.wrong), icon=":material/error:")
    if found.old:
        st.warning(
            "This is the last answer: the sketch has changed since. Search again to have its own.", icon=":material/history:"
        )
