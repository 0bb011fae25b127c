"""The target: what is looked at, how far away, in what, and how it throws light back."""

from typing import Literal

from pydantic import Field, model_validator

from optics.spec import Curve, Spec, quantity


class Target(Spec):
    """[scene.target] A surface in front of the tip: a plane across the axis, or the wall of a bore around it."""

    form: Literal["plane", "bore"] = Field(default="plane", description="a plane across the axis, or a bore around it")
    bore_mm: float | None = quantity(
        "diameter of the bore whose wall is looked at; with form bore", default=None, gt=0, usual=(3.0, 60.0)
    )
    distance_mm: float = quantity(
        "working distance, from the distal face along the axis", gt=0, usual=(2.0, 100.0), common=True
    )
    near_mm: float | None = quantity(
        "near end of the working range, from the distal face; absent: the working distance (a bore: where its wall "
        "comes into view)",
        default=None,
        gt=0,
        usual=(1.0, 50.0),
    )
    far_mm: float | None = quantity(
        "far end of the working range, from the distal face; absent: the working distance",
        default=None,
        gt=0,
        usual=(3.0, 200.0),
    )
    tilt_deg: float = quantity(
        "tilt of the plane about the y axis; its +x side leans away",
        default=0.0,
        source="trade",
        gt=-89.0,
        lt=89.0,
        usual=(-60.0, 60.0),
    )
    medium: Literal["air", "water", "oil"] = Field(
        default="air", description="what lies between the tip and the target"
    )
    detail_contrast: float = quantity(
        "contrast of the detail looked for against its surroundings (Michelson)",
        default=0.3,
        source="trade",
        gt=0,
        le=1,
        usual=(0.05, 1.0),
        common=True,
    )
    reflectance: Curve = quantity("diffuse reflectance over wavelength, 0 to 1")
    specular_share: float = quantity(
        "share of all reflected light that stays near the mirror direction",
        default=0.0,
        source="assumed",
        ge=0,
        le=1,
        usual=(0.0, 0.9),
    )

    @model_validator(mode="after")
    def _whole(self):
        if (self.form == "bore") != (self.bore_mm is not None):
            wanted = "a bore needs it" if self.form == "bore" else "only a bore has one"
            raise ValueError(f"has the form {self.form!r} and bore_mm = {self.bore_mm}; {wanted}")
        if self.form == "bore" and self.tilt_deg != 0:
            raise ValueError(f"has tilt_deg = {self.tilt_deg:g}; only a plane can be tilted")
        if max(self.reflectance.value) > 1:
            raise ValueError(f"has the reflectance {max(self.reflectance.value):g}; it must be at most 1")
        return self
