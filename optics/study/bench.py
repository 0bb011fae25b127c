"""Readings from a bench fitted by the design's own model: loss, launch or bends, how sure, and whether the data decide."""

import dataclasses
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from optics.presets import Design
from optics.spec import OutOfRange
from optics.study.bench_fit import LEVEL, Fit, fitted, outliers, tell_alike
from optics.study.bench_model import (
    NA,
    Model,
    Sought,
    fitted_document,
    launch_overrides,
    loss_db_m,
    sought,
    sought_override,
)
from optics.study.bench_readings import Readings, parsed
from optics.study.bench_words import verdict
from optics.units import AnyUnit

CLOSE = 0.05  # settings within this share of each other tell one number, not two
FAR = 100.0  # a launch factor beyond this, or its inverse: a wrong unit rather than a launch
LONG = 50.0  # settings this many times the design's own, or its inverse, likewise
OWN = {"length_m": "guide.bundle.length_m", "distance_mm": "scene.target.distance_mm"}


@dataclass(frozen=True, slots=True)
class Fitted:
    """One value of the design as the readings have it, its 95 % interval, and where it comes from."""

    path: str
    value: float
    standard_error: float
    low: float
    high: float
    unit: str
    before: AnyUnit
    source: str
    at: str
    basis: str = "derived"


@dataclass(frozen=True, slots=True)
class Residual:
    """One reading against the fit; `normalized`: over its standard error."""

    row: int
    line: int
    at: AnyUnit
    measured: AnyUnit
    model: AnyUnit
    residual: AnyUnit
    normalized: AnyUnit
    apart: bool


@dataclass(frozen=True, slots=True)
class Bench:
    """What the readings say of the design: in words first, then in numbers, then as settings of the design."""

    verdict: str
    decided: bool
    fitted: tuple[Fitted, ...]
    residuals: tuple[Residual, ...]
    launch_factor: float
    launch_standard_error: AnyUnit
    correlation: AnyUnit
    chi_square: AnyUnit | None
    degrees_of_freedom: int
    fit_probability: float | None
    varied: str
    measured: str
    left_out: tuple[int, ...]
    overrides: dict[str, Any]
    document: dict[str, Any]

    def as_dict(self) -> dict[str, Any]:
        """Plain numbers, texts and lists, for JSON; the document is left to a file of its own."""
        found = dataclasses.asdict(self)
        del found["document"]
        return {**found, "confidence": LEVEL}


def read(path: str | Path) -> str:
    """The text of a file of readings."""
    try:
        return Path(path).read_text(encoding="utf-8-sig")
    except UnicodeDecodeError:
        raise OutOfRange(f"{path} is not text in UTF-8; it must be a table such as length_m,power_mw.") from None
    except (OSError, ValueError):
        raise OutOfRange(f"{path} cannot be read; it must be an existing file of readings.") from None


def bench(
    design: Design, readings: Readings, *, source: str, flat: bool = False, without: tuple[int, ...] = ()
) -> Bench:
    """Fit readings by the design's own model; `source` names their file, `without` the rows to leave out.

    Cut-back readings (length, power) give a factor on the fiber's own loss curve, or with `flat` one loss at all
    wavelengths; bends (radius, power) the numerical aperture that they show; light on the target (distance, lux)
    the launch alone. A launch factor is fitted with each.
    Raises OutOfRange: readings that the design cannot have, too few of them, a unit that must be wrong.
    """
    if flat and readings.varied != "length_m":
        raise OutOfRange(f"--flat goes with length_m and power_mw; the readings vary {readings.varied}.")
    used = readings.without(without) if without else readings
    _usual(design, used)
    aim = sought(design, used, flat)
    model = Model(design, used, aim)
    held = "" if aim is None else _held(model, used, aim)
    if held:
        aim, model = None, Model(design, used, None)
    try:
        fit = fitted(model, used, aim)
    except OutOfRange:
        raise
    except (ValueError, ArithmeticError):  # no light in the model, or settings all alike (a singular matrix)
        raise OutOfRange(
            "These readings go so far against the design's own model that no number fits them; look at units, settings "
            "and rows."
        ) from None
    factor = float(fit.values[0])
    if not np.isfinite(factor):
        raise OutOfRange(f"{source}: the readings cannot be fitted: the design's model gives no light for them.")
    if not 1 / FAR < factor < FAR:
        raise OutOfRange(
            f"{source}: the readings are {factor:.3g} times what the design gives; is {used.measured} in its unit?"
        )
    apart = outliers(lambda some: model if some is used else Model(design, some, aim), used, aim)
    at = f"{len(used.at)} readings of {used.measured} against {used.varied}"
    told, settings = _told(design, fit, aim, source, at)
    rows = {row for row, _ in apart}
    residuals = tuple(
        Residual(
            int(row), int(line), float(x), float(got), float(model), float(got - model), float(over), int(row) in rows
        )
        for row, line, x, got, model, over in zip(used.row, used.line, used.at, used.got, fit.model, fit.normalized)
    )
    said, decided = verdict(design, used, fit, aim, held, apart, _without_apart(design, used, aim, apart))
    note = f"Fitted to {source} ({at}): {', '.join(settings)}."
    return Bench(
        said,
        decided,
        told,
        residuals,
        factor,
        float(fit.standard_errors[0]),
        fit.correlation,
        fit.chi_square,
        fit.freedom,
        fit.fit_probability,
        used.varied,
        used.measured,
        tuple(sorted(without)),
        settings,
        fitted_document(design, settings, note),
    )


