"""The light from the lamp to the last face, step by step, for every design at once.

Until the first length of fiber, angle and wavelength do not mix, so the steps act on the share of
each angle bin; from there on the beam is a table of bins and wavelengths.
"""

from dataclasses import dataclass

import numpy as np

from optics.beam import Beam, bin_edges
from optics.chain.columns import Columns
from optics.guide.bend import bend_matrix
from optics.guide.bundle import fiber_area_mm2
from optics.guide.fiber import stretch_at
from optics.guide.joint import joint_share
from optics.guide.packing import core_share
from optics.media.face import face_transmission_at
from optics.media.index import refractive_index
from optics.media.loss import attenuation_transmission
from optics.scene.exit_cone import cone_na_holding
from optics.source.lamp import etendue_mm2_sr
from optics.source.launch import (
    Launched,
    cone_share,
    disc_share,
    gap_share,
    matched_cone_na,
    matched_fraction,
    rated_flux_share,
)
from optics.spectrum import GRID_NM, color_rendering_index, color_temperature_k, duv, integral, luminous_flux_lm

INNER_BINS, OUTER_BINS = 20, 12
WIDENED = 1.2  # bends leave light up to this multiple of NA^2 (leaky skew rays beyond the guide's own cone)
EXIT_SHARE = 0.95  # exit_na holds this share of the lumens


@dataclass(frozen=True, slots=True)
class Light:
    """The beam in front of the exit face, the lumens after each step (nan: no such step), and its numbers."""

    lamp_w_nm: np.ndarray
    beam: Beam
    after_lm: dict[str, np.ndarray]
    value: dict[str, np.ndarray]


