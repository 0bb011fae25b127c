"""Sizing: the answer for the present design, then what stands behind it."""

import streamlit as st

from optics.ui import headline, look, pictures, sketch
from optics.ui.sections import SECTIONS
from optics.ui.words import plain

here = sketch.current()
report = here.report

with st.container(horizontal=True, vertical_alignment="center", horizontal_alignment="distribute"):
    st.caption(f"**Fiberscope sizing** · {plain(report.name)}", width="content")
    headline.reference(here)
headline.alerts(here)
look.dim(here.wrong is not None)

with st.container(key="answer"):
    headline.banner(report)
    headline.needs(report)
    headline.metrics(report, here.pinned.report if here.pinned else None)
    with st.container(key="strip-wide"):
        pictures.show("strip", here.design, report, "The light from lamp to viewer: what is left after each step")
    narrow = st.container(key="strip-narrow")
    headline.caution(report)
    tabs = st.tabs(list(SECTIONS), key="section", on_change=sketch.touch)
    for tab, section in zip(tabs, SECTIONS.values()):
        if tab.open:
            with tab:
                section(here)
    st.caption(f"Design {report.design_hash}, version {report.version}. A screening estimate; it certifies nothing.")
    with narrow:
        pictures.show("strip_narrow", here.design, report, "The light from lamp to viewer, drawn downward")
