"""Light over the field of view of a plane that faces the ports, for many designs at once.

Center and mean are exact per angle bin: the center from what it sees of each port; the mean by
reciprocity, since the light of one point of a port that lands in the field is what a disc of the
field's size would send to that point. The least value is sought on a grid of interpolated values
and taken exactly where it was found. Unlit parts come from the circles that the ports light.
"""

from dataclasses import dataclass

import numpy as np

from optics.scene.exit_cone import ExitCone
from optics.scene.least import least_per_mm2
from optics.scene.lit import unlit_share
from optics.scene.ports import Port, as_ports, pieces
from optics.scene.region import bin_factor, distinct_ports, ports_area_mm2
from optics.spec import OutOfRange, not_negative, positive, require
from optics.units import lux_from_lm_mm2

# Points over a disc, radius and cosine of the direction: Gauss in r^2, on 6 circles squares of four points turned
# by the golden ratio from circle to circle; where the discs are concentric, 24 circles of one point.
_ROOTS, _WEIGHTS = np.polynomial.legendre.leggauss(6)
_TURN = np.arange(0.5, 6) * ((np.sqrt(5.0) - 1) / 2) % 1.0 * (np.pi / 2)
_SQUARES = np.repeat(np.sqrt((_ROOTS + 1) / 2), 4), np.repeat(_WEIGHTS, 4) / 8
_COSINE = np.stack([np.cos(_TURN), -np.cos(_TURN), np.sin(_TURN), -np.sin(_TURN)], axis=1).ravel()
_ROOTS, _WEIGHTS = np.polynomial.legendre.leggauss(24)
_CIRCLES = np.sqrt((_ROOTS + 1) / 2), _WEIGHTS / 2


@dataclass(frozen=True, slots=True)
class Lighting:
    """The field under one flux, each [design]; evenness is least over mean, 0 when a part is unlit."""

    center_lux: np.ndarray
    mean_lux: np.ndarray
    least_lux: np.ndarray
    evenness: np.ndarray
    unlit_share: np.ndarray
    first_lit_mm: np.ndarray


@dataclass(frozen=True, slots=True)
class FieldLight:
    """What unit flux in each bin does at the center and on average over the field, [design, bin]; the geometry."""

    center_per_mm2: np.ndarray
    mean_per_mm2: np.ndarray
    port_x_mm: np.ndarray
    port_y_mm: np.ndarray
    port_radius_mm: np.ndarray
    sine2_edges: np.ndarray
    distance_mm: np.ndarray
    field_radius_mm: np.ndarray

    def rows(self, at: np.ndarray) -> "FieldLight":
        """Some of the designs."""
        return FieldLight(*(getattr(self, name)[at] for name in self.__slots__))

    def under(self, flux_lm: np.ndarray) -> Lighting:
        """The field under a flux in each bin, shape [design, bin]; lumens give lux, watts W/m2.

        Exactly dark parts have least 0; `first_lit_mm` is where light first reaches the axis, infinite if never.
        """
        flux = np.asarray(flux_lm, float)
        not_negative(flux_lm=flux)
        center, mean = (np.sum(per * flux, axis=-1) for per in (self.center_per_mm2, self.mean_per_mm2))
        start, end = lit_tangents(sine2_edges=self.sine2_edges, flux=flux)
        unlit = unlit_share(self, start * self.distance_mm, end * self.distance_mm)
        # Above rounding, a part of the field lies outside every circle of light, and the least value is 0.
        all_lit = np.flatnonzero(unlit <= 1e-9)
        least = np.zeros(mean.shape)
        if all_lit.size:
            least[all_lit] = least_per_mm2(self.rows(all_lit), flux[all_lit])
        least = np.minimum(least, np.minimum(center, mean))
        evenness = np.where(mean > 0, least / np.where(mean > 0, mean, 1.0), 0.0)
        first = _first_lit_mm(self, end)
        return Lighting(*(lux_from_lm_mm2(x) for x in (center, mean, least)), evenness, unlit, first)


