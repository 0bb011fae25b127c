"""Caveats on the light's way to the target: ranges left, data that end, light that shows nothing."""

from collections.abc import Iterator, Mapping

import numpy as np

from optics.body.handling import bend_strain
from optics.fiberscope import Fiberscope
from optics.guide.bend import bend_caveats
from optics.scene.cover import thrown_back_mm
from optics.scene.coverage import glint_distance_mm
from optics.spec import Caveat
from optics.spectrum import covered, integral, luminous_flux_lm, on_grid

MIRROR_SHARE = 0.3  # specular share from which a surface shows glints: a house choice
SEEN_LM_W = 5.0  # below this efficacy a lamp is no lamp to see by: a house choice


def of_lamp(scope: Fiberscope, value: Mapping[str, float]) -> Iterator[Caveat]:
    if value["delivered_lm"] < SEEN_LM_W * value["delivered_w"]:
        yield Caveat("source.lamp", "This lamp gives almost no visible light: judge it by watts, not by lumens.")
    if scope.source.launch.form == "rated":
        yield Caveat(
            "source.launch",
            "The rating is taken as the light on the face; what the reference guide itself lost is not known, so the "
            "estimate is low.",
        )


def of_coverage(scope: Fiberscope) -> Iterator[Caveat]:
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


def of_bends(scope: Fiberscope) -> Iterator[Caveat]:
    fiber = scope.guide.fiber
    for number, bend in enumerate(scope.guide.bundle.bends):
        said = bend_caveats(
            core_index=fiber.core_index,
            na=fiber.na,
            core_um=fiber.core_um,
            bend_radius_mm=bend.radius_mm,
            bend_deg=bend.angle_deg,
        )
        yield from (Caveat(f"guide.bundle.bends.{number}", text) for text in said)
        strain = bend_strain(fiber_um=fiber.fiber_um, bend_radius_mm=bend.radius_mm)
        if strain > fiber.allowed_strain:
            yield Caveat(
                f"guide.bundle.bends.{number}",
                f"A radius of {bend.radius_mm:g} mm strains the fiber by {strain:.2%}, above the "
                f"{fiber.allowed_strain:.2%} that it is trusted with.",
            )


def of_ports(scope: Fiberscope, value: Mapping[str, float]) -> Iterator[Caveat]:
    if not scope.scene:
        return
    target = scope.scene.target
    if np.isfinite(value["first_lit_mm"]) and value["first_lit_mm"] > target.distance_mm:
        yield Caveat(
            "scene.ports",
            f"The axis stays dark nearer than {value['first_lit_mm']:.3g} mm; the target is at {target.distance_mm:.3g} mm.",
        )
    yield from _stray(scope, value)
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


def _stray(scope: Fiberscope, value: Mapping[str, float]) -> Iterator[Caveat]:
    """Light that reaches the objective without having shown anything: glints, and what a common window throws back."""
    target, port = scope.scene.target, value["nearest_port_mm"]
    if target.specular_share >= MIRROR_SHARE and target.form == "plane" and target.tilt_deg == 0:
        radius = value["field_radius_mm"]
        if np.isfinite(radius) and port / 2 < radius:
            near = glint_distance_mm(offset_mm=port, field_half_angle_deg=value["field_of_view_deg"] / 2)
            yield Caveat(
                "scene.target.specular_share",
                f"A target this shiny mirrors the ports into the picture, {port / 2:.3g} mm from its center; the glints leave "
                f"the field nearer than {float(near):.2g} mm, or where the target is tilted.",
            )
    if scope.scene.cover and np.isfinite(value["port_gap_mm"]) and scope.image:
        cover = scope.scene.cover
        reach = float(thrown_back_mm(thickness_mm=cover.thickness_mm, na=value["exit_na"], index=cover.index))
        gap = value["port_gap_mm"] - value["image_mm"] / 2
        if reach > gap:
            yield Caveat(
                "scene.cover",
                f"A common cover of {cover.thickness_mm:.3g} mm throws light back up to {reach:.2g} mm from a port's edge, "
                f"and the objective begins {max(gap, 0.0):.2g} mm away: a separate window, or a thinner one, keeps the veil out.",
            )
