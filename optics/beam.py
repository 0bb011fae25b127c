"""What flows: power per angle bin and wavelength, and the step that records what became of it."""

from dataclasses import dataclass

import numpy as np

from optics.spectrum import integral, luminous_flux_lm
from optics.units import Numbers


@dataclass(frozen=True, slots=True)
class Beam:
    """Light on its way: power [design, bin, wavelength] in W/nm on the grid, and the bins' edges.

    `sine2_edges` [design, bin + 1] holds NA^2 = (n sin theta)^2, which a flat face does not change.
    """

    power_w_nm: np.ndarray
    sine2_edges: np.ndarray

    def times(self, factor: np.ndarray) -> "Beam":
        """The same beam with its power multiplied ([design, bin or 1, wavelength or 1])."""
        return Beam(self.power_w_nm * factor, self.sine2_edges)

    @property
    def bin_na(self) -> np.ndarray:
        """NA of the middle (in sin^2) of each bin [design, bin]."""
        return np.sqrt((self.sine2_edges[..., 1:] + self.sine2_edges[..., :-1]) / 2)

    @property
    def bin_lm(self) -> np.ndarray:
        return luminous_flux_lm(self.power_w_nm)

    @property
    def bin_w(self) -> np.ndarray:
        return integral(self.power_w_nm)

    @property
    def spectrum_w_nm(self) -> np.ndarray:
        return self.power_w_nm.sum(axis=-2)

    @property
    def flux_lm(self) -> np.ndarray:
        return self.bin_lm.sum(axis=-1)

    @property
    def flux_w(self) -> np.ndarray:
        return self.bin_w.sum(axis=-1)


@dataclass(frozen=True, slots=True)
class Step:
    """One station of the light: what came, what left, and why."""

    name: str
    before_lm: float
    after_lm: float
    because: str

    @property
    def factor(self) -> float:
        return self.after_lm / self.before_lm if self.before_lm > 0 else 0.0


def bin_edges(*, inner_na: Numbers, outer_na: Numbers, inner_count: int, outer_count: int) -> np.ndarray:
    """Edges of the angle bins in NA^2 [..., bin + 1]: two runs, each uniform in sin^2.

    The inner run ends where the light that is filled ends, so no bin is part-filled; the outer run
    is room for what bends widen, or for what a joint will cut.

    >>> bin_edges(inner_na=np.array([0.3]), outer_na=np.array([0.5]), inner_count=3, outer_count=2).round(3).tolist()
    [[0.0, 0.03, 0.06, 0.09, 0.17, 0.25]]
    """
    inner = np.asarray(inner_na, float)[..., None] ** 2 * np.linspace(0.0, 1.0, inner_count + 1)
    low, high = np.asarray(inner_na, float)[..., None] ** 2, np.asarray(outer_na, float)[..., None] ** 2
    outer = low + (high - low) * np.linspace(0.0, 1.0, outer_count + 1)[1:]
    return np.concatenate([inner, outer], axis=-1) if outer_count else inner
