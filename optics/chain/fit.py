"""Does it fit the tube, does it pass the bore: section, ports, passage and handling of every design at once."""

import numpy as np

from optics.body.handling import least_bend_radius_mm
from optics.body.lumen import smallest_lumens
from optics.body.passage import longest_rigid_tip_mm, tube_bend_radius_mm
from optics.body.section import jacketed_mm, outer_diameter_mm
from optics.chain.columns import Columns, distinct_rows, written_out
from optics.chain.cone import exit_mm, medium_index
from optics.guide.bundle import fiber_area_mm2
from optics.guide.ends import tilt_deviation_deg
from optics.units import um_from_mm

TABLES = (
    "guide.bundle.diameter_mm",
    "guide.bundle.exit_mm",
    "guide.bundle.exit_tilt_deg",
    "guide.fiber.core_index",
    "scene.target.medium",
    "image.bundle.diameter_mm",
    "image.chip",
    "scene.ports",
    "body.section",
)


def fit(columns: Columns, image_mm: np.ndarray) -> tuple[dict[str, np.ndarray], dict[str, np.ndarray]]:
    """Numbers of the body [design] (nan without a body), and the ports [design, port] around the objective's axis."""
    first, inverse = distinct_rows(columns, TABLES)
    few = columns.take(first)
    laid, ports = section(few, image_mm[first])
    laid = {name: found[inverse] for name, found in laid.items()}
    ports = {name: found[inverse] for name, found in ports.items()}
    body = columns.has("body.section.wall_mm")
    light_area = fiber_area_mm2(
        diameter_mm=columns["guide.bundle.diameter_mm"], packing_fraction=columns["guide.bundle.packing_fraction"]
    )
    one = np.pi / 4 * columns["guide.fiber.fiber_um"] ** 2 / um_from_mm(1.0) ** 2
    value = {
        **{name: np.where(body, found, np.nan) for name, found in laid.items()},
        "light_area_mm2": light_area,
        "fiber_count": np.floor(light_area / one + 1e-9),
        "bend_radius_mm": np.where(body, bend_radius_mm(columns), np.nan),
    }
    value.update(_passage(columns, value))
    return value, ports


def bend_radius_mm(columns: Columns) -> np.ndarray:
    """The least bend radius of the tube: the largest of what handling asks and what the fibers' strain allows."""
    guide = least_bend_radius_mm(
        fiber_um=columns["guide.fiber.fiber_um"], allowed_strain=columns["guide.fiber.allowed_strain"]
    )
    rod = columns.get("image.bundle.one_rod", 0.0) > 0
    image_um = np.where(rod, um_from_mm(columns["image.bundle.diameter_mm"]), columns["image.bundle.pitch_um"])
    image = least_bend_radius_mm(
        fiber_um=np.nan_to_num(image_um, nan=1e-9), allowed_strain=columns.get("image.bundle.allowed_strain", 0.5)
    )
    return np.maximum.reduce([columns.get("body.handling.bend_radius_mm", 0.0), guide, image])


