"""Weighted least squares on the chain's own model: values, covariance, how well it fits, and which readings stand apart."""

from dataclasses import dataclass

import numpy as np

from optics.spec import OutOfRange
from optics.study.bench_model import Model, Sought
from optics.study.bench_readings import Readings
from optics.units import AnyUnit

LEVEL = 0.95  # of the stated intervals
UNLIKELY = 0.01  # a fit, or an outlier among all readings, is called so below this probability
ALIKE = 1e-5  # of the slopes of two numbers: nearer to parallel than this they tell one number
ROUNDING = 1e-9  # readings of less scatter were computed, not measured
EDGE = 1e-6  # a number this near to what it may be at most or least stands at the edge


@dataclass(frozen=True, slots=True)
class Fit:
    """The fit of the launch factor (first) and, if one is sought, of the other number.

    `normalized`: residuals over the standard error of their reading; `chi_square` and `fit_probability` None where
    nothing tests the fit (no errors stated and no reading repeated, or no degree of freedom left).
    """

    values: AnyUnit
    covariance: AnyUnit
    half_widths: AnyUnit  # of the 95 % intervals
    model: AnyUnit
    error: AnyUnit  # standard error of each reading, stated or estimated
    normalized: AnyUnit
    freedom: int
    chi_square: AnyUnit | None
    fit_probability: float | None
    widened: bool
    at_edge: bool

    @property
    def standard_errors(self) -> AnyUnit:
        return np.sqrt(np.diag(self.covariance))

    @property
    def correlation(self) -> float:
        """Of the two numbers; 0 where only one is fitted."""
        if len(self.values) == 1:
            return 0.0
        return float(self.covariance[0, 1] / np.prod(self.standard_errors))


def fitted(model: Model, readings: Readings, aim: Sought | None) -> Fit:
    """The least-squares fit of readings = factor x model(number), each weighted by its standard error.

    With no errors stated all readings count as equally exact in relative terms, and their scatter gives the error.
    Where the stated errors do not explain the scatter, the errors are widened by the root of chi-square over the
    degrees of freedom (birge_1932).
    Raises OutOfRange: fewer readings than numbers, or as many and no errors stated.
    """
    count, sought = len(readings.at), 1 if aim is None else 2
    freedom = count - sought
    if freedom < 0 or (freedom == 0 and readings.error is None):
        more = "" if readings.error is not None else " without standard errors"
        raise OutOfRange(f"{count} readings{more} cannot fix {sought} numbers; take {sought + 1} or more.")
    weight = readings.got if readings.error is None else readings.error
    values, moved = _solved(model, readings, aim, weight)
    slopes = _slopes(model, values, aim, weight)
    inverse = np.linalg.inv(slopes.T @ slopes)
    residual = (readings.got - moved) / weight
    squares = float(residual @ residual)
    scale, chi, probability, widened = _scale(readings, squares, freedom, moved)
    covariance = inverse * scale**2
    stated = readings.error is not None and not widened
    half = _quantile(stated, freedom) * np.sqrt(np.diag(covariance))
    error = weight * (scale if readings.error is None else 1.0)
    edge = aim is not None and min(values[-1] - aim.low, aim.high - values[-1]) < EDGE * aim.high
    return Fit(
        values, covariance, half, moved, error, (readings.got - moved) / error, freedom, chi, probability, widened, edge
    )


