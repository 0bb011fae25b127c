"""What the viewer makes of one design's image: its signal and pixels, the smallest round spot, and how a single crack arrives."""

from dataclasses import dataclass

import numpy as np

from optics.chain.columns import columns
from optics.chain.detail import upper_lp_mm
from optics.chain.evaluate import evaluate
from optics.fiberscope import Fiberscope
from optics.spec import positive
from optics.study.sharper_curves import Way, numbered, product_mtf, repeated, way_of
from optics.units import Numbers, mm_from_um, per_um_from_lp_mm, um_from_mm
from optics.viewer.camera import LEAST_PIXELS_PER_PITCH, WORST_PIXELS_PER_PITCH, beat_lp_mm
from optics.viewer.eye import angular_pitch_arcmin, eyepiece_magnification
from optics.viewer.spots import smallest_spot_um

NODES, MOST_NODES = 200, 4000  # of frequency
WAVE_NODES = 12  # to each turn of a wide line's own wave
TURNS_DEG = np.linspace(0.0, 30.0, 31)  # of the camera against the cores: all that differ


@dataclass(frozen=True, slots=True)
class Viewing:
    """What the viewer makes of the image; None where that viewer has no such number.

    `pixels`: fewer than 2.31 a pitch beat with the cores, `even_relay_magnification` would give that; `beat_mm`: period of the
    coarsest beat at the target, at the worst turn. `spot_mm`: the smallest round spot that counted light tells from its surround.
    """

    viewer: str
    snr: float | None
    exposure_s: float | None
    frame_hz: float | None
    well_share: float | None
    pixels_per_pitch: float | None
    least_pixels_per_pitch: float
    worst_pixels_per_pitch: float
    even_relay_magnification: float | None
    beat_mm: float | None
    spot_mm: float | None
    eyepiece_magnification: float | None
    angular_pitch_arcmin: float | None
    seen_cd_m2: float | None


@dataclass(frozen=True, slots=True)
class Crack:
    """A single dark line of the target's contrast: what share of that is left, whether it is seen, and two a width apart."""

    width_mm: float
    kept_share: float
    seen: bool
    parted: bool


def viewing(fiberscope: Fiberscope) -> Viewing:
    """Numbers of camera, chip or eye. Raises OutOfRange without an image."""
    scope = numbered(fiberscope)
    way = way_of(columns([scope]))
    value = {name: float(found[0]) for name, found in way.value.items() if np.ndim(found) and len(found) == 1}
    parts, pitch = way.parts, float(way.parts.pitch_um[0])
    number = {name: value[name] if np.isfinite(value[name]) else None for name in ("snr", "exposure_s")}
    pixels = value["pixels_per_pitch"] if np.isfinite(value["pixels_per_pitch"]) else None
    camera = None if parts.eye[0] else scope.viewer.camera if parts.bundle[0] else scope.image.chip
    eye = scope.viewer.eye if parts.eye[0] else None
    few = pixels is not None and pixels < LEAST_PIXELS_PER_PITCH
    return Viewing(
        viewer="eye" if eye else "camera" if parts.bundle[0] else "chip",
        **number,
        frame_hz=1.0 / number["exposure_s"] if number["exposure_s"] else None,
        well_share=_well_share(way, value["signal_e"], camera.full_well_e) if camera else None,
        pixels_per_pitch=pixels,
        least_pixels_per_pitch=float(LEAST_PIXELS_PER_PITCH),
        worst_pixels_per_pitch=float(WORST_PIXELS_PER_PITCH),
        even_relay_magnification=float(camera.relay_magnification * LEAST_PIXELS_PER_PITCH / pixels) if few else None,
        beat_mm=_beat_mm(way, pitch, pixels) if few else None,
        spot_mm=_spot_mm(way),
        eyepiece_magnification=float(eyepiece_magnification(eyepiece_focal_mm=eye.eyepiece_focal_mm)) if eye else None,
        angular_pitch_arcmin=float(angular_pitch_arcmin(pitch_um=pitch, eyepiece_focal_mm=eye.eyepiece_focal_mm))
        if eye
        else None,
        seen_cd_m2=value["seen_cd_m2"] if eye else None,
    )