def section(columns: Columns, image_mm: np.ndarray) -> tuple[dict[str, np.ndarray], dict[str, np.ndarray]]:
    """Lumen, outer diameter and free area, and where the ports come to lie."""
    clearance, wall = columns.get("body.section.clearance_mm", 0.0), columns.get("body.section.wall_mm", 0.0)
    core = jacketed_mm(
        bundle_mm=np.nan_to_num(image_mm, nan=1e-9),
        jacket_mm=columns.get("body.section.image_jacket_mm", 0.0),
        barrel_mm=columns.get("body.section.objective_barrel_mm", 0.0),
    )
    core = np.where(np.isnan(image_mm), 0.0, core)
    ports, head, light = _ports(columns, core)
    channels = columns.items("body.section.channels.inner_mm", 0.0) + 2 * columns.items(
        "body.section.channels.wall_mm", 0.0
    )
    wires, at_wall = _wires(columns)
    parts = np.concatenate([head[:, None], light, channels, wires], axis=1)
    walled = np.concatenate([np.zeros((columns.count, parts.shape[1] - wires.shape[1]), bool), at_wall], axis=1)
    layout = smallest_lumens(diameters_mm=parts, clearance_mm=clearance, at_wall=walled)
    needed = layout.lumen_mm
    given = columns["body.section.outer_diameter_mm"]
    lumen = np.where(np.isnan(given), needed, given - 2 * wall)
    solved = _placed(columns, ports, layout.centers_mm, light.shape[1])
    laid_mm = np.hypot(*np.moveaxis(layout.centers_mm[:, 1] - layout.centers_mm[:, 0], -1, 0))
    value = {
        "needed_lumen_mm": needed,
        "lumen_mm": lumen,
        "outer_diameter_mm": outer_diameter_mm(lumen_mm=np.maximum(lumen, 1e-9), wall_mm=wall),
        "free_area_mm2": np.maximum(np.pi / 4 * (lumen**2 - (parts**2).sum(axis=1)), 0.0),  # none where they do not fit
        "laid_port_offset_mm": np.where(light[:, 0] > 0, laid_mm, np.nan),
        "fits": (needed <= lumen * (1 + 1e-9)).astype(float),
    }
    return value, solved


def _ports(columns: Columns, core_mm: np.ndarray):
    """Ports as discs [design, port] (nan place: wherever the layout puts them), the head part, and the light parts.

    A ring or a crescent lies around the image part: the head part is then as wide as its outer circle.
    """
    area_mm = exit_mm(columns)
    most = int(
        max(
            np.nan_to_num(columns["scene.ports.count"]).max(initial=1),
            columns.items("scene.ports.ports.x_mm", 0.0).shape[1],
            2,
        )
    )
    x, y, radius, tilt, azimuth = (np.zeros((columns.count, most)) for _ in range(5))
    head, light = core_mm.copy(), np.zeros((columns.count, most))
    for form, rows in columns.split("scene.ports.form"):
        if form == "round":
            place = np.arange(most)
            count = columns["scene.ports.count"][rows, None]
            here = place < count
            radius[rows] = np.where(here, area_mm[rows, None] / np.sqrt(count) / 2, 0.0)
            offset, turn = columns["scene.ports.offset_mm"][rows, None], 2 * np.pi * place / count
            x[rows] = np.where(here, offset * np.cos(turn), 0.0)
            y[rows] = np.where(here, offset * np.sin(turn), 0.0)
            light[rows] = 2 * radius[rows]
            tilt[rows] = np.where(here, columns.get("scene.ports.tilt_deg", 0.0)[rows, None], 0.0)
        elif form in ("annulus", "crescent"):
            inner = np.where(
                np.isnan(columns["scene.ports.inner_mm"][rows]), core_mm[rows], columns["scene.ports.inner_mm"][rows]
            )
            outer = np.sqrt(inner**2 + area_mm[rows] ** 2)
            away = np.zeros(len(rows))
            if form == "crescent":
                asked = columns["scene.ports.offset_mm"][rows]
                away = np.where(np.isnan(asked), (outer - inner) / 2, np.minimum(asked, (outer - inner) / 2))
            radius[rows, 0], radius[rows, 1] = outer / 2, -inner / 2  # a negative radius is cut out of the first port
            x[rows, 0] = away
            head[rows] = np.maximum(head[rows], outer)
        elif form == "placed":
            given = {
                key: columns.items(f"scene.ports.ports.{key}", 0.0)[rows] for key in ("x_mm", "y_mm", "diameter_mm")
            }
            width = given["x_mm"].shape[1]
            x[rows, :width], y[rows, :width], radius[rows, :width] = (
                given["x_mm"],
                given["y_mm"],
                given["diameter_mm"] / 2,
            )
            tilt[rows, :width], azimuth[rows, :width] = (
                columns.items(f"scene.ports.ports.{key}", 0.0)[rows] for key in ("tilt_deg", "azimuth_deg")
            )
            reach = 2 * (np.hypot(given["x_mm"], given["y_mm"]) + given["diameter_mm"] / 2).max(axis=1)
            head[rows] = np.maximum(head[rows], reach)
        else:  # no scene: the guide itself is the only light part
            light[rows, 0] = area_mm[rows]
            radius[rows, 0] = area_mm[rows] / 2
    return (x, y, radius, tilt, azimuth), head, light


