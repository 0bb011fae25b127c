"""Compare: designs side by side, why they differ, where one overtakes the other, and the tube between image and light."""

import streamlit as st

from optics.ui import compare_chosen, headline, look, sketch
from optics.ui import compare_parts as parts
from optics.ui import compare_words as words
from optics.ui.words import plain

here = sketch.current()

with st.container(horizontal=True, vertical_alignment="center", horizontal_alignment="distribute"):
    st.caption(f"**Compare** · {plain(here.report.name)}", width="content")
    headline.reference(here)
headline.alerts(here)
look.dim(here.wrong is not None)
answer = st.container(key="answer")
chosen = compare_chosen.choose(here)

if chosen.wrong:
    with answer:
        st.header("Nothing is compared yet.", anchor=False)
        st.markdown(plain(chosen.wrong))
else:
    names = list(chosen.names)
    reports, told = parts.compared(chosen.key, chosen)
    sides = words.sides(told, names)
    with answer:
        said, behind = words.headline(reports, sides, names)
        st.header(plain(said), anchor=False)
        st.markdown("  \n".join(plain(line) for line in behind if line))
    st.table(words.side_table(sides, names), border="horizontal", hide_index=True, alt="The numbers side by side")
    st.caption(plain(words.same_words(sides)))
    st.subheader(f"What makes the difference from {plain(names[0])}", anchor=False)
    for place, tab in enumerate(st.tabs([plain(name) for name in names[1:]]), start=1):
        with tab:
            rows = words.why(told, names[place])
            st.table(rows, border="horizontal", hide_index=True, alt=f"Why {names[place]} differs")
            parts.take(chosen, place, here)
    st.subheader("Where one overtakes the other", anchor=False)
    with st.spinner("Looking for crossings"):
        parts.show_crossings(chosen)

st.subheader("The sketch's tube between image and light", anchor=False)
parts.show_split(here)
st.caption(
    f"Design {here.report.design_hash}, version {here.report.version}. A screening estimate; it certifies nothing."
)
