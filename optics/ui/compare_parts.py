"""What the page of the comparison is made of: numbers, crossovers with their curves, and the split, kept by design."""

from typing import Any

import numpy as np
import streamlit as st

from optics import presets
from optics.chain.axes import evaluate_possible, holding
from optics.chain.columns import columns
from optics.fiberscope import Fiberscope
from optics.figures import compare as figures
from optics.figures import export
from optics.figures.palette import DARK, LIGHT
from optics.presets import Design
from optics.report.answer import Report
from optics.spec import OutOfRange
from optics.study.compare import Difference, differences
from optics.study.compare_cross import DECIDES, LENGTH, RADIUS, RANGES, Crossover, crossovers
from optics.study.split import Split, fixed_tube, split
from optics.ui import compare_words, sketch, split_words
from optics.ui.compare_chosen import Chosen
from optics.ui.pictures import is_dark
from optics.ui.sketch import Sketch
from optics.ui.words import plain

POINTS = 41
BENDS = "guide.bundle.bends.radius_mm"
TITLES = {
    "delivered_lm": "delivered light, lm",
    "color_temperature_k": "color temperature, K",
    "color_rendering_index": "color rendering index",
    "smallest_gap_mm": "smallest gap, mm",
}
PATHS = {LENGTH: "length of the guide, m", RADIUS: "radius of the first bend, mm"}
READ = {**DECIDES, "smallest_gap_mm": "smallest_gap_mm"}


@st.cache_data(max_entries=24, show_spinner=False)
def compared(key: tuple[str, ...], _chosen: Chosen) -> tuple[tuple[Report, ...], tuple[Difference, ...]]:
    return differences(_chosen.designs, _chosen.names)


@st.cache_data(max_entries=24, show_spinner=False)
def crossed(key: tuple[str, ...], _chosen: Chosen) -> tuple[Crossover, ...]:
    return crossovers(_chosen.scopes, _chosen.names)


@st.cache_data(max_entries=24, show_spinner=False)
def curves(key: tuple[str, ...], path: str, _chosen: Chosen) -> dict[str, np.ndarray]:
    """The numbers that decide along a path [design, place]; nan where the design cannot be so."""
    places = np.geomspace(*RANGES[path], POINTS)
    table = columns(_chosen.scopes)
    moved = table.take(np.repeat(np.arange(len(_chosen.designs)), POINTS))
    if path == LENGTH:
        moved = moved.replaced({LENGTH: np.tile(places, len(_chosen.designs))})
    elif BENDS in moved.number and moved.number[BENDS].shape[1]:
        radius = moved.number[BENDS].copy()
        radius[:, 0] = np.where(np.isnan(radius[:, 0]), np.nan, np.tile(places, len(_chosen.designs)))
        moved = moved.replaced({BENDS: radius})
    good = np.flatnonzero(holding(moved))
    numbers, ready = evaluate_possible(moved.take(good))
    found = {}
    for quantity, name in READ.items():
        values = np.full(moved.count, np.nan)
        values[good] = np.where(ready & np.isfinite(numbers.value[name]), numbers.value[name], np.nan)
        found[quantity] = values.reshape(len(_chosen.designs), POINTS)
    return found


def show_crossings(chosen: Chosen) -> None:
    """Sentences and small pictures along length and bend radius."""
    found = crossed(chosen.key, chosen)
    for path, place in zip(RANGES, st.columns(2, gap="medium")):
        with place:
            bent = path == LENGTH or any(scope.guide.bundle.bends for scope in chosen.scopes)
            if bent:
                for quantity in _drawn_along(chosen, found, path):
                    _along(chosen, path, quantity, found)
            said, along = compare_words.crossings(found, path)
            st.markdown("  \n".join(said))
            st.caption(plain(along))


def _drawn_along(chosen: Chosen, found: tuple[Crossover, ...], path: str) -> list[str]:
    """What is drawn: the lumens, and the detail where two that are both resolved cross."""
    gap = "smallest_gap_mm"
    values, places = curves(chosen.key, path, chosen)[gap], np.log(np.geomspace(*RANGES[path], POINTS))
    seen = any(
        np.isfinite(
            [np.interp(np.log(row.value), places, values[chosen.names.index(name)]) for name in row.between]
        ).all()
        for row in found
        if row.path == path and row.quantity == gap and row.value is not None
    )
    return ["delivered_lm", *([gap] if seen else [])]


