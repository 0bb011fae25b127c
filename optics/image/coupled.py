"""Exchange among all cores of the lattice: coupled modes with random core sizes, as a table.

The mean share that ends in a core of each ring depends on one number alone, r = kappa/s: coupling
over the standard deviation of half a neighbors' mismatch. `solve_rings` finds it by diagonalizing
lattices of random cores; `presets/tables/core_exchange.toml` holds its results. The shares are
means over a long fiber and over the randomness, so the contrast they give is never negative.
"""

from functools import lru_cache

import numpy as np

from optics import tables
from optics.image.modes import CONE_NODES, CONE_STEP, mode_tables, scaled_k, v_number
from optics.spec import not_negative, positive, require
from optics.units import Numbers, rad_from_deg, um_from_m, um_from_nm

ROWS = np.array([[1.0, 0.0], [0.5, np.sqrt(0.75)]])  # the lattice's two steps, in pitches
REACH = 6  # pitches: rings counted one by one; what goes farther is a veil without contrast


@lru_cache(maxsize=1)
def rings() -> tuple[np.ndarray, ...]:
    """The cores within `REACH` pitches, [core, xy] in pitches, one array for each ring of equal distance."""
    span = range(-REACH - 1, REACH + 2)
    found: dict[int, list[tuple[int, int]]] = {}
    for i in span:
        for j in span:
            if i * i + i * j + j * j <= REACH**2:
                found.setdefault(i * i + i * j + j * j, []).append((i, j))
    return tuple(np.array(cores) @ ROWS for _, cores in sorted(found.items()))


def solve_rings(*, coupling_over_spread: float, size: int, draws: int, seed: int) -> np.ndarray:
    """Mean share that ends in one core of each ring, [ring], by diagonalizing `draws` random lattices.

    size x size cores with periodic edges; H = kappa between neighbors and a normal propagation
    constant of standard deviation sqrt2 s on each; the share from core i to k along a long fiber
    is sum_n |v_n(i)|^2 |v_n(k)|^2, averaged over i. Seeded. References: closed_form (coupled modes).
    """
    positive(coupling_over_spread=coupling_over_spread)
    require("size", size, f"above {2 * REACH}", size > 2 * REACH)
    rng = np.random.default_rng(seed)
    column, row = (axis.ravel() for axis in np.meshgrid(np.arange(size), np.arange(size)))

    def shift(di: int, dj: int) -> np.ndarray:
        return (row + di) % size * size + (column + dj) % size

    places = np.arange(size * size)
    steps = [np.rint(ring @ np.linalg.inv(ROWS)).astype(int) for ring in rings()]
    total = np.zeros(len(steps))
    for _ in range(draws):
        matrix = np.diag(rng.standard_normal(size * size) * np.sqrt(2.0))
        for di, dj in ((1, 0), (0, 1), (1, -1)):
            matrix[places, shift(di, dj)] = matrix[shift(di, dj), places] = coupling_over_spread
        power = np.linalg.eigh(matrix)[1] ** 2
        power[power < 1e-30] = 0.0  # numbers near the smallest float would slow the product tenfold
        shares = power @ power.T
        total += [np.mean([shares[places, shift(i, j)].mean() for i, j in ring]) for ring in steps]
    return total / draws


@lru_cache(maxsize=1)
def exchange_table() -> tuple[np.ndarray, np.ndarray]:
    """(r at the nodes, shares [node, ring]); the first node is r = 0, where all light stays."""
    columns = tables.table("core_exchange")
    shares = np.stack([columns[f"ring_{ring}"] for ring in range(len(rings()))], axis=1)
    return columns["coupling_over_spread"], shares


def table_shares(*, coupling_over_spread: Numbers) -> np.ndarray:
    """Mean share that ends in one core of each ring, [..., ring], interpolated; ring 0 is the core itself.

    Linear in r between nodes, so that it joins the pair law at small r. Beyond the last node (10,
    where an image is gone) the last shares stand.

    >>> shares = table_shares(coupling_over_spread=0.01)
    >>> bool(0.95 < shares[0] < 0.97), bool(0.0055 < shares[1] < 0.0063)
    (True, True)
    """
    not_negative(coupling_over_spread=coupling_over_spread)
    ratio = np.asarray(coupling_over_spread, float)
    weight = _weights(ratio.ravel(), np.ones(ratio.size), np.arange(ratio.size), ratio.size)
    return (weight @ exchange_table()[1]).reshape(*ratio.shape, -1)


