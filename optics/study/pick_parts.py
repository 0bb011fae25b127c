"""What pick may choose: fibers, lamps, ports and images as settings of the document, sized to the tube, the field and the lamp.

Diameters are preferred numbers (series R10, ten to a decade) at fixed shares of the widest tube that is
allowed. Focal lengths follow from the image and the field of view that is wanted.
"""

import math
from collections.abc import Iterator

from optics.fiberscope import Fiberscope
from optics.guide.packing import disc_count
from optics.image.chip import diagonal_mm
from optics.image.objective import apparent_distance_mm
from optics.image.tip import reduced_path_mm
from optics.media.index import D_LINE_NM, refractive_index
from optics.presets import Document, edited, resolve, value_at
from optics.spec import OutOfRange
from optics.study.pick_settings import Settings, own_then, preset_settings
from optics.tables import preset
from optics.units import mm_from_um

# Families that differ in kind, not in shade; the design's own is always among them. Common practice, no source ("trade").
FIBERS = (
    "lead_silicate_na057",
    "lead_silicate_na066",
    "high_index_na086",
    "silica_hard_clad_na037",
    "silica_na022",
    "pmma_250um",
)
UVA_FIBERS = ("silica_uv", "silica_na022", "borosilicate_na030")
LAMPS = ("white_led_4000k", "halogen_3200k", "laser_phosphor_white", "short_arc_xenon")
UVA_LAMPS = ("uva_led_365nm", "short_arc_xenon")
CHIPS = ("color_1um75", "mono_1um4")
# Image bundles with the diameters in which they are made, mm ("trade").
IMAGES = {
    "leached_glass_8um": (0.4, 3.0),
    "leached_glass_10um": (0.4, 3.0),
    "wound_glass_12um": (0.8, 6.0),
    "drawn_silica_3um": (0.2, 1.7),
    "drawn_silica_4um": (0.2, 1.7),
    "plastic_15um": (0.25, 1.5),
}
GUIDE_SHARES = (0.17, 0.25, 0.36, 0.5)  # guide over tube diameter
IMAGE_SHARES = (0.14, 0.21, 0.33)  # image over tube diameter
STOPS = (2.8, 4.0, 5.6)  # f-numbers
PORTS = ({"scene.ports.form": "round", "scene.ports.count": 2}, {"scene.ports.form": "annulus"})
PACKING = {"glass": 0.82, "silica": 0.82, "plastic": 0.78}  # assembled and glued ("trade")
CONDENSER = 0.8  # transmission of a condenser fitted to lamp and guide ("trade")
FIELD_MARGIN = 1.05  # field of view over the least that is needed
FIELDS = (1.0, 0.75)  # of the design's own field where none is needed
WIDEST_DEG = 140.0
FEW = 7  # fibers in one bundle up to which their whole count sets the packing
SERIES = (1.0, 1.25, 1.6, 2.0, 2.5, 3.15, 4.0, 5.0, 6.3, 8.0, 10.0)
CAMERA = "mono_3um45"  # behind an image bundle where the design has no viewer yet


def preferred(number: float) -> float:
    """The nearest number of the series R10, ten to a decade (ISO 3, rounded values).

    >>> [preferred(x) for x in (0.84, 1.32, 3.3)]
    [0.8, 1.25, 3.15]
    """
    decade = 10.0 ** math.floor(math.log10(number))
    return round(min(SERIES, key=lambda step: abs(math.log(number / (decade * step)))) * decade, 9)


def guides(document: Document, scope: Fiberscope, tube_mm: float) -> Iterator[Settings]:
    names = UVA_FIBERS if scope.needs.target_uva_w_m2 else FIBERS
    for settings in own_then(document, "guide.fiber", "fibers", names):
        try:
            fiber = resolve(edited(document, settings)).fiberscope.guide.fiber
        except OutOfRange:
            continue
        for share in GUIDE_SHARES:
            bundle = preferred(share * tube_mm)
            usual = PACKING[fiber.material] if settings else scope.guide.bundle.packing_fraction
            packing = packed_fraction(bundle, mm_from_um(fiber.fiber_um), usual)
            if packing > 0:
                yield settings | {"guide.bundle.diameter_mm": bundle, "guide.bundle.packing_fraction": packing}


def packed_fraction(bundle_mm: float, fiber_mm: float, usual: float) -> float:
    """Packing of a bundle: the usual one, but no more than its whole fibers; of a few fibers just their count."""
    count = disc_count(bundle_mm=bundle_mm, fiber_mm=fiber_mm)
    whole = math.floor(count * (fiber_mm / bundle_mm) ** 2 * 1e4 + 1e-6) / 1e4
    return whole if count <= FEW else min(usual, whole)


