"""One design by `size` and by single rays, number beside number, and whether they agree."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from optics.beam import Step
from optics.chain.columns import Columns, columns
from optics.chain.fit import fit
from optics.chain.light import light, medium_index
from optics.chain.target import field_of_view, port_objects, pupil_depth_mm
from optics.commands.terminal import paragraph, rounded, table
from optics.fiberscope import Fiberscope
from optics.report.size import size
from optics.report.views import exit_cone
from optics.scene.irradiance import bore_irradiance_w_m2, plane_irradiance_w_m2
from optics.scene.surface import seen_wall_mm
from optics.spec import OutOfRange
from optics.spectrum import GRID_NM
from optics.study.rays_count import RayTrace, trace_rays
from optics.study.rays_target import PARTS, Place
from optics.units import deg_from_rad, rad_from_deg

# What counts as agreement: the largest of so many standard errors, a share, and a share for each bend gone through.
ERRORS, SHARE, BEND_SHARE = 4.0, 0.01, 0.02
RADII, TURNS = 24, 96  # points over each part of the field where `size` gives its illuminance


@dataclass(frozen=True, slots=True)
class Line:
    """One number by `size` and by rays, in `unit`; for a step also its own factor (size, rays, standard error)."""

    name: str
    unit: str
    size: float
    rays: float
    standard_error: float
    bends: int
    factor: tuple[float, float, float] | None = None

    @property
    def agrees(self) -> bool:
        """Both what is left and, for a step, what the step alone passes: an error of one step is not lost in the next."""
        own_bends = self.bends if self.name == "bends" else 0
        alone = self.factor is None or _meets(*self.factor, own_bends)
        return alone and _meets(self.size, self.rays, self.standard_error, self.bends)

    @property
    def verdict(self) -> str:
        """Why the two count as the same, or that they do not."""
        away = abs(self.rays - self.size)
        if not self.agrees:
            return "DIFFERS" + (f", this step alone by {_percent(*self.factor[:2])}" if self.factor else "")
        if away <= SHARE * abs(self.size):
            return "agrees" if self.size else "agrees: no light"
        return "agrees within the noise" if away <= ERRORS * self.standard_error else "agrees within what bends allow"

    def as_dict(self) -> dict:
        said = {"name": self.name, f"size_{self.unit}": self.size, f"rays_{self.unit}": self.rays}
        said |= {f"standard_error_{self.unit}": self.standard_error}
        if self.factor:
            said |= dict(zip(("size_factor", "rays_factor", "factor_standard_error"), self.factor))
        return said | {"agrees": self.agrees}


@dataclass(frozen=True, slots=True)
class Compared:
    """All numbers of a design by both routes."""

    name: str
    rays: int
    seed: int
    steps: tuple[Line, ...]
    power: tuple[Line, ...]
    target: tuple[Line, ...]

    @property
    def wrong(self) -> list[Line]:
        return [line for line in (*self.steps, *self.power, *self.target) if not line.agrees]

    def as_dict(self) -> dict:
        lists = {key: [line.as_dict() for line in getattr(self, key)] for key in ("steps", "power", "target")}
        return {"name": self.name, "rays": self.rays, "seed": self.seed, "agrees": not self.wrong, **lists}

    def disagreement(self) -> str:
        first, more = self.wrong[0], len(self.wrong) - 1
        also = f" (and {more} more)" if more else ""
        return (
            f"{first.name} is {first.size:.5g} {UNITS[first.unit]} by size and {first.rays:.5g} +- "
            f"{first.standard_error:.2g} by {self.rays:,} rays; {_allowed(first.bends)} is allowed{also}."
        )

    def written(self) -> str:
        """The table for people."""
        parts = [f"{self.name}: {self.rays:,} rays, seed {self.seed}", ""]
        heads = ("Light, in the order of its way", "Power", "On the target")
        for head, lines in zip(heads, (self.steps, self.power, self.target)):
            if lines:
                unit = UNITS[lines[0].unit]
                titles = ("", f"size, {unit}", f"rays, {unit}", "+- std error", "difference", "")
                parts += [head, table([titles, *map(_cells, lines)], right=(1, 2, 3, 4), wrap=False), ""]
        bends = max((line.bends for line in self.steps), default=0)
        said = "Every number agrees" if not self.wrong else f"{len(self.wrong)} numbers DISAGREE"
        told = (
            f"{said}. Each may differ by {_allowed(bends)}. The rays go from lamp to target by code of their own and share "
            "no formula of transport with size."
        )
        return "\n".join([*parts, paragraph(told, lead="")])


UNITS = {"lm": "lm", "w": "W", "lux": "lux"}


def _meets(by_size: float, by_rays: float, standard_error: float, bends: int) -> bool:
    return abs(by_rays - by_size) <= max(ERRORS * standard_error, max(SHARE, BEND_SHARE * bends) * abs(by_size))


def _allowed(bends: int) -> str:
    largest = f", or {BEND_SHARE * bends:.0%} for {bends} bend{'s' * (bends > 1)}" if bends else ""
    return f"{ERRORS:.0f} standard errors or {SHARE:.0%}{largest}, whichever is largest"


def _percent(by_size: float, by_rays: float) -> str:
    if by_size == 0:
        return "no light" if by_rays == 0 else "-"
    said = f"{by_rays / by_size - 1:+.2%}"
    return "0.00%" if said in ("+0.00%", "-0.00%") else said


def _cells(line: Line) -> tuple[str, ...]:
    error = f"{line.standard_error:,.0f}" if line.standard_error >= 100 else rounded(line.standard_error, 2)
    numbers = (rounded(line.size, 5), rounded(line.rays, 5), error)
    return line.name, *numbers, _percent(line.size, line.rays), line.verdict


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
        mean = report.target.mean_lux if report.target.mean_lux is not None else float(shares @ lux)
        lines = [(region, mean, trace.whole), *zip(_part_names(fiberscope, place), lux.tolist(), trace.parts)]
        target = tuple(Line(name, "lux", own, ray.value, ray.standard_error, bends) for name, own, ray in lines)
    return Compared(fiberscope.name, rays, seed, steps, power, target)


def step_lines(steps: Sequence[Step], trace: RayTrace, bends: int) -> tuple[Line, ...]:
    """Each step of `size` beside that of the rays. Raises OutOfRange where one has a step that the other has not."""
    ours, theirs = ([step.name for step in some] for some in (steps, trace.steps))
    if ours != theirs:
        raise OutOfRange(f"size has the steps {', '.join(ours)}; the rays went through {', '.join(theirs)}.")
    lines, gone_through, before = [], 0, None
    for step, ray in zip(steps, trace.steps):
        gone_through = bends if step.name == "bends" else gone_through
        alone = 1.0 if before is None else step.after_lm / before if before > 0 else 0.0
        factor = (alone, ray.factor.value, ray.factor.standard_error)
        after = (step.after_lm, ray.after.value, ray.after.standard_error)
        lines.append(Line(step.name, "lm", *after, gone_through, factor))
        before = step.after_lm
    return tuple(lines)


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
    if fiberscope.guide.bundle.exit_tilt_deg > 0:  # there the chain turns the ports; the rays refract at the ground face
        ports["port_tilt_deg"] = np.zeros_like(ports["port_tilt_deg"])
    radius, start, end = float(seen["field_radius_mm"][0]), 0.0, 0.0
    region = "mean over the field"
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
        return [f"wall, {near:.3g} to {far:.3g} mm deep" for near, far in zip(edges, edges[1:])]
    edges = place.field_radius_mm * np.arange(PARTS + 1) / PARTS
    return [f"ring, {inner:.3g} to {outer:.3g} mm" for inner, outer in zip(edges, edges[1:])]


def _parts_by_size(fiberscope: Fiberscope, place: Place) -> tuple[np.ndarray, np.ndarray]:
    """(share of the field's area, mean illuminance) of each part, from the chain's irradiance at many points."""
    table_of, target = columns([fiberscope]), fiberscope.scene.target
    lit = light(table_of)
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
