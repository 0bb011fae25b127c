"""A search in words for the screen: what is asked, the answer, the candidates and what they lack."""

from dataclasses import dataclass

from optics.fiberscope import SOLVE, Fiberscope
from optics.needs import NeedLine
from optics.presets import Document, value_at
from optics.report.answer import Report
from optics.report.verdict import NAMES
from optics.study.pick import Failed, Pick, Picked
from optics.study.pick_needs import SHORT
from optics.study.smallest_change import Change
from optics.ui.margins_words import limit
from optics.ui.names import field_name, place, preset_name
from optics.ui.rows import margin
from optics.ui.words import exact, number, plain, sentence_case, unit

PORTS = {"annulus": "ring", "placed": "placed ports", "crescent": "crescent"}
RELAXED = {"body.passage.bore_mm": "the bore", "body.section.outer_diameter_mm": "the tube's outer diameter"}
COST = "1 cheap, 5 dear, by plain rules of the trade; no price stands behind them."
CHOSEN = "field_of_view_deg"  # the lens is chosen for it, so its margin says nothing


@dataclass(frozen=True, slots=True)
class Parts:
    """A candidate in plain words."""

    guide: str
    image: str
    lens: str
    lamp: str

    def __str__(self) -> str:
        return "; ".join(
            part for part in (self.guide, ", ".join(filter(None, (self.image, self.lens))), self.lamp) if part
        )


def parts(document: Document, scope: Fiberscope) -> Parts:
    """What a candidate is made of."""

    def named(path: str, own: str) -> str:
        name = value_at(document, f"{path}.preset")
        return preset_name(str(name)) if name else own

    bundle = scope.guide.bundle
    size = "" if bundle.diameter_mm == SOLVE else f" ⌀ {exact(bundle.diameter_mm)} mm"
    guide = f"{named('guide.fiber', 'own fiber')}{size}"
    if scope.scene is not None:
        form = scope.scene.ports.form
        guide += f", {PORTS.get(form, form) if form != 'round' else f'{scope.scene.ports.count} round'}"
    image = lens = ""
    if scope.image is not None:
        lens = f"f {exact(scope.image.objective.focal_mm)} mm f/{exact(scope.image.objective.f_number)}"
        if scope.image.form == "chip":
            image = f"chip {named('image.chip', exact(scope.image.chip.pixel_um) + ' µm')}"
        else:
            own = f"bundle {exact(scope.image.bundle.pitch_um)} µm"
            image = f"{named('image.bundle', own)} ⌀ {exact(scope.image.bundle.diameter_mm)} mm"
    return Parts(guide, image, lens, named("source.lamp", "own lamp"))


# What is asked


def asked(scope: Fiberscope) -> str:
    """The needs and the bore in force, in one line."""
    needs = scope.needs.wanted()
    said = [f"{field_name(name, f'needs.{name}')} {limit(name, wanted)}" for name, wanted in needs.items()]
    passage = scope.body.passage if scope.body else None
    if passage is not None and passage.bore_mm is not None:
        bend = f" with a bend of {exact(passage.bend_deg)}°" if passage.bend_deg else ""
        if bend and passage.centerline_radius_mm is not None:
            bend += f" at {exact(passage.centerline_radius_mm)} mm"
        said.append(f"bore {exact(passage.bore_mm)} mm{bend}")
    handling = scope.body.handling if scope.body else None
    if handling is not None and handling.highest_temperature_c is not None:
        said.append(f"stands {exact(handling.highest_temperature_c)} °C")
    if not needs:
        said.insert(0, "no needs are set, so whatever can be built and passes counts")
    return "**Asked\\:** " + plain("; ".join(said)) + "."


# The answer


def headline(found: Picked) -> tuple[str, str]:
    """(mark, the answer in one line)."""
    of = f"{found.candidates:,} candidates"
    if not found.met:
        return "✗", f"None of {of} does the job."
    few = "" if len(found.picks) == found.met else f", and nothing beats {_these(len(found.picks))} of them"
    return "✓", f"{found.met:,} of {of} {'do' if found.met > 1 else 'does'} the job{few}."


def _these(count: int) -> str:
    return f"these {count}" if count > 1 else "this one"


def plainest(first: Pick, made: Parts) -> str:
    """The cheapest pick, of equal ones the thinnest."""
    outer = first.summary.outer_diameter_mm
    outer = "" if outer is None else f", of those the thinnest with {number(outer)} mm"
    return f"**The plainest** (cost class {first.cost_class}{outer})\\: {plain(str(made))}. {plain(gives(first))}."


