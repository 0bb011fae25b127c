"""Fit: whether the parts fit the tube and the tube passes the bore, and what bending, pushing and heat ask of it."""

import streamlit as st

from optics.ui import drawings, fit_parts, fit_words, headline, look, pictures, rows, sketch
from optics.ui.words import plain

here = sketch.current()
report, scope = here.report, here.design.fiberscope


def table(found: rows.Columns, alt: str, header: bool = True) -> None:
    st.table(found, border="horizontal", hide_index=True, hide_header=not header, alt=alt)


with st.container(horizontal=True, vertical_alignment="center", horizontal_alignment="distribute"):
    st.caption(f"**Fit** · {plain(report.name)}", width="content")
    headline.reference(here)
headline.alerts(here)
look.dim(here.wrong is not None)

with st.container(key="answer"):
    if report.fit is None:
        st.header("This design has no body, so nothing is said of fit.", anchor=False)
        st.markdown("Add a body in the sidebar: the tube that holds the parts, and the bore that it must pass.")
    else:
        limits, fill = drawings.view("limits", here), drawings.view("fill", here)
        passage, handling = scope.body.passage, scope.body.handling
        fit_parts.answer(here, limits)
        left, right = st.columns(2, gap="medium")
        with left:
            st.subheader("What the tube holds", anchor=False)
            drawings.show("tube", here, "The tip's face and the tube behind it, to scale")
            weights = drawings.view("weights", here)
            st.markdown(plain(fit_words.weight_words(weights, report.fit)))
            table(fit_parts.weight_table(weights), "What each part adds to the tube")
            st.markdown(plain(fit_words.fill_words(fill)))
            table(fit_parts.fill_table(fill), "How full the tube is", header=False)
        with right:
            st.subheader("What it passes", anchor=False)
            pictures.show("passage", here.design, report, "The rigid tip at its tightest in the bore")
            if limits is not None:
                fit_parts.vary(here)
            if fit_parts.of_body(report).needs:
                table(rows.needs(fit_parts.of_body(report)), "Margins to the needs")
        bending = drawings.view("bending", here)
        left, right = st.columns(2, gap="medium")
        with left:
            st.subheader("Bending", anchor=False)
            st.markdown(plain(fit_words.bending_words(bending)))
            table(fit_parts.bending_table(bending), "Strain and least radius part by part")
            turn = fit_parts.turned_deg(scope)
            table(fit_parts.slide_table(drawings.view("slides", here, turn), turn), "Slides off the axis")
            st.caption(fit_parts.SLIDING)
            if passage is not None and passage.bore_mm and report.fit.outer_diameter_mm <= passage.bore_mm:
                table(
                    fit_parts.tilt_table(passage.bore_mm, report.fit.outer_diameter_mm), "Lean of the tip at the entry"
                )
        with right:
            if handling is not None:
                heats = drawings.view("heats", here)
                st.subheader("Heat and sterilization", anchor=False)
                st.markdown(plain(fit_words.heat_words(scope, heats)))
                table(fit_parts.heat_table(heats), "Temperatures part by part")
            if limits is not None:
                st.subheader("Pushing", anchor=False)
                table(fit_parts.push_table(passage.bend_deg), "Push force over several bends")
                st.caption(fit_parts.PUSHING)
        headline.caution(report)
    st.caption(f"Design {report.design_hash}, version {report.version}. A screening estimate; it certifies nothing.")
