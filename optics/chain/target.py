"""The light on the target: center, mean, least and evenness over the field of view, for every design at once."""

from dataclasses import dataclass

import numpy as np

from optics.chain.columns import Columns
from optics.chain.cone import medium_index
from optics.chain.light import Light
from optics.image.chip import diagonal_mm
from optics.image.field import field_half_angle_deg, field_radius_mm
from optics.image.objective import apparent_distance_mm, image_distance_mm
from optics.image.tip import reduced_path_mm
from optics.scene.cover import apparent_thickness_mm
from optics.scene.field import Lighting, field_irradiance, lit_tangents
from optics.scene.ports import Annulus, Crescent, Disc, Port
from optics.scene.surface import bore_field, plane_field, seen_wall_mm
from optics.spectrum import GRID_NM, integral, luminous_flux_lm
from optics.units import deg_from_rad, m2_from_mm2

UVA_NM = (320.0, 400.0)
NEAREST_MM = 1e-6  # a bore without a near end is looked at from the tip on


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
    away = apparent_distance_mm(
        distance_mm=columns.get("scene.target.distance_mm", 1.0), pupil_depth_mm=depth, index=index
    )
    absent = np.where(image, 0.0, np.nan)
    return {
        "image_mm": size,
        "focus_from_pupil_mm": focus + absent,
        "image_distance_mm": behind + absent,
        "image_over_target_ratio": behind / away + absent,
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
    names = (
        "center_lux",
        "mean_lux",
        "min_lux",
        "evenness",
        "unlit_fraction",
        "center_w_m2",
        "first_lit_mm",
        "uva_w_m2",
        "fully_lit_mm",
        "nearest_port_mm",
        "port_gap_mm",
    )
    value = {name: np.full(columns.count, np.nan) for name in names}
    center = np.zeros((columns.count, lit.beam.power_w_nm.shape[-1]))
    there = columns.has("scene.target.distance_mm")
    slow = there & _needs_surface(columns, ports)
    for rows, lighting in ((np.flatnonzero(there & ~slow), _facing), (np.flatnonzero(slow), _surface)):
        if rows.size == 0:
            continue
        power = lit.beam.power_w_nm[rows]
        edges = np.minimum(lit.beam.sine2_edges[rows] / medium_index(columns)[rows, None] ** 2, 1.0)
        radius = seen["field_radius_mm"][rows]
        field = np.where(np.isnan(radius), 1.0, radius)  # a guide without an image: only the center counts
        placed = {name: found[rows] for name, found in ports.items()}
        behind = _behind_cover_mm(columns, lit)[rows]
        per_mm2, over = lighting(columns.take(rows), placed, edges, luminous_flux_lm(power), field, behind)
        center[rows] = np.einsum("db,dbw->dw", per_mm2, power) / m2_from_mm2(1.0)
        value["center_lux"][rows] = over.center_lux
        value["first_lit_mm"][rows] = np.maximum(over.first_lit_mm - behind, 0.0)
        over_field = {"mean_lux": over.mean_lux, "min_lux": over.least_lux, "evenness": over.evenness}
        for name, found in {**over_field, "unlit_fraction": over.unlit_share}.items():
            value[name][rows] = np.where(np.isnan(radius), np.nan, found)
        value["fully_lit_mm"][rows] = np.maximum(_fully_lit_mm(placed, edges, luminous_flux_lm(power)) - behind, 0.0)
        away = np.where(placed["radius_mm"] > 0, np.hypot(placed["x_mm"], placed["y_mm"]), np.inf)
        value["nearest_port_mm"][rows] = away.min(axis=1)
        value["port_gap_mm"][rows] = (away - placed["radius_mm"]).min(axis=1)
        value["center_w_m2"][rows] = integral(center[rows])
        value["uva_w_m2"][rows] = integral(center[rows] * ((UVA_NM[0] <= GRID_NM) & (UVA_NM[1] >= GRID_NM)))
    return Lit(center, value)


def _fully_lit_mm(ports: dict[str, np.ndarray], edges: np.ndarray, flux: np.ndarray) -> np.ndarray:
    """From where on every port lights the axis, by the outermost light: (s + a)/tan alpha of the farthest port edge."""
    _, tangent = lit_tangents(sine2_edges=edges, flux=flux)
    reach = np.where(ports["radius_mm"] > 0, np.hypot(ports["x_mm"], ports["y_mm"]) + ports["radius_mm"], 0.0).max(
        axis=1
    )
    return np.where(tangent > 0, reach / np.where(tangent > 0, tangent, 1.0), np.inf)


def _needs_surface(columns: Columns, ports: dict[str, np.ndarray]) -> np.ndarray:
    """Designs whose target does not face all ports: a tilted plane, a bore, tilted ports."""
    tilted = (ports["tilt_deg"] != 0).any(axis=1)
    return tilted | (columns.texts("scene.target.form") == "bore") | (columns.get("scene.target.tilt_deg", 0.0) != 0)


def _behind_cover_mm(columns: Columns, lit: Light) -> np.ndarray:
    """How far the ports seem to stand behind the distal face, which is the cover's outer one [design]; 0 without a cover.

    Taken for a ray in the middle of the flux: over a cone it varies by a few percent of the cover's thickness.
    """
    cover = columns.has("scene.cover.index")
    if not cover.any():
        return np.zeros(columns.count)
    deep = apparent_thickness_mm(
        thickness_mm=columns.get("scene.cover.thickness_mm", 0.0),
        na=lit.value["exit_na"] / np.sqrt(2),
        index=columns.get("scene.cover.index", 1.5),
        outside_index=medium_index(columns),
    )
    return np.where(cover, deep, 0.0)


def _facing(columns, ports, edges, lumens, field_mm, behind_mm):
    """A plane that faces the ports: all designs at once. Returns the center per unit flux [design, bin] and the field."""
    light = field_irradiance(
        port_x_mm=ports["x_mm"],
        port_y_mm=ports["y_mm"],
        port_radius_mm=ports["radius_mm"],
        sine2_edges=edges,
        distance_mm=columns["scene.target.distance_mm"] + behind_mm,
        field_radius_mm=field_mm,
    )
    return light.center_per_mm2, light.under(lumens)


def _surface(columns, ports, edges, lumens, field_mm, behind_mm):
    """A tilted plane or a bore wall, or tilted ports: design by design, distances counted from the ports."""
    per_mm2, found = np.zeros_like(lumens), {name: np.zeros(columns.count) for name in Lighting.__slots__}
    distance = columns["scene.target.distance_mm"] + behind_mm
    depth = np.maximum(pupil_depth_mm(columns) - behind_mm, 0.0)
    for form, rows in columns.split("scene.target.form"):
        common = {
            "ports": [port_objects({name: all_of[row] for name, all_of in ports.items()}) for row in rows],
            "sine2_edges": edges[rows],
            "flux_lm": lumens[rows],
            "distance_mm": distance[rows],
        }
        if form == "bore":
            bore = columns["scene.target.bore_mm"][rows]
            start, end = seen_wall_mm(
                bore_mm=bore,
                field_radius_mm=field_mm[rows],
                distance_mm=distance[rows],
                pupil_depth_mm=depth[rows],
                near_mm=(columns.get("scene.target.near_mm", NEAREST_MM) + behind_mm)[rows],
                far_mm=np.where(
                    columns.has("scene.target.far_mm"), columns["scene.target.far_mm"] + behind_mm, 2 * distance
                )[rows],
            )
            light = bore_field(**common, bore_mm=bore, from_mm=start, to_mm=end)
        else:
            tilt = columns.get("scene.target.tilt_deg", 0.0)[rows]
            light = plane_field(**common, tilt_deg=tilt, field_radius_mm=field_mm[rows], pupil_depth_mm=depth[rows])
        per_mm2[rows] = light.center_per_mm2
        for name in found:
            found[name][rows] = getattr(light.lighting, name)
    return per_mm2, Lighting(**found)


def port_objects(ports: dict[str, np.ndarray]) -> tuple[Port, ...]:
    """The ports of one design as geometry: round ones, or the ring or crescent that a cut makes of the first."""
    x, radius = ports["x_mm"], ports["radius_mm"]
    if radius[1] < 0:
        inner, outer = float(-radius[1]), float(radius[0])
        return (Crescent(float(x[0]), inner, outer) if x[0] != 0 else Annulus(inner, outer),)
    keys = ("x_mm", "y_mm", "radius_mm", "tilt_deg", "azimuth_deg")
    return tuple(Disc(*(float(ports[key][port]) for key in keys)) for port in np.flatnonzero(radius > 0))
