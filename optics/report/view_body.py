"""What the pictures of the body show: the cross-section with every part in place, and the tip in the bend of the bore."""

from dataclasses import dataclass

import numpy as np

from optics.body.lumen import smallest_lumens
from optics.body.section import jacketed_mm
from optics.chain.columns import columns, written_out
from optics.chain.fit import fit
from optics.chain.solve import numbered
from optics.chain.target import field_of_view
from optics.fiberscope import Fiberscope
from optics.units import rad_from_deg

LEG = 0.6  # straight legs of the bore that are shown, in bores, beyond the ends of the longest tip
CORNER = np.linspace(0.0, np.pi / 2, 9)


@dataclass(frozen=True, slots=True)
class Part:
    """One round part of the section. Kinds: image, cores (inside it), light, channel, opening (inside it), wire."""

    name: str
    kind: str
    x_mm: float
    y_mm: float
    diameter_mm: float


@dataclass(frozen=True, slots=True)
class SectionView:
    """The section to scale around the lumen's center; later parts lie upon earlier ones (a ring's cut upon the ring)."""

    parts: tuple[Part, ...]
    lumen_mm: float
    needed_lumen_mm: float
    outer_diameter_mm: float
    free_area_mm2: float
    clearance_mm: float
    fits: bool


def section_view(fiberscope: Fiberscope) -> SectionView | None:
    """Where every part lies in the tube, as the section of the design is laid out. None without a body."""
    fiberscope = numbered(fiberscope)
    if fiberscope.body is None:
        return None
    table = columns([fiberscope])
    image_mm = float(field_of_view(table)["image_mm"][0])
    body, placed = (({name: found[0] for name, found in table.items()}) for table in fit(table, np.array([image_mm])))
    section, parts = fiberscope.body.section, []
    core = _image_part_mm(fiberscope, image_mm)
    form = getattr(fiberscope.scene and fiberscope.scene.ports, "form", "")
    ports = [
        (placed["x_mm"][i], placed["y_mm"][i], 2 * placed["radius_mm"][i])
        for i in np.flatnonzero(placed["radius_mm"] > 0)
    ]
    head = core
    if form in ("annulus", "crescent"):
        head = max(core, ports[0][2])
    elif form == "placed":
        head = max(core, *(2 * np.hypot(x, y) + diameter for x, y, diameter in ports))
    light = [diameter for *_, diameter in ports] if form in ("round", "") else []
    outer = [channel.inner_mm + 2 * channel.wall_mm for channel in section.channels]
    wires, at_wall = (
        written_out(np.array([[getattr(wire, name) for wire in section.wires]], float), _counts(section), 0.0)[0]
        for name in ("diameter_mm", "at_wall")
    )
    sizes = np.array([[head, *light, *outer, *wires]])
    walled = np.concatenate([np.zeros(1 + len(light) + len(outer), bool), at_wall > 0])
    layout = smallest_lumens(diameters_mm=sizes, clearance_mm=section.clearance_mm, at_wall=walled[None])
    lumen, needed = float(body["lumen_mm"]), float(layout.lumen_mm[0])
    centers = _to_the_wall(layout.centers_mm[0], sizes[0], walled, max(lumen, needed) / 2 - section.clearance_mm)
    axis, rest = centers[0], iter(centers[1:])
    if form == "crescent":  # its head part is the outer circle; the objective lies off the middle
        axis = axis - np.array(ports[0][:2])
    lit = [next(rest) for _ in light] if light else [axis + np.array(port[:2]) for port in ports]
    parts += [
        Part("light port" if form else "light guide", "light", *map(float, at), float(port[2]))
        for at, port in zip(lit, ports)
    ]
    if np.isfinite(image_mm):
        parts += [
            Part("image part", "image", *map(float, axis), core),
            Part("image", "cores", *map(float, axis), image_mm),
        ]
    for channel, wide in zip(section.channels, outer):
        at = next(rest)
        parts += [
            Part("channel", "channel", *map(float, at), wide),
            Part("opening", "opening", *map(float, at), channel.inner_mm),
        ]
    parts += [Part("wire", "wire", *map(float, at), float(wide)) for at, wide in zip(rest, wires)]
    return SectionView(
        tuple(parts),
        lumen,
        needed,
        float(body["outer_diameter_mm"]),
        float(body["free_area_mm2"]),
        section.clearance_mm,
        bool(body["fits"] > 0),
    )


def _counts(section) -> np.ndarray:
    return np.array([[wire.count for wire in section.wires]], int)


def _image_part_mm(fiberscope: Fiberscope, image_mm: float) -> float:
    section = fiberscope.body.section
    if not np.isfinite(image_mm):
        return 0.0
    return float(
        jacketed_mm(bundle_mm=image_mm, jacket_mm=section.image_jacket_mm, barrel_mm=section.objective_barrel_mm or 0.0)
    )


