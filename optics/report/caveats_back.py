"""Caveats on the way back and on the body: beats, focus, what does not fit, what bends too little."""

from collections.abc import Iterator, Mapping

import numpy as np

from optics.fiberscope import Fiberscope
from optics.spec import Caveat
from optics.viewer.camera import LEAST_PIXELS_PER_PITCH


def of_detail(scope: Fiberscope, value: Mapping[str, float]) -> Iterator[Caveat]:
    if np.isfinite(value["pixels_per_pitch"]) and value["pixels_per_pitch"] < LEAST_PIXELS_PER_PITCH:
        yield Caveat(
            "viewer.camera",
            f"{value['pixels_per_pitch']:.3g} pixels for each core pitch: below {LEAST_PIXELS_PER_PITCH:.3g} the pixels beat "
            "with the lattice.",
        )
    if scope.image and scope.scene:
        near, far = value["near_mm"], value["far_mm"]
        if not near <= scope.scene.target.distance_mm <= far:
            yield Caveat(
                "image.objective",
                f"The target at {scope.scene.target.distance_mm:.3g} mm lies outside the depth of field, {near:.3g} to "
                f"{far:.3g} mm.",
            )


def of_body(scope: Fiberscope, value: Mapping[str, float]) -> Iterator[Caveat]:
    if not scope.body:
        return
    if value["fits"] == 0:
        wall = scope.body.section.wall_mm
        yield Caveat(
            "body.section",
            f"The parts need a lumen of {value['needed_lumen_mm']:.3f} mm, but the tube leaves {value['lumen_mm']:.3f} "
            f"mm: it takes an outer diameter of {value['needed_lumen_mm'] + 2 * wall:.3f} mm, or smaller parts.",
        )
    handling = scope.body.handling
    if handling and value["bend_radius_mm"] > handling.bend_radius_mm * (1 + 1e-9):
        yield Caveat(
            "body.handling",
            f"Handling asks for a bend radius of {handling.bend_radius_mm:g} mm, but the strain of the fibers allows "
            f"{value['bend_radius_mm']:.3g} mm.",
        )