def _placed(columns: Columns, ports, centers_mm: np.ndarray, count: int) -> dict[str, np.ndarray]:
    """Ports around the objective's axis; round ones without an offset of their own come from the layout."""
    x, y, radius, tilt, azimuth = ports
    free = np.isnan(x)
    from_axis = centers_mm[:, 1 : 1 + count] - centers_mm[:, :1]
    x, y = np.where(free, from_axis[..., 0], x), np.where(free, from_axis[..., 1], y)
    outward = (columns.texts("scene.ports.form") == "round")[:, None]
    azimuth = np.where(outward, np.degrees(np.arctan2(y, x)), azimuth)
    ground = columns.get("guide.bundle.exit_tilt_deg", 0.0)
    turned = tilt_deviation_deg(
        core_index=columns["guide.fiber.core_index"], outside_index=medium_index(columns), tilt_deg=ground
    )[:, None]
    tilt, azimuth = np.where(turned > 0, turned, tilt), np.where(turned > 0, 0.0, azimuth)
    return {"x_mm": x, "y_mm": y, "radius_mm": radius, "tilt_deg": tilt, "azimuth_deg": azimuth}


def _wires(columns: Columns) -> tuple[np.ndarray, np.ndarray]:
    """Diameters of all wires written out [design, wire], and which are fixed on the wall."""
    count = columns.items("body.section.wires.count", 0.0).astype(int)
    diameter, at_wall = (columns.items(f"body.section.wires.{name}", 0.0) for name in ("diameter_mm", "at_wall"))
    return written_out(diameter, count, 0.0), written_out(at_wall, count, 0.0) > 0


def _passage(columns: Columns, value: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
    """Longest rigid tip, radius that the tube takes, and whether the scope passes; nan where nothing is asked."""
    found = {name: np.full(columns.count, np.nan) for name in ("longest_rigid_tip_mm", "passable_radius_mm", "passes")}
    tube, bore = value["outer_diameter_mm"], columns["body.passage.bore_mm"]
    rigid = columns["body.passage.rigid_tip_mm"]
    added = columns.get("image.tip.added_length_mm", 0.0)
    found["rigid_tip_mm"] = rigid + added
    enters = tube <= bore
    found["passes"] = np.where(np.isnan(bore) | np.isnan(tube), np.nan, (enters & (value["fits"] > 0)).astype(float))
    curved = ~np.isnan(columns["body.passage.centerline_radius_mm"]) & ~np.isnan(columns["body.passage.bend_deg"])
    rows = np.flatnonzero(enters & curved)
    if rows.size:
        bend = {
            "bore_mm": bore[rows],
            "centerline_radius_mm": columns["body.passage.centerline_radius_mm"][rows],
            "bend_deg": columns["body.passage.bend_deg"][rows],
        }
        edge = columns.get("body.passage.edge_radius_mm", 0.0)[rows]
        longest = longest_rigid_tip_mm(**bend, tip_mm=tube[rows], edge_radius_mm=edge)
        passable = tube_bend_radius_mm(**bend, tube_mm=tube[rows])
        found["longest_rigid_tip_mm"][rows], found["passable_radius_mm"][rows] = longest, passable
        tip_passes = np.isnan(rigid[rows]) | (found["rigid_tip_mm"][rows] <= longest)
        found["passes"][rows] *= tip_passes & (value["bend_radius_mm"][rows] <= passable)
    return found
