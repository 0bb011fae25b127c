"""What is said beside the picture: what it shows, its light, what was done to it and what that costs, in numbers."""

from collections.abc import Iterator

from optics.image.contrast import honeycomb_filter_mtf
from optics.report.picture_back import Back
from optics.viewer.bars import bar_frequencies_lp_mm
from optics.viewer.rendering import View
from optics.viewer.sensor import Smoothing
from optics.viewer.subjects import SUBJECTS


def picture_words(
    *,
    back: Back,
    view: View,
    out: Smoothing | None,
    subject: str,
    shown_mm: float,
    summed: int,
    noise: bool,
    width_mm: float,
    lit: bool,
    smooth: float | None,
) -> tuple[str, ...]:
    """Sentences about one picture, the most important first."""
    return (
        *_what(back, view, subject),
        *(() if lit else ("No light of the scope's own reaches the field of view.",)),
        *_detail(back, subject, width_mm),
        *_light(back, view, summed, noise),
        *_smoothed(back, out, smooth),
        *_limits(back, shown_mm),
    )


def _what(back: Back, view: View, subject: str) -> Iterator[str]:
    dark = f", {view.dead} of them dark" if view.dead else ""
    by = f"through {view.cores:,} cores{dark}" if back.bundle else "by a sensor at the tip"
    yield f"{SUBJECTS[subject].capitalize()} at {back.distance_mm:.3g} mm, {by}; made up for this picture."
    if back.mirrored:
        yield "A mirror image: the tip reflects an odd number of times."


def _detail(back: Back, subject: str, width_mm: float) -> Iterator[str]:
    gap = 0.5 / back.resolved_lp_mm if back.resolved_lp_mm > 0 else None
    if gap is None:
        yield "No detail of this contrast is resolved."
    elif subject == "bars":
        told = [f"{f:.3g}" for f in bar_frequencies_lp_mm(width_mm=width_mm) if f <= back.resolved_lp_mm]
        rest = f"the bars of {', '.join(told)} lp/mm are told apart" if told else "all bars here are finer"
        yield f"Resolved on axis: {back.resolved_lp_mm:.3g} lp/mm; {rest}."
        if back.bundle:
            yield f"Beyond {back.lattice_limit_lp_mm:.3g} lp/mm the cores show bars that are not there."
    else:
        yield f"A gap of {gap:.3g} mm is resolved on axis at the target's own contrast; single lines and spots show below that."


def _light(back: Back, view: View, summed: int, noise: bool) -> Iterator[str]:
    if back.eye:
        yield f"To the eye, {back.lit_level:.3g} cd/m2 on a bright core; shown without noise."
        return
    inside = "a pixel inside a core" if back.bundle else "a pixel"
    well = back.lit_level / back.full_well_e
    drawn = "" if noise else "; noise not drawn"
    where = (
        "in the middle of a plain target"
        if back.middle_lit
        else "of a plain target in the field's mean light (its middle is dark)"
    )
    yield (
        f"Exposure {_seconds(back.exposure_s)}: {_count(back.lit_level)} electrons on {inside} {where}, "
        f"{well:.2g} of its well{drawn}."
    )
    if view.saturated_share > 0:
        share = f"{view.saturated_share * 100:.2g} %" if view.saturated_share >= 1e-4 else "Under 0.01 %"
        yield f"{share} of the image's pixels are saturated: bright parts are cut off there."
    if summed > 1:
        yield f"Each pixel shown is the sum of {summed} x {summed} of the camera's."


def _smoothed(back: Back, out: Smoothing | None, smooth: float | None) -> Iterator[str]:
    if smooth is None:
        return
    if out is None:
        yield "A sensor at the tip has no honeycomb to smooth."
        return
    kept = honeycomb_filter_mtf(
        residual_contrast=smooth, pitch_um=back.pitch_um, frequency_lp_mm=back.resolved_lp_mm / back.magnification
    )
    yield (
        f"Smoothed to {smooth * 100:.2g} % of the honeycomb: "
        f"that keeps {out.limit_contrast:.2g} of the contrast at the lattice limit"
        + (f", {float(kept):.2g} at what is resolved" if back.resolved_lp_mm > 0 else "")
        + ("." if back.eye else f", and {out.noise_ratio:.2g} of each pixel's noise.")
    )


def _limits(back: Back, shown_mm: float) -> Iterator[str]:
    if back.bundle and shown_mm < 0.999 * back.image_mm:
        yield f"Only the middle {shown_mm:.3g} mm of the bundle's {back.image_mm:.3g} mm is drawn."
    if back.color_filter:
        yield "The mosaic of color filters is not drawn."
    yield "Glints, stray light from outside the field and the colors of single details are not drawn."


def _seconds(time_s: float) -> str:
    return f"{time_s:.3g} s" if time_s >= 1 else f"{time_s * 1e3:.3g} ms"


def _count(number: float) -> str:
    return f"{number:,.0f}" if number >= 1000 else f"{number:.3g}"
