"""Bends of a step-index fiber: what they let through, and how they spread the angles.

The house law is a kernel tabulated from the exact ray trace (bend_kernel, bend_steps, bend_table, and
raytrace as the reference). The mode-count law of Gloge 1972 stands beside it as the pessimist's bound, and
a saturated law with one fitted number as a check. X = n1^2 d/(R NA^2) measures the bend; Xe = X (1 - NA^2/n1^2).

Light is described by its angle, s = sin^2 over that of the guided limit, and its skewness: a straight
fiber keeps both, a bend changes both.
"""

import numpy as np

from optics.guide import bend_kernel as table
from optics.guide import bend_steps as steps
from optics.guide.fiber import numerical_aperture
from optics.spec import beyond, not_negative, positive, require
from optics.units import Numbers, mm_from_um, rad_from_deg, um_from_mm

# Where the kernel was compared with the trace. The table itself reaches on to Xe 1.75, then the mode-count bound holds.
TESTED = {"relative_bend": (0.0, 0.75), "bend_deg": (0.0, 360.0), "na_share": (0.0, 0.33)}

CONE_SHARE = 0.95
_POINTS, _WEIGHTS = (part / 2 for part in np.polynomial.legendre.leggauss(24))


def relative_bend_ratio(*, core_index: Numbers, na: Numbers, core_um: Numbers, bend_radius_mm: Numbers) -> np.ndarray:
    """X = n1^2 d/(R NA^2): core diameter over bend radius against the index step (at 1 the mode-count law leaves nothing).

    R is the radius of the fiber's axis, d the core diameter. Endless radius: 0.
    Raises OutOfRange where the inner wall would reach the bend's center.

    >>> round(float(relative_bend_ratio(core_index=1.492, na=0.5, core_um=1000.0, bend_radius_mm=25.0)), 3)
    0.356
    """
    positive(core_index=core_index, na=na, core_um=core_um)
    radius, core = np.asarray(bend_radius_mm, float), np.asarray(core_um, float)
    require("bend_radius_mm", radius, "above half the core diameter", radius > mm_from_um(core) / 2)
    return (np.asarray(core_index, float) / na) ** 2 * core / um_from_mm(radius)


def mode_count_transmission(*, relative_bend_ratio: Numbers, launch_share: Numbers) -> np.ndarray:
    """What the bent fiber's modes can carry at most, the pessimist's bound: max(0, 1 - X)/q, never above 1.

    q = (launch NA/NA)^2: the lowest q of the modes are lit. All modes above 1 - X count as lost, although
    rays on the inner side of the bend and skew ones get through. 1 mm plastic, NA 0.50, at 25 mm: 1.9 dB
    where rays lose 0.55.
    References: gloge_1972 (step index: alpha to infinity; the small term of wavelength left out).

    >>> round(-10 * float(np.log10(mode_count_transmission(relative_bend_ratio=0.356, launch_share=1.0))), 1)
    1.9
    """
    not_negative(relative_bend_ratio=relative_bend_ratio)
    positive(launch_share=launch_share)
    return np.minimum(np.maximum(1 - np.asarray(relative_bend_ratio, float), 0.0) / launch_share, 1.0)


def saturated_transmission(*, relative_bend_ratio: Numbers, na_share: Numbers, launch_share: Numbers) -> np.ndarray:
    """A check on long bends (180 degrees and more, X to 0.42): S(w) = 1 - exp(-((1 - w)/(0.903 Xe))^2).

    w = s (1 - Y^2) is the peak normal component, Y semicircle-distributed; mean over s up to q = launch_share.
    na_share = (NA/n1)^2. Within 0.008 of the trace.
    References: independent_trace (the one number was fitted there).
    """
    positive(relative_bend_ratio=relative_bend_ratio, launch_share=launch_share)
    within_cone = np.asarray(launch_share, float)[..., None, None] * (_POINTS[:, None] + 0.5)
    turn = np.pi * (np.arange(64) + 0.5) / 128
    peak = within_cone * np.sin(turn) ** 2
    strength = 0.903 * np.asarray(relative_bend_ratio, float) * (1 - np.asarray(na_share, float))
    kept = np.where(peak < 1, -np.expm1(-(((1 - peak) / strength[..., None, None]) ** 2)), 0.0)
    return kept @ (np.sin(turn) ** 2 / 32) @ _WEIGHTS


