"""Bench: readings of a lab fitted by the design's own model, what they decide, and the fit as part of the design."""

import streamlit as st

from optics.ui import bench_controls as controls
from optics.ui import bench_parts as parts
from optics.ui import bench_words as words
from optics.ui import headline, look, sketch
from optics.ui.words import plain

here = sketch.current()
design = parts.base(here)
got = parts.outcome(design)

st.caption(f"**Bench** · {plain(here.report.name)}")
headline.alerts(here)
look.dim(here.wrong is not None)
with st.container(key="answer"):
    if got.found is not None:
        mark, first, rest = words.verdict(got.found)
        st.header(f"{mark} {plain(first)}", anchor=False)
        st.markdown("  \n".join(plain(line) for line in rest))
        st.caption(plain(words.about(got.found, parts.lab().name, parts.lab().text)) + ".")
    elif got.wrong:
        st.header("○ These readings are not fitted.", anchor=False)
        st.error(plain(got.wrong), icon=":material/error:")
    else:
        st.header("Measured something else than the design says?", anchor=False)
        st.markdown(
            "Bring the readings. They are fitted by the design's own model, bends and all: what they decide, how sure, "
            "and which of them stand apart. The fit can then become part of the design."
        )
    if got.readings is not None:
        controls.outliers(got)
        controls.flat(got)

if got.found is not None:
    left, right = st.columns(2, gap="medium")
    with left:
        st.subheader("Readings and model", anchor=False)
        parts.show(design, got)
    with right:
        st.subheader("Fitted values", anchor=False)
        st.table(
            words.fitted_table(got.found), border="horizontal", hide_index=True, alt="Fitted values with intervals"
        )
        controls.take(design, got)
    with st.expander("Each reading against the fit", key="bench:each"):
        st.dataframe(words.residual_table(got.found, got.readings), hide_index=True, alt="Readings against the fit")
        controls.others_out(got)
    with st.expander("Other readings", key=f"bench:others:{parts.lab().uploads}"):
        controls.bring(open_wide=True)
        controls.explain(design)
else:
    controls.bring(open_wide=True)
    st.subheader("Three kinds of readings", anchor=False)
    controls.explain(design)
headline.caution(here.report)
st.caption(
    f"Design {here.report.design_hash}, version {here.report.version}. A screening estimate; it certifies nothing."
)
