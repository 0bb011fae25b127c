"""From the lamp onto the face: what part of the lamp's light meets the guide in spot and in cone.

Four forms, one answer: `Launched`. Overfilled spot and overfilled cone stay two losses. Radiance is
conserved: no form may put more on the face than the lamp's radiance allows; where a stated spot or
rating would, the design is refused (see `excess_radiance_ratio`).
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np

from optics.circles import overlap_area
from optics.source.lamp import etendue_mm2_sr
from optics.spec import Spec, positive, quantity
from optics.units import Flags, Numbers


class Butt(Spec):
    """The emitter stands before the face, with a gap of air."""

    form: Literal["butt"] = quantity("the emitter stands before the face")
    gap_mm: float = quantity("distance from emitter to face", ge=0, le=50, usual=(0.0, 3.0), common=True)


class Spot(Spec):
    """A condenser makes a spot of stated diameter and cone on the face."""

    form: Literal["spot"] = quantity("a condensed spot on the face")
    spot_mm: float = quantity(
        "diameter of the spot; of its 1/e^2 circle for a gaussian", gt=0, usual=(0.3, 8.0), common=True
    )
    cone_na: float = quantity(
        "sine of the half-angle of the light on the face", gt=0, le=1, usual=(0.1, 0.8), common=True
    )
    profile: Literal["top_hat", "gaussian"] = quantity(
        "how the light is spread over the spot", default="top_hat", source="assumed"
    )
    transmission: float = quantity("of the condenser", gt=0, le=1, usual=(0.5, 1.0))


class Matched(Spec):
    """An ideal condenser that fills the whole face, and as much of the cone as etendue allows."""

    form: Literal["matched"] = quantity("a condenser matched in etendue")
    transmission: float = quantity("of the condenser", gt=0, le=1, usual=(0.5, 1.0), common=True)


class Rated(Spec):
    """The lamp is sold as so many lumens out of a reference guide."""

    form: Literal["rated"] = quantity("the lamp is rated as lumens out of a reference guide")
    rated_lm: float = quantity("lumens out of the reference guide", gt=0, usual=(50.0, 3000.0), common=True)
    reference_diameter_mm: float = quantity("diameter of the reference guide", gt=0, usual=(1.0, 8.0))
    reference_na: float = quantity("numerical aperture of the reference guide", gt=0, le=1, usual=(0.3, 0.9))


@dataclass(frozen=True, slots=True)
class Launched:
    """What reaches the face.

    `condenser_share` [...] of the lamp's light arrives at all; `cone_share` [..., bin] of that lies in
    each angle bin that the guide takes (its sum is below 1 when the cone is overfilled); `spot_share`
    [..., bin] of each bin falls on the face.
    """

    condenser_share: np.ndarray
    cone_share: np.ndarray
    spot_share: np.ndarray


def matched_fraction(*, lamp_etendue_mm2_sr: Numbers, bundle_etendue_mm2_sr: Numbers) -> Numbers:
    """The most that an ideal condenser can put from a lamp into a bundle: min(1, G_bundle / G_lamp).

    >>> die = etendue_mm2_sr(diameter_mm=(4 / np.pi) ** 0.5, na=1.0)     # 1 mm2, Lambertian
    >>> core = etendue_mm2_sr(diameter_mm=(4 / np.pi) ** 0.5, na=0.5)    # 1 mm2 of core, NA 0.5
    >>> round(250 * matched_fraction(lamp_etendue_mm2_sr=die, bundle_etendue_mm2_sr=core), 6)
    62.5
    """
    positive(lamp_etendue_mm2_sr=lamp_etendue_mm2_sr, bundle_etendue_mm2_sr=bundle_etendue_mm2_sr)
    return np.minimum(1.0, np.asarray(bundle_etendue_mm2_sr) / lamp_etendue_mm2_sr)


def disc_share(*, spot_mm: Numbers, face_mm: Numbers, gaussian: Flags) -> Numbers:
    """Share of a centered spot that falls on a face: (D/d)^2 for a top hat, 1 - exp(-2 D^2/d^2) for a gaussian.

    >>> float(disc_share(spot_mm=2.0, face_mm=1.0, gaussian=False))
    0.25
    >>> round(float(disc_share(spot_mm=2.0, face_mm=2.0, gaussian=True)), 4)
    0.8647
    """
    ratio = (np.asarray(face_mm) / spot_mm) ** 2
    return np.where(gaussian, -np.expm1(-2 * ratio), np.minimum(1.0, ratio))


def gap_share(*, emitter_mm: Numbers, face_mm: Numbers, gap_mm: Numbers, sine: Numbers) -> Numbers:
    """Share of the rays of one angle that cross a gap from an emitter to a coaxial face.

    Exact: rays of polar angle theta move the emitter's disc sideways by gap tan(theta); the share is
    the overlap of the moved disc with the face over the emitter's area, whatever the azimuth.

    >>> float(gap_share(emitter_mm=1.0, face_mm=2.0, gap_mm=0.0, sine=0.5))
    1.0
    """
    shift = gap_mm * sine / np.sqrt(1 - np.asarray(sine) ** 2)
    area = np.pi / 4 * np.asarray(emitter_mm) ** 2
    return overlap_area(radius_1=np.asarray(emitter_mm) / 2, radius_2=np.asarray(face_mm) / 2, distance=shift) / area


def cone_share(*, sine2_edges: np.ndarray, cone_na: Numbers) -> np.ndarray:
    """Share of a uniformly filled cone that lies in each angle bin (uniform radiance is uniform in sin^2)."""
    inside = np.minimum(sine2_edges, np.asarray(cone_na)[..., None] ** 2)
    return np.diff(inside, axis=-1) / np.asarray(cone_na)[..., None] ** 2


def matched_cone_na(*, lamp_etendue_mm2_sr: Numbers, face_mm: Numbers, na: Numbers) -> Numbers:
    """Cone of an ideal condenser that fills the whole face: the guide's NA, or less if the lamp has less etendue."""
    face = etendue_mm2_sr(diameter_mm=face_mm, na=na)
    return na * np.sqrt(np.minimum(1.0, lamp_etendue_mm2_sr / face))


