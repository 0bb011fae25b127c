"""Single changes of lamp and launch that may give more light, each as settings of the document.

One change is one thing bought or made otherwise; what must follow it (a spot refocused for another lamp) stands in the
same settings. Nothing is asked here of whether it helps or may stand: `levers` does.
"""

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from optics.fiberscope import Fiberscope, Spot
from optics.guide.ends import tapered_na
from optics.presets import Document, value_at
from optics.source.lamp import etendue_mm2_sr
from optics.tables import preset, preset_names
from optics.units import AnyUnit

# Common practice, no source ("trade"): what a well coated condenser passes, and one where there was none.
CONDENSER, CONDENSER_STEP, MATCHED = 0.92, 0.05, 0.8
LEAST = 1e-3  # relative; a smaller move is no change

Settings = dict[str, Any]


@dataclass(frozen=True, slots=True)
class Change:
    """One change: the path it is about, from what to what (None: nothing there), all its settings, and what it is in words."""

    path: str
    before: AnyUnit | str | None
    after: AnyUnit | str | None
    settings: Settings
    said: str


@dataclass(frozen=True, slots=True)
class Face:
    """The first face that the light meets."""

    diameter_mm: float
    na: float


def first_face(scope: Fiberscope) -> Face:
    """The cable's face, or the guide's own, tapered or not."""
    cable, bundle = scope.guide.cable, scope.guide.bundle
    if cable is not None:
        return Face(cable.diameter_mm, cable.fiber.na)
    face_mm = bundle.entry_mm or bundle.diameter_mm
    return Face(face_mm, min(tapered_na(na=scope.guide.fiber.na, from_mm=bundle.diameter_mm, to_mm=face_mm), 1.0))


def lamp_changes(document: Document, scope: Fiberscope, face: Face) -> Iterator[Change]:
    """Other lamps of the same sort (by lumens, or by watts), refocused where the present spot would be too bright for them."""
    now, launch, lamp = value_at(document, "source.lamp.preset"), scope.source.launch, scope.source.lamp
    sort = "flux_w" if lamp.flux_lm is None else "flux_lm"
    for name in preset_names("lamps"):
        values = preset("lamps", name).values
        if name == now or sort not in values or launch.form == "rated":
            continue
        settings, said = swapped(document, "source.lamp", "lamps", name), f"the lamp {name}{instead(now)}"
        if isinstance(launch, Spot):
            spot_mm = _least_spot_mm(launch, values["emitter_mm"].value, values["cone_na"].value, launch.cone_na)
            if spot_mm > launch.spot_mm:
                settings |= {"source.launch.spot_mm": spot_mm}
                said += f", in a spot of {spot_mm:.3g} mm"
        yield Change("source.lamp.preset", now, name, settings, said)
    if scope.source.filter is not None:
        yield Change("source.filter", "a filter", None, {"source.filter": None}, "no filter before the guide")