def bend_transmission(
    *,
    core_index: Numbers,
    clad_index: Numbers,
    core_um: Numbers,
    bend_radius_mm: Numbers,
    bend_deg: Numbers,
    launch_na: Numbers,
) -> np.ndarray:
    """Share of light that leaves one bend still in the core; before it, it fills the cone up to launch_na.

    The mean, over s from 0 to (launch_na/NA)^2, of the survival tabulated from the exact trace.
    bend_radius_mm: of the fiber's axis. Within 0.01 or 2 % of the trace over TESTED.
    Raises OutOfRange on an impossible fiber, bend or launch.
    Notes: skew rays above the NA count as guided (5 % of what a filled bend of X 0.35 leaves). Light
    launched above the NA counts by its guided skew rays only. Below Xe 0.02 the loss goes as Xe^1.4; beyond
    Xe 1.75 nothing passes; past 360 degrees the loss stays where the table ends. Absorption is not in it.
    References: independent_trace; gloge_1972 beyond the table.

    >>> fiber = {"core_index": 1.492, "clad_index": 1.40571, "core_um": 1000.0, "bend_radius_mm": 25.4, "bend_deg": 90.0}
    >>> bend_transmission(**fiber, launch_na=np.array([0.3, 0.4, 0.5])).round(2).tolist()
    [1.0, 0.99, 0.88]
    """
    na = numerical_aperture(core_index=core_index, clad_index=clad_index)
    positive(launch_na=launch_na)
    not_negative(bend_deg=bend_deg)
    x = relative_bend_ratio(core_index=core_index, na=na, core_um=core_um, bend_radius_mm=bend_radius_mm)
    share, fill = (na / core_index) ** 2, (np.asarray(launch_na, float) / na) ** 2
    require("launch_na", launch_na, "at most the core index", fill * share <= 1 + 1e-12)
    x, share, fill, turn = np.broadcast_arrays(x, share, fill, rad_from_deg(np.asarray(bend_deg, float)))
    shape = x.shape
    x, share, fill, turn = (np.ravel(part) for part in (x, share, fill, turn))
    # nothing is lost below the angle from which one step reaches the limit; the mean runs over the rest
    bent = np.where(x > 0, x, 1.0)
    safe = np.clip(table.safe_level(bent, share), 0.0, fill * (1 - 1e-9))
    s = safe[:, None] + (fill - safe)[:, None] * (_POINTS + 0.5)
    survival, _, _ = table.columns(x, share, turn)
    kept = table.at_level(survival, table.level(s, bent[:, None], share[:, None], table.FINE))
    arrives = 1 - table.rank_share(1 - 1 / np.maximum(s, 1.0))
    lost = (fill - safe) * ((1 - kept * arrives) * _WEIGHTS).sum(axis=1)
    return (1 - lost / fill).reshape(shape)


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

    sine2_edges [..., bin + 1]: edges of the bins as NA^2 in air, rising, of any widths, below n1^2. Light in a
    bin above na^2 is what skew rays the straight fiber guides there. na, core_index, core_um [...];
    bend_radius_mm and bend_deg [..., k]: the bends in the order of the light, a random straight run between
    and behind them, where what it does not guide is lost; angle 0 or endless radius: no bend.
    Returns [..., bin, bin]: rows sum to at most 1, the rest is lost. Light that leaves the range of the
    edges counts in the outermost bin on that side.
    Same law, ranges and references as bend_transmission, which is the mean of the rows (but for what leaves
    a short sharp bend unguided: up to 0.03, beyond X 0.5 and below 25 degrees). From bend to bend the
    skewness is carried by three moments: five bends alike come within 0.012 of the trace. One design gives
    the same numbers alone and in a batch.
    """
    edges, na, index, core = (np.asarray(part, float) for part in (sine2_edges, na, core_index, core_um))
    radius, turn = np.broadcast_arrays(np.asarray(bend_radius_mm, float), np.asarray(bend_deg, float))
    not_negative(bend_deg=turn)
    fiber = {"core_index": index[..., None], "na": na[..., None], "core_um": core[..., None]}
    x = relative_bend_ratio(**fiber, bend_radius_mm=radius)
    require("na", na, "below the core index", na < index)
    rising = np.concatenate([edges[..., :1] >= 0, np.diff(edges, axis=-1) > 0], axis=-1)
    require("sine2_edges", edges, "0 or more, rising, below n1^2", rising & (edges < index[..., None] ** 2))
    shape = np.broadcast_shapes(edges.shape[:-1], na.shape, index.shape, x.shape[:-1], turn.shape[:-1])
    x, turn, edges, share = (
        np.broadcast_to(part, shape + part.shape[-1:]).reshape(-1, part.shape[-1])
        for part in (x, rad_from_deg(turn), edges / na[..., None] ** 2, (na / index)[..., None] ** 2)
    )
    found = steps.bend_rows(edges, x, np.broadcast_to(turn, x.shape), share[:, 0])
    return found.reshape(*shape, *found.shape[1:])


def bends_transmission(
    *,
    core_index: float,
    clad_index: float,
    core_um: float,
    bend_radius_mm: np.ndarray,
    bend_deg: np.ndarray,
    launch_na: float,
) -> float:
    """Share of light left after a row of separate bends [k], filled up to launch_na before the first. See bend_matrix."""
    _, left = _behind_bends(core_index, clad_index, core_um, bend_radius_mm, bend_deg, launch_na)
    return float(left.sum())


def bends_cone_na(
    *,
    core_index: float,
    clad_index: float,
    core_um: float,
    bend_radius_mm: np.ndarray,
    bend_deg: np.ndarray,
    launch_na: float,
) -> float:
    """NA that holds 95 % of the light behind a row of separate bends [k], filled up to launch_na before the first.

    Within 3 % of the trace for bends of 90 degrees and more with X up to 0.5, 7 % elsewhere in TESTED.
    """
    edges, left = _behind_bends(core_index, clad_index, core_um, bend_radius_mm, bend_deg, launch_na)
    inside = np.concatenate([[0.0], np.cumsum(left)]) / max(left.sum(), 1e-300)
    return float(np.sqrt(np.interp(CONE_SHARE, inside, edges)))


def _behind_bends(core_index, clad_index, core_um, bend_radius_mm, bend_deg, launch_na):
    """Edges of angle bins (24 inside the launch cone, 32 above it, narrow at first) and the light left in each."""
    na = float(numerical_aperture(core_index=core_index, clad_index=clad_index))
    require("launch_na", launch_na, "above 0 and at most the NA", 0 < launch_na <= na * (1 + 1e-6))
    top = min(2.4 * na**2, 0.999 * core_index**2)
    above = launch_na**2 + (top - launch_na**2) * np.linspace(0, 1, 33)[1:] ** 2
    edges = np.concatenate([np.linspace(0, launch_na**2, 25), above])
    bends = {"bend_radius_mm": np.atleast_1d(bend_radius_mm), "bend_deg": np.atleast_1d(bend_deg)}
    matrix = bend_matrix(sine2_edges=edges, na=na, core_index=core_index, core_um=core_um, **bends)
    return edges, matrix[:24].mean(axis=0)


def bend_caveats(*, core_index: float, na: float, core_um: float, bend_radius_mm: float, bend_deg: float) -> list[str]:
    """What to say of one bend that the kernel was not tested for: one sentence each, none if it was."""
    x = float(relative_bend_ratio(core_index=core_index, na=na, core_um=core_um, bend_radius_mm=bend_radius_mm))
    share = (na / core_index) ** 2
    said = [f"The {one}." for one in beyond(TESTED, relative_bend=x, bend_deg=bend_deg, na_share=share)]
    if x * (1 - share) > table.BEND_NODES[-1]:
        said.append(
            "So sharp a bend lies outside the tabulated loss too: the mode-count bound holds, which lets nothing through."
        )
    return said
