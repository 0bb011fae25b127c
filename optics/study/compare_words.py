"""What makes a difference between two designs, in words: a step of the light, a part of the way back or of the body."""

import math
from collections.abc import Callable
from typing import Any

import numpy as np

from optics.spectrum import GRID_NM, color_rendering_index, color_temperature_k
from optics.study.compare_body import bend, outer, tip
from optics.study.compare_plain import Told, against, digits
from optics.viewer.detail import PARTS


def because(quantity: str, first: Told, other: Told) -> str:
    """What makes most of the difference in one number."""
    return REASONS[quantity](first, other)


# The light


def _steps(told: Told) -> dict[str, float]:
    """Logarithm of what each step leaves; of the lamp, of its lumens."""
    return {
        step.name: _log(step.after_lm if step.name == "lamp" else step.factor) for step in told["report"].light.steps
    }


def _log(number: float) -> float:
    return math.log(number) if number > 0 else -1e3


def light_step(first: Told, other: Told, *, lamp: bool) -> str:
    """The step that makes most of a difference in lumens (`lamp`: count the lamp's own), and what works against it."""
    here, there = _steps(first), _steps(other)
    names = [name for name in dict.fromkeys((*here, *there)) if lamp or name != "lamp"]
    gain = {name: there.get(name, 0.0) - here.get(name, 0.0) for name in names}
    total = sum(gain.values())
    main = max(names, key=lambda name: gain[name] * (1 if total > 0 else -1))
    said = f"mostly the {main}: {_factor(other, main)} against {_factor(first, main)}"
    back = min(names, key=lambda name: gain[name] * (1 if total > 0 else -1))
    if gain[back] * total < 0 and abs(gain[back]) > 0.3 * abs(gain[main]):
        said += f"; the {back} works against it, {_factor(other, back)} against {_factor(first, back)}"
    return said


def _factor(told: Told, name: str) -> str:
    step = next((step for step in told["report"].light.steps if step.name == name), None)
    if step is None:
        return "none"
    return digits(step.after_lm, "after_lm") if name == "lamp" else f"x {step.factor:.3f}"


def _cone(first: Told, other: Told) -> str:
    takes = [min(each["value"]["launch_na"], each["scope"].guide.fiber.na) for each in (first, other)]
    if math.isclose(takes[0], takes[1], rel_tol=1e-6):
        return "mostly the bends, a cover or a joint, which widen or cut the same cone differently"
    part = "the launch" if takes[1] < other["scope"].guide.fiber.na * (1 - 1e-9) else "the fiber's NA"
    return f"mostly {against(part, *takes)}"


def _color(measure: Callable[..., Any], name: str) -> Callable[[Told, Told], str]:
    def said(first: Told, other: Told) -> str:
        lamps = [float(measure(wavelength_nm=GRID_NM, power=each["lamp"])) for each in (first, other)]
        after = [each["value"][name] for each in (first, other)]
        shift = [out - lamp for out, lamp in zip(after, lamps)]
        if abs(lamps[1] - lamps[0]) >= abs(shift[1] - shift[0]):
            return f"mostly {against('the lamp itself', *lamps, name)}"
        moved = [f"{digits(each, name)}" for each in shift]
        return f"mostly the attenuation by color: from the lamp to the exit it moves by {moved[1]} against {moved[0]}"

    return said


# The target


def _on_target(quantity: str) -> Callable[[Told, Told], str]:
    def said(first: Told, other: Told) -> str:
        lumens = [each["report"].light.delivered_lm for each in (first, other)]
        lux = [getattr(each["report"].summary, quantity) for each in (first, other)]
        light, spread = _log(lumens[1]) - _log(lumens[0]), _log(lux[1]) - _log(lux[0])
        spread -= light
        total = light + spread
        if light * total >= spread * total:
            return f"mostly {against('the lumens delivered', *lumens, 'delivered_lm')}: {light_step(first, other, lamp=True)}"
        per = [each / max(light_of, 1e-12) for each, light_of in zip(lux, lumens)]
        how = _spread(first, other, over_field=quantity != "target_center_lux")
        return f"mostly {against('the lux for each lumen', *per)}: {how}"

    return said


