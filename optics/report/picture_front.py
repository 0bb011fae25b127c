"""What lies before the lens, as the image meets it: the subject in its perspective, the light on it, and its blur."""

from dataclasses import dataclass

import numpy as np

from optics.fiberscope import Fiberscope
from optics.image.objective import defocus_blur_um
from optics.report.picture_back import Back
from optics.report.views import exit_cone
from optics.scene.irradiance import bore_irradiance_w_m2, plane_irradiance_w_m2
from optics.units import deg_from_rad, mm_from_um
from optics.viewer.blur import stretched
from optics.viewer.off_axis import edge_acceptance_ratio, edge_light_ratio
from optics.viewer.sight import Sight, sight_on_bore, sight_on_plane
from optics.viewer.subjects import subject_reflectance

MOST_PIXELS = 3000  # along a side of a subject that is laid out in perspective
REPEATED = ("cracks", "gear", "vessels")  # subjects that go on beyond their edges, mirrored
LIGHT_NODES, SIGHT_NODES = 65, 257  # along each side: of the light's map, of the line of sight on a plane


@dataclass(frozen=True, slots=True)
class Front:
    """Reflectance [row, column] over the image, light over that behind the level, and blur; `width_mm` of the subject.

    `one_scale`: the image shows a plane without distortion or perspective.
    """

    reflectance: np.ndarray
    light_ratio: np.ndarray
    defocus_um: np.ndarray | float
    sample_um: float
    width_mm: float
    wall: bool
    one_scale: bool


def front_of(fiberscope: Fiberscope, back: Back, *, subject: str, side_um: float, samples: int, seed: int) -> Front:
    """The subject in the target's place: flat on a plane, or round the wall of a bore, over a square of the image."""
    wall = fiberscope.scene.target.form == "bore"
    coarse = _sight(fiberscope, back, side_um, LIGHT_NODES)
    drawn = {"subject": subject, "contrast": fiberscope.scene.target.detail_contrast, "seed": seed}
    # A pattern that is as wide as the field; around a bore, once around its wall.
    width_mm = np.pi * fiberscope.scene.target.bore_mm if wall else mm_from_um(side_um) / back.magnification
    one_scale = not wall and not _distorts(coarse, back, side_um)
    if not one_scale:
        flat = subject_reflectance(**drawn, width_mm=width_mm, pixels=min(2 * samples, MOST_PIXELS))
        reflectance = _laid_out(fiberscope, back, side_um, samples, flat, width_mm, subject in REPEATED)
    else:
        reflectance = subject_reflectance(**drawn, width_mm=width_mm, pixels=samples)
    blur = defocus_blur_um(
        focal_mm=back.focal_mm,
        f_number=back.f_number,
        focus_mm=back.focus_from_pupil_mm,
        distance_mm=coarse.distance_mm,
    )
    # Nothing is there to be sharp where no target is met: the blur of the farthest that is
    blur = np.where(coarse.meets, blur, blur[coarse.meets].max(initial=0.0))
    even = float(np.ptp(blur)) < 1e-6
    return Front(
        reflectance,
        _light_ratio(fiberscope, back, coarse, side_um),
        float(blur.max()) if even else blur,
        side_um / samples,
        width_mm,
        wall,
        one_scale,
    )


def _sight(fiberscope: Fiberscope, back: Back, side_um: float, nodes: int) -> Sight:
    """Where a grid of points over the square of the image looks, from corner to corner."""
    at = mm_from_um(side_um) * np.linspace(-0.5, 0.5, nodes)
    target, common = (
        fiberscope.scene.target,
        {"x_mm": at[None, :], "y_mm": at[:, None], "mapping": back.mapping, "index": back.index},
    )
    common |= {"image_distance_mm": back.image_distance_mm, "pupil_depth_mm": back.pupil_depth_mm}
    if target.form == "bore":
        deepest = 40.0 * max(target.bore_mm, target.distance_mm)
        return sight_on_bore(**common, bore_mm=target.bore_mm, farthest_mm=deepest)
    return sight_on_plane(**common, distance_mm=target.distance_mm, tilt_deg=target.tilt_deg)


