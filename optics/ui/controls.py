"""The sidebar: the design's file, then one fold for each part in the order of the light, its state in its title."""

import streamlit as st

from optics.ui import files, parts, sketch
from optics.ui.binding import CHANGED, SOFT, is_changed
from optics.ui.names import TABLES
from optics.ui.titles import PARTS, title
from optics.ui.words import plain


def show() -> None:
    """All folds; the whole design can be read without opening one."""
    here = sketch.current()
    with st.container(gap="xsmall"):
        files.fold()
        for part in PARTS:
            changed = f" {CHANGED}" if is_changed(part) else ""
            state = title(part, here.design.document, here.design.fiberscope, here.report)
            with (
                st.expander(f"**{TABLES[part]}**{changed}  \n:small[{plain(state)}]", key=f"fold:{part}"),
                st.container(gap="small"),
            ):
                parts.show(part)
    st.caption(f"{CHANGED} changed   {SOFT} assumed or remembered. Hover a name for its meaning and source.")
