"""What the study of margins says: how often needs are met, how numbers spread, what moves them, what to tighten."""

import dataclasses
from dataclasses import dataclass
from typing import Any

from optics.study.margins_aging import Aged
from optics.study.margins_draw import Drawn
from optics.study.margins_ranges import Tolerance
from optics.units import AnyUnit

DISTRIBUTION = (
    "Each value from a triangle between its limits with the peak at the nominal value, on its own; a curve by one factor on "
    "all of it; Latin hypercube."
)
METHOD = (
    "First-order shares of the variance (Sobol' 1993) from orthogonal polynomials fitted to the samples (Sudret 2008). The "
    "standard errors of the probabilities are those of independent samples, which a Latin hypercube does not exceed."
)


@dataclass(frozen=True, slots=True)
class NeedOdds:
    """How often one need is met; wanted and value (nominal) in the unit of the name."""

    name: str
    wanted: float
    value: float | None
    probability: float
    standard_error: float
    varies: bool


@dataclass(frozen=True, slots=True)
class Distribution:
    """How one headline number spreads, in the unit of its name; None where it is beyond all bounds (nothing resolved)."""

    name: str
    value: float | None
    mean: AnyUnit | None
    standard_deviation: AnyUnit | None
    quantiles: dict[str, float | None]
    missing_share: float
    histogram: tuple[int, ...]  # counts in equal steps between the 0.5 and the 99.5 % quantile


@dataclass(frozen=True, slots=True)
class Condition:
    """What the samples say of one condition, new or aged."""

    needs: tuple[NeedOdds, ...]
    all_needs: AnyUnit | None
    all_needs_standard_error: AnyUnit | None
    passes: AnyUnit | None  # share of the samples that pass the bore; None where nothing is to be passed
    limited_by: dict[str, float]
    figures: tuple[Distribution, ...]


@dataclass(frozen=True, slots=True)
class Driver:
    """The share of one tolerance in the variance of a number, and what that tolerance rests on."""

    path: str
    share: float
    standard_error: float
    low: float
    value: float
    high: float
    basis: str
    source: str


@dataclass(frozen=True, slots=True)
class Causes:
    """What moves one number, largest first; `soft_share`: of tolerances that are only assumed or remembered."""

    of: str
    drivers: tuple[Driver, ...]
    together_share: float
    unexplained_share: float
    soft_share: float


@dataclass(frozen=True, slots=True)
class Tightened:
    """The tolerance whose halving helps most, and the run with it halved: of all needs, or of the one named."""

    path: str
    of: str
    low: float
    high: float
    probability: float
    gain_probability: float
    standard_error: float


@dataclass(frozen=True, slots=True)
class Margins:
    """The whole study of one design."""

    name: str
    samples: int
    seed: int
    drawn: Drawn
    ranges: tuple[Tolerance, ...]
    new: Condition
    causes: tuple[Causes, ...]  # of the deciding number first, then of every other need that varies
    tighten: Tightened | None
    tighten_because: str
    aging: Aged | None
    aged: Condition | None

    def as_dict(self) -> dict[str, Any]:
        """Plain numbers, texts and lists, for JSON."""
        decides = self.causes[0] if self.causes else None
        return {
            "name": self.name,
            "samples": self.samples,
            "seed": self.seed,
            "distribution": DISTRIBUTION,
            "method": METHOD,
            "redrawn": {
                "count": self.drawn.redrawn,
                "because": [{"rule": said, "count": count} for said, count in self.drawn.because],
            },
            **dataclasses.asdict(self.new),
            "drivers_of": decides.of if decides else None,
            "drivers": [dataclasses.asdict(driver) for driver in decides.drivers] if decides else [],
            "together_share": decides.together_share if decides else None,
            "unexplained_share": decides.unexplained_share if decides else None,
            "soft_share": decides.soft_share if decides else None,
            "soft": [item.path for item in self.ranges if item.soft],
            "causes": [dataclasses.asdict(item) for item in self.causes],
            "tighten": dataclasses.asdict(self.tighten) if self.tighten else None,
            "tighten_because": self.tighten_because,
            "tolerances": [dataclasses.asdict(item) for item in self.ranges],
            "aged": {"condition": dataclasses.asdict(self.aging), **dataclasses.asdict(self.aged)}
            if self.aged
            else None,
        }
