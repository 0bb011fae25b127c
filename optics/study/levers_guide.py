"""Single changes of cable, fiber and bundle that may give more light, each as settings of the document."""

import math
from collections.abc import Iterator

from optics.fiberscope import Fiberscope, Spot
from optics.guide.packing import disc_count
from optics.presets import Document, value_at
from optics.study.levers_source import LEAST, Change, Face, Settings, instead, one, refocusing, rounded_up, swapped
from optics.tables import preset, preset_names
from optics.units import mm_from_um

# Common practice, no source ("trade"): the tightest packing of glued bundles, and of hot-fused ends of glass.
PACKED = {"glass": 0.85, "silica": 0.85, "plastic": 0.80}
FUSED, PACKING_STEP = 0.95, 0.03
SHORTER, GENTLER, WIDER = 0.75, 2.0, (1.1, 1.25)
GEL_INDEX = 1.5
FEW = 60.0  # bundle over fiber up to which whole fibers are counted


def cable_changes(document: Document, scope: Fiberscope) -> Iterator[Change]:
    """The cable, its joint, and doing without them."""
    cable, joint, bundle, launch = scope.guide.cable, scope.guide.joint, scope.guide.bundle, scope.source.launch
    yield from _shorter("guide.cable.length_m", cable.length_m, "cable")
    yield from _packed("guide.cable.packing_fraction", cable.packing_fraction, cable.fiber.material, "cable")
    face_mm = bundle.entry_mm or bundle.diameter_mm
    if cable.diameter_mm > face_mm * (1 + LEAST):
        said = f"a cable of {face_mm:.3g} mm instead of {cable.diameter_mm:.3g} mm"
        yield one("guide.cable.diameter_mm", cable.diameter_mm, face_mm, said)
        refocused = refocusing(launch, Face(face_mm, cable.fiber.na)) if isinstance(launch, Spot) else {}
        if refocused:
            settings = {"guide.cable.diameter_mm": face_mm, **refocused}
            said += f", in a spot of {refocused['source.launch.spot_mm']:.3g} mm"
            yield Change("guide.cable.diameter_mm", cable.diameter_mm, face_mm, settings, said)
    if joint.gap_mm > 0:
        said = f"no gap in the joint instead of {joint.gap_mm:.3g} mm"
        yield one("guide.joint.gap_mm", joint.gap_mm, 0.0, said)
    if joint.offset_mm > 0:
        said = f"a centered joint instead of one off by {joint.offset_mm:.3g} mm"
        yield one("guide.joint.offset_mm", joint.offset_mm, 0.0, said)
    if joint.index < 1.1:
        yield one("guide.joint.index", joint.index, GEL_INDEX, "a gel of index 1.5 in the joint instead of air")
    whole_m = round(cable.length_m + bundle.length_m, 9)
    settings = {"guide.cable": None, "guide.joint": None, "guide.bundle.length_m": whole_m}
    said = f"one guide of {whole_m:.3g} m from the lamp on, without cable and joint"
    yield Change("guide.cable", "a cable", None, settings, said)
    now = value_at(document, "guide.cable.fiber.preset")
    for name in preset_names("fibers"):
        swap = _fiber(document, "guide.cable.fiber", name, cable.packing_fraction, cable.diameter_mm)
        if name != now and swap is not None:
            yield Change("guide.cable.fiber.preset", now, name, swap, f"a cable of {name} fiber{instead(now)}")


