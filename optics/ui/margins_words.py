"""The study of margins in words for the screen: the answer, what to tighten, what it rests on."""

from optics.figures.margins import percent
from optics.needs import AT_MOST
from optics.spec import OutOfRange
from optics.study.margins_aging import Aged
from optics.study.margins_answer import Causes, Condition, Margins, NeedOdds
from optics.ui.names import field_name, place, spoken
from optics.ui.words import number, plain, sentence_case, unit

NUMBERS = {  # headline numbers that no need names
    "delivered_lm": "delivered light",
    "target_mean_lux": "mean light in the field",
    "resolved_lp_mm": "line pairs resolved",
    "smallest_line_mm": "thinnest line",
}
SWITCHES = {  # what messages call by the name of a switch of the command
    "with --tolerance path=low:high": "in the table of tolerances",
    r"with --tolerance": "in the table of tolerances",
    "--tolerance ": "",
    "--samples": "the number of samples",
    "--aged broken_fraction": "the share of broken fibers",
    "--aged dead_fraction": "the share of dead cores",
    "--aged browning_db_m": "the browning",
    "--aged lamp": "the lamp's share",
}


def called(name: str) -> str:
    """A headline number in plain words.

    >>> called("target_center_lux"), called("delivered_lm"), called("color_temperature_k")
    ('light at the center', 'delivered light', 'color temperature')
    """
    if name in NUMBERS:
        return NUMBERS[name]
    try:
        return field_name(name, f"needs.{name}")
    except KeyError:
        return field_name(name)


def titled(name: str) -> str:
    """A headline number with its unit: 'smallest gap, mm'."""
    return f"{called(name)}, {unit(name)}" if unit(name) else called(name)


def limit(name: str, wanted: float) -> str:
    """A need's limit: 'at most 0.25 mm'."""
    return f"{'at most' if name in AT_MOST else 'at least'} {amount(name, wanted, 4)}"


def amount(name: str, value: float, digits: int = 3) -> str:
    """A rounded number with its unit.

    >>> amount("field_of_view_deg", 50.815), amount("smallest_gap_mm", 0.25), amount("evenness", 0.3)
    ('50.8°', '0.25 mm', '0.3')
    """
    sign = unit(name)
    return f"{number(value, digits)}{'' if sign == '°' else ' '}{sign}".rstrip()


def said(wrong: OutOfRange | str) -> str:
    """A refusal as the screen says it: without the switches of the command.

    >>> said("--tolerance guide.bundle.length_m is 2:3; it must be limits around the nominal value 1.8.")
    'Bundle, length is 2:3; it must be limits around the nominal value 1.8.'
    """
    text = str(wrong)
    for switch, words in SWITCHES.items():
        text = text.replace(switch, words)
    return sentence_case(spoken(text))


# The answer


def headline(found: Margins) -> tuple[str, str]:
    """(mark, the answer in one line) to: will all of them meet it?"""
    new, count = found.new, len(found.new.needs)
    if new.all_needs is None:
        return "○", "No needs are set, so there is nothing to meet."
    needs = "the one need" if count == 1 else f"all {count} needs"
    if new.all_needs == 1:
        return "✓", f"Every one of {found.samples:,} samples meets {needs}."
    if new.all_needs == 0:
        return "✗", f"Not one of {found.samples:,} samples meets {needs}."
    return "✗", f"{odds(new)} of those built meet {needs}."


def odds(condition: Condition) -> str:
    """The share that meets all needs with its standard error: '51.0 % (± 1.1)'."""
    return _odds(condition.all_needs, condition.all_needs_standard_error)


def _odds(share: float, error: float) -> str:
    return f"{percent(share)} (± {_points(error)})" if error else percent(share)


def _points(error: float) -> str:
    return f"{100 * error:.1f}" if error >= 0.0005 else "<0.1"


