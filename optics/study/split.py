"""How to share a tube between image and light: the share at which the finest detail is seen at the target.

The tube is fixed, and with it the area that fibers may take: in a tube of given diameter `free_fill_fraction` of the
lumen beside channels and wires, in one that is solved for just what the design's fibers take there now. Of this area
the image part (bundle and jacket) gets the share `image_fraction` and the light fibers the rest. The field of view
stays as it is, so the focal length follows the image: more cores over the same field see finer, until the light
that is left starves the camera. All else stays: pitch, stop, lamp, launch.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from optics.chain.axes import evaluate_possible, holding
from optics.chain.columns import Columns, columns
from optics.chain.evaluate import evaluate
from optics.chain.solve import with_solved
from optics.fiberscope import SOLVE, Fiberscope
from optics.presets import Design, edited, resolve
from optics.spec import OutOfRange, require
from optics.units import AnyUnit
from optics.viewer.detail import PARTS

STEP = 0.005  # of the share, in the first scan
REFINED = (
    20,
    20,
)  # each scan after it lays so many steps on either side of the best, within one step of the scan before
FLAT = 1.05  # a share counts as good as the best while the gap is at most this much wider
IMAGE, GUIDE, EXIT, LENS = (
    "image.bundle.diameter_mm",
    "guide.bundle.diameter_mm",
    "guide.bundle.exit_mm",
    "image.objective.focal_mm",
)
OUTER = "body.section.outer_diameter_mm"


@dataclass(frozen=True, slots=True)
class Point:
    """One share, and what comes of it; None where nothing is resolved. `fits`: whether its ports lie in the tube as they are."""

    image_fraction: float
    smallest_gap_mm: float | None
    target_center_lux: float
    limited_by: str | None
    image_diameter_mm: float
    guide_diameter_mm: float
    fits: bool


@dataclass(frozen=True, slots=True)
class Best:
    """The best share, and the settings that make it of the design file."""

    image_fraction: float
    smallest_gap_mm: float
    target_center_lux: float
    limited_by: str
    image_diameter_mm: float
    guide_diameter_mm: float
    fits: bool
    set: dict[str, Any]


@dataclass(frozen=True, slots=True)
class Split:
    """The curve of shares, the best one (None where nothing is resolved at any), and how flat it is.

    `flat_from_fraction` to `flat_to_fraction`: shares around the best whose gap is within 5 % of it. `now_fraction`:
    the share in the design as it stands.
    """

    curve: tuple[Point, ...]
    best: Best | None
    flat_from_fraction: float | None
    flat_to_fraction: float | None
    now_fraction: float
    now_gap_mm: float | None
    outer_diameter_mm: float
    solved: bool
    shared_area_mm2: float


@dataclass(frozen=True, slots=True)
class Tube:
    """What stays: the lumen's usable area and the design's own lens, image and guide."""

    table: Columns
    usable_mm2: float
    outer_diameter_mm: float
    image_distance_mm: float
    focus_mm: float

    def at(self, image_fraction: np.ndarray) -> dict[str, np.ndarray]:
        """The columns of the shares: image and guide diameters and focal length [share]; nan where no image is left."""
        one = {path: float(self.table[path][0]) for path in (IMAGE, GUIDE, EXIT)}
        part = np.sqrt(4 / np.pi * image_fraction * self.usable_mm2)
        image = part - 2 * float(self.table.get("body.section.image_jacket_mm", 0.0)[0])
        image = np.where(image > 0, image, np.nan)
        fibers = (1 - image_fraction) * self.usable_mm2
        guide = np.sqrt(4 / np.pi * fibers / float(self.table["guide.bundle.packing_fraction"][0]))
        behind = self.image_distance_mm * image / one[IMAGE]
        found = {IMAGE: image, GUIDE: guide, LENS: 1 / (1 / behind + 1 / self.focus_mm)}
        if np.isfinite(one[EXIT]):
            found[EXIT] = one[EXIT] * guide / one[GUIDE]
        return found


def split(design: Design, given: Mapping[str, Any] | None = None, *, step: float = STEP) -> Split:
    """The shares of one design with settings given, every `step`, and the best one.

    Raises OutOfRange for a design without a body, without an image bundle, or whose tube has no room left.
    """
    require("step", step, "above 0 and at most 0.1", 0 < step <= 0.1)
    scope = resolve(edited(design.document, given or {})).fiberscope
    tube = fixed_tube(scope)
    shares = np.arange(1, round(1 / step)) * step
    curve = points(tube, shares)
    if not curve:
        raise OutOfRange(
            f"body.section leaves {tube.usable_mm2:.3g} mm2 for fibers; no image bundle and guide fit in it."
        )
    best = _finest(curve)
    for steps in REFINED if best else ():
        around = best.image_fraction + np.arange(-steps, steps + 1) / steps * step
        best = _finest([best, *points(tube, around[(around > 0) & (around < 1)])])
        step = step / steps
    low, high = _flat(curve, best) if best else (None, None)
    now = evaluate(tube.table)
    image, light = _taken_mm2(tube.table, now)
    gap = float(now["smallest_gap_mm"][0])
    return Split(
        curve=tuple(curve),
        best=_best(best, tube, dict(given or {})) if best else None,
        flat_from_fraction=low,
        flat_to_fraction=high,
        now_fraction=image / (image + light),
        now_gap_mm=gap if np.isfinite(gap) else None,
        outer_diameter_mm=tube.outer_diameter_mm,
        solved=scope.body.section.outer_diameter_mm == SOLVE,
        shared_area_mm2=tube.usable_mm2,
    )


def fixed_tube(scope: Fiberscope) -> Tube:
    """The tube of a design, given or solved, and what of it fibers may take."""
    if scope.body is None:
        raise OutOfRange("body is missing; split shares the lumen of a tube.")
    if scope.image is None or scope.image.form != "bundle":
        said = "image is missing" if scope.image is None else "image.form is 'chip'"
        raise OutOfRange(f"{said}; split shares the tube between an image bundle and light.")
    if scope.scene.ports.form == "placed":
        raise OutOfRange(
            "scene.ports.form is 'placed'; split changes the size of the ports, so they must follow the guide."
        )
    figures = evaluate(columns([scope]))
    scope = with_solved(scope, {name: float(figures[name][0]) for name in ("guide_diameter_mm", "image_mm")})
    table = columns([scope])
    section = scope.body.section
    others = [channel.inner_mm + 2 * channel.wall_mm for channel in section.channels]
    others += [wire.diameter_mm for wire in section.wires for _ in range(wire.count)]
    free = np.pi / 4 * (float(figures["lumen_mm"][0]) ** 2 - sum(each**2 for each in others))
    given = section.free_fill_fraction * max(free, 0.0)
    return Tube(
        table,
        float(sum(_taken_mm2(table, figures)) if section.outer_diameter_mm == SOLVE else given),
        float(figures["outer_diameter_mm"][0]),
        float(figures["image_distance_mm"][0]),
        float(figures["focus_from_pupil_mm"][0]),
    )


def points(tube: Tube, image_fraction: np.ndarray) -> list[Point]:
    """What comes of each share that is possible."""
    changed = tube.at(np.asarray(image_fraction, float))
    there = np.flatnonzero(np.isfinite(changed[IMAGE]) & (changed[GUIDE] > 0))
    many = tube.table.take(np.zeros(len(there), int)).replaced({path: found[there] for path, found in changed.items()})
    many = many.replaced({OUTER: np.full(len(there), tube.outer_diameter_mm)})
    good = np.flatnonzero(holding(many))
    many, there = many.take(good), there[good]
    if not there.size:
        return []
    figures, ready = evaluate_possible(many)
    return [_point(float(image_fraction[there[row]]), many, figures, row) for row in np.flatnonzero(ready)]


def _point(image_fraction: float, many: Columns, figures, row: int) -> Point:
    gap, limit = float(figures["smallest_gap_mm"][row]), figures["limited_by"][row]
    return Point(
        image_fraction,
        gap if np.isfinite(gap) else None,
        float(figures["center_lux"][row]),
        None if np.isnan(limit) else PARTS[int(limit)],
        float(many[IMAGE][row]),
        float(many[GUIDE][row]),
        bool(figures["fits"][row] > 0),
    )


def _finest(curve: list[Point]) -> Point | None:
    """The point with the smallest gap; of equal ones the brightest, then the first."""
    seen = [point for point in curve if point.smallest_gap_mm is not None]
    return min(seen, key=lambda point: (point.smallest_gap_mm, -point.target_center_lux), default=None)


def _flat(curve: list[Point], best: Point) -> tuple[AnyUnit, AnyUnit]:
    """The ends of the stretch around the best within 5 % of its gap, by straight lines between the points."""
    limit = FLAT * best.smallest_gap_mm
    ends = []
    for side in (-1, 1):
        inner = best
        beyond = sorted(
            (point for point in curve if side * (point.image_fraction - best.image_fraction) > 0),
            key=lambda point: side * point.image_fraction,
        )
        for point in beyond:
            if point.smallest_gap_mm is None:
                break
            if point.smallest_gap_mm > limit:
                part = (limit - inner.smallest_gap_mm) / (point.smallest_gap_mm - inner.smallest_gap_mm)
                ends.append(inner.image_fraction + part * (point.image_fraction - inner.image_fraction))
                break
            inner = point
        if len(ends) < (2 if side > 0 else 1):
            ends.append(inner.image_fraction)
    return ends[0], ends[1]


def _taken_mm2(table: Columns, figures) -> tuple[AnyUnit, AnyUnit]:
    part = float(table[IMAGE][0]) + 2 * float(table.get("body.section.image_jacket_mm", 0.0)[0])
    return np.pi / 4 * part**2, float(figures["light_area_mm2"][0])


def _best(best: Point, tube: Tube, given: dict[str, Any]) -> Best:
    made = {path: float(found[0]) for path, found in tube.at(np.array([best.image_fraction])).items()}
    made[OUTER] = tube.outer_diameter_mm
    fields = {name: getattr(best, name) for name in Point.__slots__}
    return Best(**fields, set={**given, **made})
