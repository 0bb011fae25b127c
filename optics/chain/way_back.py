"""The way back: light from the target through objective and bundle to the viewer, its signal, noise and blur.

What the contrast of every part needs is gathered in `Parts`; `chain.detail` solves with it.
"""

from dataclasses import dataclass

import numpy as np

from optics.chain.columns import Columns
from optics.chain.cone import medium_index
from optics.chain.target import pupil_depth_mm
from optics.image.bundle import exit_luminance_cd_m2
from optics.image.chip import sampling_um
from optics.image.coupled import ring_shares, rings
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
from optics.units import Flags, m2_from_mm2, mm2_from_um2, mm_from_um
from optics.viewer.camera import cell_signal_to_noise, exposure_s, relay_fraction
from optics.viewer.eye import apparent_field_deg, peak_cpd, pupil_diameter_mm, seen_luminance_cd_m2

COLORS = 6  # wavelengths that stand for the viewer's spectrum (Gauss quadrature)
WORST_DEG = 30.0  # grating vector across the rows of cores: the lattice's worst direction
UNQUANTIZED_DN_E = 1e9  # a camera without rounding


@dataclass(frozen=True, slots=True)
class Parts:
    """What the contrast factors need, each [design] (colors [design, color]); 0 or nan where a part is absent."""

    bundle: Flags  # whether the image goes through a bundle
    eye: Flags  # whether an eye looks
    f_number: np.ndarray
    color_nm: np.ndarray
    color_share: np.ndarray
    wavefront_error_nm: np.ndarray
    blur_um: np.ndarray
    core_um: np.ndarray
    pitch_um: np.ndarray
    cell_um2: np.ndarray
    exchange_share: np.ndarray  # [design, ring]
    pixel_um: np.ndarray  # at the image, 0 where none
    veil_ratio: np.ndarray
    lattice_limit_lp_mm: np.ndarray
    contrast: np.ndarray
    snr: np.ndarray
    camera_snr: np.ndarray  # the same with neither read nor dark noise
    light_snr: np.ndarray  # with as much light as wanted: what the cores' unevenness leaves
    even_snr: np.ndarray  # with cores all alike
    threshold_snr: np.ndarray
    eyepiece_focal_mm: np.ndarray
    seen_cd_m2: np.ndarray
    seen_deg: np.ndarray
    peak_cpd: np.ndarray  # where the eye is most sensitive


