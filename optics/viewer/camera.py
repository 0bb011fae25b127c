"""The camera at the proximal face: photons, noise after EMVA 1288, exposure, and its beat with the lattice."""

from typing import Any

import numpy as np

from optics.image.lattice import square_alias
from optics.spec import Curve, Spec, not_negative, positive, quantity, within
from optics.units import Numbers, m_from_nm, m_from_um

PLANCK_J_S = 6.62607015e-34
LIGHT_SPEED_M_S = 299792458.0

# Pixels for each core pitch: the first order of the honeycomb, 2/(sqrt3 p), stays below half the
# pixel frequency from 4/sqrt3 on, and falls on the pixel frequency itself at half of that.
LEAST_PIXELS_PER_PITCH = 4.0 / np.sqrt(3.0)
WORST_PIXELS_PER_PITCH = 2.0 / np.sqrt(3.0)
MEASURING_PIXELS_PER_PITCH = 4.0  # common practice, no source
WELL_SHARE = 0.5  # of the full well that an exposure aims at


class Camera(Spec):
    """A camera behind a relay lens that looks at the proximal face; noise as EMVA 1288 states it."""

    pixel_um: float = quantity("pixel pitch", gt=0.3, le=50, usual=(1.5, 8.0), common=True)
    full_well_e: float = quantity("electrons that fill a pixel", gt=1, usual=(5000.0, 40000.0))
    dark_noise_e: float = quantity("noise of a dark pixel", ge=0, usual=(1.0, 15.0))
    gain_dn_e: float = quantity("output steps for each electron", gt=0, usual=(0.05, 2.0))
    quantum_efficiency: float = quantity("electrons for each photon at the peak", gt=0, le=1, usual=(0.3, 0.8))
    response: Curve | None = quantity("relative response over wavelength, 1 at the peak; left out: flat", default=None)
    relay_magnification: float = quantity(
        "image size on the sensor over size on the bundle", gt=0.05, le=50, usual=(0.5, 5.0), common=True
    )
    relay_na: float = quantity("numerical aperture of the relay lens toward the bundle", gt=0, lt=1, usual=(0.1, 0.5))
    relay_transmission: float = quantity(
        "share of the light that the relay lens passes", default=0.9, gt=0, le=1, usual=(0.7, 1.0), source="assumed"
    )
    sensor_mm: float | None = quantity(
        "shorter side of the sensor; left out: large enough", default=None, gt=0, le=50, usual=(2.0, 15.0)
    )
    color_filter: bool = quantity("whether a color filter mosaic covers the pixels", default=False, source="assumed")
    longest_exposure_s: float = quantity(
        "longest exposure of one picture", gt=0, le=60, usual=(0.005, 0.2), common=True
    )
    threshold_snr: float = quantity("signal to noise asked of a detail", gt=0, le=50, usual=(3.0, 8.0))


def pixel_photons(
    *, irradiance_w_m2: Numbers, wavelength_nm: Numbers, pixel_um: Numbers, exposure_s: Numbers
) -> Numbers:
    """Photons on a square pixel in one exposure: A t E lambda/(h c). References: emva_1288.

    >>> float(round(pixel_photons(irradiance_w_m2=1e-3, wavelength_nm=550.0, pixel_um=5.0, exposure_s=0.04)))
    2769.0
    """
    not_negative(irradiance_w_m2=irradiance_w_m2, exposure_s=exposure_s)
    positive(wavelength_nm=wavelength_nm, pixel_um=pixel_um)
    energy_j = m_from_um(pixel_um) ** 2 * exposure_s * irradiance_w_m2
    return energy_j * m_from_nm(wavelength_nm) / (PLANCK_J_S * LIGHT_SPEED_M_S)


