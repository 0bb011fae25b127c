"""The light from the lamp to the last face, step by step, for every design at once.

Angle and wavelength mix only where light travels through fiber, so most steps act on the bins of
angle alone; `Way` keeps them apart until a length of fiber brings them together.
"""

from dataclasses import dataclass, field

import numpy as np

from optics.beam import Beam
from optics.chain.columns import Columns, written_out
from optics.chain.cone import (
    LAST_EDGES,
    angle_edges,
    bin_na,
    exit_mm,
    guide_face_mm,
    guide_face_na,
    medium_index,
    taper_area_ratio,
)
from optics.chain.launch import filled_na, lamp_spectrum, launch
from optics.guide.bend import bend_matrix
from optics.guide.bundle import fiber_area_mm2
from optics.guide.ends import reflection_transmission, tilted_face_transmission
from optics.guide.fiber import ray_stretch
from optics.guide.joint import joint_share
from optics.guide.packing import core_share
from optics.media.face import ray_face_transmission
from optics.media.loss import attenuation_transmission
from optics.scene.cover import spread_share
from optics.scene.exit_cone import cone_na_holding
from optics.spectrum import GRID_NM, color_rendering_index, integral, luminous_flux_lm, nearest_black_body

EXIT_SHARE = 0.95  # exit_na holds this share of the lumens


@dataclass(frozen=True, slots=True)
class Light:
    """The lamp's spectrum, the beam before the tip, the lumens after each step (nan: no such step), and its numbers."""

    lamp_w_nm: np.ndarray
    beam: Beam
    after_lm: dict[str, np.ndarray]
    value: dict[str, np.ndarray]


@dataclass(slots=True)
class Way:
    """The beam on its way: power [design, bin or 1, wavelength] times `share` [design, bin], and what each step left."""

    power_w_nm: np.ndarray
    share: np.ndarray
    bin_lm: np.ndarray
    after_lm: dict[str, np.ndarray] = field(default_factory=dict)

    def bins(self, name: str, factor: np.ndarray, only: np.ndarray | bool = True) -> None:
        """A step that acts on angles: factor [design, bin or 1], counted for the designs that have it."""
        factor = np.where(np.reshape(only, (-1, 1)), factor, 1.0)
        self.share, self.bin_lm = self.share * factor, self.bin_lm * factor
        self._note(name, only)

    def colors(self, name: str, factor: np.ndarray, only: np.ndarray | bool = True) -> None:
        """A step that acts on angles and colors: factor [design, bin or 1, wavelength], 1 where a design has it not."""
        self.power_w_nm = self.power_w_nm * factor
        self.bin_lm = luminous_flux_lm(self.power_w_nm) * self.share
        self._note(name, only)

    def mixed(self, name: str, matrix: np.ndarray, rows: np.ndarray) -> None:
        """A step that moves light between angles in some designs: matrix [row, bin in, bin out]."""
        power = self.power_w_nm * self.share[:, :, None]
        power[rows] = np.einsum("dij,diw->djw", matrix, power[rows], optimize=True)
        self.power_w_nm, self.share = power, np.ones_like(self.share)
        self.bin_lm = luminous_flux_lm(power)
        self._note(name, np.isin(np.arange(len(power)), rows))

    def _note(self, name: str, only: np.ndarray | bool) -> None:
        self.after_lm[name] = np.where(only, self.bin_lm.sum(axis=1), np.nan)


def light(columns: Columns) -> Light:
    """Every step from the lamp to the exit face (and the cover over it), for all designs."""
    spectrum = lamp_spectrum(columns)
    cable = columns.has("guide.cable.length_m")
    edges, way, value = _onto_the_face(columns, cable, spectrum)
    if cable.any():
        _through_cable(columns, cable, way, edges)
    edges = edges * taper_area_ratio(columns, "entry_mm")[:, None]
    _through_guide(columns, way, edges)
    edges = np.minimum(edges / taper_area_ratio(columns, "exit_mm")[:, None], LAST_EDGES)
    before_w = (integral(way.power_w_nm) * way.share).sum(axis=1)
    _out(columns, way, edges)
    beam = Beam(way.power_w_nm * way.share[:, :, None], edges)
    value["face_heat_w"] = value["face_heat_w"] * _not_taken(way, cable)
    # What the last faces throw back is counted as heat of the tip: most of it is, and the rest is on the safe side.
    value["tip_heat_w"] = np.maximum(before_w - beam.flux_w, 0.0)
    value.update(_numbers(columns, beam, way))
    return Light(spectrum, beam, way.after_lm, value)


