"""What `size` answers: plain frozen records in the order of the light, and their JSON."""

import dataclasses
import math
from dataclasses import dataclass
from typing import Any

from optics.beam import Step
from optics.needs import NeedLine, Summary
from optics.spec import Caveat


@dataclass(frozen=True, slots=True)
class LightAnswer:
    """The light from lamp to exit face."""

    steps: tuple[Step, ...]
    delivered_lm: float
    delivered_w: float
    transmission: float
    exit_na: float
    color_temperature_k: float
    color_rendering_index: float
    duv_ratio: float  # distance from the black bodies in CIE 1960 u, v; positive is greenish


@dataclass(frozen=True, slots=True)
class TargetAnswer:
    """The light on the target."""

    center_lux: float
    mean_lux: float | None
    min_lux: float | None
    evenness: float | None
    unlit_fraction: float | None
    center_w_m2: float
    field_radius_mm: float | None
    first_lit_mm: float | None
    fully_lit_mm: float | None


@dataclass(frozen=True, slots=True)
class Limit:
    """One part of the way back: its contrast at what is resolved, and what it alone would allow (None: no limit)."""

    name: str
    contrast: float
    limit_lp_mm: float | None


@dataclass(frozen=True, slots=True)
class DetailAnswer:
    """What can be seen and what limits it."""

    ledger: tuple[Limit, ...]
    pitch_at_target_mm: float
    lattice_limit_lp_mm: float
    snr: float | None
    exposure_s: float | None
    near_mm: float
    far_mm: float | None


@dataclass(frozen=True, slots=True)
class FitAnswer:
    """Whether it fits the tube and passes the bore."""

    outer_diameter_mm: float
    lumen_mm: float
    free_area_mm2: float
    light_area_mm2: float
    fiber_count: int
    longest_rigid_tip_mm: float | None
    passes: bool | None
    bend_radius_mm: float
    passable_radius_mm: float | None
    needed_lumen_mm: float

    @property
    def needed_diameter_mm(self) -> float | None:
        """Outer diameter that the parts take, where the tube given is too narrow for them; None where they fit."""
        short = self.needed_lumen_mm - self.lumen_mm
        return self.outer_diameter_mm + short if short > 1e-9 * self.lumen_mm else None


@dataclass(frozen=True, slots=True)
class ExposureLine:
    """One line of the screening of optical radiation; value and limit are in `unit` (None: not assessed, no limit)."""

    name: str
    value: float | None
    unit: str
    limit: float | None
    because: str


@dataclass(frozen=True, slots=True)
class Report:
    """The whole answer for one design."""

    version: str
    design_hash: str
    name: str
    setting: str
    summary: Summary
    light: LightAnswer
    target: TargetAnswer | None
    detail: DetailAnswer | None
    fit: FitAnswer | None
    exposure: tuple[ExposureLine, ...]
    needs: tuple[NeedLine, ...]
    caveats: tuple[Caveat, ...]

    def as_dict(self) -> dict[str, Any]:
        """The JSON of `size`: numbers unrounded, nothing that JSON cannot hold."""
        return {field.name: _plain(getattr(self, field.name)) for field in dataclasses.fields(self)}


def _plain(value: Any) -> Any:
    if isinstance(value, Step):
        return {
            "name": value.name,
            "before_lm": value.before_lm,
            "after_lm": value.after_lm,
            "factor": value.factor,
            "because": value.because,
        }
    if dataclasses.is_dataclass(value):
        return {field.name: _plain(getattr(value, field.name)) for field in dataclasses.fields(value)}
    if isinstance(value, tuple):
        return [_plain(item) for item in value]
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value
