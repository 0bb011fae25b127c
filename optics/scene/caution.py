"""The screening of one design in words: each quantity, what it is held against, and how much that means."""

from dataclasses import dataclass

import numpy as np

from optics.scene.exposure import Screening
from optics.scene.limits import (
    ACTINIC_J_M2,
    GROUP_RADIANCE_W_M2_SR,
    GROUP_SMALL_W_M2,
    IGNITION,
    SKIN_S,
    SMALL_RAD,
    TIP_RISE_K,
    UVA_EYE_W_M2,
    WORKDAY_S,
    infrared_eye_limit_w_m2,
    skin_limit_w_m2,
)
from optics.units import mw_from_w

EXCEEDS = "exceeds the screening figure; common practice, needs a rationale"
SECOND_HAND = "IEC 62471:2006, read second-hand"
# Bands of the hazards, and the part of each that must lie in the data before "below" is said.
BLUE, THERMAL, ACTINIC = ((300.0, 700.0), (400.0, 700.0)), ((380.0, 1400.0), (400.0, 700.0)), ((200.0, 400.0),) * 2
UVA, INFRARED, SKIN = (
    ((315.0, 400.0), (350.0, 400.0)),
    ((780.0, 3000.0), (780.0, 1400.0)),
    ((380.0, 3000.0), (400.0, 700.0)),
)
GROUPS = ("exempt group", "risk group 1", "risk group 2", "risk group 3")
CLOSE = "a class at 200 mm says nothing of 5 mm or of contact"


@dataclass(frozen=True, slots=True)
class Line:
    """One quantity; value and limit are in `unit` (None: not assessed, or no figure to hold it against)."""

    name: str
    value: float | None
    unit: str
    limit: float | None
    because: str


def lines(*, screening: Screening, at: int, setting: str) -> list[Line]:
    """Every line of the screening for one design of a batch, in the setting "industrial" or "clinical".

    Where the data leave out the part of a band that matters, the line is "not assessed" and has no value, unless
    the part in the data exceeds the figure already.
    """
    found = {name: float(getattr(screening, name)[at]) for name in Screening.__slots__}
    data = (found["covered_from_nm"], found["covered_to_nm"])
    data = (np.inf, -np.inf) if np.isnan(data).any() else data
    out = [part(found, data) for part in (_blue, _thermal, _uv_and_ir, _skin)]
    own = _ignition(found, data) if setting == "industrial" else []
    return [*(line for part in out for line in part), *_heat(found, setting), *own]


def _line(name, value, unit, limit, data, bands, what, edition=SECOND_HAND, more=""):
    """One line, held against a limit over a band; `more` is added where it exceeds."""
    band, core = bands
    low, high = max(band[0], data[0]), min(band[1], data[1])
    span = f"{band[0]:g} to {band[1]:g} nm"
    if np.isnan(value):
        return Line(name, None, unit, limit, f"not assessed: there is no target ({edition})")
    if not low < high:  # also where there are no data at all
        return Line(name, None, unit, limit, f"not assessed: no data within {span} ({edition})")
    reach = "" if (low, high) == band else f"; data cover {low:g} to {high:g} of {span}"
    if value > limit:
        return Line(name, value, unit, limit, f"{EXCEEDS} ({edition}{reach}){more}")
    if data[0] > core[0] or data[1] < core[1]:
        return Line(name, None, unit, limit, f"not assessed: this part alone gives {value:.2g} ({edition}{reach})")
    return Line(name, value, unit, limit, f"below the screening figure for {what} ({edition}{reach})")


def _blue(found, data):
    mrad, small = f"{1000 * found['source_rad']:.3g} mrad", found["source_rad"] < SMALL_RAD
    long, short, own = GROUP_RADIANCE_W_M2_SR
    name, unit = "blue-light radiance", "W/(m2 sr)"
    out = [
        _line(
            f"{name} averaged over 100 mrad at 200 mm", found["blue_100_mrad_w_m2_sr"], unit, long, data, BLUE, "hours"
        ),
        _line(
            f"{name} averaged over 11 mrad at 200 mm", found["blue_11_mrad_w_m2_sr"], unit, short, data, BLUE, "100 s"
        ),
        _line(f"{name} of the exit itself", found["blue_w_m2_sr"], unit, own, data, BLUE, "risk group 2"),
    ]
    if small:
        what = f"a small source, a port being {mrad} wide there"
        limit = GROUP_SMALL_W_M2[1]
        out.append(_line("blue-light irradiance at 200 mm", found["blue_w_m2"], "W/m2", limit, data, BLUE, what))
    group = int(found["risk_group_index"])
    known = group == 3 or (data[0] <= BLUE[1][0] and data[1] >= BLUE[1][1])
    said = f"{GROUPS[group]} by {'irradiance' if small else 'radiance'}, a port being {mrad} wide; {CLOSE}"
    said = f"{said} ({SECOND_HAND})" if known else f"not assessed: the data leave out blue light ({SECOND_HAND})"
    out.append(Line("risk group by blue light at 200 mm", float(group) if known else None, "1", None, said))
    landed = found["target_blue_w_m2"]
    more = f"; an eye there has 100 J/m2 after {100.0 / landed:.2g} s" if landed > 0 else ""
    name, limit = "blue-light irradiance at the target", GROUP_SMALL_W_M2[1]
    return [*out, _line(name, landed, "W/m2", limit, data, BLUE, "an eye there", more=more)]