def _onto_the_face(columns: Columns, cable: np.ndarray, spectrum: np.ndarray):
    """Lamp, filter, condenser, cone, spot and the first reflection: bin edges, the way begun, first numbers."""
    lamp = spectrum
    if "source.filter.transmission" in columns.curve:
        filtered = columns.curve["source.filter.transmission"].row >= 0
        spectrum = spectrum * np.where(filtered[:, None], columns.spectrum("source.filter.transmission"), 1.0)
    face = {
        name: np.where(cable, columns[f"guide.cable.fiber.{name}"], columns[f"guide.fiber.{name}"])
        for name in ("na", "core_index")
    }
    face["na"] = np.where(cable, face["na"], guide_face_na(columns))
    face_mm = np.where(cable, columns["guide.cable.diameter_mm"], guide_face_mm(columns))
    fill_na = filled_na(columns, face_mm=face_mm, face_na=face["na"])
    edges = angle_edges(columns, fill_na, face["na"])
    na = bin_na(edges)
    launched = launch(columns, edges, fill_na, face_mm=face_mm, face_na=face["na"])

    flux = luminous_flux_lm(lamp)
    way = Way(spectrum[:, None, :], np.ones_like(na), luminous_flux_lm(spectrum)[:, None])
    way.after_lm["lamp"] = flux
    if "source.filter.transmission" in columns.curve:
        way.after_lm["filter"] = np.where(filtered, luminous_flux_lm(spectrum), np.nan)
    way.after_lm["condenser"] = way.bin_lm[:, 0] * launched.condenser_share
    way.share = launched.condenser_share[:, None] * launched.cone_share
    way.bin_lm = way.bin_lm * way.share
    way.after_lm["cone"] = way.bin_lm.sum(axis=1)
    way.bins("spot", launched.spot_share)
    reflected = ray_face_transmission(core_index=face["core_index"][:, None], outside_index=1.0, ray_na=na)
    way.bins("input face", reflected)
    value = {
        "lamp_w": integral(lamp),
        "launch_na": fill_na,
        "first_face_na": face["na"],
        "face_heat_w": integral(spectrum) * launched.condenser_share,
    }
    return edges, way, value


def _through_cable(columns: Columns, cable: np.ndarray, way: Way, edges: np.ndarray) -> None:
    """A separate cable before the scope: its face, its length, and the joint."""
    na = bin_na(edges)
    fiber, index = "guide.cable.fiber", columns.get("guide.joint.index", 1.0)[:, None]
    way.bins("cable packing", columns.get("guide.cable.packing_fraction", 1.0)[:, None], cable)
    way.bins("cable core share", _core_share(columns, fiber)[:, None], cable)
    way.colors("cable attenuation", _attenuated(columns, fiber, columns.get("guide.cable.length_m", 0.0), na), cable)
    leave = ray_face_transmission(
        core_index=columns.get(f"{fiber}.core_index", 1.5)[:, None], outside_index=index, ray_na=na
    )
    way.bins("cable exit face", leave, cable)
    crosses = joint_share(
        from_mm=columns.get("guide.cable.diameter_mm", 1.0)[:, None],
        to_mm=guide_face_mm(columns)[:, None],
        gap_mm=columns.get("guide.joint.gap_mm", 0.0)[:, None],
        offset_mm=columns.get("guide.joint.offset_mm", 0.0)[:, None],
        gap_index=index,
        na=na,
    )
    way.bins("joint", crosses * (na <= guide_face_na(columns)[:, None]), cable)
    enter = ray_face_transmission(core_index=columns["guide.fiber.core_index"][:, None], outside_index=index, ray_na=na)
    way.bins("guide input face", enter, cable)


def _through_guide(columns: Columns, way: Way, edges: np.ndarray) -> None:
    """The scope's own guide: fibers and cores, broken ones, length, reflections at the wall, bends."""
    na, bounce = bin_na(edges), columns.get("guide.bundle.bounce_loss_fraction", 0.0)
    whole = 1.0 - columns.get("guide.bundle.broken_fraction", 0.0)
    way.bins("packing", columns["guide.bundle.packing_fraction"][:, None])
    way.bins("core share", _core_share(columns, "guide.fiber")[:, None])
    if (whole < 1).any():
        way.bins("broken fibers", whole[:, None], whole < 1)
    way.colors("attenuation", _attenuated(columns, "guide.fiber", columns["guide.bundle.length_m"], na))
    if (bounce > 0).any():
        kept = reflection_transmission(
            loss_fraction=bounce[:, None],
            length_m=columns["guide.bundle.length_m"][:, None],
            core_um=columns["guide.fiber.core_um"][:, None],
            core_index=columns["guide.fiber.core_index"][:, None],
            ray_na=na,
        )
        way.bins("wall reflections", kept, bounce > 0)
    radius = columns.items("guide.bundle.bends.radius_mm", np.inf)
    angle = columns.items("guide.bundle.bends.angle_deg", 0.0)
    rows = np.flatnonzero((angle > 0).any(axis=1))
    if rows.size:
        repeats = columns.items("guide.bundle.bends.repeats", 0.0).astype(int)
        matrix = bend_matrix(
            sine2_edges=edges[rows],
            na=columns["guide.fiber.na"][rows],
            core_index=columns["guide.fiber.core_index"][rows],
            core_um=columns["guide.fiber.core_um"][rows],
            bend_radius_mm=written_out(radius, repeats, np.inf)[rows],
            bend_deg=written_out(angle, repeats, 0.0)[rows],
        )
        way.mixed("bends", matrix, rows)


