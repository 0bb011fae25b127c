"""An optional window over the ports, plain or spreading: what it throws back, how far it pushes the target away."""

import numpy as np

from optics.circles import overlap_area
from optics.spec import Spec, not_negative, positive, quantity, require
from optics.units import Numbers

# Rays that stand for a bin of the cone when it is spread, evenly in sin^2.
RAYS_PER_BIN = 8


class Cover(Spec):
    """[scene.cover] A window over the ports; `spread_na` above 0: its face scatters each ray into a small cone."""

    index: float = quantity("refractive index of the window", ge=1.0, le=2.5, usual=(1.45, 1.8))
    thickness_mm: float = quantity("of the window", gt=0, usual=(0.1, 2.0))
    spread_na: float = quantity(
        "sine of the half-angle into which each ray is spread, evenly; 0: a clear window",
        default=0.0,
        source="trade",
        ge=0,
        lt=1,
        usual=(0.0, 0.4),
    )


def thrown_back_mm(*, thickness_mm: Numbers, na: Numbers, index: Numbers) -> np.ndarray:
    """How far from the edge of a port its light comes back from the far face of a common cover.

    2 t tan(asin(NA/n)): down and up again through the thickness. An objective nearer than that sees the port's
    reflection. Parameters: thickness_mm t, na of the cone in air, index n above na. References: closed_form.

    >>> round(float(thrown_back_mm(thickness_mm=0.5, na=0.57, index=1.52)), 4)
    0.4045
    """
    positive(index=index)
    not_negative(thickness_mm=thickness_mm, na=na)
    sine = np.asarray(na, float) / index
    require("na", na, "below the index of the cover", sine < 1)
    return 2 * np.asarray(thickness_mm) * sine / np.sqrt(1 - sine * sine)


def apparent_thickness_mm(*, thickness_mm: Numbers, na: Numbers, index: Numbers, outside_index: Numbers) -> np.ndarray:
    """Thickness of the outside medium over which the ray of this NA drifts sideways as far as in the cover.

    t tan(theta_cover)/tan(theta_outside), with n sin(theta) = NA in both; for na = 0 its limit t n_outside/n.
    So a port behind a cover stands this far behind the cover's face. References: closed_form (Snell's law).
    """
    positive(index=index, outside_index=outside_index)
    not_negative(thickness_mm=thickness_mm, na=na)
    na, index, outside = (np.asarray(x, float) for x in (na, index, outside_index))
    require("na", na, "below both indices", (na < index) & (na < outside))
    return thickness_mm * np.sqrt((outside**2 - na**2) / (index**2 - na**2))


def spread_share(*, sine2_edges: np.ndarray, spread_na: Numbers, spread_edges: np.ndarray) -> np.ndarray:
    """Where the flux of each bin goes when every ray is spread evenly over a disc of sines: a matrix.

    A ray of sine r lands within R with the share overlap(q, R; r)/(pi q^2) of the disc of radius q around it;
    each bin is an even mean over sin^2. Rows add up to 1 when the last edge reaches (NA + q)^2.

    Parameters: sine2_edges [..., bin + 1], spread_edges [..., new bin + 1], both sin^2 in air; spread_na q [...],
    above 0. Returns [..., bin, new bin]; what is spread beyond the last edge is lost.
    References: closed_form (area of a circular lens).
    """
    q = np.asarray(spread_na, float)
    positive(spread_na=q)
    edges, wanted = np.asarray(sine2_edges, float), np.asarray(spread_edges, float)
    part = (np.arange(RAYS_PER_BIN) + 0.5) / RAYS_PER_BIN
    ray = np.sqrt(edges[..., :-1, None] + np.diff(edges, axis=-1)[..., None] * part)[..., None]
    disc = q[..., None, None, None]
    within = overlap_area(radius_1=disc, radius_2=np.sqrt(wanted)[..., None, None, :], distance=ray)
    return np.diff(np.mean(within / (np.pi * disc**2), axis=-2), axis=-1)
