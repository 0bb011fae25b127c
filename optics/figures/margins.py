"""Pictures of the margins: how often each need is met, and what moves a number."""

from collections.abc import Mapping

from matplotlib.axes import Axes
from matplotlib.figure import Figure

from optics.figures.canvas import chart, three, width_of
from optics.figures.palette import LIGHT, LINE, SMALL, TEXT, THIN, WIDTH_IN, Palette
from optics.study.margins_answer import Causes, Condition, Driver

NEED_ROW, CAUSE_ROW, CAUSE_LEFT_IN = 0.42, 0.46, 2.3  # inches: a row, and the room for names
SHOWN_SHARE, MOST_CAUSES = 0.005, 6  # causes below, or beyond that many, stand together
SOFT = ("assumed", "remembered")


# How often


def odds(
    new: Condition,
    aged: Condition | None,
    names: Mapping[str, str],
    *,
    palette: Palette = LIGHT,
    width_in: float = WIDTH_IN,
) -> Figure:
    """The share of the samples that meet all needs, and each: bars with their standard error, the aged ones thin below.

    `names`: each need with its limit, two lines.
    """
    lines = [("all needs\ntogether", new.all_needs, new.all_needs_standard_error, True, False)]
    least = min(need.probability for need in new.needs)
    for need in new.needs:
        worst = need.probability == least < 1
        lines.append((names[need.name], need.probability, need.standard_error, need.varies, worst))
    worn = [None] * len(lines)
    if aged is not None:
        worn = [aged.all_needs, *(need.probability for need in aged.needs)]
    left = 0.24 + max(width_of(text, TEXT if row == 0 else SMALL + 1) for row, (text, *_) in enumerate(lines))
    figure, axes = chart(
        width_in, NEED_ROW * len(lines) + 0.92, palette, left=left, right=1.12, bottom=0.52, top=0.4 if aged else 0.16
    )
    places = [row + (0.25 if row else 0.0) for row in range(len(lines))]
    for place, line, old in zip(places, lines, worn):
        _odds_row(axes, palette, place, line, old)
    axes.axhline(0.625, xmin=-left / (width_in - left - 1.12), color=palette.grid, linewidth=THIN, clip_on=False)
    axes.set(xlim=(0, 100), ylim=(places[-1] + 0.55, -0.55), yticks=[], xlabel="share of the samples that meet it, %")
    axes.spines["left"].set_visible(False)
    if aged is not None:
        figure.text(0.12 / width_in, 1 - 0.2 / figure.get_figheight(), "thick: new   thin: aged", color=palette.soft,
                    fontsize=SMALL, va="center")  # fmt: skip
    return figure


def _odds_row(axes: Axes, palette: Palette, place: float, line: tuple, old: float | None) -> None:
    text, share, error, varies, worst = line
    ink = palette.accent if worst else palette.ink
    high, y = (0.56, place) if old is None else (0.38, place - 0.11)
    axes.barh(y, 100, color=palette.ghost, height=high, linewidth=0)
    fill = palette.accent if worst else palette.back
    axes.barh(y, 100 * share, color=fill, height=high, linewidth=0, alpha=1.0 if varies else 0.45)
    if varies and 0 < share < 1:
        axes.plot([100 * (share - error), 100 * (share + error)], [y, y], color=palette.ink, linewidth=LINE)
    if old is not None:
        axes.barh(place + 0.24, 100, color=palette.ghost, height=0.2, linewidth=0)
        axes.barh(place + 0.24, 100 * old, color=palette.soft, height=0.2, linewidth=0)
    first, _, second = text.partition("\n")
    look = {"ha": "right", "weight": "bold" if worst or place == 0 else "normal", "color": ink}
    axes.text(-2, place - 0.17, first, va="center_baseline", fontsize=TEXT, **look)
    axes.text(-2, place + 0.21, second, va="center_baseline", fontsize=SMALL, **{**look, "weight": "normal",
              "color": ink if worst or place == 0 else palette.soft})  # fmt: skip
    told = percent(share, error) if varies else "always" if share == 1 else "never"
    said = {"color": ink if varies else palette.soft, "weight": look["weight"], "fontsize": TEXT}
    axes.text(103, y, told, va="center_baseline", **said)
    if old is not None:
        axes.text(103, place + 0.24, percent(old), color=palette.soft, fontsize=SMALL, va="center_baseline")


