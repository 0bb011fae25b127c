"""What can be told apart: the contrast of every part on the way back against what the viewer needs.

Each part of the way back is one factor of contrast; making a part ideal sets its factor to 1. All
ideal variants are solved at once as [variant, design].
"""

import numpy as np

from optics.chain.columns import Columns
from optics.chain.target import Lit
from optics.chain.way_back import WORST_DEG, Parts, way_back
from optics.image.contrast import aberration_mtf, cutoff_lp_mm, diffraction_mtf, disc_mtf, pixel_mtf, veil_contrast
from optics.image.coupled import ring_mtf
from optics.units import lp_mm_from_per_um, mm_from_um, per_um_from_lp_mm, um_from_mm
from optics.viewer.detail import LINE_PITCHES, PARTS, largest_passing, line_seen_um, needed_contrast, smallest_line_um
from optics.viewer.eye import contrast_sensitivity, one_eye_threshold_contrast, seen_frequency_cpd

VARIANTS = (None, *PARTS)  # the design as it is, then with each part ideal alone
AIRY_ZERO = 1.2196698912665045  # first zero of a disc's contrast, times diameter and frequency
ROSE_SNR = 5.0  # threshold for an eye before uneven cores (Rose 1948)
BRIGHT_CD_M2 = 1e6  # "as much light as wanted" for an eye
NODES, WEIGHTS = np.polynomial.legendre.leggauss(24)


