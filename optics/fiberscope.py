"""Fiberscope: all tables of the design file together, and the rules across them.

The rules are vector predicates with a sentence each: the validator asks them of one design, the
studies of arrays as masks.
"""

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import Annotated, Any, Literal

import numpy as np
from pydantic import BaseModel, Discriminator, Field, model_validator

from optics.body.handling import Handling
from optics.body.passage import Passage
from optics.body.section import Section
from optics.guide import fiber
from optics.guide.bundle import Cable, GuideBundle
from optics.guide.fiber import Fiber
from optics.guide.joint import Joint
from optics.image.bundle import ImageBundle
from optics.image.chip import Chip
from optics.image.lattice import core_count
from optics.image.objective import Objective
from optics.image.tip import Tip
from optics.needs import Needs
from optics.scene.cover import Cover
from optics.scene.ports import AnnulusPorts, CrescentPorts, PlacedPorts, RoundPorts
from optics.scene.target import Target
from optics.source.lamp import Filter, Lamp
from optics.source.launch import Butt, Matched, Rated, Spot, rating_allowed, spot_allowed
from optics.spec import Curve, Spec
from optics.units import um_from_mm
from optics.viewer.camera import Camera
from optics.viewer.eye import Eye


class Source(Spec):
    """Where the light comes from."""

    lamp: Lamp = Field(description="the lamp")
    filter: Filter | None = Field(default=None, description="a filter between lamp and guide; absent: none")
    launch: Annotated[Butt | Spot | Matched | Rated, Discriminator("form")] = Field(
        description="how the light meets the first face"
    )


class Guide(Spec):
    """What carries the light to the tip."""

    cable: Cable | None = Field(default=None, description="a separate light cable before the scope; absent: none")
    joint: Joint | None = Field(default=None, description="from the cable to the scope's own guide")
    fiber: Fiber = Field(description="the fiber of the scope's own guide")
    bundle: GuideBundle = Field(description="the scope's own guide")


class Scene(Spec):
    """What the light meets in front of the tip."""

    ports: Annotated[RoundPorts | AnnulusPorts | CrescentPorts | PlacedPorts, Discriminator("form")] = Field(
        description="where the light leaves the tip"
    )
    cover: Cover | None = Field(default=None, description="a window or spreading lens over the ports; absent: none")
    target: Target = Field(description="what is looked at")


class BundleImage(Spec):
    """[image] form = "bundle": an objective and a coherent bundle."""

    form: Literal["bundle"] = Field(description="a coherent fiber bundle carries the picture")
    objective: Objective = Field(description="the lens at the tip")
    tip: Tip | None = Field(
        default=None, description="a prism, mirror or window in front of the objective; absent: none"
    )
    bundle: ImageBundle = Field(description="the coherent bundle")


class ChipImage(Spec):
    """[image] form = "chip": an objective and a sensor at the tip."""

    form: Literal["chip"] = Field(description="a sensor at the tip")
    objective: Objective = Field(description="the lens at the tip")
    tip: Tip | None = Field(
        default=None, description="a prism, mirror or window in front of the objective; absent: none"
    )
    chip: Chip = Field(description="the sensor at the tip")


class CameraViewer(Spec):
    """[viewer] form = "camera"."""

    form: Literal["camera"] = Field(description="a camera looks at the bundle's face")
    camera: Camera = Field(description="the camera and its relay lens")


class EyeViewer(Spec):
    """[viewer] form = "eye"."""

    form: Literal["eye"] = Field(description="an eye looks through an eyepiece")
    eye: Eye = Field(description="the eyepiece")


class Body(Spec):
    """What holds it all and must pass."""

    section: Section = Field(description="the section of the insertion tube")
    passage: Passage | None = Field(default=None, description="what the scope must pass; absent: nothing asked")
    handling: Handling | None = Field(
        default=None, description="how the tube is bent and treated; absent: nothing asked"
    )


