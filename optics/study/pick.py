"""Which combinations do the job: all sensible candidates through the chain, the best of them, and why others fail.

Candidates are the design as it stands and the product of its axes (`pick_axes`). Of those that meet all needs,
pass the bore and stand heat and steam, the Pareto set in detail, light, outer diameter, bend radius and cost class
is picked. Of those that fail, the nearest ones get the smallest single change that would make them pass.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from optics.chain.axes import Progress, crossed, distinct_inputs, evaluate_axes, holding
from optics.chain.columns import Columns, columns
from optics.chain.evaluate import Figures
from optics.needs import NeedLine, Needs, Summary
from optics.presets import Design, edited, resolve
from optics.spec import require
from optics.study.pick_axes import Choices, axes
from optics.study.pick_cost import cost_class
from optics.study.pick_front import pareto_rows
from optics.study.pick_needs import first_failing, margins, meeting, number, reason, shortfall, summary_of
from optics.study.pick_relax import Relaxation, nearest_relaxation
from optics.study.pick_settings import Settings
from optics.study.smallest_change import Change, smallest_changes
from optics.units import Flags

MOST, SEED = 12_000, 0
NEAREST = 200  # failing candidates that get a smallest change
FINEST = 9  # digits to which numbers are compared: below them two candidates are alike
TABLES_OF_FORM = {
    "image.form": {"bundle": ("image.chip.",), "chip": ("image.bundle.", "viewer.")},
    "source.launch.form": {"matched": ("source.launch.",)},
    "scene.ports.form": {"round": ("scene.ports.",), "annulus": ("scene.ports.",)},
}


@dataclass(frozen=True, slots=True)
class Pick:
    """A candidate that does the job: the settings that make it of the design file, and its numbers."""

    set: Settings
    summary: Summary
    needs: tuple[NeedLine, ...]
    cost_class: int
    delivered_lm: float


@dataclass(frozen=True, slots=True)
class Failed:
    """A candidate that does not: what fails first in the order of the light, and the smallest single change, if there is one."""

    set: Settings
    first_reason: str
    smallest_change: Change | None


@dataclass(frozen=True, slots=True)
class Candidates:
    """All candidates: row 0 is the design as it stands; `choice` [candidate, axis] tells the rest."""

    axes: tuple[Choices, ...]
    choice: Any
    table: Columns
    given: Settings

    def settings(self, row: int) -> Settings:
        """What makes this candidate of the design file: the settings given, then those of its choices."""
        made: Settings = {}
        for axis, choice in zip(self.axes, self.choice[row]):
            made |= axis.settings[choice]
        return {path: value for path, value in self.given.items() if not _dropped(path, made)} | made

    def take(self, rows: np.ndarray) -> "Candidates":
        return Candidates(self.axes, self.choice[rows], self.table.take(rows), self.given)


class Failures(Sequence[Failed]):
    """The failing candidates, nearest first; each is written out when it is asked for."""

    def __init__(self, found: Candidates, needs: Needs, figures: Figures, rows, first, changes):
        self.found, self.needs, self.figures = found, needs, figures
        self.rows, self.first, self.changes = rows, first, changes

    def __len__(self) -> int:
        return len(self.rows)

    def __getitem__(self, at):
        if isinstance(at, slice):
            return [self[place] for place in range(*at.indices(len(self)))]
        row = int(self.rows[at])
        said = reason(self.first[row], self.needs, self.found.table, self.figures, row)
        return Failed(self.found.settings(row), said, self.changes.get(row))


@dataclass(frozen=True, slots=True)
class Picked:
    """The answer: picks (cheapest, then thinnest first), failures (nearest first), and what was looked at.

    `failing` counts what fails first; `sections` and `lights` are how many distinct ones the candidates share;
    `impossible` combinations were masked by the rules; `stopped`: the caller stopped it, the rest was not looked at.
    """

    picks: tuple[Pick, ...]
    failed: Sequence[Failed]
    candidates: int
    met: int
    impossible: int
    combinations: int
    failing: dict[str, int]
    nearest_relaxation: Relaxation | None
    sections: int
    lights: int
    stopped: bool


def pick(
    design: Design,
    given: Mapping[str, Any] | None = None,
    *,
    most: int = MOST,
    seed: int = SEED,
    nearest: int = NEAREST,
    progress: Progress | None = None,
) -> Picked:
    """The picks of a design with settings given; of more than `most` combinations a seeded choice.

    `progress` is called with the share done; when it returns False what is done so far is answered.
    Raises OutOfRange for settings that are wrong and for counts below 1.
    """
    require("most", most, "at least 1", most >= 1)
    require("seed", seed, "0 or more", seed >= 0)
    found, combinations = candidates(design, dict(given or {}), most=most, seed=seed)
    good = np.flatnonzero(holding(found.table))
    impossible = len(found.choice) - len(good)
    found = found.take(good)
    figures, done = evaluate_axes(found.table, progress)
    stopped = not done.all()
    if stopped:
        found, figures = found.take(np.flatnonzero(done)), taken(figures, done)
    needs = resolve(edited(design.document, given or {})).fiberscope.needs
    margin = margins(needs, found.table, figures)
    met, place = meeting(margin), first_failing(margin)
    names = list(margin)
    short = shortfall(margin, needs)
    failing = np.flatnonzero(~met)
    failing = failing[np.argsort(short[failing], kind="stable")]
    near = [] if stopped else failing[np.isfinite(short[failing])][:nearest]
    changes = smallest_changes(needs, found.table, margin, np.asarray(near, int))
    return Picked(
        picks=_picks(found, needs, figures, met),
        failed=Failures(found, needs, figures, failing, [(*names, "")[at] for at in place], changes),
        candidates=len(found.choice),
        met=int(met.sum()),
        impossible=impossible,
        combinations=combinations,
        failing={name: int((place == at).sum()) for at, name in enumerate(names) if (place == at).any()},
        nearest_relaxation=None if met.any() else nearest_relaxation(found, needs, figures, margin, short),
        **distinct_inputs(found.table),
        stopped=stopped,
    )


def candidates(design: Design, given: Settings, *, most: int, seed: int) -> tuple[Candidates, int]:
    """All candidates of a design, and how many combinations there were: a seeded choice of more than `most`."""
    document = edited(design.document, given)
    scope = resolve(document).fiberscope
    found = tuple(axes(document, scope))
    sizes = [max(len(axis.settings) - 1, 1) for axis in found]
    total = int(np.prod(sizes))
    numbers = np.arange(total)
    if total + 1 > most:
        numbers = np.sort(np.random.default_rng(seed).choice(total, most - 1, replace=False))
    choice = np.stack(np.unravel_index(numbers, sizes), axis=1) + (np.array([len(a.settings) for a in found]) > 1)
    choice = np.concatenate([np.zeros((1, len(found)), int), choice])
    parts = [(axis.axis, choice[:, at]) for at, axis in enumerate(found)]
    return Candidates(found, choice, crossed(columns([scope]), parts, len(choice)), given), total + 1


def taken(figures: Figures, rows: np.ndarray) -> Figures:
    """The figures of some designs."""
    value, after = ({name: found[rows] for name, found in table.items()} for table in (figures.value, figures.after_lm))
    return Figures(value, after, {})


def _dropped(path: str, made: Settings) -> bool:
    """Whether a setting given belongs to a form that the candidate's own settings leave."""
    return any(
        path.startswith(prefixes) and path not in made
        for form, values in TABLES_OF_FORM.items()
        if form in made
        for prefixes in [values.get(made[form], ())]
    )


