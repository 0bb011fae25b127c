"""What the page of the margins is made of: what is asked (kept in the session), the study, its pictures and files."""

import csv
import io
import json
import time
from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np
import streamlit as st

from optics.figures import export, margins_spread
from optics.figures import margins as figures
from optics.figures.palette import DARK, LIGHT
from optics.presets import Design, Document
from optics.spec import OutOfRange
from optics.study.margins import SAMPLES, SEED, margins, met, numbers_of
from optics.study.margins_aging import Aged, aged_columns
from optics.study.margins_answer import Distribution, Margins
from optics.study.margins_draw import applied
from optics.study.margins_ranges import Tolerance, nominal_columns
from optics.ui import margins_rests, pictures, sketch
from optics.ui import margins_words as words
from optics.ui.margins_ranges import Given, in_force
from optics.viewer.detail import PARTS

Numbers = dict[str, np.ndarray]  # headline numbers by name [sample]
KEPT = 12


@dataclass(frozen=True, slots=True)
class Studied:
    """One study with the numbers of every sample, and the design that it is of."""

    key: tuple[str, ...]
    design: Design
    found: Margins
    numbers: Numbers
    aged: Numbers | None
    seconds: float


@dataclass
class Asked:
    """What the person asks of the design that was opened; another design starts afresh."""

    opened: Document
    samples: int = SAMPLES
    seed: int = SEED
    given: Given = field(default_factory=dict)
    worn: dict[str, float] = field(default_factory=dict)
    everything: bool = False  # whether values without a tolerance are listed too
    run: bool = False
    done: set[tuple[str, ...]] = field(default_factory=set)
    last: Studied | None = None
    refused: str | None = None  # what was entered and cannot be
    edition: int = 0  # of the table of tolerances: a new one forgets what was refused


def asked() -> Asked:
    """What is asked in this tab about the design that was opened."""
    here, found = sketch.current(), st.session_state.get("margins")
    if found is None or found.opened != here.opened:
        found = st.session_state["margins"] = Asked(here.opened)
    return found


def change(what: str, value: object) -> None:
    """One setting of the study changed."""
    sketch.touch()
    setattr(asked(), what, value)
    asked().refused = None


@dataclass(frozen=True, slots=True)
class Answer:
    """What there is to show: the study of now, or the last one with `old`; why there is none of now."""

    studied: Studied | None
    old: bool
    wrong: str | None


def answer() -> Answer:
    """The study of what is asked: run at the first visit, on request, or where it was run before; else the last one."""
    here, ask = sketch.current(), asked()
    try:
        ranges, aging = in_force(here.design, ask.given), Aged(**ask.worn) if ask.worn else None
        key = (here.report.design_hash, str(ask.samples), str(ask.seed), repr(ranges), repr(aging))
        if not (ask.last is None or ask.run or key in ask.done):
            return Answer(ask.last, True, None)
        ask.run = False
        said = f"Drawing {ask.samples:,} designs and sending each through the whole chain"
        if ask.last is not None:
            said += f", about {max(ask.last.seconds / ask.last.found.samples * ask.samples, 1):.0f} s by the last run"
        with st.spinner(said, show_time=True):
            ask.last = studied(key, ask.samples, ask.seed, here.design, ranges, aging)
        ask.done.add(key)
    except OutOfRange as wrong:
        ask.run = False
        return Answer(ask.last, ask.last is not None, words.said(wrong))
    return Answer(ask.last, False, None)


@st.cache_data(max_entries=KEPT, show_spinner=False)
def studied(
    key: tuple[str, ...],
    samples: int,
    seed: int,
    _design: Design,
    _ranges: tuple[Tolerance, ...],
    _aging: Aged | None,
) -> Studied:
    start = time.monotonic()
    found = margins(_design, ranges=_ranges, samples=samples, seed=seed, aging=_aging)
    nominal = nominal_columns(_design.fiberscope)
    table = applied(nominal, found.ranges, found.drawn.values)
    aged = None if _aging is None else numbers_of(aged_columns(table, _aging, nominal))
    return Studied(key, _design, found, numbers_of(table), aged, time.monotonic() - start)


# Pictures


def causes(one: Studied) -> None:
    """What moves a number, of the deciding one first."""
    found = one.found.causes
    st.subheader("What decides", anchor=False)
    if not found:
        st.markdown("No need is moved by the tolerances, or there are too few samples to tell what moves it.")
        return
    names = [item.of for item in found]
    of = names[0]
    if len(names) > 1:
        of = st.selectbox(
            "What moves", names, key="margins:of", format_func=words.called, label_visibility="collapsed", width=260,
            on_change=sketch.touch,
        )  # fmt: skip
    else:
        st.markdown(f"What moves the {words.called(of)}")
    show_causes(one, of)
    unclear = words.unclear(next(item for item in found if item.of == of))
    if unclear:
        st.caption(unclear)


