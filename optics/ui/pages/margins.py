"""Margins: will all of them meet it? How often, what is missed, what decides, and what to tighten."""

import streamlit as st

from optics.ui import headline, look, margins_controls, margins_rests, sketch
from optics.ui import margins_parts as parts
from optics.ui import margins_words as words
from optics.ui.words import plain

here = sketch.current()

st.caption(f"**Margins** · {plain(here.report.name)}")
headline.alerts(here)
first = st.container(key="answer")
controls, pictures = st.container(), st.container(key="answer-pictures")
with first:
    found = parts.answer()
one = found.studied
look.dim(here.wrong is not None or found.old)

with first:
    if one is not None:
        mark, said = words.headline(one.found)
        st.header(f"{mark} {plain(said)}", anchor=False)
        st.markdown("  \n".join(words.sentences(one.found)))
with controls:
    if found.wrong:
        st.error(plain(found.wrong), icon=":material/error:")
        margins_controls.undo()
    margins_controls.run(found)
    if one is not None:
        st.caption(margins_rests.run_words(one.found, found.old))

if one is not None:
    with pictures:
        left, right = st.columns(2, gap="medium")
        if one.found.new.needs:
            with left:
                st.subheader("How often each need is met", anchor=False)
                parts.show_odds(one)
        with right if one.found.new.needs else left:
            parts.causes(one)

tabs = st.tabs(["Spread", "Tolerances", "Years of use", "What it rests on"], key="margins:tab", on_change=sketch.touch)
with tabs[0]:
    if tabs[0].open and one is not None:
        parts.spreads(one)
with tabs[1]:
    if tabs[1].open:
        margins_controls.tolerances(found)
with tabs[2]:
    if tabs[2].open:
        margins_controls.years(found)
with tabs[3]:
    if tabs[3].open and one is not None:
        st.markdown("\n".join(f"- {line}" for line in margins_rests.rests(one.found, one.design)))
if one is not None:
    parts.files(one)
st.caption(
    f"Design {here.report.design_hash}, version {here.report.version}. A screening estimate; it certifies nothing."
)