def _spread(first: Told, other: Told, *, over_field: bool) -> str:
    """What makes the same lumens land otherwise: distance, cone, the field, or the ports."""
    rows = []
    for name, of in (
        ("the distance in mm", lambda each: each["scope"].scene.target.distance_mm),
        ("the exit cone's NA", lambda each: each["report"].light.exit_na),
        ("the field's radius over its distance", _field_slope if over_field else lambda each: 1.0),
    ):
        pair = [of(each) for each in (first, other)]
        rows.append((abs(_log(pair[1]) - _log(pair[0])), against(name, *pair)))
    size, said = max(rows)
    return said if size > 0.01 else "where the ports lie"


def _field_slope(told: Told) -> float:
    return (told["report"].target.field_radius_mm or 1.0) / told["scope"].scene.target.distance_mm


def _evenness(first: Told, other: Told) -> str:
    dark = [each["report"].target.unlit_fraction for each in (first, other)]
    if max(dark) > 1e-3 and abs(dark[1] - dark[0]) > 1e-3:
        return f"mostly {against('the part of the field without light', *dark)}"
    return f"mostly {_spread(first, other, over_field=True)}"


def _field(first: Told, other: Told) -> str:
    per = [each["value"]["image_mm"] / each["value"]["image_distance_mm"] for each in (first, other)]
    if math.isclose(per[0], per[1], rel_tol=1e-6):
        return "the medium, or the lens's mapping"
    return f"mostly {against('the image over its distance from the lens', *per)}"


# The way back


def _detail(first: Told, other: Told) -> str:
    if min(each["value"]["resolved_lp_mm"] for each in (first, other)) <= 0:
        return "one resolves nothing"
    scale = [_scale(each) for each in (first, other)]
    sharp = [each["value"]["resolved_lp_mm"] / size for each, size in zip((first, other), scale)]
    gains = [_log(pair[1]) - _log(pair[0]) for pair in (scale, sharp)]
    total = sum(gains)
    if gains[0] * total >= gains[1] * total:
        return f"mostly {against('the scale of the picture, mm on the image for one at the target', *scale)}"
    left = {part: _without(part, first, other, sharp) for part in PARTS}
    part = min(PARTS, key=lambda name: left[name])
    limits = [_limit(each, part) for each in (first, other)]
    allows = "" if limits[0] == limits[1] else f", which alone allows {limits[1]} against {limits[0]}"
    return (
        f"mostly the {part}{allows}: were it ideal in both, their detail would differ by {_percent(left[part])}, "
        f"not by {_percent(abs(gains[1]))}"
    )


def _without(part: str, first: Told, other: Told, sharp: list[float]) -> float:
    """How far apart two designs would resolve, on the image, with a part ideal in both: the logarithm of the ratio."""
    gain = [max(float(np.nan_to_num(each["value"][f"gain.{part}"], neginf=0.0)), 0.0) for each in (first, other)]
    return abs(_log(sharp[1] + gain[1]) - _log(sharp[0] + gain[0]))


def _percent(log_ratio: float) -> str:
    return f"{math.expm1(log_ratio):.0%}"


def _scale(told: Told) -> float:
    """Size of the picture on the bundle or chip over that of the target."""
    value = told["value"]
    return value["image_distance_mm"] / value["focus_from_pupil_mm"]


def _limit(told: Told, part: str | None) -> str:
    line = next((line for line in told["report"].detail.ledger if line.name == part), None)
    if line is None:
        return f"no {part} at all"
    return "everything" if line.limit_lp_mm is None else f"{digits(line.limit_lp_mm)} lp/mm"


def _exposure(first: Told, other: Told) -> str:
    light = [each["value"]["face_lux"] for each in (first, other)]
    return f"mostly {against('the light on the image, lx', *light)}, and the camera's well and longest exposure"


REASONS: dict[str, Callable[[Told, Told], str]] = {
    "delivered_lm": lambda first, other: light_step(first, other, lamp=True),
    "transmission": lambda first, other: light_step(first, other, lamp=False),
    "exit_na": _cone,
    "color_temperature_k": _color(color_temperature_k, "color_temperature_k"),
    "color_rendering_index": _color(color_rendering_index, "color_rendering_index"),
    "target_center_lux": _on_target("target_center_lux"),
    "target_mean_lux": _on_target("target_mean_lux"),
    "target_min_lux": _on_target("target_min_lux"),
    "evenness": _evenness,
    "field_of_view_deg": _field,
    "smallest_gap_mm": _detail,
    "smallest_line_mm": _detail,
    "exposure_s": _exposure,
    "outer_diameter_mm": outer,
    "bend_radius_mm": bend,
    "rigid_tip_mm": tip,
}
