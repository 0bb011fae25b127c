"""What the page on detail is made of: the answer, the simulated view, what limits, what would help, the viewer's numbers."""

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import streamlit as st

from optics import presets
from optics.fiberscope import Fiberscope
from optics.figures import export, image
from optics.figures import sharper as sharper_figure
from optics.figures import view as view_figure
from optics.figures.palette import DARK, LIGHT
from optics.presets import Document
from optics.report.answer import Report
from optics.report.picture import Picture, view_of
from optics.spec import OutOfRange
from optics.study import sharper, sharper_curves, sharper_helps, sharper_places, sharper_viewer
from optics.study.sharper import Sharpness
from optics.study.sharper_helps import Help
from optics.ui import detail_words as words
from optics.ui import headline, sketch
from optics.ui.pictures import is_dark
from optics.ui.rows import Columns
from optics.ui.sketch import Sketch
from optics.ui.words import number, percent, plain, sentence_case
from optics.viewer.subjects import SUBJECTS

NEEDS = ("smallest_gap_mm", "smallest_line_mm", "frame_hz", "field_of_view_deg")
FIRST = {"industrial": "bars", "clinical": "vessels"}
NAMES = {"bars": "bars", "cracks": "cracks", "gear": "gear tooth", "vessels": "vessels", "flat": "flat field"}
ZOOMS, SMOOTHS = (1, 2, 4, 8), (None, 0.3, 0.1, 0.03, 0.01, 0.003)
WIDE_IN, NARROW_IN, PITCH_IN = 9.0, 3.5, 2.55
PIXELS, MOST_PIXELS, DPI = 640, 1600, 150  # across the view, at zoom 1 and at most; of its PNG
KEPT = {"persist_state": "session", "on_change": sketch.touch}
CRACK_MM, SHOWN = 0.1, 5
GAP = "half a line pair, in the worst direction of bars"
LINE = "a single dark line, ten core pitches long"
SPOT = (
    "a round pit of the target's contrast that counted light tells from its surround (Rose), in the mean over its places "
    "between cores"
)


# What is computed and drawn, kept for a while by design


@st.cache_data(max_entries=96, show_spinner=False)
def _asked(name: str, design_hash: str, asked: tuple[Any, ...], _fiberscope: Fiberscope) -> Any:
    return STUDIES[name](_fiberscope, *asked)


def ask(name: str, here: Sketch, *asked: Any) -> Any:
    """A study of the present answer."""
    return _asked(name, here.report.design_hash, asked, here.design.fiberscope)


@st.cache_data(max_entries=32, show_spinner=False)
def _helped(design_hash: str, _fiberscope: Fiberscope, _curves: tuple[Sharpness, ...]) -> tuple[Help, ...]:
    return sharper_helps.helps(_fiberscope, _curves)


def found_helps(here: Sketch) -> tuple[Help, ...]:
    return _helped(here.report.design_hash, here.design.fiberscope, ask("over", here))


@st.cache_data(max_entries=48, show_spinner=False)
def _chart(name: str, design_hash: str, dark: bool, wanted_mm: float | None, _seen: Any) -> str:
    wanted = 0.5 / wanted_mm if wanted_mm else None
    return export.svg(CHARTS[name](_seen, wanted, DARK if dark else LIGHT)).decode("utf-8")


def chart(name: str, here: Sketch, seen: Any, alt: str) -> None:
    wanted = here.design.fiberscope.needs.smallest_gap_mm
    st.image(_chart(name, here.report.design_hash, is_dark(), wanted, seen), width="stretch", alt=alt)


def _sharper(which: slice, **more: Any) -> Callable[..., Any]:
    def draw(curves: tuple[Sharpness, ...], wanted: float | None, palette: Any) -> Any:
        top = max(curve.best_lp_mm for curve in curves) or 1.0
        return sharper_figure.sharper(curves[which], top_lp_mm=top, wanted_lp_mm=wanted, palette=palette, **more)

    return draw


