"""One design by `size` and by single rays, number beside number, and whether they agree."""

from itertools import pairwise

import numpy as np

from optics.chain.columns import Columns, columns
from optics.chain.cone import medium_index
from optics.chain.fit import fit
from optics.chain.light import light
from optics.chain.target import field_of_view, port_objects, pupil_depth_mm
from optics.commands.check_lines import Compared, Line, step_lines
from optics.fiberscope import Fiberscope
from optics.report.size import size
from optics.report.views import exit_cone
from optics.scene.irradiance import bore_irradiance_w_m2, plane_irradiance_w_m2
from optics.scene.surface import seen_wall_mm
from optics.spectrum import GRID_NM
from optics.study.rays_count import trace_rays
from optics.study.rays_target import PARTS, Place
from optics.units import deg_from_rad, rad_from_deg

FIELD = "mean over the field"
RADII, TURNS = 24, 96  # points over each part of the field where `size` gives its illuminance


def against_rays(fiberscope: Fiberscope, *, rays: int, seed: int) -> Compared:
    """`size` and the ray trace of one design, compared. Raises OutOfRange on bad numbers of rays or seeds."""
    report, bends = size(fiberscope), sum(bend.repeats for bend in fiberscope.guide.bundle.bends if bend.angle_deg > 0)
    seen = _seen(fiberscope)
    place, region = (None, "") if seen is None else seen
    asked = {"rays": rays, "seed": seed, "band_nm": (float(GRID_NM[0]), float(GRID_NM[-1]))}
    trace = trace_rays(fiberscope, place=place, in_lumens=True, **asked)
    steps = step_lines(report.light.steps, trace, bends)
    power = ()
    if fiberscope.source.lamp.flux_w is not None:  # lumens say little of such a lamp
        watts = trace_rays(fiberscope, place=None, in_lumens=False, **asked).steps[-1].after
        power = (Line("delivered", "w", report.light.delivered_w, watts.value, watts.standard_error, bends),)
    target = ()
    if place is not None:
        shares, lux = _parts_by_size(fiberscope, place)
        mean = report.target.mean_lux if region == FIELD else float(shares @ lux)
        lines = [(region, mean, trace.whole), *zip(_part_names(fiberscope, place), lux.tolist(), trace.parts)]
        target = tuple(
            Line(name, "lux", own, ray.value, ray.standard_error, bends, scale=mean) for name, own, ray in lines
        )
    return Compared(fiberscope.name, rays, seed, steps, power, target)


def _seen(fiberscope: Fiberscope) -> tuple[Place, str] | None:
    """Ports and the part of the target that is looked at, as numbers, and what to call it; None without a target.

    Without an image, what the light reaches stands in for the field of view.
    """
    if fiberscope.scene is None:
        return None
    table_of, target = columns([fiberscope]), fiberscope.scene.target
    seen, depth = field_of_view(table_of), float(pupil_depth_mm(table_of)[0])
    ports = {name: found[0] for name, found in fit(table_of, seen["image_mm"])[1].items()}
    ports = {f"port_{name}": found[ports["radius_mm"] != 0] for name, found in ports.items()}
    if fiberscope.guide.bundle.exit_tilt_deg > 0:
        # there the chain turns the ports; the rays refract at the ground face
        ports["port_tilt_deg"] = np.zeros_like(ports["port_tilt_deg"])
    radius, start, end = float(seen["field_radius_mm"][0]), 0.0, 0.0
    region = FIELD
    if not np.isfinite(radius):
        region, depth = "mean where light falls", 0.0
        radius = _lit_radius_mm(table_of, target.distance_mm, target.tilt_deg)
    if target.form == "bore":
        start, end = _wall_mm(target, radius, depth)
        if end <= start:
            region, start, end = "mean over the wall", target.distance_mm / 2, target.distance_mm * 2
    return Place(**ports, field_radius_mm=radius, pupil_depth_mm=depth, from_mm=start, to_mm=end), region


def _wall_mm(target, radius: float, depth: float) -> tuple[float, float]:
    found = seen_wall_mm(
        bore_mm=target.bore_mm,
        field_radius_mm=radius,
        distance_mm=target.distance_mm,
        pupil_depth_mm=depth,
        near_mm=target.near_mm or 1e-9,
        far_mm=target.far_mm or 2 * target.distance_mm,
    )
    return float(found[0]), float(found[1])


def _lit_radius_mm(table_of: Columns, distance_mm: float, tilt_deg: float) -> float:
    """Radius of the cone that holds nearly all light, no wider than a tilted plane can cut."""
    sine = min(float(light(table_of).value["exit_na"][0] / medium_index(table_of)[0]), 0.9)
    steepest = 0.8 / max(abs(np.tan(rad_from_deg(tilt_deg))), 0.1)
    return distance_mm * float(min(sine / np.sqrt(1 - sine**2), steepest))


def _part_names(fiberscope: Fiberscope, place: Place) -> list[str]:
    target = fiberscope.scene.target
    if target.form == "bore":
        edges = place.from_mm + (place.to_mm - place.from_mm) * np.arange(PARTS + 1) / PARTS
        return [f"wall, {near:.3g} to {far:.3g} mm deep" for near, far in pairwise(edges)]
    edges = place.field_radius_mm * np.arange(PARTS + 1) / PARTS
    return [f"ring, {inner:.3g} to {outer:.3g} mm" for inner, outer in pairwise(edges)]


def _parts_by_size(fiberscope: Fiberscope, place: Place) -> tuple[np.ndarray, np.ndarray]:
    """(share of the field's area, mean illuminance) of each part, from the chain's irradiance at many points."""
    table_of, target = columns([fiberscope]), fiberscope.scene.target
    lit = light(table_of)
    if lit.value["delivered_lm"][0] <= 0:
        return np.full(PARTS, 1 / PARTS), np.zeros(PARTS)
    ports = port_objects(
        {name: found[0] for name, found in fit(table_of, field_of_view(table_of)["image_mm"])[1].items()}
    )
    shown = {
        "ports": ports,
        "cone": exit_cone(lit, float(medium_index(table_of)[0])),
        "power_w": float(lit.value["delivered_lm"][0]),
    }  # lumens in, lux out
    share = ((np.arange(PARTS * RADII) + 0.5) / (PARTS * RADII))[:, None]
    turn = 2 * np.pi * (np.arange(TURNS) + 0.5) / TURNS
    if target.form == "bore":
        depth = place.from_mm + (place.to_mm - place.from_mm) * share
        lux = bore_irradiance_w_m2(**shown, bore_mm=target.bore_mm, z_mm=depth, azimuth_deg=deg_from_rad(turn))
        weight = np.ones_like(lux)
    else:
        tilt, apex = rad_from_deg(target.tilt_deg), target.distance_mm + place.pupil_depth_mm
        x, y = share * place.field_radius_mm * np.cos(turn), share * place.field_radius_mm * np.sin(turn)
        stretch = apex / (apex - x * np.tan(tilt))
        lux = plane_irradiance_w_m2(
            **shown,
            distance_mm=target.distance_mm,
            tilt_deg=target.tilt_deg,
            u_mm=stretch * x / np.cos(tilt),
            v_mm=stretch * y,
        )
        weight = stretch**3 * share
    light_of, area = ((each.reshape(PARTS, -1)).sum(axis=1) for each in (lux * weight, weight))
    return area / area.sum(), light_of / area
