"""When nothing does the job: which need to relax, and by how much, so that a candidate does."""

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Protocol

import numpy as np

from optics.chain.axes import evaluate_possible
from optics.chain.columns import Columns
from optics.chain.evaluate import Figures
from optics.needs import AT_MOST, Needs
from optics.report.verdict import NAMES, UNITS
from optics.study.pick_needs import BESIDES, number, spoken
from optics.study.smallest_change import Change
from optics.units import unit_of

BORE, OUTER = "body.passage.bore_mm", "body.section.outer_diameter_mm"
DIGITS = 6
PASSING = {"fits", "enters", "tip", "elbow", "passes"}
WIDER = 4.0  # the widest bore tried, over the one asked for


@dataclass(frozen=True, slots=True)
class Relaxation:
    """The candidate that is nearest, and what must be relaxed for it: one need if one is enough, else as few as it lacks."""

    relax: tuple[Change, ...]
    set: dict[str, Any]
    words: str


class _Found(Protocol):
    table: Columns

    def settings(self, row: int) -> dict[str, Any]: ...


def nearest_relaxation(
    found: _Found, needs: Needs, figures: Figures, margin: Mapping[str, np.ndarray], short: np.ndarray
) -> Relaxation | None:
    """What to relax; None where no number would do (nothing is resolved anywhere, a material does not stand the job).

    Candidates that lack one thing come first, then those that lack least in all; each is tried until one can be relaxed.
    """
    lacks = np.sum([each < 0 for each in margin.values()], axis=0)
    order = np.lexsort((short, lacks > 1, ~np.isfinite(short)))
    for row in order[:50]:
        relaxed = _relaxed(found.table, needs, figures, margin, int(row))
        if relaxed:
            return Relaxation(relaxed, found.settings(int(row)), "; ".join(_said(change) for change in relaxed) + ".")
    return None


def _relaxed(table: Columns, needs: Needs, figures: Figures, margin, row: int) -> tuple[Change, ...]:
    """The relaxed limits of one candidate; empty where some cannot be."""
    lacking = [name for name, each in margin.items() if each[row] < 0]
    changes: dict[str, Change] = {}
    for name in lacking:
        if name in BESIDES:
            continue
        got = float(number(figures, name)[row])
        if not math.isfinite(got) or got <= 0:
            return ()
        changes[f"needs.{name}"] = Change(f"needs.{name}", needs.wanted()[name], outward(got, name in AT_MOST))
    one = table.take(np.array([row]))
    if "fits" in lacking:
        outer = float(one[OUTER][0])
        if math.isnan(outer):
            return ()
        wider = float(figures["needed_lumen_mm"][row]) + 2 * float(one["body.section.wall_mm"][0])
        changes[OUTER] = Change(OUTER, outer, outward(wider, True))
        one = one.replaced({OUTER: np.array([changes[OUTER].after])})
        if needs.outer_diameter_mm is not None and changes[OUTER].after > needs.outer_diameter_mm:
            path = "needs.outer_diameter_mm"
            changes[path] = Change(path, needs.outer_diameter_mm, changes[OUTER].after)
    if PASSING & set(lacking):
        bore = _bore(one)
        if bore is None:
            return ()
        if bore > float(one[BORE][0]):
            changes[BORE] = Change(BORE, float(one[BORE][0]), bore)
    return () if {"heat", "steam"} & set(lacking) else tuple(changes.values())


def _bore(one: Columns) -> float | None:
    """The least bore that this design passes, from the one it has on; None if none does."""
    asked = float(one[BORE][0])
    if math.isnan(asked):
        return asked
    tried = asked * WIDER ** np.linspace(0.0, 1.0, 97)
    center = float(one["body.passage.centerline_radius_mm"][0])
    tried = tried[tried <= 2 * center] if not math.isnan(center) else tried

    def passes(bores: np.ndarray) -> np.ndarray:
        many = one.take(np.zeros(len(bores), int)).replaced({BORE: bores})
        figures, ready = evaluate_possible(many)
        return ready & (figures["passes"] != 0)

    good = passes(tried)
    if not good.any():
        return None
    first = int(np.argmax(good))
    if first == 0:
        return asked
    low, high = float(tried[first - 1]), float(tried[first])
    for _ in range(4):  # each cuts the bracket in 17
        between = np.linspace(low, high, 18)[1:]
        at = int(np.argmax(passes(between)))
        low, high = (low if at == 0 else float(between[at - 1])), float(between[at])
    return outward(high, True)


def outward(limit: float, up: bool) -> float:
    """A limit to `DIGITS` digits, rounded so that what reached it still does."""
    scale = 10.0 ** (DIGITS - 1 - math.floor(math.log10(abs(limit))))
    whole = math.ceil(limit * scale - 1e-9) if up else math.floor(limit * scale + 1e-9)
    return float(f"{whole / scale:.{DIGITS}g}")


def _said(change: Change) -> str:
    name = change.path.removeprefix("needs.")
    what = {BORE: "the bore", OUTER: "the tube's outer diameter"}.get(change.path) or NAMES[name]
    unit = UNITS.get(unit_of(name) or "", "")
    return f"relax {what} from {spoken(change.before)} to {spoken(change.after)} {unit}".rstrip()
