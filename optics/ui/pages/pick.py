"""Pick: which combination of parts does the job? The best of them, those that nearly do, and what to relax."""

import streamlit as st

from optics.ui import headline, look, sketch
from optics.ui import pick_parts as parts
from optics.ui import pick_words as words
from optics.ui.words import plain

here = sketch.current()

with st.container(horizontal=True, vertical_alignment="center", horizontal_alignment="distribute"):
    st.caption(f"**Pick** · {plain(here.report.name)}", width="content")
    headline.reference(here)
headline.alerts(here)
look.dim(here.wrong is not None)
first = st.container(key="answer")
st.markdown(words.asked(here.design.fiberscope))
controls = st.container()
with first:
    found = parts.answer(here)
one = found.searched

with first:
    if one is None:
        st.header("Which bundle does this job?", anchor=False)
        st.markdown(
            f"A search puts together {words.tried(parts.sizes(parts.key_of(here.design, here), here.design))}, sends each "
            "combination through the whole chain, and keeps those that no other beats in everything. The job stays as the "
            "sketch has it\\: target, distance, length, bore and needs."
        )
        headline.banner(here.report)
    else:
        mark, said = words.headline(one.found)
        st.header(f"{mark} {plain(said)}", anchor=False)
        if one.found.picks:
            st.markdown(words.plainest(one.found.picks[0], one.made[0]))
            parts.take_button("Take the plainest", "pick:plainest", one, one.found.picks[0].set)
        else:
            parts.relax(one)
with controls:
    parts.state(found)
    parts.search(found)
    if one is not None:
        st.caption(words.how(one.found, one.seconds))

if one is not None:
    if one.found.picks:
        parts.show_front(one, here)
        st.subheader("What no other beats in everything", anchor=False)
        parts.table(one, here)
    left, right = st.columns(2, gap="medium")
    with left:
        parts.nearly(one)
    with right:
        parts.show_failing(one)
st.caption(
    f"Design {here.report.design_hash}, version {here.report.version}. A screening estimate; it certifies nothing."
)