def _weights(ratio: np.ndarray, amount: np.ndarray, rows: np.ndarray, size: int) -> np.ndarray:
    """[row, node]: amounts spread over the two nodes about each ratio, added up by row."""
    nodes = exchange_table()[0]
    ratio = np.minimum(ratio, nodes[-1])
    at = np.minimum(np.searchsorted(nodes, ratio, side="right") - 1, len(nodes) - 2)
    part = (ratio - nodes[at]) / (nodes[at + 1] - nodes[at])
    first = rows * len(nodes) + at
    places, amounts = np.concatenate([first, first + 1]), np.concatenate([amount * (1.0 - part), amount * part])
    spread = np.bincount(places, amounts, size * len(nodes)).astype(float)
    return spread.reshape(size, len(nodes))


def ring_shares(
    *,
    core_um: Numbers,
    pitch_um: Numbers,
    na: Numbers,
    core_index: Numbers,
    core_spread_fraction: Numbers,
    wavelength_nm: Numbers,
    length_m: Numbers,
    cone_sine: Numbers,
) -> np.ndarray:
    """Mean share of a core's light that ends in one core of each ring, [..., ring]; ring 0 is itself.

    Every guided LP_lm of `modes.MODES` exchanges with its like: r = sqrt2 (K0 +- K_2l)(W p/a)/
    (V^2 K_l(W)^2 sigma), half the light in each parity. Modes count by degeneracy times the share
    of their far field within `cone_sine` of the lens: what incoherent light launches. A length too
    short for the mean takes min(1, integral of J0 to 2 kappa L) of it.
    Notes: assumes no exchange between unlike modes (far out of step), nor in the modes left out of
    the list, which exist above V 10.2 and launch only wide cones; there fewer than one in ten modes
    lies near cutoff, and exchange is below a per cent. Randomness of core size only: noncircular
    cores, bends and twists are not modelled. Averages over wavelength may be taken of the shares.
    References: snyder_love_1983; gloge_1971; reichenbach_xu_2007 and chen_2008 for the effect.

    >>> shares = ring_shares(core_um=6.0, pitch_um=8.0, na=0.5, core_index=1.6, core_spread_fraction=0.03,
    ...     wavelength_nm=550.0, length_m=1.0, cone_sine=0.5)
    >>> bool(shares[0] > 0.99)
    True
    """
    positive(core_um=core_um, na=na, wavelength_nm=wavelength_nm, cone_sine=cone_sine)
    not_negative(core_spread_fraction=core_spread_fraction, length_m=length_m)
    require("pitch_um", pitch_um, "above core_um", np.asarray(pitch_um) > np.asarray(core_um))
    require("na", na, "below core_index", np.asarray(na) < np.asarray(core_index))
    given = (core_um, pitch_um, na, core_index, core_spread_fraction, wavelength_nm, length_m, cone_sine)
    columns = np.broadcast_arrays(*(np.asarray(value, float) for value in given))
    core, pitch, aperture, index, sigma, at_nm, length, cone = (column.ravel() for column in columns)
    v = v_number(core_um=core, na=aperture, wavelength_nm=at_nm)
    # beta is within NA^2/2 n^2 of k n; only the effect of the length uses it
    scale = 2.0 * um_from_m(length) * um_from_nm(at_nm) / (2.0 * np.pi * index * (0.5 * core) ** 2)
    amount = _launched(v, v * cone / aperture)
    found = [
        _exchange(azimuthal, amount, v, 2.0 * pitch / core, np.maximum(sigma, 1e-9), scale)
        for azimuthal in sorted({mode.azimuthal for mode in mode_tables()})
    ]
    ratio, moved, rows = (np.concatenate(part) for part in zip(*found))
    weight = _weights(ratio, moved, rows, len(v))
    weight[:, 0] += amount.sum(axis=1) - weight.sum(axis=1)
    shares = weight @ exchange_table()[1] / amount.sum(axis=1, keepdims=True)
    return shares.reshape(*columns[0].shape, -1)


