"""What can be done at the bench: bring readings, leave some out, take the fit into the design."""

import json

import streamlit as st

from optics.presets import Design
from optics.ui import bench_parts as parts
from optics.ui import bench_readings as kinds
from optics.ui import bench_words as words
from optics.ui import sketch
from optics.ui.binding import bound_to
from optics.ui.words import plain

SHOWN = 3  # readings of an example


def bring(open_wide: bool) -> None:
    """A file, or a table typed or pasted."""
    asked = parts.lab()
    left, right = st.columns(2, gap="medium") if open_wide else (st.container(), st.container())
    with left:
        key = f"bench:file:{asked.uploads}"
        st.file_uploader(
            "Upload readings, CSV", type=["csv", "txt", "tsv"], key=key, on_change=parts.take_upload, args=(key,)
        )
    with right:
        key = bound_to("bench:text", asked.text)
        st.text_area(
            "Or type or paste them here",
            asked.text,
            key=key,
            height=160,
            placeholder="length_m,power_mw\n3,250\n2,281\n1,314",
            on_change=parts.take_typed,
            args=(key,),
            help="The first line names the columns, units in the names; commas, semicolons or tabs; a point for decimals.",
        )


def explain(design: Design) -> None:
    """The three kinds of readings, each with invented ones to try and to take away."""
    with st.grid("auto", min_column_width=270, gap="medium"):
        for varied, kind in kinds.KINDS.items():
            with st.container():
                _kind(design, varied, kind)


def _kind(design: Design, varied: str, kind: kinds.Kind) -> None:
    st.markdown(f"**{kind.title}**  \n{plain(kind.task)}  \n*{plain(kind.tells)}*")
    made_up = kinds.made_up(design, varied)
    if made_up is None:
        st.caption(
            "This design has no target." if varied == "distance_mm" else "No example can be made for this design."
        )
        return
    st.table(
        kinds.as_table(made_up, SHOWN),
        border="horizontal",
        hide_index=True,
        alt=f"First rows of an example: {kind.title}",
    )
    if varied == "bend_radius_mm":
        st.caption(plain(kinds.begins_words(design)))
    st.caption(f"Invented. The file has {plain(kinds.error_name(varied))} too; it may be left out.")
    text = kinds.as_text(made_up, kinds.truth(varied))
    with st.container(horizontal=True, gap="small"):
        st.button(
            "Try it",
            key=f"bench:try:{varied}",
            icon=":material/play_arrow:",
            on_click=parts.take_readings,
            args=(text, f"invented_{varied}.csv"),
        )
        st.download_button(
            "Example, CSV",
            text,
            f"invented_{varied}.csv",
            "text/csv",
            key=f"bench:example:{varied}",
            type="tertiary",
            icon=":material/download:",
            on_click="ignore",
        )


# The fit


def flat(got: parts.Outcome) -> None:
    """For cut-backs: one loss at all wavelengths in place of the fiber's own curve."""
    if got.readings is not None and got.readings.varied == "length_m":
        key = bound_to("bench:flat", parts.lab().flat)
        st.toggle(
            "One loss at all wavelengths",
            parts.lab().flat,
            key=key,
            on_change=_flat,
            args=(key,),
            help="In place of a factor on the fiber's own curve: for a power meter behind a narrow filter.",
        )


def _flat(key: str) -> None:
    sketch.touch()
    parts.lab().flat = st.session_state[key]


def outliers(got: parts.Outcome) -> None:
    """Readings that stand apart, each with a checkbox to leave it out; those left out can come back."""
    asked = parts.lab()
    apart = {item.row for item in got.found.residuals if item.apart} if got.found else set()
    for row in sorted(apart | set(asked.left_out)):
        key = bound_to(f"bench:leave:{row}", row in asked.left_out)
        st.checkbox(
            plain(words.apart(row, got.readings)), row in asked.left_out, key=key, on_change=_leave, args=(row, key)
        )


def _leave(row: int, key: str) -> None:
    rest = set(parts.lab().left_out) - {row}
    parts.leave_out(tuple(rest | {row}) if st.session_state[key] else tuple(rest))


def others_out(got: parts.Outcome) -> None:
    """Any reading can be left out."""
    key = bound_to("bench:left_out", list(parts.lab().left_out))
    st.multiselect(
        "Leave out rows",
        [int(row) for row in got.readings.row],
        list(parts.lab().left_out),
        key=key,
        placeholder="none",
        on_change=lambda: parts.leave_out(tuple(st.session_state[key])),
    )


def take(design: Design, got: parts.Outcome) -> None:
    """The fit into the design, out again, and as files."""
    asked, found = parts.lab(), got.found
    stands = parts.is_taken(found)
    if asked.taken is not None:
        here = sketch.current().document
        st.markdown(f"✓ **In the design\\:** {plain(words.taken(here, asked.taken.settings))}.")
    with st.container(horizontal=True, gap="small"):
        if not stands:
            st.button(
                "Take the fit into the design" if asked.taken is None else "Take this fit instead",
                key="bench:take",
                type="primary" if found.decided else "secondary",
                icon=":material/input:",
                on_click=parts.take_fit,
                args=(design, found),
            )
        if asked.taken is not None:
            st.button("Take it out again", key="bench:out", icon=":material/undo:", on_click=parts.take_out)
    with st.container(horizontal=True, gap="small"):
        stem = "_".join(design.fiberscope.name.lower().replace(",", "").split()) or "design"
        for text, make, name, kind in (
            ("Fitted design", lambda: parts.fitted_file(found), f"{stem}_fitted.toml", "application/toml"),
            (
                "Fit, JSON",
                lambda: json.dumps(found.as_dict(), indent=2, allow_nan=False),
                f"{stem}_fit.json",
                "application/json",
            ),
        ):
            st.download_button(
                text,
                make,
                name,
                kind,
                key=f"bench:{name.rpartition('.')[2]}",
                type="tertiary",
                icon=":material/download:",
                on_click="ignore",
            )
