"""What the pictures show, as plain arrays: target map and spectra here, cross-section and passage next door. No drawing.

Each view is of one design and calls the chain's stages; a design that has no such part gives None.
"""

from dataclasses import dataclass

import numpy as np

from optics.chain.columns import Columns, columns
from optics.chain.cone import medium_index
from optics.chain.evaluate import evaluate
from optics.chain.fit import fit
from optics.chain.light import Light, light
from optics.chain.solve import numbered
from optics.chain.target import field_of_view, port_objects, pupil_depth_mm
from optics.fiberscope import BundleImage, Fiberscope
from optics.image.objective import accepted_fraction, face_irradiance_factor, magnification, working_f_number
from optics.media.face import face_transmission
from optics.media.loss import attenuation_transmission
from optics.report.view_body import Part, PassageView, SectionView, passage_view, section_view
from optics.scene.exit_cone import ExitCone
from optics.scene.irradiance import bore_irradiance_w_m2, plane_irradiance_w_m2, port_reach_mm
from optics.scene.ports import Disc, Port
from optics.scene.surface import seen_wall_mm
from optics.spectrum import GRID_NM, covered, on_grid, photopic_weight
from optics.units import deg_from_rad, m2_from_mm2, rad_from_deg
from optics.viewer.camera import relay_fraction

__all__ = [
    "Part",
    "PassageView",
    "PortMark",
    "SectionView",
    "Spectra",
    "TargetMap",
    "passage_view",
    "section_view",
    "spectra",
    "target_map",
]

MARGIN = 1.25  # the map's half-width over the radius of the field
RIM = np.linspace(0.0, 2 * np.pi, 181)


@dataclass(frozen=True, slots=True)
class PortMark:
    """A port as the map and the section show it: its circle around the objective's axis."""

    x_mm: float
    y_mm: float
    diameter_mm: float


@dataclass(frozen=True, slots=True)
class TargetMap:
    """Illuminance lux[v, u] on the target. On a plane u runs with its tilt, on a bore's wall around it and v is depth.

    `profile_lux` runs along u through the center; the rim of the field of view is (field_u_mm, field_v_mm), a closed
    line on a plane and two depths on a wall; both empty, and the radius None, where the design has no image.
    """

    surface: str
    u_mm: np.ndarray
    v_mm: np.ndarray
    lux: np.ndarray
    center_lux: float
    profile_mm: np.ndarray
    profile_lux: np.ndarray
    field_radius_mm: float | None
    field_u_mm: np.ndarray
    field_v_mm: np.ndarray
    wanted_lux: float | None
    distance_mm: float
    tilt_deg: float
    ports: tuple[PortMark, ...]


def target_map(fiberscope: Fiberscope, points: int = 121) -> TargetMap | None:
    """Fine map of the light on the target, points x points; exact at each. None without a target."""
    fiberscope = numbered(fiberscope)
    if fiberscope.scene is None:
        return None
    table = columns([fiberscope])
    lit, seen = light(table), field_of_view(table)
    ports = port_objects({name: found[0] for name, found in fit(table, seen["image_mm"])[1].items()})
    lumens, cone = float(lit.value["delivered_lm"][0]), exit_cone(lit, float(medium_index(table)[0]))
    radius = float(seen["field_radius_mm"][0])
    target, needs = fiberscope.scene.target, fiberscope.needs
    half = MARGIN * (radius if np.isfinite(radius) else _lit_radius_mm(ports, cone, target.distance_mm))
    shown = {"ports": ports, "cone": cone, "power_w": lumens}  # lumens in, lux out
    if target.form == "bore":
        u, v, lux, rim = _on_wall(table, shown, radius, half, points)
        profile, along, center = u, lux_at(shown, target, u, 0.0), float(np.mean(lux_at(shown, target, u, 0.0)))
    else:
        rim, middle = _rim(table, radius), 0.0
        if rim[0].size:  # a tilted field is an ellipse off the center
            middle, half = (rim[0].min() + rim[0].max()) / 2, MARGIN * max(np.ptp(rim[0]), np.ptp(rim[1])) / 2
        u, v = np.linspace(middle - half, middle + half, points), np.linspace(-half, half, points)
        lux, profile = lux_at(shown, target, u[None, :], v[:, None]), np.linspace(u[0], u[-1], 4 * points + 1)
        along, center = lux_at(shown, target, profile, 0.0), float(lux_at(shown, target, 0.0, 0.0))
    return TargetMap(
        target.form,
        u,
        v,
        lux,
        center,
        profile,
        along,
        radius if np.isfinite(radius) else None,
        *rim,
        needs.target_min_lux or needs.target_center_lux,
        target.distance_mm,
        target.tilt_deg,
        _marks(ports),
    )


