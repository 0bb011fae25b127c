"""Needs asked of many designs at once: margins, who meets them, what fails first in the order of the light, in words."""

from collections.abc import Mapping

import numpy as np

from optics.chain.columns import Columns
from optics.chain.evaluate import Figures
from optics.needs import AT_MOST, NeedLine, Needs, Summary, need_margin, verdict
from optics.report.verdict import NAMES, UNITS
from optics.units import Flags, unit_of
from optics.viewer.detail import PARTS

# The chain's own name of a need's number, where it differs.
NUMBERS = {
    "target_center_lux": "center_lux",
    "target_mean_lux": "mean_lux",
    "target_min_lux": "min_lux",
    "target_uva_w_m2": "uva_w_m2",
}
# The order in which light meets what is asked: its color, the target, the way back, then the body.
ORDER = (
    "color_rendering_index",
    "target_uva_w_m2",
    "target_center_lux",
    "target_min_lux",
    "evenness",
    "field_of_view_deg",
    "smallest_gap_mm",
    "smallest_line_mm",
    "frame_hz",
    "outer_diameter_mm",
    "bend_radius_mm",
    "rigid_tip_mm",
)
STEAM_C = 134.0
# What is asked besides the needs: the parts must fit, the scope must pass, its materials must stand the job.
BESIDES = ("fits", "enters", "tip", "elbow", "passes", "heat", "steam")
FLAGS = ("passes", "heat", "steam")  # of these, what has no number but yes or no
SHORT = {
    "fits": "the parts do not fit the tube",
    "enters": "the tube is wider than the bore",
    "tip": "the rigid tip does not pass the bend of the bore",
    "elbow": "the tube does not bend as the bore does",
    "passes": "it does not pass the bore",
    "heat": "a material does not stand the heat",
    "steam": "a material does not stand steam",
}


def number(figures: Figures, name: str) -> np.ndarray:
    """The number that a need asks about [design], nan where a design has none."""
    return figures.value[NUMBERS.get(name, name)]


def margins(needs: Needs, table: Columns, figures: Figures) -> dict[str, np.ndarray]:
    """Relative margins [design] of all that is asked, in the order of the light; what has no number is 0 or -1."""
    wanted = needs.wanted()
    found = {
        name: need_margin(name=name, wanted=np.float64(wanted[name]), got=number(figures, name))
        for name in ORDER
        if name in wanted
    }
    passing = _passing(table, figures)
    told = np.logical_or.reduce([each < 0 for each in passing.values()])  # what does not pass, one of these says why
    good = {"passes": told | (figures["passes"] != 0), **_stands(table)}
    return found | passing | {name: np.where(good[name], 0.0, -1.0) for name in good}


def _passing(table: Columns, figures: Figures) -> dict[str, np.ndarray]:
    """Relative margins of what must fit and pass [design]; infinite where nothing is asked or a wider tube hides it."""
    pairs = {
        "enters": (figures["outer_diameter_mm"], table["body.passage.bore_mm"]),
        "tip": (figures["rigid_tip_mm"], figures["longest_rigid_tip_mm"]),
        "elbow": (figures["bend_radius_mm"], figures["passable_radius_mm"]),
    }
    room = 1.0 - figures["needed_lumen_mm"] / np.where(figures["lumen_mm"] > 0, figures["lumen_mm"], np.nan)
    fits = np.where(figures["fits"] == 0, np.minimum(np.nan_to_num(room, nan=-1.0), -1e-12), np.maximum(room, 0.0))
    found = {"fits": fits, **{name: 1.0 - has / limit for name, (has, limit) in pairs.items()}}
    return {name: np.where(np.isnan(margin), np.inf, margin) for name, margin in found.items()}


def meeting(margin: Mapping[str, np.ndarray]) -> Flags:
    """Which designs meet all [design]."""
    return np.logical_and.reduce([found >= 0 for found in margin.values()])


def first_failing(margin: Mapping[str, np.ndarray]) -> np.ndarray:
    """Place, in the order of the margins, of the first that is not met [design]; their number where all are."""
    failing = np.array([found < 0 for found in margin.values()])
    return np.where(failing.any(axis=0), failing.argmax(axis=0), len(failing))


