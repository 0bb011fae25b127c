"""Numbers by `size` and by rays side by side: what counts as agreement, and the words and tables for it."""

from collections.abc import Sequence
from dataclasses import dataclass

from optics.beam import Step
from optics.commands.terminal import paragraph, rounded, table
from optics.spec import OutOfRange
from optics.study.rays_count import RayTrace

# What counts as agreement: the largest of so many standard errors, a share, and a share for each bend gone through.
ERRORS, SHARE, BEND_SHARE = 4.0, 0.01, 0.02
UNITS = {"lm": "lm", "w": "W", "lux": "lux"}


@dataclass(frozen=True, slots=True)
class Line:
    """One number by `size` and by rays, in `unit`; for a step also its own factor (size, rays, standard error).

    `scale`: what a share of counts as agreement, where it is more than the number itself (for a dim ring: the field's mean).
    """

    name: str
    unit: str
    size: float
    rays: float
    standard_error: float
    bends: int
    factor: tuple[float, float, float] | None = None
    scale: float = 0.0

    @property
    def agrees(self) -> bool:
        """Both what is left and, for a step, what the step alone passes: an error of one step is not lost in the next."""
        return self.agrees_alone and _meets(self.size, self.rays, self.standard_error, self.bends, self.scale)

    @property
    def agrees_alone(self) -> bool:
        own_bends = self.bends if self.name == "bends" else 0
        return self.factor is None or _meets(*self.factor, own_bends)

    @property
    def verdict(self) -> str:
        """Why the two count as the same, or that they do not."""
        away = abs(self.rays - self.size)
        if not self.agrees:
            return "DIFFERS" + (f", this step alone by {_percent(*self.factor[:2])}" if self.factor else "")
        if away <= SHARE * abs(self.size):
            return "agrees" if self.size else "agrees: no light"
        if away <= ERRORS * self.standard_error:
            return "agrees within the noise"
        dim = away <= SHARE * self.scale
        return "agrees: dim, for the field" if dim else "agrees within what bends allow"

    def as_dict(self) -> dict:
        said = {"name": self.name, f"size_{self.unit}": self.size, f"rays_{self.unit}": self.rays}
        said |= {f"standard_error_{self.unit}": self.standard_error}
        if self.factor:
            said |= dict(zip(("size_factor", "rays_factor", "factor_standard_error"), self.factor))
        return said | {"agrees": self.agrees}


@dataclass(frozen=True, slots=True)
class Compared:
    """All numbers of a design by both routes."""

    name: str
    rays: int
    seed: int
    steps: tuple[Line, ...]
    power: tuple[Line, ...]
    target: tuple[Line, ...]

    @property
    def wrong(self) -> list[Line]:
        return [line for line in (*self.steps, *self.power, *self.target) if not line.agrees]

    def as_dict(self) -> dict:
        lists = {key: [line.as_dict() for line in getattr(self, key)] for key in ("steps", "power", "target")}
        return {"name": self.name, "rays": self.rays, "seed": self.seed, "agrees": not self.wrong, **lists}

    def disagreement(self) -> str:
        """One sentence: the first number that differs, by both routes, and how many more do."""
        first, more = self.wrong[0], len(self.wrong) - 1
        also = f" ({more} more differ{'s' * (more == 1)})" if more else ""
        if first.factor and not first.agrees_alone:
            size_has, rays_have, error = first.factor
            said = f"{first.name}: this step passes {size_has:.5g} by size and {rays_have:.5g} +- {error:.2g}"
        else:
            numbers = f"{first.rays:.5g} +- {first.standard_error:.2g}"
            said = f"{first.name}: {first.size:.5g} {UNITS[first.unit]} by size and {numbers}"
        return f"{said} by {self.rays:,} rays; allowed: {_allowed(first.bends)}{also}."

    def written(self) -> str:
        """The table for people."""
        parts = [f"{self.name}: {self.rays:,} rays, seed {self.seed}", ""]
        heads = ("Light, in the order of its way", "Power", "On the target")
        for head, lines in zip(heads, (self.steps, self.power, self.target)):
            if lines:
                unit = UNITS[lines[0].unit]
                titles = ("", f"size, {unit}", f"rays, {unit}", "+- std error", "difference", "")
                parts += [head, table([titles, *map(_cells, lines)], right=(1, 2, 3, 4), wrap=False), ""]
        bends = max((line.bends for line in self.steps), default=0)
        wrong = len(self.wrong)
        said = f"{wrong} number{'s' * (wrong > 1)} DISAGREE{'S' * (wrong == 1)}" if wrong else "Every number agrees"
        told = (
            f"{said}. Each may differ by {_allowed(bends)}. The rays go from lamp to target by code of their own and share "
            "no formula of transport with size."
        )
        return "\n".join([*parts, paragraph(told, lead="")])


def _meets(by_size: float, by_rays: float, standard_error: float, bends: int, scale: float = 0.0) -> bool:
    share = max(SHARE, BEND_SHARE * bends) * max(abs(by_size), scale)
    return abs(by_rays - by_size) <= max(ERRORS * standard_error, share)


def _allowed(bends: int) -> str:
    largest = f", or {BEND_SHARE * bends:.0%} for {bends} bend{'s' * (bends > 1)}" if bends else ""
    return f"{ERRORS:.0f} standard errors or {SHARE:.0%}{largest}, whichever is largest"


def _percent(by_size: float, by_rays: float) -> str:
    if by_size == 0:
        return "no light" if by_rays == 0 else "-"
    said = f"{by_rays / by_size - 1:+.2%}"
    return "0.00%" if said in ("+0.00%", "-0.00%") else said


def _cells(line: Line) -> tuple[str, ...]:
    error = f"{line.standard_error:,.0f}" if line.standard_error >= 100 else rounded(line.standard_error, 2)
    numbers = (rounded(line.size, 5), rounded(line.rays, 5), error)
    return line.name, *numbers, _percent(line.size, line.rays), line.verdict


def step_lines(steps: Sequence[Step], trace: RayTrace, bends: int) -> tuple[Line, ...]:
    """Each step of `size` beside that of the rays. Raises OutOfRange where one has a step that the other has not."""
    ours, theirs = ([step.name for step in some] for some in (steps, trace.steps))
    if ours != theirs:
        raise OutOfRange(f"size has the steps {', '.join(ours)}; the rays went through {', '.join(theirs)}.")
    lines, gone_through, before = [], 0, None
    for step, ray in zip(steps, trace.steps):
        gone_through = bends if step.name == "bends" else gone_through
        alone = 1.0 if before is None else step.after_lm / before if before > 0 else 0.0
        factor = (alone, ray.factor.value, ray.factor.standard_error)
        after = (step.after_lm, ray.after.value, ray.after.standard_error)
        lines.append(Line(step.name, "lm", *after, gone_through, factor))
        before = step.after_lm
    return tuple(lines)
