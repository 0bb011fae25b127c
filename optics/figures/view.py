"""The picture of a subject beside what the operator sees of it: same scale, same light and dark, one bar for both."""

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Circle, Rectangle

from optics.figures.canvas import round_length, seconds, sheet, three, width_of
from optics.figures.palette import LIGHT, SMALL, TEXT, THIN, WIDTH_IN, Palette
from optics.report.picture import Picture

# Inches: edges, between the panels, headings, what stands below
EDGE, GAP, HEAD, FOOT = 0.08, 0.14, 0.30, 0.48
NARROW_IN = 3.6  # below this width the panels stand one above the other
NIGHT = "#06080c"  # around a round image, as on a monitor
SUBJECT_WHITE = 1.12  # reflectance shown as white, the target's own being 1
CODES = 4095  # levels of the table from linear to sRGB
LOOK = {"origin": "lower", "aspect": "auto", "interpolation": "antialiased"}
DIM = 0.32  # what lies outside the field of view, beside what lies inside


def view(picture: Picture, *, zoom: float = 1.0, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """Subject and view side by side; `zoom` above 1 shows the middle, so much larger."""
    half_x, half_y = (0.5 * picture.pixel_mm * count / zoom for count in (picture.view.shape[1], picture.view.shape[0]))
    stacked = width_in < NARROW_IN
    wide = width_in - 2 * EDGE if stacked else (width_in - 2 * EDGE - GAP) / 2
    high = wide * half_y / half_x
    panels = ((0, 1), (0, 0)) if stacked else ((0, 0), (1, 0))
    rows = 2 if stacked else 1
    figure, page = sheet(width_in, rows * (high + HEAD) + FOOT, palette)
    draw = (_subject, _seen)
    for (column, row), head, inside in zip(panels, _heads(picture, zoom), draw):
        left, low = EDGE + column * (wide + GAP), FOOT + row * (high + HEAD)
        axes = _panel(figure, left, low, wide, high)
        inside(axes, picture)
        axes.set(xlim=(-half_x, half_x), ylim=(-half_y, half_y))
        page.text(left, low + high + 0.09, head, color=palette.ink, fontsize=TEXT, weight="bold")
    _foot(page, picture, palette, wide, half_x, width_in)
    return figure


def _heads(picture: Picture, zoom: float) -> tuple[str, str]:
    where = " in the middle" if zoom > 1 else ""
    raw = picture.residual_contrast is None
    return (
        f"What is there{where}",
        f"What the {picture.viewer} sees" if raw else f"{picture.viewer.capitalize()} view, smoothed",
    )


def _panel(figure: Figure, left: float, low: float, wide: float, high: float) -> Axes:
    width, height = figure.get_size_inches()
    axes = figure.add_axes((left / width, low / height, wide / width, high / height))
    axes.set(xticks=[], yticks=[], facecolor=NIGHT)
    axes.spines[:].set_visible(False)
    return axes


def _subject(axes: Axes, picture: Picture) -> None:
    """The subject, dimmed outside the field of view."""
    pixels = len(picture.subject_reflectance)
    half = 0.5 * picture.sample_mm * pixels
    shown = coded(picture.subject_reflectance, SUBJECT_WHITE, picture.tint)
    if picture.field_mm is not None:
        at = np.linspace(-half, half, pixels, dtype=np.float32)
        inside = np.clip((0.5 * picture.field_mm - np.hypot(at, at[:, None])) / picture.sample_mm + 0.5, 0, 1)
        shown = (shown * (DIM + (1 - DIM) * inside[..., None])).astype(np.uint8)
        axes.add_patch(Circle((0, 0), picture.field_mm / 2, fill=False, edgecolor="#ffffff", linewidth=THIN, alpha=0.8))
    axes.imshow(shown, extent=(-half, half, -half, half), **LOOK)


def _seen(axes: Axes, picture: Picture) -> None:
    rows, columns = picture.view.shape
    half_x, half_y = 0.5 * picture.pixel_mm * columns, 0.5 * picture.pixel_mm * rows
    axes.imshow(coded(picture.view, picture.white, picture.tint), extent=(-half_x, half_x, -half_y, half_y), **LOOK)


def coded(values: np.ndarray, white: float, tint: tuple[float, float, float]) -> np.ndarray:
    """Linear levels as sRGB bytes [row, column, color], black at 0 (source: iec_61966_2_1)."""
    share = np.linspace(0.0, 1.0, CODES + 1)[:, None] * np.asarray(tint)
    table = np.where(share <= 0.0031308, 12.92 * share, 1.055 * share ** (1 / 2.4) - 0.055)
    level = np.clip(np.asarray(values, np.float32) * np.float32(CODES / white) + 0.5, 0, CODES).astype(np.int32)
    return np.rint(255 * table).astype(np.uint8)[level]


def _foot(page: Axes, picture: Picture, palette: Palette, wide: float, half_x: float, width_in: float) -> None:
    """Scale bar on the left, what made the picture on the right."""
    if picture.wall:
        page.text(EDGE, FOOT - 0.22, "along a bore: no one scale", color=palette.soft, fontsize=SMALL)
    else:
        bar = round_length(0.5 * half_x)
        length = bar * wide / (2 * half_x)
        page.add_patch(Rectangle((EDGE, FOOT - 0.17), length, 0.05, color=palette.ink, linewidth=0))
        page.text(
            EDGE,
            FOOT - 0.37,
            f"{three(bar)} mm" + ("" if picture.one_scale else " on axis"),
            color=palette.ink,
            fontsize=SMALL,
        )
    for row, said in enumerate(_said(picture, width_in)):
        page.text(
            width_in - EDGE,
            FOOT - 0.21 - 0.18 * row,
            said,
            color=palette.soft if row else palette.ink,
            fontsize=SMALL,
            ha="right",
        )


def _said(picture: Picture, width_in: float) -> list[str]:
    """What made the picture, in the two lines that there is room for."""
    first = []
    if picture.cores:
        first.append(f"{picture.cores:,} cores" + (f", {picture.dead} dark" if picture.dead else ""))
    if picture.exposure_s is not None:
        first.append(f"exposed {seconds(picture.exposure_s)}")
    second = []
    if picture.saturated_share > 0:
        second.append(
            f"{three(picture.saturated_share * 100)} % saturated"
            if picture.saturated_share >= 1e-4
            else "a few pixels saturated"
        )
    if picture.mirrored:
        second.append("mirror image")
    second.append("subject made up")
    room = width_in - 2 * EDGE - 1.1
    lines = [", ".join(first), ", ".join(second)] if first else [", ".join(second)]
    return [line if width_of(line, SMALL) <= room else line.split(", ")[0] for line in lines]
