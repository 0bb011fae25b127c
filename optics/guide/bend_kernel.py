"""The bend kernel's coordinates and its table: what one bend does to light of each angle and skewness.

s is sin^2 of the angle over that of the guided limit, (n1 sin theta/NA)^2; l the same for the skewness
x y' - y x'. Both are kept by a straight fiber. In the bend (R - the axis radius in core radii, m =
NA^2/n1^2, X = 2/(R m)) a ray that moves from u to u' across the core ends with
R ln((R + u')/(R + u)) = zeta(s') - zeta(s), zeta(s) = -ln(1 - m s)/(X m), exactly: the step in zeta is
bounded by span = R ln((R + 1)/(R - 1)) whatever the bend, and light with zeta(s) < zeta(1) - span
cannot be lost. So everything is tabulated over the distance to the limit in zeta.

The state of the light behind a bend is, for each s, a distribution over the skewness; it is carried as
Legendre moments over the rank of l among all guided rays of that s (0: least skew, 1: most), of which
light that fills the fiber has only the zeroth.
"""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from optics import tables
from optics.units import AnyUnit

# Nodes of the table: relative bend Xe = X (1 - m), angle tau/sqrt(Xe) with tau = phi sqrt((1 - m)/m), and m.
# Dense around Xe 0.45, where long bends turn from keeping to losing their middle angles.
BEND_NODES = np.array(
    """0.02 0.035 0.06 0.1 0.15 0.21 0.27 0.32 0.36 0.39 0.415 0.44 0.465 0.49 0.515 0.545 0.585 0.64 0.72 0.85
    1.05 1.35 1.75""".split(),
    dtype=float,
)
ANGLE_NODES = np.array(
    """0.12 0.2 0.3 0.4 0.5 0.6 0.7 0.82 0.95 1.1 1.25 1.45 1.65 1.9 2.15 2.45 2.8 3.2 3.7 4.4 5.2 6.2 7.5 9.2 12 17
    28 50 110 260""".split(),
    dtype=float,
)
SHARE_NODES = np.array([0.001, 0.12, 0.24, 0.36])
MOMENTS = 3  # of the skewness
DEGREES = 11  # of the step in zeta
FINE = (12, 4, 5)  # level intervals within reach of the limit, below, above: of the survival
COARSE = (8, 3, 4)  # of the spread
LEVEL_SCALE = 0.05  # levels above the limit lie at s = 1 + 0.05 (2^k - 1)


def level_count(intervals: tuple[int, int, int]) -> int:
    return sum(intervals) + 1


def zeta(s, x, m):
    """-ln(1 - m s)/(X m), which a step across the core changes by R ln((R + u')/(R + u))."""
    return -np.log1p(-m * s) / (x * m)


def span(x, m):
    """The largest step in zeta: R ln((R + 1)/(R - 1))."""
    radius = 2 / (x * m)
    return radius * np.log((radius + 1) / (radius - 1))


def safe_level(x, m):
    """s below which no ray can reach the limit in the bend: zeta(s) = zeta(1) - span (negative if there is none)."""
    return -np.expm1(np.log1p(-m) + x * m * span(x, m)) / m


def level(s, x, m, intervals):
    """Where s lies on the level axis of a table, in node numbers from 0 (far above the limit) up.

    Above the limit it counts in log2(1 + (s - 1)/LEVEL_SCALE), below in the distance in zeta up to the
    longest step, then evenly to s = 0.
    """
    near, low, above = intervals
    reach, top = span(x, m), zeta(1.0, x, m)
    distance = (top - zeta(s, x, m)) / reach
    room = np.maximum(top / reach - 1, 1e-9)
    inside = np.where(distance <= 1, near * distance, near + low * np.minimum((distance - 1) / room, 1.0))
    over = above * np.log2(1 + np.maximum(s - 1, 0.0) / LEVEL_SCALE) / 5
    return above + np.where(s > 1, -np.minimum(over, above), inside)


