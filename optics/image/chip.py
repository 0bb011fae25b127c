"""The rival: a small sensor at the tip. A square lattice at the pixel pitch; no cores, no relay."""

from typing import Any

import numpy as np

from optics.spec import Spec, positive, quantity
from optics.units import Numbers, mm_from_um


class Chip(Spec):
    """A sensor at the tip, noise as EMVA 1288 states it."""

    pixel_um: float = quantity("pixel pitch", gt=0.3, le=50, usual=(1.0, 3.5), common=True)
    columns: int = quantity("pixels along the longer side", ge=3, le=20000, usual=(100, 2000))
    rows: int = quantity("pixels along the shorter side", ge=3, le=20000, usual=(100, 1500))
    full_well_e: float = quantity("electrons that fill a pixel", gt=1, usual=(2000.0, 12000.0))
    dark_noise_e: float = quantity("noise of a dark pixel", ge=0, usual=(1.0, 12.0))
    gain_dn_e: float = quantity("output steps for each electron", gt=0, usual=(0.05, 2.0))
    quantum_efficiency: float = quantity("electrons for each photon at the peak", gt=0, le=1, usual=(0.2, 0.8))
    color_filter: bool = quantity("whether a color filter mosaic covers the pixels", default=True, source="assumed")
    longest_exposure_s: float = quantity("longest exposure of one picture", gt=0, le=60, usual=(0.005, 0.2))
    threshold_snr: float = quantity("signal to noise asked of a detail", gt=0, le=50, usual=(3.0, 8.0))


def diagonal_mm(*, columns: Any, rows: Any, pixel_um: Numbers) -> Numbers:
    """Diagonal of the sensor: the image circle that fills its corners. References: closed_form.

    >>> float(diagonal_mm(columns=400, rows=300, pixel_um=2.0))
    1.0
    """
    positive(columns=columns, rows=rows, pixel_um=pixel_um)
    return mm_from_um(pixel_um * np.hypot(columns, rows))


def sampling_um(*, pixel_um: Numbers, color_filter: Any) -> np.ndarray:
    """Pitch of the samples that count: the pixel's, or twice it under a color filter mosaic.

    Red and blue pixels stand on a square lattice of twice the pitch. Colored detail has only these;
    grey detail in white light can be rebuilt nearly to the pixel pitch, so this is the cautious
    figure. References: closed_form (2 x 2 mosaic).

    >>> float(sampling_um(pixel_um=1.5, color_filter=True))
    3.0
    """
    positive(pixel_um=pixel_um)
    return np.where(color_filter, 2.0, 1.0) * pixel_um
