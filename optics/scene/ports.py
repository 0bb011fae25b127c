"""Where the light leaves: the ports at the distal face, and the tables that people write for them.

Ports lie around the objective's axis, which is the origin; z points at the target.
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np
from pydantic import Field

from optics.spec import OutOfRange, Spec, not_negative, positive, quantity, require, within
from optics.units import Numbers


@dataclass(frozen=True, slots=True)
class Disc:
    """A round port: center, radius; tilted by `tilt_deg` toward the direction `azimuth_deg`."""

    x_mm: float
    y_mm: float
    radius_mm: float
    tilt_deg: float = 0.0
    azimuth_deg: float = 0.0

    def __post_init__(self):
        positive(radius_mm=self.radius_mm)
        require("tilt_deg", self.tilt_deg, "from 0 to below 90", 0 <= self.tilt_deg < 90)
        require("the port's place", self.x_mm + self.y_mm, "finite", np.isfinite(self.x_mm + self.y_mm))


@dataclass(frozen=True, slots=True)
class Annulus:
    """A ring of fibers around the axis."""

    inner_radius_mm: float
    outer_radius_mm: float

    def __post_init__(self):
        not_negative(inner_radius_mm=self.inner_radius_mm)
        allowed = f"above inner_radius_mm ({self.inner_radius_mm:g})"
        require("outer_radius_mm", self.outer_radius_mm, allowed, self.outer_radius_mm > self.inner_radius_mm)


@dataclass(frozen=True, slots=True)
class Crescent:
    """A disc around (x, 0), less the disc of the image part around the axis; the cut lies inside, touching allowed."""

    x_mm: float
    inner_radius_mm: float
    outer_radius_mm: float

    def __post_init__(self):
        positive(inner_radius_mm=self.inner_radius_mm)
        allowed = f"above inner_radius_mm ({self.inner_radius_mm:g})"
        require("outer_radius_mm", self.outer_radius_mm, allowed, self.outer_radius_mm > self.inner_radius_mm)
        room = self.outer_radius_mm - self.inner_radius_mm
        require("x_mm", self.x_mm, f"from {-room:g} to {room:g}, so that the cut lies inside", abs(self.x_mm) <= room)


Port = Disc | Annulus | Crescent


@dataclass(frozen=True, slots=True)
class Piece:
    """A disc that counts (sign 1) or is cut out (sign -1)."""

    sign: int
    disc: Disc


def pieces(port: Port) -> tuple[Piece, ...]:
    """A port as discs with signs: the outer one first, then what is cut out of it."""
    if isinstance(port, Disc):
        return (Piece(1, port),)
    outer = Piece(1, Disc(getattr(port, "x_mm", 0.0), 0.0, port.outer_radius_mm))
    return (outer, Piece(-1, Disc(0.0, 0.0, port.inner_radius_mm))) if port.inner_radius_mm > 0 else (outer,)


def port_area_mm2(port: Port) -> float:
    """Area of one port.

    >>> round(port_area_mm2(Annulus(1.0, 2.0)) / np.pi, 12)
    3.0
    """
    return float(sum(piece.sign * np.pi * piece.disc.radius_mm**2 for piece in pieces(port)))


def as_ports(ports) -> tuple[Port, ...]:
    """One port or several, as a tuple; at least one."""
    found = (ports,) if isinstance(ports, Port) else tuple(ports)
    if not found or not all(isinstance(port, Port) for port in found):
        raise OutOfRange(f"ports is {ports!r}; it must hold at least one Disc, Annulus or Crescent.")
    return found


def round_port_radius_mm(*, area_mm2: Numbers, count: Numbers) -> np.ndarray:
    """Radius of each of `count` equal round ports that share an area: sqrt(area/(count pi))."""
    positive(area_mm2=area_mm2, count=count)
    return np.sqrt(np.asarray(area_mm2) / (np.pi * np.asarray(count)))


def outer_radius_mm(*, area_mm2: Numbers, inner_mm: Numbers) -> np.ndarray:
    """Radius of the outer circle that leaves an area around a cut of diameter `inner_mm`: sqrt(area/pi + r^2).

    For the annulus and for the crescent, wherever the cut lies inside.
    """
    positive(area_mm2=area_mm2)
    not_negative(inner_mm=inner_mm)
    return np.sqrt(np.asarray(area_mm2) / np.pi + (np.asarray(inner_mm) / 2) ** 2)


def ring_azimuths_deg(count: int) -> np.ndarray:
    """Directions of evenly spaced ports, the first on +x.

    >>> ring_azimuths_deg(4).tolist()
    [0.0, 90.0, 180.0, 270.0]
    """
    require("count", count, "at least 1", count >= 1)
    return 360.0 * np.arange(count) / count


def ring(*, count: int, offset_mm: float, radius_mm: float, tilt_deg: float) -> tuple[Disc, ...]:
    """Equal round ports on a circle around the axis, the first on +x, each tilted outward."""
    within(0.0, np.inf, offset_mm=offset_mm)
    turns = ring_azimuths_deg(count)
    x, y = offset_mm * np.cos(np.deg2rad(turns)), offset_mm * np.sin(np.deg2rad(turns))
    return tuple(
        Disc(float(at_x), float(at_y), float(radius_mm), float(tilt_deg), float(turn))
        for at_x, at_y, turn in zip(x, y, turns)
    )


class RoundPorts(Spec):
    """[scene.ports] form = "round": equal round ports share the bundle's area, evenly around the axis."""

    form: Literal["round"] = Field(description="the shape of the light ports")
    count: int = quantity("number of round ports", ge=1, le=24, usual=(1, 6), common=True)
    offset_mm: float | None = quantity(
        "from the objective's axis to each port's center; absent: from the layout of the section",
        default=None,
        ge=0,
        usual=(0.3, 5.0),
    )
    tilt_deg: float = quantity(
        "tilt of each port, outward", default=0.0, source="trade", ge=0, lt=90, usual=(0.0, 30.0)
    )


