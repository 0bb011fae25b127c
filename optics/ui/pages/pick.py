"""Pick: which combination of parts does the job? The best of them, those that nearly do, and what to relax."""

import streamlit as st

from optics.report.verdict import sentence
from optics.ui import headline, look, pick_tried, sketch
from optics.ui import pick_parts as parts
from optics.ui import pick_search as search
from optics.ui import pick_words as words
from optics.ui.words import plain

here = sketch.current()

with st.container(horizontal=True, vertical_alignment="center", horizontal_alignment="distribute"):
    st.caption(f"**Pick** · {plain(here.report.name)}", width="content")
    headline.reference(here)
headline.alerts(here)
look.dim(here.wrong is not None)
answer = st.container(key="answer")
with answer:
    found = search.answer(here)
one, tried = found.searched, search.tried(search.key_of(here.design, here), here.design)

with answer:
    if one is None:
        st.header("Which combination of parts does this job?", anchor=False)
        st.markdown(plain(pick_tried.search_words(tried)))
    else:
        mark, said = words.headline(one.found)
        st.header(f"{mark} {plain(said)}", anchor=False)
        if one.found.picks:
            st.markdown(f"{words.plainest(one.found.picks[0], one.made[0])} {plain(words.stands(here.report))}")
        else:
            parts.relax(one)
    st.markdown(words.asked(here.design.fiberscope))
    if one is None:
        st.markdown(f"**As it stands\\:** {plain(sentence(here.report))}")
    parts.search(found)

if one is None:
    st.subheader("What is tried", anchor=False)
    st.table(pick_tried.tried_table(tried), border="horizontal", hide_index=True, alt="The choices of a search")
else:
    if one.found.picks:
        left, right = st.columns([3, 2], gap="medium")
        with left:
            parts.show_front(one, here)
        with right:
            st.subheader("Best in something", anchor=False)
            parts.best(one)
        st.subheader("All that no other beats in everything", anchor=False)
        parts.table(one, here)
    if one.found.failing:
        left, right = st.columns(2, gap="medium")
        with left:
            st.subheader("Nearly", anchor=False)
            parts.nearly(one)
        with right:
            st.subheader("What fails first, in the order of the light", anchor=False)
            parts.show_failing(one)
    with st.expander("What was tried", key="pick:tried"):
        st.table(pick_tried.tried_table(tried), border="horizontal", hide_index=True, alt="The choices of a search")
st.caption(
    f"Design {here.report.design_hash}, version {here.report.version}. A screening estimate; it certifies nothing."
)
