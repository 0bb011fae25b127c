"""What the pictures of the guide show: the cone on its way, and the color before and after."""

from dataclasses import dataclass

import numpy as np

from optics.chain.columns import Columns, columns
from optics.chain.cone import medium_index
from optics.chain.evaluate import evaluate
from optics.chain.light import Light, light
from optics.chain.solve import solved
from optics.fiberscope import Fiberscope
from optics.media.face import ray_face_transmission
from optics.spectrum import (
    GRID_NM,
    chromaticity,
    color_rendering_index,
    color_temperature_k,
    duv,
    integral,
    planck,
)

COVER = ("scene.cover.index", "scene.cover.thickness_mm", "scene.cover.spread_na")
LOCUS_K = np.geomspace(1800.0, 20000.0, 90)


@dataclass(frozen=True, slots=True)
class ConeStage:
    """Light by angle at one place: radiance in each bin over that of the launch, bins between edges as NA in air."""

    name: str
    na: np.ndarray
    radiance_ratio: np.ndarray
    flux: float


@dataclass(frozen=True, slots=True)
class ConeView:
    """The cone as launched, after the guide, and as it leaves; areas over NA^2 are light: lm, or W for a lamp in watts."""

    unit: str
    stages: tuple[ConeStage, ...]
    fiber_na: float
    launch_na: float
    exit_na: float
    outside_index: float


def cone_view(fiberscope: Fiberscope) -> ConeView:
    """Radiance over angle: what the launch sends within its cone, what the guide still holds before its last face, what leaves.

    The launch is uniform within its cone, all of it counted, also what misses the face or exceeds the fiber's cone.
    """
    table = solved(columns([fiberscope]))
    bare = table.replaced({path: np.full(1, np.nan) for path in COVER if path in table.number})
    out, before, by_watts = light(table), light(bare), fiberscope.source.lamp.flux_lm is None
    launch_na, launched = float(out.value["launch_na"][0]), _launched(table, out, by_watts)
    edges, index = before.beam.sine2_edges[0], float(medium_index(table)[0])
    core = fiberscope.guide.fiber.core_index
    face = ray_face_transmission(core_index=core, outside_index=index, ray_na=np.sqrt((edges[1:] + edges[:-1]) / 2))
    last, leaving = ((lit.beam.bin_w if by_watts else lit.beam.bin_lm)[0] for lit in (before, out))
    inside = np.where(face > 0, last / np.where(face > 0, face, 1.0), 0.0)
    stages = (
        ConeStage("launched", np.array([0.0, launch_na]), np.ones(1), launched),
        _stage("after the guide", edges, inside, launched / launch_na**2),
        _stage("leaves", out.beam.sine2_edges[0], leaving, launched / launch_na**2),
    )
    fiber_na, exit_na = float(table["guide.fiber.na"][0]), float(out.value["exit_na"][0])
    return ConeView("W" if by_watts else "lm", stages, fiber_na, launch_na, exit_na, index)


def _launched(table: Columns, lit: Light, by_watts: bool) -> float:
    """What the condenser sends out within its cone, lm or W."""
    lumens = lit.after_lm["condenser"][0]
    if not by_watts:
        return float(lumens)
    spectrum, came = lit.lamp_w_nm, np.nan_to_num(lit.after_lm.get("filter", lit.after_lm["lamp"]), nan=0.0)[0]
    if "source.filter.transmission" in table.curve:
        spectrum = spectrum * table.spectrum("source.filter.transmission")
    return float(integral(spectrum)[0] * (lumens / came if came > 0 else 1.0))


def _stage(name: str, edges: np.ndarray, flux: np.ndarray, of_launch: float) -> ConeStage:
    density = flux / np.diff(edges)
    return ConeStage(name, np.sqrt(edges), density / of_launch if of_launch > 0 else 0.0 * density, float(flux.sum()))


@dataclass(frozen=True, slots=True)
class Color:
    """Color of one light. `duv_ratio`: signed distance from the black bodies in CIE 1960 u, v."""

    name: str
    x_ratio: float
    y_ratio: float
    u_ratio: float
    v_ratio: float
    color_temperature_k: float
    duv_ratio: float
    color_rendering_index: float


@dataclass(frozen=True, slots=True)
class ColorView:
    """Lamp and delivered light; the black bodies between which they lie, as u, v and temperature."""

    lamp: Color
    delivered: Color
    locus_k: np.ndarray
    locus_u_ratio: np.ndarray
    locus_v_ratio: np.ndarray


def color_view(fiberscope: Fiberscope) -> ColorView:
    """How guide and filter shift the color of the light."""
    spectrum = evaluate(columns([fiberscope])).spectrum_w_nm
    locus = chromaticity(wavelength_nm=GRID_NM, power=planck(temperature_k=LOCUS_K, wavelength_nm=GRID_NM))
    lamp, delivered = (_color(name, spectrum[name][0]) for name in ("lamp", "delivered"))
    return ColorView(lamp, delivered, LOCUS_K, np.asarray(locus.u_ratio), np.asarray(locus.v_ratio))


def _color(name: str, power: np.ndarray) -> Color:
    lit = {"wavelength_nm": GRID_NM, "power": power}
    found = chromaticity(**lit)
    numbers = (*found, color_temperature_k(**lit), duv(**lit), color_rendering_index(**lit))
    return Color(name, *map(float, numbers))
