"""Checks: every published value against the formula that must give it."""

import streamlit as st

from optics.ui import checked

st.caption("**Fiberscope sizing** · checks")
st.header("Published values against the formulas behind the answer", anchor=False)
found = checked.everything()
st.markdown(f"**{checked.summary(found)}**")
only = st.toggle("Only those that differ", key="checks:only")
st.dataframe(
    checked.table(found, only),
    height=620,
    hide_index=True,
    alt="Published values and what the formulas give",
    column_config={"quantity": st.column_config.TextColumn(pinned=True)},
)
st.caption(
    "Half a unit of the last printed digit is allowed, unless a row states another tolerance and why. "
    "Rows from memory are counted apart."
)