class Fiberscope(Spec):
    """One design, every table of the file, in the order of the light."""

    name: str = Field(min_length=1, description="of the design")
    setting: Literal["industrial", "clinical"] = Field(description="where it is used: decides the cautions shown")
    note: str = Field(default="", description="one line")
    source: Source = Field(description="lamp and launch")
    guide: Guide = Field(description="cable, joint, fiber and bundle")
    scene: Scene | None = Field(default=None, description="ports and target; absent: a bare light guide")
    image: Annotated[BundleImage | ChipImage, Discriminator("form")] | None = Field(
        default=None, description="objective and bundle, or a chip; absent: none"
    )
    viewer: Annotated[CameraViewer | EyeViewer, Discriminator("form")] | None = Field(
        default=None, description="camera or eye; absent: none"
    )
    body: Body | None = Field(default=None, description="section, passage, handling; absent: not asked")
    needs: Needs = Field(default_factory=Needs, description="what the job asks for")

    @model_validator(mode="after")
    def _rules(self):
        for said in broken_tables(self):
            raise ValueError(said)
        known = dict(leaves(self))
        for rule in RULES:
            values = tuple(known.get(path) for path in rule.paths)
            if None not in values and SOLVE not in values and not np.all(rule.holds(*values)):
                raise ValueError(rule.broken(values))
        return self


@dataclass(frozen=True, slots=True)
class Rule:
    """A rule across fields: the paths it reads, the predicate over their values, and what to say (of the first `shown`)."""

    paths: tuple[str, ...]
    holds: Callable[..., Any]
    sentence: str
    shown: int = 2

    def broken(self, values: tuple[Any, ...]) -> str:
        """The sentence, with the values of one design."""
        pairs = zip(self.paths[: self.shown], values)
        said = " and ".join(
            f"{path} is {value if isinstance(value, str) else format(value, 'g')}" for path, value in pairs
        )
        return f"{said}; {self.sentence}."


