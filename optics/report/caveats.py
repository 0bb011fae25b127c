"""What the reader should know about this design's numbers: ranges left, data that end, values only assumed."""

from collections import Counter
from collections.abc import Iterator, Mapping

import numpy as np

from optics.chain.evaluate import Figures
from optics.fiberscope import Fiberscope
from optics.guide.bend import TESTED as BEND_TESTED
from optics.guide.bend import relative_bend_ratio
from optics.spec import Caveat, beyond
from optics.spectrum import covered, integral, luminous_flux_lm, on_grid
from optics.tables import Sourced
from optics.viewer.camera import LEAST_PIXELS_PER_PITCH

SEEN_LM_W = 5.0  # below this efficacy a lamp is no lamp to see by: a house choice
CAUTIONS = {
    "industrial": (
        "Bright light at the exit face can hurt eyes and skin, the face and the cable's ends get hot, and a lamp-fed guide is not "
        "exempt in explosive atmospheres. This is a screening estimate; local codes and licensed practice decide."
    ),
    "clinical": (
        "A clinical device requires regulated design review; this is a screening estimate and certifies nothing. Light, heat and "
        "sterilization at the patient are judged by the current standards and by measurement."
    ),
}


def caveats(
    fiberscope: Fiberscope,
    value: Mapping[str, float],
    figures: Figures,
    row: int,
    sourced: Mapping[str, Sourced] | None,
) -> tuple[Caveat, ...]:
    """All caveats of one design, in the order of the light; the setting's caution last."""
    found = [
        *_lamp(fiberscope, value),
        *_coverage(fiberscope),
        *_bends(fiberscope),
        *_ports(fiberscope, value),
        *_detail(fiberscope, value),
        *_body(fiberscope, value),
        *_basis(sourced),
    ]
    return (*found, Caveat("setting", CAUTIONS[fiberscope.setting]))


def _lamp(scope: Fiberscope, value: Mapping[str, float]) -> Iterator[Caveat]:
    if value["delivered_lm"] < SEEN_LM_W * value["delivered_w"]:
        yield Caveat("source.lamp", "This lamp gives almost no visible light: judge it by watts, not by lumens.")
    if scope.source.launch.form == "rated":
        yield Caveat(
            "source.launch",
            "The rating is taken as the light on the face; what the reference guide itself lost is not known, so the estimate is low.",
        )


def _coverage(scope: Fiberscope) -> Iterator[Caveat]:
    """Where the data of a fiber, a target or a camera end inside the lamp's spectrum: what share is left out."""
    power = on_grid(scope.source.lamp.spectrum)
    curves = {"guide.fiber.attenuation": scope.guide.fiber.attenuation}
    if scope.guide.cable:
        curves = {"guide.cable.fiber.attenuation": scope.guide.cable.fiber.attenuation, **curves}
    if scope.scene:
        curves["scene.target.reflectance"] = scope.scene.target.reflectance
    if scope.image and scope.image.form == "bundle":
        curves["image.bundle.attenuation"] = scope.image.bundle.attenuation
    for path, curve in curves.items():
        outside = np.where(covered(curve), 0.0, power)
        watts, lumens = (
            float(measure(outside) / max(measure(power), 1e-300)) for measure in (integral, luminous_flux_lm)
        )
        if watts > 0.0005:
            yield Caveat(
                path,
                f"The data run from {curve.wavelength_nm[0]:g} to {curve.wavelength_nm[-1]:g} nm; the lamp's light outside, "
                f"{watts:.1%} of its power and {lumens:.1%} of its lumens, is left out.",
            )
    spectrum = scope.source.lamp.spectrum
    if spectrum.wavelength_nm[-1] < 1000:
        yield Caveat(
            "source.lamp.spectrum",
            f"The lamp's data end at {spectrum.wavelength_nm[-1]:g} nm: heat by longer wavelengths is not assessed.",
        )


