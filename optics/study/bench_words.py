"""The verdict of a bench in words: do the readings decide the question, does the model fit them, which stand apart."""

import numpy as np

from optics.presets import Design
from optics.study.bench_fit import ROUNDING, UNLIKELY, Fit
from optics.study.bench_model import AT_NM, NA, Sought, loss_db_m
from optics.study.bench_readings import Readings

LEAST_SHARE = 0.5  # an interval that reaches further than this share of its value decides nothing
ALIKE = 0.95  # a correlation beyond this: one number can stand for the other
LOW_LOSS = 0.05  # a factor below this on a fiber's loss: look at the unit of the lengths


def verdict(
    design: Design, readings: Readings, fit: Fit, aim: Sought | None, held: str, apart: tuple, rest: Fit | None
) -> tuple[str, bool]:
    """(the verdict in words, whether the readings decide the question that they were taken for)."""
    said, decided = _decision(design, readings, fit, aim, held)
    said += [_quality(readings, fit), *_apart(readings, fit, aim, apart, rest)]
    return " ".join(filter(None, said)), decided


def _decision(design: Design, readings: Readings, fit: Fit, aim: Sought | None, held: str) -> tuple[list[str], bool]:
    launch = f"The launch factor is {_pair(fit, 0)}."
    what = "the bends" if readings.varied == "bend_radius_mm" else "attenuation"
    if held:
        return [
            f"The data cannot tell {what} from launch: {held}.",
            f"{launch} It holds with {what} as the design has it.",
        ], False
    if aim is None:
        alike = "They cannot tell launch from attenuation, packing or broken fibers, which act alike on all of them."
        decided = _narrow(fit, 0, None)
        verb = "fix" if decided else "do not fix"
        return [f"The data {verb} the light as a whole: {launch[0].lower()}{launch[1:]}", alike], decided
    decided = _narrow(fit, 1, aim.known) and not fit.at_edge
    value = f"{_pair(fit, 1)}{_meaning(design, aim, float(fit.values[1]))}"
    name = "the numerical aperture that the bends show" if aim.path == NA else "the attenuation"
    said = [f"The data {'decide' if decided else 'do not decide'} {name}: {value}."]
    if fit.at_edge:
        edge = (
            f"the fit stands at the edge of what is possible, {fit.values[1]:.3g}, so the readings go against the model"
        )
        said = [f"The data do not decide {name}: {edge}."]
    elif not decided and aim.known is not None:
        low, high = aim.known
        said.append(
            f"The design's own range, {low:.3g} to {high:.3g}, is no wider: take more readings, or more different ones."
        )
    elif not decided:
        said.append("The interval is too wide to use: take more readings, or more different ones.")
    if abs(fit.correlation) > ALIKE and not decided:
        said.append("It cannot be told from the launch: a change in one is made up by the other.")
    if aim.kind.startswith("factor") and fit.values[1] + fit.half_widths[1] < LOW_LOSS:
        said.append("So little loss is not to be expected of this fiber: look at the unit of length_m.")
    return [*said, launch], decided


def _narrow(fit: Fit, place: int, known: tuple[float, float] | None) -> bool:
    """Whether an interval is narrower than what the design already says, and than half its value to each side."""
    half, value = fit.half_widths[place], fit.values[place]
    return bool(half <= LEAST_SHARE * abs(value) and (known is None or 2 * half < known[1] - known[0]))


def _pair(fit: Fit, place: int) -> str:
    """A value with its standard error and interval."""
    value, error, half = (float(part[place]) for part in (fit.values, fit.standard_errors, fit.half_widths))
    return f"{value:.3g} +- {error:.2g} (95 %: {max(value - half, 0.0):.3g} to {value + half:.3g})"


def _meaning(design: Design, aim: Sought, value: float) -> str:
    if aim.path == NA:
        return f", where the design has {aim.start:.3g}"
    if aim.kind.startswith("dB/m"):
        return f" dB/m at all wavelengths, where the design has {aim.start:.3g} dB/m at {AT_NM:.0f} nm"
    loss = value * loss_db_m(design.fiberscope.guide.fiber.attenuation)
    return f" times the design's own curve, {loss:.3g} dB/m at {AT_NM:.0f} nm"


def _quality(readings: Readings, fit: Fit) -> str:
    """Whether the model fits, by chi-square, by the scatter of repeats, or not to be said."""
    if fit.freedom == 0:
        return "As many readings as numbers: nothing is left to test the model with."
    scatter = float(np.sqrt(np.mean(((readings.got - fit.model) / readings.got) ** 2)))
    if readings.error is None and scatter < ROUNDING:
        return "The readings scatter not at all, as computed ones do: the intervals mean nothing."
    if readings.error is None:
        told = f"No standard errors are stated; the scatter is {100 * scatter:.2g} % of a reading."
        if fit.fit_probability is None:
            return f"{told} Without repeats it cannot be told from a fault of the model."
        fits = "fits" if fit.fit_probability >= UNLIKELY else "does not fit"
        ratio = f"lack of fit over the scatter of repeats is {fit.chi_square:.3g} (probability {_chance(fit)})"
        return f"{told} The model {fits}: {ratio}."
    told = f"chi-square is {fit.chi_square:.3g} for {fit.freedom} degrees of freedom (probability {_chance(fit)})"
    if fit.widened:
        return f"The model does not fit within the stated errors: {told}; the errors are widened accordingly."
    if fit.fit_probability > 1 - UNLIKELY:
        return f"The model fits better than the stated errors let expect: {told}; they may be too large."
    return f"The model fits: {told}."


def _chance(fit: Fit) -> str:
    return f"{fit.fit_probability:.2g}" if fit.fit_probability >= 0.001 else "below 0.001"


def _apart(readings: Readings, fit: Fit, aim: Sought | None, apart: tuple, rest: Fit | None) -> list[str]:
    """The readings that stand apart, each by its row, and what the fit would be without them."""
    if not apart:
        return []
    lines = dict(zip(readings.row.tolist(), zip(readings.line.tolist(), readings.at.tolist())))
    named = ", ".join(
        f"row {row} (line {lines[row][0]}, {readings.varied} {lines[row][1]:g}) by {abs(far):.1f} standard errors"
        for row, far in apart
    )
    place = 0 if aim is None else 1
    drop = " ".join(f"--without {row}" for row, _ in apart)
    name = "the launch factor" if aim is None else "the numerical aperture" if aim.path == NA else "the attenuation"
    return [f"Apart from the rest: {named}; kept. With {drop} {name} is {_pair(rest, place)}."]