def detail(columns: Columns, lit: Lit, seen: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
    """Resolution, its limit and its ledger for every design that has an image."""
    rows = np.flatnonzero(columns.has("image.objective.focal_mm"))
    names = [
        "resolved_lp_mm",
        "smallest_gap_mm",
        "smallest_line_mm",
        "limited_by",
        "pitch_at_target_mm",
        "lattice_limit_lp_mm",
        "snr",
        "signal_e",
        "exposure_s",
        "near_mm",
        "far_mm",
        "pixels_per_pitch",
        "seen_cd_m2",
        "core_um_blur",
        "face_lux",
    ]
    names += [f"{kind}.{part}" for part in PARTS for kind in ("contrast", "limit", "gain")]
    value = {name: np.full(columns.count, np.nan) for name in names}
    if rows.size:
        for name, found in _detail(
            columns.take(rows), lit.center_w_m2_nm[rows], {k: v[rows] for k, v in seen.items()}
        ).items():
            value[name][rows] = found
    return value


def _detail(columns: Columns, target_w_m2_nm: np.ndarray, seen: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
    size = seen["image_over_target_ratio"]  # at the target's distance, which need not be the sharpest
    parts, value = way_back(columns, target_w_m2_nm, seen)
    upper = np.array([upper_lp_mm(parts, ideal) for ideal in VARIANTS])
    resolved = largest_passing(lambda f: margin(parts, f), upper_lp_mm=upper)
    whole = lp_mm_from_per_um(1.0 / um_from_mm(seen["image_mm"]))  # one period over the whole image
    resolved = np.where(resolved < whole, 0.0, resolved)
    real = resolved[0]
    gain = resolved[1:] - real
    gain = np.where(present(parts), gain, -np.inf)
    # Ties, and gains within rounding of each other, go to the earlier part.
    best = gain.max(axis=0)
    value["limited_by"] = np.argmax(gain >= best - 1e-9 * np.maximum(resolved.max(axis=0), 1e-12), axis=0).astype(float)
    value["resolved_lp_mm"] = real * size
    value["smallest_gap_mm"] = np.where(real > 0, 0.5 / np.maximum(real * size, 1e-300), np.nan)
    value["smallest_line_mm"] = _smallest_line_mm(parts, real, size, upper[0])
    left = factors(parts, real)
    for row, part in enumerate(PARTS):
        there = present(parts)[row]
        value[f"contrast.{part}"] = np.where(there, left.get(part, np.ones_like(real)), np.nan)
        value[f"limit.{part}"] = np.where(there, alone_lp_mm(parts, part, seen) * size, np.nan)
        value[f"gain.{part}"] = np.where(there, gain[row], np.nan)
    return value


# Contrast


def present(parts: Parts) -> np.ndarray:
    """Which parts a design has [part, design]."""
    always = np.ones_like(parts.bundle)
    has = {"crosstalk": parts.bundle, "camera": ~parts.eye, "eye": parts.eye}
    return np.array([has.get(part, always) for part in PARTS])


def factors(parts: Parts, frequency: np.ndarray) -> dict[str, np.ndarray]:
    """Contrast of each part at frequencies [..., design] at the image."""
    lens = diffraction_mtf(
        f_number=parts.f_number[:, None], wavelength_nm=parts.color_nm, frequency_lp_mm=frequency[..., None]
    )
    if np.any(parts.wavefront_error_nm > 0):
        lens = lens * aberration_mtf(
            wavefront_error_nm=parts.wavefront_error_nm[:, None],
            f_number=parts.f_number[:, None],
            wavelength_nm=parts.color_nm,
            frequency_lp_mm=frequency[..., None],
        )
    mixed = ring_mtf(
        shares=parts.exchange_share,
        frequency_per_um=per_um_from_lp_mm(frequency),
        pitch_um=parts.pitch_um,
        direction_deg=WORST_DEG,
    )
    return {
        "objective": (lens * parts.color_share).sum(axis=-1),
        "focus": disc_mtf(diameter_um=parts.blur_um, frequency_lp_mm=frequency),
        # a core averages where it collects, and its disc is what the viewer sees
        "lattice": np.where(parts.bundle, disc_mtf(diameter_um=parts.core_um, frequency_lp_mm=frequency) ** 2, 1.0),
        "crosstalk": np.where(parts.bundle, mixed * veil_contrast(veil_ratio=parts.veil_ratio), 1.0),
        "camera": pixel_mtf(pixel_um=parts.pixel_um, frequency_lp_mm=frequency),
    }


def needed(parts: Parts, frequency: np.ndarray) -> np.ndarray:
    """Contrast that the viewer needs [variant, design], each part ideal in its own row of VARIANTS."""
    rows = VARIANTS[: len(frequency)]
    snr = np.array(
        [
            {"camera": parts.camera_snr, "light": parts.light_snr, "lattice": parts.even_snr}.get(part, parts.snr)
            for part in rows
        ]
    )
    bright = np.array(
        [np.full_like(parts.seen_cd_m2, BRIGHT_CD_M2) if part == "light" else parts.seen_cd_m2 for part in rows]
    )
    by_noise = needed_contrast(
        frequency_lp_mm=frequency, snr=snr, cell_um2=parts.cell_um2, threshold_snr=parts.threshold_snr
    )
    if not parts.eye.any():
        return by_noise
    # Coarser than its peak the eye needs more contrast again, but a coarse pattern has edges that it sees as well.
    cycles = seen_frequency_cpd(frequency_lp_mm=frequency, eyepiece_focal_mm=parts.eyepiece_focal_mm)
    cycles = np.maximum(cycles, parts.peak_cpd)
    sensitivity = contrast_sensitivity(frequency_cpd=cycles, luminance_cd_m2=bright, field_deg=parts.seen_deg)
    by_eye = one_eye_threshold_contrast(sensitivity=np.maximum(sensitivity, 1e-12))
    by_eye = np.where(np.array([part == "eye" for part in VARIANTS])[: len(frequency), None], 0.0, by_eye)
    return np.where(parts.eye, by_eye, by_noise)


def margin(parts: Parts, frequency: np.ndarray) -> np.ndarray:
    """Contrast less what is needed [variant, design]."""
    product = parts.contrast
    for part, factor in factors(parts, frequency).items():
        ideal = np.array([part == variant for variant in VARIANTS])[:, None]
        product = product * np.where(ideal, 1.0, factor)
    return product - needed(parts, frequency)


def upper_lp_mm(parts: Parts, ideal: str | None) -> np.ndarray:
    """Where the search ends: the lattice limit, and the first zero of every part that has one."""
    zeros = {
        "objective": cutoff_lp_mm(f_number=parts.f_number, wavelength_nm=parts.color_nm.min(axis=-1)),
        "focus": lp_mm_from_per_um(AIRY_ZERO / np.maximum(parts.blur_um, 1e-9)),
        "lattice": parts.lattice_limit_lp_mm,
        "camera": _camera_lp_mm(parts),
    }
    return np.minimum.reduce([zero for part, zero in zeros.items() if part != ideal])


def _camera_lp_mm(parts: Parts) -> np.ndarray:
    """Where the camera ends: half its sampling frequency on a bundle's face; a chip's sampling is its lattice."""
    samples = np.where(parts.bundle, 0.5, 1.0)
    return lp_mm_from_per_um(samples / np.maximum(parts.pixel_um, 1e-9))


def alone_lp_mm(parts: Parts, part: str, seen: dict[str, np.ndarray]) -> np.ndarray:
    """What one part alone would allow, all others ideal, at the image [design]; nan: no limit."""
    zeros = {
        "objective": cutoff_lp_mm(f_number=parts.f_number, wavelength_nm=parts.color_nm.max(axis=-1)),
        "focus": np.where(parts.blur_um > 1e-6, lp_mm_from_per_um(AIRY_ZERO / np.maximum(parts.blur_um, 1e-9)), np.nan),
        "lattice": parts.lattice_limit_lp_mm,
        "crosstalk": np.full_like(parts.blur_um, np.nan),
        "camera": np.where(parts.pixel_um > 0, _camera_lp_mm(parts), np.nan),
    }
    if part in zeros:
        return zeros[part]
    if part == "light":
        one_cell = lp_mm_from_per_um(0.5 / np.sqrt(parts.cell_um2))
        ratio = parts.contrast * parts.even_snr / parts.threshold_snr
        by_camera = np.where(ratio >= 1, np.nan, one_cell * ratio)
        return np.where(parts.eye, np.nan, by_camera)
    top = np.full((1, parts.blur_um.size), lp_mm_from_per_um(1.0))
    return largest_passing(lambda f: parts.contrast - needed(parts, f), upper_lp_mm=top)[0]


def _smallest_line_mm(parts: Parts, resolved: np.ndarray, size: np.ndarray, upper: np.ndarray) -> np.ndarray:
    """Width of the thinnest single dark line at the target; never wider than the gap; nan where nothing is resolved."""
    f = upper * (NODES[:, None] + 1) / 2
    product = np.ones_like(f)
    for factor in factors(parts, f).values():
        product = product * factor
    weight = per_um_from_lp_mm(upper) / 2 * WEIGHTS[:, None]  # 1/um
    by_cores = smallest_line_um(  # an eye has no camera's noise, but the cores' unevenness masks for it too
        contrast=parts.contrast,
        snr=np.where(parts.eye, parts.light_snr, np.nan_to_num(parts.snr)),
        cell_um2=parts.cell_um2,
        threshold_snr=np.where(parts.eye, ROSE_SNR, parts.threshold_snr),
        line_um=LINE_PITCHES * parts.pitch_um,
        power_per_um=2 * (product**2 * weight).sum(axis=0),
    )
    cycles = np.maximum(seen_frequency_cpd(frequency_lp_mm=f, eyepiece_focal_mm=parts.eyepiece_focal_mm), 1e-3)
    sensitivity = contrast_sensitivity(frequency_cpd=cycles, luminance_cd_m2=parts.seen_cd_m2, field_deg=parts.seen_deg)
    by_eye = line_seen_um(
        contrast=parts.contrast, response_per_um=2 * (product * sensitivity / np.sqrt(2) * weight).sum(axis=0)
    )
    width = np.where(parts.eye, np.hypot(by_eye, by_cores), by_cores)
    gap = 0.5 / np.maximum(resolved, 1e-300)
    return np.where(resolved > 0, np.minimum(mm_from_um(width), gap) / size, np.nan)