def _well_share(way: Way, signal_e: float, full_well_e: float) -> float:
    """How full a pixel inside a core is."""
    pixel = float(way.parts.pixel_um[0])
    lit = max(np.pi / 4 * (float(way.parts.core_um[0]) / pixel) ** 2, 1.0) if way.parts.bundle[0] else 1.0
    return signal_e / lit / full_well_e


def _beat_mm(way: Way, pitch_um: float, pixels: float) -> float | None:
    """Period at the target of the coarsest beat of pixels and cores, whatever their turn; None where none is in sight."""
    beats = beat_lp_mm(pitch_um=pitch_um, pixels_per_pitch=pixels, turn_deg=TURNS_DEG) * float(way.size_ratio[0])
    return float(1.0 / beats[beats > 0].min()) if (beats > 0).any() else None


# Single things


def _spot_mm(way: Way) -> float | None:
    """The smallest round spot, at the target; None for an eye, in the dark, and where it would be wider than the image."""
    parts = way.parts
    if parts.eye[0] or not parts.snr[0] > 0:
        return None
    frequency = np.linspace(0.0, float(upper_lp_mm(parts, None)[0]), NODES + 1)[1:]
    found = smallest_spot_um(
        contrast=float(parts.contrast[0]),
        snr=float(parts.snr[0]),
        cell_um2=float(parts.cell_um2[0]),
        threshold_snr=float(parts.threshold_snr[0]),
        frequency_lp_mm=frequency,
        mtf=product_mtf(repeated(parts, NODES), frequency),
    )
    return float(mm_from_um(found) / way.size_ratio[0]) if found < um_from_mm(way.seen["image_mm"][0]) else None


def crack(fiberscope: Fiberscope, width_mm: float) -> Crack:
    """How a single dark line of a stated width arrives.

    Its deepest point keeps 2 integral of MTF(f) sin(pi w f)/(pi f) df of the line's contrast: the line spread function over
    its width, the mean over its places between cores. Raises OutOfRange without an image, or a width of 0 or less.
    References: closed_form (Fourier transform of a slit).
    """
    positive(width_mm=width_mm)
    scope = numbered(fiberscope)
    table = columns([scope])
    figures, way = evaluate(table), way_of(table)
    width_um, upper = um_from_mm(width_mm) * float(way.size_ratio[0]), float(upper_lp_mm(way.parts, "lattice")[0])
    nodes = int(np.clip(WAVE_NODES * width_um * per_um_from_lp_mm(upper), NODES, MOST_NODES))
    frequency = np.linspace(0.0, upper, nodes + 1)
    mtf = product_mtf(repeated(way.parts, nodes + 1), frequency)
    gap, line = (float(np.nan_to_num(figures[name][0])) for name in ("smallest_gap_mm", "smallest_line_mm"))
    kept = kept_contrast_share(width_um=width_um, frequency_lp_mm=frequency, mtf=mtf)
    return Crack(width_mm, kept, 0 < line <= width_mm, 0 < gap <= width_mm)


def kept_contrast_share(*, width_um: Numbers, frequency_lp_mm: np.ndarray, mtf: np.ndarray) -> float:
    """Share of a line's contrast that is left at its middle; trapezoid over frequencies from 0 on.

    >>> f = np.linspace(0.0, 2000.0, 4001)
    >>> round(kept_contrast_share(width_um=1.0, frequency_lp_mm=f, mtf=np.exp(-((f / 100) ** 2))), 3)
    0.176
    """
    per_um = per_um_from_lp_mm(np.asarray(frequency_lp_mm, float))
    wave = np.asarray(mtf, float) * width_um * np.sinc(width_um * per_um)
    return float(2.0 * np.trapezoid(wave, per_um))
