"""`margins`: how often a design meets its needs within its tolerances, and which tolerance decides."""

import argparse
import sys

from optics.commands.terminal import add_design, as_json, opened, paragraph, rounded, table
from optics.needs import AT_MOST
from optics.presets import Design
from optics.spec import OutOfRange
from optics.study.margins import SAMPLES, SEED, margins
from optics.study.margins_aging import aged_from, finite
from optics.study.margins_answer import DISTRIBUTION, METHOD, Causes, Condition, Distribution, Driver, Margins, NeedOdds
from optics.study.margins_ranges import GIVEN, Tolerance, tolerances

SHOWN_SHARE = 0.005  # smaller shares are left to --json
BLOCKS, PLAIN = " ▁▂▃▄▅▆▇█", " .:-=+*#@"
OFF = {"smallest_gap_mm": "not seen", "smallest_line_mm": "not seen"}


def add_arguments(parser: argparse.ArgumentParser) -> None:
    add_design(parser)
    parser.add_argument(
        "--samples", type=int, default=SAMPLES, help=f"how many designs to draw ({SAMPLES:,} if not given)"
    )
    parser.add_argument(
        "--seed", type=int, default=SEED, help=f"of the draw ({SEED} if not given): the same seed, the same answer"
    )
    parser.add_argument(
        "--tolerance",
        dest="given",
        action="append",
        default=[],
        metavar="PATH=LOW:HIGH",
        help="limits of one value, as in guide.bundle.length_m=1.7:1.9, or factors on a curve; may be repeated",
    )
    parser.add_argument(
        "--only", action="store_true", help="vary only what --tolerance names, not what the presets state"
    )
    parser.add_argument(
        "--aged",
        metavar="KEY=VALUE,...",
        help="a worn condition beside the new one: broken_fraction, lamp (share of the flux left), dead_fraction, browning_db_m",
    )
    parser.add_argument("--json", action="store_true", help="JSON alone, numbers unrounded")


def run(options: argparse.Namespace) -> int:
    design = opened(options)
    if options.seed < 0:
        raise OutOfRange(f"--seed is {options.seed}; it must be 0 or more.")
    given = dict(_given(text) for text in options.given)
    aging = None if options.aged is None else aged_from(options.aged)
    ranges = tolerances(design, given, options.only)
    found = margins(design, ranges=ranges, samples=options.samples, seed=options.seed, aging=aging)
    print(as_json(found.as_dict()) if options.json else written(found, design))
    return 0


def _given(text: str) -> tuple[str, tuple[float, float]]:
    """(path, (low, high)) of `path=low:high`."""
    path, _, limits = text.partition("=")
    low, colon, high = limits.partition(":")
    try:
        if not path.strip() or not colon:
            raise ValueError
        return path.strip(), (finite(low), finite(high))
    except ValueError:
        raise OutOfRange(
            f"--tolerance {text} is not of the form path=low:high, as in guide.bundle.length_m=1.7:1.9."
        ) from None


def written(found: Margins, design: Design) -> str:
    """The study as text: the answer first, then needs, spread, causes, what to tighten, what it rests on."""
    count, kinds = found.samples, len(found.ranges)
    parts = [
        f"{found.name}  ({count:,} samples of {kinds} tolerance{'s' if kinds > 1 else ''}, seed {found.seed})",
        paragraph(_answer(found), lead=""),
        "",
    ]
    if found.new.needs:
        parts += ["Needs: share of the samples that meet each", _needs(found), ""]
    if found.aging:
        parts += [paragraph(f"Aged: {found.aging.words()}."), ""]
    parts += ["How the headline numbers spread", _spread(found), ""]
    if found.causes:
        parts += [f"What moves {found.causes[0].of}: share of its variance", _causes(found.causes[0]), ""]
        parts += [paragraph(_others(found.causes[1:]), lead="  "), ""] if found.causes[1:] else []
    elif any(need.varies for need in found.new.needs):
        parts += [paragraph("Too few samples to rank the causes: raise --samples."), ""]
    parts += ["What to tighten", paragraph(_tighten(found)), ""]
    return "\n".join([*parts, "What this rests on", *(paragraph(said, lead="  - ") for said in _rests(found, design))])


def _answer(found: Margins) -> str:
    new, aged = found.new, found.aged
    if new.all_needs is None:
        return "The design sets no needs; this is how its numbers spread."
    said = f"All {len(new.needs)} needs are met in {_odds(new)} of the samples"
    said += f", aged in {_odds(aged)}." if aged else "."
    if new.passes is not None and new.passes < 1:
        said += f" {_share(new.passes) if new.passes else 'None'} pass the bore."
    worst = min(new.needs, key=lambda need: need.probability)
    if worst.probability < 1:
        said += f" The one most often missed is {worst.name}, met in {_share(worst.probability)}."
    return said


def _odds(condition: Condition) -> str:
    return f"{_share(condition.all_needs)} (+- {_points(condition.all_needs_standard_error)})"


def _needs(found: Margins) -> str:
    aged = found.aged
    rows = [("", "", "wanted", "nominal", "met in", "+-", *(["aged", "+-"] if aged else []))]
    for row, need in enumerate(found.new.needs):
        worn = [_share(aged.needs[row].probability), _error(aged.needs[row])] if aged else []
        limit = "at most" if need.name in AT_MOST else "at least"
        cells = (rounded(need.wanted), rounded(need.value), _share(need.probability), _error(need))
        rows.append((need.name, limit, *cells, *worn))
    return table(rows, right=range(2, len(rows[0])))


