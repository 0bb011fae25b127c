"""Bends as matrices on angle bins: a row of separate bends, with the memory of skewness between them.

The step that a bend makes in zeta has, for each level s and each pair of skewness moments, a density that
is a polynomial on [-1, 1] (in units of the longest step). Light enters evenly over a bin, so the share
that lands in another bin is a second difference of the twice-integrated density over the four edges: no
bin is ever narrower or wider than it says, and a bend of no strength is the unit matrix exactly.
"""

import numpy as np

from optics.guide import bend_kernel as table

SCALINGS = 8  # of rows and columns, to a few parts in a thousand
BLOCK = 16  # designs worked on at a time: their arrays stay in the cache
_GAUSS = np.array([0.5 - np.sqrt(1 / 12), 0.5 + np.sqrt(1 / 12)])


def bend_rows(edges, x, turn, share):
    """Matrix [design, bin in, bin out] of each design's row of separate bends.

    edges [design, bin + 1] in s; x, turn (in radians) [design, k]; share [design]. Designs with equally many
    bends that act go together, BLOCK at a time, each by the same operations as if it were alone.
    """
    out = np.tile(np.eye(edges.shape[1] - 1), (len(edges), 1, 1))
    acts = (x > 0) & (turn > 0)
    design, bend = np.nonzero(acts)
    survival, place, partly = table.columns(x[design, bend], share[design], turn[design, bend])
    guided, scores = table.guided_columns(place)
    kept = survival * guided
    count = acts.sum(axis=1)
    first = np.cumsum(count) - count
    for bends in np.unique(count[count > 0]):
        rows = np.flatnonzero(count == bends)
        for some in np.split(rows, np.arange(BLOCK, len(rows), BLOCK)):
            parts = (first[some] + k for k in range(bends))
            ones = ((x[design[at], bend[at]], kept[at], partly[at], scores[at]) for at in parts)
            out[some] = _row(edges[some], share[some], ones, bends)
    return _even_within_the_cone(out, edges)


def _even_within_the_cone(matrix, edges):
    """The matrix with the light that lands within the guide's own cone spread as radiance wants it.

    A ray that leaves in bin j came, traced back, from somewhere with the same radiance or was lost on the way,
    and a row of bends loses as much backward as forward. So light that fills all bins evenly leaves bin j with
    its survival: there column sums of width x matrix go as those of its rows (Liouville; reciprocity). A few
    steps of Sinkhorn and Knopp's scaling mend what polynomial densities blur near the axis; what each row
    sends there as a whole stays.
    """
    cone = edges[:, 1:] <= 1.0 + 1e-9
    flow = matrix * np.diff(edges)[:, :, None]
    sends, survives = (flow * cone[:, None, :]).sum(axis=2), np.where(cone, flow.sum(axis=2), 0.0)
    low = flow * cone[:, None, :]
    lands = survives * _ratio(sends.sum(axis=1), survives.sum(axis=1))[:, None]
    for _ in range(SCALINGS):
        low = low * _ratio(lands, low.sum(axis=1))[:, None, :]
        low = low * _ratio(sends, low.sum(axis=2))[:, :, None]
    return np.where(cone[:, None, :], low, flow) / np.diff(edges)[:, :, None]


def _ratio(over, under):
    return np.where(under > 0, over / np.where(under > 0, under, 1.0), 1.0)


def _row(edges, share, ones, count):
    state = None
    for k, (x, kept, partly, scores) in enumerate(ones):
        kind = "only" if count == 1 else "first" if k == 0 else "last" if k == count - 1 else "middle"
        one = _one_bend(edges, x, share, kept, partly, scores, kind)
        after = one[:, :, 0] if k == 0 else _followed(state, one)
        state = after if k == 0 else _not_above(after, state)
    return _not_below_zero(state[:, :, 0])