def _distorts(sight: Sight, back: Back, side_um: float) -> bool:
    """Whether the image is anything but the subject at one scale."""
    at = mm_from_um(side_um) * np.linspace(-0.5, 0.5, len(sight.u_mm)) / back.magnification
    off = max(np.abs(sight.u_mm - at[None, :]).max(), np.abs(sight.v_mm - at[:, None]).max())
    return bool(off > 1e-3 * at[-1]) or not bool(sight.meets.all())


def _laid_out(
    fiberscope: Fiberscope, back: Back, side_um: float, samples: int, flat: np.ndarray, width_mm: float, repeated: bool
) -> np.ndarray:
    """The subject read where each sample looks, linearly between its pixels; beyond its edges mirrored, or plain."""
    if fiberscope.scene.target.form == "bore":
        sight = _sight(fiberscope, back, side_um, samples)
        # depth along the wall counts from where the design works
        u, v, meets = sight.u_mm, sight.v_mm - back.distance_mm, sight.meets
    else:
        sight = _sight(fiberscope, back, side_um, SIGHT_NODES)
        u, v, meets = (
            stretched(values=part, rows=samples, columns=samples) for part in (sight.u_mm, sight.v_mm, sight.meets)
        )
        meets = meets > 0.999
    pixels = len(flat)
    row, column = ((np.asarray(at, float) / width_mm + 0.5) * pixels - 0.5 for at in (v, u))
    first = [np.floor(at).astype(int) for at in (row, column)]
    (down, across) = (at - before for at, before in zip((row, column), first))
    (r0, r1), (c0, c1) = ([_folded(before + step, pixels) for step in (0, 1)] for before in first)
    found = (flat[r0, c0] * (1 - across) + flat[r0, c1] * across) * (1 - down) + (
        flat[r1, c0] * (1 - across) + flat[r1, c1] * across
    ) * down
    if not repeated:
        found = np.where(np.maximum(np.abs(u), np.abs(v)) < 0.5 * width_mm, found, 1.0)
    return np.where(meets, found, 0.0)


def _folded(at: np.ndarray, pixels: int) -> np.ndarray:
    """Places beyond the ends, mirrored back."""
    at = np.mod(at, 2 * pixels)
    return np.where(at < pixels, at, 2 * pixels - 1 - at)


def _light_ratio(fiberscope: Fiberscope, back: Back, sight: Sight, side_um: float) -> np.ndarray:
    """Light that reaches the image, over that behind the level: by the ports, the lens's mapping, the cores' acceptance."""
    target = fiberscope.scene.target
    shown = {
        "ports": back.ports,
        "cone": exit_cone(back.lit, back.index),
        "power_w": float(back.lit.value["delivered_lm"][0]),
    }
    if target.form == "bore":
        turn = deg_from_rad(2 * sight.u_mm / target.bore_mm)
        lux = bore_irradiance_w_m2(
            **shown,
            bore_mm=target.bore_mm,
            z_mm=np.where(sight.meets, sight.v_mm, 1e3 * target.bore_mm),
            azimuth_deg=turn,
        )
    else:
        lux = plane_irradiance_w_m2(
            **shown, distance_mm=target.distance_mm, tilt_deg=target.tilt_deg, u_mm=sight.u_mm, v_mm=sight.v_mm
        )
    ratio = np.where(sight.meets, lux / back.lit_lux, 0.0)
    ratio = ratio * edge_light_ratio(half_angle_deg=sight.half_angle_deg, mapping=back.mapping)
    if not back.bundle or not np.isfinite(back.exit_pupil_mm):
        return ratio
    at = mm_from_um(side_um) * np.linspace(-0.5, 0.5, len(ratio))
    height = np.hypot(at[None, :], at[:, None])
    return ratio * edge_acceptance_ratio(
        height_mm=height, exit_pupil_mm=back.exit_pupil_mm, core_na=back.core_na, cone_sine=back.cone_sine
    )