def way_back(columns, target_w_m2_nm, seen):
    """Light, noise and blur of the way back: the parts of the contrast, and the numbers to report."""
    bundle, eye = columns.has("image.bundle.pitch_um"), columns.has("viewer.eye.eyepiece_focal_mm")
    index, depth = medium_index(columns), pupil_depth_mm(columns)
    focal, stop = columns["image.objective.focal_mm"], columns["image.objective.f_number"]
    f_number = working_f_number(
        focal_mm=focal,
        f_number=stop,
        magnification=magnification(focal_mm=focal, focus_mm=seen["focus_from_pupil_mm"]),
        exit_pupil_mm=columns.get("image.objective.exit_pupil_mm", np.inf),
    )
    tau = columns.get("image.objective.transmission", 1.0) * columns.get("image.tip.transmission", 1.0)
    per_radiance = face_irradiance_factor(f_number=f_number, magnification=0.0, transmission=tau) / index**2
    radiance = columns.spectrum("scene.target.reflectance") * target_w_m2_nm / np.pi
    face = radiance * per_radiance[:, None]  # W/m2/nm at the bundle or chip

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
    exchange = _exchange(columns, bundle, color, share, cone)
    limit = np.where(
        bundle,
        resolution_limit_lp_mm(pitch_um=pitch, direction_deg=WORST_DEG),
        square_limit_lp_mm(
            pitch_um=sampling_um(pixel_um=pitch, color_filter=columns.get("image.chip.color_filter", 0.0) > 0),
            direction_deg=0.0,
        ),
    )
    seen_cd_m2, seen_deg = _eye_light(columns, eye, face, through, core, pitch, cone, seen)
    threshold = np.where(bundle, columns["viewer.camera.threshold_snr"], columns["image.chip.threshold_snr"])
    parts = Parts(
        bundle,
        eye,
        f_number,
        color,
        share,
        columns.get("image.objective.wavefront_error_nm", 0.0),
        blur,
        core,
        pitch,
        cell,
        exchange,
        np.where(eye, 0.0, np.nan_to_num(pixel)),
        columns.get("image.bundle.veil_ratio", 0.0),
        limit,
        columns["scene.target.detail_contrast"],
        numbers["snr"],
        numbers["camera_snr"],
        numbers["light_snr"],
        numbers["even_snr"],
        np.nan_to_num(threshold, nan=1.0),
        columns.get("viewer.eye.eyepiece_focal_mm", 25.0),
        seen_cd_m2,
        seen_deg,
        peak_cpd(luminance_cd_m2=seen_cd_m2, field_deg=seen_deg),
    )
    value = {
        "pitch_at_target_mm": mm_from_um(pitch) / seen["image_over_target_ratio"],
        "lattice_limit_lp_mm": limit * seen["image_over_target_ratio"],
        "snr": np.where(eye, np.nan, numbers["snr"]),
        "signal_e": np.where(eye, np.nan, numbers["signal_e"]),
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
    length = attenuation_transmission(
        loss_db_m=loss, length_m=columns.get("image.bundle.length_m", 0.0)[:, None], stretch=1.0
    )
    return np.where(bundle[:, None], np.where(inside, (taken * face**2)[:, None] * length, 0.0), 1.0)


def _signal(columns, bundle, core_w_m2_nm, pixel_um, pitch_um, core_um, cone):
    """Detected spectrum [design, wavelength], and signal, noise and exposure of one core (or pixel) [design]."""
    relay = relay_fraction(
        relay_na=columns.get("viewer.camera.relay_na", 0.5),
        cone_sine=np.minimum(cone, columns.get("image.bundle.na", 0.5)),
    ) * columns.get("viewer.camera.relay_transmission", 1.0)
    camera = np.where(bundle[:, None], relay[:, None] * _response(columns), 1.0)
    detected = core_w_m2_nm * camera * photons_per_j(wavelength_nm=GRID_NM)  # photons/s/m2/nm weighted by response
    area = np.where(bundle, np.pi / 4 * core_um**2, pixel_um**2)
    rate = integral(detected) * m2_from_mm2(mm2_from_um2(area))  # photons a second on one core or pixel
    cell = np.where(bundle, np.sqrt(3.0) / 2 * pitch_um**2, pixel_um**2)
    pixels = np.nan_to_num(cell / pixel_um**2, nan=1.0)
    lit_pixels = np.maximum(np.nan_to_num(area / pixel_um**2, nan=1.0), 1.0)
    camera = {
        name: np.where(bundle, columns[f"viewer.camera.{name}"], columns[f"image.chip.{name}"])
        for name in ("quantum_efficiency", "full_well_e", "longest_exposure_s", "dark_noise_e", "gain_dn_e")
    }
    camera = {name: np.where(np.isnan(found), 1.0, found) for name, found in camera.items()}  # an eye has none: unused
    time = exposure_s(
        second_photons=rate / lit_pixels,
        quantum_efficiency=camera["quantum_efficiency"],
        full_well_e=camera["full_well_e"],
        longest_exposure_s=camera["longest_exposure_s"],
    )
    noise = {
        "photons": rate * time,
        "pixel_count": np.maximum(pixels, 1.0),
        "core_count": 1.0,
        "quantum_efficiency": camera["quantum_efficiency"],
        "transmission_spread": columns.get("image.bundle.transmission_spread", 0.0),
    }
    snr = cell_signal_to_noise(**noise, dark_noise_e=camera["dark_noise_e"], gain_dn_e=camera["gain_dn_e"])
    spread = noise.pop("transmission_spread")
    return detected, {
        "snr": snr,
        "camera_snr": cell_signal_to_noise(
            **noise, transmission_spread=spread, dark_noise_e=0.0, gain_dn_e=UNQUANTIZED_DN_E
        ),
        "light_snr": 1.0 / np.maximum(spread, 1e-12),
        "even_snr": cell_signal_to_noise(
            **noise, transmission_spread=0.0, dark_noise_e=camera["dark_noise_e"], gain_dn_e=camera["gain_dn_e"]
        ),
        "exposure_s": time,
        "signal_e": noise["photons"] * camera["quantum_efficiency"],
    }


def _response(columns: Columns) -> np.ndarray:
    """Relative spectral response of the camera; flat over its grid where no curve is given."""
    curves = columns.curve.get("viewer.camera.response")
    if curves is None:
        return np.ones((columns.count, len(GRID_NM)))
    return np.where(curves.row[:, None] >= 0, columns.spectrum("viewer.camera.response"), 1.0)


def _exchange(
    columns: Columns, bundle: np.ndarray, color_nm: np.ndarray, color_share: np.ndarray, cone: np.ndarray
) -> np.ndarray:
    """Share of a core's light that ends in one core of each ring around it, over the viewer's colors [design, ring]."""
    names = ("core_um", "pitch_um", "na", "core_index", "core_spread_fraction", "length_m")
    rows = np.flatnonzero(bundle)
    found = np.zeros((columns.count, len(rings())))
    found[:, 0] = 1.0
    if rows.size == 0:
        return found
    taken = {name: columns[f"image.bundle.{name}"][rows, None] for name in names}
    shares = ring_shares(**taken, wavelength_nm=color_nm[rows], cone_sine=np.minimum(cone[rows, None], 1.0))
    found[rows] = (shares * color_share[rows][..., None]).sum(axis=1)
    return found


def _eye_light(columns, eye, face_w_m2_nm, through, core_um, pitch_um, cone, seen):
    """Luminance that the eye sees and the angle of the picture [design]."""
    sine = np.minimum(cone, columns.get("image.bundle.na", 0.5))
    core = np.pi / 4 * core_um**2 / (np.sqrt(3.0) / 2 * pitch_um**2)
    face = exit_luminance_cd_m2(
        face_lux=luminous_flux_lm(face_w_m2_nm * through) * core, transmission=1.0, cone_sine=sine
    )
    focal = columns.get("viewer.eye.eyepiece_focal_mm", 25.0)
    angle = apparent_field_deg(
        image_mm=np.minimum(columns.get("viewer.eye.field_stop_mm", np.inf), seen["image_mm"]), eyepiece_focal_mm=focal
    )
    bright = np.maximum(face, 1e-6)
    pupil = pupil_diameter_mm(luminance_cd_m2=bright, field_deg=angle)
    seen_cd = seen_luminance_cd_m2(
        face_cd_m2=face,
        transmission=columns.get("viewer.eye.transmission", 1.0),
        cone_sine=sine,
        eyepiece_focal_mm=focal,
        pupil_mm=pupil,
    )
    return np.maximum(seen_cd, 1e-6), angle
