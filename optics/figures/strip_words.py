"""What the light strip says: the legs of the way with what each takes, the stations with what matters there."""

import math
from dataclasses import dataclass

from optics.figures.canvas import lost, seconds, three
from optics.needs import NeedLine
from optics.report.answer import Report
from optics.report.reasons import limit_reason

# Long names in two lines, broken where people would break them.
SPLIT = {
    "attenuation": "attenu-\nation",
    "condenser": "con-\ndenser",
    "input face": "input\nface",
    "exit face": "exit\nface",
    "core share": "core\nshare",
    "broken fibers": "broken\nfibers",
    "cable packing": "cable\npacking",
    "cable core share": "cable\ncores",
    "cable attenuation": "cable\nlength",
    "cable exit face": "cable\nend",
    "guide input face": "guide\nface",
    "crosstalk": "cross-\ntalk",
    "objective": "objec-\ntive",
}


DIM_LM_W = 10.0  # below, a lamp is judged by its watts


@dataclass(frozen=True, slots=True)
class Leg:
    """One narrowing of the ribbon: `left` is the share that remains after it, of the start of its ribbon."""

    name: str
    factor: float
    left: float
    loss: str
    note: str = ""
    marked: bool = False

    @property
    def split(self) -> str:
        return SPLIT.get(self.name, self.name.replace(" ", "\n", 1))

    @property
    def limit(self) -> str:
        """What the part alone allows, lp/mm; empty on the way there."""
        return (
            "no\nlimit"
            if self.note == "no limit"
            else self.note.removesuffix(" lp/mm")
            if self.note.endswith(" lp/mm")
            else ""
        )


@dataclass(frozen=True, slots=True)
class Station:
    """A place on the way: a heading, its one number, lines of what else matters; lines may carry met or not met."""

    heading: str
    number: str
    lines: tuple[tuple[str, bool | None], ...]


def outward(report: Report) -> list[Leg]:
    """The steps after the lamp; the one that loses most is marked."""
    steps, lamp = report.light.steps[1:], report.light.steps[0].after_lm
    worst = min((step.factor for step in steps), default=1.0)
    return [
        Leg(
            step.name,
            step.factor,
            step.after_lm / lamp if lamp > 0 else 0.0,
            lost(step.factor),
            step.because,
            step.factor == worst < 0.999,
        )
        for step in steps
    ]


def backward(report: Report) -> list[Leg]:
    """The parts of the way back in the order in which the picture meets them; the one that limits is marked."""
    if report.detail is None:
        return []
    legs, left, seen = [], 1.0, bool(report.summary.resolved_lp_mm)
    for line in sorted(report.detail.ledger, key=lambda line: line.name == "light"):
        left *= line.contrast
        note = "no limit" if line.limit_lp_mm is None else f"{three(line.limit_lp_mm)} lp/mm"
        shown = (
            "–"
            if not seen
            else "1"
            if line.contrast >= 0.995
            else f"×{line.contrast:.2f}"
            if line.contrast >= 0.01
            else f"×{line.contrast:.1g}"
        )
        legs.append(Leg(line.name, line.contrast, left, shown, note, line.name == report.summary.limited_by))
    return legs


def back_title(report: Report) -> str:
    """What the thickness of the way back is."""
    return "contrast left" if report.summary.resolved_lp_mm else "nothing resolved"


def lamp_station(report: Report) -> Station:
    watts = report.light.steps[0].because.rsplit(", ", 1)[-1]
    return Station("lamp", f"{three(report.light.steps[0].after_lm)} lm", ((watts, None),))


def exit_station(report: Report) -> Station:
    light = report.light
    visible = light.delivered_lm > DIM_LM_W * light.delivered_w
    color = (
        f"{three(light.color_temperature_k)} K, Ra {light.color_rendering_index:.0f}"
        if visible
        else "hardly any visible light"
    )
    share = f"{three(light.delivered_w)} W, {three(light.transmission * 100)} % of the lamp"
    lines = [(share, None), (f"95 % within NA {light.exit_na:.3f}", None), (color, None)]
    return Station(
        "out of the tip" if report.target else "out of the guide", f"{three(light.delivered_lm)} lm", tuple(lines)
    )


def target_station(report: Report) -> Station | None:
    target = report.target
    if target is None:
        return None
    lines: list[tuple[str, bool | None]] = []
    if target.mean_lux is not None:
        lines.append((f"{three(target.mean_lux)} mean, {three(target.min_lux)} least", None))
    if target.field_radius_mm is not None:
        lines.append((f"over a field of ⌀ {three(2 * target.field_radius_mm)} mm", None))
    lines += _needs(report, ("target_center_lux", "target_min_lux", "evenness"))
    return Station("on the target", f"{three(target.center_lux)} lx", tuple(lines))


def viewer_station(report: Report) -> Station | None:
    detail, summary = report.detail, report.summary
    if detail is None:
        return None
    who = "to the eye" if any(line.name == "eye" for line in detail.ledger) else "to the camera"
    if summary.smallest_gap_mm is None:
        return Station(who, "no detail", tuple(_needs(report, ("smallest_gap_mm", "frame_hz"))))
    lines: list[tuple[str, bool | None]] = [(f"gap seen, {three(summary.resolved_lp_mm)} lp/mm", None)]
    if detail.snr is not None:
        lines.append((f"SNR {three(detail.snr)} in {seconds(detail.exposure_s)}", None))
    lines += _needs(report, ("smallest_gap_mm", "frame_hz"))
    return Station(who, f"{three(summary.smallest_gap_mm)} mm", tuple(lines))


UNITS = {"mm": "mm", "lux": "lx", "hz": "frames/s"}


def _needs(report: Report, names: tuple[str, ...]) -> list[tuple[str, bool | None]]:
    return [(_wanted(line), line.met) for line in report.needs if line.name in names]


def _wanted(line: NeedLine) -> str:
    unit = UNITS.get(line.name.rsplit("_", 1)[-1], "")
    what = {"evenness": "evenness ", "target_min_lux": "least "}.get(line.name, "")
    return f"{'✓' if line.met else '✗'} {what}{three(line.wanted)} {unit}".rstrip() + " wanted"


def largest_loss(report: Report) -> str:
    """The diagnosis of the way there, in one sentence."""
    worst = next((leg for leg in outward(report) if leg.marked), None)
    return f"Largest loss, {worst.name} ({worst.loss}): {worst.note}." if worst else ""


def what_limits(report: Report) -> str:
    """The diagnosis of the way back, in one sentence."""
    part = report.summary.limited_by
    return f"Detail is limited by the {part}: {limit_reason(part)}." if part else ""


def full_scale_db(legs: list[Leg]) -> float:
    """How many decibels the whole thickness stands for: the least round number that leaves a ribbon to see."""
    need = -10 * math.log10(max(min((leg.left for leg in legs), default=1.0), 1e-12)) / 0.72
    return next((db for db in (5.0, 10.0, 15.0, 20.0, 30.0, 40.0, 60.0) if db >= need), 80.0)


def scale_sentence(report: Report) -> str:
    """What the thickness stands for."""
    full = report.light.steps[0].after_lm
    half, back = (10 ** (-full_scale_db(legs) / 20) for legs in (outward(report), backward(report)))
    marks = f"{three(full)} lm full, {three(full * half)} lm half, {three(full * half**2)} lm none"
    said = f"Thickness: light left on a log scale, {marks}"
    return said + (f"; on the way back contrast left, 1 full, {back:.2g} half." if report.detail else ".")
