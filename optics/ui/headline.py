"""The answer first: one sentence, the needs in words with a mark that works in grey, and the headline numbers."""

import re
from collections.abc import Callable
from dataclasses import dataclass

import streamlit as st

from optics.needs import AT_MOST, NeedLine
from optics.report.answer import Report
from optics.report.reasons import limit_reason
from optics.report.verdict import sentence
from optics.ui import edits, sketch
from optics.ui.names import field_name, spoken
from optics.ui.words import number, percent, plain, sentence_case, unit

TOO_BRIGHT = "radiance is conserved"  # in the refusal of a spot or a rating that its lamp cannot give
MET, SHORT, OPEN = "✓", "✗", "○"


@dataclass(frozen=True, slots=True)
class Headline:
    """One headline number: its name and unit, where it stands in a report, and what it means."""

    name: str
    unit: str
    read: Callable[[Report], float | None]
    meaning: str
    shown: Callable[[Report], bool]


def _summary(key: str) -> Callable[[Report], float | None]:
    return lambda report: getattr(report.summary, key)


HEADLINES = (
    Headline(
        "Light at center",
        "lx",
        _summary("target_center_lux"),
        "illuminance where the axis meets the target",
        lambda r: r.target is not None,
    ),
    Headline(
        "Smallest gap",
        "mm",
        _summary("smallest_gap_mm"),
        "half a line pair at the target, in the worst direction",
        lambda r: r.detail is not None,
    ),
    Headline(
        "Thinnest line",
        "mm",
        _summary("smallest_line_mm"),
        "a single dark line that can still be seen",
        lambda r: r.detail is not None,
    ),
    Headline(
        "Evenness",
        "",
        _summary("evenness"),
        "least over mean illuminance in the field of view",
        lambda r: r.summary.evenness is not None,
    ),
    Headline(
        "Outer diameter", "mm", _summary("outer_diameter_mm"), "of the insertion tube", lambda r: r.fit is not None
    ),
    Headline("Delivered", "lm", lambda r: r.light.delivered_lm, "light that leaves the exit face", lambda r: True),
    Headline(
        "Guide passes",
        "",
        lambda r: r.light.transmission,
        "delivered over the lamp's light",
        lambda r: r.target is None,
    ),
    Headline("Exit NA", "", lambda r: r.light.exit_na, "holds 95 % of the lumens", lambda r: r.target is None),
)


def banner(report: Report) -> None:
    """The verdict; what it says first stands largest."""
    first, rest = _parted(sentence(report))
    mark = {True: MET, False: SHORT, None: OPEN}[report.summary.needs_met]
    st.header(f"{mark} {plain(first)}.", anchor=False)
    if rest:
        st.markdown(plain(rest))


def _parted(said: str) -> tuple[str, str]:
    """The first clause of an answer, and the rest as sentences of its own.

    >>> _parted("Meets all 7 needs; the closest is the rigid tip: 12 mm. More."), _parted("Delivers 0.119 lm.")
    (('Meets all 7 needs', 'The closest is the rigid tip: 12 mm. More.'), ('Delivers 0.119 lm', ''))
    """
    found = re.match(r"(.+?)(?:[.;] |\.?$)(.*)", said)
    return found[1], sentence_case(found[2])


def needs(report: Report) -> None:
    """Each need as one mark with its words; those that are short first."""
    said = [_need(line) for line in sorted(report.needs, key=lambda line: line.met)]
    if said:
        st.markdown(" ".join(said))


def _need(line: NeedLine) -> str:
    sign = unit(line.name)
    wanted = f"{'at most' if line.name in AT_MOST else 'at least'} {number(line.wanted, 4)}"
    got = "nothing" if line.got is None else f"{number(line.got)}{'' if sign == '°' else ' '}{sign}".rstrip()
    text = f"{MET if line.met else SHORT} {field_name(line.name, f'needs.{line.name}')} {got}, {wanted}"
    return f":gray-badge[{text}]" if line.met else f":orange-badge[**{text}**]"


