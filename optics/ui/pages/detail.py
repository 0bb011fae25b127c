"""Detail: what is seen, how it looks, what limits it, and why smaller is not always sharper."""

import streamlit as st

from optics.ui import detail_parts as parts
from optics.ui import detail_words as words
from optics.ui import headline, look, pictures, sketch
from optics.ui.words import plain

here = sketch.current()
report = here.report

with st.container(horizontal=True, vertical_alignment="center", horizontal_alignment="distribute"):
    st.caption(f"**Detail** · {plain(report.name)}", width="content")
    headline.reference(here)
headline.alerts(here)
look.dim(here.wrong is not None)

with st.container(key="answer"):
    if report.detail is None:
        st.header("No image: this design is a light guide alone.", anchor=False)
        st.markdown("Add an image part in the sidebar to ask for detail.")
    else:
        parts.answer(report)
        most = st.empty()
        parts.needs(report)
        parts.metrics(here)

        st.subheader("What the operator sees", anchor=False)
        choice = parts.view_controls(here)
        seen = st.container()
        parts.single(here)

        st.subheader("What limits", anchor=False)
        left, right = st.columns(2, gap="medium")
        curves = parts.ask("contrasts", here)
        with left:
            pictures.show("ledger", here.design, report, "What each part alone would allow, in line pairs per mm")
            st.caption(plain(words.needed_words(curves)))
        with right:
            parts.chart("contrasts", here, curves, "Contrast of each part over frequency, and what is needed")

        over = parts.ask("over", here)
        found = parts.found_helps(here)
        with most:
            parts.helps_most(found, report, over[0])
        st.subheader("Smaller is not always sharper", anchor=False)
        left, right = st.columns(2, gap="medium")
        with left:
            parts.chart("pitch", here, over, "What is resolved over the pitch")
            st.caption(plain(words.pitch_words(over[0])))
        with right:
            parts.chart("others", here, over, "What is resolved over the f-number and over the lamp's light")

        left, right = st.columns(2, gap="medium")
        with left:
            st.subheader("What would help, most first", anchor=False)
            parts.help_list(found)
        with right:
            viewing = parts.ask("viewing", here)
            st.subheader(words.VIEWERS[viewing.viewer], anchor=False)
            st.markdown(plain(words.viewer_words(viewing)))
            parts.table(words.viewer_rows(viewing), "Numbers of the viewer", header=False)

        st.subheader("Near, far, and at the edge", anchor=False)
        places = parts.ask("places", here)
        parts.table(words.place_rows(places), "Detail near, at work, far and at the edge of the field")
        st.caption(plain(words.place_words(places, report)))
    st.caption(f"Design {report.design_hash}, version {report.version}. A screening estimate; it certifies nothing.")
    if report.detail is not None:
        with seen:
            parts.view(here, choice)