class AnnulusPorts(Spec):
    """[scene.ports] form = "annulus": the fibers in a ring around the image part."""

    form: Literal["annulus"] = Field(description="the shape of the light ports")
    inner_mm: float | None = quantity(
        "inner diameter of the ring; absent: just around the image part", default=None, ge=0, usual=(0.5, 6.0)
    )


class CrescentPorts(Spec):
    """[scene.ports] form = "crescent": the fibers fill a circle that the image part is cut out of, off center."""

    form: Literal["crescent"] = Field(description="the shape of the light ports")
    inner_mm: float | None = quantity(
        "diameter of the cut around the axis; absent: just around the image part", default=None, gt=0, usual=(0.5, 6.0)
    )
    offset_mm: float | None = quantity(
        "from the axis to the center of the outer circle; absent: the cut touches its edge",
        default=None,
        ge=0,
        usual=(0.0, 3.0),
    )


class PlacedPort(Spec):
    """One round port at a place of its own."""

    x_mm: float = quantity("across, from the objective's axis", usual=(-5.0, 5.0))
    y_mm: float = quantity("up, from the objective's axis", usual=(-5.0, 5.0))
    diameter_mm: float = quantity("of the port", gt=0, usual=(0.2, 3.0))
    tilt_deg: float = quantity(
        "tilt of the port, toward azimuth_deg", default=0.0, source="trade", ge=0, lt=90, usual=(0.0, 30.0)
    )
    azimuth_deg: float = quantity(
        "direction of the tilt, from +x toward +y", default=0.0, source="trade", ge=-360, le=360, usual=(0.0, 360.0)
    )


class PlacedPorts(Spec):
    """[scene.ports] form = "placed": each port where it is said to be; they share the flux by area."""

    form: Literal["placed"] = Field(description="the shape of the light ports")
    ports: tuple[PlacedPort, ...] = Field(strict=False, min_length=1, max_length=24, description="the round ports")

    def discs(self) -> tuple[Disc, ...]:
        return tuple(Disc(p.x_mm, p.y_mm, p.diameter_mm / 2, p.tilt_deg, p.azimuth_deg) for p in self.ports)