def metrics(report: Report, pinned: Report | None) -> None:
    """The headline numbers; with a pinned reference, how far each has moved from it."""
    with st.grid("auto", min_column_width=112, gap="small"):
        for item in HEADLINES:
            if item.shown(report):
                _metric(item, item.read(report), item.read(pinned) if pinned else None, pinned is not None)
        if report.detail is not None:
            _limited(report.summary.limited_by, pinned.summary.limited_by if pinned else None, pinned is not None)


def _metric(item: Headline, value: float | None, before: float | None, compared: bool) -> None:
    shown = "none" if value is None else f"{number(value)} {item.unit}".rstrip()
    full = "nothing is resolved" if value is None else f"{value:.6g} {item.unit}".rstrip()
    moved, arrow = moved_by(value, before) if compared else (None, "off")
    st.metric(
        item.name,
        shown,
        moved,
        delta_color="off",
        delta_arrow=arrow,
        help=f"{sentence_case(item.meaning)}. In full\\: {full}.",
    )


def _limited(part: str | None, before: str | None, compared: bool) -> None:
    moved = None if not compared else "as pinned" if part == before else f"was {before or 'nothing'}"
    st.metric(
        "Limited by",
        part or "nothing",
        moved,
        delta_color="off",
        delta_arrow="off",
        help=f"{sentence_case(limit_reason(part))}.",
    )


def moved_by(value: float | None, before: float | None) -> tuple[str, str]:
    """The change from a reference in words, and the arrow that goes with it.

    >>> moved_by(1.2, 1.0), moved_by(1.0, 1.0), moved_by(None, 1.0), moved_by(12.0, 1.0)
    (('+20 %', 'up'), ('as pinned', 'off'), ('was 1', 'off'), ('×12', 'up'))
    """
    if value is None or before is None or before == 0:
        return (
            ("as pinned", "off") if value == before else (f"was {'none' if before is None else number(before)}", "off")
        )
    ratio = value / before
    if abs(ratio - 1) < 5e-4:
        return "as pinned", "off"
    arrow = "up" if ratio > 1 else "down"
    if ratio >= 3:
        return f"×{ratio:.3g}", arrow
    return percent(ratio - 1, 1 if abs(ratio - 1) < 0.1 else 0), arrow


def reference(here: sketch.Sketch) -> None:
    """Pin the present design, or say what is pinned and let go of it."""
    with st.container(horizontal=True, vertical_alignment="center", gap="small", width="content", key="reference"):
        if here.pinned is None:
            st.button(
                "Pin as reference",
                key="pin",
                type="tertiary",
                icon=":material/keep:",
                on_click=sketch.pin,
                help="Keeps this answer; the headline numbers then show what your changes do to it.",
            )
            return
        st.caption(f"Compared with the pinned {plain(here.pinned.report.name)} ({here.pinned.report.design_hash})")
        st.button("Pin this instead", key="pin", type="tertiary", icon=":material/keep:", on_click=sketch.pin)
        st.button(
            "Back to it",
            key="pin:back",
            type="tertiary",
            icon=":material/undo:",
            on_click=sketch.change,
            args=(here.pinned.document,),
        )
        st.button("Let go", key="pin:off", type="tertiary", icon=":material/keep_off:", on_click=sketch.unpin)


def alerts(here: sketch.Sketch) -> None:
    """What was refused, in one sentence; and that the answer below is the one before."""
    if here.notice:
        st.warning(plain(here.notice), icon=":material/info:")
    if here.wrong:
        st.error(
            f"{plain(spoken(here.wrong))}  \nBelow stands the last good answer, from before this change.",
            icon=":material/error:",
        )
        with st.container(horizontal=True):
            st.button(
                "Take the change back",
                key="wrong:back",
                type="tertiary",
                icon=":material/undo:",
                on_click=sketch.take_back,
            )
            if TOO_BRIGHT in here.wrong:
                st.button(
                    "Match the launch to the lamp instead",
                    key="wrong:match",
                    type="tertiary",
                    icon=":material/join_inner:",
                    on_click=sketch.edit,
                    args=(edits.with_form, "source.launch", "matched"),
                )


def caution(report: Report) -> None:
    """The caution of the setting, in sight beside the light."""
    for item in report.caveats:
        if item.where == "setting":
            with st.container(border=True):
                st.markdown(f"**⚠ {sentence_case(report.setting)} use.** {plain(item.text)}")
