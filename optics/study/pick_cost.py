"""What a candidate costs, as an honest ordinal: classes 1 (cheap) to 5 (dear) by plain rules of the trade.

No price stands behind them. Each part gets points for what it is made of, and their sum gives the class:
image: plastic or fused rods drawn by the meter and small sensors are cheap, flexible bundles of separate
fibers are made one by one; guide: plastic, then glass, then silica; lamp: what is very bright costs.
Common practice, no source ("trade").
"""

import numpy as np

from optics.chain.columns import Columns
from optics.source.lamp import etendue_mm2_sr

SOURCE = "trade"
IMAGE = {"none": 0, "plastic rod": 0, "silica or fused rod": 1, "chip": 1, "separate fibers": 2}
GUIDE = {"plastic": 0, "glass": 1, "silica": 2}
LAMP = {"ordinary": 0, "strong": 1, "very bright": 2}
STRONG_LM, BRIGHT_CD_MM2 = 600.0, 150.0  # from here on a lamp is strong; very bright
PLASTIC_C = 90.0  # an image rod that stands less than this is plastic
CLASSES = (1, 2, 2, 3, 4, 4, 5)  # by the sum of the points


def cost_class(table: Columns) -> np.ndarray:
    """Cost class [design], 1 to 5."""
    return np.array(CLASSES)[_image(table) + _guide(table) + _lamp(table)]


def _image(table: Columns) -> np.ndarray:
    rod = np.where(
        table.get("image.bundle.highest_temperature_c", 0.0) < PLASTIC_C,
        IMAGE["plastic rod"],
        IMAGE["silica or fused rod"],
    )
    bundle = np.where(table["image.bundle.one_rod"] > 0, rod, IMAGE["separate fibers"])
    chip = np.where(table.has("image.chip.pixel_um"), IMAGE["chip"], IMAGE["none"])
    return np.where(table.has("image.bundle.pitch_um"), bundle, chip)


def _guide(table: Columns) -> np.ndarray:
    return np.array([GUIDE[material] for material in table.texts("guide.fiber.material").tolist()])


def _lamp(table: Columns) -> np.ndarray:
    """Points of the lamp: luminance first, then lumens; a lamp given in watts counts as strong."""
    lumens = table["source.lamp.flux_lm"]
    luminance = lumens / etendue_mm2_sr(diameter_mm=table["source.lamp.emitter_mm"], na=table["source.lamp.cone_na"])
    strong = np.where(np.isnan(lumens) | (lumens > STRONG_LM), LAMP["strong"], LAMP["ordinary"])
    return np.where(luminance > BRIGHT_CD_MM2, LAMP["very bright"], strong)
