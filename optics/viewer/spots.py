"""The smallest round spot: a pit, a pore, a drop, told from its surround by counted light.

Rose's law in the light that this design has, and with its blur: a spot larger than the blur follows
`camera.rose_disc_um`; a smaller one must make up in area what the blur spreads.
"""

import numpy as np

from optics.spec import not_negative, positive
from optics.units import Numbers, per_um_from_lp_mm
from optics.viewer.camera import rose_disc_um

STEPS = 12


def kept_share(*, diameter_um: Numbers, frequency_lp_mm: np.ndarray, mtf: np.ndarray) -> np.ndarray:
    """Share of a disc's energy (the square of its signal, over the area) that is left after blur, [...].

    integral of MTF^2 dQ, Q(f) = 1 - J0^2(x) - J1^2(x), x = pi D f: by Parseval, with the energy of a disc within a
    circle of frequency in closed form. 1 without blur; (pi D)^2/2 integral of MTF^2 f df for a disc far below the blur.

    Parameters: diameter_um [...]; frequency_lp_mm and mtf [node, ...], rising from above 0 to where MTF ends; a node at
    0 with MTF 1 is understood. Beyond the last node nothing passes. Trapezoid in Q.
    References: closed_form (energy of an Airy pattern within a circle).

    >>> f = np.linspace(1.0, 20000.0, 20000)
    >>> float(kept_share(diameter_um=10.0, frequency_lp_mm=f, mtf=np.ones_like(f)).round(3))
    0.999
    """
    from scipy.special import j0, j1

    x = np.pi * np.asarray(diameter_um, float) * per_um_from_lp_mm(np.asarray(frequency_lp_mm, float))
    small = x < 1e-2  # there 1 - J0^2 - J1^2 is a difference of equals
    within = np.where(small, 0.25 * x * x * (1.0 - 0.125 * x * x), 1.0 - j0(x) ** 2 - j1(x) ** 2)
    power = np.asarray(mtf, float) ** 2
    middle = np.concatenate([0.5 * (1.0 + power[:1]), 0.5 * (power[1:] + power[:-1])])
    return (middle * np.diff(within, axis=0, prepend=0.0)).sum(axis=0)


def smallest_spot_um(
    *,
    contrast: Numbers,
    snr: Numbers,
    cell_um2: Numbers,
    threshold_snr: Numbers,
    frequency_lp_mm: np.ndarray,
    mtf: np.ndarray,
) -> np.ndarray:
    """Diameter at the image of the smallest round spot that is told from its surround.

    The spot that a filter matched to its blurred image lifts to threshold: (C SNR)^2 (pi D^2/4) kept(D)/cell = k^2.
    Without blur this is Rose's law with Phi = SNR^2/cell quanta (in effect: read noise and the cores' spread
    included). A spot that falls between cores may be missed; the law holds for the mean over its places.

    Parameters: contrast C of the spot against its surround, (surround - spot)/surround; snr of one cell of area
    cell_um2 (a core's, a pixel's), above 0; frequency_lp_mm and mtf [node, ...] as for `kept_share`.
    Solved by a secant in log D, fixed steps. References: rose_1948; closed_form (matched filter in white noise).

    >>> f = np.linspace(1.0, 2000.0, 400)
    >>> sharp = smallest_spot_um(contrast=0.1, snr=10.0, cell_um2=100.0, threshold_snr=5.0, frequency_lp_mm=f,
    ...     mtf=np.ones_like(f))
    >>> round(float(sharp), 1), round(float(rose_disc_um(contrast=0.1, threshold_snr=5.0, quanta_per_um2=1.0)), 1)
    (56.5, 56.4)
    """
    positive(contrast=contrast, snr=snr, cell_um2=cell_um2, threshold_snr=threshold_snr)
    not_negative(frequency_lp_mm=frequency_lp_mm)
    quanta = np.asarray(snr, float) ** 2 / np.asarray(cell_um2, float)
    sharp = rose_disc_um(contrast=contrast, threshold_snr=threshold_snr, quanta_per_um2=quanta)

    def excess(log_um):  # ln of (D^2 kept)/(D^2 of the sharp spot): rises by 2 to 4 with ln D
        kept = kept_share(diameter_um=np.exp(log_um), frequency_lp_mm=frequency_lp_mm, mtf=mtf)
        return 2.0 * (log_um - np.log(sharp)) + np.log(np.maximum(kept, 1e-300))

    before, at_before = np.log(sharp), excess(np.log(sharp))
    here = before - at_before / 4.0  # a quarter never goes too far
    for _ in range(STEPS):
        at_here = excess(here)
        moved = here - before
        slope = np.where(np.abs(moved) > 1e-12, (at_here - at_before) / np.where(moved == 0, 1.0, moved), 3.0)
        before, at_before = here, at_here
        here = here - at_here / np.clip(slope, 2.0, 4.0)
    return np.exp(here)
