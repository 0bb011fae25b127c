"""Numbers, units and texts for the screen."""

import re
from typing import Any

from optics.commands.terminal import rounded
from optics.units import unit_of

UNITS = {
    "um": "µm",
    "mm2": "mm²",
    "um2": "µm²",
    "deg": "°",
    "rad": "rad",
    "db_m": "dB/m",
    "w": "W",
    "lux": "lx",
    "w_m2": "W/m²",
    "w_mm2": "W/mm²",
    "lp_mm": "lp/mm",
    "c": "°C",
    "k": "K",
    "hz": "Hz",
    "e": "e⁻",
    "dn_e": "DN/e⁻",
    "cd_m2": "cd/m²",
    "1": "",
    "count": "",
    "w_m2_sr": "W/(m² sr)",
}


def unit(name: str) -> str:
    """The unit of a field for the screen, or nothing.

    >>> unit("core_um"), unit("exit_na"), unit("length_m")
    ('µm', '', 'm')
    """
    found = unit_of(name)
    return "" if found is None else UNITS.get(found, found)


def number(value: Any, digits: int = 3) -> str:
    """A number as people read it; none as a dash, minus as a true minus."""
    return (
        rounded(value, digits).replace("-", "−")
        if isinstance(value, float | int) and not isinstance(value, bool)
        else rounded(value)
    )


def percent(share: float, digits: int = 0) -> str:
    """A change in percent, always signed.

    >>> percent(0.17), percent(-0.032, 1)
    ('+17 %', '−3.2 %')
    """
    return f"{share:+.{digits}%}".replace("%", " %").replace("-", "−")


def exact(value: Any) -> str:
    """A value of the design as it was given, short: never rounded to other than what is meant.

    >>> exact(1.8), exact(400.0), exact("solve"), exact(True), exact(None)
    ('1.8', '400', 'solve', 'yes', 'none')
    """
    if value is None:
        return "none"
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, list | tuple):
        return f"{len(value)} of them" if value else "none"
    if isinstance(value, dict):
        return "a table"
    return f"{value:.6g}" if isinstance(value, float | int) else str(value).replace("_", " ")


def with_unit(value: Any, name: str) -> str:
    """A value with its unit: '1.8 m', '90°'."""
    said, sign = exact(value), unit(name)
    if not sign or not isinstance(value, float | int) or isinstance(value, bool):
        return said
    return said + sign if sign == "°" else f"{said} {sign}"


def plain(text: str) -> str:
    """A text as it stands, nothing in it read as markup."""
    return re.sub(r"([\\`*_\[\]{}$~<>|#])", r"\\\1", text).replace(":", "\\:")


def sentence_case(text: str) -> str:
    return text[:1].upper() + text[1:]
