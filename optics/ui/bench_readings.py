"""The three kinds of readings explained, each with invented ones to try: made by the design's own model, and saying so."""

from dataclasses import dataclass

import numpy as np

from optics.presets import Design, edited, resolve
from optics.spec import OutOfRange
from optics.study.bench_model import ATTENUATION, Model
from optics.study.bench_model import NA as NA_PATH
from optics.study.bench_readings import ERRORS, MEASURED, TURNED, Readings
from optics.ui.rows import Columns, columns
from optics.units import mm_from_um

# What the invented readings are of: assumed, made up.
LIT, LOSS, NA, ERROR, SEED, TURN_DEG = 0.8, 1.3, 0.92, 0.01, 1, 360.0
LENGTHS = (3.0, 2.4, 1.9, 1.5, 1.1, 0.8, 0.5, 0.25)  # over the guide's own
RADII = (400.0, 200.0, 100.0, 60.0, 40.0, 30.0, 24.0, 20.0)  # over the core's diameter
DISTANCES = (0.5, 0.7, 1.0, 1.4, 2.0)  # over the target's own
BEGINS = 0.05  # the loss at which a bend begins to tell


@dataclass(frozen=True, slots=True)
class Kind:
    """One kind of readings: what to do, what it tells, what it cannot."""

    title: str
    task: str
    tells: str


KINDS = {
    "length_m": Kind(
        "Cut-back",
        "Launch, read the power, cut the guide shorter, read again.",
        "Tells the loss of the fiber apart from the launch.",
    ),
    "bend_radius_mm": Kind(
        "Bends",
        "Wind the guide around ever thinner rods and read the power. bend_deg says how far it turns; without it the "
        "design's own bends take each radius.",
        "Tells the numerical aperture that the bends show, where they lose light at all.",
    ),
    "distance_mm": Kind(
        "Light on the target",
        "Read the lux in the middle of the target at several distances.",
        "Fixes the light as a whole; launch, loss and broken fibers act alike and stay together.",
    ),
}


def made_up(design: Design, varied: str) -> Readings | None:
    """Invented readings of one kind that suit a design; None where the design has no such thing."""
    settings = _settings(design, varied)
    if settings is None:
        return None
    at = np.array([float(f"{value:.3g}") for value in settings])
    turned = np.full(len(at), TURN_DEG) if varied == "bend_radius_mm" else None
    count = np.arange(1, len(at) + 1)
    blank = Readings(varied, MEASURED[varied], at, np.ones(len(at)), None, turned, count, count)
    try:
        exact = LIT * Model(_other(design, varied), blank, None).at(0.0)[0]
    except OutOfRange:
        return None
    read = exact * (1 + ERROR * np.random.default_rng(SEED).standard_normal(len(at)))
    return Readings(varied, MEASURED[varied], at, read, ERROR * exact, turned, count, count)


def _settings(design: Design, varied: str) -> list[float] | None:
    scope = design.fiberscope
    if varied == "length_m":
        return [share * scope.guide.bundle.length_m for share in LENGTHS]
    if varied == "bend_radius_mm":
        return [share * mm_from_um(scope.guide.fiber.core_um) for share in RADII]
    return None if scope.scene is None else [share * scope.scene.target.distance_mm for share in DISTANCES]


def _other(design: Design, varied: str) -> Design:
    """The design that the invented readings are of, but for its launch: more loss, or less numerical aperture."""
    fiber = design.fiberscope.guide.fiber
    if varied == "distance_mm":
        return design
    if varied == "bend_radius_mm":
        return resolve(edited(design.document, {NA_PATH: NA * fiber.na}))
    curve = fiber.attenuation
    more = {"wavelength_nm": list(curve.wavelength_nm), "value": [LOSS * one for one in curve.value]}
    return resolve(edited(design.document, {ATTENUATION: more}))


def begins_mm(design: Design) -> float | None:
    """The bend radius at which a full turn takes 5 % of the light; None where even the tightest of the example does not."""
    radius = np.array(_settings(design, "bend_radius_mm"))
    count = np.arange(len(radius))
    blank = Readings(
        "bend_radius_mm", "power_mw", radius, np.ones(len(radius)), None, np.full(len(radius), TURN_DEG), count, count
    )
    try:
        left = Model(design, blank, None).at(0.0)[0]
    except OutOfRange:
        return None
    left = left / left[0]
    if left.min() > 1 - BEGINS:
        return None
    return float(np.exp(np.interp(BEGINS, 1 - left, np.log(radius))))


def begins_words(design: Design) -> str:
    """Where bends begin to tell."""
    radius = begins_mm(design)
    if radius is None:
        return "In this fiber even tight bends lose hardly any light: they will not tell its numerical aperture."
    return f"In this fiber a full turn begins to lose light, 5 %, near a radius of {radius:.2g} mm."


def truth(varied: str) -> str:
    """What the invented readings were made from, for their first line."""
    other = {
        "length_m": f", the loss of the guide at {LOSS:g} times",
        "bend_radius_mm": f", the numerical aperture at {NA:g} times",
        "distance_mm": "",
    }[varied]
    return (
        f"Invented readings, for trying: this design's own model with the light at {LIT:g} times{other}, "
        f"and {100 * ERROR:g} % of scatter"
    )


def error_name(varied: str) -> str:
    """The column of the standard errors that goes with a kind of readings."""
    return ERRORS[MEASURED[varied]]


def as_text(readings: Readings, note: str) -> str:
    """Readings as the text of a file."""
    names, rows = _cells(readings)
    return "\n".join([f"# {note}", ",".join(names), *(",".join(row) for row in rows)]) + "\n"


def as_table(readings: Readings, most: int) -> Columns:
    """The first readings as a table, without their errors."""
    names, rows = _cells(readings)
    kept = [place for place, name in enumerate(names) if name not in ERRORS.values()]
    return columns(tuple(names[place] for place in kept), [tuple(row[place] for place in kept) for row in rows[:most]])


def _cells(readings: Readings) -> tuple[list[str], list[tuple[str, ...]]]:
    parts = {readings.varied: readings.at, TURNED: readings.turned_deg, readings.measured: readings.got}
    parts[ERRORS[readings.measured]] = readings.error
    present = {name: values for name, values in parts.items() if values is not None}
    digits = {readings.measured: 4, ERRORS[readings.measured]: 2}
    rows = [
        tuple(_cell(value, digits.get(name, 3)) for name, value in zip(present, row)) for row in zip(*present.values())
    ]
    return list(present), rows


def _cell(value: float, digits: int) -> str:
    """A number in so many digits, never with an exponent.

    >>> _cell(1082345.0, 4), _cell(0.0123456, 3), _cell(360.0, 3)
    ('1082000', '0.0123', '360')
    """
    return np.format_float_positional(float(f"{value:.{digits}g}"), trim="-")
