"""The design after years of use: broken fibers, dead cores, browned glass, a lamp past its prime.

What aging does is given, not foretold; the tolerances are drawn on top of it.
"""

from dataclasses import dataclass

import numpy as np

from optics.chain.columns import Columns
from optics.spec import OutOfRange
from optics.study.margins_draw import scaled_curve
from optics.tables import nearest

FLUXES = ("source.lamp.flux_lm", "source.lamp.flux_w", "source.launch.rated_lm")
ATTENUATIONS = ("guide.cable.fiber.attenuation", "guide.fiber.attenuation", "image.bundle.attenuation")
KEYS = {  # as people write them, and the field of each
    "broken_fraction": "broken_fraction",
    "lamp": "lamp_share",
    "dead_fraction": "dead_fraction",
    "browning_db_m": "browning_db_m",
}
DEAD, SPREAD, BROKEN = "image.bundle.dead_fraction", "image.bundle.transmission_spread", "guide.bundle.broken_fraction"


@dataclass(frozen=True, slots=True)
class Aged:
    """A worn condition; None where a part is as new. `lamp_share`: of the new lamp's flux that is left."""

    broken_fraction: float | None = None
    lamp_share: float | None = None
    dead_fraction: float | None = None
    browning_db_m: float | None = None

    def __post_init__(self):
        checks = (
            ("broken_fraction", self.broken_fraction, "from 0 to below 1", lambda x: 0 <= x < 1),
            ("lamp", self.lamp_share, "above 0 and at most 1", lambda x: 0 < x <= 1),
            ("dead_fraction", self.dead_fraction, "from 0 to below 1", lambda x: 0 <= x < 1),
            ("browning_db_m", self.browning_db_m, "0 or more", lambda x: 0 <= x < np.inf),
        )
        for name, value, must, ok in checks:
            if value is not None and not ok(value):
                raise OutOfRange(f"--aged {name} is {value:g}; it must be {must}.")

    def words(self) -> str:
        """The condition as people say it."""
        said = [
            (self.broken_fraction, "{:.3g} of the fibers broken"),
            (self.lamp_share, "the lamp at {:.3g} of its flux"),
            (self.dead_fraction, "{:.3g} of the cores dead"),
            (self.browning_db_m, "{:.3g} dB/m of browning in every fiber"),
        ]
        return ", ".join(text.format(value) for value, text in said if value is not None) or "as new"


def aged_from(text: str) -> Aged:
    """The worn condition of `key=value,key=value`.

    >>> aged_from("broken_fraction=0.1, lamp=0.7").words()
    '0.1 of the fibers broken, the lamp at 0.7 of its flux'
    """
    found = {}
    for item in filter(None, (part.strip() for part in text.split(","))):
        key, _, value = (part.strip() for part in item.partition("="))
        if key not in KEYS:
            raise OutOfRange(f"--aged has the key {key!r}{nearest(key, list(KEYS))}; it may have {', '.join(KEYS)}.")
        try:
            found[KEYS[key]] = finite(value)
        except ValueError:
            raise OutOfRange(f"--aged {key} is {value!r}; it must be a number, as in {key}=0.1.") from None
    if not found:
        raise OutOfRange(f"--aged is empty; it may have {', '.join(KEYS)}, as in broken_fraction=0.1,lamp=0.7.")
    return Aged(**found)


def finite(text: str) -> float:
    """The number that a text says; ValueError for anything else, infinity and nan too."""
    value = float(text)
    if not np.isfinite(value):
        raise ValueError(text)
    return value


def aged_columns(table: Columns, condition: Aged, nominal: Columns) -> Columns:
    """The designs of `table` in a worn condition; `nominal`: the one row that they vary.

    Broken fibers and the lamp act as in the chain. Browning is added to the loss of the cable, of the guide and of
    the image bundle, alike at all wavelengths: real browning takes more of the blue, so the color goes further
    than is told here. Dark cores join the unevenness between cores: with a share f of them at zero and a spread s
    of the others, the variance over the squared mean is (s^2 + f)/(1 - f) (closed_form); f counts beyond the dead
    cores that the nominal design states.
    """
    numbers: dict[str, np.ndarray] = {}
    if condition.broken_fraction is not None:
        numbers[BROKEN] = np.full(table.count, condition.broken_fraction)
    if condition.lamp_share is not None:
        numbers |= {path: table[path] * condition.lamp_share for path in FLUXES if path in table.number}
    if condition.dead_fraction is not None:
        numbers |= _dark_cores(table, condition.dead_fraction, nominal)
    aged = table.replaced(numbers)
    if condition.browning_db_m:
        for path in ATTENUATIONS:
            if path in table.curve:
                aged = scaled_curve(aged, path, np.ones(table.count), condition.browning_db_m)
    return aged


def _dark_cores(table: Columns, dead: float, nominal: Columns) -> dict[str, np.ndarray]:
    if not nominal.has(DEAD).any():
        raise OutOfRange("--aged dead_fraction: the design has no image bundle, so it has no cores to lose.")
    stated = float(nominal[DEAD][0])
    if dead < stated:
        raise OutOfRange(f"--aged dead_fraction is {dead:g}; it must be at least {stated:g}, that of the new bundle.")
    more = dead - stated
    return {
        DEAD: np.full(table.count, dead),
        SPREAD: np.sqrt((table.get(SPREAD, 0.0) ** 2 + more) / (1 - more)),
    }