def field_irradiance(
    *,
    port_x_mm: np.ndarray,
    port_y_mm: np.ndarray,
    port_radius_mm: np.ndarray,
    sine2_edges: np.ndarray,
    distance_mm: np.ndarray,
    field_radius_mm: np.ndarray,
) -> FieldLight:
    """Light over a circle of a facing plane around the axis, per unit flux in each bin; all ports share it by area.

    center = sum over ports of [F(s_hi) - F(s_lo)]/(A (s_hi - s_lo)), F the configuration factor of the port within
    the cone (`region.disc_view`); mean = the share that lands in the field over pi R^2.

    Parameters: port_x_mm, port_y_mm, port_radius_mm [design, port] (radius 0: no port; negative: a disc cut out of
    the first port, for an annulus or a crescent); sine2_edges [design, bin + 1] rising, in the medium in front;
    distance_mm, field_radius_mm [design], above 0.
    Returns FieldLight. Raises OutOfRange on impossible geometry.
    References: lambert_1760; independent_integration (values).
    """
    x, y, radius = (np.asarray(value, float) for value in (port_x_mm, port_y_mm, port_radius_mm))
    edges, z, field = (np.asarray(value, float) for value in (sine2_edges, distance_mm, field_radius_mm))
    positive(distance_mm=z, field_radius_mm=field)
    area, width = ports_area_mm2(radius), np.diff(edges, axis=-1)
    require("the area of the ports", area, "above 0", area > 0)
    alone = (radius >= 0).all(axis=-1) | ((radius[:, 0] > 0) & (np.count_nonzero(radius, axis=-1) == 2))
    require("the number of discs", np.count_nonzero(radius, axis=-1), "2 where one is cut out of the first", alone)
    require("the rise of sine2_edges", width, "above 0", width > 0)
    # Ports of one size and one offset see, and are seen, alike.
    away = np.hypot(x, y)
    design, port, row = distinct_ports(away, radius)
    s, a, d = edges[design], np.abs(radius[design, port]), away[design, port]
    seen = bin_factor(z[design], d, a, s)[row]
    center = np.sum(np.sign(radius)[..., None] * seen, axis=1) / (area[:, None] * width)
    # Over the smaller of the two discs, what its points exchange with the larger one.
    small, large = np.minimum(a, field[design]), np.maximum(a, field[design])
    centered = (d <= 1e-9 * small)[:, None]
    reach, weight = (np.where(centered, circle, square) for circle, square in zip(_CIRCLES, _SQUARES))
    reach = reach * small[:, None]
    apart = np.sqrt(np.maximum((d**2)[:, None] + reach**2 + 2 * d[:, None] * reach * _COSINE, 0.0))
    landed = bin_factor(z[design, None], apart, large[:, None], s[:, None])
    landed = np.sum(landed * weight[..., None], axis=1) * (small**2 / field[design] ** 2)[:, None]
    mean = np.sum(np.sign(radius)[..., None] * landed[row], axis=1) / (area[:, None] * width)
    return FieldLight(np.maximum(center, 0.0), np.maximum(mean, 0.0), x, y, radius, edges, z, field)


def field_lighting(
    *, ports: Port | tuple[Port, ...], cone: ExitCone, flux_lm: float, distance_mm: float, field_radius_mm: float
) -> Lighting:
    """The field of one design, as numbers: facing ports, any cone. Watts give W/m2.

    Raises OutOfRange: a tilted port (see `surface.plane_field`); two ports of which one has a cut.
    References: lambert_1760; independent_integration (values).
    """
    x, y, radius = port_arrays([as_ports(ports)])
    field = field_irradiance(
        port_x_mm=x,
        port_y_mm=y,
        port_radius_mm=radius,
        sine2_edges=np.array([cone.sine2_edges]),
        distance_mm=np.array([distance_mm], float),
        field_radius_mm=np.array([field_radius_mm], float),
    )
    over = field.under(flux_lm * np.array([cone.flux_share]))
    return Lighting(*(float(getattr(over, name)[0]) for name in Lighting.__slots__))


def port_arrays(ports: list[tuple[Port, ...]]) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """x, y and radius of the facing ports of each design [design, port], as `field_irradiance` takes them."""
    found = [[piece for port in one for piece in pieces(port)] for one in ports]
    out = np.zeros((3, len(found), max(len(one) for one in found)))
    for row, one in enumerate(found):
        if any(piece.disc.tilt_deg for piece in one):
            raise OutOfRange("a port is tilted; every port must face the plane here.")
        if any(piece.sign < 0 for piece in one) and len(one) > 2:
            raise OutOfRange(f"there are {len(one)} discs, one cut out; a port with a cut must be the only port here.")
        for at, piece in enumerate(one):
            out[:, row, at] = piece.disc.x_mm, piece.disc.y_mm, piece.sign * piece.disc.radius_mm
    return out[0], out[1], out[2]


def lit_tangents(*, sine2_edges: np.ndarray, flux: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Tangents of the angles where the flux begins and ends, [design]; both 0 where there is no flux."""
    some = flux > 0
    any_flux = some.any(axis=-1)
    begin = np.argmax(some, axis=-1)
    end = flux.shape[-1] - np.argmax(some[:, ::-1], axis=-1)
    s = np.stack([np.take_along_axis(sine2_edges, at[:, None], axis=-1)[:, 0] for at in (begin, end)])
    beyond = 1.0 - s
    tangent = np.where(beyond > 0, np.sqrt(s / np.where(beyond > 0, beyond, 1.0)), np.inf)
    return tuple(np.where(any_flux, tangent, 0.0))


def _first_lit_mm(field, tangent):
    """Distance at which light first reaches the axis: (s - a)/tan alpha of the nearest port."""
    away, radius = np.hypot(field.port_x_mm, field.port_y_mm), field.port_radius_mm
    gap = np.where(radius > 0, np.maximum(away - radius, 0.0), np.inf)
    cut = np.max(np.where(radius < 0, -radius - away, 0.0), axis=-1)
    gap[:, 0] = np.maximum(gap[:, 0], cut)
    return np.where(tangent > 0, gap.min(axis=-1) / np.where(tangent > 0, tangent, 1.0), np.inf)
