"""The way back: from the lit target through objective and bundle to the viewer, and what can be told apart.

Each part of the way back is one factor of contrast; making a part ideal sets its factor to 1. All
ideal variants are solved at once as [variant, design].
"""

from dataclasses import dataclass

import numpy as np

from optics.chain.columns import Columns
from optics.chain.light import medium_index
from optics.chain.target import Lit, pupil_depth_mm
from optics.image.bundle import exit_luminance_cd_m2
from optics.image.chip import sampling_um
from optics.image.contrast import aberration_mtf, cutoff_lp_mm, diffraction_mtf, disc_mtf, pixel_mtf, veil_contrast
from optics.image.crosstalk import exchange_mtf
from optics.image.lattice import resolution_limit_lp_mm, square_limit_lp_mm
from optics.image.objective import (
    accepted_fraction,
    apparent_distance_mm,
    defocus_blur_um,
    depth_of_field_mm,
    face_irradiance_factor,
    magnification,
    working_f_number,
)
from optics.media.face import face_transmission
from optics.media.loss import attenuation_transmission
from optics.spectrum import GRID_NM, effective_wavelengths, integral, luminous_flux_lm, photons_per_j, photopic_weight
from optics.units import lp_mm_from_per_um, m2_from_mm2, mm2_from_um2, mm_from_um, per_um_from_lp_mm, um_from_mm
from optics.viewer.camera import cell_signal_to_noise, exposure_s, pixels_per_pitch, relay_fraction
from optics.viewer.detail import LINE_PITCHES, PARTS, largest_passing, line_seen_um, needed_contrast, smallest_line_um
from optics.viewer.eye import apparent_field_deg, contrast_sensitivity, one_eye_threshold_contrast, pupil_diameter_mm, seen_frequency_cpd, seen_luminance_cd_m2

VARIANTS = (None, *PARTS)   # the design as it is, then with each part ideal alone
COLORS = 6           # wavelengths that stand for the viewer's spectrum
WORST_DEG = 30.0      # grating vector across the rows of cores: the lattice's worst direction
AIRY_ZERO = 1.2196698912665045   # first zero of a disc's contrast, times diameter and frequency
BRIGHT_CD_M2 = 1e6    # "as much light as wanted" for an eye
NODES, WEIGHTS = np.polynomial.legendre.leggauss(24)


@dataclass(frozen=True, slots=True)
class Parts:
    """What the contrast factors need, each [design] (colors [design, color]); 0 or nan where a part is absent."""

    bundle: np.ndarray           # whether the image goes through a bundle
    eye: np.ndarray              # whether an eye looks
    f_number: np.ndarray
    color_nm: np.ndarray
    color_share: np.ndarray
    wavefront_error_nm: np.ndarray
    blur_um: np.ndarray
    core_um: np.ndarray
    pitch_um: np.ndarray
    cell_um2: np.ndarray
    exchange: np.ndarray
    pixel_um: np.ndarray         # at the image, 0 where none
    veil: np.ndarray
    lattice_limit_lp_mm: np.ndarray
    contrast: np.ndarray
    snr: np.ndarray
    ideal_snr: np.ndarray        # with neither read nor dark noise
    threshold_snr: np.ndarray
    eyepiece_focal_mm: np.ndarray
    seen_cd_m2: np.ndarray
    seen_deg: np.ndarray


