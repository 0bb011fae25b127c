"""`evaluate`: every stage once, in arrays, for any number of designs."""

from dataclasses import dataclass

import numpy as np

from optics.chain.columns import Columns
from optics.chain.detail import detail
from optics.chain.fit import fit
from optics.chain.light import light
from optics.chain.screen import screen
from optics.chain.solve import solved
from optics.chain.target import field_of_view, target
from optics.viewer.detail import PARTS

BLOCK = 128  # designs at a time: what fits the cache
Numbers = dict[str, np.ndarray]  # by name [design]
SPECTRA = ("lamp", "delivered", "target")


@dataclass(frozen=True, slots=True)
class Figures:
    """All numbers of all designs: `value` by name [design], nan where a design has no such number.

    `after_lm`: lumens after each step, in the order of the light (nan: the design has no such step).
    `spectrum_w_nm` [design, wavelength]: of the lamp, of the delivered light, and (in W/m2/nm) at the
    center of the target.
    """

    value: dict[str, np.ndarray]
    after_lm: dict[str, np.ndarray]
    spectrum_w_nm: dict[str, np.ndarray]

    def __getitem__(self, name: str) -> np.ndarray:
        return self.value[name]

    def limited_by(self) -> list[str | None]:
        """The part that limits each design."""
        return [None if np.isnan(code) else PARTS[int(code)] for code in self.value["limited_by"]]


STEPS = (
    "lamp",
    "filter",
    "condenser",
    "cone",
    "spot",
    "input face",
    "cable packing",
    "cable core share",
    "cable attenuation",
    "cable exit face",
    "joint",
    "guide input face",
    "packing",
    "core share",
    "broken fibers",
    "attenuation",
    "wall reflections",
    "bends",
    "exit face",
    "spreading",
    "cover",
)


def evaluate(columns: Columns) -> Figures:
    """Every number of every design; a design's numbers do not depend on its neighbors.

    The section is laid out before the ports are placed, once for each distinct section; the light and
    the detail follow in blocks.
    """
    columns = solved(columns)
    seen = field_of_view(columns)
    body, ports = fit(columns, seen["image_mm"])
    # Designs alike in their stations go together, so that no block walks through what few of its designs have.
    order = np.argsort(columns.has("guide.cable.length_m"), kind="stable")
    blocks = []
    for start in range(0, columns.count, BLOCK):
        rows = order[start : start + BLOCK]
        blocks.append(_block(columns.take(rows), _taken(seen, rows), _taken(body, rows), _taken(ports, rows)))
    back = np.argsort(order, kind="stable")

    def joined(parts: list[np.ndarray]) -> np.ndarray:
        return np.concatenate(parts)[back]

    value = {name: joined([block.value[name] for block in blocks]) for name in (blocks[0].value if blocks else ())}
    after = {
        step: joined([block.after_lm.get(step, np.full(len(block.value["delivered_lm"]), np.nan)) for block in blocks])
        for step in STEPS
        if any(step in block.after_lm for block in blocks)
    }
    spectrum = {name: joined([block.spectrum_w_nm[name] for block in blocks]) for name in SPECTRA if blocks}
    value["guide_diameter_mm"] = columns["guide.bundle.diameter_mm"]
    return Figures({**seen, **body, **value}, after, spectrum)


def _taken(table: Numbers, rows: np.ndarray) -> Numbers:
    return {name: found[rows] for name, found in table.items()}


def _block(columns: Columns, seen: Numbers, body: Numbers, ports: Numbers) -> Figures:
    lit = light(columns)
    landed = target(columns, lit, ports, seen)
    told = detail(columns, landed, seen)
    screened = screen(columns, lit, landed, body)
    value = {**lit.value, **landed.value, **told, **screened, "frame_hz": 1.0 / told["exposure_s"]}
    spectrum = {"lamp": lit.lamp_w_nm, "delivered": lit.beam.spectrum_w_nm, "target": landed.center_w_m2_nm}
    return Figures(value, lit.after_lm, spectrum)
