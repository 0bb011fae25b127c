"""What is told of a design when two are compared, and numbers as people read them."""

from collections.abc import Mapping
from typing import Any

from optics.units import unit_of

Told = Mapping[str, Any]  # scope, report, value, lamp (its spectrum), name

PLAIN = {"lm": "lm", "mm": "mm", "lux": "lx", "k": "K", "deg": "deg", "s": "s"}


def digits(number: float, name: str = "") -> str:
    """A number with three digits and its unit, as people read it."""
    unit = PLAIN.get(unit_of(name) or "", "")
    shown = f"{number:,.0f}" if abs(number) >= 1000 else f"{number:.3g}"
    return f"{shown} {unit}".rstrip()


def against(name: str, first: float, other: float, unit_name: str = "") -> str:
    return f"{name}, {digits(other, unit_name)} against {digits(first, unit_name)}"