def _out(columns: Columns, way: Way, edges: np.ndarray) -> None:
    """The exit face, and a cover over it: clear or spreading."""
    na = bin_na(edges)
    medium, cover = medium_index(columns)[:, None], columns.has("scene.cover.index")
    before = np.where(cover[:, None], 1.0, medium)  # a cover stands in air before the exit face
    core = columns["guide.fiber.core_index"][:, None]
    leaves = ray_face_transmission(core_index=core, outside_index=before, ray_na=na)
    ground = columns.get("guide.bundle.exit_tilt_deg", 0.0)[:, None]
    if (ground > 0).any():
        tilted = tilted_face_transmission(core_index=core, outside_index=before, ray_na=na, tilt_deg=ground)
        leaves = np.where(ground > 0, tilted, leaves)
    way.bins("exit face", leaves)
    if not cover.any():
        return
    spread = columns.get("scene.cover.spread_na", 0.0)
    rows = np.flatnonzero(spread > 0)
    if rows.size:
        matrix = spread_share(sine2_edges=edges[rows], spread_na=spread[rows], spread_edges=edges[rows])
        way.mixed("spreading", matrix, rows)
    glass = columns.get("scene.cover.index", 1.5)[:, None]
    faces = ray_face_transmission(core_index=glass, outside_index=1.0, ray_na=na)
    way.bins("cover", faces * ray_face_transmission(core_index=glass, outside_index=medium, ray_na=na), cover)


def _not_taken(way: Way, cable: np.ndarray) -> np.ndarray:
    """Share of what falls on the first face that gets into no core there: it heats the face and its glue."""
    entered = np.where(cable, way.after_lm.get("cable core share", np.nan), way.after_lm["core share"])
    came = way.after_lm["condenser"]
    return 1.0 - np.where(came > 0, entered / np.where(came > 0, came, 1.0), 0.0)


def _core_share(columns: Columns, table: str) -> np.ndarray:
    return core_share(core_um=columns.get(f"{table}.core_um", 1.0), fiber_um=columns.get(f"{table}.fiber_um", 1.0))


def _attenuated(columns: Columns, table: str, length_m: np.ndarray, na: np.ndarray) -> np.ndarray:
    """Transmission [design, bin, wavelength] of a length of one fiber; no light where its data end, 1 without a fiber."""
    stretch = ray_stretch(ray_na=na, core_index=columns.get(f"{table}.core_index", 2.0)[:, None])
    loss, inside = columns.spectrum(f"{table}.attenuation"), columns.covered(f"{table}.attenuation")
    through = attenuation_transmission(
        loss_db_m=loss[:, None, :], length_m=length_m[:, None, None], stretch=stretch[:, :, None]
    )
    return through * inside[:, None, :]


def _numbers(columns: Columns, beam: Beam, way: Way) -> dict[str, np.ndarray]:
    spectrum, delivered, lamp = beam.spectrum_w_nm, way.bin_lm.sum(axis=1), way.after_lm["lamp"]
    fibers = fiber_area_mm2(diameter_mm=exit_mm(columns), packing_fraction=columns["guide.bundle.packing_fraction"])
    kelvin, off_locus = nearest_black_body(wavelength_nm=GRID_NM, power=spectrum)
    return {
        "delivered_lm": delivered,
        "delivered_w": integral(spectrum),
        "transmission": np.where(lamp > 0, delivered / np.where(lamp > 0, lamp, 1.0), 0.0),
        "exit_na": cone_na_holding(sine2_edges=beam.sine2_edges, flux=way.bin_lm, share=EXIT_SHARE),
        "color_temperature_k": kelvin,
        "color_duv": off_locus,
        "color_rendering_index": color_rendering_index(wavelength_nm=GRID_NM, power=spectrum),
        "core_area_mm2": fibers * _core_share(columns, "guide.fiber"),
    }
