"""The answer in a sentence: what is met, what falls short most, and what limits."""

from optics.needs import AT_MOST, NeedLine
from optics.report.answer import Report
from optics.units import unit_of

NAMES = {
    "smallest_gap_mm": "the smallest gap",
    "smallest_line_mm": "the thinnest line",
    "target_center_lux": "the light at the center",
    "target_min_lux": "the least light in the field",
    "evenness": "the evenness",
    "target_uva_w_m2": "the UV-A irradiance",
    "outer_diameter_mm": "the outer diameter",
    "bend_radius_mm": "the bend radius",
    "rigid_tip_mm": "the rigid tip",
    "field_of_view_deg": "the field of view",
    "frame_hz": "the frame rate",
    "color_rendering_index": "the color rendering index",
}
UNITS = {"mm": "mm", "lux": "lx", "w_m2": "W/m2", "deg": "deg", "hz": "frames/s"}


def sentence(report: Report) -> str:
    """One or two sentences that answer before anything else is read."""
    passing = _body(report)
    if not report.needs:
        return _plain(report) + passing
    short = sorted((line for line in report.needs if not line.met), key=_distance)
    if not short:
        closest = min(report.needs, key=_distance)
        return f"Meets all {len(report.needs)} needs; the closest is {_told(closest)}.{_limit(report)}{passing}"
    met = len(report.needs) - len(short)
    first = f"Meets {met} of {len(report.needs)} needs. Farthest off is {_told(short[0])}."
    return first + _limit(report) + passing


def _body(report: Report) -> str:
    """What keeps the scope from fitting or passing, in a sentence of its own."""
    fit = report.fit
    if fit is None:
        return ""
    if fit.needed_diameter_mm is not None:
        return f" Its parts do not fit the tube: they take an outer diameter of {fit.needed_diameter_mm:.3g} mm."
    if fit.passes is not False:
        return ""
    tip, longest = report.summary.rigid_tip_mm, fit.longest_rigid_tip_mm
    if longest is None:
        return " It does not enter the bore."
    if tip is not None and tip > longest:
        return f" It enters the bore but not its bend: the tip of {tip:.3g} mm may be {longest:.3g} mm long at most."
    return (
        f" It enters the bore but not its bend: the tube bends to {fit.bend_radius_mm:.3g} mm, the bore gives "
        f"{fit.passable_radius_mm:.3g} mm."
    )


def _distance(line: NeedLine) -> float:
    return float("-inf") if line.margin is None else line.margin


def _told(line: NeedLine) -> str:
    unit = UNITS.get(unit_of(line.name) or "", "")
    wanted = f"{'at most' if line.name in AT_MOST else 'at least'} {line.wanted:.3g} {unit}".strip()
    if line.got is None:
        return f"{NAMES[line.name]}: nothing reached, {wanted} wanted"
    return f"{NAMES[line.name]}: {line.got:.3g} {unit}".rstrip() + f", {wanted} wanted"


def _limit(report: Report) -> str:
    return f" Detail is limited by the {report.summary.limited_by}." if report.summary.limited_by else ""


def _plain(report: Report) -> str:
    said = f"Delivers {report.light.delivered_lm:.3g} lm."
    if report.target:
        said = f"Delivers {report.light.delivered_lm:.3g} lm and {report.target.center_lux:.3g} lx at the center of the target."
    if report.summary.smallest_gap_mm is not None:
        said += f" The finest gap seen is {report.summary.smallest_gap_mm:.3g} mm."
    elif report.detail:
        said += " No detail is resolved."
    return said + _limit(report)
