"""The picture that the operator gets: a made-up subject beside the view of it, at the same scale."""

import streamlit as st

from optics.fiberscope import Fiberscope
from optics.figures import export
from optics.figures import view as figures
from optics.figures.palette import DARK, LIGHT
from optics.report.picture import Picture, view_of
from optics.spec import OutOfRange
from optics.ui import sketch
from optics.ui.pictures import is_dark
from optics.ui.words import plain, sentence_case
from optics.viewer.subjects import SUBJECTS

FIRST = {"industrial": "cracks", "clinical": "vessels"}
ZOOMS = (1, 2, 4)
SMOOTH = 0.1  # of the honeycomb's contrast, left by smoothing
WIDTH_PX, SEED, DPI = 800, 1, 150
WIDE_IN, NARROW_IN = 9.0, 3.5  # side by side; one above the other


def section(here: sketch.Sketch) -> None:
    """Choice of subject and magnification, the picture, and what it means."""
    if here.report.detail is None:
        st.markdown("This design carries no picture. Add an image part in the sidebar to see one.")
        return
    subject, zoom, smooth = _choices(here)
    choice = (here.report.design_hash, subject, SMOOTH if smooth else None)
    try:
        picture = _picture(*choice, here.design.fiberscope)
    except OutOfRange as refused:
        st.markdown(plain(str(refused)))
        return
    for name, width_in in (("wide", WIDE_IN), ("narrow", NARROW_IN)):
        with st.container(key=f"view-{name}"):
            alt = f"{sentence_case(SUBJECTS[subject])}, and what the operator sees of it"
            st.image(_drawn(*choice, zoom, width_in, is_dark(), picture), width="stretch", alt=alt)
    st.markdown("\n".join(f"- {plain(line)}" for line in picture.words))


def _choices(here: sketch.Sketch) -> tuple[str, int, bool]:
    kept = {"persist_state": "session", "on_change": sketch.touch}
    with st.container(horizontal=True, vertical_alignment="bottom"):
        first = list(SUBJECTS).index(FIRST[here.report.setting])
        subject = st.selectbox(
            "Subject", SUBJECTS, first, format_func=SUBJECTS.get, key="view:subject", width=260, **kept
        )
        zoom = st.segmented_control(
            "Magnify", ZOOMS, default=1, format_func=lambda times: f"×{times}", key="view:zoom", required=True, **kept
        )
        smooth = st.toggle("Smooth the honeycomb", key="view:smooth", **kept)
    return subject, zoom, smooth


@st.cache_resource(max_entries=8, show_spinner=False)
def _picture(design_hash: str, subject: str, smooth: float | None, _fiberscope: Fiberscope) -> Picture:
    return view_of(_fiberscope, subject=subject, width_px=WIDTH_PX, seed=SEED, smooth=smooth, noise=True)


@st.cache_data(max_entries=24, show_spinner=False)
def _drawn(
    design_hash: str, subject: str, smooth: float | None, zoom: int, width_in: float, dark: bool, _picture: Picture
) -> bytes:
    figure = figures.view(_picture, zoom=zoom, palette=DARK if dark else LIGHT, width_in=width_in)
    return export.png(figure, DPI)
