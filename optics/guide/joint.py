"""The joint from a light cable to the scope's own guide: area, cone, gap, offset and two more faces."""

import numpy as np

from optics.circles import overlap_area
from optics.spec import Spec, quantity
from optics.units import Numbers

AZIMUTHS = (np.arange(24) + 0.5) * np.pi / 24  # half a turn; the other half mirrors it


class Joint(Spec):
    """How the cable's face meets the guide's face."""

    gap_mm: float = quantity("distance between the two faces", ge=0, le=20, usual=(0.0, 1.0), common=True)
    offset_mm: float = quantity(
        "sideways offset of the two axes", default=0.0, source="assumed", ge=0, le=20, usual=(0.0, 1.0)
    )
    index: float = quantity(
        "refractive index between the faces (1 = air)", default=1.0, source="assumed", ge=1, le=2, usual=(1.0, 1.6)
    )


def joint_share(
    *, from_mm: Numbers, to_mm: Numbers, gap_mm: Numbers, offset_mm: Numbers, gap_index: Numbers, na: Numbers
) -> np.ndarray:
    """Share of the rays of one NA that cross from one round face to another.

    A ray of polar angle theta (n sin theta = NA) moves the face's image sideways by gap tan(theta);
    the share is the overlap of the moved disc with the other face over its own area, averaged over
    azimuth because a straight guide scrambles it. Exact for uniformly lit faces.

    >>> round(float(joint_share(from_mm=3.5, to_mm=1.5, gap_mm=0.0, offset_mm=0.0, gap_index=1.0, na=0.5)), 4)
    0.1837
    """
    sine = np.minimum(np.asarray(na) / gap_index, 1.0 - 1e-12)
    shift = (gap_mm * sine / np.sqrt(1 - sine**2))[..., None]
    away = np.sqrt(
        shift**2
        + np.asarray(offset_mm)[..., None] ** 2
        + 2 * shift * np.asarray(offset_mm)[..., None] * np.cos(AZIMUTHS)
    )
    common = overlap_area(
        radius_1=np.asarray(from_mm)[..., None] / 2, radius_2=np.asarray(to_mm)[..., None] / 2, distance=away
    )
    return common.mean(axis=-1) / (np.pi / 4 * np.asarray(from_mm) ** 2)