def stands(report: Report) -> str:
    """How the sketch itself does, in a sentence."""
    short = [field_name(line.name, f"needs.{line.name}") for line in report.needs if not line.met]
    short += ["bore"] if report.fit is not None and report.fit.passes is False else []
    if short:
        return f"The sketch as it stands misses the {' and the '.join(short)}."
    return "The sketch as it stands meets its needs too." if report.needs else ""


def best(row: int, name: str, one: Pick, made: Parts) -> str:
    """A pick that is best in something: what it is, and its numbers."""
    summary = one.summary
    said = [] if summary.smallest_gap_mm is None else [f"gap {number(summary.smallest_gap_mm)} mm"]
    light = summary.target_center_lux
    said.append(f"{number(one.delivered_lm)} lm" if light is None else f"{number(light)} lx")
    said += [] if summary.outer_diameter_mm is None else [f"tube {number(summary.outer_diameter_mm)} mm"]
    said.append(f"cost class {one.cost_class}")
    return f"**{row} · {sentence_case(name)}**\\: {plain(', '.join(said))}  \n:gray[{plain(str(made))}]"


def gives(one: Pick) -> str:
    """What a pick gives, in a clause."""
    summary, said = one.summary, []
    if summary.smallest_gap_mm is not None:
        said.append(f"a gap of {number(summary.smallest_gap_mm)} mm")
    light = summary.target_center_lux
    said.append(f"{number(one.delivered_lm)} lm" if light is None else f"{number(light)} lx at the center")
    near = closest(one.needs)
    return f"It gives {' and '.join(said)}" + (f"; closest to its need: {near}" if near else "")


def closest(lines: tuple[NeedLine, ...]) -> str:
    """The need with the least margin; the field of view is what the lens was chosen for."""
    known = [line for line in lines if line.name != CHOSEN and line.margin is not None]
    if not known:
        return ""
    line = min(known, key=lambda line: line.margin)
    return f"{field_name(line.name, f'needs.{line.name}')} {margin(line.margin)}"


def how(found: Picked, seconds: float) -> str:
    """What was looked at, and what was not."""
    said = f"Searched in {seconds:.1f} s. "
    if found.stopped:
        said += f"Stopped early: {found.candidates:,} candidates were looked at, the rest was not. "
    elif found.combinations > found.candidates + found.impossible:
        said += f"The candidates are a seeded choice of {found.combinations:,} combinations. "
    if found.impossible:
        said += f"{found.impossible:,} more cannot be built. "
    return f"{said}Cost classes\\: {COST}"


def failing(found: Picked) -> dict[str, int]:
    """How many fail what first."""
    return {SHORT.get(name) or NAMES[name].removeprefix("the "): count for name, count in found.failing.items()}


# Those that fail


def change(moved: Change) -> str:
    """A number moved, in words: 'Bundle, diameter 1.92 mm instead of 2 mm'; as many digits as tell the two apart."""
    digits = next((n for n in range(3, 9) if f"{moved.after:.{n}g}" != f"{moved.before:.{n}g}"), 9)
    sign = unit(moved.path.rpartition(".")[2])
    return (
        f"{place(moved.path)} {number(moved.after, digits)} instead of {number(moved.before, digits)} {sign}".rstrip()
    )


def nearly(failed: Failed, made: Parts, stopped: bool) -> str:
    """One that nearly does it: what fails first, and what would make it pass; after a stop that was not looked for."""
    if stopped:
        help = "What would help was not looked for: the search was stopped."
    elif failed.smallest_change is None:
        help = "No single number, within its usual bounds, makes it pass."
    else:
        size = failed.smallest_change.after / failed.smallest_change.before - 1
        told = f"{size:+.1%}".replace("-", "−").replace("%", " %") if abs(size) >= 5e-4 else "a hair"
        help = f"**Passes with {plain(change(failed.smallest_change))}** ({told})."
    return f"{plain(sentence_case(failed.first_reason))}.  \n{help}  \n:gray[{plain(str(made))}]"


def relaxed(found: Picked, other_way: bool) -> str:
    """What to relax so that something does the job; `other_way`: one changed number does it too."""
    moved = found.nearest_relaxation
    if moved is None:
        return (
            ""
            if other_way
            else "No need, relaxed, would help: nothing is resolved by any candidate, or no material stands the "
            "job. More light, more contrast or another subject is needed first."
        )
    said = " and ".join(plain(_relaxes(each)) for each in moved.relax)
    return f"**{'Or relax' if other_way else 'Relax'} {said}, and one does{'' if other_way else ' the job'}.**"


def _relaxes(moved: Change) -> str:
    what = RELAXED.get(moved.path) or NAMES[moved.path.removeprefix("needs.")]
    sign = unit(moved.path.rpartition(".")[2])
    return f"{what} from {number(moved.before, 4)} to {number(moved.after, 4)} {sign}".rstrip()
