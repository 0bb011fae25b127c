"""What the page of the search is made of: buttons, pictures, the table of the picks, those that nearly do, what to relax."""

from typing import Any

import numpy as np
import streamlit as st

from optics import presets
from optics.figures import export
from optics.figures import pick as figures
from optics.figures.palette import DARK, LIGHT
from optics.study.pick_settings import Settings
from optics.ui import pick_words as words
from optics.ui import sketch
from optics.ui.pick_search import Answer, Searched, hunt, start
from optics.ui.pictures import is_dark
from optics.ui.sketch import Sketch
from optics.ui.words import number, plain

TAKE, NOW = ":material/arrow_forward: Take", "in the sketch"
FRESH = "Takes it into the sketch. The design before it is pinned as reference, if none is."


def search(found: Answer) -> None:
    """What was searched, and the button that searches; none while the answer is whole and that of the present design."""
    one = found.searched
    if found.wrong:
        st.error(plain(found.wrong), icon=":material/error:")
    if found.old:
        st.warning(
            "This is the last answer: the sketch has changed since. Search again to have its own.",
            icon=":material/history:",
        )
    if one is not None:
        st.caption(words.how(one.found, one.seconds))
    if one is not None and not found.old and not one.found.stopped:
        return
    st.button(
        "Search" if one is None else "Search again", key="pick:search", icon=":material/search:", type="primary",
        on_click=start, help="Some seconds; it tells how far it is, and can be stopped.",
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
        help=FRESH,
    )  # fmt: skip


def _take_row(one: Searched) -> None:
    sketch.touch()
    clicked = st.session_state["pick:row"]
    if clicked is not None:
        take(one, one.found.picks[clicked.row].set)


# What is shown


def show_front(one: Searched, here: Sketch) -> None:
    """The picks as a picture, the present design on it."""
    key = (one.key, one.seconds, here.report.design_hash, is_dark())
    st.image(
        _drawn_front(key, front(one, here)), width="stretch", alt="The picks: smallest gap over light at the target"
    )


def best(one: Searched) -> None:
    """The picks that are best in something, each to be taken."""
    for row, name in told(one).items():
        pick, made = one.found.picks[row - 1], one.made[row - 1]
        with st.container(horizontal=True, vertical_alignment="center", gap="small", wrap=False):
            st.markdown(words.best(row, name, pick, made), width="stretch")
            take_button("Take", f"pick:best:{row}", one, pick.set)


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
            "no.": place + 1,
            "light guide": made.guide,
            "image": made.image or None,
            "gap, mm": _shown(each.summary.smallest_gap_mm),
            "light, lx": _shown(each.summary.target_center_lux),
            "light, lm": _shown(each.delivered_lm),
            "tube, mm": _shown(each.summary.outer_diameter_mm),
            "bend, mm": _shown(each.summary.bend_radius_mm),
            "cost": str(each.cost_class),
            "closest need": words.closest(each.needs) or None,
            "lens": made.lens or None,
            "lamp": made.lamp,
        }
        for place, (each, made) in enumerate(zip(one.found.picks, one.made))
    ]
    names = [name for name in rows[0] if any(row[name] is not None for row in rows)]
    if "light, lx" in names:
        names.remove("light, lm")
    right = {
        name: st.column_config.TextColumn(alignment="right") for name in names if name.endswith(("mm", "lx", "lm"))
    }
    st.dataframe(
        {name: [row[name] for row in rows] for name in names},
        hide_index=True,
        alt="The picks with their parts and numbers",
        column_config={
            "": st.column_config.ButtonColumn(
                type="tertiary", pinned=True, key="pick:row", on_click=_take_row, args=(one,), width=104,
                help=FRESH,
            ),
            "no.": st.column_config.NumberColumn(width=44, help="Number in the picture."),
            "cost": st.column_config.TextColumn(help=words.COST),
            **right,
        },
    )  # fmt: skip


def _shown(value: float | None) -> str | None:
    return None if value is None else number(value)


def nearly(one: Searched) -> None:
    """The nearest misses, each with the smallest single change that helps, to be tried."""
    for place, (each, made) in enumerate(one.near):
        with st.container(horizontal=True, vertical_alignment="center", gap="small", wrap=False):
            st.markdown(words.nearly(each, made, one.found.stopped), width="stretch")
            if each.smallest_change is not None:
                change = {each.smallest_change.path: each.smallest_change.after}
                take_button("Try", f"pick:near:{place}", one, each.set, change)


def relax(one: Searched) -> None:
    """Nothing does the job as it is: the one number that would help, what to relax, and the candidate that then does."""
    helped = next(((each, made) for each, made in one.near if each.smallest_change is not None), None)
    if helped is not None:
        each, made = helped
        said = f"**One number changed, and one does\\:** {plain(words.change(each.smallest_change))}."
        settings = (each.set, {each.smallest_change.path: each.smallest_change.after})
        _way_out(said, made, "Try", "pick:helped", one, *settings)
    moved, said = one.found.nearest_relaxation, words.relaxed(one.found, helped is not None)
    if moved is None:
        st.markdown(said)
    else:
        eased = {change.path: change.after for change in moved.relax}
        _way_out(said, one.relaxed, "Relax and take", "pick:relax", one, moved.set, eased)


def _way_out(said: str, made: words.Parts, text: str, key: str, one: Searched, *settings: Settings) -> None:
    with st.container(horizontal=True, vertical_alignment="center", gap="small", wrap=False):
        st.markdown(f"{said}  \n:gray[{plain(str(made))}]", width="stretch")
        take_button(text, key, one, *settings)