def signal_to_noise(
    *, photons: Numbers, quantum_efficiency: Numbers, dark_noise_e: Numbers, gain_dn_e: Numbers
) -> np.ndarray:
    """Signal to noise of one pixel: eta mu/sqrt(sigma_d^2 + sigma_q^2/K^2 + eta mu), sigma_q^2 = 1/12.

    References: emva_1288.

    >>> one = signal_to_noise(photons=1000.0, quantum_efficiency=0.6, dark_noise_e=3.0, gain_dn_e=0.1)
    >>> round(float(one), 2)
    24.15
    """
    return cell_signal_to_noise(
        photons=photons,
        pixel_count=1.0,
        core_count=1.0,
        quantum_efficiency=quantum_efficiency,
        dark_noise_e=dark_noise_e,
        gain_dn_e=gain_dn_e,
        transmission_spread=0.0,
    )


def cell_signal_to_noise(
    *,
    photons: Numbers,
    pixel_count: Numbers,
    core_count: Numbers,
    quantum_efficiency: Numbers,
    dark_noise_e: Numbers,
    gain_dn_e: Numbers,
    transmission_spread: Numbers,
) -> np.ndarray:
    """Signal to noise of the sum over a cell of several pixels and cores.

    mu is the photons on the whole cell; variance = eta mu + n (sigma_d^2 + 1/(12 K^2)) +
    (spread eta mu)^2/cores: shot noise, n pixels of dark and quantization noise, and the cores'
    uneven throughput, which averages over the cores but not over time.
    References: emva_1288; closed_form (independent noises add as squares).

    >>> many = cell_signal_to_noise(photons=4000.0, pixel_count=4.0, core_count=1.0, quantum_efficiency=0.6,
    ...     dark_noise_e=3.0, gain_dn_e=0.1, transmission_spread=0.0)
    >>> round(float(many), 2)  # twice that of one pixel with a quarter of the light
    48.3
    """
    not_negative(photons=photons, dark_noise_e=dark_noise_e, transmission_spread=transmission_spread)
    positive(pixel_count=pixel_count, core_count=core_count, gain_dn_e=gain_dn_e)
    within(0.0, 1.0, quantum_efficiency=quantum_efficiency)
    signal = np.asarray(quantum_efficiency * photons, float)
    dark = pixel_count * (dark_noise_e**2 + 1.0 / (12.0 * gain_dn_e**2))
    return signal / np.sqrt(signal + dark + (transmission_spread * signal) ** 2 / core_count)


def greatest_snr(*, full_well_e: Numbers) -> Numbers:
    """Best signal to noise that a pixel can reach: the square root of its full well. References: emva_1288.

    >>> float(greatest_snr(full_well_e=10000.0))
    100.0
    """
    positive(full_well_e=full_well_e)
    return np.sqrt(full_well_e)


def exposure_s(
    *, second_photons: Numbers, quantum_efficiency: Numbers, full_well_e: Numbers, longest_exposure_s: Numbers
) -> np.ndarray:
    """The least of the longest exposure and what fills half the well.

    `second_photons`: photons on the brightest pixel in one second. References: trade.

    >>> float(exposure_s(second_photons=1e6, quantum_efficiency=0.5, full_well_e=10000.0, longest_exposure_s=0.04))
    0.01
    """
    not_negative(second_photons=second_photons)
    positive(quantum_efficiency=quantum_efficiency, full_well_e=full_well_e, longest_exposure_s=longest_exposure_s)
    rate = np.asarray(quantum_efficiency * second_photons, float)
    return WELL_SHARE * full_well_e / np.maximum(rate, WELL_SHARE * full_well_e / longest_exposure_s)


def signal_exposure_s(
    *,
    second_photons: Numbers,
    quantum_efficiency: Numbers,
    dark_noise_e: Numbers,
    gain_dn_e: Numbers,
    wanted_snr: Numbers,
) -> np.ndarray:
    """Exposure that brings a pixel to a wanted signal to noise; infinite in the dark.

    The inverse of `signal_to_noise`: eta mu = (q/2)(q + sqrt(q^2 + 4 sigma^2)), q the wanted ratio
    and sigma^2 the noise without light. References: emva_1288.

    >>> float(signal_exposure_s(second_photons=1e5, quantum_efficiency=0.6, dark_noise_e=3.0, gain_dn_e=0.1,
    ...     wanted_snr=24.15).round(4))
    0.01
    """
    not_negative(second_photons=second_photons, dark_noise_e=dark_noise_e)
    positive(quantum_efficiency=quantum_efficiency, gain_dn_e=gain_dn_e, wanted_snr=wanted_snr)
    dark = dark_noise_e**2 + 1.0 / (12.0 * gain_dn_e**2)
    electrons = 0.5 * wanted_snr * (wanted_snr + np.sqrt(wanted_snr**2 + 4.0 * dark))
    rate = np.asarray(quantum_efficiency * second_photons, float)
    return np.where(rate > 0, electrons / np.where(rate > 0, rate, 1.0), np.inf)


