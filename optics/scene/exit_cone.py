"""The cone that leaves the exit face: flux in bins of sin^2 of the angle, in the medium in front."""

from dataclasses import dataclass

import numpy as np

from optics.spec import not_negative, require, within
from optics.units import Numbers


@dataclass(frozen=True, slots=True)
class ExitCone:
    """Uniform radiance inside each bin of sin^2; nothing outside the last edge.

    `sine2_edges`: rising from 0 or more to at most 1, in the medium in front of the face.
    `flux_share`: of the whole flux in each bin, adding up to 1.
    """

    sine2_edges: tuple[float, ...]
    flux_share: tuple[float, ...]

    def __post_init__(self):
        edges, share = np.asarray(self.sine2_edges, float), np.asarray(self.flux_share, float)
        require(
            "the number of flux_share values", share.size, f"{edges.size - 1}, one a bin", share.size == edges.size - 1
        )
        require("the number of bins", share.size, "at least 1", share.size >= 1)
        within(0.0, 1.0, sine2_edges=edges)
        require("the rise of sine2_edges", np.diff(edges), "above 0", np.diff(edges) > 0)
        not_negative(flux_share=share)
        require("the sum of flux_share", share.sum(), "1", abs(share.sum() - 1.0) < 1e-9)
        object.__setattr__(self, "sine2_edges", tuple(edges.tolist()))
        object.__setattr__(self, "flux_share", tuple(share.tolist()))

    @classmethod
    def uniform(cls, na: float) -> "ExitCone":
        """The same radiance everywhere inside the cone of this NA (1: a Lambertian face)."""
        return cls.binned(na, (1.0,))

    @classmethod
    def binned(cls, na: float, flux_share) -> "ExitCone":
        """Bins of equal width in sin^2 up to this NA, given from the inside out; shares are made to add up to 1.

        >>> ExitCone.binned(na=0.5, flux_share=[0.4, 0.3, 0.2, 0.1]).sine2_edges
        (0.0, 0.0625, 0.125, 0.1875, 0.25)
        """
        require("na", na, "above 0 and at most 1", np.isfinite(na) and 0 < na <= 1)
        share = np.asarray(flux_share, float)
        require("the sum of flux_share", share.sum(), "above 0", share.sum() > 0)
        return cls(na * na * np.linspace(0.0, 1.0, share.size + 1), share / share.sum())

    def na_holding(self, share: float) -> float:
        """The NA within which this share of the flux lies."""
        edges, flux = np.asarray(self.sine2_edges), np.asarray(self.flux_share)
        return float(cone_na_holding(sine2_edges=edges, flux=flux, share=share))

    @property
    def lit_sine2_share(self) -> tuple[float, float]:
        """sin^2 where the flux begins and where it ends."""
        lit = np.flatnonzero(self.flux_share)
        return self.sine2_edges[lit[0]], self.sine2_edges[lit[-1] + 1]


def cone_na_holding(*, sine2_edges: Numbers, flux: Numbers, share: Numbers) -> np.ndarray:
    """The NA within which a share of the flux lies; the flux is linear in sin^2 within a bin.

    Parameters: sine2_edges [..., bin + 1]; flux [..., bin] in any unit, 0 or more; share above 0, at most 1,
    broadcast over the leading axes. Returns [...], 0 where there is no flux at all.
    Raises OutOfRange: a share outside (0, 1]; negative flux.

    >>> float(cone_na_holding(sine2_edges=np.array([0.0, 0.25]), flux=np.array([1.0]), share=0.64))
    0.4
    """
    share, edges, flux = np.asarray(share, float), np.asarray(sine2_edges, float), np.asarray(flux, float)
    require("share", share, "above 0 and at most 1", (share > 0) & (share <= 1))
    not_negative(flux=flux)
    wanted = share * flux.sum(axis=-1)
    before = np.cumsum(flux, axis=-1) - flux
    # The last bin that starts below the wanted flux and holds some; rounding may leave it a hair short.
    holds = (before < np.asarray(wanted)[..., None]) & (flux > 0)
    at = flux.shape[-1] - 1 - np.argmax(holds[..., ::-1], axis=-1)[..., None]
    lead = np.broadcast_shapes(at.shape[:-1], edges.shape[:-1])
    at = np.broadcast_to(at, (*lead, 1))

    def pick(values, index):
        return np.take_along_axis(np.broadcast_to(values, (*lead, values.shape[-1])), index, axis=-1)[..., 0]

    inside, low, high = pick(flux, at), pick(edges, at), pick(edges, at + 1)
    part = np.clip((wanted - pick(before, at)) / np.where(inside > 0, inside, 1.0), 0.0, 1.0)
    return np.where(np.any(holds, axis=-1), np.sqrt(low + part * (high - low)), 0.0)