def shortfall(margin: Mapping[str, np.ndarray], needs: Needs) -> np.ndarray:
    """How far a design is from meeting all [design]: the sum of the factors' logarithms that its numbers lack.

    What has no number (a material) counts as a factor of 2; nothing resolved as infinite.
    """
    total = np.zeros(len(next(iter(margin.values()))))
    for name, found in margin.items():
        lacks = np.minimum(found, 0.0)
        with np.errstate(divide="ignore"):
            total += np.log1p(-lacks) if name in AT_MOST or name in BESIDES else -np.log1p(np.maximum(lacks, -1.0))
    return total


def _stands(table: Columns) -> dict[str, Flags]:
    """Whether guide and image bundle stand the highest temperature and steam [design]; true where nothing is asked."""
    asked, least = table["body.handling.highest_temperature_c"], np.full(table.count, np.inf)
    for path in ("guide.fiber.highest_temperature_c", "image.bundle.highest_temperature_c"):
        least = np.fmin(least, table[path])
    steamed = table.texts("body.handling.sterilization") == "steam"
    good = (table.get("guide.fiber.steam", 1.0) > 0) & (table.get("image.bundle.highest_temperature_c", 1e3) >= STEAM_C)
    return {"heat": np.isnan(asked) | (least >= asked), "steam": ~steamed | good}


# Words and records of one design


def reason(name: str, needs: Needs, table: Columns, figures: Figures, row: int) -> str:
    """Why a design fails, in words with its number."""
    if name in needs.wanted():
        return told(name, needs.wanted()[name], float(number(figures, name)[row]))
    if name == "fits":
        needed, has = (float(figures[key][row]) for key in ("needed_lumen_mm", "lumen_mm"))
        return f"{SHORT[name]}: they need a lumen of {needed:.3g} mm, it has {has:.3g} mm"
    if name == "enters":
        tube, bore = float(figures["outer_diameter_mm"][row]), float(table["body.passage.bore_mm"][row])
        return f"{SHORT[name]}: {tube:.3g} mm against {bore:.3g} mm"
    if name == "tip":
        tip, longest = (float(figures[key][row]) for key in ("rigid_tip_mm", "longest_rigid_tip_mm"))
        return f"{SHORT[name]}: {tip:.3g} mm long, at most {longest:.3g} mm pass"
    if name == "elbow":
        least, takes = (float(figures[key][row]) for key in ("bend_radius_mm", "passable_radius_mm"))
        return f"{SHORT[name]}: to {least:.3g} mm, the bore asks for {takes:.3g} mm"
    return SHORT[name]


def told(name: str, wanted: float, got: float) -> str:
    """One need as a clause: what is reached, what is wanted."""
    unit = UNITS.get(unit_of(name) or "", "")
    asked = f"{'at most' if name in AT_MOST else 'at least'} {spoken(wanted)} {unit}".rstrip()
    if np.isnan(got):
        return f"{NAMES[name]}: nothing reached, {asked} wanted"
    return f"{NAMES[name]}: {spoken(got)} {unit}".rstrip() + f", {asked} wanted"


def spoken(number_of: float) -> str:
    """Three digits without an exponent where that can be helped; more where three would read as the limit itself."""
    return f"{number_of:.3g}" if 1e-3 <= abs(number_of) < 1e3 or number_of == 0 else f"{number_of:,.0f}"


def summary_of(needs: Needs, figures: Figures, row: int) -> tuple[Summary, tuple[NeedLine, ...]]:
    """The headline numbers of one row, as `size` gives them, and its needs line by line."""

    def plain(name: str) -> float | None:
        found = float(number(figures, name)[row])
        return found if np.isfinite(found) else None

    lines = tuple(verdict(needs, {name: plain(name) for name in ORDER}))
    limit = figures.value["limited_by"][row]
    numbers = {name: plain(name) for name in Summary.__slots__ if name not in ("limited_by", "needs_met")}
    part = None if np.isnan(limit) else PARTS[int(limit)]
    return Summary(**numbers, limited_by=part, needs_met=all(line.met for line in lines) if lines else None), lines