def rank_share(ratio):
    """Share of light that fills the fiber at one angle whose l/s lies below `ratio`.

    l/s is the square of a semicircle-distributed number: (2/pi)(asin y + y sqrt(1 - y^2)), y^2 = ratio.
    """
    y = np.sqrt(np.clip(ratio, 0.0, 1.0))
    return 2 / np.pi * (np.arcsin(y) + y * np.sqrt(1 - y * y))


def guided_rank(s, skew):
    """Rank of a skewness l among the guided rays of the same s (above the limit only l >= s - 1 is guided)."""
    least = rank_share(1 - 1 / np.maximum(s, 1.0))
    return np.clip((rank_share(skew / np.maximum(s, 1e-300)) - least) / (1 - least), 0.0, 1.0)


def legendre(x, count):
    """P_0 ... P_(count-1) along a new last axis."""
    out = [np.ones_like(x), x]
    for k in range(1, count - 1):
        out.append(((2 * k + 1) * x * out[k] - k * out[k - 1]) / (k + 1))
    return np.stack(out[:count], axis=-1)


@dataclass(frozen=True, slots=True)
class Kernel:
    """The table, decoded: [bend x angle x share, ...], and the spread's singular vectors by kind of bend.

    `vectors` holds, for the skewness moments that come in and go out, [rank, level, pair, power] of the
    step's twice-integrated density; its last power is the straight line beyond the longest step.
    """

    survival: AnyUnit
    guided: AnyUnit
    scores: AnyUnit
    vectors: dict[str, AnyUnit]


# Moments of the skewness (in, out) that the table holds; out to in goes as the way back. By place in a row of bends.
_ALL = [(into, out) for into in range(MOMENTS) for out in range(into, MOMENTS)]
PAIRS = {"alone": _ALL[:1], "end": _ALL[:MOMENTS], "between": _ALL}
POWERS = DEGREES + 2
NODES = (len(BEND_NODES), len(ANGLE_NODES), len(SHARE_NODES))
WEAK_POWER = 1.4  # of the loss against Xe below the weakest node
VECTOR_SCALE = 4.0  # the largest entry of a singular vector that the table can hold


def packed_parts(survival, guided, scores, vectors):
    """One flat array in [-1, 1], as presets/tables/bend_kernel.toml holds it."""
    return np.concatenate([np.ravel(part) for part in (survival, guided, scores, vectors / VECTOR_SCALE)])


@lru_cache(maxsize=1)
def kernel() -> Kernel:
    """The table of presets/tables/bend_kernel.toml, read on first use."""
    return unpacked(tables.packed("bend_kernel"))


def unpacked(flat: np.ndarray) -> Kernel:
    """The kernel from the flat array of `packed_parts`."""
    count, fine = int(np.prod(NODES)), level_count(FINE)
    shape = (level_count(COARSE), len(_ALL), DEGREES)
    rank = (flat.size - 2 * count * fine - int(np.prod(shape))) // (count + int(np.prod(shape)))
    survival, guided, scores, vectors = np.split(flat, np.cumsum([count * fine, count * fine, count * rank]))
    vectors = VECTOR_SCALE * vectors.reshape(rank + 1, *shape)
    vectors[:, :, 0, 0] = np.arange(rank + 1)[:, None] == rank  # the density of what is left adds up to 1
    powers = vectors @ _step_powers()
    by_kind = {kind: np.ascontiguousarray(powers[:, :, : len(pairs)]) for kind, pairs in PAIRS.items()}
    scores = np.concatenate([scores.reshape(count, rank), np.ones((count, 1))], axis=1)
    return Kernel(survival.reshape(count, fine), guided.reshape(count, fine), scores, by_kind)


def step_moments(scores):
    """[design, level, pair, degree]: the Legendre moments of the step that these scores stand for."""
    vectors = kernel().vectors["between"] @ np.linalg.pinv(_step_powers())
    return np.tensordot(scores, vectors, axes=1)


