"""Where one design shows what detail: near, at work, far, and at the edge of the field."""

from dataclasses import dataclass, replace

import numpy as np

from optics.chain.columns import columns
from optics.chain.cone import medium_index
from optics.chain.detail import upper_lp_mm
from optics.chain.evaluate import Figures
from optics.chain.target import pupil_depth_mm
from optics.fiberscope import Fiberscope
from optics.report.views import exit_cone
from optics.scene.irradiance import plane_irradiance_w_m2
from optics.study.sharper_curves import Way, needed_mtf, numbered, product_mtf, way_of
from optics.study.working_range import at_distances
from optics.units import rad_from_deg
from optics.viewer.detail import largest_passing
from optics.viewer.off_axis import edge_acceptance_ratio, edge_cone, edge_light_ratio, edge_snr

RIM = np.linspace(0.0, 2.0 * np.pi, 48, endpoint=False)


@dataclass(frozen=True, slots=True)
class Place:
    """One place of the target: near, work, far or edge; 0: nothing is resolved; None: it has no such number.

    At the edge: bars in the worse of both directions, `snr` at the darkest point of the rim.
    """

    name: str
    distance_mm: float
    resolved_lp_mm: float
    limited_by: str | None
    lux: float
    snr: float | None


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
