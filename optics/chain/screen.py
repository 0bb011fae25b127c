"""Optical radiation of every design: what the screening lines need, in arrays."""

import dataclasses

import numpy as np

from optics.chain.columns import Columns
from optics.chain.cone import exit_mm
from optics.chain.light import Light
from optics.chain.target import Lit
from optics.scene.exposure import Screening, peak_factor, screening

PREFIX = "screen."
LEAST_TIP_MM = 10.0  # length over which a tip of unstated length gives off its heat: a house choice


def screen(columns: Columns, lit: Light, landed: Lit, body: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
    """Weighted quantities of the delivered light [design], by name with the prefix `screen.`."""
    flux = lit.beam.bin_w
    exit_na = lit.value["exit_na"]
    area_mm2 = np.pi / 4 * exit_mm(columns) ** 2
    # Several round ports are narrower than their common area; a ring is taken as wide as a disc of its area.
    count = np.where(columns.texts("scene.ports.form") == "round", columns.get("scene.ports.count", 1.0), 1.0)
    wide = np.where(np.isnan(body["outer_diameter_mm"]), columns["guide.bundle.diameter_mm"], body["outer_diameter_mm"])
    long = np.where(np.isnan(body["rigid_tip_mm"]), LEAST_TIP_MM, body["rigid_tip_mm"])
    has_target = columns.has("scene.target.distance_mm")[:, None]
    found = screening(
        power_w_nm=lit.beam.spectrum_w_nm,
        target_w_m2_nm=np.where(has_target, landed.center_w_m2_nm, np.nan),
        covered=columns.covered("source.lamp.spectrum") & columns.covered("guide.fiber.attenuation"),
        exit_na=exit_na,
        peak_factor=np.maximum(peak_factor(sine2_edges=lit.beam.sine2_edges, flux=flux, na=exit_na), 1e-9),
        port_area_mm2=area_mm2,
        port_mm=exit_mm(columns) / np.sqrt(count),
        tip_heat_w=lit.value["tip_heat_w"],
        tip_surface_mm2=np.pi * wide * long + np.pi / 4 * wide**2,
        face_heat_w=lit.value["face_heat_w"],
    )
    return {PREFIX + field.name: getattr(found, field.name) for field in dataclasses.fields(Screening)}
