"""What makes the bodies of two designs differ, in words."""

import math

import numpy as np

from optics.body.handling import least_bend_radius_mm
from optics.study.compare_plain import Told, against, digits


def outer(first: Told, other: Told) -> str:
    rows = []
    for name, of in (
        ("the image part", lambda each: np.nan_to_num(each["value"]["image_mm"])),
        ("the light guide", lambda each: each["value"]["guide_diameter_mm"]),
        ("both walls", lambda each: 2 * each["scope"].body.section.wall_mm),
        (
            "the channels",
            lambda each: sum(one.inner_mm + 2 * one.wall_mm for one in each["scope"].body.section.channels),
        ),
    ):
        pair = [float(of(each)) for each in (first, other)]
        rows.append((abs(pair[1] - pair[0]), against(name, *pair, "width_mm")))
    size, said = max(rows)
    return f"mostly {said}" if size > 1e-9 else "the layout of the section"


def bend(first: Told, other: Told) -> str:
    least = [digits(each["value"]["bend_radius_mm"], "bend_radius_mm") for each in (first, other)]
    if _bender(first) == _bender(other):
        return f"{_bender(first)} in both, {least[1]} against {least[0]}"
    return f"set by {_bender(other)}, {least[1]}, against {_bender(first)}, {least[0]}"


def _bender(told: Told) -> str:
    """What sets the least bend radius of a tube."""
    scope, least = told["scope"], told["value"]["bend_radius_mm"]
    fiber = scope.guide.fiber
    if scope.body.handling and math.isclose(scope.body.handling.bend_radius_mm, least, rel_tol=1e-9):
        return "what handling states"
    strained = float(least_bend_radius_mm(fiber_um=fiber.fiber_um, allowed_strain=fiber.allowed_strain))
    if math.isclose(strained, least, rel_tol=1e-9):
        return f"the strain of guide fibers of {fiber.fiber_um:.3g} um"
    return "the strain of the image bundle"


def tip(first: Told, other: Told) -> str:
    return "the rigid tip as stated, and what a viewing tip adds"
