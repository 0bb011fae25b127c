"""The cone, the color and the bends of a guide in words and tables."""

from optics.figures.bend import decibels
from optics.guide.fiber import half_angle_deg
from optics.report.view_bend import BendTraceView, BendView
from optics.report.view_guide import ColorView, ConeView
from optics.ui.rows import Columns, columns
from optics.ui.words import number

KERNEL_SHARE = 0.01  # how near the kernel is meant to come to the trace


def cone_words(view: ConeView) -> str:
    """The cone in and out."""
    launch = f"The launch fills NA {number(view.launch_na)}, the fiber takes {number(view.fiber_na)}"
    wasted = view.launch_na > view.fiber_na * (1 + 1e-9)
    launch += ": what is steeper is lost. " if wasted else ". "
    angle = ""
    if view.exit_na < view.outside_index:
        angle = f", {number(float(half_angle_deg(na=view.exit_na, outside_index=view.outside_index)))}° to each side"
    return f"{launch}95 % of the light leaves within NA {number(view.exit_na)}{angle}."


def color_table(view: ColorView) -> Columns:
    """Color of lamp and delivered light, and how far the way shifts it."""
    rows = [
        ("color temperature, K", "color_temperature_k", 0),
        ("Duv", "duv_ratio", 4),
        ("rendering index Ra", "color_rendering_index", 1),
        ("x", "x_ratio", 4),
        ("y", "y_ratio", 4),
    ]
    return columns(("", "lamp", "delivered", "shift"), [_shift(view, *row) for row in rows])


def _shift(view: ColorView, name: str, key: str, places: int) -> tuple[str, ...]:
    before, after = getattr(view.lamp, key), getattr(view.delivered, key)
    shown = [f"{value:,.{places}f}" for value in (before, after)] + [f"{after - before:+,.{places}f}"]
    return (name, *(text.replace("-", "−") for text in shown))


def color_words(view: ColorView) -> str:
    """What the guide does to the color, in a sentence."""
    warmer = view.delivered.color_temperature_k < view.lamp.color_temperature_k
    tint = view.delivered.duv_ratio - view.lamp.duv_ratio
    lean = "" if abs(tint) < 1e-3 else " and greener" if tint > 0 else " and pinker"
    change = abs(view.delivered.color_temperature_k - view.lamp.color_temperature_k)
    if change < 0.005 * view.lamp.color_temperature_k and not lean:
        return "The way leaves the color of the light as it is."
    return f"On its way the light turns {number(change)} K {'warmer' if warmer else 'cooler'}{lean}."


def bend_words(view: BendView) -> str:
    """What bends take, and whether the fiber lasts in them."""
    if not view.own:
        return "The design has no bend. The curve shows what one quarter turn would take."
    least = number(view.breaking_radius_mm)
    sharp = [bend for bend in view.own if bend.radius_mm < view.breaking_radius_mm]
    said = f"All bends together take {decibels(view.total_db)} of the light."
    if sharp:
        tightest = number(min(bend.radius_mm for bend in sharp))
        return f"{said} ✗ At {tightest} mm the fiber is strained beyond what it is trusted with; {least} mm would do."
    return f"{said} Each stays above {least} mm, below which the fiber is strained too far."


def trace_words(view: BendTraceView) -> str:
    """Whether kernel and rays agree, judged by the last bend."""
    last = view.bends[-1]
    apart = abs(last.kernel_share - last.traced_share)
    within = apart <= KERNEL_SHARE + 3 * last.standard_error
    return (
        f"{'✓' if within else '✗'} Behind {len(view.bends)} bend{'s' if len(view.bends) > 1 else ''} the kernel leaves "
        f"{last.kernel_share:.4f} of the light, the rays {last.traced_share:.4f} ± {last.standard_error:.4f}."
    )


def trace_table(view: BendTraceView) -> Columns:
    rows = [
        (
            f"{place}: {number(bend.angle_deg)}° at {number(bend.radius_mm)} mm",
            f"{bend.kernel_share:.4f}",
            f"{bend.traced_share:.4f} ± {bend.standard_error:.4f}",
            f"{bend.kernel_na:.3f}",
            f"{bend.traced_na:.3f}",
        )
        for place, bend in enumerate(view.bends, 1)
    ]
    return columns(("behind bend", "kernel", "rays", "95 % NA, kernel", "95 % NA, rays"), rows)
