"""The tube between image and light in words for the screen: the best share, how flat it is, what keeps the needs."""

from optics.fiberscope import Fiberscope
from optics.needs import AT_MOST
from optics.report.reasons import limit_reason
from optics.study.split import Point, Split
from optics.ui.compare_words import amount, called
from optics.ui.names import spoken
from optics.ui.words import number


def split_words(found: Split, scope: Fiberscope) -> tuple[str, list[str]]:
    """How to share the tube, in one line; and what stands behind it."""
    best = found.best
    if best is None:
        return "Nothing is resolved at any share: more light, more contrast or a finer bundle is needed first.", []
    first = (
        f"Finest with {number(100 * best.image_fraction)} % for the image: a gap of {number(best.smallest_gap_mm)} mm, and "
        f"{number(best.target_center_lux)} lx at the center."
    )
    now = "resolves nothing" if found.now_gap_mm is None else f"sees a gap of {number(found.now_gap_mm)} mm"
    low, high = 100 * found.flat_from_fraction, 100 * found.flat_to_fraction
    flat = "It is flat" if high - low >= 20 else "It is sharp" if high - low < 5 else "It is fairly flat"
    told = [
        f"As it stands the image has {number(100 * found.now_fraction)} %, and the design {now}.",
        f"{flat}: from {number(low)} to {number(high)} % the gap stays within 5 % of that.",
        f"What limits there is the {best.limited_by}: {limit_reason(best.limited_by)}.",
    ]
    asked = keeping_words(found, scope)
    if asked:
        told.append(asked)
    if not found.solved and found.now_gap_mm is not None:
        told.append("As it stands the design leaves some of what fibers may take empty, so it lies beside the curves.")
    if not best.fits:
        told.append("At the finest share the ports as they are do not lie beside the image in this tube.")
    tube = "as its parts need it now" if found.solved else "as given"
    told.append(
        f"The tube of {number(found.outer_diameter_mm)} mm ({tube}) stays, and the field of view: the focal length follows the "
        "image. The image's share counts its jacket."
    )
    return first, told


def keeping(found: Split, scope: Fiberscope) -> tuple[Point, ...]:
    """The shares that meet what is asked of gap and light at the center."""
    needs = scope.needs
    return tuple(
        point
        for point in found.curve
        if point.fits
        and (needs.target_center_lux is None or point.target_center_lux >= needs.target_center_lux)
        and (
            needs.smallest_gap_mm is None
            or (point.smallest_gap_mm is not None and point.smallest_gap_mm <= needs.smallest_gap_mm)
        )
    )


def keeping_words(found: Split, scope: Fiberscope) -> str:
    """Which shares meet both needs; empty where neither is asked."""
    asked = [name for name in ("smallest_gap_mm", "target_center_lux") if name in scope.needs.wanted()]
    if not asked:
        return ""
    names = " and ".join(
        f"{called(name)} {'at most' if name in AT_MOST else 'at least'} {amount(name, scope.needs.wanted()[name])}"
        for name in asked
    )
    good = keeping(found, scope)
    if not good:
        return f"No share gives {names} with its ports inside the tube."
    low, high = (number(100 * point.image_fraction) for point in (good[0], good[-1]))
    return f"What is asked ({names}) is met from {low} to {high} %."


def refusal(wrong: str) -> str:
    """Why a tube is not shared, as the screen says it."""
    for says, told in (
        ("body is missing", "the design has no tube. Add a body in the sidebar."),
        ("image is missing", "the design has no image part, so light has the whole tube."),
        ("image.form is 'chip'", "a chip at the tip has one size; only an image bundle can be made wider or thinner."),
        (
            "scene.ports.form is 'placed'",
            "the ports are placed one by one; they must follow the guide, as round ports or a ring.",
        ),
    ):
        if wrong.startswith(says):
            return told
    return spoken(wrong)
