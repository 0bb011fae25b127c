"""`split`: how to share a tube between the image bundle and the light."""

import argparse
import dataclasses
from typing import Any

from optics import presets
from optics.commands.terminal import add_design, as_json, paragraph, rounded, table
from optics.report.reasons import limit_reason
from optics.study.split import FLAT, STEP, Best, Point, Split, split

SHOWN = 11  # rows of the table


def add_arguments(parser: argparse.ArgumentParser) -> None:
    add_design(parser)
    parser.add_argument("--json", action="store_true", help="JSON alone, numbers unrounded")
    parser.add_argument("--step", type=float, default=STEP, metavar="SHARE", help=f"of the curve ({STEP})")


def run(options: argparse.Namespace) -> int:
    design = presets.open(options.design)
    given = dict(presets.parse_setting(text) for text in options.settings)
    found = split(design, given, step=options.step)
    print(as_json(as_dict(found)) if options.json else written(found, design.fiberscope.name))
    return 0


def as_dict(found: Split) -> dict[str, Any]:
    """The JSON of `split`."""
    return dataclasses.asdict(found)


def written(found: Split, name: str) -> str:
    """The answer as text: the best share, how flat it is, and the curve."""
    how = "as its parts need it" if found.solved else "as given"
    parts = [
        f"{name}: the tube of {rounded(found.outer_diameter_mm)} mm ({how}) between image and light",
        paragraph(_sentence(found), lead=""),
        "",
    ]
    head = ("image share", "smallest gap mm", "center lx", "image mm", "guide mm", "limited by", "")
    rows = [_row(point, found.best) for point in _shown(found)]
    parts += [table([head, *rows], right=(0, 1, 2, 3, 4)), ""]
    parts += [
        paragraph(
            f"Shares are of {rounded(found.shared_area_mm2)} mm2, what fibers may take of this tube; that of the image counts "
            "its jacket. The field of view stays as it is: the focal length follows the image."
        )
    ]
    if found.best:
        parts += [
            "",
            "The best share as settings",
            *(f"    --set {path}={value}" for path, value in found.best.set.items()),
        ]
    return "\n".join(parts)


def _sentence(found: Split) -> str:
    best = found.best
    if best is None:
        return "Nothing is resolved at any share: more light, more contrast or a finer bundle is needed first."
    said = (
        f"Finest with {best.image_fraction:.1%} for the image: a gap of {rounded(best.smallest_gap_mm)} mm and "
        f"{rounded(best.target_center_lux)} lx at the center, limited by the {best.limited_by}: "
        f"{limit_reason(best.limited_by)}. From {found.flat_from_fraction:.0%} to {found.flat_to_fraction:.0%} the gap stays "
        f"within {FLAT - 1:.0%} of that."
    )
    now = "nothing is resolved" if found.now_gap_mm is None else f"a gap of {rounded(found.now_gap_mm)} mm"
    said += f" As it stands the design gives {found.now_fraction:.0%} to the image: {now}."
    if not best.fits:
        said += " Its ports as they are do not lie beside the image in this tube: a ring, a crescent or smaller ports would."
    return said


def _shown(found: Split) -> list[Point]:
    """A few rows, evenly over the curve, and the best one among them."""
    every = max(round(len(found.curve) / SHOWN), 1)
    rows = list(found.curve[every // 2 :: every])
    if found.best:
        rows = [row for row in rows if abs(row.image_fraction - found.best.image_fraction) > 1e-9]
        rows.append(Point(**{name: getattr(found.best, name) for name in Point.__slots__}))
    return sorted(rows, key=lambda row: row.image_fraction)


def _row(point: Point, best: Best | None) -> tuple[str, ...]:
    mark = "best" if best and point.image_fraction == best.image_fraction else ""
    return (
        f"{point.image_fraction:.1%}",
        "not resolved" if point.smallest_gap_mm is None else rounded(point.smallest_gap_mm),
        rounded(point.target_center_lux),
        rounded(point.image_diameter_mm),
        rounded(point.guide_diameter_mm),
        point.limited_by or "-",
        mark or ("" if point.fits else "ports do not fit"),
    )
