"""Pictures of the light on its way: the budget step by step, the spectra in and out."""

import math

import numpy as np
from matplotlib.figure import Figure

from optics.figures.canvas import chart, lost, round_length, three, width_of
from optics.figures.palette import LIGHT, LINE, SMALL, TEXT, THIN, WIDTH_IN, Palette
from optics.report.answer import Report
from optics.report.views import Spectra

ROW = 0.275  # inches a step
VISIBLE = (380.0, 780.0)


def budget(report: Report, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """Each step as a bar from the light before it to the light after it, in decibels; lumens on the upper scale."""
    steps, lamp = report.light.steps[1:], report.light.steps[0].after_lm
    lit = [(step, _db(step.before_lm, lamp), _db(step.after_lm, lamp)) for step in steps]
    total = max((after for _, _, after in lit), default=0.0)
    end = max(total, 1.0) * 1.02
    figure, axes = chart(width_in, ROW * (len(steps) + 1) + 1.12, palette, left=1.38, right=0.72, bottom=0.52, top=0.6)
    worst = max((after - before for _, before, after in lit), default=0.0)
    for row, (step, before, after) in enumerate(lit):
        marked = after - before == worst > 0.005
        ink, weight = (
            (palette.accent, "bold") if marked else (palette.ink if after - before > 0.005 else palette.soft, "normal")
        )
        axes.barh(row, end, color=palette.ghost, height=0.72, linewidth=0)
        axes.barh(
            row,
            after - before,
            left=before,
            color=palette.accent if marked else palette.light,
            height=0.72,
            linewidth=0,
        )
        axes.plot([after, after], [row - 0.36, row + 1.36], color=palette.soft, linewidth=THIN)
        axes.text(
            -0.015 * end, row, step.name, ha="right", va="center_baseline", fontsize=TEXT, color=ink, weight=weight
        )
        axes.text(
            end * 1.02, row, lost(step.factor), ha="left", va="center_baseline", fontsize=TEXT, color=ink, weight=weight
        )
    row, look = len(steps), {"va": "center_baseline", "fontsize": TEXT, "color": palette.ink, "weight": "bold"}
    axes.text(-0.015 * end, row, "delivered", ha="right", **look)
    said, right = (
        f"{three(report.light.delivered_lm)} lm, {three(report.light.transmission * 100)} % of the lamp",
        total > 0.6 * end,
    )
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
    shares = [
        share
        for share in (1.0, 0.8, 0.6, 0.5, 0.4, 0.3, 0.2, 0.1, 0.05, 0.02, 0.01, 1e-3, 1e-4, 1e-5)
        if -10 * math.log10(share) <= end
    ]
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


def spectra(view: Spectra, *, palette: Palette = LIGHT, width_in: float = WIDTH_IN) -> Figure:
    """The lamp's spectrum, and the shapes of what is delivered and of what the viewer takes, each enlarged as it says."""
    figure, axes = chart(width_in, 3.0, palette, left=0.82, right=0.2, bottom=0.52, top=0.42)
    x, unit, factor = view.wavelength_nm, *_watts(float(view.lamp_w_nm.max()))
    some = np.flatnonzero(view.lamp_w_nm > 1e-3 * view.lamp_w_nm.max())
    low, high = (x[some[0]], x[some[-1]]) if some.size else (x[0], x[-1])
    axes.axvspan(max(low, VISIBLE[0]), min(high, VISIBLE[1]), color=palette.ghost, linewidth=0)
    most, top = _top(view.lamp_w_nm)
    curves = [("lamp", view.lamp_w_nm, 1.0, palette.soft, "solid")]
    for name, power, color, style in (
        ("out of the tip" if view.seen_w_nm.max() > 0 else "delivered", view.delivered_w_nm, palette.light, "solid"),
        ("seen", view.seen_w_nm, palette.back, "dashed"),
    ):
        if power.max() > 0:
            times = round_length(1.001 * top / _top(power)[1])
            curves.append((name if times == 1 else f"{name} ×{_times(times)}", power, times, color, style))
    at = 0.0
    for name, power, times, color, style in curves:
        axes.fill_between(x, power * factor * times, color=color, alpha=0.14, linewidth=0)
        axes.plot(x, power * factor * times, color=color, linewidth=LINE, linestyle=style)
        axes.plot(
            [at, at + 0.05],
            [1.085, 1.085],
            color=color,
            linestyle=style,
            linewidth=LINE,
            transform=axes.transAxes,
            clip_on=False,
        )
        axes.text(at + 0.06, 1.085, name, color=palette.ink, fontsize=SMALL, va="center", transform=axes.transAxes)
        at += 0.11 + width_of(name, SMALL) / (width_in - 1.02)
    if most > top:  # a line that would flatten everything else
        peak = x[int(np.argmax(view.lamp_w_nm))]
        axes.annotate(
            f"line at {three(peak)} nm, up to {three(most * factor)}",
            (peak, top * factor),
            (6, -4),
            textcoords="offset points",
            color=palette.soft,
            fontsize=SMALL,
            va="top",
        )
    axes.set(xlim=(low, high), ylim=(0, top * factor * 1.03), xlabel="wavelength, nm", ylabel=f"power, {unit}")
    axes.yaxis.set_major_formatter(lambda value, _: three(value))
    return figure


def _top(power: np.ndarray) -> tuple[float, float]:
    """The highest value, and where the scale ends: lower, when a narrow line stands far above all the rest."""
    most = max(float(power.max()), 1e-12)
    broad = float(np.quantile(power[power > 1e-3 * most], 0.93)) if (power > 0).any() else most
    return most, most if most < 3 * broad else 1.5 * broad


def _times(value: float) -> str:
    """A factor in print: 20, or 5·10⁶."""
    if value < 1e4:
        return three(value)
    power = round(math.log10(value / float(f"{value:.0e}"[0])))
    first = f"{value:.0e}"[0]
    return (
        ("" if first == "1" else f"{first}·") + "10" + str(power).translate(str.maketrans("0123456789", "⁰¹²³⁴⁵⁶⁷⁸⁹"))
    )


def _watts(most: float) -> tuple[str, float]:
    """The unit of power per nm that reads best, and what to multiply by."""
    return ("W/nm", 1.0) if most >= 0.1 else ("mW/nm", 1e3) if most >= 1e-4 else ("µW/nm", 1e6)
