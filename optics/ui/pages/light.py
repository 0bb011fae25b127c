"""Light: every step from lamp to tip, what would give more, and cone, color and bends on the way."""

import streamlit as st

from optics.ui import drawings, headline, light_parts, light_words, look, pictures, rows, sketch
from optics.ui.words import plain

here = sketch.current()
report = here.report

with st.container(horizontal=True, vertical_alignment="center", horizontal_alignment="distribute"):
    st.caption(f"**Light** · {plain(report.name)}", width="content")
    headline.reference(here)
headline.alerts(here)
look.dim(here.wrong is not None)

with st.container(key="answer"):
    found = light_parts.found_levers(here)
    light_parts.answer(here, found)
    light_parts.metrics(report, here.pinned.report if here.pinned else None)
    left, right = st.columns(2, gap="medium")
    with left:
        st.subheader("Step by step", anchor=False)
        pictures.show("budget", here.design, report, "Light left after each step from lamp to exit face")
    with right:
        st.subheader("What would give more", anchor=False)
        with st.container(gap="xsmall"):
            light_parts.lever_list(report, found)
    left, right = st.columns(2, gap="medium")
    with left:
        cone = drawings.view("cone", here)
        st.subheader("Cone in, cone out", anchor=False)
        st.markdown(plain(light_words.cone_words(cone)))
        drawings.show("cone", here, "Radiance over the angle: launched, after the guide, as it leaves")
    with right:
        bends = drawings.view("bends", here)
        st.subheader("Bends", anchor=False)
        st.markdown(plain(light_words.bend_words(bends)))
        drawings.show("bends", here, "Loss of one bend over its radius, with the design's own bends")
        light_parts.trace(here)

    st.subheader("Color in, color out", anchor=False)
    color = drawings.view("color", here)
    st.markdown(plain(light_words.color_words(color)))
    left, right = st.columns(2, gap="medium")
    with left:
        pictures.show("spectra", here.design, report, "Spectrum of the lamp and of the delivered light")
        st.table(light_words.color_table(color), border="horizontal", hide_index=True, alt="Color before and after")
    with right:
        drawings.show("color", here, "Color of the lamp and of the delivered light beside the black bodies")
    st.subheader("Why each step is what it is", anchor=False)
    st.table(rows.steps(report), border="horizontal", hide_index=True, alt="Steps of the light with their reasons")
    headline.caution(report)
    st.caption(f"Design {report.design_hash}, version {report.version}. A screening estimate; it certifies nothing.")
