"""Bends of a step-index fiber: what they let through and how they spread the angles."""

import numpy as np

from optics.spec import OutOfRange, not_negative, positive, require
from optics.units import Numbers, rad_from_deg, um_from_mm

TESTED = {"relative_bend": (0.0, 0.75), "bend_deg": (0.0, 360.0)}

_STEP = np.linspace(-2.0, 2.0, 401)
_ACROSS = np.cos((np.arange(24) + 0.5) * np.pi / 48) ** 2
_ACROSS_WEIGHT = np.sin((np.arange(24) + 0.5) * np.pi / 48) ** 2 / 12.0


def _step_table() -> np.ndarray:
    x = np.linspace(-1.0, 1.0, 2001)[1::2]
    density = np.sqrt(1 - x * x)
    both = np.convolve(density, density[::-1])
    cdf = np.concatenate([[0.0], np.cumsum(both / both.sum())])
    at = np.linspace(-2.0, 2.0, len(cdf))
    double = np.concatenate([[0.0], np.cumsum((cdf[1:] + cdf[:-1]) / 2 * np.diff(at))])
    return np.interp(_STEP, at, double)


_DOUBLE = _step_table()


def relative_bend_ratio(
    *, core_index: Numbers, na: Numbers, core_um: Numbers, bend_radius_mm: Numbers
) -> Numbers:
    """X = n1^2 d / (R NA^2): the bend relative to the one that empties the highest guided angle."""
    return core_index**2 * core_um / (um_from_mm(bend_radius_mm) * na**2)


def _one_bend(edges, share, x):
    low, high = edges[..., :-1, None], edges[..., 1:, None]
    width = np.maximum(high - low, 1e-12)[..., 0]
    e = np.maximum(x * (1 - share), 1e-9)[..., None, None]
    w = ((low + high) / 2) * (1 - _ACROSS)
    survive = np.where(w < 1, 1 - np.exp(-(((1 - w) / (0.903 * e)) ** 2)), 0.0) @ _ACROSS_WEIGHT

    def double(step):
        inside = np.interp(step, _STEP, _DOUBLE)
        return inside + np.maximum(step - 2.0, 0.0)

    out = edges[..., None, :]
    cdf = e * (double((out - low) / e) - double((out - high) / e)) / width[..., None]
    cdf[..., 0] = 0.0
    cdf[..., -1] = 1.0
    return survive[..., None] * np.diff(cdf, axis=-1)


def bend_matrix(
    *, sine2_edges: np.ndarray, na: Numbers, core_index: Numbers, core_um: Numbers, bend_radius_mm: np.ndarray, bend_deg: np.ndarray
) -> np.ndarray:
    """Share of the power that enters filled in angle bin i and leaves in bin j after a row of separate bends.

    sine2_edges [..., bin + 1] as NA^2 in air; na, core_index, core_um [...]; bend_radius_mm, bend_deg
    [..., k]. Row sums are at most 1; the rest is lost.
    """
    edges, na, index, core = (np.asarray(v, float) for v in (sine2_edges, na, core_index, core_um))
    radius, angle = np.broadcast_arrays(np.asarray(bend_radius_mm, float), np.asarray(bend_deg, float))
    positive(na=na, core_index=index, core_um=core)
    require("bend_radius_mm", radius, "above 0", radius > 0)
    not_negative(bend_deg=angle)
    share = (na / index) ** 2
    edges = edges / (na**2)[..., None]
    total = np.eye(edges.shape[-1] - 1)
    for k in range(radius.shape[-1]):
        x = np.where(angle[..., k] > 0, index**2 * core / (um_from_mm(radius[..., k]) * na**2), 0.0)
        step = np.where((x > 0)[..., None, None], _one_bend(edges, share, x), np.eye(edges.shape[-1] - 1))
        total = total @ step
    return np.broadcast_to(total, (*np.broadcast_shapes(edges.shape[:-1], share.shape, radius.shape[:-1]), *total.shape[-2:]))


def bend_transmission(
    *, core_index: Numbers, clad_index: Numbers, core_um: Numbers, bend_radius_mm: Numbers, bend_deg: Numbers, launch_na: Numbers
) -> np.ndarray:
    """Transmission of one bend for light that fills the cone up to launch_na."""
    na = np.sqrt(np.asarray(core_index, float) ** 2 - np.asarray(clad_index, float) ** 2)
    launch = np.minimum(launch_na, na) ** 2
    edges = np.linspace(0.0, 1.0, 21) * np.asarray(launch)[..., None]
    matrix = bend_matrix(
        sine2_edges=edges, na=na, core_index=core_index, core_um=core_um,
        bend_radius_mm=np.asarray(bend_radius_mm, float)[..., None], bend_deg=np.asarray(bend_deg, float)[..., None],
    )
    return matrix.sum(-1).mean(-1)
