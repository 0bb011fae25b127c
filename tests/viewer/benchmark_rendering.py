"""How long a picture takes: run by hand, `python tests/viewer/benchmark_rendering.py` from the root; nothing is asserted."""

import statistics
import sys
import time
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from optics import presets
from optics.image.coupled import rings
from optics.image.lattice import HEXAGONAL_FRACTION
from optics.report.picture import view_of
from optics.viewer.rendering import render
from optics.viewer.sensor import smoothed

RUNS = 9


def given(cores: int, pixels: int) -> dict:
    """A bundle of so many cores on a square frame, everything switched on."""
    pitch, samples = 10.0, 5
    image = pitch * float(np.sqrt(cores / HEXAGONAL_FRACTION))
    side = int(1.05 * image / pitch * samples) // 32 * 32
    return {
        "reflectance": np.random.default_rng(0).random((side, side)), "light_ratio": np.ones((65, 65)),
        "sample_um": pitch / samples,
        "lens_lp_mm": np.array([0.0, 400.0]), "lens_mtf": np.array([1.0, 0.0]), "defocus_um": 3.0, "image_um": image,
        "pitch_um": pitch, "core_um": 7.5, "turn_deg": 7.0, "jitter_share": 0.02, "dead_fraction": 0.002,
        "transmission_spread": 0.05, "veil_ratio": 0.03,
        "exchange_share": np.array([0.76, 0.04] + [0.0] * (len(rings()) - 2)),
        "pixel_um": 1.03 * image / pixels, "rows": pixels, "columns": pixels, "magnification": 0.05, "lit_level": 4000.0,
        "full_well_e": 10000.0, "dark_noise_e": 2.4, "gain_dn_e": 0.4, "noise": True, "seed": 1,
    }  # fmt: skip


def told(name: str, work) -> None:
    start = time.perf_counter()
    work()
    first, times = time.perf_counter() - start, []
    for _ in range(RUNS):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    print(f"{name:56s} first {first * 1e3:6.0f} ms   median {statistics.median(times) * 1e3:6.0f} ms")


def main() -> None:
    for cores, pixels in ((50_000, 1000), (3_000, 400), (3_000, 1000)):
        settings = given(cores, pixels)
        told(f"render, {cores:,} cores on {pixels} x {pixels} pixels", lambda settings=settings: render(**settings))
    view = render(**given(50_000, 1000))
    told(
        "smoothed, 1000 x 1000", lambda: smoothed(image=view.image, residual_contrast=0.01, pitch_um=10.0, pixel_um=2.4)
    )
    for name, subject in (("gearbox_tooth", "gear"), ("airway_small_animal", "vessels"), ("turbine_casing", "cracks")):
        scope = presets.open(name).fiberscope
        told(
            f"view_of, {name}, {subject}",
            lambda scope=scope, subject=subject: view_of(
                scope, subject=subject, width_px=1000, seed=3, smooth=None, noise=True
            ),
        )


if __name__ == "__main__":
    main()