def _launched(v: np.ndarray, cone: np.ndarray) -> np.ndarray:
    """Light in each mode, [row, mode]: degeneracy times the launched share, linear in W and in the cone k a sine.

    0 below cutoff; a cone wider than the table launches what its widest does.
    """
    at = np.minimum(cone / CONE_STEP, CONE_NODES - 1.000001)
    amounts = np.zeros((len(v), len(mode_tables())))
    for column, mode in enumerate(mode_tables()):
        rows = np.flatnonzero(v > mode.cutoff_v_number)
        place = np.interp(v[rows], mode.v_number, np.arange(len(mode.w)))
        node, first = np.minimum(place.astype(int), len(mode.w) - 2), at[rows].astype(int)
        down, over = place - node, at[rows] - first
        low = (1.0 - over) * mode.launched_fraction[node, first] + over * mode.launched_fraction[node, first + 1]
        high = (1.0 - over) * mode.launched_fraction[node + 1, first] + over * mode.launched_fraction[
            node + 1, first + 1
        ]
        amounts[rows, column] = (2.0 if mode.azimuthal == 0 else 4.0) * (low + down * (high - low))
    return amounts


def _exchange(azimuthal, amount, v, pitch_ratio, sigma, scale) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """(r, light that exchanges, row) of the modes of one order, each parity.

    Left out, as staying: modes with under a thousandth of the light, and those whose r is below about 1e-5.
    """
    total = amount.sum(axis=1)
    found = []
    for column, mode in enumerate(mode_tables()):
        if mode.azimuthal == azimuthal:
            rows = np.flatnonzero(amount[:, column] > 1e-3 * total)
            w = np.interp(v[rows], mode.v_number, mode.w)
            rows, w = (part[w * (pitch_ratio[rows] - 2.0) < 14.0] for part in (rows, w))
            found.append((rows, w, amount[rows, column]))
    rows, w, light = (np.concatenate(part) for part in zip(*found))
    (outside, above), far, v2 = scaled_k(azimuthal, w), w * pitch_ratio[rows], v[rows] ** 2
    below = np.abs(above - 2.0 * azimuthal / w * outside)
    zero, twice = (scaled_k(order, far)[0] for order in (0, 2 * azimuthal))
    both = (zero,) if azimuthal == 0 else (zero + twice, twice - zero)
    ratios, moved = [], []
    for lobes in both:
        fields = lobes * np.exp(2.0 * w - far) / v2
        ratios.append(np.sqrt(2.0) * fields / (sigma[rows] * outside * outside))
        moved.append(light / len(both) * _settled(scale[rows] * (v2 - w * w) * fields / (below * above)))
    return np.concatenate(ratios), np.concatenate(moved), np.tile(rows, len(both))


def _settled(turns: np.ndarray) -> np.ndarray:
    """min(1, integral of J0 from 0 to 2 kappa L), by its series up to where it first reaches 1.

    The growth of the mean exchange with length for a mismatch much wider than the coupling; the
    swings about 1 that follow wash out over wavelengths and modes.
    """
    t2 = np.minimum(turns, 1.2) ** 2
    return np.minimum(np.minimum(turns, 1.2) * (1.0 - t2 / 12.0 * (1.0 - t2 / 26.666667 * (1.0 - t2 / 50.4))), 1.0)


def ring_mtf(*, shares: np.ndarray, frequency_per_um: Numbers, pitch_um: Numbers, direction_deg: float) -> np.ndarray:
    """Contrast left by the exchange: sum over cores of share x cos(2 pi f . place); never negative below the limit.

    `shares` [..., ring] from `ring_shares` or `table_shares`; `frequency_per_um` broadcasts with
    shares[..., 0] and `pitch_um`; one direction, 30 for the worst. What leaves the rings counts as a veil
    without contrast. References: closed_form.

    >>> shares = table_shares(coupling_over_spread=np.array([0.0, 0.1]))
    >>> ring_mtf(shares=shares, frequency_per_um=0.057735, pitch_um=10.0, direction_deg=30.0).round(1).tolist()
    [1.0, 0.6]
    """
    not_negative(frequency_per_um=frequency_per_um)
    positive(pitch_um=pitch_um)
    distances, counts = _along(float(direction_deg))
    phase = 2.0 * np.pi * np.asarray(frequency_per_um, float) * pitch_um
    lines = np.asarray(shares) @ counts
    return sum(lines[..., k] * (np.cos(phase * x) if x else 1.0) for k, x in enumerate(distances))


@lru_cache(maxsize=64)
def _along(direction_deg: float) -> tuple[list[float], np.ndarray]:
    """Distances of the cores along a direction (each once, 0 first), and how many of each ring lie there."""
    turn = rad_from_deg(direction_deg)
    seen = [np.abs(ring @ [np.cos(turn), np.sin(turn)]).round(9) for ring in rings()]
    distances = sorted({float(x) for ring in seen for x in ring})
    return distances, np.array([[float((ring == x).sum()) for x in distances] for ring in seen])