def _thermal(found, data):
    what, out = "a long look; the radiance is not averaged, which is the safe side", []
    for edition, key, basis in (
        ("IEC 62471:2006", "thermal_2006_w_m2_sr", "second-hand"),
        ("ICNIRP 2013", "thermal_2013_w_m2_sr", "from memory"),
    ):
        said = f"weights of {edition}, {basis}; limit of IEC 62471:2006, from memory"
        name, limit = f"retinal thermal radiance, weights of {edition}", found["thermal_limit_w_m2_sr"]
        out.append(_line(name, found[key], "W/(m2 sr)", limit, data, THERMAL, what, said))
    return out


def _uv_and_ir(found, data):
    actinic, infrared = ACTINIC_J_M2 / WORKDAY_S, float(infrared_eye_limit_w_m2(exposure_s=WORKDAY_S))
    weights = f"{SECOND_HAND}; weights from memory"
    long = "more than 1000 s"
    return [
        _line("actinic ultraviolet at 200 mm", found["actinic_w_m2"], "W/m2", actinic, data, ACTINIC, "8 h", weights),
        _line("UV-A at the eye at 200 mm", found["uva_w_m2"], "W/m2", UVA_EYE_W_M2, data, UVA, long),
        _line("infrared at the eye at 200 mm", found["infrared_w_m2"], "W/m2", infrared, data, INFRARED, long),
    ]


def _skin(found, data):
    limit, what = float(skin_limit_w_m2(exposure_s=SKIN_S)), "skin for 10 s"
    more = (
        "; at tissue 16 kW/m2 in viewing and 80 kW/m2 in transillumination were measured (Gastrointest. Endosc. 1999)"
    )
    return [
        _line(f"irradiance at the {place}", found[key], "W/m2", limit, data, SKIN, what, more=more)
        for place, key in (("target", "target_skin_w_m2"), ("exit face", "exit_skin_w_m2"))
    ]


def _heat(found, setting):
    rise, heat, limit = found["tip_rise_k"], found["face_heat_w"], TIP_RISE_K if setting == "clinical" else None
    figure = "41 C of an insertion part over 37 C; IEC 60601-2-18, from memory"
    said = "10 W/(m2 K) assumed; no figure to hold it against"
    if np.isnan(rise):
        said = "not assessed: the heat or the surface of the tip is not known"
    elif limit is not None:
        said = f"{EXCEEDS} ({figure})" if rise > limit else f"below the screening figure for {figure}"
    face = "light that the guide does not take heats the face and its glue; no figure to hold it against"
    face = "not assessed: not known" if np.isnan(heat) else face
    return [
        Line("heat rise of the tip in still air", None if np.isnan(rise) else rise, "K", limit, said),
        Line("heat left at the input face", None if np.isnan(heat) else heat, "W", None, face),
    ]


def _ignition(found, data):
    """Explosive atmospheres: below either figure. A lamp-fed guide is not exempt by itself."""
    power, density, out = found["power_w"], found["exit_w_mm2"], []
    reach = f"light of {data[0]:g} to {data[1]:g} nm counted" if data[0] < data[1] else "no data"
    for figure in IGNITION:
        held = [(power, figure.power_w, "mW")]
        if figure.irradiance_w_mm2 is not None:
            held.append((density, figure.irradiance_w_mm2, "mW/mm2 over the ports"))
        against = " and ".join(f"{mw_from_w(got):.3g} against {mw_from_w(most):g} {unit}" for got, most, unit in held)
        below = any(got < most for got, most, _ in held)
        said = f"below the screening figure for {figure.name}" if below else "exceeds the screening figure"
        basis = "from memory" if figure.basis == "remembered" else f"read in {figure.source}"
        because = f"{said}: {against} ({basis}; IEC 60079-28; {reach}). Group, class and the licensed assessor decide"
        limit = mw_from_w(figure.power_w)
        value = mw_from_w(power) if data[0] < data[1] else None
        because = because if value is not None else "not assessed: no data on the light"
        out.append(Line(f"optical power, {figure.name}", value, "mW", limit, because))
    return out
