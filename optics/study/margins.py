"""How sure a design is: its tolerances drawn many times through the chain, how often each need is met, and what decides.

Every sample is a whole design that goes through `evaluate`, its section solved anew where a diameter changes, so
what tolerances do to ports and fit is counted too. Values vary each on its own.
"""

import numpy as np

from optics.chain.columns import Columns
from optics.chain.evaluate import evaluate
from optics.needs import Needs, need_margin
from optics.presets import Design
from optics.spec import OutOfRange
from optics.study.margins_aging import Aged, aged_columns
from optics.study.margins_answer import Causes, Condition, Distribution, Driver, Margins, NeedOdds, Tightened
from optics.study.margins_causes import binomial_error, halved, halving_gains, variance_shares
from optics.study.margins_draw import applied, broken_rules, drawn
from optics.study.margins_ranges import Tolerance, nominal_columns, tolerances
from optics.viewer.detail import PARTS

SAMPLES, SEED = 2000, 0
FEWEST, MOST = 100, 100_000
AT_ONCE = 2048  # samples whose spectra are held at a time
LEAST_SPREAD = 1e-9  # relative; less is rounding
QUANTILES = (0.05, 0.25, 0.5, 0.75, 0.95)
NUMBERS = {  # headline numbers, in the order of the light, and the chain's name of each
    "delivered_lm": "delivered_lm",
    "color_temperature_k": "color_temperature_k",
    "color_rendering_index": "color_rendering_index",
    "target_center_lux": "center_lux",
    "target_mean_lux": "mean_lux",
    "target_min_lux": "min_lux",
    "evenness": "evenness",
    "target_uva_w_m2": "uva_w_m2",
    "resolved_lp_mm": "resolved_lp_mm",
    "smallest_gap_mm": "smallest_gap_mm",
    "smallest_line_mm": "smallest_line_mm",
    "field_of_view_deg": "field_of_view_deg",
    "frame_hz": "frame_hz",
    "outer_diameter_mm": "outer_diameter_mm",
    "bend_radius_mm": "bend_radius_mm",
    "rigid_tip_mm": "rigid_tip_mm",
}
FINEST = ("smallest_gap_mm", "smallest_line_mm")  # no number where nothing is resolved: worse than any


def margins(
    design: Design,
    *,
    ranges: tuple[Tolerance, ...] | None = None,
    samples: int = SAMPLES,
    seed: int = SEED,
    aging: Aged | None = None,
) -> Margins:
    """How often a design meets its needs within its tolerances (absent: those of its presets), and what decides.

    Raises OutOfRange: no tolerances; samples outside 100 to 100,000; tolerances that leave no design that can exist.
    """
    if not FEWEST <= samples <= MOST:
        raise OutOfRange(f"--samples is {samples}; it must be from {FEWEST:,} to {MOST:,}.")
    ranges = tolerances(design) if ranges is None else ranges
    if not ranges:
        raise OutOfRange("The design states no tolerances; give some with --tolerance path=low:high.")
    needs, nominal = design.fiberscope.needs, nominal_columns(design.fiberscope)
    found = drawn(nominal, ranges, samples, seed)
    table = applied(nominal, ranges, found.values)
    numbers, plain = numbers_of(table), numbers_of(nominal)
    new = _condition(needs, plain, numbers)
    causes = _causes(ranges, found.values, numbers, needs, new)
    tighten, because = _tighten(nominal, ranges, found.values, numbers, needs)
    worn = None
    if aging is not None:
        plain, numbers = (numbers_of(aged_columns(designs, aging, nominal)) for designs in (nominal, table))
        worn = _condition(needs, plain, numbers)
    name = design.fiberscope.name
    return Margins(name, samples, seed, found, ranges, new, causes, tighten, because, aging, worn)


def numbers_of(table: Columns) -> dict[str, np.ndarray]:
    """The headline numbers of every design, and which part limits it; only a part of the designs is held at a time."""
    parts = []
    for start in range(0, table.count, AT_ONCE):
        figures = evaluate(table.take(np.arange(start, min(start + AT_ONCE, table.count))))
        keep = {**NUMBERS, "limited_by": "limited_by", "passes": "passes"}
        parts.append({name: figures.value[chain] for name, chain in keep.items()})
    return {name: np.concatenate([part[name] for part in parts]) for name in parts[0]}