def _error(need: NeedOdds) -> str:
    return _points(need.standard_error) if need.varies else "fixed"


def _spread(found: Margins) -> str:
    aged = found.aged
    rows = [("", "nominal", "5 %", "25 %", "50 %", "75 %", "95 %", *(["aged 50 %"] if aged else []), "0.5 to 99.5 %")]
    still = []
    worn = {item.name: item for item in aged.figures} if aged else {}
    for item in found.new.figures:
        if item.histogram:
            marks = [_mark(item, mark) for mark in item.quantiles.values()]
            marks += [_mark(item, worn[item.name].quantiles["p50"]) if item.name in worn else "none"] if aged else []
            rows.append((item.name, _mark(item, item.value), *marks, _bars(item)))
        else:
            still.append(f"{item.name} {_mark(item, item.value)}")
    said = table(rows, right=range(1, len(rows[0]) - 1), wrap=False)
    limited = ", ".join(f"{part} in {_share(share)}" for part, share in found.new.limited_by.items())
    lines = [f"Hardly or not at all moved by the tolerances: {', '.join(still)}."] if still else []
    lines += [f"Detail is limited by: {limited}."] if limited else []
    return "\n".join([said, *(paragraph(line) for line in lines)])


def _mark(item: Distribution, value: float | None) -> str:
    return OFF.get(item.name, "none") if value is None else rounded(value)


def _bars(item: Distribution) -> str:
    """A small histogram on one line."""
    marks = BLOCKS if "utf" in (sys.stdout.encoding or "").lower() else PLAIN
    top = max(item.histogram)
    return "".join(marks[-(-count * (len(marks) - 1) // top)] for count in item.histogram)


def _causes(causes: Causes) -> str:
    rows = [("share", "", "low", "nominal", "high", "basis")]
    rows += [_driver(item) for item in causes.drivers if item.share >= SHOWN_SHARE]
    small = sum(item.share for item in causes.drivers if item.share < SHOWN_SHARE)
    rows += [(_share(small), "all others together", "", "", "", "")] if small >= SHOWN_SHARE / 5 else []
    rows += (
        [(_share(causes.together_share), "several at once", "", "", "", "")]
        if causes.together_share >= SHOWN_SHARE
        else []
    )
    rows += [(_share(causes.unexplained_share), "not explained", "", "", "", "")]
    soft = f"{_share(causes.soft_share)} of it comes from tolerances that are only assumed or remembered."
    return "\n".join([table(rows, right=(0, 2, 3, 4)), paragraph(soft)])


def _driver(item: Driver) -> tuple[str, ...]:
    basis = item.basis if item.basis in (GIVEN, item.source) else f"{item.basis} ({item.source})"
    return _share(item.share), item.path, rounded(item.low), rounded(item.value), rounded(item.high), basis


def _others(causes: tuple[Causes, ...]) -> str:
    said = []
    for item in causes:
        first = item.drivers[0]
        clear = item.unexplained_share <= 0.5
        said.append(
            f"{item.of}: " + (f"{first.path} ({_share(first.share)})" if clear else "no clear one, it moves too seldom")
        )
    return f"First cause of the other needs: {'; '.join(said)}."


def _tighten(found: Margins) -> str:
    item = found.tighten
    if item is None:
        return found.tighten_because
    verb = "are" if item.of == "all needs" else "is"
    said = (
        f"{item.path}: halved to {rounded(item.low)} ... {rounded(item.high)}, {item.of} {verb} met in "
        f"{_share(item.probability)}, a gain of {100 * item.gain_probability:.1f} points (+- {100 * item.standard_error:.1f})."
    )
    return f"{said} {found.tighten_because}".strip()


def _rests(found: Margins, design: Design) -> list[str]:
    said = [DISTRIBUTION, METHOD]
    if found.drawn.redrawn:
        why = "; ".join(f"{rule} ({count:,} times)" for rule, count in found.drawn.because)
        said.append(
            f"{found.drawn.redrawn:,} of {found.samples:,} samples were designs that cannot exist and were drawn again: {why}."
        )
    said.append("Where a diameter changes, the section is laid out anew and the ports move with it.")
    soft = [item for item in found.ranges if item.soft]
    if soft:
        said.append(f"Tolerances that are only assumed or remembered: {', '.join(item.path for item in soft)}.")
    said.append(_untouched(found.ranges, design))
    if found.aged:
        said.append(
            "Aged: dead cores count as unevenness between cores; browning is taken as equal at all wavelengths, though real "
            "browning takes more of the blue; what aging does is an input, not a forecast."
        )
    return said


def _untouched(ranges: tuple[Tolerance, ...], design: Design) -> str:
    varied = {item.path for item in ranges}
    numbers = [
        path
        for path, item in design.sourced.items()
        if path not in varied and isinstance(item.value, float) and not path.startswith("needs.")
    ]
    return (
        f"{len(numbers)} values have no stated tolerance and stay as they are (such as {', '.join(numbers[:3])}): "
        "give limits with --tolerance."
        if numbers
        else "Every value of the design has a tolerance."
    )


def _share(share: float) -> str:
    """A share in percent; never a round 100 or 0 that is not whole."""
    percent = 100 * share
    if 99.9 < percent < 100 or 0 < percent < 0.1:
        return ">99.9 %" if percent > 50 else "<0.1 %"
    return f"{percent:.0f} %" if percent in (0.0, 100.0) else f"{percent:.1f} %"


def _points(error: float) -> str:
    return f"{100 * error:.1f} %" if error >= 0.0005 else "<0.1 %"