def fiber_changes(document: Document, scope: Fiberscope, face: Face) -> Iterator[Change]:
    """Other fibers for the guide, and for cable and guide together; refocused where that helps the wider or narrower cone."""
    now, bundle, launch = value_at(document, "guide.fiber.preset"), scope.guide.bundle, scope.source.launch
    ports = getattr(scope.scene.ports, "count", 1) if scope.scene else 1
    for name in preset_names("fibers"):
        port_mm = bundle.diameter_mm / math.sqrt(ports)
        swap = _fiber(document, "guide.fiber", name, bundle.packing_fraction, port_mm)
        if name == now or swap is None:
            continue
        packing = swap.get("guide.bundle.packing_fraction")
        said = f"{name} fiber{instead(now)}" + ("" if packing is None else f", packed to {packing:.3g}")
        yield Change("guide.fiber.preset", now, name, swap, said)
        if scope.guide.cable is not None:
            both = swap | swapped(document, "guide.cable.fiber", "fibers", name)
            yield Change("guide.fiber.preset", now, name, both, f"{said}, in cable and guide alike")
        elif isinstance(launch, Spot):
            refocused = refocusing(launch, Face(face.diameter_mm, preset("fibers", name).values["na"].value))
            if refocused:
                more = f", the light refocused to {refocused['source.launch.spot_mm']:.3g} mm"
                yield Change("guide.fiber.preset", now, name, swap | refocused, said + more)


def bundle_changes(scope: Fiberscope) -> Iterator[Change]:
    """The guide itself: how full, how long, how whole, how gently bent, how wide."""
    bundle, material = scope.guide.bundle, scope.guide.fiber.material
    yield from _packed("guide.bundle.packing_fraction", bundle.packing_fraction, material, "bundle")
    if bundle.broken_fraction > 0:
        said = f"no broken fibers instead of {bundle.broken_fraction:.3g} of them"
        yield one("guide.bundle.broken_fraction", bundle.broken_fraction, 0.0, said)
    if bundle.bounce_loss_fraction > 0:
        said = "reflections at the core's wall without loss"
        yield one("guide.bundle.bounce_loss_fraction", bundle.bounce_loss_fraction, 0.0, said)
    yield from _shorter("guide.bundle.length_m", bundle.length_m, "guide")
    for place, bend in enumerate(bundle.bends):
        if bend.angle_deg > 0:
            radius = GENTLER * bend.radius_mm
            said = f"a bend of {radius:.3g} mm instead of {bend.radius_mm:.3g} mm"
            yield one(f"guide.bundle.bends.{place}.radius_mm", bend.radius_mm, radius, said)
    for ratio in WIDER:
        wider = rounded_up(ratio * bundle.diameter_mm)
        said = f"a guide of {wider:.3g} mm instead of {bundle.diameter_mm:.3g} mm"
        yield one("guide.bundle.diameter_mm", bundle.diameter_mm, wider, said)


def _packed(path: str, packing: float, material: str, what: str) -> Iterator[Change]:
    """Fibers packed tighter within practice; glass fused at its ends."""
    tighter = min(round(packing + PACKING_STEP, 9), PACKED[material])
    if tighter > packing * (1 + LEAST):
        yield one(path, packing, tighter, f"a {what} packed to {tighter:.3g} instead of {packing:.3g}")
    if material == "glass" and packing < FUSED * (1 - LEAST):
        yield one(path, packing, FUSED, f"hot-fused ends of the {what}, packed to {FUSED:.3g} instead of {packing:.3g}")


def _shorter(path: str, length_m: float, what: str) -> Iterator[Change]:
    shorter = round(SHORTER * length_m, 9)
    yield one(path, length_m, shorter, f"a {what} of {shorter:.3g} m instead of {length_m:.3g} m")


def _fiber(document: Document, path: str, name: str, packing: float, bundle_mm: float) -> Settings | None:
    """Settings of another fiber, packed no tighter than practice and its thickness allow; None where not one fits."""
    values = preset("fibers", name).values
    fiber_mm, holder = float(mm_from_um(values["fiber_um"].value)), path.replace("fiber", "bundle", 1)
    holder = "guide.cable" if path == "guide.cable.fiber" else holder
    most = max(PACKED[values["material"].value], packing if values["material"].value == "glass" else 0.0)
    if bundle_mm < FEW * fiber_mm:
        count = disc_count(bundle_mm=bundle_mm, fiber_mm=fiber_mm)
        most = min(most, math.floor(1000 * count * (fiber_mm / bundle_mm) ** 2) / 1000)
    if most <= 0:
        return None
    return swapped(document, path, "fibers", name) | ({f"{holder}.packing_fraction": most} if most < packing else {})