def _to_the_wall(centers: np.ndarray, sizes: np.ndarray, walled: np.ndarray, reach: float) -> np.ndarray:
    """Parts fixed on the wall moved straight out to it, where the tube is wider than it must be."""
    away = np.hypot(*centers.T)
    out = np.where(walled & (away > 0), (reach - sizes / 2) / np.where(away > 0, away, 1.0), 1.0)
    return centers * np.maximum(out, 1.0)[:, None]


@dataclass(frozen=True, slots=True)
class PassageView:
    """Walls of the bore through its bend, and the outlines of the rigid tip and of the longest that passes.

    In the plane of the bend, entering from the left; outlines are empty where a length is not given.
    """

    inner_x_mm: np.ndarray
    inner_y_mm: np.ndarray
    outer_x_mm: np.ndarray
    outer_y_mm: np.ndarray
    tip_x_mm: np.ndarray
    tip_y_mm: np.ndarray
    longest_x_mm: np.ndarray
    longest_y_mm: np.ndarray
    bore_mm: float
    tip_diameter_mm: float
    rigid_tip_mm: float | None
    longest_rigid_tip_mm: float | None
    bend_radius_mm: float
    passable_radius_mm: float | None
    passes: bool


def passage_view(fiberscope: Fiberscope) -> PassageView | None:
    """The tip where it is tightest: its side on the inner wall in the middle of the bend. None without a bore."""
    fiberscope = numbered(fiberscope)
    asked = fiberscope.body and fiberscope.body.passage
    if not asked or asked.bore_mm is None:
        return None
    table = columns([fiberscope])
    value = {name: float(found[0]) for name, found in fit(table, field_of_view(table)["image_mm"])[0].items()}
    bore, tip = asked.bore_mm, value["outer_diameter_mm"]
    rigid, longest = (
        value[name] if np.isfinite(value[name]) else None for name in ("rigid_tip_mm", "longest_rigid_tip_mm")
    )
    turn = rad_from_deg(asked.bend_deg or 0.0) if asked.centerline_radius_mm else 0.0
    inner = (asked.centerline_radius_mm or bore) - bore / 2
    reach = max(rigid or 0.0, longest or 0.0) / 2
    leg = LEG * bore + max(reach - inner * np.tan(turn / 2) if turn < np.pi / 2 + 1e-9 else 0.0, 0.0)
    edge = min(asked.edge_radius_mm, tip / 2)
    side = inner if tip <= bore else inner + (bore - tip) / 2
    shapes = [
        _wall(inner, turn, leg),
        _wall(inner + bore, turn, leg),
        _tip(rigid, tip, side, edge),
        _tip(longest, tip, side, edge),
    ]
    return PassageView(
        *(coordinate for shape in shapes for coordinate in _turned(shape, turn / 2)),
        bore,
        tip,
        rigid,
        longest,
        value["bend_radius_mm"],
        value["passable_radius_mm"] if np.isfinite(value["passable_radius_mm"]) else None,
        value["passes"] > 0,
    )


def _wall(radius: float, turn: float, leg: float) -> np.ndarray:
    """One wall: leg, arc, leg, about the bend's center; the middle of the bend on +y."""
    arc = np.pi / 2 + np.linspace(turn / 2, -turn / 2, 2 if turn == 0 else 121)
    at = radius * np.stack([np.cos(arc), np.sin(arc)])
    along = leg * np.array([[-np.sin(arc[0]), np.sin(arc[-1])], [np.cos(arc[0]), -np.cos(arc[-1])]])
    return np.concatenate([at[:, :1] + along[:, :1], at, at[:, -1:] + along[:, 1:]], axis=1)


def _tip(length: float | None, diameter: float, side: float, edge: float) -> np.ndarray:
    """Outline of a tip whose side touches the inner wall in the middle of the bend; its end edges are rounded."""
    if length is None or not np.isfinite(length):
        return np.empty((2, 0))
    x, y = length / 2 - edge, diameter / 2 - edge
    corners = [(x, y, 0.0), (-x, y, 0.5), (-x, -y, 1.0), (x, -y, 1.5)]
    rim = [
        np.stack([cx + edge * np.cos(CORNER + at * np.pi), cy + edge * np.sin(CORNER + at * np.pi)])
        for cx, cy, at in corners
    ]
    outline = np.concatenate([*rim, rim[0][:, :1]], axis=1)
    return outline + np.array([[0.0], [side + diameter / 2]])


def _turned(shape: np.ndarray, angle: float) -> tuple[np.ndarray, np.ndarray]:
    """A shape turned so that the leg on the left lies level."""
    cosine, sine = np.cos(angle), np.sin(angle)
    return cosine * shape[0] + sine * shape[1], cosine * shape[1] - sine * shape[0]
