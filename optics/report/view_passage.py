"""What would just pass the bend of the bore: the longest tip, the widest tube, the least bend, and the curves of these limits."""

from dataclasses import dataclass
from typing import Literal

import numpy as np

from optics.body.passage import longest_rigid_tip_mm, port_tilt_deg
from optics.fiberscope import Fiberscope
from optics.report.view_fit import numbered
from optics.report.view_handling import body_numbers
from optics.units import AnyUnit, rad_from_deg

POINTS, HALVINGS = 121, 60
Vary = Literal["outer_diameter_mm", "centerline_radius_mm", "rigid_tip_mm"]


def entry_tilts(bore_mm: float, tip_mm: float) -> tuple[tuple[float, float], ...]:
    """(thickness of the wall, largest lean of the tip in the entry hole), mm and degrees: thin, half, one and two bores thick."""
    thick = bore_mm * np.array([0.0, 0.5, 1.0, 2.0])
    lean = port_tilt_deg(port_mm=bore_mm, thickness_mm=thick, tip_mm=tip_mm)
    return tuple(zip(thick.tolist(), lean.tolist()))


@dataclass(frozen=True, slots=True)
class PassageLimits:
    """What would just pass the bend of the bore, one thing changed at a time; None where nothing would.

    `longest_tip_mm`: with this tube. `widest_tube_mm` and `least_centerline_mm`: with this tip, the tube as stiff as it is.
    """

    longest_tip_mm: float | None
    widest_tube_mm: float | None
    least_centerline_mm: float | None


@dataclass(frozen=True, slots=True)
class LimitCurve:
    """The passable limit [point] over what is varied (nan: nothing passes), and the design's own point.

    `stiff_mm`: from which outer diameter on, or below which bend of the bore, the tube is too stiff (None: always). `needed`: the
    most that is wanted of what is varied and of what is limited.
    """

    vary: Vary
    limit: Vary
    varied: AnyUnit
    passable: AnyUnit
    own: tuple[float, float] | None
    passes: bool
    stiff_mm: float | None
    needed: tuple[float | None, float | None]


@dataclass(frozen=True, slots=True)
class _Bend:
    bore_mm: float
    centerline_radius_mm: float
    bend_deg: float
    edge_radius_mm: float
    tube_mm: float
    rigid_mm: float | None
    least_radius_mm: float

    @property
    def tangent_ratio(self) -> float:
        """tan(theta/4) of the bore's bend."""
        return float(np.tan(rad_from_deg(self.bend_deg) / 4))

    @property
    def flexes(self) -> bool:
        """Whether the bore gives the tube the least bend radius that it takes."""
        stiff = stiff_tube_mm(self)
        return stiff is not None and self.tube_mm <= stiff * (1 + 1e-12)

    def longest_mm(self, tube_mm, centerline_radius_mm):
        """Longest rigid tip for any tubes and center lines."""
        return longest_rigid_tip_mm(
            bore_mm=self.bore_mm,
            centerline_radius_mm=centerline_radius_mm,
            tip_mm=tube_mm,
            bend_deg=self.bend_deg,
            edge_radius_mm=np.minimum(self.edge_radius_mm, np.asarray(tube_mm) / 2),
        )


def bend_of(fiberscope: Fiberscope) -> _Bend | None:
    """The bend of the bore and what is to pass it; None where none is asked."""
    asked = fiberscope.body and fiberscope.body.passage
    if not asked or None in (asked.bore_mm, asked.centerline_radius_mm, asked.bend_deg) or asked.bend_deg == 0:
        return None
    body = body_numbers(numbered(fiberscope))
    rigid = body["rigid_tip_mm"] if np.isfinite(body["rigid_tip_mm"]) else None
    bore = (asked.bore_mm, asked.centerline_radius_mm, asked.bend_deg, asked.edge_radius_mm)
    return _Bend(*bore, body["outer_diameter_mm"], rigid, body["bend_radius_mm"])


def passage_limits(fiberscope: Fiberscope) -> PassageLimits | None:
    """What would just pass, from the closed forms by halving. None without a bend of the bore."""
    bend = bend_of(fiberscope)
    if bend is None:
        return None
    enters, tubes = bend.tube_mm <= bend.bore_mm, [stiff_tube_mm(bend), bend.bore_mm]
    radii = [stiff_centerline_mm(bend)] if enters else [None]
    if bend.rigid_mm is not None:
        found = float(widest_tube_mm(bend, np.array([bend.rigid_mm]))[0])
        tubes.append(found if np.isfinite(found) else None)
        radii.append(_tip_centerline_mm(bend) if enters else None)
    return PassageLimits(
        float(bend.longest_mm(bend.tube_mm, bend.centerline_radius_mm)) if enters else None,
        None if None in tubes else min(tubes),
        None if None in radii else max(radii),
    )