def percent(share: float, error: float | None = None) -> str:
    """A share in percent; never a round 100 or 0 that is not whole; its standard error where that can be read.

    >>> percent(0.51, 0.0112), percent(1.0, 0.0005), percent(0.99996), percent(0.912)
    ('51.0 ± 1.1 %', '100 %', '>99.9 %', '91.2 %')
    """
    percent = 100 * share
    if 99.9 < percent < 100 or 0 < percent < 0.1:
        return ">99.9 %" if percent > 50 else "<0.1 %"
    if percent in (0.0, 100.0):
        return f"{percent:.0f} %"
    return f"{percent:.1f} %" if error is None else f"{percent:.1f} ± {100 * error:.1f} %"


# What moves it


def causes(found: Causes, names: Mapping[str, str], *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """Shares of the variance of one number, largest first; hatched where the tolerance is only assumed or remembered."""
    shown = [item for item in found.drivers if item.share >= SHOWN_SHARE][:MOST_CAUSES]
    small = sum(item.share for item in found.drivers) - sum(item.share for item in shown)
    rest = [
        ("all others", small),
        ("several at once", found.together_share),
        ("not explained", found.unexplained_share),
    ]
    high = CAUSE_ROW * len(shown) + 0.3 * len(rest)
    figure, axes = chart(width_in, high + 1.0, palette, left=CAUSE_LEFT_IN, right=0.85, bottom=0.52, top=0.38)
    place = 0.0
    for item in shown:
        _driver(axes, palette, place + CAUSE_ROW / 2, item, names[item.path])
        place += CAUSE_ROW
    for said, share in rest:
        _rest(axes, palette, place + 0.15, said, share)
        place += 0.3
    axes.set(xlim=(0, 100), ylim=(place + 0.05, -0.05), yticks=[], xlabel="share of its variance, %")
    axes.spines["left"].set_visible(False)
    said = "≈ hatched: a tolerance only assumed or remembered"
    figure.text(
        0.12 / width_in, 1 - 0.18 / figure.get_figheight(), said, color=palette.soft, fontsize=SMALL, va="center"
    )
    return figure


def _driver(axes: Axes, palette: Palette, y: float, item: Driver, name: str) -> None:
    soft = item.basis in SOFT
    look = {"facecolor": palette.back, "linewidth": 0}
    if soft:
        look = {"facecolor": palette.paper, "edgecolor": palette.back, "hatch": "/////", "linewidth": THIN}
    axes.barh(y, 100 * item.share, height=0.26, **look)
    part, _, what = name.rpartition(", ")
    ends = f"{three(item.low)} … {three(item.high)}{' ≈' if soft else ''}"
    under = f"{part.lower()}, {ends}" if part else ends
    axes.text(-2, y - 0.085, what, ha="right", va="center_baseline", fontsize=TEXT, color=palette.ink)
    axes.text(-2, y + 0.105, under, ha="right", va="center_baseline", fontsize=SMALL, color=palette.soft)
    end = 100 * (item.share + item.standard_error)
    axes.plot([100 * (item.share - item.standard_error), end], [y, y], color=palette.ink, linewidth=LINE * 0.8)
    axes.text(end + 2, y, percent(item.share), va="center_baseline", fontsize=TEXT, color=palette.ink)


def _rest(axes: Axes, palette: Palette, y: float, said: str, share: float) -> None:
    axes.barh(y, 100 * share, height=0.16, color=palette.soft, linewidth=0)
    axes.text(-2, y, said, ha="right", va="center_baseline", fontsize=SMALL, color=palette.soft)
    axes.text(100 * share + 2, y, percent(share), va="center_baseline", fontsize=SMALL, color=palette.soft)
