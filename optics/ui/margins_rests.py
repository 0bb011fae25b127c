"""The study of margins for the screen: how it was run, how the numbers spread, what it rests on."""

from optics.figures.margins import percent
from optics.presets import Design
from optics.study.margins_answer import DISTRIBUTION, METHOD, Distribution, Margins
from optics.study.margins_ranges import GIVEN
from optics.ui.margins_words import amount, called, titled
from optics.ui.names import place, spoken
from optics.ui.origin import SOFT
from optics.ui.rows import Columns, columns
from optics.ui.words import number, plain


def run_words(found: Margins, old: bool) -> str:
    """What was drawn; and whether something else is asked since."""
    kinds = len(found.ranges)
    varied = "1 tolerance" if kinds == 1 else f"{kinds} tolerances"
    drawn = f"{found.samples:,} designs drawn from {varied}, seed {found.seed}."
    if old:
        return f":orange[**○ This is the answer from before your change.** Run to draw it again.] {drawn}"
    return f"{drawn} The same seed gives the same answer."


def still(found: Margins) -> str:
    """The numbers that no tolerance moves, and what limits the detail."""
    fixed = [item for item in found.new.figures if not item.histogram and item.value is not None]
    told = [f"{called(item.name)} {amount(item.name, item.value)}" for item in fixed]
    lines = [f"Hardly or not at all moved\\: {', '.join(map(plain, told))}."] if told else []
    limited = ", ".join(f"{part} in {percent(share)}" for part, share in found.new.limited_by.items())
    lines += [f"Detail is limited by\\: {plain(limited)}."] if limited else []
    return "  \n".join(lines)


def rests(found: Margins, design: Design) -> list[str]:
    """What the answer rests on, each a sentence."""
    told = [DISTRIBUTION, METHOD]
    if found.drawn.redrawn:
        why = "; ".join(f"{rule} ({count:,} times)" for rule, count in found.drawn.because)
        told.append(
            f"{found.drawn.redrawn:,} of {found.samples:,} samples were designs that cannot exist and were drawn again: {why}."
        )
    told.append("Where a diameter changes, the section is laid out anew and the ports move with it.")
    soft = [place(item.path) for item in found.ranges if item.basis in SOFT]
    if soft:
        told.append(f"{len(soft)} of {len(found.ranges)} tolerances are only assumed or remembered: {'; '.join(soft)}.")
    own = [place(item.path) for item in found.ranges if item.basis == GIVEN]
    if own:
        told.append(f"Entered here: {'; '.join(own)}.")
    fixed = untouched(found, design)
    if fixed:
        told.append(
            f"{len(fixed)} values have no stated tolerance and stay as they are, such as {place(fixed[0])}: "
            "the true spread is wider."
        )
    if found.aged is not None:
        told.append(
            "Aged: what aging does is entered, not foretold. Dead cores count as unevenness between cores; browning is taken as "
            "equal at all wavelengths, though real browning takes more of the blue."
        )
    return [plain(spoken(line)) for line in told]


def untouched(found: Margins, design: Design) -> list[str]:
    """The values of the design that no tolerance moves."""
    varied = {item.path for item in found.ranges}
    return [
        path
        for path, item in design.sourced.items()
        if path not in varied and isinstance(item.value, float) and not path.startswith("needs.")
    ]


def shown(found: Margins) -> tuple[list[Distribution], list[Distribution]]:
    """The numbers worth a histogram: those with a need, most missed first; the others (line pairs repeat the gap)."""
    odds_of = {need.name: need.probability for need in found.new.needs}
    moved = [item for item in found.new.figures if item.histogram and item.name != "resolved_lp_mm"]
    asked_for = [item for item in moved if item.name in odds_of]
    return sorted(asked_for, key=lambda item: odds_of[item.name]), [item for item in moved if item.name not in odds_of]


def legend(found: Margins) -> str:
    """How to read the histograms."""
    told = ["Filled\\: as built, new" if found.aged else "Filled\\: as built", "▲ the nominal design"]
    told += ["line\\: aged"] if found.aged else []
    told += ["dashed\\: the need", "hatched\\: beyond it"] if found.new.needs else []
    return ", ".join(told) + "."


def spread_table(found: Margins) -> Columns:
    """Where the samples of each number lie."""
    rows = []
    asked_for, others = shown(found)
    for item in asked_for + others:
        marks = [item.value, *(item.quantiles[name] for name in ("p05", "p50", "p95"))]
        rows.append((titled(item.name), *("not seen" if mark is None else number(mark) for mark in marks)))
    return columns(("number", "nominal", "5 % lie below", "half lie below", "95 % lie below"), rows)