def bench_file(design: Design, path: str | Path, *, flat: bool = False, without: tuple[int, ...] = ()) -> Bench:
    """`bench` on a file of readings."""
    name = Path(path).name
    return bench(design, parsed(read(path), str(path)), source=name, flat=flat, without=without)


def _usual(design: Design, readings: Readings) -> None:
    """Settings far from the design's own are a wrong unit rather than a bench."""
    if readings.varied not in OWN:
        return
    own = design.fiberscope
    for part in OWN[readings.varied].split("."):
        own = getattr(own, part, None)
    if own is not None and not 1 / LONG < np.median(readings.at) / own < LONG:
        low, high = readings.at.min(), readings.at.max()
        raise OutOfRange(
            f"{readings.varied} runs from {low:g} to {high:g}, but {OWN[readings.varied]} is {own:g}: is it in another unit?"
        )


def _held(model: Model, readings: Readings, aim: Sought) -> str:
    """Why only the launch can be told, "" where both can."""
    kind = "bend radii" if readings.varied == "bend_radius_mm" else "lengths"
    alike = readings.at.max() <= (1 + CLOSE) * readings.at.min()
    if alike and (readings.turned_deg is None or np.ptp(readings.turned_deg) == 0):
        return f"all {kind} within {CLOSE:.0%}".replace("%", " %")
    if tell_alike(model, readings, aim):
        return "both move all readings alike"
    return ""


def _told(
    design: Design, fit: Fit, aim: Sought | None, source: str, at: str
) -> tuple[tuple[Fitted, ...], dict[str, Any]]:
    """The fitted values by path with their intervals, and the settings that put them into the design."""
    factor, error, half = float(fit.values[0]), float(fit.standard_errors[0]), float(fit.half_widths[0])
    told, settings = [], {}
    if aim is not None:
        value, wide = float(fit.values[1]), float(fit.half_widths[1])
        fiber = design.fiberscope.guide.fiber
        before = fiber.na if aim.path == NA else 1.0 if aim.kind.startswith("factor") else loss_db_m(fiber.attenuation)
        ends = max(value - wide, aim.low), min(value + wide, aim.high)
        told.append(Fitted(aim.path, value, float(fit.standard_errors[1]), *ends, aim.kind, before, source, at))
        settings[aim.path] = sought_override(design, aim, value)
    for path, value in launch_overrides(design, factor, settings).items():
        before = value / factor
        ends = max(before * (factor - half), 0.0), before * (factor + half)
        told.append(Fitted(path, value, before * error, *ends, path.rpartition(".")[2], before, source, at))
        settings[path] = value
    return tuple(told), settings


def _without_apart(design: Design, readings: Readings, aim: Sought | None, apart) -> Fit | None:
    """The fit with what stands apart left out; None where nothing does."""
    if not apart:
        return None
    rest = readings.take(~np.isin(readings.row, [row for row, _ in apart]))
    return fitted(Model(design, rest, aim), rest, aim)
