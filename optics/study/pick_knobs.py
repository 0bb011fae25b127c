"""The numbers that can be bought or made otherwise, what each can help, and its usual bounds."""

import typing
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

from optics.fiberscope import Fiberscope

LIGHT = ("target_center_lux", "target_min_lux", "target_uva_w_m2")
DETAIL = ("smallest_gap_mm", "smallest_line_mm")
SEEN = (*DETAIL, "frame_hz")
SIZE = ("fits", "outer_diameter_mm", "enters", "tip", "elbow", "passes")


@dataclass(frozen=True, slots=True)
class Knob:
    """One number: what a larger value can help, and what a smaller one can."""

    path: str
    up: tuple[str, ...] = ()
    down: tuple[str, ...] = ()


# What can be bought or made otherwise; the job itself (distance, length, bore, needs) stays. In the order of the light.
KNOBS = (
    Knob("source.lamp.flux_lm", up=(*LIGHT, *SEEN)),
    Knob("source.lamp.flux_w", up=(*LIGHT, *SEEN)),
    Knob("guide.bundle.diameter_mm", up=(*LIGHT, "evenness", *SEEN), down=(*LIGHT, "evenness", *SEEN, *SIZE)),
    Knob("guide.bundle.packing_fraction", up=(*LIGHT, *SEEN)),
    Knob("scene.ports.offset_mm", up=(*LIGHT, "evenness", *SEEN), down=(*LIGHT, "evenness", *SEEN, *SIZE)),
    Knob(
        "image.objective.focal_mm",
        up=("target_min_lux", "evenness", *SEEN),
        down=("target_min_lux", "evenness", "field_of_view_deg", *SEEN),
    ),
    Knob("image.objective.f_number", up=DETAIL, down=SEEN),
    Knob(
        "image.objective.focus_mm",
        up=("target_min_lux", "evenness", "field_of_view_deg", *SEEN),
        down=("target_min_lux", "evenness", "field_of_view_deg", *SEEN),
    ),
    Knob("image.bundle.core_um", up=SEEN, down=DETAIL),
    Knob("image.bundle.pitch_um", up=SEEN, down=(*SEEN, "bend_radius_mm", "elbow", "passes")),
    Knob(
        "image.bundle.diameter_mm",
        up=("target_min_lux", "evenness", "field_of_view_deg"),
        down=("target_min_lux", "target_center_lux", "evenness", *SIZE, "bend_radius_mm"),
    ),
    Knob(
        "image.chip.pixel_um",
        up=("field_of_view_deg", *SEEN),
        down=("target_min_lux", "evenness", *SEEN, *SIZE),
    ),
    Knob("image.chip.longest_exposure_s", up=DETAIL, down=("frame_hz",)),
    Knob("viewer.camera.longest_exposure_s", up=DETAIL, down=("frame_hz",)),
    Knob("viewer.camera.relay_na", up=SEEN),
    Knob("body.section.outer_diameter_mm", up=("fits",), down=SIZE),
    Knob("body.section.wall_mm", down=SIZE),
    Knob("body.section.clearance_mm", down=SIZE),
    Knob("body.passage.rigid_tip_mm", down=("rigid_tip_mm", "tip", "passes")),
    Knob("body.handling.bend_radius_mm", down=("bend_radius_mm", "elbow", "passes")),
)


@lru_cache(maxsize=64)
def usual_bounds(path: str) -> tuple[float, float]:
    """The usual bounds of a number of the design file, as its Spec states them.

    >>> usual_bounds("image.objective.f_number")
    (2.0, 11.0)
    """
    here: list[Any] = [Fiberscope]
    for part in path.split("."):
        field = next(model.model_fields[part] for model in here if part in getattr(model, "model_fields", {}))
        here = _members(field.annotation)
    return tuple(field.json_schema_extra["usual"])


def _members(annotation: Any) -> list[Any]:
    inner = typing.get_args(annotation)
    return [member for part in inner for member in _members(part)] if inner else [annotation]
