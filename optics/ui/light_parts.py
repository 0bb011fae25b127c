"""The words, tables and controls of the page on light."""

import re

import streamlit as st

from optics import presets
from optics.fiberscope import Lamp
from optics.figures.strip_words import largest_loss
from optics.presets import Design
from optics.report.answer import Report
from optics.report.view_bend import BendTraceView
from optics.study.levers import LARGE, Lever, levers, told
from optics.tables import preset_names
from optics.ui import drawings, headline, light_words, sketch
from optics.ui.names import field_name, preset_name
from optics.ui.sketch import Sketch
from optics.ui.words import number, percent, plain, sentence_case

LAMPS = ("source.lamp.", "source.filter")  # levers that ask for other light, not for a better way
SHOWN, LESS = 6, 0.005
SEED = "light:seed"


@st.cache_data(max_entries=32, show_spinner=False)
def _levers(design_hash: str, lamp: str | None, fiber: str | None, _design: Design) -> tuple[Lever, ...]:
    return levers(_design)


def found_levers(here: Sketch) -> tuple[Lever, ...]:
    """The levers of the present design. The preset names belong to their words, and are no part of the design's hash."""
    named = [presets.value_at(here.design.document, f"{path}.preset") for path in ("source.lamp", "guide.fiber")]
    return _levers(here.report.design_hash, *named, here.design)


def answer(here: Sketch, found: tuple[Lever, ...]) -> None:
    """What arrives, what takes most, and what would give most."""
    report, lamp = here.report, here.design.fiberscope.source.lamp
    arrives, of_lamp, unit, share = _arrives(report, lamp)
    said = f"{number(arrives)} of {number(of_lamp)} {unit} leave the tip, {number(100 * share)} % of the lamp's light."
    st.header(said, anchor=False)
    st.markdown(plain(largest_loss(report)))
    own, others = (next(iter(_unbroken(each)), None) for each in _by_lamp(found))
    if own is not None:
        though = f" {sentence_case(_though(report, own))}." if _though(report, own) else ""
        st.markdown(f"**With this lamp most would come from {plain(spoken(own.words))}.**{plain(though)}")
    if others is not None and (own is None or others.gain_share > own.gain_share):
        change = others.words.rpartition(": ")[0]
        st.markdown(f"{plain(sentence_case(spoken(change)))} would give {plain(_more(others.gain_share))}.")


def _more(gain_share: float) -> str:
    """A gain as what would be given.

    >>> _more(0.87), _more(2.41)
    ('87 % more', '3.41 times the light')
    """
    return told(gain_share) if gain_share >= LARGE else f"{100 * gain_share:.0f} % more"


def _arrives(report: Report, lamp: Lamp) -> tuple[float, float, str, float]:
    """(delivered, of the lamp, their unit, share): lumens, or watts for a lamp that is stated in watts."""
    if lamp.flux_lm is None:
        return report.light.delivered_w, lamp.flux_w, "W", report.light.delivered_w / lamp.flux_w
    return report.light.delivered_lm, lamp.flux_lm, "lm", report.light.transmission


def _by_lamp(found: tuple[Lever, ...]) -> tuple[list[Lever], list[Lever]]:
    """Levers that keep the lamp, and those that ask for other light."""
    own = [lever for lever in found if not lever.path.startswith(LAMPS)]
    return own, [lever for lever in found if lever.path.startswith(LAMPS)]


def _unbroken(found: list[Lever]) -> list[Lever]:
    return [lever for lever in found if not lever.breaks]


def spoken(text: str) -> str:
    """A sentence with preset names as a person would write them."""
    names = (*preset_names("fibers"), *preset_names("lamps"))
    return re.sub(r"\b(" + "|".join(names) + r")\b", lambda found: preset_name(found[1]), text)


def metrics(report: Report, pinned: Report | None) -> None:
    """The numbers of the light; with a pinned reference, how far each has moved from it."""
    shown = [
        ("Delivered", "lm", lambda r: r.light.delivered_lm, "light that leaves the exit face"),
        ("All of it", "W", lambda r: r.light.delivered_w, "all wavelengths together"),
        ("Exit NA", "", lambda r: r.light.exit_na, "holds 95 % of the lumens"),
        ("Color", "K", lambda r: r.light.color_temperature_k, "correlated color temperature of what leaves"),
        ("Rendering", "Ra", lambda r: r.light.color_rendering_index, "color rendering index of what leaves"),
        ("On the target", "lx", lambda r: r.target and r.target.center_lux, "at the center"),
    ]
    with st.grid("auto", min_column_width=112, gap="small"):
        for name, unit, read, meaning in shown:
            value = read(report)
            if value is None:
                continue
            moved, arrow = headline.moved_by(value, read(pinned)) if pinned else (None, "off")
            said = f"Ra {number(value)}" if unit == "Ra" else f"{number(value)} {unit}".rstrip()
            st.metric(name, said, moved, delta_color="off", delta_arrow=arrow, help=f"{sentence_case(meaning)}.")