def met(needs: Needs, numbers: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
    """Whether each need that is set is met, design by design."""
    return {
        name: need_margin(name=name, wanted=np.float64(wanted), got=numbers[name]) >= 0
        for name, wanted in needs.wanted().items()
    }


def _condition(needs: Needs, plain: dict[str, np.ndarray], numbers: dict[str, np.ndarray]) -> Condition:
    odds, count = [], len(numbers["delivered_lm"])
    truth = met(needs, numbers)
    for name, wanted in needs.wanted().items():
        probability, varies = float(truth[name].mean()), _varies(numbers[name])
        error = binomial_error(probability, count) if varies else 0.0
        odds.append(NeedOdds(name, wanted, _finite(plain[name][0]), probability, error, varies))
    both = float(np.logical_and.reduce(list(truth.values())).mean()) if truth else None
    error = None if both is None else binomial_error(both, count) if any(need.varies for need in odds) else 0.0
    limited = numbers["limited_by"]
    parts = {part: float((limited == code).mean()) for code, part in enumerate(PARTS) if (limited == code).any()}
    passes = None if np.isnan(numbers["passes"]).all() else float((numbers["passes"] > 0).mean())
    figures = tuple(
        _distribution(name, plain[name][0], numbers[name]) for name in NUMBERS if not np.isnan(numbers[name]).all()
    )
    return Condition(tuple(odds), both, error, passes, parts, figures)


def _distribution(name: str, nominal: float, found: np.ndarray) -> Distribution:
    missing = np.isnan(found)
    ranked = np.where(missing, np.inf if name in FINEST else -np.inf, found)
    whole = not missing.any()
    marks = np.quantile(ranked, QUANTILES, method="inverted_cdf")
    low, high = np.quantile(found[~missing], (0.005, 0.995), method="inverted_cdf")
    counts = (
        np.histogram(found[~missing], bins=16, range=(low, high))[0] if high - low > LEAST_SPREAD * abs(high) else []
    )
    return Distribution(
        name,
        _finite(nominal),
        float(found.mean()) if whole else None,
        float(found.std(ddof=1)) if whole else None,
        {f"p{round(100 * share):02d}": _finite(mark) for share, mark in zip(QUANTILES, marks)},
        float(missing.mean()),
        tuple(int(count) for count in counts),
    )


def _causes(ranges, values, numbers, needs: Needs, new: Condition) -> tuple[Causes, ...]:
    """What moves the deciding number, then each other need's; without needs: the light."""
    wanted = needs.wanted()
    names = [need.name for need in new.needs if need.varies]
    names.sort(key=lambda name: _clearance(name, wanted[name], numbers[name]))
    if not wanted:
        names = ["delivered_lm" if np.isnan(numbers["target_center_lux"]).all() else "target_center_lux"]
    told = []
    for name in names:
        shares = variance_shares(ranges=ranges, values=values, result=_continuous(name, numbers[name]))
        if shares is None:
            continue
        drivers = sorted(
            (
                Driver(item.path, float(share), float(error), item.low, item.value, item.high, item.basis, item.source)
                for item, share, error in zip(ranges, shares.first_share, shares.standard_error)
            ),
            key=lambda driver: -driver.share,
        )
        soft = float(sum(share for item, share in zip(ranges, shares.first_share) if item.soft))
        told.append(Causes(name, tuple(drivers), shares.together_share, shares.unexplained_share, soft))
    return tuple(told)


def _clearance(name: str, wanted: float, found: np.ndarray) -> float:
    """How many standard deviations the mean lies on the good side of a need: the least of them decides."""
    margin = need_margin(name=name, wanted=np.float64(wanted), got=found)
    margin = np.maximum(margin, -1.0)
    return float(margin.mean() / max(margin.std(), 1e-300))


def _continuous(name: str, found: np.ndarray) -> np.ndarray:
    """A number that stays finite where nothing is resolved: line pairs instead of gaps, 0 for none."""
    return np.where(np.isnan(found), 0.0, 1.0 / np.where(np.isnan(found), 1.0, found)) if name in FINEST else found


def _tighten(nominal, ranges, values, numbers, needs: Needs) -> tuple[Tightened | None, str]:
    """The tolerance whose halving helps most, by a run with it halved on the same draws."""
    truth = met(needs, numbers)
    if not truth:
        return None, "The design sets no needs, so there is nothing to meet more surely."
    of, now = "all needs", np.logical_and.reduce(list(truth.values()))
    if not 0 < now.mean() < 1:
        if now.all():
            return None, "All needs are met in every sample: no tolerance needs tightening."
        open_ones = [name for name, found in truth.items() if 0 < found.mean() < 1]
        if not open_ones:
            never = ", ".join(name for name, found in truth.items() if not found.any())
            return None, f"No tolerance decides: {never} is missed in every sample, so the design itself must change."
        of = min(open_ones, key=lambda name: float(truth[name].mean()))
        now = truth[of]
    gains = halving_gains(ranges=ranges, values=values, met=now)
    best = int(np.argmax(gains))
    if gains[best] <= 0:
        return None, "Halving no single tolerance helps: the nominal design itself falls short."
    item, tried = ranges[best], values.copy()
    tried[:, best] = halved(item, values[:, best])
    table = applied(nominal, ranges, tried)
    exists = ~np.logical_or.reduce([np.zeros(len(now), bool), *(mask for _, mask in broken_rules(table))])
    again = met(needs, numbers_of(table))
    then = np.logical_and.reduce(list(again.values())) if of == "all needs" else again[of]
    step = (then.astype(float) - now)[exists]
    gain, error = float(step.mean()), float(step.std(ddof=1) / np.sqrt(exists.sum()))
    low, high = (float(halved(item, end)) for end in (item.low, item.high))
    said = "" if gain > 2 * error else "The gain is within the sampling error: no single tolerance decides."
    return Tightened(item.path, of, low, high, float(then[exists].mean()), gain, error), said


def _varies(found: np.ndarray) -> bool:
    present = found[~np.isnan(found)]
    return bool(
        present.size > 0 and (present.size < found.size or np.ptp(present) > LEAST_SPREAD * np.abs(present).max())
    )


def _finite(value: float) -> float | None:
    return float(value) if np.isfinite(value) else None
