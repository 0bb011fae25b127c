"""Bends of a step-index fiber: what they let through, and how they spread the angles.

The house law is a kernel tabulated from the exact ray trace (bend_kernel, bend_table, raytrace). The
mode-count law of Gloge 1972 stands beside it as the pessimist's bound, and a saturated law of three
numbers as a check. X = n1^2 d/(R NA^2) measures the bend; Xe = X (1 - NA^2/n1^2).

A bend is followed by a straight run. Light is described by its angle (s = sin^2 over that of the guided
limit) and its skewness, both of which a straight fiber keeps and a bend changes.
"""

import numpy as np

from optics.guide import bend_kernel as table
from optics.guide import bend_steps as steps
from optics.spec import not_negative, positive, require
from optics.units import Numbers, mm_from_um, rad_from_deg, um_from_mm

# Where the kernel was compared with the trace. Its nodes reach on to Xe = 1.75.
TESTED = {"relative_bend": (0.0, 0.75), "bend_deg": (0.0, 360.0)}

POINTS = 24  # of the average over a filled cone
_CONE = np.polynomial.legendre.leggauss(POINTS)


def relative_bend_ratio(*, core_index: Numbers, na: Numbers, core_um: Numbers, bend_radius_mm: Numbers) -> np.ndarray:
    """X = n1^2 d/(R NA^2): core diameter over bend radius against the index step (1: the mode-count law leaves nothing).

    R is the radius of the fiber's axis, d the core diameter.

    >>> round(float(relative_bend_ratio(core_index=1.492, na=0.5, core_um=1000.0, bend_radius_mm=25.0)), 3)
    0.356
    """
    positive(core_index=core_index, na=na, core_um=core_um)
    radius = np.asarray(bend_radius_mm, float)
    require("bend_radius_mm", radius, "above half the core diameter", radius > mm_from_um(np.asarray(core_um)) / 2)
    return np.asarray(core_index) ** 2 * core_um / (um_from_mm(radius) * np.asarray(na) ** 2)


def mode_count_transmission(*, relative_bend_ratio: Numbers, launch_share: Numbers) -> np.ndarray:
    """What the bent fiber's modes can carry at most, the pessimist's bound: max(0, 1 - X)/q, never above 1.

    q = (launch NA/NA)^2, the lowest share of the modes being lit. All modes above 1 - X count as lost,
    although rays on the inner side of the bend and skew ones get through.
    References: gloge_1972 (step index, alpha to infinity; the small term of wavelength left out).

    >>> round(float(mode_count_transmission(relative_bend_ratio=0.356, launch_share=1.0)), 3)
    0.644
    """
    not_negative(relative_bend_ratio=relative_bend_ratio)
    positive(launch_share=launch_share)
    return np.minimum(np.maximum(1 - np.asarray(relative_bend_ratio, float), 0.0) / launch_share, 1.0)


def saturated_transmission(*, relative_bend_ratio: Numbers, na_share: Numbers, launch_share: Numbers) -> np.ndarray:
    """Check of the kernel for long bends (180 degrees and more, X up to 0.42): S(w) = 1 - exp(-((1 - w)/(0.903 Xe))^2).

    w = s (1 - Y^2) is the peak normal component, Y semicircle-distributed; averaged over s up to q =
    launch_share. na_share = (NA/n1)^2. Within 0.008 of the trace.
    References: independent_trace.
    """
    strength = np.asarray(relative_bend_ratio, float) * (1 - np.asarray(na_share, float))
    turn = np.pi * (np.arange(64) + 0.5) / 128
    s = np.asarray(launch_share, float)[..., None] * (_CONE[0] + 1) / 2
    w = s[..., None] * np.cos(turn) ** 2
    scale = 0.903 * np.maximum(strength, 1e-9)[..., None, None]
    kept = np.where(w < 1, -np.expm1(-(((1 - w) / scale) ** 2)), 0.0) @ (np.sin(turn) ** 2 / 32 * 2 / 2)
    return kept @ _CONE[1] / 2


