"""The seeded script that makes the bend kernel's table from the exact trace.

    python -m optics.guide.bend_table > presets/tables/bend_kernel.toml

For every (bend, angle, share) node, rays that fill the fiber at each level s are traced through the
bend and counted: how many come out of it, how many of these the straight fiber guides, and the moments
of their step in zeta and of their skewness. Takes about ten minutes on two cores.
"""

import sys

import numpy as np

from optics import tables
from optics.guide import bend_kernel as kernel
from optics.guide import raytrace

RAYS = 120_000  # a pair of bend and share; all angles are stops on the way of the same rays
SEED = 20_261_201
HIGHEST = 2.6  # s up to which rays are launched
RANK = 24  # singular vectors kept of the spread
SMOOTHING = 1e-3  # weight of the first differences in a fit


def last_angle(bend: float) -> float:
    """Angle node beyond which nothing changes any more (weak bends saturate early)."""
    return 27.0 if bend < 0.07 else 81.0 if bend < 0.25 else np.inf


def level_rays(*, bend: float, share: float, rays: int, seed: int) -> tuple[np.ndarray, raytrace.Rays]:
    """s of each ray, and rays that fill the guided part of the fiber at that s (evenly spread, not random).

    A third of them over all s below the limit, a third within one step of it, a third above.
    """
    x = bend / (1 - share)
    root = np.roots([1, 0, 0, 0, -1, -1]).real.max()
    u = (np.random.default_rng(seed).random((4, 1)) + root ** -np.arange(1.0, 5)[:, None] * np.arange(rays)) % 1
    third, part = np.divmod(3 * u[0], 1)
    top = kernel.zeta(1.0, x, share)
    near = -np.expm1(-x * share * (top - part * min(top, kernel.span(x, share)))) / share
    s = np.choose(third.astype(int), [part, near, 1 + (HIGHEST - 1) * part**2])
    s = np.clip(s, 1e-6, 0.999 / share)
    least = kernel.rank_share(1 - 1 / np.maximum(s, 1.0))
    height = np.linspace(0.0, 1.0, 4001)
    caustic = np.interp(least + (1 - least) * u[1], kernel.rank_share(height**2), height)
    sine, along, turn = np.sqrt(share * s), np.sqrt(1 - caustic**2) * (2 * u[2] - 1), 2 * np.pi * u[3]
    c, n = np.cos(turn), np.sin(turn)
    return s, raytrace.Rays(along * c + caustic * n, along * n - caustic * c, sine * c, sine * n)


class LevelFit:
    """Least squares on the hat functions of a level axis."""

    def __init__(self, level: np.ndarray, count: int):
        low = np.minimum(level.astype(int), count - 2)
        self.weight = np.zeros((len(level), count))
        self.weight[np.arange(len(level)), low] = 1 - (level - low)
        self.weight[np.arange(len(level)), low + 1] += level - low
        steps = np.diff(np.eye(count), axis=0)
        self.normal = self.weight.T @ self.weight + SMOOTHING * len(level) / count * steps.T @ steps

    def __call__(self, which: np.ndarray, values: np.ndarray) -> np.ndarray:
        return np.linalg.solve(self.normal, self.weight[which].T @ values)