def frame_hz(*, exposure_s: Numbers) -> Numbers:
    """Pictures a second that an exposure allows, read-out alongside: 1/t. References: closed_form.

    >>> frame_hz(exposure_s=0.04)
    25.0
    """
    positive(exposure_s=exposure_s)
    return 1.0 / exposure_s


def pixels_per_pitch(*, pitch_um: Numbers, pixel_um: Numbers, relay_magnification: Numbers) -> Numbers:
    """Pixels for each core pitch on the sensor: p m/pixel. References: closed_form.

    >>> pixels_per_pitch(pitch_um=10.0, pixel_um=4.0, relay_magnification=1.5)
    3.75
    """
    positive(pitch_um=pitch_um, pixel_um=pixel_um, relay_magnification=relay_magnification)
    return pitch_um * relay_magnification / pixel_um


def beat_lp_mm(*, pitch_um: Numbers, pixels_per_pitch: Numbers, turn_deg: Numbers) -> np.ndarray:
    """Coarsest beat of the honeycomb with the pixels, in line pairs per mm at the bundle; 0: none in sight.

    The three first orders of the honeycomb, 2/(sqrt3 p), seen on the pixels' square lattice turned
    by `turn_deg` against the rows of cores. An order that the pixels sample makes no beat. From
    4/sqrt3 = 2.31 pixels a pitch on there is none at any turn. References: closed_form.

    >>> float(beat_lp_mm(pitch_um=10.0, pixels_per_pitch=2.31, turn_deg=0.0))
    0.0
    """
    positive(pitch_um=pitch_um, pixels_per_pitch=pixels_per_pitch)
    first = 2.0e3 / (np.sqrt(3.0) * np.asarray(pitch_um, float))
    beats = []
    for order_deg in (30.0, 90.0, 150.0):
        seen = square_alias(
            frequency_lp_mm=first, direction_deg=order_deg - turn_deg, pitch_um=pitch_um / pixels_per_pitch
        ).frequency_lp_mm
        beats.append(np.where(seen < first * (1 - 1e-9), seen, np.inf))
    coarsest = np.minimum(np.minimum(beats[0], beats[1]), beats[2])
    return np.where(np.isfinite(coarsest), coarsest, 0.0)


def relay_fraction(*, relay_na: Numbers, cone_sine: Numbers) -> np.ndarray:
    """Share of a uniformly filled exit cone that the relay takes: (NA/sine)^2, at most 1. References: closed_form.

    >>> float(relay_fraction(relay_na=0.2, cone_sine=0.4))
    0.25
    """
    positive(relay_na=relay_na, cone_sine=cone_sine)
    return np.minimum(relay_na / np.asarray(cone_sine, float), 1.0) ** 2


def rose_disc_um(*, contrast: Numbers, threshold_snr: Numbers, quanta_per_um2: Numbers) -> Any:
    """Diameter of the smallest disc told from its surround by counted quanta: (2k/C)/sqrt(pi Phi).

    Phi is the quanta detected per square micrometer, k the threshold (5 after Rose).
    References: rose_1948; closed_form.

    >>> round(float(rose_disc_um(contrast=0.1, threshold_snr=5.0, quanta_per_um2=1.2732)), 2)
    50.0
    """
    positive(contrast=contrast, threshold_snr=threshold_snr, quanta_per_um2=quanta_per_um2)
    return 2.0 * threshold_snr / (contrast * np.sqrt(np.pi * np.asarray(quanta_per_um2, float)))
