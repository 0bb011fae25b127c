"""Which single change would give most light: sensible changes of one thing each, evaluated together and ranked."""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np

from optics.body.handling import least_bend_radius_mm
from optics.chain.columns import Columns, columns
from optics.chain.evaluate import Figures, evaluate
from optics.chain.solve import with_solved
from optics.fiberscope import Fiberscope
from optics.presets import Design, Document, edited, resolve
from optics.spec import OutOfRange
from optics.study.levers_guide import bundle_changes, cable_changes, fiber_changes
from optics.study.levers_source import Change, first_face, lamp_changes, launch_changes
from optics.study.pick_needs import BESIDES, margins
from optics.units import AnyUnit

LEAST_GAIN = 1e-3  # of the light: less is no lever
LARGE = 0.995  # from this gain on it is told as a multiple

Pair = tuple[Change, Fiberscope]


@dataclass(frozen=True, slots=True)
class Lever:
    """One change and what it gives. Before and after in the unit of the path, or words; None where nothing stands.

    `gain_share`: light gained over the light now, in lumens, in watts for a lamp stated in watts. `unlit_fraction`: of
    the field of view, then.
    `breaks`: needs that are met now and would not be. `settings` make the change in the document.
    """

    path: str
    before: AnyUnit | str | None
    after: AnyUnit | str | None
    delivered_lm: float
    delivered_w: float
    center_lux: float | None
    unlit_fraction: float | None
    gain_share: float
    words: str
    breaks: tuple[str, ...]
    settings: dict[str, Any]

    def as_dict(self) -> dict[str, Any]:
        """The lever as plain data."""
        return {
            "path": self.path,
            "from": self.before,
            "to": self.after,
            "delivered_lm": self.delivered_lm,
            "gain_share": self.gain_share if np.isfinite(self.gain_share) else None,
            "words": self.words,
            "breaks": list(self.breaks),
            "set": dict(self.settings),
        }


def levers(design: Design) -> tuple[Lever, ...]:
    """Every sensible single change that gives more light and may stand, most light first.

    Left out: what the rules across tables refuse, what no longer fits the tube or passes the bore where the design
    does, a material that no longer stands the job, and fibers that the guide's own bends would overstrain. The numbers are
    those of `size` of the changed design.
    """
    now = columns([design.fiberscope])
    base = evaluate(now)
    scope = with_solved(design.fiberscope, {name: float(found[0]) for name, found in base.value.items()})
    tried = [(change, changed) for change in changes(design.document, scope) if (changed := _changed(design, change))]
    tried, table, figures = _answered([pair for pair in tried if _overstrained(scope) or not _overstrained(pair[1])])
    if not tried:
        return ()
    measure = "delivered_w" if scope.source.lamp.flux_lm is None else "delivered_lm"
    gain = _gain(float(base[measure][0]), figures[measure])
    before, after = margins(scope.needs, now, base), margins(scope.needs, table, figures)
    found = []
    for row, (change, _) in enumerate(tried):
        lost = tuple(name for name in after if after[name][row] < 0 <= before[name][0])
        if gain[row] >= LEAST_GAIN and not set(lost) & set(BESIDES):
            found.append(_lever(change, figures, row, float(gain[row]), lost))
    return tuple(sorted(found, key=lambda lever: -lever.gain_share))


def changes(document: Document, scope: Fiberscope) -> Iterator[Change]:
    """All changes that this design has room for, in the order of the light. Diameters of `scope` are numbers."""
    face = first_face(scope)
    yield from lamp_changes(document, scope, face)
    yield from launch_changes(scope, face)
    if scope.guide.cable is not None:
        yield from cable_changes(document, scope)
    yield from fiber_changes(document, scope, face)
    yield from bundle_changes(scope)
    if scope.scene is not None and scope.scene.cover is not None:
        yield Change("scene.cover", "a cover", None, {"scene.cover": None}, "no cover over the ports")


def _changed(design: Design, change: Change) -> Fiberscope | None:
    """The design with a change made; None where the rules across tables refuse it."""
    try:
        return resolve(edited(design.document, change.settings)).fiberscope
    except OutOfRange:
        return None


def _answered(tried: list[Pair]) -> tuple[list[Pair], Columns, Figures]:
    """The changes whose designs the chain does not refuse, with columns and numbers: all at once, one by one if it must be."""
    try:
        table = columns([changed for _, changed in tried])
        return tried, table, evaluate(table)
    except OutOfRange:
        return _answered([pair for pair in tried if _answers(pair[1])])


def _answers(scope: Fiberscope) -> bool:
    try:
        evaluate(columns([scope]))
    except OutOfRange:
        return False
    return True


def _overstrained(scope: Fiberscope) -> bool:
    """Whether a bend of the guide strains its fibers beyond what they are trusted with."""
    fiber = scope.guide.fiber
    least = least_bend_radius_mm(fiber_um=fiber.fiber_um, allowed_strain=fiber.allowed_strain)
    return any(bend.radius_mm < least for bend in scope.guide.bundle.bends if bend.angle_deg > 0)


def _gain(now: float, then: np.ndarray) -> np.ndarray:
    """Light gained over the light now; without any light now all of it counts as endless."""
    return then / now - 1 if now > 0 else np.where(then > 0, np.inf, 0.0)


def _lever(change: Change, figures: Figures, row: int, gain: float, lost: tuple[str, ...]) -> Lever:
    lux, unlit = (float(figures[name][row]) for name in ("center_lux", "unlit_fraction"))
    return Lever(
        change.path,
        change.before,
        change.after,
        float(figures["delivered_lm"][row]),
        float(figures["delivered_w"][row]),
        lux if np.isfinite(lux) else None,
        unlit if np.isfinite(unlit) else None,
        gain,
        f"{change.said}: {told(gain)}",
        lost,
        change.settings,
    )


def told(gain_share: float) -> str:
    """A gain in words.

    >>> told(0.4412), told(0.012), told(1.0), told(float("inf"))
    ('+44 % light', '+1.2 % light', '2 times the light', 'light where there is none')
    """
    if not np.isfinite(gain_share):
        return "light where there is none"
    if gain_share >= LARGE:
        return f"{1 + gain_share:.3g} times the light"
    return f"{gain_share:+.{0 if gain_share >= 0.0995 else 1}%} light".replace("%", " %")