def node(*, bend: float, share: float, rays: int, seed: int, angles: np.ndarray = kernel.ANGLE_NODES):
    """(survival, guided share, spread) at every angle node: [angle, level], [angle, level], [angle, level, pair, degree]."""
    x, limit = bend / (1 - share), np.sqrt(share)
    s, now = level_rays(bend=bend, share=share, rays=rays, seed=seed)
    fine, coarse = (
        LevelFit(kernel.level(s, x, share, part), kernel.level_count(part)) for part in (kernel.FINE, kernel.COARSE)
    )
    start, reach = kernel.zeta(s, x, share), kernel.span(x, share)
    before = _skew_moments(s, now, share)
    into, out = np.array(kernel.PAIRS["between"]).T
    alive, turned, rows = np.arange(rays), 0.0, []
    for angle in angles:
        if angle > last_angle(bend):
            rows.append(rows[-1])
            continue
        stop = angle * np.sqrt(bend * share / (1 - share))
        now, through = raytrace.through_bend(
            now, radius_ratio=2 / (x * share), limit_sine=limit, bend_rad=stop - turned
        )
        alive, turned = alive[through], stop
        keeps = raytrace.guided(now, limit_sine=limit)
        left, end = alive[keeps], now.kept(keeps)
        level = end.sine() ** 2 / share
        step = kernel.legendre(np.clip((kernel.zeta(level, x, share) - start[left]) / reach, -1, 1), kernel.DEGREES)
        after = _skew_moments(level, end, share)
        products = before[left][:, into] * after[:, out]
        products = products[:, :, None] * step[:, None, :]
        survive, guided = (np.clip(fine(one, np.ones(len(one))), 0.0, 1.0) for one in (alive, left))
        total = np.maximum(coarse(left, np.ones(len(left))), 0.01)
        spread = coarse(left, products.reshape(len(left), -1)) / total[:, None]
        rows.append((survive, np.clip(guided / np.maximum(survive, 1e-6), 0.0, 1.0), spread))
    survive, guided, spread = (np.stack(part) for part in zip(*rows))
    spread = np.clip(spread.reshape(*spread.shape[:2], len(into), kernel.DEGREES), -1.0, 1.0)
    spread[:, :, 0, 0] = 1.0
    return tuple(
        _below_filled(part, x, share, axis)
        for part, axis in zip((survive, guided, spread), (kernel.FINE, kernel.FINE, kernel.COARSE))
    )


def _below_filled(rows, x, share, axis):
    """Levels below s = 0 (where a sharp bend reaches past it) repeat the last that rays have."""
    last = int(np.floor(kernel.level(0.0, x, share, axis) + 0.3))
    rows[:, last + 1 :] = rows[:, last : last + 1]
    return rows


def _skew_moments(s, rays, share):
    rank = kernel.guided_rank(s, rays.skew_sine() ** 2 / share)
    return kernel.legendre(2 * rank - 1, kernel.MOMENTS)


def _one(place):
    print("bend {bend:g}, share {share:g}".format(**place), file=sys.stderr, flush=True)
    return node(**place)


def all_nodes(rays: int = RAYS, seed: int = SEED):
    """The three tables on every node: [bend, angle, share, ...]."""
    from concurrent.futures import ProcessPoolExecutor

    places = [
        {"bend": bend, "share": share, "rays": rays, "seed": seed + 100 * i + j}
        for i, bend in enumerate(kernel.BEND_NODES)
        for j, share in enumerate(kernel.SHARE_NODES)
    ]
    with ProcessPoolExecutor(2) as pool:
        found = list(pool.map(_one, places))
    shape = (len(kernel.BEND_NODES), len(kernel.SHARE_NODES))
    stacked = (np.stack([one[k] for one in found]) for k in range(3))
    return tuple(np.moveaxis(part.reshape(*shape, *part.shape[1:]), 2, 1) for part in stacked)


def table_values(survival: np.ndarray, guided: np.ndarray, spread: np.ndarray, rank: int = RANK) -> np.ndarray:
    """The flat array of the table: the spread by its mean and its first singular vectors over the nodes."""
    rows = spread.reshape(int(np.prod(kernel.NODES)), -1)
    mean = rows.mean(axis=0)
    left, size, right = np.linalg.svd(rows - mean, full_matrices=False)
    scores = left[:, :rank] * size[:rank]
    most = np.abs(scores).max(axis=0)
    vectors = np.concatenate([right[:rank] * most[:, None], mean[None]])
    return kernel.packed_parts(survival, guided, scores / most, vectors)


def document(values: np.ndarray) -> str:
    """The text of presets/tables/bend_kernel.toml."""
    held = tables.pack(values, -1.0, 1.0)
    return f"""source = "bend_trace"
at = "made by optics/guide/bend_table.py with seed {SEED}, {RAYS} rays a node, from the exact trace"
basis = "derived"
note = "survival and spread of light in bends, see optics/guide/bend_kernel.py"
shape = {held["shape"]}
low = {held["low"]}
high = {held["high"]}
dtype = "{held["dtype"]}"
bytes = '{held["bytes"]}'
"""


if __name__ == "__main__":
    print(document(table_values(*all_nodes())), end="")