def spreads(one: Studied) -> None:
    """One small histogram for each number that moves, those with a need first; and the same as a table."""
    asked_for, others = margins_rests.shown(one.found)
    st.caption(margins_rests.legend(one.found))
    if asked_for:
        _histograms(one, asked_for)
        with st.expander("Numbers that no need asks for", key="margins:others"):
            _histograms(one, others)
    else:
        _histograms(one, others)
    with st.expander("The same as a table", key="margins:table"):
        st.table(
            margins_rests.spread_table(one.found), border="horizontal", hide_index=True, alt="How the numbers spread"
        )
    st.caption(margins_rests.still(one.found))


def _histograms(one: Studied, items: list[Distribution]) -> None:
    with st.grid("auto", min_column_width=250, gap="small"):
        for item in items:
            show_spread(one, item.name)


def files(one: Studied) -> None:
    """The samples and the whole study to take away, built when asked for."""
    with st.container(horizontal=True):
        for text, make, suffix, kind in (
            ("Download the samples, CSV", as_csv, "csv", "text/csv"),
            ("Download the study, JSON", as_json, "json", "application/json"),
        ):
            st.download_button(
                text, lambda make=make: make(one), f"{stem(one)}.{suffix}", kind, key=f"margins:{suffix}",
                icon=":material/download:", on_click="ignore",
            )  # fmt: skip


def show_odds(one: Studied) -> None:
    names = {need.name: words.need_label(need) for need in one.found.new.needs}
    _show("odds", one, "", f"Share of the samples that meets each need: {words.headline(one.found)[1]}", names)


def show_causes(one: Studied, of: str) -> None:
    names = {item.path: words.driver(item.path, one.found) for item in one.found.ranges}
    _show("causes", one, of, f"What moves the {words.called(of)}: shares of its variance, largest first", names)


def show_spread(one: Studied, name: str) -> None:
    _show("spread", one, name, f"How the {words.called(name)} spreads over the samples", {name: words.titled(name)})


def _show(kind: str, one: Studied, of: str, alt: str, names: Mapping[str, str]) -> None:
    st.image(_drawn(kind, of, one.key, pictures.is_dark(), one, names), width="stretch", alt=alt)


@st.cache_data(max_entries=160, show_spinner=False)
def _drawn(kind: str, of: str, key: tuple[str, ...], dark: bool, _one: Studied, _names: Mapping[str, str]) -> str:
    found, palette = _one.found, DARK if dark else LIGHT
    if kind == "odds":
        figure = figures.odds(found.new, found.aged, _names, palette=palette)
    elif kind == "causes":
        figure = figures.causes(next(item for item in found.causes if item.of == of), _names, palette=palette)
    else:
        nominal = next(item.value for item in found.new.figures if item.name == of)
        wanted = next((need.wanted for need in found.new.needs if need.name == of), None)
        aged = _one.aged[of] if _one.aged else None
        figure = margins_spread.spread(of, _names[of], _one.numbers[of], nominal, wanted, aged, palette=palette)
    return export.svg(figure).decode("utf-8")


# Files


def as_json(one: Studied) -> str:
    return json.dumps(one.found.as_dict(), indent=2, allow_nan=False, ensure_ascii=False)


def as_csv(one: Studied) -> str:
    """Every sample with its headline numbers, whether it meets all needs, and what was drawn for it."""
    columns: dict[str, list[str]] = {"sample": [str(row) for row in range(1, one.found.samples + 1)]}
    for prefix, numbers in (("", one.numbers), ("aged_", one.aged or {})):
        for name, values in numbers.items():
            if name == "limited_by":
                columns[prefix + name] = [PARTS[int(code)] if code >= 0 else "" for code in values]
            elif not np.isnan(values).all():
                columns[prefix + name] = [f"{value:.9g}" if np.isfinite(value) else "" for value in values]
        truth = met(one.design.fiberscope.needs, numbers) if numbers else {}
        if truth:
            columns[f"{prefix}meets_all_needs"] = [
                str(int(all_met)) for all_met in np.logical_and.reduce([*truth.values()])
            ]
    for item, drawn in zip(one.found.ranges, one.found.drawn.values.T):
        columns[item.path + (" (factor)" if item.curve else "")] = [f"{value:.9g}" for value in drawn]
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(columns)
    writer.writerows(zip(*columns.values()))
    return out.getvalue()


def stem(one: Studied) -> str:
    return ("_".join(one.found.name.lower().replace(",", "").split()) or "design") + "_margins"
