"""Colors and type of all pictures: one accent, categories that color-blind readers and grey print keep apart, one map for light.

Categories are those of Okabe and Ito (source: okabe_ito_2008). The map for light climbs evenly in
CIE lightness, from dark blue through amber to pale yellow, so equal steps of light look equal and
survive a grey printer.
"""

from dataclasses import dataclass
from functools import cache

import numpy as np
from matplotlib.colors import ListedColormap

# Points of type. A picture 5.2 in wide shown 400 px wide still has letters of 9 px and more.
SMALL, TEXT, LARGE = 9.0, 10.0, 14.0
THIN, LINE, BOLD = 0.7, 1.6, 2.4
WIDTH_IN = 5.2

# Okabe and Ito
ORANGE, SKY, GREEN, YELLOW = "#E69F00", "#56B4E9", "#009E73", "#F0E442"
BLUE, VERMILION, PURPLE = "#0072B2", "#D55E00", "#CC79A7"


@dataclass(frozen=True, slots=True)
class Palette:
    """What a picture is drawn in.

    `light` is the way there, `back` the way back, `accent` what limits or falls short; `on_...` are words upon them.
    """

    name: str
    paper: str
    ink: str
    soft: str
    grid: str
    ghost: str
    accent: str
    light: str
    back: str
    series: tuple[str, ...]
    on_light: str = "#1f1500"
    on_back: str = "#ffffff"

    @property
    def light_map(self) -> ListedColormap:
        """Dark to bright, even in lightness; the same on both papers, since dark means no light."""
        return lamplight()


LIGHT = Palette(
    "light", paper="#ffffff", ink="#1f2430", soft="#5b6270", grid="#d9dce2", ghost="#f1f2f5",
    accent="#B34700", light=ORANGE, back=BLUE, series=(BLUE, VERMILION, GREEN, ORANGE, PURPLE, SKY),
)  # fmt: skip
DARK = Palette(
    "dark", paper="#0e1117", ink="#f2f3f5", soft="#a4abb8", grid="#343a46", ghost="#1b202a",
    accent="#FF9A4D", light=ORANGE, back=SKY, series=(SKY, "#FF7F2A", "#2BC49A", ORANGE, PURPLE, YELLOW),
    on_back="#04141f",
)  # fmt: skip


@cache
def lamplight() -> ListedColormap:
    """The map for light, 256 colors: CIE L* from 10 to 96 in even steps, hue from blue to yellow."""
    lightness = np.linspace(10.0, 96.0, 256)
    at = np.linspace(0.0, 1.0, 256)
    hue = np.deg2rad(np.interp(at, (0.0, 0.25, 0.5, 0.75, 1.0), (290.0, 330.0, 405.0, 436.0, 455.0)))
    chroma = np.interp(at, (0.0, 0.15, 0.4, 0.7, 0.9, 1.0), (18.0, 34.0, 52.0, 62.0, 50.0, 22.0))
    return ListedColormap(
        np.clip(_srgb(lightness, chroma * np.cos(hue), chroma * np.sin(hue)), 0.0, 1.0), name="lamplight"
    )


def _srgb(lightness: np.ndarray, a: np.ndarray, b: np.ndarray) -> np.ndarray:
    """sRGB of CIE L*a*b* under D65 (source: iec_61966_2_1)."""
    y = (lightness + 16) / 116
    lab = np.stack([y + a / 500, y, y - b / 200], axis=-1)
    xyz = np.where(lab > 6 / 29, lab**3, 3 * (6 / 29) ** 2 * (lab - 4 / 29)) * (0.95047, 1.0, 1.08883)
    linear = xyz @ np.array([[3.2406, -0.9689, 0.0557], [-1.5372, 1.8758, -0.2040], [-0.4986, 0.0415, 1.0570]])
    linear = np.clip(linear, 0.0, 1.0)
    return np.where(linear <= 0.0031308, 12.92 * linear, 1.055 * linear ** (1 / 2.4) - 0.055)
