"""Why each step is what it is, in one clause of words with this design's own numbers."""

from collections.abc import Callable, Mapping

from optics.fiberscope import Fiberscope
from optics.guide.packing import core_share
from optics.source.lamp import etendue_mm2_sr
from optics.source.launch import Butt, Matched, Spot, spot_radiance_ratio


def step_reason(name: str, fiberscope: Fiberscope, value: Mapping[str, float]) -> str:
    """The clause that goes with one step of the light."""
    return REASONS[name](fiberscope, value)


def _lamp(scope: Fiberscope, value: Mapping[str, float]) -> str:
    lamp = scope.source.lamp
    cone = "every direction" if lamp.cone_na == 1 else f"a cone of NA {lamp.cone_na:.3g}"
    return f"from a disc of {lamp.emitter_mm:.3g} mm into {cone}, {value['lamp_w']:.3g} W"


def _condenser(scope: Fiberscope, value: Mapping[str, float]) -> str:
    launch = scope.source.launch
    if isinstance(launch, Butt):
        return "no condenser: the emitter stands before the face"
    if isinstance(launch, Spot):
        return f"a condenser passes {launch.transmission:.3g}"
    if isinstance(launch, Matched):
        return f"an ideal condenser of transmission {launch.transmission:.3g}; what exceeds the face's etendue is lost"
    return (
        f"rated {launch.rated_lm:.4g} lm out of {launch.reference_diameter_mm:.3g} mm of NA {launch.reference_na:.3g}, "
        "rescaled by etendue"
    )


def _cone(scope: Fiberscope, value: Mapping[str, float]) -> str:
    fill, takes = value["launch_na"], value["first_face_na"]
    if fill <= takes:
        return f"the launch fills NA {fill:.3g}, the fiber takes {takes:.3g}"
    return f"the launch fills NA {fill:.3g}, the fiber takes {takes:.3g}: a cone of {takes:.3g} would waste nothing"


def least_spot_mm(scope: Fiberscope) -> float:
    """The smallest spot that the lamp's radiance allows in the launch's own cone."""
    lamp, launch = scope.source.lamp, scope.source.launch
    ratio = spot_radiance_ratio(
        transmission=launch.transmission,
        lamp_etendue_mm2_sr=etendue_mm2_sr(diameter_mm=lamp.emitter_mm, na=lamp.cone_na),
        spot_mm=launch.spot_mm,
        cone_na=launch.cone_na,
        gaussian=launch.profile == "gaussian",
    )
    return float(launch.spot_mm * ratio**0.5)


def _spot(scope: Fiberscope, value: Mapping[str, float]) -> str:
    face = scope.guide.cable.diameter_mm if scope.guide.cable else scope.guide.bundle.diameter_mm
    launch = scope.source.launch
    if isinstance(launch, Spot):
        least = least_spot_mm(scope)
        hint = f": a spot within {face:.3g} mm would waste nothing"
        if launch.spot_mm <= face and launch.profile == "top_hat":
            hint = ""
        elif least > face:
            hint = f": the lamp's radiance allows none below {least:.3g} mm in this cone"
        return f"a spot of {launch.spot_mm:.3g} mm on a face of {face:.3g} mm{hint}"
    if isinstance(launch, Butt):
        return f"an emitter of {scope.source.lamp.emitter_mm:.3g} mm before a face of {face:.3g} mm, gap {launch.gap_mm:.3g} mm"
    return "the light just fills the face"


def _face(scope: Fiberscope, value: Mapping[str, float]) -> str:
    fiber = scope.guide.cable.fiber if scope.guide.cable else scope.guide.fiber
    return f"reflection from air into index {fiber.core_index:.4g}"


def _guide_loss(scope: Fiberscope, value: Mapping[str, float]) -> str:
    return f"{scope.guide.bundle.length_m:.3g} m, steep rays go farther, by color"


def _bends(scope: Fiberscope, value: Mapping[str, float]) -> str:
    bends = ", ".join(
        f"{bend.repeats} x {bend.angle_deg:.3g} deg at {bend.radius_mm:.3g} mm"
        if bend.repeats > 1
        else f"{bend.angle_deg:.3g} deg at {bend.radius_mm:.3g} mm"
        for bend in scope.guide.bundle.bends
    )
    return f"{bends}: steep rays leave, the rest widens"


def _share(scope: Fiberscope, cable: bool) -> str:
    fiber = scope.guide.cable.fiber if cable else scope.guide.fiber
    share = core_share(core_um=fiber.core_um, fiber_um=fiber.fiber_um)
    return f"core {fiber.core_um:.4g} of {fiber.fiber_um:.4g} um, {share:.3g} of the fiber's area"


REASONS: dict[str, Callable[[Fiberscope, Mapping[str, float]], str]] = {
    "lamp": _lamp,
    "filter": lambda scope, value: "what the filter passes of the lamp's spectrum",
    "condenser": _condenser,
    "cone": _cone,
    "spot": _spot,
    "input face": _face,
    "cable packing": lambda scope, value: f"fibers fill {scope.guide.cable.packing_fraction:.3g} of the cable's face",
    "cable core share": lambda scope, value: _share(scope, True),
    "cable attenuation": lambda scope, value: f"{scope.guide.cable.length_m:.3g} m of cable, by color and angle",
    "cable exit face": lambda scope, value: "reflection where the cable ends",
    "joint": lambda scope, value: (
        f"{scope.guide.cable.diameter_mm:.3g} mm onto {scope.guide.bundle.diameter_mm:.3g} mm, NA "
        f"{scope.guide.cable.fiber.na:.3g} onto {scope.guide.fiber.na:.3g}, gap {scope.guide.joint.gap_mm:.3g} mm"
    ),
    "guide input face": lambda scope, value: "reflection into the scope's own guide",
    "packing": lambda scope, value: f"fibers fill {scope.guide.bundle.packing_fraction:.3g} of the bundle's face",
    "core share": lambda scope, value: _share(scope, False),
    "broken fibers": lambda scope, value: f"{scope.guide.bundle.broken_fraction:.3g} of the fibers are broken",
    "attenuation": _guide_loss,
    "wall reflections": lambda scope, value: (
        f"each reflection at the wall loses {scope.guide.bundle.bounce_loss_fraction:.2g} of its light"
    ),
    "bends": _bends,
    "exit face": lambda scope, value: (
        f"reflection where the guide ends; the light leaves within NA {value['exit_na']:.3g}"
    ),
    "spreading": lambda scope, value: f"the cover spreads each ray by NA {scope.scene.cover.spread_na:.3g}",
    "cover": lambda scope, value: "two more faces of the cover",
}


def limit_reason(part: str | None) -> str:
    """What it means that a part limits the detail."""
    return LIMITS.get(part or "", "there is no image")


LIMITS = {
    "light": "more light, a longer exposure or a lower threshold would show finer detail",
    "objective": "a wider aperture would show finer detail",
    "focus": "the target lies outside the sharpest distance",
    "lattice": "a finer pitch, or a longer focal length with less field, would show finer detail",
    "crosstalk": "neighboring cores share their light: a higher NA or more uneven cores would show finer detail",
    "camera": "smaller pixels on the bundle's face, or less read noise, would show finer detail",
    "eye": "a shorter eyepiece focal length would show finer detail",
}
