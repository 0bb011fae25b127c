"""What would help: sensible single changes of one design for finer detail, evaluated together, the most helpful first.

Those that cost another need stand last.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np

from optics.chain.axes import evaluate_possible, holding
from optics.chain.columns import Columns, columns
from optics.chain.evaluate import Figures, evaluate
from optics.fiberscope import Fiberscope
from optics.study.pick_needs import margins
from optics.study.sharper import FLAT, Sharpness
from optics.study.sharper_curves import numbered
from optics.study.sharper_sweeps import CHIP, CORE, FLUXES, PITCH, PIXEL, RATED
from optics.units import AnyUnit
from optics.viewer.camera import LEAST_PIXELS_PER_PITCH, MEASURING_PIXELS_PER_PITCH

LEAST_GAIN = 0.02  # of what is resolved: less is no help
MORE = 1.25  # a longer lens, a wider bundle
SHORTER = 0.7  # of an eyepiece
DIGITS, AIMED_DIGITS = 2, 3  # of a value; of one that has to meet a need
SURE = 1.01  # a need is aimed at with a hair to spare, for numbers are rounded
FOCAL, FOCUS, DISTANCE = "image.objective.focal_mm", "image.objective.focus_mm", "scene.target.distance_mm"
RELAY, EYEPIECE, WIDE = "viewer.camera.relay_magnification", "viewer.eye.eyepiece_focal_mm", "image.bundle.diameter_mm"

Settings = dict[str, Any]


@dataclass(frozen=True, slots=True)
class Help:
    """One change and what it gives; `settings` make it in the document, its leading number first.

    `gain_share`: what is resolved then over what is now, less 1; infinite where nothing is now. `breaks`: needs that are
    met now and would not be, and what no longer fits or passes.
    """

    settings: Settings
    resolved_lp_mm: float
    smallest_gap_mm: float
    gain_share: float
    field_of_view_deg: float
    limited_by: str | None
    breaks: tuple[str, ...]


def helps(fiberscope: Fiberscope, curves: tuple[Sharpness, ...]) -> tuple[Help, ...]:
    """Changes that resolve at least 2 % more; the numbers are those of `size` of the changed design.

    `curves`: of `sharper.over_all`. Where a need for a gap is open, the least change along a curve that meets it; else where
    more of the same gains under 5 %. Raises OutOfRange without an image.
    """
    scope = numbered(fiberscope)
    table = columns([scope])
    base = evaluate(table)
    wanted = scope.needs.smallest_gap_mm
    level = 0.0 if wanted is None else 0.5 / wanted
    tried = [made for curve in curves if (made := _along(table, curve, level))]
    tried += [made for how in (_focus, _lens, _wider, _relay, _eyepiece) if (made := how(table, base))]
    if not tried:
        return ()
    many, figures, ready = _evaluated(table, tried)
    if not ready.any():
        return ()
    now = float(np.nan_to_num(base["resolved_lp_mm"][0]))
    before, after = margins(scope.needs, table, base), margins(scope.needs, many, figures)
    found = []
    for row in np.flatnonzero(ready):
        lost = tuple(name for name in after if after[name][row] < 0 <= before[name][0])
        help = _help(tried[row], figures, int(row), now, lost)
        if help is not None:
            found.append(help)
    return tuple(sorted(found, key=lambda help: (bool(help.breaks), -help.resolved_lp_mm)))


def _evaluated(table: Columns, tried: list[Settings]) -> tuple[Columns, Figures, np.ndarray]:
    many, changed = table.take(np.zeros(len(tried), int)), {}
    for row, settings in enumerate(tried):
        for path, value in settings.items():
            changed.setdefault(path, many[path].copy())[row] = value
    many = many.replaced(changed)
    figures, ready = evaluate_possible(many)
    return many, figures, ready & holding(many)


def _help(settings: Settings, figures: Figures, row: int, now: float, lost: tuple[str, ...]) -> Help | None:
    resolved, limit = float(np.nan_to_num(figures["resolved_lp_mm"][row])), figures.limited_by()[row]
    gain = resolved / now - 1 if now > 0 else np.inf
    if resolved <= 0 or gain < LEAST_GAIN:
        return None
    return Help(settings, resolved, 0.5 / resolved, gain, float(figures["field_of_view_deg"][row]), limit, lost)


# The changes


def _rounded(value: AnyUnit, digits: int = DIGITS) -> float:
    return float(f"{value:.{digits}g}")


def _up(value: AnyUnit) -> float:
    """Rounded up in its third digit."""
    return _rounded(value * (1 + 0.5 * 10.0 ** (1 - AIMED_DIGITS)), AIMED_DIGITS)


def _along(table: Columns, curve: Sharpness, level: float) -> Settings | None:
    """Along a curve, as far as the need asks; without one, or where none would do, as far as it pays."""
    reach = level if curve.now_lp_mm < level <= curve.best_lp_mm else FLAT * curve.best_lp_mm
    if curve.now_lp_mm >= reach:
        return None
    value = _rounded(_first(curve, SURE * reach), AIMED_DIGITS) if reach == level else _rounded(curve.enough)
    ratio = value / curve.now
    if curve.path == PIXEL:
        return {PIXEL: value, **{path: int(max(round(float(table[path][0]) / ratio), 3)) for path in CHIP}}
    settings: Settings = {curve.path: value}
    if curve.path == PITCH:
        settings[CORE] = _rounded(float(table[CORE][0]) * ratio, AIMED_DIGITS)
        if table.has(RELAY)[0]:
            pixels = float((table[RELAY] * value / table["viewer.camera.pixel_um"])[0])
            if pixels < LEAST_PIXELS_PER_PITCH:
                settings[RELAY] = _up(float(table[RELAY][0]) * LEAST_PIXELS_PER_PITCH / pixels)
    if curve.path in FLUXES and table.has(RATED)[0]:
        settings[RATED] = float(table[RATED][0]) * ratio
    return settings


def _first(curve: Sharpness, level: float) -> float:
    """From now on toward more, where a level is first reached, by straight lines between places; the best where it is not."""
    ahead = curve.toward * np.log(curve.value / curve.now) >= 0
    value, height = curve.value[ahead][:: curve.toward], curve.resolved_lp_mm[ahead][:: curve.toward]
    above = np.flatnonzero(height >= level)
    if not above.size or above[0] == 0:
        return curve.best
    row = int(above[0])
    part = (level - height[row - 1]) / (height[row] - height[row - 1])
    return float(value[row - 1] * (value[row] / value[row - 1]) ** part)


def _focus(table: Columns, base: Figures) -> Settings | None:
    distance, focus = float(table[DISTANCE][0]), float(table[FOCUS][0])
    return None if abs(distance / focus - 1) < 0.01 else {FOCUS: distance}


def _lens(table: Columns, base: Figures) -> Settings | None:
    """A longer lens: finer, over less field."""
    return {FOCAL: _rounded(MORE * float(table[FOCAL][0]))}


def _wider(table: Columns, base: Figures) -> Settings | None:
    """A wider bundle with its lens: more cores over the same field."""
    if not table.has(PITCH)[0]:
        return None
    image, focus = float(table[WIDE][0]), float(base["focus_from_pupil_mm"][0])
    wide = _rounded(MORE * image)
    behind = float(base["image_distance_mm"][0]) * wide / image
    return {WIDE: wide, FOCAL: _rounded(1 / (1 / behind + 1 / focus), AIMED_DIGITS)}


def _relay(table: Columns, base: Figures) -> Settings | None:
    """As many pixels a pitch as measuring asks for."""
    pixels = float(base["pixels_per_pitch"][0])
    if not pixels < MEASURING_PIXELS_PER_PITCH:
        return None
    return {RELAY: _up(float(table[RELAY][0]) * MEASURING_PIXELS_PER_PITCH / pixels)}


def _eyepiece(table: Columns, base: Figures) -> Settings | None:
    return {EYEPIECE: _rounded(SHORTER * float(table[EYEPIECE][0]))} if table.has(EYEPIECE)[0] else None
