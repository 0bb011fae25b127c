"""What can be asked of the margins: samples and seed, the tolerances, the years of use; each with its way back."""

import streamlit as st

from optics.fiberscope import Fiberscope
from optics.spec import OutOfRange
from optics.study.margins_aging import Aged
from optics.ui import margins_parts as parts
from optics.ui import margins_ranges as ranges
from optics.ui import margins_words as words
from optics.ui import sketch
from optics.ui.binding import bound_to
from optics.ui.words import plain

SAMPLES = (500, 1_000, 2_000, 5_000, 10_000)
# What aging does: name, unit, how many of that unit make the study's own, and an example (assumed, made up).
WORN = {
    "broken_fraction": ("Broken fibers", "%", 100.0, 0.10),
    "lamp_share": ("Lamp, flux left", "%", 100.0, 0.70),
    "dead_fraction": ("Dead cores", "%", 100.0, 0.02),
    "browning_db_m": ("Browning", "dB/m", 1.0, 0.2),
}


def run(found: parts.Answer) -> None:
    """Samples, seed, and the button that draws them."""
    ask = parts.asked()
    with st.container(horizontal=True, vertical_alignment="bottom", gap="small", key="margins-run"):
        key = bound_to("margins:samples", ask.samples)
        st.selectbox(
            "Samples", SAMPLES, SAMPLES.index(ask.samples), key=key, width=130, format_func=lambda count: f"{count:,}",
            on_change=_set, args=("samples", key), help="More samples, a smaller standard error, a longer wait.",
        )  # fmt: skip
        key = bound_to("margins:seed", ask.seed)
        st.number_input(
            "Seed", 0, 2**31 - 1, ask.seed, step=1, key=key, width=130, on_change=_set, args=("seed", key),
            help="Which draw it is. Another seed tells how far chance moves the answer.",
        )  # fmt: skip
        button("margins:run", found)


def button(key: str, found: parts.Answer) -> None:
    """The button to run; at rest while the answer is that of what is asked."""
    st.button(
        "Run", key=key, icon=":material/casino:", type="primary" if found.old else "secondary",
        disabled=not found.old and found.wrong is None, on_click=parts.change, args=("run", True),
        help="Draws the samples again for the design and the tolerances as they stand.",
    )  # fmt: skip


def undo() -> None:
    """What was entered for another state of the design can be taken back at once."""
    ask = parts.asked()
    if ask.given:
        _back("Set the entered tolerances back", "margins:undo", None)
    if ask.worn:
        _as_new("margins:undo:aged")


def _as_new(key: str) -> None:
    st.button(
        "All as new", key=key, type="tertiary", icon=":material/undo:", on_click=parts.change, args=("worn", {})
    )  # fmt: skip


def _set(what: str, key: str) -> None:
    if st.session_state[key] is not None:
        parts.change(what, st.session_state[key])


# Tolerances


def tolerances(found: parts.Answer) -> None:
    """The table of tolerances, and the way back of those entered."""
    here, ask = sketch.current(), parts.asked()
    st.markdown(
        "Each value is drawn between low and high, most likely at the nominal value. ≈ is only assumed or remembered: "
        "**click a low or a high to enter your own**, then run."
    )
    _refused(ask)
    key = bound_to("margins:everything", ask.everything)
    st.toggle("Also values without a stated tolerance", ask.everything, key=key, on_change=_everything, args=(key,))
    ranges.table(
        here.design, ask.given, ask.everything, f"margins:table:{ask.edition}:{ask.everything}", _entered
    )  # fmt: skip
    with st.container(horizontal=True, vertical_alignment="center"):
        button("margins:run:table", found)
        for path in ask.given:
            _back(ranges.entered_words(here.design, path), f"margins:back:{path}", path)
        if len(ask.given) > 1:
            _back("All back", "margins:back", None)


def _everything(key: str) -> None:
    sketch.touch()
    parts.asked().everything = st.session_state[key]


def _entered(path: str, low: float | None, high: float | None) -> None:
    ask = parts.asked()
    try:
        parts.change("given", ranges.entered(sketch.current().design, ask.given, path, low, high))
    except OutOfRange as wrong:
        ask.refused, ask.edition = words.said(wrong), ask.edition + 1


def _back(text: str, key: str, path: str | None) -> None:
    st.button(
        text, key=key, type="tertiary", icon=":material/undo:", on_click=_set_back, args=(path,)
    )  # fmt: skip


def _set_back(path: str | None) -> None:
    given = {} if path is None else {key: ends for key, ends in parts.asked().given.items() if key != path}
    parts.change("given", given)


def _refused(ask: parts.Asked) -> None:
    if ask.refused:
        st.error(plain(ask.refused), icon=":material/error:")


# Years of use


def years(found: parts.Answer) -> None:
    """What aging does, entered: a worn condition is then shown beside the new one."""
    ask, scope = parts.asked(), sketch.current().design.fiberscope
    st.markdown(
        "Enter what years of use do to the instrument. The tolerances are drawn on top of it, and an aged share, bar and line "
        "stand beside the new ones. What aging does is yours to say; nothing is foretold here."
    )
    _refused(ask)
    with st.grid("auto", min_column_width=150):
        for name in _fitting(scope):
            said, unit, times, _ = WORN[name]
            value = None if name not in ask.worn else round(ask.worn[name] * times, 9)
            key = bound_to(f"margins:aged:{name}", value)
            st.number_input(
                f"{said}, {unit}", value=value, step=1.0 if times > 1 else 0.1, format="%g", key=key, placeholder="as new",
                on_change=_aged, args=(name, key),
            )  # fmt: skip
    with st.container(horizontal=True, vertical_alignment="center"):
        button("margins:run:aged", found)
        if ask.worn:
            _as_new("margins:aged:back")
        else:
            st.button(
                "Fill in an example, made up", key="margins:aged:example", type="tertiary", icon=":material/edit_note:",
                on_click=parts.change, args=("worn", {name: WORN[name][3] for name in _fitting(scope)}),
            )  # fmt: skip


def _fitting(scope: Fiberscope) -> list[str]:
    """What can age in a design: cores only where there is an image bundle."""
    cores = scope.image is not None and scope.image.form == "bundle"
    return [name for name in WORN if cores or name != "dead_fraction"]


def _aged(name: str, key: str) -> None:
    ask, value = parts.asked(), st.session_state[key]
    worn = {other: kept for other, kept in ask.worn.items() if other != name}
    if value is not None:
        worn[name] = value / WORN[name][2]
    try:
        Aged(**worn)
    except OutOfRange as wrong:
        sketch.touch()
        ask.refused = words.said(wrong)
        return
    parts.change("worn", worn)
