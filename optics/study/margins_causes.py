"""What moves a number: shares of its variance by tolerance, and the gain from halving one tolerance.

The shares are first-order Sobol indices, taken from the coefficients of orthogonal polynomials that are fitted
to the samples: for each tolerance the polynomials that are orthonormal under its own triangle, so a number that
is linear in a value is met exactly. Products of the strongest few tell what works only together; what the fit
leaves is said as unexplained.
References: sobol_1993, sudret_2008.
"""

from dataclasses import dataclass

import numpy as np

from optics.study.margins_ranges import Tolerance
from optics.units import AnyUnit, Flags

DEGREES = (3, 2, 1)  # of the polynomials: the highest for which the samples suffice
SAMPLES_A_TERM = 4  # samples for each fitted coefficient, at least
STRONGEST = 6  # tolerances whose products are fitted too
NODES, WEIGHTS = np.polynomial.legendre.leggauss(8)


@dataclass(frozen=True, slots=True)
class Shares:
    """Shares of the variance of one number [tolerance]; together with the last two they sum to 1."""

    first_share: np.ndarray
    standard_error: np.ndarray
    together_share: float
    unexplained_share: float


def variance_shares(*, ranges: tuple[Tolerance, ...], values: AnyUnit, result: AnyUnit) -> Shares | None:
    """Shares of the variance of `result` [sample] by tolerance; None where it does not vary or samples are too few.

    result = c0 + sum over tolerances and degrees of c P_degree(value) + products of the strongest; with the
    polynomials orthonormal the share of a tolerance is the sum of its c^2 over the variance, which is the sum of
    all c^2 and of what the fit leaves (residual over degrees of freedom).
    """
    spread, count = np.ptp(result), len(result)
    degree = next((k for k in DEGREES if count >= SAMPLES_A_TERM * (1 + k * len(ranges))), None)
    if degree is None or spread <= 1e-9 * np.abs(result).max():
        return None
    basis = np.array([orthonormal(tolerance, values[:, row], degree) for row, tolerance in enumerate(ranges)])
    flat = basis.transpose(1, 0, 2).reshape(count, -1)
    scaled = (result - result.mean()) / spread
    main = _fitted(np.column_stack([np.ones(count), flat]), scaled)[1:]
    strongest = np.argsort(-(main.reshape(len(ranges), degree) ** 2).sum(axis=1), kind="stable")[:STRONGEST]
    pairs = [(a, b) for i, a in enumerate(strongest) for b in strongest[i + 1 :]]
    if count < SAMPLES_A_TERM * (1 + flat.shape[1] + len(pairs)):
        pairs = []
    products = [basis[a, :, 0] * basis[b, :, 0] for a, b in pairs]
    design = np.column_stack([np.ones(count), flat, *products])
    found = _fitted(design, scaled)
    left = float(np.sum((scaled - design @ found) ** 2) / (count - design.shape[1]))
    alone = (found[1 : 1 + flat.shape[1]].reshape(len(ranges), degree) ** 2).sum(axis=1)
    together = float(np.sum(found[1 + flat.shape[1] :] ** 2))
    total = alone.sum() + together + left
    first = alone / total
    return Shares(first, 2 * np.sqrt(first * left / total / count), together / total, left / total)


def _fitted(design: np.ndarray, result: np.ndarray) -> np.ndarray:
    """Least squares by the normal equations: well conditioned, as the columns are nearly orthonormal."""
    return np.linalg.solve(design.T @ design, design.T @ result)


def orthonormal(tolerance: Tolerance, values: AnyUnit, degree: int) -> AnyUnit:
    """Polynomials of degree 1 to `degree` at values [sample, degree], orthonormal under the tolerance's triangle."""
    half = max(tolerance.high - tolerance.value, tolerance.value - tolerance.low)
    ends = (np.array([tolerance.low, tolerance.high]) - tolerance.value) / half
    nodes, weights = [], []
    for end in ends[ends != 0]:  # the density falls evenly from the peak to each end
        at = (1 + NODES) / 2
        nodes.append(end * at)
        weights.append(WEIGHTS * (1 - at) * abs(end))
    at, weight = np.concatenate(nodes), np.concatenate(weights)
    weighted = np.vander(at, degree + 1, increasing=True) * np.sqrt(weight / weight.sum())[:, None]
    upper = np.linalg.qr(weighted, mode="r")
    powers = np.vander((values - tolerance.value) / half, degree + 1, increasing=True)
    return np.linalg.solve(upper.T, powers.T).T[:, 1:]


def halved(tolerance: Tolerance, values: AnyUnit) -> AnyUnit:
    """The same draws with the tolerance halved around the nominal value: exactly the triangle of half the width."""
    return tolerance.value + (values - tolerance.value) / 2


def halved_weight(tolerance: Tolerance, values: AnyUnit) -> AnyUnit:
    """Density under the halved tolerance over that under the whole one, 0 outside the half [sample].

    With t the distance from the nominal value over that of the end: 2 (1 - 2t)/(1 - t) up to t = 1/2. Its mean
    over the whole triangle is 1, so weighted means of samples foretell what halving does.
    """
    away = values - tolerance.value
    end = np.where(away < 0, tolerance.low - tolerance.value, tolerance.high - tolerance.value)
    t = np.where(end == 0, 0.0, away / np.where(end == 0, 1.0, end))
    return np.where(t < 0.5, 2 * (1 - 2 * t) / np.maximum(1 - t, 0.5), 0.0)


def halving_gains(*, ranges: tuple[Tolerance, ...], values: AnyUnit, met: Flags) -> AnyUnit:
    """By how much halving each tolerance should raise the share of samples that are `met` [tolerance], without new ones."""
    gains = []
    for tolerance, column in zip(ranges, values.T):
        weight = halved_weight(tolerance, column)
        gains.append(np.sum(weight * met) / np.sum(weight) - np.mean(met))
    return np.array(gains)


def binomial_error(probability: float, count: int) -> float:
    """Standard error of a share of `count` samples; never below that of one sample among them.

    sqrt(p (1 - p) / n), with p (1 - p) at least (n - 1)/n^2: all samples alike do not prove that none differs.

    >>> round(binomial_error(0.5, 100), 3), round(binomial_error(1.0, 100), 5)
    (0.05, 0.00995)
    """
    variance = max(probability * (1 - probability), (count - 1) / count**2)
    return float(np.sqrt(variance / count))