def light(columns: Columns) -> Light:
    """Every step from the lamp to the exit face (and the cover over it), for all designs."""
    spectrum = lamp = lamp_spectrum(columns)
    after = {"lamp": luminous_flux_lm(spectrum)}
    value = {"lamp_w": integral(spectrum)}
    cable, filtered = columns.has("guide.cable.length_m"), (columns.curve.get("source.filter.transmission"))
    if filtered is not None:
        spectrum = spectrum * np.where(filtered.row[:, None] >= 0, columns.spectrum("source.filter.transmission"), 1.0)
        after["filter"] = _only(filtered.row >= 0, luminous_flux_lm(spectrum))
    flux = luminous_flux_lm(spectrum)

    face_na = np.where(cable, columns["guide.cable.fiber.na"], columns["guide.fiber.na"])
    face_mm = np.where(cable, columns["guide.cable.diameter_mm"], columns["guide.bundle.diameter_mm"])
    face_index = np.where(cable, columns["guide.cable.fiber.core_index"], columns["guide.fiber.core_index"])
    fill_na = filled_na(columns, face_mm=face_mm, face_na=face_na)
    value["launch_na"], value["first_face_na"] = fill_na, face_na
    edges = _edges(columns, fill_na, face_na)
    na = np.sqrt((edges[:, 1:] + edges[:, :-1]) / 2)
    launched = launch(columns, edges, fill_na, face_mm=face_mm, face_na=face_na)

    share = launched.cone_share
    after["condenser"] = flux * launched.condenser_share
    after["cone"] = after["condenser"] * share.sum(axis=1)
    share = share * launched.spot_share
    after["spot"] = after["condenser"] * share.sum(axis=1)
    share = (
        share
        * launched.condenser_share[:, None]
        * face_transmission_at(core_index=face_index[:, None], outside_index=1.0, na_of_ray=na)
    )
    after["input face"] = flux * share.sum(axis=1)
    if cable.any():
        packing, core = (
            columns.get("guide.cable.packing_fraction", 1.0),
            _core_share(columns, "guide.cable.fiber"),
        )
        after["cable packing"] = _only(cable, after["input face"] * packing)
        after["cable core share"] = _only(cable, after["input face"] * packing * core)
        share = share * (packing * core)[:, None]  # both 1 where there is no cable
        through = _attenuated(columns, "guide.cable.fiber", columns.get("guide.cable.length_m", 0.0), na)
        power = share[:, :, None] * spectrum[:, None, :] * through
        bins = luminous_flux_lm(power)
        after["cable attenuation"] = _only(cable, bins.sum(axis=1))
        factor, at = _joint(columns, cable, na, bins)
        after["cable exit face"], after["joint"], after["guide input face"] = (_only(cable, lumens) for lumens in at)
        power, bins = power * factor[:, :, None], bins * factor
    else:
        power, bins = share[:, :, None] * spectrum[:, None, :], flux[:, None] * share

    packing, core = columns["guide.bundle.packing_fraction"], _core_share(columns, "guide.fiber")
    whole = 1.0 - columns.get("guide.bundle.broken_fraction", 0.0)
    total = bins.sum(axis=1)
    after["packing"], after["core share"] = total * packing, total * packing * core
    after["broken fibers"] = _only(whole < 1, total * packing * core * whole)
    power = (
        power
        * (packing * core * whole)[:, None, None]
        * _attenuated(columns, "guide.fiber", columns["guide.bundle.length_m"], na)
    )
    bins = luminous_flux_lm(power)
    after["attenuation"] = bins.sum(axis=1)
    power, bent = _bent(columns, edges, power)
    if bent.any():
        bins = luminous_flux_lm(power)
        after["bends"] = _only(bent, bins.sum(axis=1))

    medium = medium_index(columns)
    cover = columns.has("scene.cover.index")
    beyond = np.where(cover, 1.0, medium)  # a cover stands in air before the exit face
    factor = face_transmission_at(
        core_index=columns["guide.fiber.core_index"][:, None], outside_index=beyond[:, None], na_of_ray=na
    )
    bins = bins * factor
    after["exit face"] = bins.sum(axis=1)
    if cover.any():
        glass = columns.get("scene.cover.index", 1.0)[:, None]
        window = face_transmission_at(core_index=glass, outside_index=1.0, na_of_ray=na)
        window = np.where(
            cover[:, None],
            window * face_transmission_at(core_index=glass, outside_index=medium[:, None], na_of_ray=na),
            1.0,
        )
        factor, bins = factor * window, bins * window
        after["cover"] = _only(cover, bins.sum(axis=1))
    beam = Beam(power * factor[:, :, None], edges)
    value.update(_numbers(columns, beam, bins, after))
    return Light(lamp, beam, after, value)


def lamp_spectrum(columns: Columns) -> np.ndarray:
    """Spectral power of the lamp [design, wavelength], W/nm, scaled to its stated lumens or watts."""
    relative = columns.spectrum("source.lamp.spectrum")
    per_lm = columns["source.lamp.flux_lm"] / np.maximum(luminous_flux_lm(relative), 1e-300)
    per_w = columns["source.lamp.flux_w"] / np.maximum(integral(relative), 1e-300)
    return relative * np.where(np.isnan(per_lm), per_w, per_lm)[:, None]


def filled_na(columns: Columns, *, face_mm: np.ndarray, face_na: np.ndarray) -> np.ndarray:
    """The cone that the launch fills on the first face, NA [design]."""
    filled = columns["source.lamp.cone_na"].copy()
    lamp = lamp_etendue(columns)
    for form, rows in columns.split("source.launch.form"):
        if form == "spot":
            filled[rows] = columns["source.launch.cone_na"][rows]
        elif form == "matched":
            filled[rows] = matched_cone_na(lamp_etendue_mm2_sr=lamp[rows], face_mm=face_mm[rows], na=face_na[rows])
        elif form == "rated":
            filled[rows] = face_na[rows]
    return filled


def lamp_etendue(columns: Columns) -> np.ndarray:
    return etendue_mm2_sr(diameter_mm=columns["source.lamp.emitter_mm"], na=columns["source.lamp.cone_na"])