STUDIES: dict[str, Callable[..., Any]] = {
    "over": sharper.over_all,
    "contrasts": sharper_curves.contrasts,
    "places": sharper_places.places,
    "viewing": sharper_viewer.viewing,
    "crack": sharper_viewer.crack,
}
CHARTS: dict[str, Callable[..., Any]] = {
    "contrasts": lambda seen, wanted, palette: image.contrasts(seen, palette=palette),
    "pitch": _sharper(slice(0, 1), panel_in=PITCH_IN),
    "others": _sharper(slice(1, None)),
}


def table(found: Columns, alt: str, header: bool = True) -> None:
    st.table(found, border="horizontal", hide_index=True, hide_header=not header, alt=alt)


# The answer


def answer(report: Report) -> None:
    """What is seen, whether that is enough, and what limits."""
    asked = [line for line in report.needs if line.name in NEEDS[:2]]
    mark = "" if not asked else f"{headline.MET if all(line.met for line in asked) else headline.SHORT} "
    st.header(f"{mark}{plain(words.first_words(report))}.", anchor=False)
    st.markdown(plain(words.limit_words(report)))


def helps_most(found: tuple[Help, ...], report: Report, pitch: Sharpness) -> None:
    little = words.pitch_limit_words(pitch) if report.summary.limited_by == "lattice" else ""
    wanted = {line.name: line.wanted for line in report.needs if not line.met}.get("smallest_gap_mm")
    st.markdown(f"**{plain(words.help_words(found, wanted))}** {plain(little)}")


def needs(report: Report) -> None:
    """The needs that the image has to meet."""
    headline.needs(replace(report, needs=tuple(line for line in report.needs if line.name in NEEDS)))


@st.cache_data(max_entries=8, show_spinner=False)
def _pinned_spot(design_hash: str, _document: Document) -> float | None:
    return sharper_viewer.viewing(presets.resolve(_document).fiberscope).spot_mm


def metrics(here: Sketch) -> None:
    """The numbers of the detail; with a pinned reference, how far each has moved from it."""
    pinned = here.pinned if here.pinned and here.pinned.report.detail else None
    seen, before = here.report.summary, pinned.report.summary if pinned else None
    spot = ask("viewing", here).spot_mm
    old_spot = _pinned_spot(pinned.report.design_hash, pinned.document) if pinned else None
    shown = [
        ("Smallest gap", seen.smallest_gap_mm, before and before.smallest_gap_mm, GAP),
        ("Thinnest line", seen.smallest_line_mm, before and before.smallest_line_mm, LINE),
        ("Smallest spot", spot, old_spot, SPOT),
    ]
    with st.grid("auto", min_column_width=112, gap="small"):
        for name, value, old, meaning in shown:
            moved, arrow = headline.moved_by(value, old) if pinned else (None, "off")
            said = "none" if value is None else f"{number(value)} mm"
            st.metric(name, said, moved, delta_color="off", delta_arrow=arrow, help=f"{sentence_case(meaning)}.")
        detail = here.report.detail
        far = "∞" if detail.far_mm is None else number(detail.far_mm, 2)
        st.metric("Resolved", f"{number(seen.resolved_lp_mm or 0.0)} lp/mm", help="Line pairs at the target, on axis.")
        st.metric("Sharp", f"{number(detail.near_mm, 2)}–{far} mm", help="Where the blur is at most one core pitch.")
        st.metric("Field of view", f"{number(seen.field_of_view_deg)}°", help="Full angle, in the medium.")


# The view


