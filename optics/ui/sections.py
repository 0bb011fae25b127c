"""What stands behind the headline, one section for each question; a section is built when it is opened."""

from collections.abc import Callable

import streamlit as st

from optics.ui import pictures, provenance, rows, view
from optics.ui.names import place, spoken
from optics.ui.sketch import Sketch
from optics.ui.words import plain, sentence_case


def _table(columns: rows.Columns, alt: str, header: bool = True) -> None:
    st.table(columns, border="horizontal", hide_index=True, hide_header=not header, alt=alt)


def light(here: Sketch) -> None:
    left, right = st.columns(2)
    with left:
        pictures.show("budget", here.design, here.report, "Light left after each step from lamp to exit face")
    with right:
        pictures.show("spectra", here.design, here.report, "Spectrum of the lamp and of the delivered light")
        _table(rows.light(here.report), "What leaves the exit face", header=False)
    _table(rows.steps(here.report), "Steps of the light with their reasons")


def target(here: Sketch) -> None:
    if here.report.target is None:
        st.markdown("This design is a bare light guide: it has no target. Add a scene in the sidebar to light one.")
        return
    left, right = st.columns(2)
    with left:
        pictures.show("map", here.design, here.report, "Map of the light on the target with the field of view")
    with right:
        pictures.show("profile", here.design, here.report, "Light along two lines through the center of the target")
        _table(rows.target(here.report), "Light on the target", header=False)


def detail(here: Sketch) -> None:
    if here.report.detail is None:
        st.markdown("This design carries no picture. Add an image part in the sidebar to ask for detail.")
        return
    st.markdown(f"**{plain(rows.limit_words(here.report))}**")
    left, right = st.columns(2)
    with left:
        pictures.show(
            "ledger", here.design, here.report, "What each part alone would allow, in line pairs per mm at the target"
        )
        _table(rows.ledger(here.report), "Ledger of detail")
    with right:
        _table(rows.detail(here.report), "Numbers of detail", header=False)


def fit(here: Sketch) -> None:
    if here.report.fit is None:
        st.markdown("This design has no body. Add one in the sidebar to ask whether it fits and passes.")
        return
    left, right = st.columns(2)
    with left:
        pictures.show("section", here.design, here.report, "Cross-section of the tube to scale")
        _table(rows.section(here.report), "What the tube holds", header=False)
    with right:
        pictures.show("passage", here.design, here.report, "The rigid tip at its tightest in the bore")
        _table(rows.passage(here.report), "What the tube passes", header=False)


def working_range(here: Sketch) -> None:
    curves = pictures.range_curves(here.report.design_hash, here.design.fiberscope)
    if curves is None:
        st.markdown("This design has no target, so no working range.")
        return
    left, right = st.columns(2)
    with left:
        pictures.show(
            "range",
            here.design,
            here.report,
            "Light and detail over the working distance, and where needs begin to fail",
        )
    with right:
        st.markdown("\n".join(f"- {line}" for line in rows.range_words(curves)))
        _table(rows.working_range(curves), "Light and detail over the working distance")


def screening(here: Sketch) -> None:
    if here.report.exposure:
        st.markdown(f"**{rows.screening_words(here.report)}**")
        _table(rows.screening(here.report), "Screening of optical radiation")
    else:
        st.markdown("No line was assessed for this design.")
    st.caption("Screening figures, to be judged by the current edition of each standard and by measurement.")


def needs(here: Sketch) -> None:
    if here.report.needs:
        _table(rows.needs(here.report), "Needs with their margins")
    else:
        st.markdown(
            "No needs are set. Set them in the last fold of the sidebar: the answer then says what is met and what is short."
        )


def sources(here: Sketch) -> None:
    st.markdown(provenance.softness(here.design.sourced))
    st.dataframe(
        provenance.table(here.design.sourced),
        height=460,
        hide_index=True,
        alt="Every value in force and its source",
        column_config={"path": st.column_config.TextColumn(pinned=True)},
    )


def caveats(here: Sketch) -> None:
    """What the reader should know about this design's numbers; the caution of the setting stands above."""
    said = [item for item in here.report.caveats if item.where != "setting"]
    st.markdown(
        "\n".join(f"- **{plain(sentence_case(place(item.where)))}**\\: {plain(spoken(item.text))}" for item in said)
        or "None."
    )


SECTIONS: dict[str, Callable[[Sketch], None]] = {
    "Light": light,
    "Target": target,
    "Detail": detail,
    "View": view.section,
    "Fit": fit,
    "Working range": working_range,
    "Screening": screening,
    "Needs": needs,
    "Sources": sources,
    "Caveats": caveats,
}