def _step_powers() -> np.ndarray:
    """[degree, power]: coefficients of t^1, t^2 ... in the twofold integral from -1 of (2k + 1)/2 P_k(t).

    The constant drops out of second differences. Beyond t = 1 only degree 0 goes on, as a straight line:
    the last column.
    """
    from numpy.polynomial import legendre as series

    out = np.zeros((DEGREES, POWERS))
    for k in range(DEGREES):
        density = np.zeros(k + 1)
        density[k] = k + 0.5
        twice = series.leg2poly(series.legint(series.legint(density, lbnd=-1), lbnd=-1))
        out[k, : len(twice) - 1] = twice[1:]
    out[0, -1] = 1.0
    return out


def corners(bend: np.ndarray, angle: np.ndarray, share: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """The eight nodes around each design [design, 8] and their weights (bend and angle by logarithm)."""
    places = [
        _between(np.log(BEND_NODES), np.log(bend)),
        _between(np.log(ANGLE_NODES), np.log(angle)),
        _between(SHARE_NODES, share),
    ]
    index, weight = np.zeros((len(bend), 1), int), np.ones((len(bend), 1))
    for (low, part), count in zip(places, NODES):
        index = np.concatenate([index * count + (low + k)[:, None] for k in (0, 1)], axis=1)
        weight = np.concatenate([weight * (1 - part)[:, None], weight * part[:, None]], axis=1)
    return index, weight


def _between(nodes: np.ndarray, values: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    low = np.clip(np.searchsorted(nodes, values, side="right") - 1, 0, len(nodes) - 2)
    return low, np.clip((values - nodes[low]) / (nodes[low + 1] - nodes[low]), 0.0, 1.0)


def blended(table: np.ndarray, index: np.ndarray, weight: np.ndarray) -> np.ndarray:
    """Rows of a table [node, column] blended over the corners, added in one order."""
    out = weight[:, :1] * table[index[:, 0]]
    for k in range(1, index.shape[1]):
        out += weight[:, k : k + 1] * table[index[:, k]]
    return out


def at_level(columns: np.ndarray, level: np.ndarray) -> np.ndarray:
    """Linear interpolation of columns [design, level node] at levels [design, ...]."""
    flat = level.reshape(len(level), -1)
    low = np.minimum(flat.astype(int), columns.shape[1] - 2)
    part = flat - low
    found = np.take_along_axis(columns, low, 1) * (1 - part) + np.take_along_axis(columns, low + 1, 1) * part
    return found.reshape(level.shape)


def columns(x, share, turn):
    """Survival [design, level], the place in the table (for guided_columns), and how much of the bend acts, 0 to 1.

    The edges of the table: angles below the first node blend toward no bend at all; weaker bends lose as
    Xe^1.4; beyond the sharpest nothing survives (the mode-count bound, X above 1); longer bends stay at
    the last angle.
    """
    found = kernel()
    strength = np.maximum(x * (1 - share), 1e-12)
    angle = np.maximum(turn * np.sqrt((1 - share) / (share * strength)), 1e-12)
    index, weight = corners(strength, angle, share)
    acts = np.minimum(angle / ANGLE_NODES[0], 1.0) * (x > 0)
    loses = acts * np.minimum(strength / BEND_NODES[0], 1.0) ** (WEAK_POWER - 1)
    inside = (strength <= BEND_NODES[-1])[:, None]
    survival = 1 - loses[:, None] * (1 - inside * blended(found.survival, index, weight))
    return survival, (index, weight, loses), acts


def guided_columns(place):
    """Of what survives, the share that the straight fiber guides [design, level]; and the spread's scores."""
    index, weight, loses = place
    found = kernel()
    return 1 - loses[:, None] * (1 - blended(found.guided, index, weight)), blended(found.scores, index, weight)
