"""What the pictures of the fit show: the face of the tip, the tube behind it with its fibers, and which parts set its size."""

from dataclasses import dataclass

import numpy as np

from optics.body.fill import filled
from optics.body.section import jacketed_mm
from optics.chain.columns import Columns, columns
from optics.chain.fit import fit
from optics.chain.solve import numbered
from optics.chain.target import field_of_view
from optics.fiberscope import Fiberscope
from optics.report.view_body import Part, section_view
from optics.units import mm2_from_um2, mm_from_um

DRAWN = 12_000  # fibers at most that a picture shows one by one
THINNINGS = 30  # steps toward the pitch that spreads the fibers over the free area
FREE = 0.005  # of the lumen: what a part may add and still come free, a little above the search's own error


@dataclass(frozen=True, slots=True)
class TubeView:
    """Tip and tube to the same scale around the lumen's center; later parts lie upon earlier ones.

    The fibers lie spread evenly over what is free, at `fiber_x_mm`, `fiber_y_mm`; empty where they are too many to draw.
    """

    tip: tuple[Part, ...]
    tube: tuple[Part, ...]
    lumen_mm: float
    needed_lumen_mm: float
    outer_diameter_mm: float
    fiber_mm: float
    fibers_count: int
    fiber_x_mm: np.ndarray
    fiber_y_mm: np.ndarray
    fits: bool


@dataclass(frozen=True, slots=True)
class FillView:
    """The guide's fibers in what the other parts leave free behind the tip.

    `held_count`: most that room and limit allow; `full_lumen_mm`: the least lumen in which the guide's fibers stay within
    the limit, all else the same.
    """

    free_area_mm2: float
    fiber_area_mm2: float
    fill_fraction: float
    limit_fraction: float
    fiber_count: int
    held_count: int
    full_lumen_mm: float
    fits: bool


@dataclass(frozen=True, slots=True)
class Weight:
    """What a group of parts adds to the lumen: it could be so much smaller without them."""

    name: str
    diameter_mm: float
    parts_count: int
    adds_mm: float
    comes_free: bool


def tube_view(fiberscope: Fiberscope) -> TubeView | None:
    """Both sections of the insertion tube. None without a body."""
    scope = numbered(fiberscope)
    view = section_view(scope)
    if view is None:
        return None
    fiber_mm, count = float(mm_from_um(scope.guide.fiber.fiber_um)), int(_body(scope)["fiber_count"])
    tube = _behind_the_tip(scope, view.parts)
    lumen = max(view.lumen_mm, view.needed_lumen_mm)
    x, y = _spread(tube, lumen, fiber_mm, count if view.fits else 0)
    tip = tuple(part for part in view.parts if part.kind != "wire")
    if scope.image is not None:
        axis, lens = next(part for part in tip if part.kind == "cores"), scope.image.objective
        pupil = min(lens.focal_mm / lens.f_number, axis.diameter_mm)
        kept = tuple(part for part in tip if part.kind != "cores")
        tip = (*kept, Part("entrance pupil", "pupil", axis.x_mm, axis.y_mm, pupil))
    sizes = (view.lumen_mm, view.needed_lumen_mm, view.outer_diameter_mm)
    return TubeView(tip, tube, *sizes, fiber_mm, count, x, y, bool(view.fits))


def _body(scope: Fiberscope) -> dict[str, float]:
    """The chain's numbers of the body."""
    table = columns([scope])
    return {name: float(found[0]) for name, found in fit(table, field_of_view(table)["image_mm"])[0].items()}


def _behind_the_tip(scope: Fiberscope, parts: tuple[Part, ...]) -> tuple[Part, ...]:
    """Parts of the tube: those of the tip without ports, and the image part without the objective's barrel."""
    bundle_mm = 0.0
    if scope.image is not None and scope.image.form == "bundle":
        section = scope.body.section
        bundle_mm = float(
            jacketed_mm(bundle_mm=scope.image.bundle.diameter_mm, jacket_mm=section.image_jacket_mm, barrel_mm=0.0)
        )
    chip = scope.image is not None and scope.image.form == "chip"
    kept = []
    for part in parts:
        if part.kind == "light" or (chip and part.kind in ("image", "cores")):
            continue  # fibers and a chip's thin cable have no place of their own
        narrow = part.kind == "image"
        kept.append(Part("image bundle", "image", part.x_mm, part.y_mm, bundle_mm) if narrow else part)
    return tuple(kept)


def _solid(parts: tuple[Part, ...]) -> np.ndarray:
    """Rows (x, y, diameter) of the parts that no other part holds."""
    rows = [(p.x_mm, p.y_mm, p.diameter_mm) for p in parts if p.kind in ("image", "channel", "wire")]
    return np.array(rows or [(0.0, 0.0, 0.0)], float)


