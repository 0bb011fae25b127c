"""What bending, pushing and heat ask of the tube: strain and least radius part by part, slides, service temperatures."""

from dataclasses import dataclass

import numpy as np

from optics.body.handling import (
    PLASTIC_DIAMETERS,
    STERILIZATION_C,
    bend_strain,
    least_bend_radius_mm,
    plastic_bend_radius_mm,
    slide_mm,
)
from optics.body.passage import push_factor, steered_height_mm
from optics.chain.columns import columns
from optics.chain.fit import fit
from optics.chain.target import field_of_view
from optics.fiberscope import Fiberscope
from optics.report.view_body import section_view
from optics.report.view_fit import numbered
from optics.units import mm_from_um, um_from_mm

FRICTION = (0.2, 0.3, 0.4)  # of polymer coverings on metal and moist walls, common practice ("trade")
TURNS = (1, 2, 3, 4, 6)
STEAM_C = STERILIZATION_C["steam"]
RULE = "plastic fibers"


@dataclass(frozen=True, slots=True)
class Bent:
    """A part that bends with the tube: what of it bends as one, its strain at the asked radius, the least radius it allows.

    `strain` None: no radius is asked, or the part is asked by rule, not by strain.
    """

    name: str
    bends_as: str
    diameter_um: float | None
    strain: float | None
    allowed_strain: float | None
    least_radius_mm: float
    decides: bool


@dataclass(frozen=True, slots=True)
class BendingView:
    """Every part at the radius that is asked of the tube; which part decides the least."""

    parts: tuple[Bent, ...]
    asked_radius_mm: float | None
    asked_by: str
    least_radius_mm: float
    steered_radius_mm: float | None
    steered_deg: float | None
    steered_height_mm: float | None


def bending_view(fiberscope: Fiberscope) -> BendingView | None:
    """Strain of guide fibers and image bundle, and the tube's own radius. None without a body."""
    if fiberscope.body is None:
        return None
    fiberscope = numbered(fiberscope)
    fiber, handling = fiberscope.guide.fiber, fiberscope.body.handling
    asked, by = _asked(fiberscope)
    found = [("guide fibers", "each fiber", fiber.fiber_um, fiber.allowed_strain)]
    image = fiberscope.image
    if image is not None and image.form == "bundle":
        bundle = image.bundle
        whole = float(um_from_mm(bundle.diameter_mm)) if bundle.one_rod else bundle.pitch_um
        found.append(("image bundle", "one rod" if bundle.one_rod else "each core", whole, bundle.allowed_strain))
    rows = [
        (name, as_what, um, None if asked is None else float(bend_strain(fiber_um=um, bend_radius_mm=asked)), allowed,
         float(least_bend_radius_mm(fiber_um=um, allowed_strain=allowed)))
        for name, as_what, um, allowed in found
    ]  # fmt: skip
    if handling is not None:
        rows.append(("tube", "as its handling asks", None, None, None, handling.bend_radius_mm))
    least = max(row[-1] for row in rows)
    if fiber.material == "plastic":  # a rule beside the strain, no part of the least radius
        radius = float(
            plastic_bend_radius_mm(fiber_mm=mm_from_um(fiber.fiber_um), diameters_factor=PLASTIC_DIAMETERS[1])
        )
        rows.append((RULE, f"rule of {PLASTIC_DIAMETERS[1]:g} diameters", fiber.fiber_um, None, None, radius))
    parts = tuple(Bent(*row, decides=row[-1] == least and row[0] != RULE) for row in rows)
    steered = fiberscope.body.passage.bending if fiberscope.body.passage else None
    if steered is None:
        return BendingView(parts, asked, by, least, None, None, None)
    body = body_numbers(fiberscope)
    rigid = body["rigid_tip_mm"] if np.isfinite(body["rigid_tip_mm"]) else 0.0
    height = steered_height_mm(
        bending_radius_mm=steered.radius_mm,
        angle_deg=steered.angle_deg,
        rigid_tip_mm=rigid,
        tube_mm=body["outer_diameter_mm"],
    )
    return BendingView(parts, asked, by, least, steered.radius_mm, steered.angle_deg, float(height))


def _asked(fiberscope: Fiberscope) -> tuple[float | None, str]:
    """The bend radius that is asked, and by what."""
    if fiberscope.needs.bend_radius_mm is not None:
        return fiberscope.needs.bend_radius_mm, "needs"
    if fiberscope.body.handling is not None:
        return fiberscope.body.handling.bend_radius_mm, "handling"
    return None, ""


def body_numbers(fiberscope: Fiberscope) -> dict[str, float]:
    """The chain's numbers of the body of one design whose diameters are numbers."""
    table = columns([fiberscope])
    return {name: float(found[0]) for name, found in fit(table, field_of_view(table)["image_mm"])[0].items()}


@dataclass(frozen=True, slots=True)
class Slide:
    """How far a group of parts lies off the tube's axis at most, and how far it then slides in a bend."""

    name: str
    offset_mm: float
    slide_mm: float


def slides(fiberscope: Fiberscope, bend_deg: float) -> tuple[Slide, ...]:
    """Slide of each group of parts in a bend toward its side, largest first."""
    view = section_view(numbered(fiberscope))
    if view is None:
        return ()
    names = {"image": "image bundle", "light": "light fibers", "channel": "channel", "wire": "wires"}
    far = {
        name: max((float(np.hypot(part.x_mm, part.y_mm)) for part in view.parts if part.kind == kind), default=None)
        for kind, name in names.items()
    }
    found = [
        Slide(name, away, float(slide_mm(offset_mm=away, bend_deg=bend_deg)))
        for name, away in far.items()
        if away is not None
    ]
    return tuple(sorted(found, key=lambda slide: -slide.offset_mm))


@dataclass(frozen=True, slots=True)
class Heat:
    """What a part stands against what it meets; steam: whether it may be sterilized with steam."""

    name: str
    stands_c: float
    meets_c: float
    stands_steam: bool
    stands: bool


def heats(fiberscope: Fiberscope) -> tuple[Heat, ...]:
    """Temperature and sterilization part by part; empty where no handling is asked."""
    handling = fiberscope.body.handling if fiberscope.body else None
    if handling is None:
        return ()
    meets, steam = handling.highest_temperature_c, handling.sterilization == "steam"
    meets = max(meets, STERILIZATION_C[handling.sterilization])
    fiber, image = fiberscope.guide.fiber, fiberscope.image
    found = [("guide fibers", fiber.highest_temperature_c, fiber.steam)]
    if image is not None and image.form == "bundle":
        stands = image.bundle.highest_temperature_c
        found.append(("image bundle", stands, stands >= STEAM_C))
    return tuple(Heat(name, c, meets, steams, c >= meets and (steams or not steam)) for name, c, steams in found)


@dataclass(frozen=True, slots=True)
class Push:
    """Push force behind so many bends like the bore's, over that without a bend, for each friction of FRICTION."""

    bends_count: int
    bend_deg: float
    factors: tuple[float, ...]


def pushes(bend_deg: float) -> tuple[Push, ...]:
    """How the push force grows over several bends in a row: an orientation, by the capstan law."""
    return tuple(
        Push(
            count,
            count * bend_deg,
            tuple(float(push_factor(friction_factor=mu, bend_deg=count * bend_deg)) for mu in FRICTION),
        )
        for count in TURNS
    )