def sentences(found: Margins) -> list[str]:
    """What stands behind the answer, most needed first, each a sentence for the screen."""
    told = [_spread_words(found)] if found.new.all_needs is None else _missed(found.new)
    if found.aged is not None:
        told.append(_aged(found))
    if found.new.passes is not None and found.new.passes < 1:
        told.append(f"**The bore\\:** {percent(found.new.passes) if found.new.passes else 'none'} pass it.")
    if found.new.all_needs is not None:
        told.append(_tighten(found))
    return [*told, *([_soft(found.causes[0])] if found.causes else [])]


def _missed(new: Condition) -> list[str]:
    never = [need for need in new.needs if need.probability == 0]
    if never:
        said = "; ".join(f"{called(need.name)} {plain(limit(need.name, need.wanted))}" for need in never)
        return [f"**Never met\\:** {said}."]
    worst = min(new.needs, key=lambda need: need.probability)
    if worst.probability == 1:
        return []
    return [
        f"**Most often missed\\:** {called(worst.name)}, {plain(limit(worst.name, worst.wanted))}, "
        f"met in {_odds(worst.probability, worst.standard_error)}."
    ]


def _aged(found: Margins) -> str:
    condition = f"**Aged\\:** {plain(_worn(found.aging))}\\:"
    if found.aged.all_needs is None:
        return f"{condition} see the lines in the histograms."
    still = f"{odds(found.aged)} of them still meet" if found.aged.all_needs else "not one still meets"
    return f"{condition} {still} all needs."


def _worn(condition: Aged) -> str:
    """A worn condition in the units of the screen."""
    parts = (
        (condition.broken_fraction, 100, "% of the fibers broken"),
        (condition.lamp_share, 100, "% of the lamp's flux left"),
        (condition.dead_fraction, 100, "% of the cores dead"),
        (condition.browning_db_m, 1, "dB/m of browning"),
    )
    return "with " + ", ".join(f"{value * times:.3g} {text}" for value, times, text in parts if value is not None)


def _tighten(found: Margins) -> str:
    item = found.tighten
    if item is None:
        text = found.tighten_because
        for need in found.new.needs:
            text = text.replace(need.name, called(need.name))
        return f"**Tighten\\:** {plain(text[:1].lower() + text[1:])}"
    old = next(one for one in found.ranges if one.path == item.path)
    of = "all needs are" if item.of == "all needs" else f"{called(item.of)} is"
    gain = f"{100 * item.gain_probability:.1f} ± {100 * item.standard_error:.1f} points"
    halved, whole = (f"{number(one.low)}–{number(one.high)}" for one in (item, old))
    text = (
        f"{driver(item.path, found)}, held to {halved} instead of {whole}: {of} then met in {percent(item.probability)}, "
        f"a gain of {gain}. {found.tighten_because}"
    )
    return f"**Tighten first\\:** {plain(text.strip())}"


def _soft(causes: Causes) -> str:
    """How much of the answer rests on ranges that nobody measured."""
    return (
        f"**≈ Soft\\:** {percent(causes.soft_share)} of what moves the {called(causes.of)} comes from tolerances that are only "
        "assumed or remembered; enter your own below."
        if causes.soft_share >= 0.01
        else f"**Firm\\:** hardly any of what moves the {called(causes.of)} is only assumed or remembered."
    )


def _spread_words(found: Margins) -> str:
    shown = [item for item in found.new.figures if item.name in ("delivered_lm", "target_center_lux") and item.mean]
    return " ".join(
        f"{sentence_case(called(item.name))} {amount(item.name, item.value)}, nine in ten of those built from "
        f"{number(item.quantiles['p05'])} to {amount(item.name, item.quantiles['p95'])}."
        for item in shown
    )


def driver(path: str, found: Margins) -> str:
    """A tolerance in plain words, a curve as the factor that it is."""
    curve = any(item.path == path and item.curve for item in found.ranges)
    return f"{place(path)}{' (factor)' if curve else ''}"


def need_label(need: NeedOdds) -> str:
    """A need and its limit, in two lines."""
    return f"{called(need.name)}\n{limit(need.name, need.wanted)}"


def unclear(causes: Causes) -> str:
    """A warning where the causes explain less than half."""
    if causes.unexplained_share <= 0.5:
        return ""
    return "Less than half is explained: this number moves too seldom, or too abruptly, for shares to be told."
