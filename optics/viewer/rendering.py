"""The view: what an operator sees of a subject, through the lens, the cores and the camera; or by a sensor at the tip.

Subject x light -> the lens's blur -> what each core collects -> what its neighbors pass on -> its throughput -> its
disc on the pixels -> noise. Sizes are micrometers at the image (the bundle's face, or the sensor); rows run upward.
"""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from optics.spec import not_negative, positive, require
from optics.units import AnyUnit, mm_from_um
from optics.viewer.blur import blur_at, blurred, contrast_table, lit_subject
from optics.viewer.mosaic import Mosaic, drawing, drawn, exchanged, mosaic, spline, taps
from optics.viewer.sensor import exposed, round_frame


@dataclass(frozen=True, slots=True)
class View:
    """The picture [row, column], upward, in the unit of `lit_level`; the size of a pixel at the target, on axis.

    `saturated_share`: of the pixels of the image, those whose well was full. `cores` and `dead` are counts, 0 for a
    sensor at the tip.
    """

    image: AnyUnit
    pixel_mm: float
    saturated_share: float
    cores: int
    dead: int


def render(
    *,
    reflectance: np.ndarray,
    light_ratio: np.ndarray,
    sample_um: float,
    lens_lp_mm: np.ndarray,
    lens_mtf: np.ndarray,
    defocus_um: np.ndarray | float,
    image_um: float,
    pitch_um: float,
    core_um: float,
    turn_deg: float,
    jitter_share: float,
    dead_fraction: float,
    transmission_spread: float,
    exchange_share: np.ndarray,
    veil_ratio: float,
    pixel_um: float,
    rows: int,
    columns: int,
    magnification: float,
    lit_level: float,
    full_well_e: float,
    dark_noise_e: float,
    gain_dn_e: float,
    noise: bool,
    seed: int,
) -> View:
    """The view through a bundle of cores.

    Parameters
        reflectance [row, column]: the subject as the image meets it, relative, sampled every `sample_um` about the
            middle and wide enough for the image and its blur (it is taken as periodic);
        light_ratio, any coarser shape over the same rectangle: light on the image over that behind `lit_level`;
        lens_lp_mm, lens_mtf: the lens's contrast without defocus, at rising frequencies from 0 on, the last beyond;
        defocus_um: diameter of the blur disc, one for all or a coarse map over the same rectangle;
        image_um: circle in which the cores' centers lie; the lattice as in `mosaic`; exchange_share as in
            `image.coupled.ring_shares`; veil_ratio: light between the cores, over the image's mean;
        pixel_um at the bundle, rows, columns: the camera's pixels (an eye: those of the picture);
        magnification: size at the image over size at the target, on axis;
        lit_level: what a pixel wholly inside an undisturbed core's disc holds where reflectance and light are 1: mean
            electrons, or for an eye cd/m2 (then full_well_e infinite, noise False, and pixels are means);
        noise: whether to draw it; the well fills and is counted either way.
    Returns View. Raises OutOfRange.
    References: closed_form (Fourier optics); emva_1288 (noise).
    """
    positive(pixel_um=pixel_um, lit_level=lit_level, magnification=magnification)
    require("core_um", core_um, "above 0 and at most pitch_um", 0 < core_um <= pitch_um)
    not_negative(veil_ratio=veil_ratio)
    cores = mosaic(
        pitch_um=pitch_um,
        image_um=image_um,
        turn_deg=turn_deg,
        jitter_share=jitter_share,
        dead_fraction=dead_fraction,
        transmission_spread=transmission_spread,
        seed=seed,
    )
    face = lit_subject(reflectance=reflectance, light_ratio=light_ratio)
    lens = contrast_table(lens_lp_mm=lens_lp_mm, lens_mtf=lens_mtf, sample_um=sample_um, core_um=core_um)
    collected = _collected(face, sample_um, lens, defocus_um, cores)
    light = exchanged(light=collected, cores=cores, exchange_share=exchange_share)
    light = light * cores.throughput_ratio * cores.alive
    discs = drawing(cores=cores, core_um=float(core_um), pixel_um=float(pixel_um), rows=rows, columns=columns)
    picture = drawn(light=light, drawing=discs)
    circle = round_frame(rows=rows, columns=columns, radius=0.5 * float(image_um / pixel_um))
    if veil_ratio > 0:
        picture = picture + veil_ratio * picture[circle > 0.5].mean() * circle
    image, share = exposed(
        mean_e=lit_level * picture,
        full_well_e=full_well_e,
        dark_noise_e=dark_noise_e,
        gain_dn_e=gain_dn_e,
        noise=noise,
        inside=circle > 0.5,
        seed=seed,
    )
    return View(image, mm_from_um(pixel_um) / magnification, share, len(light), int((~cores.alive).sum()))


