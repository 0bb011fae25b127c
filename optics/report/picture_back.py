"""The way back of one design, as the rendering takes it: lens, cores, sensor, and the level of a lit pixel."""

from dataclasses import dataclass

import numpy as np

from optics.chain.columns import Columns, columns
from optics.chain.cone import medium_index
from optics.chain.evaluate import evaluate
from optics.chain.fit import fit
from optics.chain.light import Light, light
from optics.chain.solve import solved
from optics.chain.target import field_of_view, port_objects, pupil_depth_mm, target
from optics.chain.way_back import Parts, way_back
from optics.fiberscope import Fiberscope
from optics.image.contrast import aberration_mtf, cutoff_lp_mm, diffraction_mtf
from optics.image.field import Mapping
from optics.image.lattice import core_area_fraction
from optics.image.tip import mirror_image
from optics.scene.ports import Port
from optics.spectrum import GRID_NM, chromaticity, luminous_flux_lm, on_grid
from optics.units import AnyUnit

LENS_NODES = 400
# CIE 1931 XYZ to linear red, green, blue of sRGB (source: iec_61966_2_1)
RGB = np.array([[3.2406, -1.5372, -0.4986], [-0.9689, 1.8758, 0.0415], [0.0557, -0.2040, 1.0570]])


@dataclass(frozen=True, slots=True)
class Back:
    """Numbers of one design.

    `lit_level`: electrons of a pixel (an eye: cd/m2) wholly inside a core's disc, of the target's own reflectance under
    `lit_lux` (at the middle; where that is dark, the field's mean), on axis, in the design's exposure. Parts that a
    design has not are 0 (cores, pixels) or infinite (an eye's well).
    """

    bundle: bool
    eye: bool
    mirrored: bool
    # geometry
    image_mm: float
    image_distance_mm: float
    magnification: float
    mapping: Mapping
    distance_mm: float
    pupil_depth_mm: float
    exit_pupil_mm: float
    index: float
    # lens
    focal_mm: float
    f_number: float
    focus_from_pupil_mm: float
    cone_sine: float
    lens_lp_mm: np.ndarray
    lens_mtf: np.ndarray
    # cores
    pitch_um: float
    core_um: float
    core_na: float
    dead_fraction: float
    transmission_spread: float
    exchange_share: np.ndarray
    veil_ratio: float
    # sensor
    pixel_um: float
    rows: int
    columns: int
    full_well_e: float
    dark_noise_e: float
    gain_dn_e: float
    exposure_s: float
    lit_level: AnyUnit
    lit_lux: float
    middle_lit: bool
    color_filter: bool
    tint: tuple[float, float, float]
    # the light that falls
    ports: tuple[Port, ...]
    lit: Light
    # what the chain says of detail
    resolved_lp_mm: float
    lattice_limit_lp_mm: float
    limited_by: str | None


def back_of(fiberscope: Fiberscope) -> Back:
    """Everything that does not depend on the subject, by the chain's own stages."""
    table = solved(columns([fiberscope]))
    figures, lit, seen = evaluate(table), light(table), field_of_view(table)
    value = {name: float(found[0]) for name, found in figures.value.items()}
    placed = fit(table, seen["image_mm"])[1]
    landed = target(table, lit, placed, seen)
    lux = value["center_lux"]
    falling, lux = (landed.center_w_m2_nm, lux) if lux > 0 else _even(lit, value)
    parts, numbers = way_back(table, falling, seen)
    bundle, eye = bool(parts.bundle[0]), bool(parts.eye[0])
    index, depth = float(medium_index(table)[0]), float(pupil_depth_mm(table)[0])
    lens_lp_mm, lens_mtf = _lens(parts)
    sensor = _sensor(table, parts, bundle, eye)
    exposure = value["exposure_s"]
    level = _lit_level(table, parts, sensor, bundle, eye)
    if not eye:
        level *= exposure / float(numbers["exposure_s"][0])
    number = {
        name: float(table.get(f"image.bundle.{name}", 0.0)[0])
        for name in ("na", "dead_fraction", "transmission_spread")
    }
    tip = fiberscope.image.tip
    return Back(
        bundle=bundle,
        eye=eye,
        mirrored=tip is not None and mirror_image(view_deg=tip.view_deg, reflections=tip.reflections),
        image_mm=float(min(seen["image_mm"][0], table.get("viewer.eye.field_stop_mm", np.inf)[0] if eye else np.inf)),
        image_distance_mm=value["image_distance_mm"],
        magnification=value["image_over_target_ratio"],
        mapping=fiberscope.image.objective.mapping,
        distance_mm=fiberscope.scene.target.distance_mm,
        pupil_depth_mm=depth,
        exit_pupil_mm=float(table.get("image.objective.exit_pupil_mm", np.inf)[0]),
        index=index,
        focal_mm=fiberscope.image.objective.focal_mm,
        f_number=fiberscope.image.objective.f_number,
        focus_from_pupil_mm=value["focus_from_pupil_mm"],
        cone_sine=float(min(0.5 / parts.f_number[0], 1.0)),
        lens_lp_mm=lens_lp_mm,
        lens_mtf=lens_mtf,
        pitch_um=float(parts.pitch_um[0]),
        core_um=float(parts.core_um[0]),
        core_na=number["na"],
        dead_fraction=number["dead_fraction"],
        transmission_spread=number["transmission_spread"],
        exchange_share=parts.exchange_share[0],
        veil_ratio=float(parts.veil_ratio[0]) if bundle else 0.0,
        **sensor,
        exposure_s=exposure,
        lit_level=level,
        lit_lux=lux,
        middle_lit=value["center_lux"] > 0,
        color_filter=not bundle and fiberscope.image.chip.color_filter,
        tint=_tint(fiberscope, falling[0]),
        ports=port_objects({name: found[0] for name, found in placed.items()}),
        lit=lit,
        resolved_lp_mm=value["resolved_lp_mm"],
        lattice_limit_lp_mm=value["lattice_limit_lp_mm"],
        limited_by=figures.limited_by()[0],
    )


