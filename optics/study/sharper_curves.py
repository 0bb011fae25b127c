"""The contrast that each part of the way back leaves over frequency, and what the viewer needs: where they meet is resolved.

One design in the chain's own parts and factors, so that the curves pass through the numbers of `size`.
"""

from dataclasses import dataclass, fields

import numpy as np

from optics.chain.columns import Columns, columns
from optics.chain.detail import factors, needed, present
from optics.chain.evaluate import evaluate
from optics.chain.fit import fit
from optics.chain.light import Light, light
from optics.chain.solve import PATHS, solved, with_solved
from optics.chain.target import field_of_view, port_objects, target
from optics.chain.way_back import Parts, way_back
from optics.fiberscope import SOLVE, Fiberscope
from optics.scene.ports import Port
from optics.spec import OutOfRange, require
from optics.units import AnyUnit
from optics.viewer.detail import PARTS

BEYOND = 1.25  # the curves run so far beyond the lattice limit
FAR = 4.0  # or, where that lies much farther out, to so many times what is resolved


@dataclass(frozen=True, slots=True)
class Way:
    """The way back of some designs [design]: its parts, its numbers, image over target size; the light and ports before it."""

    table: Columns
    parts: Parts
    value: dict[str, np.ndarray]
    seen: dict[str, np.ndarray]
    lit: Light
    ports: tuple[Port, ...]  # of the first design

    @property
    def size_ratio(self) -> np.ndarray:
        """Image over target, at the target's distance."""
        return self.seen["image_over_target_ratio"]


@dataclass(frozen=True, slots=True)
class Contrasts:
    """Contrast over frequency at the target. `mtf`: by part, those that the design has, in the order of the ledger.

    `product_mtf`: all parts together. `needed_mtf`: what of the detail's own contrast `detail_contrast` must be left; what is
    resolved is where the two meet, or where the lattice ends (0: they never do).
    """

    frequency_lp_mm: np.ndarray
    mtf: dict[str, np.ndarray]
    product_mtf: np.ndarray
    needed_mtf: np.ndarray
    detail_contrast: float
    resolved_lp_mm: float
    lattice_limit_lp_mm: float
    limited_by: str | None


def numbered(fiberscope: Fiberscope) -> Fiberscope:
    """The design with what it leaves to be solved for as numbers. Raises OutOfRange without an image."""
    if fiberscope.image is None or fiberscope.scene is None:
        raise OutOfRange("image is missing; a bare light guide shows no detail.")
    table = columns([fiberscope])
    if not any((table.texts(path) == SOLVE).any() for path in PATHS):
        return fiberscope
    figures = evaluate(table)
    return with_solved(fiberscope, {name: float(figures[name][0]) for name in ("guide_diameter_mm", "image_mm")})


def way_of(table: Columns) -> Way:
    """The way back of designs that have an image."""
    table = solved(table)
    lit, seen = light(table), field_of_view(table)
    placed = fit(table, seen["image_mm"])[1]
    landed = target(table, lit, placed, seen)
    parts, value = way_back(table, landed.center_w_m2_nm, seen)
    ports = port_objects({name: found[0] for name, found in placed.items()})
    return Way(table, parts, {**landed.value, **value}, seen, lit, ports)


def repeated(parts: Parts, times: int) -> Parts:
    """Each design so many times over, one for each frequency to be asked."""
    return Parts(**{field.name: np.repeat(getattr(parts, field.name), times, axis=0) for field in fields(Parts)})


def product_mtf(parts: Parts, frequency_lp_mm: np.ndarray) -> np.ndarray:
    """Contrast that all parts leave together, at frequencies [..., design] at the image."""
    return np.prod(list(factors(parts, frequency_lp_mm).values()), axis=0)


def needed_mtf(parts: Parts, frequency_lp_mm: np.ndarray) -> np.ndarray:
    """What must be left of the detail's own contrast to be seen, at frequencies [design] at the image."""
    return needed(parts, frequency_lp_mm[None, :])[0] / parts.contrast


def contrasts(fiberscope: Fiberscope, count: int = 161) -> Contrasts:
    """The curves of one design, from frequency 0 on. Raises OutOfRange without an image.

    At what is resolved they equal the ledger of `size`.
    """
    require("count", count, "at least 2", count >= 2)
    table = columns([numbered(fiberscope)])
    figures, way = evaluate(table), way_of(table)
    resolved, limit = float(figures["resolved_lp_mm"][0]), float(figures["lattice_limit_lp_mm"][0])
    end = BEYOND * limit if resolved == 0 else min(BEYOND * limit, max(FAR * resolved, BEYOND * resolved))
    at_target = np.linspace(0.0, end, count)
    at_image, many = at_target / way.size_ratio[0], repeated(way.parts, count)
    by_part, has = factors(many, at_image), present(way.parts)[:, 0]
    return Contrasts(
        frequency_lp_mm=at_target,
        mtf={part: by_part[part] for part, there in zip(PARTS, has) if there and part in by_part},
        product_mtf=product_mtf(many, at_image),
        needed_mtf=needed_mtf(many, at_image),
        detail_contrast=float(way.parts.contrast[0]),
        resolved_lp_mm=resolved,
        lattice_limit_lp_mm=limit,
        limited_by=figures.limited_by()[0],
    )


def losses(way: Way, frequency_lp_mm: AnyUnit) -> dict[str, np.ndarray]:
    """What each part costs at a frequency at the target [design], in the log of contrast; light: of what is needed."""
    at_image = frequency_lp_mm / way.size_ratio
    found = {part: -np.log(np.maximum(contrast, 1e-12)) for part, contrast in factors(way.parts, at_image).items()}
    return {"light": np.log(np.maximum(needed_mtf(way.parts, at_image), 1e-12)), **found}
