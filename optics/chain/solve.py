"""Parts whose diameter is to be solved for: the most of it that the tube still holds."""

from collections.abc import Mapping
from functools import lru_cache

import numpy as np

from optics.chain.columns import Columns, columns
from optics.chain.fit import section
from optics.chain.target import image_size_mm
from optics.fiberscope import SOLVE, Fiberscope

PATHS = ("guide.bundle.diameter_mm", "image.bundle.diameter_mm")
LEAST_MM = 0.01
HALVINGS = 40


def solved(table: Columns) -> Columns:
    """The same designs with numbers where a diameter was to be solved for: the largest that fits, to 1e-9 of the lumen.

    A tube too narrow for the other parts leaves LEAST_MM, and the section says that it does not fit.
    """
    for path in PATHS:
        rows = np.flatnonzero(table.texts(path) == SOLVE)
        if rows.size == 0:
            continue
        few = table.take(rows)
        low = np.full(rows.size, LEAST_MM)
        high = np.maximum(few["body.section.outer_diameter_mm"] - 2 * few["body.section.wall_mm"], 2 * LEAST_MM)
        for _ in range(HALVINGS):
            middle = (low + high) / 2
            tried = few.replaced({path: middle})
            fits = section(tried, image_size_mm(tried))[0]["fits"] > 0
            low, high = np.where(fits, middle, low), np.where(fits, high, middle)
        found = table[path].copy()
        found[rows] = low
        table = table.replaced({path: found})
    return table


def with_solved(fiberscope: Fiberscope, value: Mapping[str, float]) -> Fiberscope:
    """The design with the solved diameters as numbers, for words and pictures; the same one where none was solved for."""
    changes = {"guide": value["guide_diameter_mm"], "image": value["image_mm"]}
    told = {}
    for part, diameter_mm in changes.items():
        bundle = getattr(getattr(fiberscope, part), "bundle", None)
        if bundle is not None and bundle.diameter_mm == SOLVE:
            told[part] = diameter_mm
    if not told:
        return fiberscope
    plain = fiberscope.model_dump()
    for part, diameter_mm in told.items():
        plain[part]["bundle"]["diameter_mm"] = float(diameter_mm)
    return type(fiberscope).model_validate(plain)


@lru_cache(maxsize=64)
def numbered(fiberscope: Fiberscope) -> Fiberscope:
    """The design with diameters that are to be solved for as numbers; half a second where there is one, so kept."""
    table = solved(columns([fiberscope]))
    guide_mm, image_mm = (float(table[path][0]) for path in PATHS)
    return with_solved(fiberscope, {"guide_diameter_mm": guide_mm, "image_mm": image_mm})
