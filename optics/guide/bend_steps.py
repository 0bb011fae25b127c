"""Bends as matrices on angle bins: a row of separate bends, with the memory of skewness between them.

The step that a bend makes in zeta has, for each level s and each pair of skewness moments, a density that
is a polynomial on [-1, 1] (in units of the longest step). Light enters evenly over a bin, so the share
that lands in another bin is a second difference of the twice-integrated density over the four edges: no
bin is ever narrower or wider than it says, and a bend of no strength is the unit matrix exactly.

What a polynomial blurs is mended by reciprocity: a bend run backward is the same bend, so that from equal
shares of phase space as much goes from bin i to bin j as back. That keeps the radiance of a filled cone.
"""

import numpy as np

from optics.guide import bend_kernel as table

BLOCK_CELLS = 9_200  # bins^2 times designs worked on at a time: their arrays stay in the cache
SCALINGS = 4  # of rows and columns together; the last errors go to the rows
_GAUSS = np.array([0.5 - np.sqrt(1 / 12), 0.5 + np.sqrt(1 / 12)])


def bend_rows(edges, x, turn, share):
    """Matrix [design, bin in, bin out] of each design's row of separate bends.

    edges [design, bin + 1] in s; x, turn (in radians) [design, k]; share [design]. Designs with equally many
    bends that act go together, a block at a time, each by the same operations as if it were alone.
    """
    out = np.tile(np.eye(edges.shape[1] - 1), (len(edges), 1, 1))
    acts = (x > 0) & (turn > 0)
    design, bend = np.nonzero(acts)
    survival, place, partly = table.columns(x[design, bend], share[design], turn[design, bend])
    guided, scores = table.guided_columns(place)
    kept = survival * guided
    count = acts.sum(axis=1)
    first = np.cumsum(count) - count
    block = max(BLOCK_CELLS // out.shape[1] ** 2, 1)
    for bends in np.unique(count[count > 0]):
        rows = np.flatnonzero(count == bends)
        for some in np.split(rows, np.arange(block, len(rows), block)):
            parts = (first[some] + k for k in range(bends))
            ones = ((x[design[at], bend[at]], kept[at], partly[at], scores[at]) for at in parts)
            out[some] = _row(edges[some], share[some, None], ones, bends)
    return out


def _row(edges, share, ones, count):
    """The matrix of one row of bends for a block of designs; the light's state is [design, bin in, moment, bin]."""
    state = scaled = landings = before = None
    points = edges[:, :-1, None] + np.diff(edges)[:, :, None] * _GAUSS
    room = np.diff(edges) * (1 - table.rank_share(1 - 1 / np.maximum(points, 1.0))).mean(axis=2)
    for k, (x, kept, acts, scores) in enumerate(ones):
        if before is None or not np.array_equal(x, before):  # the same bend again lands the same way
            scaled = table.zeta(edges, x[:, None], share) / table.span(x[:, None], share)
            landings, before = _landings(scaled, table.POWERS), x
        kind = "alone" if count == 1 else "between" if 0 < k < count - 1 else "end"
        into, total = _into(points, x[:, None, None], share[:, :, None], kept, scores, kind)
        flow = (into @ landings) * (room / np.diff(scaled))[:, :, None, None]
        flow = _reciprocal(np.moveaxis(flow, 2, 1), total * room)
        flow = _partly(flow, total * room, acts, kind) / room[:, None, :, None]
        state = (
            _begun(flow) if k == 0 else _ended(state, flow, room) if k == count - 1 else _followed(state, flow, room)
        )
    return _not_below_zero(state[:, :, 0])


def _into(points, x, share, kept, scores, kind):
    """Of light entering each bin: [design, bin, pair, power] of its step, and the share [design, bin] that stays."""
    vectors = table.kernel().vectors[kind]
    rank, levels, pairs, powers = vectors.shape
    spread = (scores[:, None, :] @ vectors.reshape(rank, -1)).reshape(len(scores), levels, pairs * powers)
    keeps = table.at_level(kept, table.level(points, x, share, table.FINE)) / 2
    at = table.level(points, x, share, table.COARSE)
    weight = keeps[..., None] * np.maximum(1 - np.abs(at[..., None] - np.arange(levels)), 0.0)
    weight = weight[:, :, 0] + weight[:, :, 1]
    return (weight @ spread).reshape(*points.shape[:2], pairs, powers), keeps.sum(axis=2)


def _landings(scaled, powers):
    """Second differences [design, bin in, power, bin out] of t^p, t the step between edges held in [-1, 1].

    Light that would land below the first edge counts into the first bin, above the last into the last.
    """
    designs, edges = scaled.shape
    step = scaled[:, None, :] - scaled[:, :, None]
    held = np.clip(step, -1.0, 1.0)
    held[:, :, 0], held[:, :, -1] = -1.0, 1.0
    beyond = np.maximum(step - 1.0, 0.0)
    beyond[:, :, 0] = 0.0
    beyond[:, :, -1] = scaled[:, -1:] - scaled  # the last edge stands for infinity: only the starts differ
    out = np.empty((designs, edges - 1, powers, edges - 1))
    along, power = np.empty((designs, edges, edges - 1)), held.copy()
    for p in range(powers):
        values = power if p < powers - 1 else beyond
        np.subtract(values[:, :, 1:], values[:, :, :-1], out=along)
        np.subtract(along[:, :-1], along[:, 1:], out=out[:, :, p])
        np.multiply(power, held, out=power)
    return out


def _reciprocal(flow, wanted):
    """Phase space [design, pair, bin in, bin out] that flows, made the same backward; rows of light sum to `wanted`.

    The plain flow (the first pair) is mended and decides the scales, the moments go with it. The outermost
    bin also holds all light beyond it: what goes there is left as it is.
    """
    plain = flow[:, 0]
    inner = plain[:, :-1, :-1]
    plain[:, :-1, :-1] = (inner + inner.swapaxes(1, 2)) / 2
    np.maximum(plain, 0.0, out=plain)
    within, square = wanted[:, :-1] - plain[:, :-1, -1], plain[:, :-1, :-1]
    scale = np.ones_like(wanted)
    for _ in range(SCALINGS):
        held = scale[:, :-1]
        sums = held * (square @ held[:, :, None])[:, :, 0]
        scale[:, :-1] *= np.sqrt(_ratio(np.maximum(within, 0.0), sums))
    flow *= (scale[:, :, None] * scale[:, None, :])[:, None]
    return flow * _ratio(wanted, flow[:, 0].sum(axis=2))[:, None, :, None]


def _ratio(over, under):
    return np.where(under > 0, over / np.where(under > 0, under, 1.0), 1.0)


def _partly(flow, total, acts, kind):
    """Blended with no bend at all where the bend is shorter than the table's first angle."""
    for short in np.flatnonzero(acts < 1):
        flow[short] *= acts[short]
        for pair, (into, out) in enumerate(table.PAIRS[kind]):
            if into == out:
                flow[short, pair] += np.diag((1 - acts[short]) * total[short] / (2 * out + 1))
    return flow


def _begun(flow):
    """Light without memory: [design, bin in, moment, bin out]."""
    return np.moveaxis(flow * (2 * np.arange(flow.shape[1]) + 1)[:, None, None], 1, 2)


def _ended(state, flow, room):
    """The light after the last bend, its skewness no longer asked for: moment b comes in as it went out backward."""
    back = (flow * room[:, None, :, None]).swapaxes(2, 3) / room[:, None, :, None]
    back[:, 0] = flow[:, 0]
    return _not_above(_through(state, back)[:, :, None], state)


def _followed(state, flow, room):
    """State carried through a bend between others: all pairs of moments, those of b to a by the way back from a to b."""
    designs, _, bins, _ = flow.shape
    through = np.empty((designs, table.MOMENTS, bins, table.MOMENTS, bins))
    back = (flow * room[:, None, :, None]).swapaxes(2, 3) / room[:, None, :, None]
    for pair, (into, out) in enumerate(table.PAIRS["between"]):
        through[:, into, :, out] = (2 * out + 1) * flow[:, pair]
        if into != out:
            through[:, out, :, into] = (2 * into + 1) * back[:, pair]
    after = _through(state, through.reshape(designs, table.MOMENTS, bins, -1))
    return _not_above(after.reshape(designs, bins, table.MOMENTS, bins), state)


def _through(state, bend):
    """State [design, bin in, moment, bin] times a bend [design, moment, bin, ...]."""
    designs, bins = state.shape[:2]
    return state.reshape(designs, bins, -1) @ bend.reshape(designs, state.shape[2] * bins, -1)


def _not_above(after, before):
    """No row grows: the few moments of the skewness can miss a survival of 1 by some thousandths."""
    had, has = (state[:, :, 0].sum(axis=-1) for state in (before, after))
    return after * np.minimum(1.0, had / np.maximum(has, 1e-300))[:, :, None, None]


def _not_below_zero(matrix):
    """What dips below 0 by the blur of the moments (some thousandths of a row) goes; the row's sum is kept."""
    kept = np.maximum(matrix, 0.0)
    total = matrix.sum(axis=-1, keepdims=True)
    return kept * (np.maximum(total, 0.0) / np.maximum(kept.sum(axis=-1, keepdims=True), 1e-300))