def lamps(document: Document, scope: Fiberscope) -> Iterator[Settings]:
    own = (value_at(document, "source.lamp") or {}).get("preset") or ""
    names = UVA_LAMPS if scope.needs.target_uva_w_m2 else LAMPS
    names = tuple(name for name in names if not (own.startswith("white_led") and name.startswith("white_led")))
    for settings in own_then(document, "source.lamp", "lamps", names):
        if settings and scope.source.lamp.flux_w is not None and "source.lamp.flux_lm" in settings:
            continue
        yield settings | _launch(scope, own=not settings)


def _launch(scope: Fiberscope, *, own: bool) -> Settings:
    """How another lamp meets another guide: as before before an emitter or a rating, else by a condenser that fits both."""
    launch = scope.source.launch
    if launch.form in ("butt", "matched") or (launch.form == "rated" and own):
        return {}
    transmission = launch.transmission if launch.form == "spot" else CONDENSER
    return {"source.launch.form": "matched", "source.launch.transmission": transmission}


def ports(scope: Fiberscope) -> Iterator[Settings]:
    own = scope.scene.ports.form
    yield {}
    yield from (settings for settings in PORTS if settings["scene.ports.form"] != own)


def images(document: Document, scope: Fiberscope, tube_mm: float, fields_deg: list[float]) -> Iterator[Settings]:
    chip = scope.image.form == "chip"
    sizes = [preferred(share * tube_mm) for share in IMAGE_SHARES]
    own = None if chip else (value_at(document, "image.bundle") or {}).get("preset")
    families = {} if chip or own in IMAGES else {own: (sizes[0], sizes[-1])}
    for name, (least, most) in {**families, **IMAGES}.items():
        settings = {} if name == own else preset_settings(document, "image.bundle", "image_bundles", name)
        if chip:
            settings |= {"image.form": "bundle", "image.bundle.length_m": scope.guide.bundle.length_m}
            settings |= {"viewer.form": "camera", "viewer.camera.preset": CAMERA}
        for size in dict.fromkeys(min(max(size, least), most) for size in sizes):
            yield from _lenses(scope, settings | {"image.bundle.diameter_mm": size}, size, fields_deg)
    for settings in own_then(document, "image.chip", "chips", CHIPS) if chip else ():
        yield from _lenses(scope, settings, _chip_mm(scope, settings), fields_deg)
    for name in () if chip else CHIPS:
        settings = {"image.form": "chip", "image.chip.preset": name}
        yield from _lenses(scope, settings, _chip_mm(scope, settings), fields_deg)


def _chip_mm(scope: Fiberscope, settings: Settings) -> float:
    name = settings.get("image.chip.preset")
    if name is None:
        chip = scope.image.chip
        return diagonal_mm(columns=chip.columns, rows=chip.rows, pixel_um=chip.pixel_um)
    values = {key: preset("chips", name).values[key].value for key in ("columns", "rows", "pixel_um")}
    return float(diagonal_mm(**values))


def _lenses(scope: Fiberscope, settings: Settings, image_mm: float, fields_deg: list[float]) -> Iterator[Settings]:
    """The lenses for an image: the focal length of each field of view wanted, at each stop."""
    for field_deg in fields_deg:
        focal = focal_mm(scope, image_mm=image_mm, field_of_view_deg=min(field_deg, WIDEST_DEG))
        for stop in STOPS:
            yield settings | {"image.objective.focal_mm": focal, "image.objective.f_number": stop}


def focal_mm(scope: Fiberscope, *, image_mm: float, field_of_view_deg: float) -> float:
    """Focal length, to three digits, that spreads an image over a full field of view in the medium at the set focus.

    v = D/(2 tan w) or D/(2 w), 1/f = 1/v + 1/s; w in air by sin w = n sin w', s the focus as the pupil sees it.
    References: closed_form.
    """
    lens, tip, medium = scope.image.objective, scope.image.tip, scope.scene.target.medium
    index = 1.0 if medium == "air" else float(refractive_index(medium=medium, wavelength_nm=D_LINE_NM))
    depth = lens.pupil_depth_mm
    depth += float(reduced_path_mm(glass_path_mm=tip.glass_path_mm, index=tip.index)) if tip else 0.0
    focus = float(apparent_distance_mm(distance_mm=lens.focus_mm, pupil_depth_mm=depth, index=index))
    half = math.asin(min(index * math.sin(math.radians(field_of_view_deg) / 2), math.sin(math.radians(WIDEST_DEG / 2))))
    behind = image_mm / 2 / (math.tan(half) if lens.mapping == "tan" else half)
    return float(f"{1 / (1 / behind + 1 / focus):.3g}")
