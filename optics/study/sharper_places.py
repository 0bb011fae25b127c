"""Where and how one design shows detail: near, at work, far, at the edge of the field; as a single crack, as a round spot; to its viewer."""

from dataclasses import dataclass, replace

import numpy as np

from optics.chain.columns import columns
from optics.chain.detail import _upper_lp_mm as upper_lp_mm
from optics.chain.evaluate import Figures, evaluate
from optics.chain.light import medium_index
from optics.chain.target import pupil_depth_mm
from optics.fiberscope import Fiberscope
from optics.report.views import exit_cone
from optics.scene.irradiance import plane_irradiance_w_m2
from optics.spec import positive
from optics.study.sharper_curves import Way, needed_mtf, numbered, product_mtf, repeated, way_of
from optics.study.working_range import at_distances
from optics.units import Numbers, mm_from_um, per_um_from_lp_mm, rad_from_deg, um_from_mm
from optics.viewer.camera import LEAST_PIXELS_PER_PITCH, WORST_PIXELS_PER_PITCH, beat_lp_mm
from optics.viewer.detail import largest_passing
from optics.viewer.eye import angular_pitch_arcmin, eyepiece_magnification
from optics.viewer.off_axis import edge_acceptance_ratio, edge_cone, edge_light_ratio, edge_snr
from optics.viewer.spots import smallest_spot_um

NODES, MOST_NODES = 200, 4000  # of frequency
WAVE_NODES = 12  # to each turn of a wide line's own wave
RIM = np.linspace(0.0, 2.0 * np.pi, 48, endpoint=False)
TURNS_DEG = np.linspace(0.0, 30.0, 31)  # of the camera against the cores: all that differ


@dataclass(frozen=True, slots=True)
class Place:
    """One place of the target: `name` near, work, far or edge; what is resolved there, 0 for nothing; None where it has no such number.

    At the edge: bars in the worse of both directions, `snr` at the darkest point of the rim.
    """

    name: str
    distance_mm: float
    resolved_lp_mm: float
    limited_by: str | None
    lux: float
    snr: float | None


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
    """A single dark line of the target's contrast: the share of it that is left in the image, whether it is seen, whether two such lines a width apart are told apart."""

    width_mm: float
    kept_share: float
    seen: bool
    parted: bool


# Near, far and at the edge


def places(fiberscope: Fiberscope) -> tuple[Place, ...]:
    """Near end, working distance, far end of the range (as in `working_range.over_distance`), then the edge of the field.

    No edge along a bore, on a tilted target, or where the middle is dark. Raises OutOfRange without an image.
    """
    scope = numbered(fiberscope)
    target, table = scope.scene.target, columns([scope])
    away = [target.near_mm or target.distance_mm / 2, target.distance_mm, target.far_mm or 2 * target.distance_mm]
    figures = at_distances(table, np.array(away))
    found = [_place(name, figures, row, away[row]) for row, name in enumerate(("near", "work", "far"))]
    edge = None if target.form == "bore" or target.tilt_deg != 0 else _edge(way_of(table), target.distance_mm)
    return (*found, edge) if edge else tuple(found)


def _place(name: str, figures: Figures, row: int, distance_mm: float) -> Place:
    snr = float(figures["snr"][row])
    return Place(
        name,
        distance_mm,
        float(np.nan_to_num(figures["resolved_lp_mm"][row])),
        figures.limited_by()[row] if figures["resolved_lp_mm"][row] > 0 else None,
        float(figures["center_lux"][row]),
        snr if np.isfinite(snr) else None,
    )


def _edge(way: Way, distance_mm: float) -> Place | None:
    """The edge of the field on a facing target: narrower cone, less light, less acceptance, the mapping's own scale.

    Crosstalk is taken as on axis; no aberration of the lens's own is added.
    """
    center = float(way.value["center_lux"][0])
    if center <= 0:
        return None
    mapping, index = str(way.table.texts("image.objective.mapping")[0] or "tan"), float(medium_index(way.table)[0])
    inside = rad_from_deg(way.seen["field_of_view_deg"][0]) / 2
    half = float(np.arcsin(np.minimum(index * np.sin(inside), 1.0)))
    cone, parts = edge_cone(half_angle_deg=np.rad2deg(half), mapping=mapping), way.parts
    lux = _rim_lux(way, distance_mm)
    ratio = lux / center * float(edge_light_ratio(half_angle_deg=np.rad2deg(half), mapping=mapping))
    if parts.bundle[0]:
        ratio *= float(
            edge_acceptance_ratio(
                height_mm=way.seen["image_mm"][0] / 2,
                exit_pupil_mm=way.table.get("image.objective.exit_pupil_mm", np.inf)[0],
                core_na=way.table["image.bundle.na"][0],
                cone_sine=min(0.5 / float(parts.f_number[0]), 1.0),
            )
        )
    spread = way.table.get("image.bundle.transmission_spread", 0.0)
    shot = np.minimum(parts.even_snr**2 / np.maximum(np.nan_to_num(way.value["signal_e"]), 1e-12), 1.0)
    snr = edge_snr(signal_ratio=ratio, even_snr=parts.even_snr, shot_share=shot, transmission_spread=spread)
    found = []
    for narrowed, scale in zip((cone.meridional_ratio, cone.sagittal_ratio), _scales(way, half, index, mapping)):
        here = replace(
            parts,
            f_number=parts.f_number / narrowed,
            blur_um=parts.blur_um * narrowed,
            snr=snr,
            seen_cd_m2=np.maximum(parts.seen_cd_m2 * ratio, 1e-6),
        )
        margin = lambda f, here=here: product_mtf(here, f) - needed_mtf(here, f)  # noqa: E731
        found.append(float(largest_passing(margin, upper_lp_mm=upper_lp_mm(here, None))[0]) * scale)
    resolved = min(found)
    if resolved < 1.0 / (2.0 * float(way.seen["field_radius_mm"][0])):
        resolved = 0.0
    return Place("edge", distance_mm, resolved, None, lux, None if parts.eye[0] else float(snr[0]))


def _scales(way: Way, half: float, index: float, mapping: str) -> tuple[float, float]:
    """Image over target at the edge, along the radius and across it."""
    behind, depth = float(way.seen["image_distance_mm"][0]), float(pupil_depth_mm(way.table)[0])
    away = float(way.table["scene.target.distance_mm"][0])
    inside = np.arcsin(np.sin(half) / index)
    radius = depth * np.tan(half) + away * np.tan(inside)
    grows = depth / np.cos(half) ** 2 + away * np.cos(half) / (index * np.cos(inside) ** 3)
    height, rises = (np.tan(half), 1.0 / np.cos(half) ** 2) if mapping == "tan" else (half, 1.0)
    return float(behind * rises / grows), float(behind * height / radius)


def _rim_lux(way: Way, distance_mm: float) -> float:
    """The least illuminance around the rim of the field."""
    radius = float(way.seen["field_radius_mm"][0])
    lux = plane_irradiance_w_m2(
        ports=way.ports,
        cone=exit_cone(way.lit, float(medium_index(way.table)[0])),
        power_w=float(way.lit.value["delivered_lm"][0]),
        distance_mm=distance_mm,
        tilt_deg=0.0,
        u_mm=radius * np.cos(RIM),
        v_mm=radius * np.sin(RIM),
    )
    return float(np.maximum(lux, 0.0).min())


# The viewer


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
    0.177
    """
    per_um = per_um_from_lp_mm(np.asarray(frequency_lp_mm, float))
    wave = np.asarray(mtf, float) * width_um * np.sinc(width_um * per_um)
    return float(2.0 * np.trapezoid(wave, per_um))
