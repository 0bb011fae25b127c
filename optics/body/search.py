"""The thorough search for the smallest lumen: orders of placing bred from the best, then polished.

Most tightest layouts can be built circle by circle (`placing`), so the search runs over orders:
exchanges and moves in the best ones, hundreds tried at once. The best dozen then move freely
until the lumen cannot shrink (sequential quadratic programming on the positions), which finds
the tightest layouts that no order builds. Draws are seeded: the same parts, the same layout.
"""

from collections.abc import Callable

import numpy as np

from optics.body.orders import orders
from optics.body.placing import placed

_HALVINGS = 9  # of the lumen, for each order
_LANES, _ROUNDS, _ELITE, _POLISHED = 300, 16, 60, 16
_QUICK_LANES, _QUICK_ROUNDS = 80, 2
_SLACK = 1e-9


def searched_layout(
    radii: np.ndarray,
    at_wall: np.ndarray,
    least: float,
    known: tuple[float, np.ndarray, np.ndarray],
    thorough: bool,
    progress: Callable[[float], None] | None,
) -> tuple[float, np.ndarray, np.ndarray]:
    """Lumen radius and centers x, y of circles sorted from the largest; `known` is a layout to better.

    `least` is a lower bound that ends the search; `progress` is called with the share done. Not
    thorough: two rounds of eighty orders, and no polish.
    """
    draw, count = np.random.default_rng(len(radii)), len(radii)
    lanes, rounds = (_LANES, _ROUNDS) if thorough else (_QUICK_LANES, _QUICK_ROUNDS)
    listed, ties = orders(count)
    order = np.concatenate([listed, [draw.permutation(count) for _ in range(lanes - len(listed))]])
    tie = np.concatenate([ties, draw.choice([-1.0, 1.0], lanes - len(listed))])
    best, elite, seen, idle = known, [], set(), 0
    for number in range(rounds):
        lumen, x, y = _closed(radii, at_wall, order, tie, least, known[0] * 1.05)
        for lane in np.argsort(lumen, kind="stable")[:_ELITE]:
            kind = round(lumen[lane] / least, 4)  # one of each lumen: they are mostly the same layout
            if np.isfinite(lumen[lane]) and kind not in seen:
                seen.add(kind)
                elite.append((lumen[lane], order[lane], tie[lane], x[:, lane], y[:, lane]))
        elite = sorted(elite, key=lambda kept: kept[0])[:_ELITE]
        best = min([best, *((kept[0], kept[3], kept[4]) for kept in elite[:1])], key=lambda found: found[0])
        if thorough and (number % 4 == 3 or number == 0):
            tried = [_polished(radii, at_wall, kept[3], kept[4]) for kept in elite[:_POLISHED]]
            better = min([best, *tried], key=lambda found: found[0])
            idle = 0 if better[0] < best[0] * (1 - _SLACK) else idle + 1
            best = better
        if progress:
            progress((number + 1) / rounds)
        if best[0] <= least * (1 + _SLACK) or not elite or idle > 1:
            break
        order, tie = _bred(draw, elite, count, lanes)
    return best


def _closed(radii, at_wall, order, tie, least, most):
    """The least lumen in which each order succeeds, by halving: infinite where it fails at `most`."""
    size, flag = radii[order].T, at_wall[order].T
    low, high = np.full(len(order), least), np.full(len(order), most)
    able = placed(size, flag, high, tie)[2]
    high = np.where(placed(size, flag, low, tie)[2], least, high)
    for _ in range(_HALVINGS):
        middle = (low + high) / 2
        fits = placed(size, flag, middle, tie)[2]
        low, high = np.where(fits, low, middle), np.where(fits, middle, high)
    x, y, fits = placed(size, flag, high, tie)
    back = np.argsort(order, axis=1).T
    lumen = np.where(fits & able, high, np.inf)
    return lumen, np.take_along_axis(x, back, axis=0), np.take_along_axis(y, back, axis=0)


def _bred(draw, elite, count, lanes):
    """New orders from the best: one or two exchanges or moves each; ties sometimes the other way."""
    order, tie = np.zeros((lanes, count), int), np.zeros(lanes)
    for lane in range(lanes):
        parent = elite[min(int(draw.exponential(6.0)), len(elite) - 1)]
        child = list(parent[1])
        for _ in range(1 + int(draw.random() < 0.4)):
            a, b = draw.integers(0, count, 2)
            if draw.random() < 0.5:
                child[a], child[b] = child[b], child[a]
            else:
                child.insert(b, child.pop(a))
        order[lane], tie[lane] = child, -parent[2] if draw.random() < 0.1 else parent[2]
    return order, tie


def _polished(radii, at_wall, x, y):
    """The layout moved until its lumen is least: R minimized under no overlap, wall parts kept at the wall."""
    from scipy.optimize import minimize

    count = len(radii)
    unit = radii[0]
    r, first, second = radii / unit, *np.triu_indices(count, 1)
    sums, pair, part = (r[first] + r[second]) ** 2, np.arange(len(first)), np.arange(count)
    kept = np.flatnonzero(at_wall)

    def constraints(z):
        px, py, lumen = z[:count], z[count:-1], z[-1]
        apart = (px[first] - px[second]) ** 2 + (py[first] - py[second]) ** 2 - sums
        wall = (lumen - r) ** 2 - px**2 - py**2
        return np.concatenate([apart, wall, -wall[kept], [lumen - r.max()]])

    def slopes(z):
        px, py, lumen = z[:count], z[count:-1], z[-1]
        dx, dy = 2 * (px[first] - px[second]), 2 * (py[first] - py[second])
        apart = np.zeros((len(first), 2 * count + 1))
        apart[pair, first], apart[pair, second] = dx, -dx
        apart[pair, count + first], apart[pair, count + second] = dy, -dy
        wall = np.zeros((count, 2 * count + 1))
        wall[part, part], wall[part, count + part], wall[:, -1] = -2 * px, -2 * py, 2 * (lumen - r)
        last = np.zeros((1, 2 * count + 1))
        last[0, -1] = 1.0
        return np.concatenate([apart, wall, -wall[kept], last])

    lumen = (np.hypot(x, y) / unit + r).max()
    toward = np.append(np.zeros(2 * count), 1.0)
    found = minimize(
        lambda z: z[-1],
        np.concatenate([x / unit, y / unit, [lumen]]),
        jac=lambda z: toward,
        constraints={"type": "ineq", "fun": constraints, "jac": slopes},
        method="SLSQP",
        options={"maxiter": 150, "ftol": 1e-13},
    ).x
    px, py = found[:count], found[count:-1]
    apart = np.hypot(px[first] - px[second], py[first] - py[second])
    spread = max((np.sqrt(sums) / np.maximum(apart, 1e-9)).max(), 1.0)  # undo the last overlaps
    px, py = px * spread, py * spread
    lumen = (np.hypot(px, py) + r).max()
    loose = (lumen - np.hypot(px, py) - r)[kept]
    if spread > 1 + 1e-6 or (loose > 1e-7 * lumen).any():
        return np.inf, x, y
    return lumen * unit, px * unit, py * unit