def widest_tube_mm(bend: _Bend, rigid_mm: np.ndarray) -> np.ndarray:
    """The widest tube whose rigid tip of a length passes the bend; nan where none does. The longest tip falls with the tube."""
    low, high = np.full(len(rigid_mm), 1e-6 * bend.bore_mm), np.full(len(rigid_mm), bend.bore_mm)
    for _ in range(HALVINGS):
        middle = (low + high) / 2
        passes = bend.longest_mm(middle, bend.centerline_radius_mm) >= rigid_mm
        low, high = np.where(passes, middle, low), np.where(passes, high, middle)
    return np.where(low > 2e-6 * bend.bore_mm, low, np.nan)


def _tip_centerline_mm(bend: _Bend) -> float | None:
    """The least bend radius of the bore through which the tip passes; the longest tip grows with it."""
    low, high = bend.bore_mm / 2, 1e4 * bend.bore_mm
    if bend.longest_mm(bend.tube_mm, high) < bend.rigid_mm:
        return None
    for _ in range(HALVINGS):
        middle = np.sqrt(low * high)
        low, high = (low, middle) if bend.longest_mm(bend.tube_mm, middle) >= bend.rigid_mm else (middle, high)
    return float(high)


def stiff_tube_mm(bend: _Bend) -> float | None:
    """B - 2 (r - Rc) tan^2(theta/4): the tube whose largest arc in the bore is its own least radius r."""
    found = bend.bore_mm - 2 * (bend.least_radius_mm - bend.centerline_radius_mm) * bend.tangent_ratio**2
    return float(min(found, bend.bore_mm)) if found > 0 else None


def stiff_centerline_mm(bend: _Bend) -> float:
    """r - (B - D)/2 cot^2(theta/4): the bend of the bore that asks for the tube's own least radius r; at least a mitre."""
    found = bend.least_radius_mm - (bend.bore_mm - bend.tube_mm) / 2 / bend.tangent_ratio**2
    return float(max(found, bend.bore_mm / 2))


def limit_curve(fiberscope: Fiberscope, vary: Vary) -> LimitCurve | None:
    """The passable limit over one number: the longest tip over tube or bore radius, the widest tube over the tip's length.

    None without a bend of the bore, and over the bore's radius for a tube that does not enter the bore.
    """
    bend = bend_of(fiberscope)
    if bend is None or (vary == "centerline_radius_mm" and bend.tube_mm > bend.bore_mm):
        return None
    tube, tip, radius = bend.tube_mm, bend.rigid_mm, bend.centerline_radius_mm
    wanted_tube, wanted_tip, stiff = (
        fiberscope.needs.outer_diameter_mm,
        fiberscope.needs.rigid_tip_mm,
        stiff_tube_mm(bend),
    )
    if vary == "rigid_tip_mm":
        longest = float(bend.longest_mm(0.05 * bend.bore_mm, radius))
        varied = np.linspace(0.02, 1.0, POINTS) * max(min(1.1 * longest, 4 * bend.bore_mm), 1.3 * (tip or 0.0))
        passable, limit, needed = widest_tube_mm(bend, varied), "outer_diameter_mm", (wanted_tip, wanted_tube)
        own = (tip, tube)
    elif vary == "outer_diameter_mm":
        varied = np.linspace(min(0.15, 0.8 * tube / bend.bore_mm), 1.0, POINTS) * bend.bore_mm
        passable, limit, needed = bend.longest_mm(varied, radius), "rigid_tip_mm", (wanted_tube, wanted_tip)
        own = (tube, tip)
    else:
        varied = np.linspace(bend.bore_mm / 2, max(2 * radius, 3 * bend.bore_mm), POINTS)
        passable, limit, needed = bend.longest_mm(tube, varied), "rigid_tip_mm", (None, wanted_tip)
        own, stiff = (radius, tip), stiff_centerline_mm(bend)
    if tip is None:
        return LimitCurve(vary, limit, varied, passable, None, True, stiff, needed)
    passes = tube <= bend.bore_mm and bool(bend.longest_mm(tube, radius) >= tip) and bend.flexes
    return LimitCurve(vary, limit, varied, passable, own, passes, stiff, needed)
