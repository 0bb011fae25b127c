"""The picture that an operator gets of a subject: what the rendering needs, gathered from the chain for one design.

Sizes in micrometers are at the image: the bundle's face, or the sensor at the tip. Rows of arrays run upward.
"""

from dataclasses import dataclass

import numpy as np

from optics.fiberscope import Fiberscope
from optics.image.lattice import HEXAGONAL_FRACTION
from optics.report.picture_back import Back, back_of
from optics.report.picture_front import Front, front_of
from optics.report.picture_words import picture_words
from optics.spec import require
from optics.units import AnyUnit, mm_from_um, um_from_mm
from optics.viewer.rendering import View, render, render_chip
from optics.viewer.sensor import smoothed
from optics.viewer.subjects import require_subject

MOST_CORES, MOST_SAMPLES, LEAST_SAMPLES = 200_000, 2048, 800
SAMPLES_PER_PITCH, SAMPLES_PER_PIXEL = 5.0, 2.5  # of the subject: for each core of a bundle, each pixel of a sensor
MARGIN = 1.05  # width of what is drawn over the image's
JITTER_SHARE = 0.02  # rms place error of a core over the pitch: a house choice, less where cores would touch
WHITE_SHARE = 0.995  # of the pixels inside the image that are no brighter than white


@dataclass(frozen=True, slots=True)
class Picture:
    """A subject and its view by one design, at the same scale.

    `subject_reflectance` [row, column] is the subject as a perfect eye in the tip's place would see it, relative to the
    target's own, one sample `sample_mm` wide; `view` [row, column] holds electrons (an eye: cd/m2), one pixel
    `pixel_mm` wide, both at the target on axis. `field_mm`: diameter of the round image there, None for a sensor.
    `white`: the level to show as white; `tint`: color of the picture, red, green, blue as linear shares. `wall`: a look
    along a bore; `one_scale`: neither perspective nor distortion. `residual_contrast`: what smoothing left of the
    honeycomb, None for a raw picture.
    """

    name: str
    viewer: str
    subject: str
    subject_reflectance: np.ndarray
    sample_mm: float
    view: AnyUnit
    pixel_mm: float
    field_mm: float | None
    white: AnyUnit
    tint: tuple[float, float, float]
    residual_contrast: float | None
    mirrored: bool
    wall: bool
    one_scale: bool
    exposure_s: float | None
    saturated_share: float
    cores: int
    dead: int
    words: tuple[str, ...]


def view_of(
    fiberscope: Fiberscope, *, subject: str, width_px: int, seed: int, smooth: float | None, noise: bool
) -> Picture | None:
    """What an operator sees of a generated subject in the target's place. None without an image.

    Parameters
        subject: one of `viewer.subjects.SUBJECTS`; its deepest feature has the target's detail contrast;
        width_px: pixels across the view at most; finer camera pixels are summed, an eye gets just so many;
        seed: of subject, bundle and noise;
        smooth: share of the honeycomb's contrast that a processor leaves, None for the raw picture;
        noise: whether a camera's noise is drawn.
    Raises OutOfRange.
    """
    require_subject(subject)
    require("width_px", width_px, "from 32 to 4096", 32 <= width_px <= 4096)
    if smooth is not None:
        require("smooth", smooth, "above 0 and at most 1", 0 < smooth <= 1)
    if fiberscope.image is None or fiberscope.scene is None:
        return None
    back = back_of(fiberscope)
    image_um = _image_um(back)
    rows, columns, summed, pixel_um = _frame(back, image_um, width_px)
    side_um = MARGIN * max(image_um if back.bundle else 0.0, pixel_um * max(rows, columns))
    finest = SAMPLES_PER_PITCH / back.pitch_um if back.bundle else SAMPLES_PER_PIXEL / pixel_um
    samples = int(np.clip(finest * side_um, LEAST_SAMPLES, MOST_SAMPLES))
    front = front_of(fiberscope, back, subject=subject, side_um=side_um, samples=samples, seed=seed)
    view = _rendered(back, front, image_um, pixel_um, rows, columns, summed, noise, seed)
    out = None
    if smooth is not None and back.bundle:
        out = smoothed(image=view.image, residual_contrast=smooth, pitch_um=back.pitch_um, pixel_um=pixel_um)
    image = view.image if out is None else out.image
    image = image[:, ::-1] if back.mirrored else image
    return Picture(
        name=fiberscope.name,
        viewer="chip" if not back.bundle else "eye" if back.eye else "camera",
        subject=subject,
        subject_reflectance=front.reflectance,
        sample_mm=mm_from_um(side_um / samples) / back.magnification,
        view=image,
        pixel_mm=view.pixel_mm,
        field_mm=mm_from_um(image_um) / back.magnification if back.bundle else None,
        white=white_level(image=image, field_pixels=image_um / pixel_um if back.bundle else None),
        tint=back.tint,
        residual_contrast=smooth if out else None,
        mirrored=back.mirrored,
        wall=front.wall,
        one_scale=front.one_scale,
        exposure_s=None if back.eye else back.exposure_s,
        saturated_share=view.saturated_share,
        cores=view.cores,
        dead=view.dead,
        words=picture_words(
            back=back, view=view, out=out, subject=subject, shown_mm=mm_from_um(image_um), summed=summed, noise=noise,
            width_mm=front.width_mm, lit=bool((front.light_ratio > 0).any()), smooth=smooth,
        ),
    )  # fmt: skip