def lever_list(report: Report, found: tuple[Lever, ...]) -> None:
    """What would give more: the best of each kind, first with this lamp; each can be tried at once."""
    own, others = _by_lamp(found)
    if not found:
        st.markdown("No single change that was tried gives more light.")
    shown = [*_best(own)[:SHOWN], *others[:2]]
    for lever in shown:
        if others and lever is others[0]:
            st.caption("Or other light:")
        _lever(report, lever)
    rest = [lever for lever in found if lever not in shown]
    if rest:
        with st.expander(f"{len(rest)} more that give less"), st.container(gap="xsmall"):
            for lever in rest:
                _lever(report, lever)


def _best(found: list[Lever]) -> list[Lever]:
    """The best lever of each path, in their order."""
    first: dict[str, Lever] = {}
    for lever in found:
        first.setdefault(lever.path, lever)
    return list(first.values())


def _though(report: Report, lever: Lever) -> str:
    """What more light out of the tip does not say of the target: less at its center, or more of the field dark."""
    now, said = report.target, []
    if now is None or lever.center_lux is None:
        return ""
    if lever.center_lux < now.center_lux * (1 - LESS):
        said.append(f"{percent(lever.center_lux / now.center_lux - 1)} at the center of the target")
    if (lever.unlit_fraction or 0.0) > (now.unlit_fraction or 0.0) + LESS:
        said.append(f"{100 * lever.unlit_fraction:.0f} % of the field dark")
    return f"though then {' and '.join(said)}" if said else ""


def _lever(report: Report, lever: Lever) -> None:
    """One change in words, what it costs, and a button that makes it."""
    change, _, gain = lever.words.rpartition(": ")
    though, lost = _though(report, lever), ", ".join(field_name(name, f"needs.{name}") for name in lever.breaks)
    cost = f"  \n:gray[{plain(though)}]" if though else ""
    cost += f"  \n:orange[✗ then the {lost} is not met]" if lost else ""
    gives = f"{number(lever.delivered_lm)} lm"
    gives += f", {number(lever.center_lux)} lx at the center of the target" if lever.center_lux is not None else ""
    with st.container(horizontal=True, wrap=False, vertical_alignment="center", gap="small"):
        st.markdown(f"**{plain(gain)}** {plain(spoken(change))}{cost}", width="stretch")
        st.button(
            "Try",
            key=f"lever:{lever.words}",
            type="tertiary",
            icon=":material/play_arrow:",
            on_click=_try,
            args=(lever.settings,),
            help=f"Makes this change: {gives}. The design before it is pinned as reference, if none is.",
        )


def _try(settings: dict) -> None:
    if sketch.current().pinned is None:
        sketch.pin()
    sketch.edit(presets.edited, settings)


def trace(here: Sketch) -> None:
    """A button that traces the design's bends, and what came of it, beside the kernel."""
    if not any(bend.angle_deg > 0 for bend in here.design.fiberscope.guide.bundle.bends):
        return
    asked, seed = st.session_state.get(SEED, ("", 0))
    done = asked == here.report.design_hash
    st.button(
        "Trace again with another seed" if done else "Trace the bends ray by ray",
        key="light:trace",
        icon=":material/scatter_plot:",
        on_click=_ask_trace,
        args=(here.report.design_hash, seed + 1),
        help="Single rays through every bend, with straight runs between; some seconds.",
    )
    if not done:
        st.caption(
            "The loss above is a kernel made from such traces. For the doubter, rays can be led through these bends."
        )
        return
    with st.spinner("Tracing rays"):
        found: BendTraceView = drawings.view("trace", here, seed)
    st.markdown(f"**{light_words.trace_words(found)}**")
    st.table(
        light_words.trace_table(found), border="horizontal", hide_index=True, alt="Kernel and ray trace side by side"
    )
    st.caption(
        f"{found.rays:,} rays, seed {found.seed}, launched evenly up to the cone of the guide. "
        "The kernel is meant to lie within 0.01 of the trace, or 2 % where much is lost."
    )


def _ask_trace(design_hash: str, seed: int) -> None:
    sketch.touch()
    st.session_state[SEED] = (design_hash, seed)
