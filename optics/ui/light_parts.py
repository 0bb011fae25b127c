"""The words, tables and controls of the page on light."""

import re

import streamlit as st

from optics import presets
from optics.figures.guide import decibels
from optics.figures.strip_words import largest_loss
from optics.guide.fiber import half_angle_deg
from optics.presets import Design
from optics.report.answer import Report
from optics.report.view_guide import BendTraceView, BendView, ColorView, ConeView
from optics.study.levers import Lever, levers
from optics.tables import preset_names
from optics.ui import drawings, headline, sketch
from optics.ui.names import field_name, preset_name
from optics.ui.rows import Columns, columns
from optics.ui.sketch import Sketch
from optics.ui.words import number, plain, sentence_case

LAMPS = ("source.lamp.", "source.filter")  # levers that ask for other light, not for a better way
SHOWN, KERNEL_SHARE = 6, 0.01
SEED = "light:seed"


@st.cache_data(max_entries=32, show_spinner=False)
def _levers(design_hash: str, lamp: str | None, fiber: str | None, _design: Design) -> tuple[Lever, ...]:
    return levers(_design)


def found_levers(here: Sketch) -> tuple[Lever, ...]:
    """The levers of the present design. The preset names belong to their words, and are no part of the design's hash."""
    named = [presets.value_at(here.design.document, f"{path}.preset") for path in ("source.lamp", "guide.fiber")]
    return _levers(here.report.design_hash, *named, here.design)


def answer(report: Report, found: tuple[Lever, ...]) -> None:
    """What arrives, what takes most, and what would give most."""
    light, lamp = report.light, report.light.steps[0].after_lm
    seen = light.delivered_lm > 0 and lamp > 0
    first = (
        f"{number(light.delivered_lm)} of {number(lamp)} lm leave the tip"
        if seen
        else f"{number(light.delivered_w)} W leave the tip"
    )
    st.header(f"{first}, {number(100 * light.transmission)} % of the lamp's light.", anchor=False)
    st.markdown(plain(largest_loss(report)))
    kept = [lever for lever in found if not lever.path.startswith(LAMPS) and not lever.breaks]
    if kept:
        st.markdown(f"**Most would come from {plain(spoken(kept[0].words))}.**")


def spoken(text: str) -> str:
    """A sentence with preset names as a person would write them."""
    names = (*preset_names("fibers"), *preset_names("lamps"))
    return re.sub(r"\b(" + "|".join(names) + r")\b", lambda found: preset_name(found[1]), text)