def _even(lit: Light, value: dict[str, float]) -> tuple[np.ndarray, float]:
    """Where the middle is dark: the delivered spectrum spread evenly, at the field's mean (1 lux in the dark)."""
    spectrum = lit.beam.spectrum_w_nm
    lux = max(np.nan_to_num(value["mean_lux"]), 1.0)
    return spectrum * (lux / np.maximum(luminous_flux_lm(spectrum), 1e-300))[:, None], lux


def _lens(parts: Parts) -> tuple[np.ndarray, np.ndarray]:
    """Contrast of diffraction and aberration in the viewer's colors, from 0 to where it ends."""
    end = float(cutoff_lp_mm(f_number=parts.f_number, wavelength_nm=parts.color_nm.min(axis=-1))[0])
    frequency = np.linspace(0.0, end, LENS_NODES)
    by = {"f_number": parts.f_number[0], "wavelength_nm": parts.color_nm[0], "frequency_lp_mm": frequency[:, None]}
    mtf = diffraction_mtf(**by) * aberration_mtf(wavefront_error_nm=parts.wavefront_error_nm[0], **by)
    return frequency, mtf @ parts.color_share[0]


def _sensor(table: Columns, parts: Parts, bundle: bool, eye: bool) -> dict:
    """Pixels at the image, and the well and noise of one."""
    if eye:
        return {"pixel_um": 0.0, "rows": 0, "columns": 0, "full_well_e": np.inf, "dark_noise_e": 0.0, "gain_dn_e": 1.0}
    at = "viewer.camera" if bundle else "image.chip"
    noise = {name: float(table[f"{at}.{name}"][0]) for name in ("full_well_e", "dark_noise_e", "gain_dn_e")}
    count = {name: 0 if bundle else int(table[f"image.chip.{name}"][0]) for name in ("rows", "columns")}
    return {"pixel_um": float(parts.pixel_um[0]), **count, **noise}


def _lit_level(table: Columns, parts: Parts, sensor: dict, bundle: bool, eye: bool) -> float:
    """Electrons of a pixel inside a core's disc (of a pixel of the chip), out of the chain's signal to noise.

    The inverse of SNR = S/sqrt(S + n (sigma_d^2 + 1/(12 K^2))) for one core's light S on its n pixels, cores all alike.
    For an eye the luminance seen over the share of the face that shines.
    """
    core, pitch = float(parts.core_um[0]), float(parts.pitch_um[0])
    if eye:
        return float(parts.seen_cd_m2[0]) / float(core_area_fraction(core_um=core, pitch_um=pitch))
    snr, pixel = float(parts.even_snr[0]), sensor["pixel_um"]
    pixels = max(float(parts.cell_um2[0]) / pixel**2, 1.0)
    dark = pixels * (sensor["dark_noise_e"] ** 2 + 1.0 / (12.0 * sensor["gain_dn_e"] ** 2))
    signal = 0.5 * snr * (snr + np.sqrt(snr * snr + 4.0 * dark))
    return max(float(signal / (np.pi / 4 * core**2 / pixel**2 if bundle else 1.0)), 1e-12)


def _tint(fiberscope: Fiberscope, falling_w_m2_nm: np.ndarray) -> tuple[float, float, float]:
    """Color of the target beside a white one in the same light, as an eye or a color camera balances it; grey without color."""
    image, viewer = fiberscope.image, fiberscope.viewer
    seer = image.chip if image.form == "chip" else None if viewer.form == "eye" else viewer.camera
    if (seer is not None and not seer.color_filter) or luminous_flux_lm(falling_w_m2_nm) <= 0:
        return (1.0, 1.0, 1.0)
    white, colored = (
        _rgb(power) for power in (falling_w_m2_nm, falling_w_m2_nm * on_grid(fiberscope.scene.target.reflectance))
    )
    share = np.clip(colored / np.where(white > 0, white, np.inf), 0.0, None)
    return tuple(float(part) for part in share / max(share.max(), 1e-12))


def _rgb(power_w_m2_nm: np.ndarray) -> np.ndarray:
    color, luminous = chromaticity(wavelength_nm=GRID_NM, power=power_w_m2_nm), luminous_flux_lm(power_w_m2_nm)
    x, y = float(color.x_share), float(color.y_share)
    return RGB @ np.array([x / y, 1.0, (1.0 - x - y) / y]) * float(luminous)
