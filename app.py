"""The app's picture frame: navigation, the shared sketch, the sidebar, the page; the link last."""

import streamlit as st

from optics.ui import controls, look, sketch

st.set_page_config(
    page_title="Fiberscope sizing", page_icon=".streamlit/icon.png", layout="wide", initial_sidebar_state=340
)
look.apply()
page = st.navigation(
    [
        st.Page("optics/ui/pages/sizing.py", title="Sizing", icon=":material/straighten:", default=True),
        st.Page("optics/ui/pages/light.py", title="Light", icon=":material/flare:"),
        st.Page("optics/ui/pages/detail.py", title="Detail", icon=":material/grid_on:"),
        st.Page("optics/ui/pages/fit.py", title="Fit", icon=":material/adjust:"),
        st.Page("optics/ui/pages/pick.py", title="Pick", icon=":material/checklist:"),
        st.Page("optics/ui/pages/compare.py", title="Compare", icon=":material/compare_arrows:"),
        st.Page("optics/ui/pages/margins.py", title="Margins", icon=":material/stacked_line_chart:"),
        st.Page("optics/ui/pages/bench.py", title="Bench", icon=":material/science:"),
        st.Page("optics/ui/pages/checks.py", title="Checks", icon=":material/fact_check:"),
    ]
)
sketch.follow_link()
with st.sidebar:
    controls.show()
page.run()
sketch.write_link()