def view_controls(here: Sketch) -> tuple[str, int, float | None, bool, int]:
    """Choice of subject, zoom, what is left of the honeycomb, noise and seed."""
    scope = here.design.fiberscope
    chip, eye = scope.image.form == "chip", scope.image.form == "bundle" and scope.viewer.form == "eye"
    with st.container(horizontal=True, vertical_alignment="bottom", gap="medium"):
        first = list(NAMES).index(FIRST[here.report.setting])
        subject = st.selectbox("Subject", NAMES, first, format_func=NAMES.get, key="detail:subject", width=150, **KEPT)
        zoom = st.segmented_control(
            "Magnify", ZOOMS, default=1, format_func=lambda times: f"×{times}", key="detail:zoom", required=True, **KEPT
        )
        smooth = st.selectbox(
            "Honeycomb", SMOOTHS, format_func=words.smoothing, key="detail:smooth", width=150, disabled=chip,
            help="What a processor leaves of the contrast of the cores. What that costs stands below the picture.", **KEPT,
        )  # fmt: skip
        seed = st.number_input(
            "Seed", 0, 9999, 1, key="detail:seed", width=90, help="Another piece of the same kind.", **KEPT
        )
        noise = st.toggle("Noise", True, key="detail:noise", disabled=eye, **KEPT)
    return subject, zoom, None if chip else smooth, noise, int(seed or 0)


@st.cache_resource(max_entries=6, show_spinner=False)
def _picture(
    design_hash: str, subject: str, width_px: int, smooth: float | None, noise: bool, seed: int, _fiberscope: Fiberscope
) -> Picture:
    return view_of(_fiberscope, subject=subject, width_px=width_px, seed=seed, smooth=smooth, noise=noise)


@st.cache_data(max_entries=24, show_spinner=False)
def _drawn(choice: tuple[Any, ...], zoom: int, width_in: float, dark: bool, _picture: Picture) -> bytes:
    figure = view_figure.view(_picture, zoom=zoom, palette=DARK if dark else LIGHT, width_in=width_in)
    return export.png(figure, DPI)


def view(here: Sketch, choice: tuple[str, int, float | None, bool, int]) -> None:
    """The subject beside what the operator sees of it, and what that means."""
    subject, zoom, smooth, noise, seed = choice
    key = (here.report.design_hash, subject, min(PIXELS * zoom, MOST_PIXELS), smooth, noise, seed)
    try:
        picture = _picture(*key, here.design.fiberscope)
    except OutOfRange as refused:
        st.markdown(plain(str(refused)))
        return
    for name, width_in in (("wide", WIDE_IN), ("narrow", NARROW_IN)):
        with st.container(key=f"view-{name}"):
            alt = f"{sentence_case(SUBJECTS[subject])}, and what the operator sees of it"
            st.image(_drawn(key, zoom, width_in, is_dark(), picture), width="stretch", alt=alt)
    st.caption("  \n".join(plain(line) for line in picture.words))


def single(here: Sketch) -> None:
    """A width asked for, and how such a crack arrives; then the smallest round spot."""
    wanted = here.design.fiberscope.needs.smallest_gap_mm or CRACK_MM
    with st.container(horizontal=True, vertical_alignment="bottom", gap="medium"):
        width = st.number_input(
            "A single crack of, mm", 0.001, 50.0, wanted, 0.01, "%g", key="detail:crack", width=150, **KEPT
        )
        st.markdown(plain(words.crack_words(ask("crack", here, float(width or wanted)))), width="stretch")
    st.markdown(plain(words.spot_words(ask("viewing", here))))


# What would help


def help_list(found: tuple[Help, ...]) -> None:
    """Single changes, the most helpful first; each can be tried at once."""
    if not found:
        st.markdown("No single change that was tried shows at least 2 % finer detail.")
    for help in found[:SHOWN]:
        gain = percent(help.gain_share) if help.gain_share < 10 else "at last"
        cost = words.cost_words(help)
        with st.container(horizontal=True, vertical_alignment="center", gap="small", wrap=False):
            st.markdown(
                f"**{number(help.smallest_gap_mm)} mm**, {gain}\\: {plain(words.change_words(help))}"
                + (f"  \n:gray[{plain(cost)}]" if cost else ""),
                width="stretch",
            )
            st.button(
                "Try",
                key=f"help:{words.leads(help)}",
                type="tertiary",
                icon=":material/play_arrow:",
                on_click=_try,
                args=(help.settings,),
                help="Makes this change. The design before it is pinned as reference, if none is.",
            )


def _try(settings: dict[str, Any]) -> None:
    if sketch.current().pinned is None:
        sketch.pin()
    sketch.edit(presets.edited, settings)