LEAST_CORES = 7
LARGEST_SPREAD = 0.98
SOLVE = "solve"  # stands for a diameter that the section decides
COMPARISONS = {"below": np.less, "at most": np.less_equal}
LAMP = ("source.lamp.emitter_mm", "source.lamp.cone_na")
RULES = (
    Rule(
        (
            "source.launch.spot_mm",
            "source.launch.cone_na",
            *LAMP,
            "source.launch.transmission",
            "source.launch.profile",
        ),
        spot_allowed,
        "such a spot is brighter than its lamp allows (radiance is conserved): widen the spot or its cone, "
        "or take a brighter lamp",
    ),
    Rule(
        (
            "source.launch.rated_lm",
            "source.lamp.flux_lm",
            *LAMP,
            "source.launch.reference_diameter_mm",
            "source.launch.reference_na",
        ),
        rating_allowed,
        "the rating is brighter than the lamp allows (radiance is conserved): it must be at most the lamp's lumens "
        "times the guide's etendue over the lamp's",
    ),
    *(
        Rule((f"{table}.{field}", f"{table}.{other}"), COMPARISONS[comparison], said)
        for table in ("guide.cable.fiber", "guide.fiber")
        for field, other, comparison, said in fiber.RULES
    ),
    Rule(
        ("guide.bundle.exit_mm", "guide.bundle.diameter_mm", "guide.fiber.na"),
        lambda face, bundle, na: na * bundle <= 0.97 * np.asarray(face),
        "such a taper would need an exit NA above 0.97, which etendue forbids in air: widen the exit face",
    ),
    Rule(
        ("scene.cover.spread_na", "guide.fiber.na"),
        lambda spread, na: spread + na < LARGEST_SPREAD,
        f"the guide's NA and the spread together must stay below {LARGEST_SPREAD:g}: no light leaves beyond 90 degrees",
    ),
    Rule(
        ("guide.bundle.diameter_mm", "guide.fiber.fiber_um"),
        lambda bundle, fiber_um: um_from_mm(bundle) >= fiber_um,
        "the bundle must hold at least one fiber",
    ),
    Rule(
        ("scene.ports.offset_mm", "scene.ports.count", "guide.bundle.diameter_mm"),
        lambda offset, count, bundle: (
            (np.asarray(count) < 2)
            | (2 * offset * np.sin(np.pi / np.maximum(count, 2)) >= bundle / np.sqrt(count) * (1 - 1e-9))
        ),
        "the ports overlap each other there: move them out",
        shown=1,
    ),
    Rule(
        ("scene.ports.offset_mm", "scene.ports.count", "guide.bundle.diameter_mm", "image.bundle.diameter_mm"),
        lambda offset, count, bundle, image: 2 * np.asarray(offset) >= (bundle / np.sqrt(count) + image) * (1 - 1e-9),
        "the ports overlap the image bundle there: move them out",
        shown=1,
    ),
    Rule(
        ("guide.bundle.diameter_mm", "scene.ports.ports.diameter_mm", "guide.bundle.packing_fraction"),
        lambda bundle, ports, packing: np.nansum(np.square(ports), axis=-1) >= bundle**2 * packing * (1 - 1e-9),
        "the placed ports together must have room for the guide's fibers",
        shown=1,
    ),
    Rule(("image.bundle.core_um", "image.bundle.pitch_um"), np.less, "the core must be narrower than the pitch"),
    Rule(("image.bundle.na", "image.bundle.core_index"), np.less, "the NA must be below the core index"),
    Rule(
        ("image.bundle.diameter_mm", "image.bundle.pitch_um"),
        lambda bundle, pitch: core_count(diameter_mm=bundle, pitch_um=pitch) >= LEAST_CORES - 1e-9,
        f"an image bundle must have at least {LEAST_CORES} cores",
    ),
    *(
        Rule(
            ("image.objective.focal_mm", "image.objective.f_number", around),
            lambda focal, f_number, width: focal / f_number <= np.asarray(width),
            f"such a pupil (focal length over f-number) is wider than {what}",
            shown=3,
        )
        for around, what in (
            ("body.section.objective_barrel_mm", "the objective's barrel"),
            ("body.section.outer_diameter_mm", "the tip"),
        )
    ),
    Rule(
        ("image.bundle.diameter_mm", "viewer.camera.relay_magnification", "viewer.camera.sensor_mm"),
        lambda bundle, relay, sensor: np.asarray(bundle) * relay <= sensor,
        "the camera's sensor cannot cover the bundle's picture: a smaller relay magnification or a larger sensor",
        shown=3,
    ),
    Rule(
        ("image.objective.focus_mm", "image.objective.focal_mm"),
        np.greater,
        "the focus must lie beyond the focal length",
    ),
    Rule(
        ("scene.target.near_mm", "scene.target.distance_mm"),
        np.less_equal,
        "the near end must be at most the working distance",
    ),
    Rule(
        ("scene.target.distance_mm", "scene.target.far_mm"),
        np.less_equal,
        "the far end must be at least the working distance",
    ),
    Rule(
        ("body.section.wall_mm", "body.section.outer_diameter_mm"),
        lambda wall, outer: 2 * np.asarray(wall) < outer,
        "the walls leave no lumen",
    ),
)