def _image_um(back: Back) -> float:
    """Diameter of the round image that is drawn: of the bundle, or the middle of a bundle of too many cores."""
    return min(um_from_mm(back.image_mm), back.pitch_um * float(np.sqrt(MOST_CORES / HEXAGONAL_FRACTION)))


def _frame(back: Back, image_um: float, width_px: int) -> tuple[int, int, int, float]:
    """Rows, columns, how many of the camera's pixels along a side make one of the picture's, and its size."""
    if back.eye:
        return width_px, width_px, 1, MARGIN * image_um / width_px
    if not back.bundle:
        summed = -(-max(back.rows, back.columns) // width_px)
        return max(back.rows // summed, 1), max(back.columns // summed, 1), summed, back.pixel_um * summed
    wide = max(int(np.ceil(MARGIN * image_um / back.pixel_um)), 1)
    summed = -(-wide // width_px)
    return -(-wide // summed), -(-wide // summed), summed, back.pixel_um * summed


def _rendered(back: Back, front: Front, image_um, pixel_um, rows, columns, summed, noise, seed) -> View:
    """The view, by bundle or by chip; `summed` x `summed` pixels act as one with their wells and noises together."""
    together = 1.0 if back.eye else float(summed)
    common = {
        "reflectance": front.reflectance,
        "light_ratio": front.light_ratio,
        "sample_um": front.sample_um,
        "lens_lp_mm": back.lens_lp_mm,
        "lens_mtf": back.lens_mtf,
        "defocus_um": front.defocus_um,
        "pixel_um": pixel_um,
        "rows": rows,
        "columns": columns,
        "magnification": back.magnification,
        "lit_level": back.lit_level * together**2,
        "full_well_e": back.full_well_e * together**2,
        "dark_noise_e": back.dark_noise_e * together,
        "gain_dn_e": back.gain_dn_e / together,
        "noise": noise and not back.eye,
        "seed": seed,
    }
    if not back.bundle:
        return render_chip(**common)
    return render(
        **common,
        image_um=image_um,
        pitch_um=back.pitch_um,
        core_um=back.core_um,
        turn_deg=float(np.random.default_rng([seed, 60]).uniform(0.0, 60.0)),  # bundles are mounted at any turn
        jitter_share=min(JITTER_SHARE, (1.0 - back.core_um / back.pitch_um) / 6.0),
        dead_fraction=back.dead_fraction,
        transmission_spread=back.transmission_spread,
        exchange_share=back.exchange_share,
        veil_ratio=back.veil_ratio,
    )


def white_level(*, image: AnyUnit, field_pixels: float | None) -> AnyUnit:
    """The level below which all but the brightest few pixels of the image lie; never 0."""
    inside = np.ones(image.shape, bool)
    if field_pixels is not None:
        rows, columns = image.shape
        away = np.hypot(np.arange(columns) - (columns - 1) / 2, (np.arange(rows) - (rows - 1) / 2)[:, None])
        inside = away <= 0.5 * field_pixels
    return max(float(np.quantile(image[inside], WHITE_SHARE)), 1e-9)