def lux_at(shown: dict, target, u_mm, v_mm) -> np.ndarray:
    """Illuminance at points of a plane, or around a bore's wall (u along its turn) at the working distance."""
    if target.form == "bore":
        turn = deg_from_rad(2 * np.asarray(u_mm) / target.bore_mm)
        return bore_irradiance_w_m2(**shown, bore_mm=target.bore_mm, z_mm=target.distance_mm, azimuth_deg=turn)
    return plane_irradiance_w_m2(
        **shown, distance_mm=target.distance_mm, tilt_deg=target.tilt_deg, u_mm=u_mm, v_mm=v_mm
    )


def exit_cone(lit: Light, index: float) -> ExitCone:
    """The first design's cone in the medium in front, weighted by lumens; bins past the horizon hold nothing."""
    edges = np.minimum(lit.beam.sine2_edges[0] / index**2, 1.0)
    flux, wide = np.maximum(lit.beam.bin_lm[0], 0.0), np.diff(edges) > 0
    if flux.sum() <= 0:  # no visible light: the shape of the watts
        flux = np.maximum(lit.beam.bin_w[0], 0.0)
    if flux.sum() <= 0:  # no light at all: any shape serves, as nothing is drawn with it
        flux = np.ones_like(flux)
    return ExitCone(tuple(edges[np.concatenate([[True], wide])]), tuple(flux[wide] / flux[wide].sum()))


def _lit_radius_mm(ports: tuple[Port, ...], cone: ExitCone, distance_mm: float) -> float:
    """How far from the axis light reaches on a facing plane; a very wide cone is cut at four distances."""
    sine2 = cone.lit_sine2_share[1]
    return port_reach_mm(ports) + distance_mm * min(np.sqrt(sine2 / max(1 - sine2, 1e-9)), 4.0)


def _rim(table: Columns, radius: float) -> tuple[np.ndarray, np.ndarray]:
    """Rim of the field of view on a plane: a circle, or the ellipse that its cone cuts from a tilted one."""
    if not np.isfinite(radius):
        return np.empty(0), np.empty(0)
    tilt = rad_from_deg(float(table.get("scene.target.tilt_deg", 0.0)[0]))
    away = float(table["scene.target.distance_mm"][0] + pupil_depth_mm(table)[0])
    x, y = radius * np.cos(RIM), radius * np.sin(RIM)
    stretch = away / np.maximum(away * np.cos(tilt) - x * np.sin(tilt), 1e-3 * away)
    return stretch * x, stretch * y * np.cos(tilt)


def _on_wall(table: Columns, shown: dict, radius: float, half: float, points: int):
    """Map of a bore's wall, unrolled: around, depth, illuminance, and the two depths between which it is seen."""
    number = {name: float(table[f"scene.target.{name}"][0]) for name in ("bore_mm", "distance_mm", "near_mm", "far_mm")}
    far = 2 * number["distance_mm"] if np.isnan(number["far_mm"]) else number["far_mm"]
    bore, depth = number["bore_mm"], far * MARGIN
    u, v = np.linspace(-np.pi * bore / 2, np.pi * bore / 2, points), np.linspace(depth / points, depth, points)
    lux = bore_irradiance_w_m2(**shown, bore_mm=bore, z_mm=v[:, None], azimuth_deg=deg_from_rad(2 * u[None, :] / bore))
    if not np.isfinite(radius):
        return u, v, lux, (np.empty(0), np.empty(0))
    start, end = seen_wall_mm(
        bore_mm=bore,
        field_radius_mm=radius,
        distance_mm=number["distance_mm"],
        pupil_depth_mm=float(pupil_depth_mm(table)[0]),
        near_mm=np.nan_to_num(number["near_mm"]),
        far_mm=far,
    )
    return u, v, lux, (u[[0, -1]], np.array([float(start), float(end)]))


