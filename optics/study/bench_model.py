"""What the design should show on the bench, and how a fit is written back into it.

Every reading is the whole design through the chain, with one thing varied. A launch factor multiplies all light;
beside it one number is looked for: the loss of the guide (cut-back) or the NA that its bends show.
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from optics.chain.columns import Columns, Curves
from optics.chain.evaluate import evaluate
from optics.chain.light import light
from optics.presets import Design, edited, resolve
from optics.spec import Curve, OutOfRange
from optics.study.bench_readings import Readings
from optics.study.margins_draw import scaled_curve
from optics.study.margins_ranges import nominal_columns
from optics.units import AnyUnit, mw_from_w

ATTENUATION, NA = "guide.fiber.attenuation", "guide.fiber.na"
BENDS = "guide.bundle.bends"
VARIED = {"length_m": "guide.bundle.length_m", "distance_mm": "scene.target.distance_mm"}
AT_NM = 550.0  # where a loss is told in dB/m
STEP = 1e-4  # of the looked-for number, for its slope


@dataclass(frozen=True, slots=True)
class Sought:
    """The number looked for beside the launch factor: where it starts, what it may be, and what the design says of it."""

    path: str
    kind: str  # "factor on the curve", "dB/m at all wavelengths", "numerical aperture"
    start: AnyUnit
    low: float
    high: float
    known: tuple[float, float] | None  # the design's own tolerance


def sought(design: Design, readings: Readings, flat: bool) -> Sought | None:
    """What these readings can tell beside the launch; None where they fix the light as a whole alone."""
    fiber, said = design.fiberscope.guide.fiber, design.sourced
    if readings.varied == "distance_mm":
        return None
    path = ATTENUATION if readings.varied == "length_m" else NA
    # a curve of the file's own has no stated tolerance, whatever the preset's has
    stated = path in said and f"{path}.value" not in said
    low, high = (said[path].low, said[path].high) if stated else (None, None)
    known = None if low is None or high is None else (float(low), float(high))
    if path == NA:
        return Sought(
            NA, "numerical aperture", fiber.na, 0.3 * fiber.na, min(1.7 * fiber.na, 0.95 * fiber.core_index), known
        )
    if flat:
        return Sought(ATTENUATION, "dB/m at all wavelengths", loss_db_m(fiber.attenuation), 0.0, 50.0, None)
    return Sought(ATTENUATION, "factor on the curve", 1.0, 0.0, 100.0, known)


def loss_db_m(curve: Curve) -> float:
    """The loss of a curve at 550 nm, or at the nearest wavelength that it has."""
    return float(np.interp(AT_NM, curve.abscissa, curve.ordinate))


class Model:
    """The readings that a design should give, for a launch factor of 1, and their slope in the number looked for."""

    def __init__(self, design: Design, readings: Readings, aim: Sought | None):
        self._readings, self._aim = readings, aim
        self._table = _setup(nominal_columns(design.fiberscope), readings)
        self._known: dict[float, tuple[np.ndarray, np.ndarray]] = {}

    def at(self, value: float) -> tuple[np.ndarray, np.ndarray]:
        """(readings, their derivative in the number looked for), all readings at once; answers are kept."""
        if value not in self._known:
            self._known[value] = self._shape(value)
        return self._known[value]

    def _shape(self, value: float) -> tuple[np.ndarray, np.ndarray]:
        if self._aim is None:
            found = self._measured(self._table)
            return found, np.zeros_like(found)
        step, count = STEP * max(abs(value), 0.1), len(self._readings.at)
        ends = np.maximum([value, value - step, value + step], 0.0)
        table = self._table.take(np.tile(np.arange(count), 3))
        found = self._measured(self._moved(table, np.repeat(ends, count))).reshape(3, count)
        return found[0], (found[2] - found[1]) / (ends[2] - ends[1])

    def _moved(self, table: Columns, value: np.ndarray) -> Columns:
        if self._aim.path == NA:
            return table.replaced({NA: value})
        if self._aim.kind.startswith("dB/m"):
            old = table.curve[ATTENUATION]
            even = Curves(np.ones_like(old.on_grid), old.covered, old.row)
            table = replace(table, curve={**table.curve, ATTENUATION: even})
        return scaled_curve(table, ATTENUATION, value)

    def _measured(self, table: Columns) -> np.ndarray:
        if self._readings.measured == "power_mw":
            return mw_from_w(light(table).value["delivered_w"])
        return evaluate(table)["center_lux"]


def _setup(nominal: Columns, readings: Readings) -> Columns:
    """One row for each reading, with what was varied in its place."""
    table = nominal.take(np.zeros(len(readings.at), int))
    if readings.varied != "bend_radius_mm":
        path = VARIED[readings.varied]
        if not nominal.has(path).any():
            raise OutOfRange(f"The readings vary {readings.varied}, but the design has no {path}.")
        return table.replaced({path: readings.at})
    if readings.turned_deg is not None:
        one = np.ones((len(readings.at), 1))
        bends = {"radius_mm": readings.at[:, None], "angle_deg": readings.turned_deg[:, None], "repeats": one}
        return table.replaced({f"{BENDS}.{name}": column for name, column in bends.items()})
    if not nominal.has(f"{BENDS}.radius_mm").any():
        raise OutOfRange(
            "The design has no bends; the readings need a column bend_deg that says how far each bend turns."
        )
    radius = table.number[f"{BENDS}.radius_mm"]
    return table.replaced({f"{BENDS}.radius_mm": np.where(np.isnan(radius), np.nan, readings.at[:, None])})


# Back into the design


def launch_overrides(design: Design, factor: float, others: Mapping[str, Any]) -> dict[str, float]:
    """The settings that multiply all light of a design by a factor: the launch where it can bear it, else the lamp.

    A condenser passes at most all light, and no launch may be brighter than its lamp: beyond that it is the lamp
    that must give more than it states. `others`: the other settings of the fit, with which these must stand.
    """
    launch, lamp = design.fiberscope.source.launch, design.fiberscope.source.lamp
    flux = "flux_lm" if lamp.flux_lm is not None else "flux_w"
    brighter = {f"source.lamp.{flux}": getattr(lamp, flux) * factor}
    if launch.form == "butt":
        return brighter
    name = "rated_lm" if launch.form == "rated" else "transmission"
    first = {f"source.launch.{name}": getattr(launch, name) * factor}
    try:
        resolve(edited(design.document, {**others, **first}))
    except OutOfRange:
        return {**first, **brighter} if launch.form == "rated" else brighter
    return first


def sought_override(design: Design, aim: Sought, value: float) -> Any:
    """The value of the number looked for as a design file states it: a number, or a whole curve."""
    if aim.path == NA:
        return value
    curve = design.fiberscope.guide.fiber.attenuation
    if aim.kind.startswith("dB/m"):
        return {"wavelength_nm": [curve.wavelength_nm[0], curve.wavelength_nm[-1]], "value": [value, value]}
    return {"wavelength_nm": list(curve.wavelength_nm), "value": [value * one for one in curve.value]}


def fitted_document(design: Design, settings: Mapping[str, Any], note: str) -> dict[str, Any]:
    """The design's document with the fit in it, and a note that names the readings; refused if it cannot stand."""
    old = design.fiberscope.note
    document = edited(design.document, {**settings, "note": f"{old} {note}".strip()})
    resolve(document)
    return document