def launch(
    columns: Columns, edges: np.ndarray, fill_na: np.ndarray, *, face_mm: np.ndarray, face_na: np.ndarray
) -> Launched:
    """What reaches the first face, by each design's own form of launch."""
    guided = np.minimum(edges, face_na[:, None] ** 2)
    condenser = columns.get("source.launch.transmission", 1.0)
    cone = cone_share(sine2_edges=guided, cone_na=fill_na)
    spot = np.ones_like(cone)
    lamp = lamp_etendue(columns)
    for form, rows in columns.split("source.launch.form"):
        face = etendue_mm2_sr(diameter_mm=face_mm[rows], na=face_na[rows])
        if form == "butt":
            sine = np.sqrt((edges[rows, 1:] + edges[rows, :-1]) / 2)
            spot[rows] = gap_share(
                emitter_mm=columns["source.lamp.emitter_mm"][rows, None],
                face_mm=face_mm[rows, None],
                gap_mm=columns["source.launch.gap_mm"][rows, None],
                sine=np.minimum(sine, 1 - 1e-9),
            )
        elif form == "spot":
            gaussian = columns.texts("source.launch.profile")[rows] == "gaussian"
            spot[rows] = disc_share(
                spot_mm=columns["source.launch.spot_mm"][rows], face_mm=face_mm[rows], gaussian=gaussian
            )[:, None]
        elif form == "matched":
            condenser[rows] *= matched_fraction(lamp_etendue_mm2_sr=lamp[rows], bundle_etendue_mm2_sr=face)
        elif form == "rated":
            reference = etendue_mm2_sr(
                diameter_mm=columns["source.launch.reference_diameter_mm"][rows],
                na=columns["source.launch.reference_na"][rows],
            )
            condenser[rows] = rated_flux_share(
                rated_share=columns["source.launch.rated_lm"][rows] / columns["source.lamp.flux_lm"][rows],
                lamp_etendue_mm2_sr=lamp[rows],
                reference_etendue_mm2_sr=reference,
                face_etendue_mm2_sr=face,
            )
    return Launched(condenser, cone, spot)


def medium_index(columns: Columns) -> np.ndarray:
    """Refractive index of what stands in front of the tip, at the d line [design]."""
    found = np.ones(columns.count)
    for medium, rows in columns.split("scene.target.medium"):
        found[rows] = refractive_index(medium=medium, wavelength_nm=587.56) if medium not in ("", "air") else 1.0
    return found


def _edges(columns: Columns, fill_na: np.ndarray, face_na: np.ndarray) -> np.ndarray:
    """Inner bins up to where the light ends in every guide; outer bins up to what bends or a joint may need."""
    first = np.minimum(fill_na, face_na)
    guide = columns["guide.fiber.na"]
    widest = np.minimum(np.maximum(first, guide) * np.sqrt(WIDENED), 0.999)
    return bin_edges(inner_na=np.minimum(first, guide), outer_na=widest, inner_count=INNER_BINS, outer_count=OUTER_BINS)


def _only(has: np.ndarray, lumens: np.ndarray) -> np.ndarray:
    return np.where(has, lumens, np.nan)


def _core_share(columns: Columns, table: str) -> np.ndarray:
    return core_share(core_um=columns.get(f"{table}.core_um", 1.0), fiber_um=columns.get(f"{table}.fiber_um", 1.0))


def _attenuated(columns: Columns, table: str, length_m: np.ndarray, na: np.ndarray) -> np.ndarray:
    """Transmission [design, bin, wavelength] of a length of one fiber."""
    stretch = stretch_at(na_of_ray=na, core_index=columns.get(f"{table}.core_index", 2.0)[:, None])
    inside = columns.covered(f"{table}.attenuation")
    loss = columns.spectrum(f"{table}.attenuation")
    through = attenuation_transmission(
        loss_db_m=loss[:, None, :], length_m=length_m[:, None, None], stretch=stretch[:, :, None]
    )
    return np.where(inside[:, None, :], through, 0.0)


