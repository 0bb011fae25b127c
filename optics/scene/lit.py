"""The unlit share of a field, from the circles that the ports light and never from the values."""

import numpy as np

# Directions from the center along which the lit length is exact.
RAYS = 96


def unlit_share(field, core, rim):
    """Share of the field outside the union of the lit circles: exact along each of RAYS directions.

    `core` and `rim`: radii on the plane within and beyond which one point of a port lights nothing.
    """
    turn = 2 * np.pi * (np.arange(RAYS) + 0.5) / RAYS
    x, y, radius = field.port_x_mm, field.port_y_mm, field.port_radius_mm
    edge = field.field_radius_mm[:, None, None]
    reach = np.where(radius > 0, radius + rim[:, None], 0.0)
    reach[~(rim > 0)] = 0.0
    low, high = _chords(x, y, reach, turn, edge)
    # Dark inside: of a hollow cone around each port's center, of a cut (which only the first port has) around its own.
    hole = np.where(radius > 0, core[:, None] - radius, 0.0)
    cut = np.argmin(radius, axis=-1)[:, None]
    cut_x, cut_y, cut_radius = (np.take_along_axis(value, cut, axis=-1)[:, 0] for value in (x, y, radius))
    cut_hole = -cut_radius - rim
    use = (cut_radius < 0) & (cut_hole > 0)
    hole_x, hole_y = x.copy(), y.copy()
    for into, value in ((hole_x, cut_x), (hole_y, cut_y), (hole, cut_hole)):
        into[:, 0] = np.where(use, value, into[:, 0])
    if np.any(hole > 0):
        dark_low, dark_high = _chords(hole_x, hole_y, np.maximum(hole, 0.0), turn, edge)
        missed = dark_high <= dark_low
        inner = np.where(missed, high, np.minimum(high, np.maximum(dark_low, low)))
        outer = np.where(missed, high, np.minimum(high, np.maximum(dark_high, low)))
        low, high = np.concatenate([low, outer], axis=1), np.concatenate([inner, high], axis=1)
    lit = _covered(low**2, high**2) / edge[:, 0] ** 2
    return np.clip(1.0 - np.mean(lit, axis=-1), 0.0, 1.0)


def _chords(x, y, radius, turn, edge):
    """Where the ray from the center enters and leaves each circle, within the field: [design, port, ray]."""
    x, y, radius = x[..., None], y[..., None], radius[..., None]
    along = x * np.cos(turn) + y * np.sin(turn)
    across = x * np.sin(turn) - y * np.cos(turn)
    half = np.sqrt(np.maximum(np.minimum(radius, 1e150) ** 2 - across**2, 0.0))
    low, high = (np.clip(along + side * half, 0.0, edge) for side in (-1, 1))
    return low, np.where(half > 0, high, low)


def _covered(low, high):
    """Length of the union of intervals over axis 1."""
    if low.shape[1] > 1:
        order = np.argsort(low, axis=1, kind="stable")
        low, high = (np.take_along_axis(value, order, axis=1) for value in (low, high))
        before = np.maximum.accumulate(high, axis=1)
        low[:, 1:] = np.maximum(low[:, 1:], before[:, :-1])
    return np.sum(np.maximum(high - low, 0.0), axis=1)