def detail(columns: Columns, lit: Lit, seen: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
    """Resolution, its limit and its ledger for every design that has an image."""
    rows = np.flatnonzero(columns.has("image.objective.focal_mm"))
    names = [
        "resolved_lp_mm", "smallest_gap_mm", "smallest_line_mm", "limited_by", "pitch_at_target_mm", "lattice_limit_lp_mm",
        "snr", "exposure_s", "near_mm", "far_mm", "pixels_per_pitch", "seen_cd_m2", "core_um_blur", "face_lux",
    ]  # fmt: skip
    names += [f"{kind}.{part}" for part in PARTS for kind in ("contrast", "limit", "gain")]
    value = {name: np.full(columns.count, np.nan) for name in names}
    if rows.size:
        for name, found in _detail(columns.take(rows), lit.center_w_m2_nm[rows], {k: v[rows] for k, v in seen.items()}).items():
            value[name][rows] = found
    return value


def _detail(columns: Columns, target_w_m2_nm: np.ndarray, seen: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
    size = magnification(focal_mm=columns["image.objective.focal_mm"], focus_mm=seen["focus_from_pupil_mm"])
    parts, value = _way_back(columns, target_w_m2_nm, seen, size)
    upper = np.array([_upper_lp_mm(parts, ideal) for ideal in VARIANTS])
    resolved = largest_passing(lambda f: _margin(parts, f), upper_lp_mm=upper)
    whole = lp_mm_from_per_um(1.0 / um_from_mm(seen["image_mm"]))   # one period over the whole image
    resolved = np.where(resolved < whole, 0.0, resolved)
    real = resolved[0]
    gain = resolved[1:] - real
    gain = np.where(_present(parts), gain, -np.inf)
    # Ties, and gains within rounding of each other, go to the earlier part.
    best = gain.max(axis=0)
    value["limited_by"] = np.argmax(gain >= best - 1e-9 * np.maximum(resolved.max(axis=0), 1e-12), axis=0).astype(float)
    value["resolved_lp_mm"] = real * size
    value["smallest_gap_mm"] = np.where(real > 0, 0.5 / np.maximum(real * size, 1e-300), np.nan)
    value["smallest_line_mm"] = _smallest_line_mm(parts, real, size, upper[0])
    factors = _factors(parts, real)
    for row, part in enumerate(PARTS):
        present = _present(parts)[row]
        value[f"contrast.{part}"] = np.where(present, factors.get(part, np.ones_like(real)), np.nan)
        value[f"limit.{part}"] = np.where(present, _alone_lp_mm(parts, part, seen) * size, np.nan)
        value[f"gain.{part}"] = np.where(present, gain[row], np.nan)
    return value


def _way_back(columns, target_w_m2_nm, seen, size):
    """Light, noise and blur of the way back: the parts of the contrast, and the numbers to report."""
    bundle, eye = columns.has("image.bundle.pitch_um"), columns.has("viewer.eye.eyepiece_focal_mm")
    index, depth = medium_index(columns), pupil_depth_mm(columns)
    focal, stop = columns["image.objective.focal_mm"], columns["image.objective.f_number"]
    f_number = working_f_number(
        focal_mm=focal, f_number=stop, magnification=size, exit_pupil_mm=columns.get("image.objective.exit_pupil_mm", np.inf)
    )
    tau = columns.get("image.objective.transmission", 1.0) * columns.get("image.tip.transmission", 1.0)
    per_radiance = face_irradiance_factor(f_number=f_number, magnification=0.0, transmission=tau) / index**2
    radiance = columns.spectrum("scene.target.reflectance") * target_w_m2_nm / np.pi
    face = radiance * per_radiance[:, None]   # W/m2/nm at the bundle or chip

    pitch = np.where(bundle, columns["image.bundle.pitch_um"], columns["image.chip.pixel_um"])
    core = columns.get("image.bundle.core_um", 0.0)
    cell = np.where(bundle, np.sqrt(3.0) / 2, 1.0) * pitch**2
    cone = 0.5 / f_number
    through = _through_bundle(columns, bundle, cone)
    magnified = columns.get("viewer.camera.relay_magnification", 1.0)
    pixel = np.where(bundle, columns["viewer.camera.pixel_um"] / magnified, columns["image.chip.pixel_um"])
    back, numbers = _signal(columns, bundle, face * through, pixel, pitch, core, cone)
    eye_weight = face * through * photopic_weight()
    weight = np.where(eye[:, None], eye_weight, back)
    dark = weight.sum(axis=1) <= 0
    weight = np.where(dark[:, None], photopic_weight(), weight)
    color, share = effective_wavelengths(weight=weight, count=COLORS)

    apparent = apparent_distance_mm(distance_mm=columns["scene.target.distance_mm"], pupil_depth_mm=depth, index=index)
    blur = defocus_blur_um(focal_mm=focal, f_number=stop, focus_mm=seen["focus_from_pupil_mm"], distance_mm=apparent)
    depth_of = depth_of_field_mm(focal_mm=focal, f_number=stop, blur_um=pitch, focus_mm=seen["focus_from_pupil_mm"])
    exchange = _exchange(columns, bundle, color, share)
    limit = np.where(
        bundle,
        resolution_limit_lp_mm(pitch_um=pitch, direction_deg=WORST_DEG),
        square_limit_lp_mm(pitch_um=sampling_um(pixel_um=pitch, color_filter=columns.get("image.chip.color_filter", 0.0) > 0), direction_deg=0.0),
    )
    seen_cd_m2, seen_deg, face_cd_m2 = _eye_light(columns, eye, face, through, core, pitch, cone, seen)
    camera = np.where(bundle, "viewer.camera", "image.chip")
    threshold = np.where(bundle, columns["viewer.camera.threshold_snr"], columns["image.chip.threshold_snr"])
    parts = Parts(
        bundle, eye, f_number, color, share, columns.get("image.objective.wavefront_error_nm", 0.0), blur, core, pitch, cell,
        exchange, np.where(eye, 0.0, np.nan_to_num(pixel)), columns.get("image.bundle.veil_ratio", 0.0), limit,
        columns["scene.target.detail_contrast"], numbers["snr"], numbers["ideal_snr"], np.nan_to_num(threshold, nan=1.0),
        columns.get("viewer.eye.eyepiece_focal_mm", 25.0), seen_cd_m2, seen_deg,
    )  # fmt: skip
    value = {
        "pitch_at_target_mm": mm_from_um(pitch) / size,
        "lattice_limit_lp_mm": limit * size,
        "snr": np.where(eye, np.nan, numbers["snr"]),
        "exposure_s": np.where(eye, np.nan, numbers["exposure_s"]),
        "near_mm": np.maximum((depth_of.near_mm - depth) * index, 0.0),
        "far_mm": (depth_of.far_mm - depth) * index,
        "pixels_per_pitch": np.where(bundle & ~eye, pitch / np.where(bundle & ~eye, pixel, 1.0), np.nan),
        "seen_cd_m2": np.where(eye, seen_cd_m2, np.nan),
        "core_um_blur": blur,
        "face_lux": luminous_flux_lm(face),
    }
    return parts, value


def _through_bundle(columns: Columns, bundle: np.ndarray, cone: np.ndarray) -> np.ndarray:
    """Transmission of a core, face to face [design, wavelength]: acceptance, two faces, attenuation; 1 for a chip."""
    na, core_index = columns.get("image.bundle.na", 0.5), columns.get("image.bundle.core_index", 1.5)
    taken = accepted_fraction(core_na=na, cone_sine=np.minimum(cone, 1.0), tilt_sine=0.0)
    face = face_transmission(core_index=core_index, outside_index=1.0, na=np.minimum(na, cone))
    loss, inside = columns.spectrum("image.bundle.attenuation"), columns.covered("image.bundle.attenuation")
    length = attenuation_transmission(loss_db_m=loss, length_m=columns.get("image.bundle.length_m", 0.0)[:, None], stretch=1.0)
    return np.where(bundle[:, None], np.where(inside, (taken * face**2)[:, None] * length, 0.0), 1.0)


def _signal(columns, bundle, core_w_m2_nm, pixel_um, pitch_um, core_um, cone):
    """Detected spectrum [design, wavelength], and signal, noise and exposure of one core (or pixel) [design]."""
    relay = relay_fraction(
        relay_na=columns.get("viewer.camera.relay_na", 0.5), cone_sine=np.minimum(cone, columns.get("image.bundle.na", 0.5))
    ) * columns.get("viewer.camera.relay_transmission", 1.0)
    camera = np.where(bundle[:, None], relay[:, None] * _response(columns), 1.0)
    detected = core_w_m2_nm * camera * photons_per_j(wavelength_nm=GRID_NM)   # photons/s/m2/nm weighted by response
    area = np.where(bundle, np.pi / 4 * core_um**2, pixel_um**2)
    rate = integral(detected) * m2_from_mm2(mm2_from_um2(area))   # photons a second on one core or pixel
    cell = np.where(bundle, np.sqrt(3.0) / 2 * pitch_um**2, pixel_um**2)
    pixels = np.nan_to_num(cell / pixel_um**2, nan=1.0)
    lit_pixels = np.maximum(np.nan_to_num(area / pixel_um**2, nan=1.0), 1.0)
    camera = {
        name: np.where(bundle, columns[f"viewer.camera.{name}"], columns[f"image.chip.{name}"])
        for name in ("quantum_efficiency", "full_well_e", "longest_exposure_s", "dark_noise_e", "gain_dn_e")
    }
    camera = {name: np.where(np.isnan(found), 1.0, found) for name, found in camera.items()}   # an eye has none: unused
    time = exposure_s(
        second_photons=rate / lit_pixels,
        quantum_efficiency=camera["quantum_efficiency"],
        full_well_e=camera["full_well_e"],
        longest_exposure_s=camera["longest_exposure_s"],
    )
    noise = {
        "photons": rate * time, "pixel_count": np.maximum(pixels, 1.0), "core_count": 1.0,
        "quantum_efficiency": camera["quantum_efficiency"], "transmission_spread": columns.get("image.bundle.transmission_spread", 0.0),
    }  # fmt: skip
    snr = cell_signal_to_noise(**noise, dark_noise_e=camera["dark_noise_e"], gain_dn_e=camera["gain_dn_e"])
    ideal = cell_signal_to_noise(**noise, dark_noise_e=0.0 * rate, gain_dn_e=1e9)
    return detected, {"snr": snr, "ideal_snr": ideal, "exposure_s": time}


def _response(columns: Columns) -> np.ndarray:
    """Relative spectral response of the camera; flat over its grid where no curve is given."""
    curves = columns.curve.get("viewer.camera.response")
    if curves is None:
        return np.ones((columns.count, len(GRID_NM)))
    return np.where(curves.row[:, None] >= 0, columns.spectrum("viewer.camera.response"), 1.0)


def _exchange(columns, bundle, color_nm, color_share):
    """Share of light that a core gives to each of its neighbors, weighted over the viewer's colors [design]."""
    found = np.zeros(columns.count)
    rows = np.flatnonzero(bundle)
    if rows.size:
        column = {name: columns[f"image.bundle.{name}"][rows, None] for name in ("core_um", "pitch_um", "na", "core_index", "core_spread_fraction", "length_m")}
        found[rows] = (neighbor_share(**column, wavelength_nm=color_nm[rows]) * color_share[rows]).sum(axis=1)
    return found


def _eye_light(columns, eye, face_w_m2_nm, through, core_um, pitch_um, cone, seen):
    """Luminance that the eye sees, the angle of the picture, and the face's own luminance [design]."""
    sine = np.minimum(cone, columns.get("image.bundle.na", 0.5))
    core = np.pi / 4 * core_um**2 / (np.sqrt(3.0) / 2 * pitch_um**2)
    face = exit_luminance_cd_m2(face_lux=luminous_flux_lm(face_w_m2_nm * through) * core, transmission=1.0, cone_sine=sine)
    focal = columns.get("viewer.eye.eyepiece_focal_mm", 25.0)
    angle = apparent_field_deg(image_mm=np.minimum(columns.get("viewer.eye.field_stop_mm", np.inf), seen["image_mm"]), eyepiece_focal_mm=focal)
    bright = np.maximum(face, 1e-6)
    pupil = pupil_diameter_mm(luminance_cd_m2=bright, field_deg=angle)
    seen_cd = seen_luminance_cd_m2(
        face_cd_m2=face, transmission=columns.get("viewer.eye.transmission", 1.0), cone_sine=sine, eyepiece_focal_mm=focal, pupil_mm=pupil
    )
    return np.maximum(seen_cd, 1e-6), angle, face


# Contrast


def _present(parts: Parts) -> np.ndarray:
    """Which parts a design has [part, design]."""
    always = np.ones_like(parts.bundle)
    has = {"crosstalk": parts.bundle, "camera": ~parts.eye, "eye": parts.eye}
    return np.array([has.get(part, always) for part in PARTS])


def _factors(parts: Parts, frequency: np.ndarray) -> dict[str, np.ndarray]:
    """Contrast of each part at frequencies [..., design] at the image."""
    lens = diffraction_mtf(f_number=parts.f_number[:, None], wavelength_nm=parts.color_nm, frequency_lp_mm=frequency[..., None])
    if np.any(parts.wavefront_error_nm > 0):
        lens = lens * aberration_mtf(
            wavefront_error_nm=parts.wavefront_error_nm[:, None], f_number=parts.f_number[:, None],
            wavelength_nm=parts.color_nm, frequency_lp_mm=frequency[..., None],
        )  # fmt: skip
    mixed = exchange_mtf(neighbor_share=parts.exchange, frequency_per_um=per_um_from_lp_mm(frequency), pitch_um=parts.pitch_um, direction_deg=WORST_DEG)
    return {
        "objective": (lens * parts.color_share).sum(axis=-1),
        "focus": disc_mtf(diameter_um=parts.blur_um, frequency_lp_mm=frequency),
        # a core averages where it collects, and its disc is what the viewer sees
        "lattice": np.where(parts.bundle, disc_mtf(diameter_um=parts.core_um, frequency_lp_mm=frequency) ** 2, 1.0),
        "crosstalk": np.where(parts.bundle, mixed * veil_contrast(veil_ratio=parts.veil), 1.0),
        "camera": pixel_mtf(pixel_um=parts.pixel_um, frequency_lp_mm=frequency),
    }


def _needed(parts: Parts, frequency: np.ndarray) -> np.ndarray:
    """Contrast that the viewer needs [variant, design], each part ideal in its own row of VARIANTS."""
    snr, threshold, bright = (
        np.where(np.array([part == ideal for part in VARIANTS])[:, None], instead, real)[: len(frequency)]
        for ideal, instead, real in (
            ("camera", parts.ideal_snr, parts.snr),
            ("light", 0.0, parts.threshold_snr),
            ("light", BRIGHT_CD_M2, parts.seen_cd_m2),
        )
    )
    needed = needed_contrast(frequency_lp_mm=frequency, snr=snr, cell_um2=parts.cell_um2, threshold_snr=threshold)
    if not parts.eye.any():
        return needed
    cycles = np.maximum(seen_frequency_cpd(frequency_lp_mm=frequency, eyepiece_focal_mm=parts.eyepiece_focal_mm), 1e-3)
    sensitivity = contrast_sensitivity(frequency_cpd=cycles, luminance_cd_m2=bright, field_deg=parts.seen_deg)
    by_eye = one_eye_threshold_contrast(sensitivity=np.maximum(sensitivity, 1e-12))
    by_eye = np.where(np.array([part == "eye" for part in VARIANTS])[: len(frequency), None], 0.0, by_eye)
    return np.where(parts.eye, by_eye, needed)


def _margin(parts: Parts, frequency: np.ndarray) -> np.ndarray:
    """Contrast less what is needed [variant, design]."""
    product = parts.contrast
    for part, factor in _factors(parts, frequency).items():
        ideal = np.array([part == variant for variant in VARIANTS])[:, None]
        product = product * np.where(ideal, 1.0, factor)
    return product - _needed(parts, frequency)


def _upper_lp_mm(parts: Parts, ideal: str | None) -> np.ndarray:
    """Where the search ends: the lattice limit, and the first zero of every part that has one."""
    zeros = {
        "objective": cutoff_lp_mm(f_number=parts.f_number, wavelength_nm=parts.color_nm.min(axis=-1)),
        "focus": lp_mm_from_per_um(AIRY_ZERO / np.maximum(parts.blur_um, 1e-9)),
        "lattice": parts.lattice_limit_lp_mm,
        "camera": lp_mm_from_per_um(1.0 / np.maximum(parts.pixel_um, 1e-9)),
    }
    return np.minimum.reduce([zero for part, zero in zeros.items() if part != ideal])


def _alone_lp_mm(parts: Parts, part: str, seen: dict[str, np.ndarray]) -> np.ndarray:
    """What one part alone would allow, all others ideal, at the image [design]; nan: no limit."""
    zeros = {
        "objective": cutoff_lp_mm(f_number=parts.f_number, wavelength_nm=parts.color_nm.max(axis=-1)),
        "focus": np.where(parts.blur_um > 1e-6, lp_mm_from_per_um(AIRY_ZERO / np.maximum(parts.blur_um, 1e-9)), np.nan),
        "lattice": parts.lattice_limit_lp_mm,
        "crosstalk": np.full_like(parts.blur_um, np.nan),
        "camera": np.where(parts.pixel_um > 0, lp_mm_from_per_um(1.0 / np.maximum(parts.pixel_um, 1e-9)), np.nan),
    }
    if part in zeros:
        return zeros[part]
    if part == "light":
        one_cell = lp_mm_from_per_um(0.5 / np.sqrt(parts.cell_um2))
        ratio = parts.contrast * np.nan_to_num(parts.snr) / parts.threshold_snr
        by_camera = np.where(ratio >= 1, np.nan, one_cell * ratio)
        return np.where(parts.eye, np.nan, by_camera)
    top = np.full((1, parts.blur_um.size), lp_mm_from_per_um(1.0))
    return largest_passing(lambda f: parts.contrast - _needed(parts, f), upper_lp_mm=top)[0]


def _smallest_line_mm(parts: Parts, resolved: np.ndarray, size: np.ndarray, upper: np.ndarray) -> np.ndarray:
    """Width of the thinnest single dark line at the target; never wider than the gap; nan where nothing is resolved."""
    f = upper * (NODES[:, None] + 1) / 2
    product = np.ones_like(f)
    for factor in _factors(parts, f).values():
        product = product * factor
    weight = per_um_from_lp_mm(upper) / 2 * WEIGHTS[:, None]   # 1/um
    by_camera = smallest_line_um(
        contrast=parts.contrast, snr=np.nan_to_num(parts.snr), cell_um2=parts.cell_um2, threshold_snr=parts.threshold_snr,
        line_um=LINE_PITCHES * parts.pitch_um, power_per_um=2 * (product**2 * weight).sum(axis=0),
    )  # fmt: skip
    cycles = np.maximum(seen_frequency_cpd(frequency_lp_mm=f, eyepiece_focal_mm=parts.eyepiece_focal_mm), 1e-3)
    sensitivity = contrast_sensitivity(frequency_cpd=cycles, luminance_cd_m2=parts.seen_cd_m2, field_deg=parts.seen_deg)
    by_eye = line_seen_um(contrast=parts.contrast, response_per_um=2 * (product * sensitivity / np.sqrt(2) * weight).sum(axis=0))
    width = np.where(parts.eye, by_eye, by_camera)
    gap = 0.5 / np.maximum(resolved, 1e-300)
    return np.where(resolved > 0, np.minimum(mm_from_um(width), gap) / size, np.nan)


def neighbor_share(**k):  # DEBUG
    return np.zeros(np.broadcast_shapes(*(np.shape(v) for v in k.values())))
