"""The tube's cross-section as a DXF drawing in millimeters, for the people who build it: true circles, a layer for each kind.

Around the lumen's center, as the report's section shows it. Written with ezdxf (MIT); the same section gives the same bytes.
"""

import io
import re
from collections.abc import Sequence
from typing import Any

from optics.figures.canvas import three
from optics.report.views import Part, SectionView

VERSION = "R2010"
# Layers: of each kind of part (its number in the format's table of colors), of the tube, and of words.
PARTS = {"light": ("LIGHT", 30), "image": ("IMAGE_PART", 7), "cores": ("IMAGE", 140), "channel": ("CHANNEL", 3),
         "opening": ("CHANNEL_OPENING", 4), "wire": ("WIRE", 8)}  # fmt: skip
TUBE, LUMEN, NEEDED, CENTERS, WORDS = ("TUBE", 7), ("LUMEN", 7), ("LUMEN_NEEDED", 1), ("CENTER_MARKS", 8), ("WORDS", 9)
MARK = 0.2  # of a part's diameter: the arms of the cross in its center
LETTER, LINE = 0.03, 1.8  # height of the letters over the tube's diameter; from line to line over that
TIME, GUID = "2451544.5", "{00000000-0000-0000-0000-000000000000}"


def section_dxf(view: SectionView, notes: Sequence[str] = ()) -> bytes:
    """The section as the bytes of a DXF file: circles in millimeters, a list of the parts, and notes (which design)."""
    import ezdxf
    from ezdxf import units

    drawing = ezdxf.new(VERSION, setup=["linetypes"], units=units.MM)
    drawing.header["$MEASUREMENT"] = 1
    for name, color in (*PARTS.values(), TUBE, LUMEN, NEEDED, CENTERS, WORDS):
        drawing.layers.add(name, color=color, linetype="DASHED" if name == NEEDED[0] else "CONTINUOUS")
    space = drawing.modelspace()
    rings = [(TUBE, view.outer_diameter_mm), (LUMEN, view.lumen_mm)]
    if not view.fits:
        rings.append((NEEDED, view.needed_lumen_mm))
    for (layer, _), across in rings:
        space.add_circle((0.0, 0.0), across / 2, dxfattribs={"layer": layer})
    for part in view.parts:
        center = (part.x_mm, part.y_mm)
        space.add_circle(center, part.diameter_mm / 2, dxfattribs={"layer": PARTS[part.kind][0]})
        _cross(space, part)
    _words(space, view, notes)
    out = io.StringIO()
    drawing.write(out)
    return _undated(out.getvalue()).encode(drawing.output_encoding)


def _cross(space: Any, part: Part) -> None:
    """A cross in the center of a part."""
    arm = MARK * part.diameter_mm / 2
    for dx, dy in ((arm, 0.0), (0.0, arm)):
        ends = [(part.x_mm + sign * dx, part.y_mm + sign * dy) for sign in (-1, 1)]
        space.add_line(*ends, dxfattribs={"layer": CENTERS[0]})


def told(view: SectionView, notes: Sequence[str] = ()) -> list[str]:
    """The drawing's words, line by line: which design, the parts with diameter and place, the caution."""
    lines = [*notes, "cross-section, seen as in the report; all lengths in mm, x and y from the lumen's center"]
    lines.append(
        f"tube: outer diameter {view.outer_diameter_mm:.3f}, lumen {view.lumen_mm:.3f}, clearance {view.clearance_mm:.3f}"
    )
    if not view.fits:
        lines.append(f"the parts do not fit: they need a lumen of {view.needed_lumen_mm:.3f} (dashed)")
    for part in view.parts:
        x, y = (f"{round(at, 3) + 0.0:.3f}" for at in (part.x_mm, part.y_mm))  # no minus before zero
        lines.append(f"{part.name}: diameter {part.diameter_mm:.3f} at {x}, {y}")
    return [*lines, f"free area {three(view.free_area_mm2)} mm2", "a screening estimate: it certifies nothing"]


def _words(space: Any, view: SectionView, notes: Sequence[str]) -> None:
    """The words beside the tube, from its top down."""
    across = max(view.outer_diameter_mm, view.needed_lumen_mm)
    letter = LETTER * across
    for row, line in enumerate(told(view, notes)):
        at = (0.6 * across, across / 2 - letter * (1 + LINE * row))
        space.add_text(line, height=letter, dxfattribs={"layer": WORDS[0], "insert": at})


def _undated(text: str) -> str:
    """The same drawing without the times and random names of its making."""
    text = re.sub(r"(\$TD\w+\n +40\n)[^\n]+", rf"\g<1>{TIME}", text)
    text = re.sub(r"(\$(?:FINGERPRINT|VERSION)GUID\n +2\n)[^\n]+", rf"\g<1>{GUID}", text)
    return re.sub(r"(\d+\.\d+\.\d+) @ \d{4}-\d\d-\d\dT[\d:.+]+", r"\1", text)