def _spread(tube: tuple[Part, ...], lumen_mm: float, fiber_mm: float, count: int) -> tuple[np.ndarray, np.ndarray]:
    """About `count` places on a lattice over the free area, as wide apart as that allows."""
    if not 0 < count <= DRAWN:
        return np.empty(0), np.empty(0)
    solid = _solid(tube)
    tight, loose = fiber_mm, lumen_mm
    for _ in range(THINNINGS):
        pitch = np.sqrt(tight * loose)
        enough = len(_open_places(solid, lumen_mm, fiber_mm, pitch)) >= count
        tight, loose = (pitch, loose) if enough else (tight, pitch)
    places = _open_places(solid, lumen_mm, fiber_mm, tight)
    return places[:count, 0], places[:count, 1]


def _open_places(solid: np.ndarray, lumen_mm: float, fiber_mm: float, pitch_mm: float) -> np.ndarray:
    """Lattice points at which a fiber touches neither wall nor part, from the middle outward."""
    rings = int(lumen_mm / pitch_mm / 2 / np.sqrt(0.75)) + 1
    i, j = (a.ravel() for a in np.meshgrid(*2 * [np.arange(-rings, rings + 1)]))
    x, y = pitch_mm * (i + 0.5 * (j % 2)), pitch_mm * np.sqrt(0.75) * j
    away = np.hypot(x, y)
    inside = away <= (lumen_mm - fiber_mm) / 2
    for px, py, diameter in solid:
        inside &= (diameter == 0) | (np.hypot(x - px, y - py) >= (diameter + fiber_mm) / 2)
    order = np.argsort(away[inside], kind="stable")
    return np.column_stack([x[inside], y[inside]])[order]


def fill_view(fiberscope: Fiberscope) -> FillView | None:
    """How full the free area behind the tip is. None without a body."""
    scope = numbered(fiberscope)
    view = section_view(scope)
    if view is None:
        return None
    body, limit = _body(scope), scope.body.section.free_fill_fraction
    solid, lumen = _solid(_behind_the_tip(scope, view.parts)), max(view.lumen_mm, view.needed_lumen_mm)
    fiber_mm = float(mm_from_um(scope.guide.fiber.fiber_um))
    held = filled(lumen_mm=lumen, parts=solid, fiber_mm=fiber_mm, free_fill_fraction=limit)
    free, fibers = (
        float(held.free_area_mm2),
        float(mm2_from_um2(np.pi / 4 * scope.guide.fiber.fiber_um**2) * body["fiber_count"]),
    )
    full = np.sqrt(max(lumen**2 + 4 / np.pi * (fibers / limit - free), 0.0))
    counts = (int(body["fiber_count"]), int(held.fiber_count))
    return FillView(free, fibers, fibers / free, limit, *counts, float(full), bool(view.fits))


def weights(fiberscope: Fiberscope) -> tuple[Weight, ...]:
    """What each group of parts adds to the lumen, largest first: the section laid out again without it."""
    if fiberscope.body is None:
        return ()
    scope = numbered(fiberscope)
    view = section_view(scope)
    groups = _groups(scope)
    if len(groups) < 2:
        return ()
    base = columns([scope]).take(np.zeros(len(groups), int))
    image = np.repeat(field_of_view(base)["image_mm"][:1], len(groups))
    without: Columns = base
    for row, (_, _, _, cleared) in enumerate(groups):
        for path, item in cleared:
            if path == "image":
                image[row] = np.nan
                continue
            column = without[path].copy()
            column[(row, item) if column.ndim == 2 else row] = 0.0
            without = without.replaced({path: column})
    lumen = fit(without, image)[0]["needed_lumen_mm"]
    found = []
    for (name, diameter, count, _), rest in zip(groups, lumen):
        adds = max(view.needed_lumen_mm - float(rest), 0.0)
        found.append(Weight(name, diameter, count, adds, adds < FREE * view.needed_lumen_mm))
    return tuple(sorted(found, key=lambda weight: -weight.adds_mm))


def _groups(scope: Fiberscope) -> list[tuple[str, float, int, list[tuple[str, int | slice]]]]:
    """(name, diameter of one, how many, what to clear) of each group of like parts."""
    parts, section, every = section_view(scope).parts, scope.body.section, slice(None)
    found = []
    images = [part for part in parts if part.kind == "image"]
    if images:
        found.append(("image part", images[0].diameter_mm, 1, [("image", every)]))
    lights = [part for part in parts if part.kind == "light"]
    form = getattr(scope.scene and scope.scene.ports, "form", "")
    cleared = [("guide.bundle.diameter_mm", every)]
    if scope.guide.bundle.exit_mm is not None:
        cleared.append(("guide.bundle.exit_mm", every))
    if form == "placed":
        cleared = [(f"scene.ports.ports.{name}", every) for name in ("x_mm", "y_mm", "diameter_mm")]
    name = {"": "light guide", "annulus": "light ring", "crescent": "light crescent"}.get(form, "light port")
    found.append((name, max(part.diameter_mm for part in lights), len(lights), cleared))
    for place, channel in enumerate(section.channels):
        wide = channel.inner_mm + 2 * channel.wall_mm
        paths = [(f"body.section.channels.{key}", place) for key in ("inner_mm", "wall_mm")]
        found.append(("channel", wide, 1, paths))
    for place, wire in enumerate(section.wires):
        found.append(("wire", wire.diameter_mm, wire.count, [("body.section.wires.count", place)]))
    return found