def bend_transmission(
    *,
    core_index: Numbers,
    clad_index: Numbers,
    core_um: Numbers,
    bend_radius_mm: Numbers,
    bend_deg: Numbers,
    launch_na: Numbers,
) -> np.ndarray:
    """Share of the light that leaves one bend still in the core, filled evenly up to launch_na before it.

    Mean over s from 0 to (launch_na/NA)^2 of the tabulated survival. Within 0.01 or 2 % of the exact
    trace over TESTED. Skew rays above the NA count as guided (5 % of what a filled bend of X 0.35 leaves).
    Light launched above the NA counts only by its skew rays that the straight fiber guides. A bend of
    angle 0 or endless radius passes all that is guided.
    Raises OutOfRange on an impossible fiber or bend. Below X 0.02 the loss goes as Xe^1.4; beyond Xe 1.75 nothing
    passes (the mode-count bound).
    References: independent_trace; gloge_1972 beyond the table.
    """
    from optics.guide.fiber import numerical_aperture

    na = numerical_aperture(core_index=core_index, clad_index=clad_index)
    positive(launch_na=launch_na)
    not_negative(bend_deg=bend_deg)
    x = relative_bend_ratio(core_index=core_index, na=na, core_um=core_um, bend_radius_mm=bend_radius_mm)
    share = (na / core_index) ** 2
    fill = (np.asarray(launch_na, float) / na) ** 2
    require("launch_na", launch_na, "at most the core index", fill * share <= 1)
    x, share, fill, bend_deg = np.broadcast_arrays(x, share, fill, np.asarray(bend_deg, float))
    shape = x.shape
    x, share, fill, turn = (np.ravel(part) for part in (x, share, fill, rad_from_deg(bend_deg)))
    s = fill[:, None] * (_CONE[0] + 1) / 2
    survival, _, _ = table.columns(x, share, turn)
    kept = table.at_level(survival, table.level(s, np.where(x > 0, x, 1.0)[:, None], share[:, None], table.FINE))
    kept = kept * (1 - table.rank_share(1 - 1 / np.maximum(s, 1.0)))
    return np.minimum(kept @ (_CONE[1] / 2), 1.0).reshape(shape)


def bend_matrix(
    *,
    sine2_edges: np.ndarray,
    na: Numbers,
    core_index: Numbers,
    core_um: Numbers,
    bend_radius_mm: np.ndarray,
    bend_deg: np.ndarray,
) -> np.ndarray:
    """Share of light that enters a row of separate bends filled evenly in angle bin i and leaves in bin j.

    sine2_edges [..., bin + 1]: edges of the bins as NA^2 in air, rising, of any widths, at most n1^2; light in a
    bin above na^2 is the skew rays there that the straight fiber guides. na, core_index, core_um [...];
    bend_radius_mm and bend_deg [..., k]: bends in the order of the light, a random straight run between
    and behind them, where what it does not guide is lost; angle 0 or endless radius: no bend.
    Returns [..., bin, bin]: rows sum to at most 1, the rest is lost. Light that leaves the range of the
    edges counts in the outermost bin on that side.
    Same law and same references as bend_transmission, whose value the mean of the rows is (but for what
    leaves a short sharp bend unguided: up to 0.02 of the light beyond X 0.5 and below 25 degrees). The
    skewness is carried from bend to bend by its first three moments: five alike bends within 0.01.
    """
    edges, na, index, core = (np.asarray(part, float) for part in (sine2_edges, na, core_index, core_um))
    radius, turn = np.broadcast_arrays(np.asarray(bend_radius_mm, float), np.asarray(bend_deg, float))
    not_negative(bend_deg=turn)
    x = relative_bend_ratio(
        core_index=index[..., None], na=na[..., None], core_um=core[..., None], bend_radius_mm=radius
    )
    shape = np.broadcast_shapes(edges.shape[:-1], na.shape, index.shape, core.shape, x.shape[:-1])
    share = (na / index) ** 2
    require("na", na, "below the core index", share < 1)
    require("sine2_edges", edges, "0 or more, rising, and below the core index squared", _in_order(edges, index))
    edges, turn = edges / na[..., None] ** 2, rad_from_deg(turn)
    x, turn = (np.broadcast_to(part, shape + x.shape[-1:]).reshape(-1, x.shape[-1]) for part in (x, turn))
    edges = np.broadcast_to(edges, shape + edges.shape[-1:]).reshape(-1, edges.shape[-1])
    share = np.broadcast_to(share, shape).reshape(-1)
    return steps.bend_rows(edges, x, turn, share).reshape(*shape, edges.shape[1] - 1, edges.shape[1] - 1)


def _in_order(edges, index):
    rising = np.concatenate([edges[..., :1] >= 0, np.diff(edges, axis=-1) > 0], axis=-1)
    return rising & (edges < index[..., None] ** 2)