def broken_tables(fiberscope: Fiberscope) -> Iterator[str]:
    """Tables that cannot stand together, one sentence each."""
    lamp, guide = fiberscope.source.lamp, fiberscope.guide
    if (lamp.flux_lm is None) == (lamp.flux_w is None):
        yield "source.lamp must state its flux once, as flux_lm or as flux_w"
    if lamp.flux_lm is None and fiberscope.source.launch.form == "rated":
        yield "source.launch.form is 'rated', which needs source.lamp.flux_lm"
    if (guide.cable is None) != (guide.joint is None):
        yield f"guide.{'joint' if guide.cable else 'cable'} is missing; a cable and the joint to it come together"
    solves = [guide.bundle.diameter_mm, getattr(getattr(fiberscope.image, "bundle", None), "diameter_mm", None)].count(
        SOLVE
    )
    if solves and (fiberscope.body is None or fiberscope.body.section.outer_diameter_mm == SOLVE):
        yield "body.section.outer_diameter_mm must be a number where a part's diameter is to be solved for"
    if solves > 1:
        yield "guide.bundle.diameter_mm and image.bundle.diameter_mm cannot both be solved for: give one of them"
    if guide.bundle.exit_tilt_deg > 0 and fiberscope.scene is not None:
        ports = fiberscope.scene.ports
        own = [getattr(ports, "tilt_deg", 0.0), *(port.tilt_deg for port in getattr(ports, "ports", ()))]
        if ports.form not in ("round", "placed") or max(own) > 0:
            yield "guide.bundle.exit_tilt_deg is given; it needs round ports without a tilt of their own"
    if fiberscope.image is not None and fiberscope.scene is None:
        yield "scene is missing; an image needs a target to look at"
    if fiberscope.image is not None and fiberscope.image.form == "bundle" and fiberscope.viewer is None:
        yield "viewer is missing; an image bundle needs a camera or an eye behind it"
    if fiberscope.viewer is not None and (fiberscope.image is None or fiberscope.image.form == "chip"):
        yield "viewer is given, but there is no image bundle to look at"


def leaves(spec: BaseModel, path: str = "") -> Iterator[tuple[str, Any]]:
    """(dotted path, value) of every leaf: numbers, texts, None, curves; lists of tables as tuples per field.

    >>> from optics.guide.bundle import GuideBundle, Bend
    >>> bundle = GuideBundle(diameter_mm=2.0, length_m=1.0, packing_fraction=0.8, bends=[Bend(radius_mm=30.0, angle_deg=90.0)])
    >>> dict(leaves(bundle))["bends.radius_mm"]
    (30.0,)
    """
    for name in type(spec).model_fields:
        value, at = getattr(spec, name), f"{path}.{name}" if path else name
        if isinstance(value, Curve):
            yield at, value
        elif isinstance(value, BaseModel):
            yield from leaves(value, at)
        elif isinstance(value, tuple):
            for field in type(value[0]).model_fields if value else ():
                yield f"{at}.{field}", tuple(getattr(item, field) for item in value)
        else:
            yield at, value


# Forms of the tagged tables, and the starting values that a change of form fills in.
FORMS: dict[str, dict[str, tuple[type[Spec], dict[str, Any]]]] = {
    "source.launch": {
        "butt": (Butt, {"gap_mm": 0.2}),
        "spot": (Spot, {"spot_mm": 3.0, "cone_na": 0.5, "transmission": 0.8}),
        "matched": (Matched, {"transmission": 0.8}),
        "rated": (Rated, {"rated_lm": 50.0, "reference_diameter_mm": 3.0, "reference_na": 0.57}),
    },
    "scene.ports": {
        "round": (RoundPorts, {"count": 2}),
        "annulus": (AnnulusPorts, {}),
        "crescent": (CrescentPorts, {}),
        "placed": (PlacedPorts, {"ports": [{"x_mm": side * 1.8, "y_mm": 0.0, "diameter_mm": 1.5} for side in (1, -1)]}),
    },
    "scene.target": {
        "plane": (Target, {}),
        "bore": (Target, {"bore_mm": 20.0}),
    },
    "image": {
        "bundle": (BundleImage, {"bundle": {"preset": "leached_glass_10um", "diameter_mm": 1.0, "length_m": 1.5}}),
        "chip": (ChipImage, {"chip": {"preset": "color_1um75"}}),
    },
    "viewer": {
        "camera": (CameraViewer, {"camera": {"preset": "mono_3um45"}}),
        "eye": (EyeViewer, {"eye": {"preset": "eyepiece_25mm"}}),
    },
}

# What a change of one form means for another table: a chip needs no viewer, a bundle needs one.
COMPANIONS: dict[tuple[str, str], dict[str, dict[str, Any] | None]] = {
    ("image.form", "chip"): {"viewer": None},
    ("image.form", "bundle"): {"viewer": {"form": "camera", "camera": {"preset": "mono_3um45"}}},
}
