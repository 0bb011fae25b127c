"""One design over its working range: light, evenness, detail and exposure against distance, and where each need fails.

The design's row is repeated with the distance alone replaced, and goes through the chain at once.
"""

from dataclasses import dataclass

import numpy as np

from optics.chain.columns import Columns, columns
from optics.chain.evaluate import Figures, evaluate
from optics.fiberscope import Fiberscope
from optics.needs import need_margin
from optics.spec import OutOfRange, require

DISTANCE = "scene.target.distance_mm"
# Needs that the distance moves, and the chain's number for each; the others hold or fail everywhere alike.
ALONG = {
    "target_center_lux": "center_lux",
    "target_min_lux": "min_lux",
    "evenness": "evenness",
    "target_uva_w_m2": "uva_w_m2",
    "smallest_gap_mm": "smallest_gap_mm",
    "smallest_line_mm": "smallest_line_mm",
    "frame_hz": "frame_hz",
}
WIDE = 3.0  # a range wider than this ratio is stepped evenly in its logarithm
EXACT = 1e-3  # where a need starts to fail is found to this share
BETWEEN = 6  # distances tried at once between one where a need is met and one where it is not


@dataclass(frozen=True, slots=True)
class RangeCurves:
    """Numbers of one design [distance]; nan where nothing is resolved or the design has no such part.

    `fails`: (need, distance or None, side) for each need that the distance moves. "far": beyond this distance it is not
    met, "near": nearer than this; None: it is met to that end of the range. A need that is met nowhere fails "far"
    from the near end on. `depth_near_mm`, `depth_far_mm` bound the depth of field (nan without an image).
    """

    distance_mm: np.ndarray
    center_lux: np.ndarray
    mean_lux: np.ndarray
    least_lux: np.ndarray
    evenness: np.ndarray
    unlit_fraction: np.ndarray
    smallest_gap_mm: np.ndarray
    smallest_line_mm: np.ndarray
    resolved_lp_mm: np.ndarray
    exposure_s: np.ndarray
    snr: np.ndarray
    field_radius_mm: np.ndarray
    depth_near_mm: float
    depth_far_mm: float
    working_distance_mm: float
    needs: tuple[tuple[str, float], ...]
    fails: tuple[tuple[str, float | None, str], ...]


def over_distance(fiberscope: Fiberscope, count: int = 60) -> RangeCurves:
    """The curves of one design from near_mm to far_mm (absent: half to twice the working distance).

    Raises OutOfRange: a design without a target; fewer than 2 distances.
    """
    if fiberscope.scene is None:
        raise OutOfRange("scene is missing; a working range needs a target to look at.")
    require("count", count, "at least 2", count >= 2)
    target, table = fiberscope.scene.target, columns([fiberscope])
    distance = _distances(target.near_mm or target.distance_mm / 2, target.far_mm or 2 * target.distance_mm, count)
    value = at_distances(table, distance).value
    needs = tuple((name, wanted) for name, wanted in fiberscope.needs.wanted().items() if name in ALONG)
    return RangeCurves(
        distance_mm=distance,
        center_lux=value["center_lux"],
        mean_lux=value["mean_lux"],
        least_lux=value["min_lux"],
        evenness=value["evenness"],
        unlit_fraction=value["unlit_fraction"],
        smallest_gap_mm=value["smallest_gap_mm"],
        smallest_line_mm=value["smallest_line_mm"],
        resolved_lp_mm=value["resolved_lp_mm"],
        exposure_s=value["exposure_s"],
        snr=value["snr"],
        field_radius_mm=value["field_radius_mm"],
        depth_near_mm=float(value["near_mm"][0]),
        depth_far_mm=float(value["far_mm"][0]),
        working_distance_mm=target.distance_mm,
        needs=needs,
        fails=_fails(table, distance, value, dict(needs), target.distance_mm),
    )


def at_distances(table: Columns, distance_mm: np.ndarray) -> Figures:
    """The chain's numbers of the one design of `table` at each distance."""
    same = table.take(np.zeros(len(distance_mm), int))
    return evaluate(same.replaced({DISTANCE: np.asarray(distance_mm, float)}))


def _distances(near: float, far: float, count: int) -> np.ndarray:
    steps = np.geomspace(near, far, count) if far > WIDE * near else np.linspace(near, far, count)
    steps[0], steps[-1] = near, far
    return steps


def _fails(
    table, distance, value, needs: dict[str, float], working: float
) -> tuple[tuple[str, float | None, str], ...]:
    """Both ends of the stretch in which each need is met: the stretch around, or nearest to, the working distance."""
    found: list[tuple[str, float | None, str]] = []
    edges: list[tuple[int, float, float]] = []  # (place in found, a distance where it is met, one where it is not)
    for name, wanted in needs.items():
        met = need_margin(name=name, wanted=np.float64(wanted), got=value[ALONG[name]]) >= 0
        if not met.any():
            found.append((name, float(distance[0]), "far"))
            continue
        inside = np.flatnonzero(met)
        first = last = int(inside[np.argmin(np.abs(np.log(distance[inside] / working)))])
        while first > 0 and met[first - 1]:
            first -= 1
        while last < len(met) - 1 and met[last + 1]:
            last += 1
        for side, at, beyond in (("near", first, first - 1), ("far", last, last + 1)):
            if 0 <= beyond < len(distance):
                edges.append((len(found), float(distance[at]), float(distance[beyond])))
            found.append((name, None, side))
    for (place, *_), at in zip(
        edges, _edges(table, needs, [(found[place][0], good, bad) for place, good, bad in edges])
    ):
        found[place] = (found[place][0], at, found[place][2])
    return tuple(found)


def _edges(table: Columns, needs: dict[str, float], brackets: list[tuple[str, float, float]]) -> list[float]:
    """Where each need starts to fail between a distance where it is met and one where it is not: cut finer, all at once."""
    if not brackets:
        return []
    names = [name for name, *_ in brackets]
    good, bad = (np.array([bracket[which] for bracket in brackets])[:, None] for which in (1, 2))
    parts = np.linspace(0.0, 1.0, BETWEEN + 2)
    while np.any(np.abs(good - bad) > EXACT * np.minimum(good, bad)):
        steps = good * (bad / good) ** parts  # [need, from met to not met]
        figures = at_distances(table, steps[:, 1:-1].ravel()).value
        value = np.array([figures[ALONG[name]].reshape(-1, BETWEEN)[row] for row, name in enumerate(names)])
        wanted = [np.float64(needs[name]) for name in names]
        met = np.array(
            [need_margin(name=name, wanted=want, got=row) >= 0 for name, want, row in zip(names, wanted, value)]
        )
        last = np.where(met.all(axis=1), BETWEEN, np.argmin(met, axis=1))[:, None]
        good, bad = (np.take_along_axis(steps, last + ahead, axis=1) for ahead in (0, 1))
    return [float(at) for at in good[:, 0]]