def _one_bend(edges, x, share, survival, acts, scores, kind):
    """[design, bin in, moment in, moment out, bin out] of one bend."""
    designs, bins = len(edges), edges.shape[1] - 1
    vectors = table.kernel().vectors[kind]
    rank, levels, pairs, powers = vectors.shape
    spread = (scores[:, None, :] @ vectors.reshape(rank, -1)).reshape(designs, levels, pairs * powers)
    s = edges[:, :-1, None] + np.diff(edges)[:, :, None] * _GAUSS
    x, share = x[:, None], share[:, None]
    keeps = table.at_level(survival, table.level(s, x[..., None], share[..., None], table.FINE)) / 2
    at = table.level(s, x[..., None], share[..., None], table.COARSE)
    weight = keeps[..., None] * np.maximum(1 - np.abs(at[..., None] - np.arange(levels)), 0.0)
    weight = weight[:, :, 0] + weight[:, :, 1]
    kept = (weight @ spread).reshape(designs, bins, pairs, powers)
    scaled = table.zeta(edges, x, share) / table.span(x, share)
    one = kept @ _landings(scaled, powers) / np.diff(scaled)[:, :, None, None]
    into, out = (len(range(table.MOMENTS)[part]) for part in table.PAIRS[kind])
    one = one.reshape(designs, bins, into, out, bins)
    partly = acts < 1
    if partly.any():
        stays = np.zeros((bins, into, out, bins))
        stays[np.arange(bins), :, :, np.arange(bins)] = np.eye(into, out)
        stay = (1 - acts[partly])[:, None, None, None, None] * keeps[partly].sum(-1)[:, :, None, None, None] * stays
        one[partly] = acts[partly][:, None, None, None, None] * one[partly] + stay
    return one


def _landings(scaled, powers):
    """Second differences [design, bin in, power, bin out] of t^p, t the step between edges held in [-1, 1].

    Light that would land below the first edge is mirrored there: an even cone stays even around its axis,
    as the conservation of radiance wants. What would land above the last edge counts into the last bin.
    """
    designs, edges = scaled.shape
    step = scaled[:, None, :] - scaled[:, :, None]
    mirrored = np.clip(2 * scaled[:, :1, None] - scaled[:, None, :] - scaled[:, :, None], -1.0, 1.0)
    held = np.clip(step, -1.0, 1.0)
    held[:, :, -1], mirrored[:, :, -1] = 1.0, -1.0
    out = np.empty((designs, edges - 1, powers, edges - 1))
    power, back = held, mirrored
    for p in range(powers - 1):
        if p:
            power, back = power * held, back * mirrored
        out[:, :, p] = _second_difference(power - back)
    beyond = np.maximum(step - 1.0, 0.0)
    beyond[:, :, 0] = 0.0
    # the last edge stands for infinity: there the straight line is (edge - start), of which starts differ
    beyond[:, :, -1] = scaled[:, -1:] - scaled
    out[:, :, -1] = _second_difference(beyond)
    return out


def _second_difference(values):
    along = values[:, :, 1:] - values[:, :, :-1]
    return along[:, :-1] - along[:, 1:]


def _followed(state, one):
    """State [design, bin in, moment, bin] carried through the next bend."""
    designs, bins, into, out, _ = one.shape
    through = np.ascontiguousarray(one.transpose(0, 2, 1, 3, 4)).reshape(designs, into * bins, out * bins)
    return (state.reshape(designs, bins, into * bins) @ through).reshape(designs, bins, out, bins)


def _not_above(after, before):
    """No row grows: the few moments of the skewness can miss a survival of 1 by some thousandths."""
    had, has = (state[:, :, 0].sum(axis=-1) for state in (before, after))
    return after * np.minimum(1.0, had / np.maximum(has, 1e-300))[:, :, None, None]


def _not_below_zero(matrix):
    """The polynomial densities dip below 0 by up to about 0.01 of a row; the row's sum is kept."""
    kept = np.maximum(matrix, 0.0)
    total = matrix.sum(axis=-1, keepdims=True)
    return kept * (np.maximum(total, 0.0) / np.maximum(kept.sum(axis=-1, keepdims=True), 1e-300))