def _along(chosen: Chosen, path: str, quantity: str, found: tuple[Crossover, ...]) -> None:
    values = curves(chosen.key, path, chosen)[quantity]
    places = np.geomspace(*RANGES[path], POINTS)
    mine = [row for row in found if (row.path, row.quantity) == (path, quantity) and row.value is not None]
    crossings = tuple(
        (row.value, float(np.interp(np.log(row.value), np.log(places), values[chosen.names.index(row.ahead)])))
        for row in mine
    )
    now = tuple(_now(scope, path) for scope in chosen.scopes)
    view = figures.Along(TITLES[quantity], PATHS[path], places, chosen.names, values, now, crossings)
    picture = _drawn((*chosen.key, path, quantity), is_dark(), "along", view)
    st.image(picture, width="stretch", alt=f"{TITLES[quantity]} over the {PATHS[path]}")


def _now(scope: Fiberscope, path: str) -> float:
    if path == LENGTH:
        return scope.guide.bundle.length_m
    return scope.guide.bundle.bends[0].radius_mm if scope.guide.bundle.bends else np.nan


@st.cache_data(max_entries=64, show_spinner=False)
def _drawn(key: tuple[str, ...], dark: bool, kind: str, _view: Any) -> str:
    draw = {"along": figures.along, "shared": figures.shared}[kind]
    return export.svg(draw(_view, palette=DARK if dark else LIGHT)).decode("utf-8")


# The split


@st.cache_data(max_entries=16, show_spinner=False)
def _split(key: str, _design: Design) -> Split:
    return split(_design)


def show_split(here: Sketch) -> None:
    """The tube between image and light, or why there is nothing to share."""
    try:
        found = _split(here.report.design_hash, here.design)
    except OutOfRange as wrong:
        st.markdown(f"Nothing is shared here\\: {plain(split_words.refusal(str(wrong)))}")
        return
    scope = here.design.fiberscope
    left, right = st.columns(2, gap="medium")
    with left:
        picture = _drawn((here.report.design_hash,), is_dark(), "shared", _shared(found, here))
        st.image(picture, width="stretch", alt="Smallest gap and light over the image's share of the tube")
    with right:
        first, told = split_words.split_words(found, scope)
        st.markdown(f"**{plain(first)}**")
        st.markdown("  \n".join(plain(line) for line in told))
        with st.container(horizontal=True):
            if found.best is not None:
                _take("Take the finest share", "compare:best", found.best.set)
            good = [point for point in split_words.keeping(found, scope) if point.smallest_gap_mm is not None]
            if good and found.best.target_center_lux < (scope.needs.target_center_lux or 0.0):
                best = min(good, key=lambda point: point.smallest_gap_mm)
                _take(
                    f"Take {100 * best.image_fraction:.0f} %, the finest that keeps the light", "compare:keeping",
                    _settings(scope, found, best.image_fraction),
                )  # fmt: skip


def _shared(found: Split, here: Sketch) -> figures.Shared:
    def of(name: str) -> np.ndarray:
        return np.array([getattr(point, name) for point in found.curve], float)

    best, needs = found.best, here.design.fiberscope.needs
    center = here.report.summary.target_center_lux
    return figures.Shared(
        of("image_fraction"), of("smallest_gap_mm"), of("target_center_lux"), of("fits") > 0,
        None if best is None else (best.image_fraction, best.smallest_gap_mm, best.target_center_lux),
        None if best is None else (found.flat_from_fraction, found.flat_to_fraction),
        (found.now_fraction, _nan(found.now_gap_mm), _nan(center)),
        _nan(needs.smallest_gap_mm), _nan(needs.target_center_lux),
    )  # fmt: skip


def _nan(value: float | None) -> float:
    return np.nan if value is None else float(value)


def _settings(scope: Fiberscope, found: Split, share: float) -> dict[str, float]:
    """What makes a share of the design file."""
    made = {path: float(value[0]) for path, value in fixed_tube(scope).at(np.array([share])).items()}
    return made | {"body.section.outer_diameter_mm": found.outer_diameter_mm}


def _take(text: str, key: str, settings: dict[str, Any]) -> None:
    st.button(
        text, key=key, type="tertiary", icon=":material/arrow_forward:", on_click=_taken, args=(settings,),
        help="Takes it into the sketch. The design before it is pinned as reference, if none is.",
    )  # fmt: skip


def _taken(settings: dict[str, Any]) -> None:
    if sketch.current().pinned is None:
        sketch.pin()
    sketch.edit(presets.edited, settings)


def take(chosen: Chosen, place: int, here: Sketch) -> None:
    """One of the compared designs into the sketch."""
    if chosen.designs[place].document != here.document:
        st.button(
            f"Take {plain(chosen.names[place])} into the sketch", key=f"compare:take:{place}", type="tertiary",
            icon=":material/arrow_forward:", on_click=_design_taken, args=(chosen.designs[place],),
            help="The design before it is pinned as reference, if none is.",
        )  # fmt: skip


def _design_taken(design: Design) -> None:
    if sketch.current().pinned is None:
        sketch.pin()
    sketch.edit(lambda _: design.document)
