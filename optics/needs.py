"""What the job asks for, and how far a design is from it, line by line."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from optics.spec import Spec, quantity

AT_MOST = ("smallest_gap_mm", "smallest_line_mm", "outer_diameter_mm", "bend_radius_mm", "rigid_tip_mm")


class Needs(Spec):
    """Limits that the job sets; each is optional. Those in AT_MOST are upper limits, the rest lower ones."""

    smallest_gap_mm: float | None = quantity(
        "the widest gap (bar of a bar pattern) that must be seen", default=None, gt=0, usual=(0.01, 1.0), common=True
    )
    smallest_line_mm: float | None = quantity(
        "the widest single dark line that must be seen", default=None, gt=0, usual=(0.005, 1.0)
    )
    target_center_lux: float | None = quantity(
        "least illuminance at the center of the target", default=None, gt=0, usual=(100.0, 50000.0), common=True
    )
    target_min_lux: float | None = quantity(
        "least illuminance anywhere in the field of view", default=None, gt=0, usual=(10.0, 20000.0)
    )
    evenness: float | None = quantity(
        "least over mean illuminance in the field of view", default=None, ge=0, le=1, usual=(0.0, 0.9)
    )
    target_uva_w_m2: float | None = quantity(
        "least irradiance at 320-400 nm at the center", default=None, gt=0, usual=(1.0, 100.0)
    )
    outer_diameter_mm: float | None = quantity(
        "the widest insertion tube", default=None, gt=0, usual=(0.5, 20.0), common=True
    )
    bend_radius_mm: float | None = quantity(
        "the tube must take a bend as tight as this", default=None, gt=0, usual=(5.0, 200.0)
    )
    rigid_tip_mm: float | None = quantity("the longest rigid tip", default=None, gt=0, usual=(2.0, 50.0))
    field_of_view_deg: float | None = quantity(
        "least full field of view, in the medium", default=None, gt=0, lt=180, usual=(20.0, 120.0)
    )
    frame_hz: float | None = quantity("least number of frames a second", default=None, gt=0, usual=(1.0, 100.0))
    color_rendering_index: float | None = quantity(
        "least color rendering index of the light", default=None, gt=0, le=100, usual=(50.0, 98.0)
    )

    def wanted(self) -> dict[str, float]:
        """The needs that are set, in the order of the light."""
        return {name: value for name, value in self if value is not None}


@dataclass(frozen=True, slots=True)
class Summary:
    """The headline numbers of one design; None where the design has no such part or nothing is resolved."""

    target_center_lux: float | None
    target_mean_lux: float | None
    target_min_lux: float | None
    evenness: float | None
    smallest_gap_mm: float | None
    smallest_line_mm: float | None
    resolved_lp_mm: float | None
    limited_by: str | None
    outer_diameter_mm: float | None
    bend_radius_mm: float | None
    rigid_tip_mm: float | None
    field_of_view_deg: float | None
    needs_met: bool | None


@dataclass(frozen=True, slots=True)
class NeedLine:
    """One need against what the design gives (both in the unit of the name); margin is relative, positive = met."""

    name: str
    wanted: float
    got: float | None
    margin: float | None
    met: bool


def need_margin(*, name: str, wanted: np.ndarray, got: np.ndarray) -> np.ndarray:
    """Relative margin: 1 - got/wanted for an upper limit, got/wanted - 1 for a lower one.

    A number that the design does not have (nan: not resolved, not there) fails without bound.

    >>> float(need_margin(name="outer_diameter_mm", wanted=np.array(6.0), got=np.array(4.5)))
    0.25
    >>> float(need_margin(name="smallest_gap_mm", wanted=np.array(0.1), got=np.array(np.nan)))
    -inf
    """
    ratio = np.asarray(got) / wanted
    margin = 1 - ratio if name in AT_MOST else ratio - 1
    return np.where(np.isnan(margin), -np.inf, margin)


def verdict(needs: Needs, got: Mapping[str, float | None]) -> list[NeedLine]:
    """Each need that is set, with what was reached and the margin."""
    lines = []
    for name, wanted in needs.wanted().items():
        reached = got.get(name)
        margin = float(
            need_margin(name=name, wanted=np.float64(wanted), got=np.float64(np.nan if reached is None else reached))
        )
        lines.append(NeedLine(name, wanted, reached, margin if np.isfinite(margin) else None, margin >= 0))
    return lines