def _picks(found: Candidates, needs: Needs, figures: Figures, met: Flags) -> tuple[Pick, ...]:
    """The Pareto set, cheapest first, then the thinnest."""
    rows, cost = np.flatnonzero(met), cost_class(found.table)
    if not rows.size:
        return ()
    rows = rows[pareto_rows(objectives(figures, cost, rows))]
    order = rows[np.lexsort((rows, objectives(figures, cost, rows)[:, 2], cost[rows]))]
    return tuple(_pick(found, needs, figures, int(cost[row]), int(row)) for row in order)


def objectives(figures: Figures, cost: np.ndarray, rows: np.ndarray) -> np.ndarray:
    """What the picks are chosen by, each to be small [design, objective]: gap, less light, diameter, bend radius, cost."""
    light = number(figures, "target_center_lux")
    light = np.where(np.isnan(light), figures["delivered_lm"], light)
    small = (figures["smallest_gap_mm"], -light, figures["outer_diameter_mm"], figures["bend_radius_mm"], cost)
    return np.stack([_rounded(np.nan_to_num(each[rows].astype(float), nan=np.inf)) for each in small], axis=1)


def _rounded(numbers: np.ndarray) -> np.ndarray:
    """Numbers to `FINEST` digits, so that rounding in the last place makes no candidate better than its like."""
    with np.errstate(divide="ignore", invalid="ignore"):
        size = 10.0 ** (FINEST - 1 - np.floor(np.log10(np.abs(numbers))))
        return np.where(np.isfinite(size) & np.isfinite(numbers), np.rint(numbers * size) / size, numbers)


def _pick(found: Candidates, needs: Needs, figures: Figures, cost: int, row: int) -> Pick:
    summary, lines = summary_of(needs, figures, row)
    return Pick(found.settings(row), summary, lines, cost, float(figures["delivered_lm"][row]))