def launch_changes(scope: Fiberscope, face: Face) -> Iterator[Change]:
    launch, lamp = scope.source.launch, scope.source.lamp
    if launch.form == "butt" and launch.gap_mm > 0:
        said = f"no gap between emitter and face instead of {launch.gap_mm:.3g} mm"
        yield one("source.launch.gap_mm", launch.gap_mm, 0.0, said)
    if isinstance(launch, Spot):
        least_mm = _least_spot_mm(launch, lamp.emitter_mm, lamp.cone_na, launch.cone_na)
        spot_mm = max(face.diameter_mm, least_mm)
        if spot_mm < launch.spot_mm * (1 - LEAST):
            least = ", the least that the lamp's radiance allows" if spot_mm > face.diameter_mm else ""
            said = f"a spot of {spot_mm:.3g} mm instead of {launch.spot_mm:.3g} mm{least}"
            yield one("source.launch.spot_mm", launch.spot_mm, spot_mm, said)
        cone_na = max(face.na, launch.cone_na * least_mm / launch.spot_mm)
        if cone_na < launch.cone_na * (1 - LEAST):
            said = f"a cone of NA {cone_na:.3g} instead of {launch.cone_na:.3g}"
            yield one("source.launch.cone_na", launch.cone_na, cone_na, said)
        refocused = refocusing(launch, face)
        if refocused:
            spot, cone = refocused["source.launch.spot_mm"], refocused["source.launch.cone_na"]
            was = f"{launch.spot_mm:.3g} mm and NA {launch.cone_na:.3g}"
            said = f"the same light in a spot of {spot:.3g} mm and NA {cone:.3g} instead of {was}"
            yield Change("source.launch.spot_mm", launch.spot_mm, spot, refocused, said)
        if launch.profile == "gaussian":
            yield one("source.launch.profile", "gaussian", "top_hat", "an even spot instead of a gaussian one")
        if scope.guide.cable is None and launch.spot_mm > face.diameter_mm:
            entry_mm = round(min(launch.spot_mm, face.diameter_mm * face.na / launch.cone_na), 3)
            if entry_mm > face.diameter_mm * (1 + LEAST):
                said = f"an input face tapered to {entry_mm:.3g} mm"
                yield one("guide.bundle.entry_mm", scope.guide.bundle.entry_mm, entry_mm, said)
    if launch.form in ("spot", "matched"):
        passes = min(round(launch.transmission + CONDENSER_STEP, 9), CONDENSER)
        if passes > launch.transmission * (1 + LEAST):
            said = f"a condenser that passes {passes:.3g} instead of {launch.transmission:.3g}"
            yield one("source.launch.transmission", launch.transmission, passes, said)
    if launch.form in ("spot", "butt"):
        passes = getattr(launch, "transmission", MATCHED)
        settings = {"source.launch.form": "matched", "source.launch.transmission": passes}
        said = f"a condenser of transmission {passes:.3g} that matches the lamp to the face in spot and cone"
        yield Change("source.launch.form", launch.form, "matched", settings, said)


def refocusing(launch: Spot, face: Face) -> Settings:
    """Spot and cone traded at the same etendue, where one is too large for a face and the other has room; nothing if neither."""
    spot, cone = launch.spot_mm, launch.cone_na
    if (spot > face.diameter_mm) == (cone > face.na):
        return {}
    low, high = sorted((spot, face.diameter_mm))
    fresh = min(max(spot * cone / face.na, low), high)
    if abs(fresh / spot - 1) < LEAST or spot * cone / fresh > 1:
        return {}
    return {"source.launch.spot_mm": rounded_up(fresh), "source.launch.cone_na": rounded_up(spot * cone / fresh)}


def swapped(document: Document, path: str, folder: str, name: str) -> Settings:
    """Another preset with all its values in force, also over what the old one's were changed to."""
    old = value_at(document, f"{path}.preset")
    supplied = {
        key: None
        for known in (old, name)
        if known
        for key in (*preset(folder, known).values, *preset(folder, known).curves)
    }
    dropped = {f"{path}.{key}": None for key in supplied if value_at(document, f"{path}.{key}") is not None}
    return {**dropped, f"{path}.preset": name}


def _least_spot_mm(launch: Spot, emitter_mm: float, lamp_na: float, cone_na: float) -> float:
    """The smallest spot of this cone that is not brighter than its lamp, rounded up."""
    peak = 2.0 if launch.profile == "gaussian" else 1.0
    lamp = etendue_mm2_sr(diameter_mm=emitter_mm, na=lamp_na) * peak * launch.transmission
    return rounded_up(math.sqrt(lamp / etendue_mm2_sr(diameter_mm=1.0, na=cone_na)))


def rounded_up(number: float) -> float:
    """Rounded up to four digits, so that no spot comes out brighter than its lamp.

    >>> rounded_up(2.00001), rounded_up(0.57)
    (2.001, 0.57)
    """
    scale = 10.0 ** (3 - math.floor(math.log10(number)))
    return float(f"{math.ceil(number * scale * (1 - 1e-12)) / scale:.4g}")


def one(path: str, before: Any, after: Any, said: str) -> Change:
    return Change(path, before, after, {path: after}, said)


def instead(name: str | None) -> str:
    return f" instead of {name}" if name else ""
