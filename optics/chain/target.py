"""The light on the target: center, mean, least and evenness over the field of view, for every design at once."""

from dataclasses import dataclass

import numpy as np

from optics.chain.columns import Columns
from optics.chain.light import Light, medium_index
from optics.image.chip import diagonal_mm
from optics.image.field import field_half_angle_deg, field_radius_mm
from optics.image.objective import apparent_distance_mm, image_distance_mm
from optics.image.tip import reduced_path_mm
from optics.scene.field import field_irradiance
from optics.spectrum import GRID_NM, integral, luminous_flux_lm
from optics.units import deg_from_rad, m2_from_mm2

UVA_NM = (320.0, 400.0)


@dataclass(frozen=True, slots=True)
class Lit:
    """Spectral irradiance at the center of the field [design, wavelength] in W/m2/nm, and the numbers."""

    center_w_m2_nm: np.ndarray
    value: dict[str, np.ndarray]


def field_of_view(columns: Columns) -> dict[str, np.ndarray]:
    """Where the objective focuses and how wide it sees: numbers [design], nan without an image."""
    index, depth = medium_index(columns), pupil_depth_mm(columns)
    image = columns.has("image.objective.focal_mm")
    focal = columns.get("image.objective.focal_mm", 1.0)
    focus = apparent_distance_mm(
        distance_mm=columns.get("image.objective.focus_mm", 10.0), pupil_depth_mm=depth, index=index
    )
    behind = image_distance_mm(focal_mm=focal, focus_mm=focus)
    size = image_size_mm(columns)
    half = np.zeros(columns.count)
    for mapping, rows in columns.split("image.objective.mapping"):
        half[rows] = field_half_angle_deg(
            image_mm=np.where(image, size, 0.5)[rows], image_distance_mm=behind[rows], mapping=mapping or "tan"
        )
    half = np.minimum(half, 89.9)
    radius = field_radius_mm(
        half_angle_deg=half, distance_mm=columns.get("scene.target.distance_mm", 1.0), pupil_depth_mm=depth, index=index
    )
    inside = 2 * deg_from_rad(np.arcsin(np.sin(np.deg2rad(half)) / index))
    absent = np.where(image, 0.0, np.nan)
    return {
        "image_mm": size,
        "focus_from_pupil_mm": focus + absent,
        "image_distance_mm": behind + absent,
        "field_of_view_deg": inside + absent,
        "field_radius_mm": radius + absent,
    }


def pupil_depth_mm(columns: Columns) -> np.ndarray:
    """Entrance pupil behind the distal face, glass of a viewing tip included as its reduced path."""
    glass = reduced_path_mm(
        glass_path_mm=columns.get("image.tip.glass_path_mm", 0.0), index=columns.get("image.tip.index", 1.0)
    )
    return columns.get("image.objective.pupil_depth_mm", 0.0) + glass


def image_size_mm(columns: Columns) -> np.ndarray:
    """Diameter of the image: of the bundle's cores, or the diagonal of a chip [design], nan without one."""
    size = columns["image.bundle.diameter_mm"].copy()
    chip = columns.has("image.chip.pixel_um")
    if chip.any():
        size[chip] = diagonal_mm(
            columns=columns["image.chip.columns"][chip],
            rows=columns["image.chip.rows"][chip],
            pixel_um=columns["image.chip.pixel_um"][chip],
        )
    return size


def target(columns: Columns, lit: Light, ports: dict[str, np.ndarray], seen: dict[str, np.ndarray]) -> Lit:
    """Illuminance over the field of view of every design that has a target."""
    wavelengths = lit.beam.power_w_nm.shape[-1]
    names = (
        "center_lux",
        "mean_lux",
        "min_lux",
        "evenness",
        "unlit_fraction",
        "center_w_m2",
        "first_lit_mm",
        "uva_w_m2",
    )
    value = {name: np.full(columns.count, np.nan) for name in names}
    center = np.zeros((columns.count, wavelengths))
    rows = np.flatnonzero(columns.has("scene.target.distance_mm"))
    if rows.size == 0:
        return Lit(center, value)
    medium = medium_index(columns)[rows]
    edges = np.minimum(lit.beam.sine2_edges[rows] / medium[:, None] ** 2, 1.0)
    field = np.where(np.isnan(seen["field_radius_mm"][rows]), 1.0, seen["field_radius_mm"][rows])
    light = field_irradiance(
        port_x_mm=ports["x_mm"][rows],
        port_y_mm=ports["y_mm"][rows],
        port_radius_mm=ports["radius_mm"][rows],
        sine2_edges=edges,
        distance_mm=columns["scene.target.distance_mm"][rows],
        field_radius_mm=field,
    )
    lumens = luminous_flux_lm(lit.beam.power_w_nm[rows])
    over = light.under(lumens)
    center[rows] = np.einsum("db,dbw->dw", light.center_per_mm2, lit.beam.power_w_nm[rows]) / m2_from_mm2(1.0)
    has_field = ~np.isnan(seen["field_radius_mm"][rows])
    value["center_lux"][rows] = over.center_lux
    for name, found in (
        ("mean_lux", over.mean_lux),
        ("min_lux", over.least_lux),
        ("evenness", over.evenness),
        ("unlit_fraction", over.unlit_share),
    ):
        value[name][rows] = np.where(has_field, found, np.nan)
    value["first_lit_mm"][rows] = over.first_lit_mm
    value["center_w_m2"][rows] = integral(center[rows])
    uva = (UVA_NM[0] <= GRID_NM) & (UVA_NM[1] >= GRID_NM)
    value["uva_w_m2"][rows] = integral(np.where(uva, center[rows], 0.0))
    return Lit(center, value)