def outliers(model_of, readings: Readings, aim: Sought | None) -> tuple[tuple[int, float], ...]:
    """(row, distance in standard errors) of readings that stand apart from the rest, worst first.

    Each residual over its own standard error, held against the level of all readings at once; the worst is set
    aside and the rest fitted again. Where more than a quarter stands apart, none does: then the model is wrong.
    References: cook_weisberg_1982.
    """
    found: list[tuple[int, float]] = []
    rest = readings
    while len(rest.at) > (1 if aim is None else 2) + 1:
        apart = _apart(model_of(rest), rest, aim)
        worst = int(np.argmax(np.abs(apart)))
        if abs(apart[worst]) <= _apart_limit(rest, aim):
            return tuple(found)
        found.append((int(rest.row[worst]), float(apart[worst])))
        if len(found) > max(len(readings.at) // 4, 1) or len(rest.at) <= 3:
            return ()
        rest = rest.take(np.arange(len(rest.at)) != worst)
    return tuple(found)
    return tuple(found)


def tell_alike(model: Model, readings: Readings, aim: Sought) -> bool:
    """Whether the launch and the number looked for move all readings alike, so that only one can be fitted."""
    slopes = _slopes(model, np.array([1.0, aim.start]), aim, readings.got if readings.error is None else readings.error)
    lengths = np.linalg.norm(slopes, axis=0)
    if lengths[1] <= ALIKE * lengths[0]:
        return True
    first, second = (slopes / lengths).T
    return bool(np.linalg.norm(second - (first @ second) * first) < ALIKE)


def _solved(model: Model, readings: Readings, aim: Sought | None, weight: np.ndarray):
    """(values, readings that they give)."""
    if aim is None:
        shape = model.at(0.0)[0]
        factor = float(np.sum(readings.got * shape / weight**2) / np.sum((shape / weight) ** 2))
        return np.array([factor]), factor * shape
    from scipy.optimize import least_squares

    start = float(np.exp(np.mean(np.log(readings.got / np.maximum(model.at(aim.start)[0], 1e-300)))))

    def apart(values: np.ndarray) -> np.ndarray:
        return (values[0] * start * model.at(values[1] * aim.start)[0] - readings.got) / weight

    def slopes(values: np.ndarray) -> np.ndarray:
        return _slopes(model, values * [start, aim.start], aim, weight) * [start, aim.start]

    bounds = ([0.0, aim.low / aim.start], [np.inf, aim.high / aim.start])
    found = least_squares(apart, [1.0, 1.0], jac=slopes, bounds=bounds, xtol=1e-12, ftol=1e-12, gtol=1e-12)
    values = found.x * [start, aim.start]
    return values, values[0] * model.at(values[1])[0]


def _slopes(model: Model, values: np.ndarray, aim: Sought | None, weight: np.ndarray) -> np.ndarray:
    shape, slope = model.at(0.0 if aim is None else values[1])
    columns = [shape] if aim is None else [shape, values[0] * slope]
    return np.column_stack(columns) / weight[:, None]


def _scale(readings: Readings, squares: float, freedom: int, moved: np.ndarray):
    """(standard error of unit weight, chi-square or F, its probability, whether stated errors were widened)."""
    from scipy.special import chdtrc, fdtrc

    if freedom == 0:
        return 1.0, None, None, False
    spread = np.sqrt(squares / freedom) if readings.error is not None else max(np.sqrt(squares / freedom), ROUNDING)
    if readings.error is not None:
        probability = float(chdtrc(freedom, squares))
        widened = probability < UNLIKELY
        return (spread if widened else 1.0), squares, probability, widened
    pure, spare = _repeated(readings)
    if spare == 0 or freedom == spare or pure == 0:
        return spread, None, None, False
    ratio = ((squares - pure) / (freedom - spare)) / (pure / spare)  # lack of fit over the scatter of repeats
    return spread, float(ratio), float(fdtrc(freedom - spare, spare, max(ratio, 0.0))), False


def _repeated(readings: Readings) -> tuple[float, int]:
    """Squares and degrees of freedom of readings repeated at the same setting, in relative terms."""
    settings = readings.at if readings.turned_deg is None else np.column_stack([readings.at, readings.turned_deg])
    groups = np.unique(settings, axis=0, return_inverse=True)[1].ravel()
    squares, freedom = 0.0, 0
    for group in range(groups.max() + 1):
        here = readings.got[groups == group]
        squares += float(np.sum(((here - here.mean()) / here) ** 2))
        freedom += len(here) - 1
    return squares, freedom


def _quantile(stated: bool, freedom: int) -> float:
    """How many standard errors the 95 % interval reaches: of a normal, or of Student's t where the scatter gave them."""
    from scipy.special import ndtri, stdtrit

    return float(ndtri((1 + LEVEL) / 2) if stated else stdtrit(freedom, (1 + LEVEL) / 2))


def _apart(model: Model, readings: Readings, aim: Sought | None) -> np.ndarray:
    """Residuals over their own standard error: of the stated errors, or of the scatter of the other readings."""
    weight = readings.got if readings.error is None else readings.error
    values, moved = _solved(model, readings, aim, weight)
    slopes = _slopes(model, values, aim, weight)
    lever = np.einsum("ij,jk,ik->i", slopes, np.linalg.inv(slopes.T @ slopes), slopes)
    residual = (readings.got - moved) / weight / np.sqrt(np.maximum(1 - lever, 1e-12))
    if readings.error is not None:
        return residual
    squares = float(np.sum(((readings.got - moved) / weight) ** 2))
    freedom = len(readings.at) - slopes.shape[1]
    if squares <= ROUNDING**2 * freedom or freedom < 2:
        return np.zeros_like(residual)
    others = np.maximum(squares - residual**2, 1e-12 * squares) / (freedom - 1)
    return residual / np.sqrt(others)


def _apart_limit(readings: Readings, aim: Sought | None) -> float:
    from scipy.special import ndtri, stdtrit

    tail, freedom = UNLIKELY / 2 / len(readings.at), len(readings.at) - (2 if aim else 1) - 1
    return float(-ndtri(tail) if readings.error is not None else -stdtrit(max(freedom, 1), tail))