def _bends(scope: Fiberscope) -> Iterator[Caveat]:
    fiber = scope.guide.fiber
    for number, bend in enumerate(scope.guide.bundle.bends):
        relative = float(
            relative_bend_ratio(
                na=fiber.na, core_index=fiber.core_index, core_um=fiber.core_um, bend_radius_mm=bend.radius_mm
            )
        )
        for said in beyond(BEND_TESTED, relative_bend=relative):
            yield Caveat(f"guide.bundle.bends.{number}", f"The {said}; the loss there follows the mode-count bound.")
        strain = fiber.fiber_um / (2000.0 * bend.radius_mm)
        if strain > fiber.allowed_strain:
            yield Caveat(
                f"guide.bundle.bends.{number}",
                f"A radius of {bend.radius_mm:g} mm strains the fiber by {strain:.2%}, above the {fiber.allowed_strain:.2%} that it is trusted with.",
            )


def _ports(scope: Fiberscope, value: Mapping[str, float]) -> Iterator[Caveat]:
    if not scope.scene:
        return
    target = scope.scene.target
    if np.isfinite(value["first_lit_mm"]) and value["first_lit_mm"] > target.distance_mm:
        yield Caveat(
            "scene.ports",
            f"The axis stays dark nearer than {value['first_lit_mm']:.3g} mm; the target is at {target.distance_mm:.3g} mm.",
        )
    asked, laid = getattr(scope.scene.ports, "offset_mm", None), value["laid_port_offset_mm"]
    if asked is not None and np.isfinite(laid) and abs(asked - laid) > 0.05 * laid:
        yield Caveat(
            "scene.ports.offset_mm",
            f"The light is reckoned with ports {asked:.3g} mm from the axis, as asked; the section, at its smallest, "
            f"has them at {laid:.3g} mm.",
        )
    if np.isfinite(value["unlit_fraction"]) and value["unlit_fraction"] > 0.001:
        yield Caveat(
            "scene.ports",
            f"{value['unlit_fraction']:.1%} of the field of view gets no light: the cone is narrower than the view.",
        )


def _detail(scope: Fiberscope, value: Mapping[str, float]) -> Iterator[Caveat]:
    if np.isfinite(value["pixels_per_pitch"]) and value["pixels_per_pitch"] < LEAST_PIXELS_PER_PITCH:
        yield Caveat(
            "viewer.camera",
            f"{value['pixels_per_pitch']:.3g} pixels for each core pitch: below {LEAST_PIXELS_PER_PITCH:.3g} the pixels beat with the lattice.",
        )
    if scope.image and scope.scene:
        near, far = value["near_mm"], value["far_mm"]
        if not near <= scope.scene.target.distance_mm <= far:
            yield Caveat(
                "image.objective",
                f"The target at {scope.scene.target.distance_mm:.3g} mm lies outside the depth of field, {near:.3g} to {far:.3g} mm.",
            )


def _body(scope: Fiberscope, value: Mapping[str, float]) -> Iterator[Caveat]:
    if not scope.body:
        return
    if value["fits"] == 0:
        wall = scope.body.section.wall_mm
        yield Caveat(
            "body.section",
            f"The parts need a lumen of {value['needed_lumen_mm']:.3f} mm, but the tube leaves {value['lumen_mm']:.3f} mm: it takes an "
            f"outer diameter of {value['needed_lumen_mm'] + 2 * wall:.3f} mm, or smaller parts.",
        )
    handling = scope.body.handling
    if handling and value["bend_radius_mm"] > handling.bend_radius_mm * (1 + 1e-9):
        yield Caveat(
            "body.handling",
            f"Handling asks for a bend radius of {handling.bend_radius_mm:g} mm, but the strain of the fibers allows {value['bend_radius_mm']:.3g} mm.",
        )


def _basis(sourced: Mapping[str, Sourced] | None) -> Iterator[Caveat]:
    """How many of the values in force rest on memory or on an assumption."""
    if not sourced:
        return
    bases = Counter(item.basis for item in sourced.values() if item.source != "own_scenario")
    soft = bases["remembered"] + bases["assumed"]
    if soft:
        paths = [path for path, item in sourced.items() if item.basis == "remembered" and item.low is not None]
        named = ", ".join(paths[:4]) + (" and more" if len(paths) > 4 else "")
        yield Caveat(
            "sources",
            f"{soft} of {sum(bases.values())} preset values are remembered or assumed"
            + (f" (such as {named})." if named else "."),
        )
