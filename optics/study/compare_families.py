"""The same design in glass, silica and plastic: its guide, and its image bundle where it has one."""

from collections.abc import Mapping
from typing import Any

from optics.fiberscope import SOLVE, Fiberscope
from optics.image.bundle import ImageBundle
from optics.presets import Design, edited, resolve
from optics.spec import OutOfRange
from optics.study.pick_cost import PLASTIC_C
from optics.study.pick_parts import PACKING, packed_fraction
from optics.study.pick_settings import preset_settings
from optics.units import mm_from_um

# Guide and image bundle that stand for each family.
FAMILIES = {
    "glass": ("lead_silicate_na057", "leached_glass_10um"),
    "silica": ("silica_na022", "drawn_silica_4um"),
    "plastic": ("pmma_250um", "plastic_15um"),
}


def in_families(design: Design, given: Mapping[str, Any] | None = None) -> dict[str, Design]:
    """The design with settings given in each family that it can be made in; its own family is as it stands.

    Raises OutOfRange, with the first reason, where fewer than two can be made.
    """
    document = edited(design.document, given or {})
    scope = resolve(document).fiberscope
    found, refused = {}, []
    for family in FAMILIES:
        try:
            found[family] = resolve(edited(document, family_settings(document, scope, family)), design_name(family))
        except OutOfRange as wrong:
            refused.append(str(wrong))
    if len(found) < 2:
        raise OutOfRange(refused[0])
    return found


def design_name(family: str) -> str:
    return f"the design in {family}"


def family_settings(document: dict[str, Any], scope: Fiberscope, family: str) -> dict[str, Any]:
    """Settings that put a family in the place of the design's own guide fiber and image bundle."""
    guide, image = FAMILIES[family]
    settings: dict[str, Any] = {}
    if scope.guide.fiber.material != family:
        settings |= preset_settings(document, "guide.fiber", "fibers", guide)
        fiber = resolve(edited(document, settings)).fiberscope.guide.fiber
        bundle = scope.guide.bundle.diameter_mm  # where it is solved for, the usual packing must do
        packing = (
            PACKING[family] if bundle == SOLVE else packed_fraction(bundle, mm_from_um(fiber.fiber_um), PACKING[family])
        )
        settings["guide.bundle.packing_fraction"] = packing
    if scope.image is not None and scope.image.form == "bundle" and image_family(scope.image.bundle) != family:
        settings |= preset_settings(document, "image.bundle", "image_bundles", image)
    return settings


def image_family(bundle: ImageBundle) -> str:
    """Which family an image bundle is of: plastic by what heat it stands, glass by its separate or fused fibers."""
    if bundle.highest_temperature_c < PLASTIC_C:
        return "plastic"
    fused = 200.0  # a rod that stands more than any coating does is fused glass
    return "glass" if not bundle.one_rod or bundle.highest_temperature_c > fused else "silica"
