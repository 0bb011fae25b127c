"""What becomes of the light on the pixels: the well, the noise after EMVA 1288, and a processor that smooths the honeycomb."""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from optics.image.contrast import honeycomb_filter_mtf
from optics.image.lattice import resolution_limit_lp_mm
from optics.spec import not_negative, positive, require, within
from optics.units import AnyUnit, mm_from_um

WORST_DEG = 30.0  # the lattice's worst direction, across its rows


@lru_cache(maxsize=4)
def round_frame(*, rows: int, columns: int, radius: float) -> AnyUnit:
    """1 for pixels inside the round image of a radius in pixels, 0 outside, its rim softened over a pixel."""
    away = np.hypot(np.arange(columns) - (columns - 1) / 2, (np.arange(rows) - (rows - 1) / 2)[:, None])
    return np.clip(radius + 0.5 - away, 0.0, 1.0)


def exposed(
    *,
    mean_e: AnyUnit,
    full_well_e: float,
    dark_noise_e: float,
    gain_dn_e: float,
    noise: bool,
    inside: AnyUnit,
    seed: int,
) -> tuple[AnyUnit, float]:
    """(the picture with or without its noise, share of the pixels `inside` whose well was full)."""
    require("full_well_e", full_well_e, "above 0", full_well_e > 0)
    if noise:
        return read_out(
            mean_e=mean_e,
            full_well_e=full_well_e,
            dark_noise_e=dark_noise_e,
            gain_dn_e=gain_dn_e,
            inside=inside,
            seed=seed,
        )
    full = mean_e >= full_well_e
    return np.minimum(mean_e, full_well_e), float(full[inside].mean())


def read_out(
    *, mean_e: AnyUnit, full_well_e: float, dark_noise_e: float, gain_dn_e: float, inside: AnyUnit, seed: int
) -> tuple[AnyUnit, float]:
    """(one exposure in electrons, share of the pixels `inside` whose well was full).

    Photons arrive at random (Poisson); the well holds `full_well_e` at most; dark noise is normal; output comes in
    whole steps, K to the electron, with the black level taken off (so that noise about black may be negative).
    Variance mu + sigma_d^2 + 1/(12 K^2) where the well is not full and the noise spans more than half a step.
    References: emva_1288.
    """
    not_negative(mean_e=mean_e, dark_noise_e=dark_noise_e)
    positive(full_well_e=full_well_e, gain_dn_e=gain_dn_e)
    rng = np.random.Generator(np.random.SFC64(np.random.SeedSequence([seed, 1288])))
    electrons = rng.poisson(mean_e).astype(np.float32)
    full = electrons >= full_well_e
    signal = np.minimum(electrons, np.float32(full_well_e))
    signal += np.float32(dark_noise_e) * rng.standard_normal(mean_e.shape, np.float32)
    return np.rint(np.float32(gain_dn_e) * signal) / np.float32(gain_dn_e), float(full[inside].mean())


@dataclass(frozen=True, slots=True)
class Smoothing:
    """The picture without its honeycomb, and what that costs.

    `limit_contrast`: contrast left at the lattice limit, the fourth root of what is left of the honeycomb;
    `noise_ratio`: white noise of a pixel after over before.
    """

    image: AnyUnit
    limit_contrast: float
    noise_ratio: float


def smoothed(*, image: AnyUnit, residual_contrast: float, pitch_um: float, pixel_um: float) -> Smoothing:
    """The picture after the Gaussian that leaves `residual_contrast` of the honeycomb's first order.

    Transfer epsilon^((f/f_h)^2), f_h = 2/(sqrt3 p); noise falls to the root of its mean square over the pixels' band.
    References: closed_form.
    """
    from scipy.fft import irfft2, next_fast_len, rfft2

    within(1e-6, 1.0, residual_contrast=residual_contrast)
    frame = np.asarray(image, np.float32)
    sides = [
        next_fast_len(count + int(3 * pitch_um / pixel_um), real=True) for count in frame.shape
    ]  # dark room about it

    def transfer(count):
        cycles = np.abs(np.fft.fftfreq(count)) / mm_from_um(pixel_um)
        return honeycomb_filter_mtf(residual_contrast=residual_contrast, pitch_um=pitch_um, frequency_lp_mm=cycles)

    down, across = transfer(sides[0]), transfer(sides[1])  # a Gaussian is the product of two
    band = (down[:, None] * across[: sides[1] // 2 + 1]).astype(np.float32)
    out = irfft2(rfft2(frame, sides, workers=-1) * band, sides, workers=-1)[: frame.shape[0], : frame.shape[1]]
    left = np.sqrt((down**2).mean() * (across**2).mean())
    limit = resolution_limit_lp_mm(pitch_um=pitch_um, direction_deg=WORST_DEG)
    kept = honeycomb_filter_mtf(residual_contrast=residual_contrast, pitch_um=pitch_um, frequency_lp_mm=limit)
    return Smoothing(out, float(kept), float(left))
