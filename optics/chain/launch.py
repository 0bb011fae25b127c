"""From the lamp onto the first face: spectrum, cone and spot, by each design's own form of launch."""

import numpy as np

from optics.chain.columns import Columns
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
from optics.spectrum import integral, luminous_flux_lm


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
