"""Plain names for the screen: of fields, tables, forms, choices and presets, and of the paths in a sentence."""

import re

from optics.needs import AT_MOST
from optics.report.verdict import NAMES as NEED_NAMES
from optics.ui.words import unit
from optics.units import unit_of

# Names that the field alone would leave unclear.
FIELDS = {
    "flux_lm": "flux",
    "flux_w": "radiant flux",
    "emitter_mm": "emitter diameter",
    "spot_mm": "spot diameter",
    "core_um": "core diameter",
    "fiber_um": "fiber diameter",
    "na": "numerical aperture",
    "index": "refractive index",
    "pitch_um": "core pitch",
    "pixel_um": "pixel pitch",
    "bore_mm": "bore diameter",
    "inner_mm": "inner diameter",
    "focal_mm": "focal length",
    "focus_mm": "sharpest distance",
    "near_mm": "range from",
    "far_mm": "range to",
    "f_number": "f-number",
    "distance_mm": "distance",
    "bend_deg": "bend of the bore",
    "view_deg": "direction of view",
    "x_mm": "across",
    "y_mm": "up",
    "form": "form",
    "wall_mm": "wall",
    "centerline_radius_mm": "bend radius of the bore",
    "eyepiece_focal_mm": "eyepiece focal length",
    "one_rod": "bends as one rod",
    "steam": "takes steam",
    "at_wall": "at the wall",
    "frame_hz": "frame rate",
    "repeats": "how many",
    "threshold_snr": "signal to noise asked",
}
TABLES = {
    "source": "Source",
    "source.lamp": "Lamp",
    "source.filter": "Filter",
    "source.launch": "Launch",
    "guide": "Guide",
    "guide.cable": "Light cable",
    "guide.cable.fiber": "Fiber of the cable",
    "guide.joint": "Joint",
    "guide.fiber": "Fiber",
    "guide.bundle": "Bundle",
    "scene": "Scene",
    "scene.ports": "Ports",
    "scene.cover": "Cover",
    "scene.target": "Target",
    "image": "Image",
    "image.objective": "Objective",
    "image.tip": "Tip",
    "image.bundle": "Image bundle",
    "image.chip": "Chip",
    "viewer": "Viewer",
    "viewer.camera": "Camera",
    "viewer.eye": "Eyepiece",
    "body": "Body",
    "body.section": "Section",
    "body.passage": "Passage",
    "body.passage.bending": "Steered part",
    "body.handling": "Handling",
    "needs": "Needs",
    "guide.bundle.bends": "Bend",
    "body.section.channels": "Channel",
    "body.section.wires": "Pull wires",
    "scene.ports.ports": "Port",
}
FORMS = {
    "source.launch": "how the light meets the face",
    "scene.ports": "shape of the light ports",
    "scene.target": "shape of the target",
    "image": "what carries the picture",
    "viewer": "who looks",
}
PLAIN_FIELDS = (
    "count",
    "preset",
    "form",
    "profile",
    "medium",
    "mapping",
    "material",
    "color_filter",
    "columns",
    "rows",
    "sterilization",
    "bends",
    "channels",
    "wires",
    "ports",
    "spectrum",
    "attenuation",
    "reflectance",
    "response",
    "steam",
    "one_rod",
)
CHOICES = {
    "chip": "chip at the tip",
    "top_hat": "even",
    "f_theta": "f-theta",
    "tan": "tan",
    "pmma": "PMMA",
}


def field_name(name: str, path: str = "") -> str:
    """A field in plain words, its unit left off.

    >>> field_name("cone_na"), field_name("packing_fraction"), field_name("length_m")
    ('cone NA', 'packing fraction', 'length')
    """
    if path.startswith("needs."):
        return NEED_NAMES[name].removeprefix("the ")
    if name in FIELDS:
        return FIELDS[name]
    found = unit_of(name)
    bare = name if found in (None, "1") else name.removesuffix(f"_{found}")
    return re.sub(r"\bna\b", "NA", bare.replace("_", " "))


def label(name: str, path: str = "") -> str:
    """A field in plain words with its unit, a need also with its sense.

    >>> label("length_m"), label("evenness", "needs.evenness"), label("outer_diameter_mm", "needs.outer_diameter_mm")
    ('length, m', 'evenness at least', 'outer diameter at most, mm')
    """
    said = field_name(name, path)
    if path.startswith("needs."):
        said += " at most" if name in AT_MOST else " at least"
    return f"{said}, {unit(name)}" if unit(name) else said


def preset_name(name: str) -> str:
    """A preset's file name as a person would write it.

    >>> preset_name("white_led_4000k"), preset_name("lead_silicate_na057"), preset_name("mono_3um45")
    ('white LED 4000 K', 'lead silicate NA 0.57', 'mono 3.45 µm')
    """
    rules = (
        (r"^(\d{3,5})k$", r"\1 K"),
        (r"^na(\d)(\d+)$", r"NA \1.\2"),
        (r"^(\d+)um(\d+)$", r"\1.\2 µm"),
        (r"^(\d+)um$", r"\1 µm"),
        (r"^(\d+)mm(\d+)$", r"\1.\2 mm"),
        (r"^(\d+)mm$", r"\1 mm"),
        (r"^(\d+)nm$", r"\1 nm"),
        (r"^led$", "LED"),
        (r"^pmma$", "PMMA"),
        (r"^uva$", "UV-A"),
        (r"^uv$", "UV"),
    )
    parts = name.split("_")
    return " ".join(next((re.sub(old, new, part) for old, new in rules if re.match(old, part)), part) for part in parts)


def choice(word: str) -> str:
    return CHOICES.get(word, word.replace("_", " "))


def place(path: str) -> str:
    """A path in plain words: 'Objective, focal length'; list items by their number.

    >>> place("image.objective.focal_mm"), place("guide.bundle.bends.0.radius_mm"), place("source.lamp"), place("scene.nothing")
    ('Objective, focal length', 'Bend 1, radius', 'Lamp', 'scene.nothing')
    """
    found = re.fullmatch(r"(?P<table>.+?)(\.(?P<item>\d+))?(\.(?P<field>\w+))?", path)
    if path in TABLES:
        return TABLES[path]
    table, item, field = (found[part] for part in ("table", "item", "field"))
    if table not in TABLES or (field is not None and unit_of(field) is None and field not in (*FIELDS, *PLAIN_FIELDS)):
        return path
    named = TABLES[table] + (f" {int(item) + 1}" if item else "")
    return f"{named}, {field_name(field, path)}" if field else named


def spoken(text: str) -> str:
    """A sentence with the paths in it turned into plain words."""
    return re.sub(r"\b(?:source|guide|scene|image|viewer|body|needs)(?:\.\w+)+", lambda found: place(found[0]), text)
