"""What the page of the bench is made of: the readings of this session, the fit, its picture, and the fit in the design."""

from dataclasses import dataclass, field
from typing import Any

from optics.presets import Document

KEPT = 24
POINTS, MOST_LINES = 41, 4  # of a line of the model; lines for different angles turned


@dataclass
class Taken:
    """A fit that stands in the design: the settings that it made, and what stood there before."""

    settings: dict[str, Any]
    before: dict[str, Any]
    source: str


@dataclass
class Bench_:
    """The readings of this session and what is asked of them."""

    text: str = ""
    name: str = "readings"
    flat: bool = False
    left_out: tuple[int, ...] = ()
    wrong: str | None = None
    taken: Taken | None = field(default=None)
    of: Document | None = None  # the design that was open when a fit was taken