def metrics(report: Report, pinned: Report | None) -> None:
    """The numbers of the light; with a pinned reference, how far each has moved from it."""
    shown = [
        ("Delivered", "lm", lambda r: r.light.delivered_lm, "light that leaves the exit face"),
        ("Of the lamp", "%", lambda r: 100 * r.light.transmission, "share of the lamp's light"),
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


def lever_list(found: tuple[Lever, ...]) -> None:
    """What would give more: the best of each kind, first with this lamp; each can be tried at once."""
    own = [lever for lever in found if not lever.path.startswith(LAMPS)]
    others = [lever for lever in found if lever.path.startswith(LAMPS)]
    if not found:
        st.markdown("No single change that was tried gives more light.")
    for lever in _best(own)[:SHOWN]:
        _lever(lever)
    if others:
        st.caption("Or other light:")
        for lever in others[:2]:
            _lever(lever)
    rest = [lever for lever in found if lever not in (*_best(own)[:SHOWN], *others[:2])]
    if rest:
        with st.expander(f"{len(rest)} more that give less"):
            for lever in rest:
                _lever(lever)


def _best(found: list[Lever]) -> list[Lever]:
    """The best lever of each path, in their order."""
    first: dict[str, Lever] = {}
    for lever in found:
        first.setdefault(lever.path, lever)
    return list(first.values())


def _lever(lever: Lever) -> None:
    change, _, gain = lever.words.rpartition(": ")
    lost = ", ".join(field_name(name, f"needs.{name}") for name in lever.breaks)
    cost = f"  \n:orange[✗ then the {lost} is not met]" if lost else ""
    with st.container(horizontal=True, vertical_alignment="center", gap="small"):
        st.markdown(f"**{plain(gain)}** {plain(spoken(change))}{cost}", width="stretch")
        st.button(
            "Try",
            key=f"lever:{lever.words}",
            type="tertiary",
            icon=":material/play_arrow:",
            on_click=_try,
            args=(lever.settings,),
            help="Makes this change. The design before it is pinned as reference, if none is.",
        )


def _try(settings: dict) -> None:
    if sketch.current().pinned is None:
        sketch.pin()
    sketch.edit(presets.edited, settings)


def cone_words(view: ConeView) -> str:
    """The cone in and out."""
    launch = f"The launch fills NA {number(view.launch_na)}, the fiber takes {number(view.fiber_na)}"
    wasted = view.launch_na > view.fiber_na * (1 + 1e-9)
    launch += ": what is steeper is lost. " if wasted else ". "
    angle = ""
    if view.exit_na < view.outside_index:
        angle = f", {number(float(half_angle_deg(na=view.exit_na, outside_index=view.outside_index)))}° to each side"
    return f"{launch}95 % of the light leaves within NA {number(view.exit_na)}{angle}."


def color_table(view: ColorView) -> Columns:
    """Color of lamp and delivered light, and how far the way shifts it."""
    rows = [
        ("color temperature, K", "color_temperature_k", 0),
        ("Duv", "duv_ratio", 4),
        ("rendering index Ra", "color_rendering_index", 1),
        ("x", "x_ratio", 4),
        ("y", "y_ratio", 4),
    ]
    return columns(("", "lamp", "delivered", "shift"), [_shift(view, *row) for row in rows])


def _shift(view: ColorView, name: str, key: str, places: int) -> tuple[str, ...]:
    before, after = getattr(view.lamp, key), getattr(view.delivered, key)
    shown = [f"{value:,.{places}f}" for value in (before, after)] + [f"{after - before:+,.{places}f}"]
    return (name, *(text.replace("-", "−") for text in shown))


def color_words(view: ColorView) -> str:
    """What the guide does to the color, in a sentence."""
    warmer = view.delivered.color_temperature_k < view.lamp.color_temperature_k
    tint = view.delivered.duv_ratio - view.lamp.duv_ratio
    lean = "" if abs(tint) < 1e-3 else " and greener" if tint > 0 else " and pinker"
    change = abs(view.delivered.color_temperature_k - view.lamp.color_temperature_k)
    if change < 0.005 * view.lamp.color_temperature_k and not lean:
        return "The way leaves the color of the light as it is."
    return f"On its way the light turns {number(change, 2)} K {'warmer' if warmer else 'cooler'}{lean}."


def bend_words(view: BendView) -> str:
    """What bends take, and whether the fiber lasts in them."""
    if not view.own:
        return "The design has no bend. The curve shows what one quarter turn would take."
    least = number(view.breaking_radius_mm)
    sharp = [bend for bend in view.own if bend.radius_mm < view.breaking_radius_mm]
    said = f"All bends together take {decibels(view.total_db)} of the light."
    if sharp:
        tightest = number(min(bend.radius_mm for bend in sharp))
        return f"{said} ✗ At {tightest} mm the fiber is strained beyond what it is trusted with; {least} mm would do."
    return f"{said} Each stays above {least} mm, below which the fiber is strained too far."


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
    st.markdown(f"**{trace_words(found)}**")
    st.table(trace_table(found), border="horizontal", hide_index=True, alt="Kernel and ray trace side by side")
    st.caption(
        f"{found.rays:,} rays, seed {found.seed}, launched evenly up to the cone of the guide. "
        "The kernel is meant to lie within 0.01 of the trace, or 2 % where much is lost."
    )


def _ask_trace(design_hash: str, seed: int) -> None:
    sketch.touch()
    st.session_state[SEED] = (design_hash, seed)


def trace_words(view: BendTraceView) -> str:
    """Whether kernel and rays agree, judged by the last bend."""
    last = view.bends[-1]
    apart = abs(last.kernel_share - last.traced_share)
    within = apart <= KERNEL_SHARE + 3 * last.standard_error
    return (
        f"{'✓' if within else '✗'} Behind {len(view.bends)} bend{'s' if len(view.bends) > 1 else ''} the kernel leaves "
        f"{last.kernel_share:.4f} of the light, the rays {last.traced_share:.4f} ± {last.standard_error:.4f}."
    )


def trace_table(view: BendTraceView) -> Columns:
    rows = [
        (
            f"{place}: {number(bend.angle_deg)}° at {number(bend.radius_mm)} mm",
            f"{bend.kernel_share:.4f}",
            f"{bend.traced_share:.4f} ± {bend.standard_error:.4f}",
            f"{bend.kernel_na:.3f}",
            f"{bend.traced_na:.3f}",
        )
        for place, bend in enumerate(view.bends, 1)
    ]
    return columns(("behind bend", "kernel", "rays", "95 % NA, kernel", "rays’ 95 % NA"), rows)
