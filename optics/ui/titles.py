"""The present state of each part of the instrument in a few words, for the titles of the folds."""

from collections.abc import Callable

from optics.fiberscope import Fiberscope
from optics.presets import Document, value_at
from optics.report.answer import Report
from optics.ui.names import preset_name
from optics.ui.words import exact, number

PARTS = ("source", "guide", "scene", "image", "viewer", "body", "needs")


def title(part: str, document: Document, scope: Fiberscope, report: Report) -> str:
    """What a part is at present: 'lead silicate NA 0.57, 2 mm × 1.8 m'."""
    if part != "needs" and getattr(scope, part) is None:
        return "none"
    return TITLES[part](document, scope, report)


def _named(document: Document, path: str, otherwise: str) -> str:
    name = value_at(document, f"{path}.preset")
    return preset_name(str(name)) if name else otherwise


def _source(document: Document, scope: Fiberscope, report: Report) -> str:
    lamp, launch = scope.source.lamp, scope.source.launch
    flux = f"{exact(lamp.flux_lm)} lm" if lamp.flux_lm is not None else f"{exact(lamp.flux_w)} W"
    how = {
        "butt": lambda: f"gap {exact(launch.gap_mm)} mm",
        "spot": lambda: f"spot {exact(launch.spot_mm)} mm",
        "matched": lambda: "matched",
        "rated": lambda: f"rated {exact(launch.rated_lm)} lm",
    }[launch.form]()
    return f"{_named(document, 'source.lamp', 'own lamp')}, {flux}, {how}"


def _guide(document: Document, scope: Fiberscope, report: Report) -> str:
    bundle = scope.guide.bundle
    cable = f"cable {exact(scope.guide.cable.length_m)} m, " if scope.guide.cable else ""
    fiber = _named(document, "guide.fiber", f"NA {exact(scope.guide.fiber.na)}")
    return f"{cable}{fiber}, {exact(bundle.diameter_mm)} mm × {exact(bundle.length_m)} m"


def _scene(document: Document, scope: Fiberscope, report: Report) -> str:
    ports, target = scope.scene.ports, scope.scene.target
    shape = f"{ports.count} round" if ports.form == "round" else ports.form
    medium = "" if target.medium == "air" else f" in {target.medium}"
    where = f"bore {exact(target.bore_mm)} mm" if target.form == "bore" else _named(document, "scene.target", "target")
    return f"{shape}, {where} at {exact(target.distance_mm)} mm{medium}"


def _image(document: Document, scope: Fiberscope, report: Report) -> str:
    lens = f"f {exact(scope.image.objective.focal_mm)} mm f/{exact(scope.image.objective.f_number)}"
    if scope.image.form == "chip":
        return f"{lens}, chip {exact(scope.image.chip.pixel_um)} µm"
    bundle = scope.image.bundle
    return f"{lens}, pitch {exact(bundle.pitch_um)} µm, {exact(bundle.diameter_mm)} mm"


def _viewer(document: Document, scope: Fiberscope, report: Report) -> str:
    if scope.viewer.form == "eye":
        return f"eye, eyepiece {exact(scope.viewer.eye.eyepiece_focal_mm)} mm"
    camera = scope.viewer.camera
    return f"camera {exact(camera.pixel_um)} µm, relay ×{exact(camera.relay_magnification)}"


def _body(document: Document, scope: Fiberscope, report: Report) -> str:
    passage = scope.body.passage
    bore = f", bore {exact(passage.bore_mm)} mm" if passage and passage.bore_mm is not None else ""
    return f"⌀ {number(report.fit.outer_diameter_mm)} mm{bore}"


def _needs(document: Document, scope: Fiberscope, report: Report) -> str:
    met = sum(line.met for line in report.needs)
    return f"{met} of {len(report.needs)} met" if report.needs else "none set"


TITLES: dict[str, Callable[[Document, Fiberscope, Report], str]] = {
    "source": _source,
    "guide": _guide,
    "scene": _scene,
    "image": _image,
    "viewer": _viewer,
    "body": _body,
    "needs": _needs,
}
