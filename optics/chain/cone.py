"""How wide the light's cone is on its way: the bins of angle, what tapers and bends make of them, what stands in front."""

import numpy as np

from optics.beam import bin_edges
from optics.chain.columns import Columns
from optics.guide.bend import relative_bend_ratio
from optics.guide.ends import tapered_na
from optics.media.index import D_LINE_NM, refractive_index

INNER_BINS, OUTER_BINS = 12, 5
# Room beyond NA^2 for what bends widen: 2.5 X, at least a little, at most what the bend table knows.
BEND_SPREAD, LEAST_ROOM, MOST_ROOM = 2.5, 1.02, 2.0
LARGEST_NA = 0.9999  # of light that is followed: a grazing ray gets through no face
# Where a taper would push bins beyond that, they are left thin and dark instead.
LAST_EDGES = LARGEST_NA**2 + 1e-9 * np.arange(INNER_BINS + OUTER_BINS + 1)


def angle_edges(columns: Columns, fill_na: np.ndarray, face_na: np.ndarray) -> np.ndarray:
    """Inner bins up to where the light ends in every guide; outer bins for what bends, a joint or a cover may need."""
    first, guide = np.minimum(fill_na, face_na), guide_face_na(columns)
    widest = np.maximum(first, guide) * np.sqrt(_widening(columns)) + columns.get("scene.cover.spread_na", 0.0)
    outer = np.minimum(widest, LARGEST_NA)
    return bin_edges(inner_na=np.minimum(first, guide), outer_na=outer, inner_count=INNER_BINS, outer_count=OUTER_BINS)


def _widening(columns: Columns) -> np.ndarray:
    """How far in sin^2 the sharpest bend spreads light, over NA^2 [design]: bends leave skew rays beyond the guide's cone."""
    radius = columns.items("guide.bundle.bends.radius_mm", np.inf)
    if radius.shape[1] == 0:
        return np.full(columns.count, LEAST_ROOM)
    fiber = {name: columns[f"guide.fiber.{name}"][:, None] for name in ("core_index", "na", "core_um")}
    sharpest = relative_bend_ratio(**fiber, bend_radius_mm=radius).max(axis=1)
    return np.clip(1 + BEND_SPREAD * sharpest, LEAST_ROOM, MOST_ROOM)


def bin_na(edges: np.ndarray) -> np.ndarray:
    """NA of the middle, in sin^2, of each bin [design, bin]."""
    return np.sqrt((edges[:, 1:] + edges[:, :-1]) / 2)


def guide_face_mm(columns: Columns) -> np.ndarray:
    """Diameter of the guide's input face, wider than the bundle where it is tapered [design]."""
    return np.where(
        columns.has("guide.bundle.entry_mm"), columns["guide.bundle.entry_mm"], columns["guide.bundle.diameter_mm"]
    )


def guide_face_na(columns: Columns) -> np.ndarray:
    """NA that the guide's input face takes: its fibers' own, or less at a face that tapers down [design]."""
    bundle = columns["guide.bundle.diameter_mm"]
    tapered = tapered_na(na=columns["guide.fiber.na"], from_mm=bundle, to_mm=guide_face_mm(columns))
    return np.minimum(tapered, LARGEST_NA)


def exit_mm(columns: Columns) -> np.ndarray:
    """Diameter of a round face with the area of all exit faces [design]."""
    return np.where(
        columns.has("guide.bundle.exit_mm"), columns["guide.bundle.exit_mm"], columns["guide.bundle.diameter_mm"]
    )


def taper_area_ratio(columns: Columns, end: str) -> np.ndarray:
    """(end diameter over bundle diameter)^2 [design]; 1 without a taper."""
    bundle = columns["guide.bundle.diameter_mm"]
    return (np.where(columns.has(f"guide.bundle.{end}"), columns[f"guide.bundle.{end}"], bundle) / bundle) ** 2


def medium_index(columns: Columns) -> np.ndarray:
    """Refractive index of what stands in front of the tip, at the d line [design]; 1 in air and without a target."""
    found = np.ones(columns.count)
    for medium, rows in columns.split("scene.target.medium"):
        if medium not in ("", "air"):
            found[rows] = refractive_index(medium=medium, wavelength_nm=D_LINE_NM)
    return found