def rated_flux_share(
    *,
    rated_share: Numbers,
    lamp_etendue_mm2_sr: Numbers,
    reference_etendue_mm2_sr: Numbers,
    face_etendue_mm2_sr: Numbers,
) -> Numbers:
    """Share of the lamp's light on this face, rescaled by etendue from a reference guide.

    The rating fixes the flux per etendue; a larger guide gains only until the lamp's own etendue is
    used up: share = rated * min(G_face, G_lamp) / min(G_reference, G_lamp). What the reference guide
    itself lost is not known and stays in the rating, so the answer is on the cautious side.

    >>> float(rated_flux_share(rated_share=0.2, lamp_etendue_mm2_sr=9.0, reference_etendue_mm2_sr=4.0, face_etendue_mm2_sr=1.0))
    0.05
    """
    here = np.minimum(face_etendue_mm2_sr, lamp_etendue_mm2_sr)
    return rated_share * here / np.minimum(reference_etendue_mm2_sr, lamp_etendue_mm2_sr)


def spot_radiance_ratio(
    *, transmission: Numbers, lamp_etendue_mm2_sr: Numbers, spot_mm: Numbers, cone_na: Numbers, gaussian: Flags
) -> Numbers:
    """Peak radiance of a condensed spot over the lamp's own; above 1 the second law forbids it.

    A gaussian of the same 1/e^2 diameter peaks at twice the mean of a top hat.

    >>> lamp = etendue_mm2_sr(diameter_mm=2.0, na=1.0)
    >>> round(float(spot_radiance_ratio(transmission=0.8, lamp_etendue_mm2_sr=lamp, spot_mm=4.0, cone_na=0.5, gaussian=False)), 3)
    0.8
    """
    peak = np.where(gaussian, 2.0, 1.0)
    return peak * transmission * lamp_etendue_mm2_sr / etendue_mm2_sr(diameter_mm=spot_mm, na=cone_na)


# Rules across tables, asked of scalars and of arrays: no launch may be brighter than its lamp


def spot_allowed(spot_mm, spot_na, emitter_mm, lamp_na, transmission, profile) -> Flags:
    """Whether a condensed spot is at most as bright as its lamp."""
    ratio = spot_radiance_ratio(
        transmission=transmission,
        lamp_etendue_mm2_sr=etendue_mm2_sr(diameter_mm=emitter_mm, na=lamp_na),
        spot_mm=spot_mm,
        cone_na=spot_na,
        gaussian=np.asarray(profile) == "gaussian",
    )
    return ratio <= 1 + 1e-9


def rating_allowed(rated_lm, flux_lm, emitter_mm, lamp_na, reference_mm, reference_na) -> Flags:
    """Whether a rating is at most what the lamp's radiance puts into the reference guide."""
    lamp = etendue_mm2_sr(diameter_mm=emitter_mm, na=lamp_na)
    guide = etendue_mm2_sr(diameter_mm=reference_mm, na=reference_na)
    return rated_lm <= flux_lm * np.minimum(1.0, guide / lamp) * (1 + 1e-9)
