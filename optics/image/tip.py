"""The viewing tip: a prism or mirror that turns the view, the glass it adds, the light it costs."""

import numpy as np

from optics.spec import Spec, not_negative, quantity, require
from optics.units import Numbers


class Tip(Spec):
    """What sits in front of the objective: a window, a prism, a mirror."""

    view_deg: float = quantity("direction of view: 0 straight ahead, 90 sideways", ge=0, le=180, usual=(0.0, 110.0))
    glass_path_mm: float = quantity("path in glass along the axis", ge=0, usual=(0.0, 6.0))
    index: float = quantity("refractive index of that glass (1: a mirror in air)", ge=1, lt=4, usual=(1.0, 1.9))
    transmission: float = quantity("share of the light that the tip passes", gt=0, le=1, usual=(0.7, 1.0))
    reflections: int | None = quantity(
        "reflections on the way; left out: one where the view is turned, else none", default=None, ge=0, le=6
    )
    added_length_mm: float = quantity("rigid length that the tip adds", ge=0, usual=(0.0, 8.0))


def reduced_path_mm(*, glass_path_mm: Numbers, index: Numbers) -> Numbers:
    """Air path that a flat piece of glass looks like: t/n (paraxial); it adds to the pupil's depth.

    References: closed_form.

    >>> reduced_path_mm(glass_path_mm=3.0, index=1.5)
    2.0
    """
    not_negative(glass_path_mm=glass_path_mm)
    require("index", index, "1 or more", np.asarray(index) >= 1)
    return glass_path_mm / index


def mirror_image(*, view_deg: float, reflections: int | None) -> bool:
    """Whether the picture is a mirror image: after an odd number of reflections.

    None stands for the simplest tip: no reflection straight ahead, one where the view is turned.
    References: closed_form.

    >>> mirror_image(view_deg=90.0, reflections=None), mirror_image(view_deg=45.0, reflections=2)
    (True, False)
    """
    not_negative(view_deg=view_deg)
    return (int(view_deg > 0) if reflections is None else reflections) % 2 == 1
