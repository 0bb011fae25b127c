"""Random designs of mixed forms within the usual bounds of the fields, seeded."""

import random

from optics import presets
from optics.fiberscope import Fiberscope
from optics.spec import OutOfRange

CHIP = {
    "pixel_um": 1.75,
    "columns": 400,
    "rows": 400,
    "full_well_e": 5000.0,
    "dark_noise_e": 4.0,
    "gain_dn_e": 0.2,
    "quantum_efficiency": 0.5,
    "color_filter": True,
    "longest_exposure_s": 0.033,
    "threshold_snr": 5.0,
}
CABLE = {
    "guide.cable.fiber": {"preset": "lead_silicate_na057"},
    "guide.cable.diameter_mm": 3.5,
    "guide.cable.length_m": 2.5,
    "guide.cable.packing_fraction": 0.82,
    "guide.joint.gap_mm": 0.2,
}
BARE = {"scene": None, "image": None, "viewer": None, "body": None, "needs": None}


def drawn(seed: int) -> dict:
    """Settings of one random design of mixed forms, seeded."""
    rng = random.Random(seed)
    settings = {
        "source.lamp.preset": rng.choice(["white_led_3000k", "white_led_4000k", "white_led_6500k", "halogen_3200k"]),
        "guide.fiber.preset": rng.choice(["lead_silicate_na057", "lead_silicate_na066", "pmma_250um", "silica_na022"]),
        "guide.bundle.diameter_mm": rng.uniform(0.6, 3.0),
        "guide.bundle.length_m": rng.uniform(0.3, 5.0),
        "guide.bundle.broken_fraction": rng.choice([0.0, rng.uniform(0.0, 0.2)]),
        "guide.bundle.bends": [
            {"radius_mm": rng.uniform(8.0, 80.0), "angle_deg": rng.uniform(20.0, 200.0), "repeats": rng.randint(1, 2)}
            for _ in range(rng.randint(0, 2))
        ],
        "scene.target.distance_mm": rng.uniform(10.5, 39.0),
        "scene.target.medium": rng.choice(["air", "air", "water"]),
        "scene.target.detail_contrast": rng.uniform(0.1, 0.9),
        "image.objective.focal_mm": rng.uniform(0.6, 2.0),
        "image.objective.f_number": rng.uniform(2.5, 8.0),
        "image.objective.focus_mm": rng.uniform(8.0, 40.0),
        "body.section.wall_mm": rng.uniform(0.1, 0.6),
    }
    settings["source.launch.form"] = rng.choice(["butt", "matched", "rated", "spot"])
    if settings["source.launch.form"] == "spot":
        settings |= {
            "source.launch.spot_mm": rng.uniform(4.0, 6.0),
            "source.launch.profile": rng.choice(["top_hat", "gaussian"]),
        }
        settings |= {"source.launch.cone_na": rng.uniform(0.5, 0.7), "source.launch.transmission": 0.5}
    if settings["source.launch.form"] == "rated":
        settings |= {"source.launch.rated_lm": 2.0}
    settings["scene.ports.form"] = rng.choice(["round", "annulus", "crescent"])
    if settings["scene.ports.form"] == "round":
        settings["scene.ports.count"] = rng.randint(1, 4)
    if rng.random() < 0.3:
        settings |= CABLE
    if rng.random() < 0.2:
        settings |= {"image.form": "chip", "image.chip": CHIP, "viewer": None}
    elif rng.random() < 0.3:
        settings |= {"viewer.form": "eye"}
    if settings.get("image.form") != "chip":
        settings |= {"image.bundle.diameter_mm": rng.uniform(0.4, 1.6)}
        settings |= {"image.bundle.preset": rng.choice(["leached_glass_8um", "leached_glass_10um", "drawn_silica_3um"])}
    if rng.random() < 0.1:
        settings = {key: value for key, value in settings.items() if key.split(".")[0] in ("source", "guide")} | BARE
    return settings


def first_valid(document: dict, count: int) -> list[Fiberscope]:
    """The first `count` random designs that the rules allow (a drawn spot may be brighter than its lamp)."""
    found: list[Fiberscope] = []
    seed = 0
    while len(found) < count:
        try:
            found.append(presets.resolve(presets.edited(document, drawn(seed))).fiberscope)
        except OutOfRange as wrong:
            if "brighter" not in str(wrong):
                raise
        seed += 1
    return found