def render_chip(
    *,
    reflectance: np.ndarray,
    light_ratio: np.ndarray,
    sample_um: float,
    lens_lp_mm: np.ndarray,
    lens_mtf: np.ndarray,
    defocus_um: np.ndarray | float,
    pixel_um: float,
    rows: int,
    columns: int,
    magnification: float,
    lit_level: float,
    full_well_e: float,
    dark_noise_e: float,
    gain_dn_e: float,
    noise: bool,
    seed: int,
) -> View:
    """The view by a sensor at the tip: the pixels look directly; parameters as for `render`.

    Pixels are square and touch; a color filter mosaic is not drawn. References: closed_form; emva_1288 (noise).
    """
    positive(pixel_um=pixel_um, lit_level=lit_level, magnification=magnification)
    face = lit_subject(reflectance=reflectance, light_ratio=light_ratio)
    lens = contrast_table(lens_lp_mm=lens_lp_mm, lens_mtf=lens_mtf, sample_um=sample_um, core_um=0.0)
    x, y = ((np.arange(count) - (count - 1) / 2) * pixel_um for count in (columns, rows))
    blur = blur_at(defocus_um=defocus_um, shape=face.shape, sample_um=sample_um, x_um=x[None, :], y_um=y[:, None])
    frame = (int(rows), int(columns), float(pixel_um / sample_um))
    picture = blurred(
        face=face,
        sample_um=sample_um,
        lens=lens,
        blur_um=blur,
        pixel_um=pixel_um,
        seen=lambda whole: _on_pixels(whole, *frame),
    )
    image, share = exposed(
        mean_e=lit_level * np.maximum(picture, 0.0),
        full_well_e=full_well_e,
        dark_noise_e=dark_noise_e,
        gain_dn_e=gain_dn_e,
        noise=noise,
        inside=np.ones((rows, columns), bool),
        seed=seed,
    )
    return View(image, mm_from_um(pixel_um) / magnification, share, 0, 0)


def _collected(face, sample_um, lens, defocus_um, cores: Mosaic) -> AnyUnit:
    """What each core collects: the blurred picture averaged over its disc [core]."""
    place, weight = taps(cores=cores, rows=face.shape[0], columns=face.shape[1], sample_um=float(sample_um))
    found = blurred(
        face=face,
        sample_um=sample_um,
        lens=lens,
        blur_um=blur_at(defocus_um=defocus_um, shape=face.shape, sample_um=sample_um, x_um=cores.x_um, y_um=cores.y_um),
        pixel_um=0.0,
        seen=lambda whole: np.einsum("ij,ij->i", whole.ravel()[place], weight),
    )
    return np.maximum(found, 0.0).astype(float)  # below 0 only by the ringing of cut-off waves beside deep black


def _on_pixels(whole: AnyUnit, rows: int, columns: int, step: float) -> AnyUnit:
    """The picture at the middles of a frame of pixels, `step` samples apart."""
    (row, down), (column, across) = (_grid_taps(count, size, step) for count, size in zip(whole.shape, (rows, columns)))
    tall = sum(whole[row[:, tap]] * down[:, tap, None] for tap in range(row.shape[1]))
    tall = np.ascontiguousarray(tall.T)
    return sum(tall[column[:, tap]] * across[:, tap, None] for tap in range(column.shape[1])).T


@lru_cache(maxsize=8)
def _grid_taps(count: int, size: int, step: float) -> tuple[AnyUnit, AnyUnit]:
    place, weight = spline(place=(np.arange(size) - (size - 1) / 2) * step + (count - 1) / 2)
    return place % count, weight.astype(np.float32)