def _joint(columns: Columns, cable: np.ndarray, na: np.ndarray, bins: np.ndarray):
    """Factor of each bin from the cable's core to the guide's core, and the lumens after each of its three steps."""
    gap = columns.get("guide.joint.index", 1.0)[:, None]
    leave = face_transmission_at(
        core_index=columns.get("guide.cable.fiber.core_index", 1.5)[:, None], outside_index=gap, na_of_ray=na
    )
    cross = joint_share(
        from_mm=columns.get("guide.cable.diameter_mm", 1.0)[:, None],
        to_mm=columns["guide.bundle.diameter_mm"][:, None],
        gap_mm=columns.get("guide.joint.gap_mm", 0.0)[:, None],
        offset_mm=columns.get("guide.joint.offset_mm", 0.0)[:, None],
        gap_index=gap,
        na=na,
    ) * (na <= columns["guide.fiber.na"][:, None])
    enter = face_transmission_at(core_index=columns["guide.fiber.core_index"][:, None], outside_index=gap, na_of_ray=na)
    at = [(bins * leave).sum(axis=1), (bins * leave * cross).sum(axis=1), (bins * leave * cross * enter).sum(axis=1)]
    return np.where(cable[:, None], leave * cross * enter, 1.0), at


def _bent(columns: Columns, edges: np.ndarray, power: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """The beam after the bends of the scope's guide, and which designs have any."""
    radius, angle = (
        columns.items("guide.bundle.bends.radius_mm", np.inf),
        columns.items("guide.bundle.bends.angle_deg", 0.0),
    )
    bent = (angle > 0).any(axis=1)
    if not bent.any():
        return power, bent
    repeats = columns.items("guide.bundle.bends.repeats", 0.0).astype(int)
    radius, angle = (_repeated(values, repeats, fill) for values, fill in ((radius, np.inf), (angle, 0.0)))
    rows = np.flatnonzero(bent)
    matrix = bend_matrix(
        sine2_edges=edges[rows],
        na=columns["guide.fiber.na"][rows],
        core_index=columns["guide.fiber.core_index"][rows],
        core_um=columns["guide.fiber.core_um"][rows],
        bend_radius_mm=radius[rows],
        bend_deg=angle[rows],
    )
    power = power.copy()
    power[rows] = np.einsum("dij,diw->djw", np.maximum(matrix, 0.0), power[rows], optimize=True)
    return power, bent


def _repeated(values: np.ndarray, repeats: np.ndarray, fill: float) -> np.ndarray:
    """List columns with each item written out as often as it repeats [design, bend]."""
    width = int(repeats.sum(axis=1).max())
    out = np.full((len(values), width), fill)
    end = np.cumsum(repeats, axis=1)
    for item in range(values.shape[1]):
        place = np.arange(width)
        here = (place >= (end[:, item] - repeats[:, item])[:, None]) & (place < end[:, item][:, None])
        out = np.where(here, values[:, item, None], out)
    return out


def _numbers(columns: Columns, beam: Beam, bins: np.ndarray, after: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
    spectrum = beam.spectrum_w_nm
    delivered = bins.sum(axis=1)
    lamp = after["lamp"]
    return {
        "delivered_lm": delivered,
        "delivered_w": integral(spectrum),
        "transmission": np.where(lamp > 0, delivered / np.maximum(lamp, 1e-300), 0.0),
        "exit_na": cone_na_holding(sine2_edges=beam.sine2_edges, flux=bins, share=EXIT_SHARE),
        "color_temperature_k": color_temperature_k(wavelength_nm=GRID_NM, power=spectrum),
        "color_duv": duv(wavelength_nm=GRID_NM, power=spectrum),
        "color_rendering_index": color_rendering_index(wavelength_nm=GRID_NM, power=spectrum),
        "core_area_mm2": fiber_area_mm2(
            diameter_mm=columns["guide.bundle.diameter_mm"], packing_fraction=columns["guide.bundle.packing_fraction"]
        )
        * _core_share(columns, "guide.fiber"),
    }