def _marks(ports: tuple[Port, ...]) -> tuple[PortMark, ...]:
    return tuple(
        PortMark(port.x_mm, port.y_mm, 2 * port.radius_mm)
        if isinstance(port, Disc)
        else PortMark(getattr(port, "x_mm", 0.0), 0.0, 2 * port.outer_radius_mm)
        for port in ports
    )


@dataclass(frozen=True, slots=True)
class Spectra:
    """Spectral power on the grid: of the lamp, out of the tip, and what the viewer takes of the whole picture.

    `seen_w_nm` is weighted by the camera's response (by V(lambda) for an eye); zeros without an image.
    """

    wavelength_nm: np.ndarray
    lamp_w_nm: np.ndarray
    delivered_w_nm: np.ndarray
    seen_w_nm: np.ndarray


def spectra(fiberscope: Fiberscope) -> Spectra:
    """The color of the light: in, out, and on its way back to the viewer."""
    fiberscope = numbered(fiberscope)
    table = columns([fiberscope])
    found = evaluate(table)
    spectrum = {name: power[0] for name, power in found.spectrum_w_nm.items()}
    seen = np.zeros_like(GRID_NM)
    if fiberscope.image is not None and fiberscope.scene is not None:
        value = {name: float(number[0]) for name, number in found.value.items()}
        seen = spectrum["target"] * _back_m2(fiberscope, value) / float(medium_index(table)[0]) ** 2
    return Spectra(GRID_NM, spectrum["lamp"], spectrum["delivered"], seen)


def _back_m2(fiberscope: Fiberscope, value: dict[str, float]) -> np.ndarray:
    """What the viewer takes for each W/m2 on the target, by wavelength: the image's area times all factors on the way."""
    scene, image, viewer = fiberscope.scene, fiberscope.image, fiberscope.viewer
    lens, size = (
        image.objective,
        magnification(focal_mm=image.objective.focal_mm, focus_mm=value["focus_from_pupil_mm"]),
    )
    f_number = working_f_number(
        focal_mm=lens.focal_mm, f_number=lens.f_number, magnification=size, exit_pupil_mm=lens.exit_pupil_mm or np.inf
    )
    tau = lens.transmission * (image.tip.transmission if image.tip else 1.0)
    lit = (
        face_irradiance_factor(f_number=f_number, magnification=0.0, transmission=tau)
        * on_grid(scene.target.reflectance)
        / np.pi
    )
    lit = lit * m2_from_mm2(np.pi / 4 * value["image_mm"] ** 2)
    if not isinstance(image, BundleImage):
        return lit
    bundle, cone = image.bundle, float(min(0.5 / f_number, 1.0))
    core = np.pi / 4 * bundle.core_um**2 / (np.sqrt(3.0) / 2 * bundle.pitch_um**2)
    taken = accepted_fraction(core_na=bundle.na, cone_sine=cone, tilt_sine=0.0)
    faces = face_transmission(core_index=bundle.core_index, outside_index=1.0, na=min(bundle.na, cone)) ** 2
    loss = attenuation_transmission(loss_db_m=on_grid(bundle.attenuation), length_m=bundle.length_m, stretch=1.0)
    lit = lit * core * taken * faces * np.where(covered(bundle.attenuation), loss, 0.0)
    if viewer.form == "eye":
        return lit * viewer.eye.transmission * photopic_weight()
    camera = viewer.camera
    response = on_grid(camera.response) if camera.response else 1.0
    relay = relay_fraction(relay_na=camera.relay_na, cone_sine=min(cone, bundle.na)) * camera.relay_transmission
    return lit * relay * response
