"""`evaluate`: every stage once, in arrays, for any number of designs."""

from dataclasses import dataclass

import numpy as np

from optics.chain.columns import Columns
from optics.chain.detail import detail
from optics.chain.fit import fit
from optics.chain.light import light
from optics.chain.target import field_of_view, target
from optics.viewer.detail import PARTS

BLOCK = 128   # designs at a time: what fits the cache
NO_LIMIT = "limited_by"


@dataclass(frozen=True, slots=True)
class Figures:
    """All numbers of all designs: `value` by name [design], nan where a design has no such number.

    `after_lm`: lumens after each step, in the order of the light (nan: the design has no such step).
    `spectrum_w_nm` [design, wavelength] of the delivered light and `lamp_w_nm` of the lamp.
    """

    value: dict[str, np.ndarray]
    after_lm: dict[str, np.ndarray]

    def __getitem__(self, name: str) -> np.ndarray:
        return self.value[name]

    def limited_by(self) -> list[str | None]:
        """The part that limits each design."""
        return [None if np.isnan(code) else PARTS[int(code)] for code in self.value["limited_by"]]


STEPS = (
    "lamp", "filter", "condenser", "cone", "spot", "input face",
    "cable packing", "cable core share", "cable attenuation", "cable exit face", "joint", "guide input face",
    "packing", "core share", "broken fibers", "attenuation", "bends", "exit face", "cover",
)  # fmt: skip


def evaluate(columns: Columns) -> Figures:
    """Every number of every design, in blocks; a design's numbers do not depend on its neighbors."""
    blocks = [_block(columns.take(np.arange(start, min(start + BLOCK, columns.count)))) for start in range(0, columns.count, BLOCK)]
    names = blocks[0].value.keys() if blocks else ()
    value = {name: np.concatenate([block.value[name] for block in blocks]) for name in names}
    steps = [step for step in STEPS if any(step in block.after_lm for block in blocks)]
    after = {
        step: np.concatenate([block.after_lm.get(step, np.full(len(block.value["delivered_lm"]), np.nan)) for block in blocks])
        for step in steps
    }
    return Figures(value, after)


def _block(columns: Columns) -> Figures:
    lit = light(columns)
    seen = field_of_view(columns)
    body, ports = fit(columns, seen)
    landed = target(columns, lit, ports, seen)
    told = detail(columns, landed, seen)
    value = {**lit.value, **seen, **body, **landed.value, **told}
    value["frame_hz"] = 1.0 / value["exposure_s"]
    return Figures(value, lit.after_lm)
