"""Pictures of the light on its way: the budget step by step, the spectra in and out."""

import math

from matplotlib.figure import Figure

from optics.figures.canvas import chart, lost, three
from optics.figures.palette import LIGHT, SMALL, TEXT, THIN, WIDTH_IN, Palette
from optics.report.answer import Report

ROW = 0.275  # inches a step


def budget(report: Report, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """Each step as a bar from the light before it to the light after it, in decibels; lumens on the upper scale."""
    steps, lamp = report.light.steps[1:], report.light.steps[0].after_lm
    lit = [(step, _db(step.before_lm, lamp), _db(step.after_lm, lamp)) for step in steps]
    total = max((after for _, _, after in lit), default=0.0)
    end = max(total, 1.0) * 1.02
    figure, axes = chart(width_in, ROW * (len(steps) + 1) + 1.12, palette, left=1.28, right=0.72, bottom=0.52, top=0.6)
    worst = max((after - before for _, before, after in lit), default=0.0)
    for row, (step, before, after) in enumerate(lit):
        marked = after - before == worst > 0.005
        ink, weight = (palette.accent, "bold") if marked else (palette.ink if after - before > 0.005 else palette.soft, "normal")
        axes.barh(row, end, color=palette.ghost, height=0.72, linewidth=0)
        axes.barh(row, after - before, left=before, color=palette.accent if marked else palette.light, height=0.72, linewidth=0)
        axes.plot([after, after], [row - 0.36, row + 1.36], color=palette.soft, linewidth=THIN)
        axes.text(-0.015 * end, row, step.name, ha="right", va="center_baseline", fontsize=TEXT, color=ink, weight=weight)
        axes.text(end * 1.02, row, lost(step.factor), ha="left", va="center_baseline", fontsize=TEXT, color=ink, weight=weight)
    row, look = len(steps), {"va": "center_baseline", "fontsize": TEXT, "color": palette.ink, "weight": "bold"}
    axes.text(-0.015 * end, row, "delivered", ha="right", **look)
    said, right = f"{three(report.light.delivered_lm)} lm, {three(report.light.transmission * 100)} % of the lamp", total > 0.6 * end
    axes.text(total + (-0.02 if right else 0.02) * end, row, said, ha="right" if right else "left", **look)
    axes.set(xlim=(0, end), ylim=(row + 0.55, -0.55), yticks=[], xlabel="lost since the lamp, dB")
    axes.spines["left"].set_visible(False)
    _lumens_above(axes, palette, lamp, end)
    return figure


def _db(lumens: float, lamp: float) -> float:
    return -10 * math.log10(max(lumens / lamp, 1e-12)) if lamp > 0 else 0.0


def _lumens_above(axes, palette: Palette, lamp: float, end: float) -> None:
    """The same scale in lumens."""
    above = axes.secondary_xaxis("top")
    shares = [share for share in (1.0, 0.8, 0.6, 0.5, 0.4, 0.3, 0.2, 0.1, 0.05, 0.02, 0.01, 1e-3, 1e-4, 1e-5) if -10 * math.log10(share) <= end]
    places, last = [], -1.0
    for share in shares:
        at = -10 * math.log10(share) / end
        if at - last >= 0.17:
            places.append(share)
            last = at
    above.set_xticks([-10 * math.log10(share) for share in places], [three(lamp * share) for share in places])
    above.set_xlabel("light left, lm", color=palette.ink, fontsize=TEXT)
    above.tick_params(colors=palette.soft, labelsize=SMALL, width=THIN, length=3)
    above.spines["top"].set(color=palette.soft, linewidth=THIN)
