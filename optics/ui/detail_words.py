"""The sentences and tables of the page on detail."""

from optics.figures.sharper import CALLED
from optics.report.answer import Report
from optics.report.reasons import limit_reason
from optics.study.sharper import Sharpness
from optics.study.sharper_curves import Contrasts
from optics.study.sharper_helps import FOCAL, Help
from optics.study.sharper_places import Place
from optics.study.sharper_viewer import Crack, Viewing
from optics.ui.names import field_name
from optics.ui.rows import Columns, columns
from optics.ui.words import exact, number, percent, sentence_case
from optics.viewer.camera import MEASURING_PIXELS_PER_PITCH

PLACES = {"near": "near end", "work": "at work", "far": "far end", "edge": "edge of the field"}
EDGE = "At the edge: bars in their worse direction, at the darkest point of the rim; what errors the lens has there is not known."
LITTLE = 1.3  # a finer pitch that resolves no more than so many times as much
# How a change of one number reads; those that only go along with another are told after it.
CHANGES = {
    "image.bundle.pitch_um": "a core pitch of {} µm",
    "image.chip.pixel_um": "a pixel pitch of {} µm",
    "image.objective.f_number": "a stop of f/{}",
    "source.lamp.flux_lm": "a lamp of {} lm",
    "source.lamp.flux_w": "a lamp of {} W",
    "image.objective.focus_mm": "focus at the target, {} mm",
    "image.objective.focal_mm": "a focal length of {} mm",
    "image.bundle.diameter_mm": "an image bundle of {} mm",
    "viewer.camera.relay_magnification": "a relay of ×{}",
    "viewer.eye.eyepiece_focal_mm": "an eyepiece of {} mm",
}
ALONG = {
    "viewer.camera.relay_magnification": "so that the pixels do not beat with the cores",
    "image.objective.focal_mm": "for the same field",
}


def first_words(report: Report) -> str:
    """What is seen, in one sentence."""
    seen = report.summary
    if seen.smallest_gap_mm is None:
        return "No detail is resolved"
    return f"A gap of {number(seen.smallest_gap_mm)} mm is resolved; a single line shows from {number(seen.smallest_line_mm)} mm"


def limit_words(report: Report) -> str:
    """What limits, and why."""
    part = report.summary.limited_by
    said = sentence_case(CALLED.get(part or "", part or "nothing"))
    return f"{said} limits: {limit_reason(part)}."


def help_words(found: tuple[Help, ...], wanted_mm: float | None = None) -> str:
    """What would help most, in one clause; and whether any single change reaches the gap that is wanted."""
    kept = [help for help in found if not help.breaks]
    if not kept:
        return "No single change that was tried shows clearly finer detail without giving up a need."
    best = kept[0]
    field = f" over a field of {number(best.field_of_view_deg)}°" if leads(best) == FOCAL else ""
    short = wanted_mm is not None and min(help.smallest_gap_mm for help in found) > wanted_mm
    none = f"; no single change that was tried reaches the {number(wanted_mm)} mm asked" if short else ""
    return f"Most would come from {change_words(best, short=True)}: a gap of {number(best.smallest_gap_mm)} mm{field}{none}."


def pitch_limit_words(curve: Sharpness) -> str:
    """Where the lattice limits and yet a finer pitch hardly helps: what it would gain at most; else nothing."""
    if curve.now_lp_mm <= 0 or curve.best_lp_mm > LITTLE * curve.now_lp_mm or curve.because in (None, "lattice"):
        return ""
    gain = percent(curve.best_lp_mm / curve.now_lp_mm - 1).removeprefix("+")
    return f"A finer pitch alone gains {gain} at most: {CALLED.get(curve.because, curve.because)} takes over."


def leads(help: Help) -> str:
    """The path of the number that a change is about."""
    return next(iter(help.settings))


def change_words(help: Help, short: bool = False) -> str:
    """A change in words: 'a core pitch of 4.45 µm, with a relay of ×1.79'; why it goes along, unless short."""
    (path, value), *rest = help.settings.items()
    told = [CHANGES[path].format(exact(value))]
    for other, worth in rest:
        if other in ALONG:
            told.append(f"with {CHANGES[other].format(exact(worth))}" + ("" if short else f", {ALONG[other]}"))
    return " ".join(told) if short else ", ".join(told)


def cost_words(help: Help) -> str:
    """What a change gives up."""
    field = f"the field is then {number(help.field_of_view_deg)}°" if leads(help) == FOCAL else ""
    lost = [field_name(name, f"needs.{name}") for name in help.breaks]
    short = f"✗ then short: {', '.join(lost)}" if lost else ""
    return "; ".join(filter(None, (field, short)))


def needed_words(seen: Contrasts) -> str:
    """What the curves show, and where they meet."""
    what = f"Dashed is what must be left of the detail's own contrast of {number(seen.detail_contrast)} to be seen"
    if seen.resolved_lp_mm <= 0:
        return f"{what}: all parts together leave less at every frequency."
    if seen.resolved_lp_mm >= 0.999 * seen.lattice_limit_lp_mm:
        return f"{what}; there is enough up to {number(seen.lattice_limit_lp_mm)} lp/mm, where the lattice ends."
    return f"{what}. It meets what all parts together leave at {number(seen.resolved_lp_mm)} lp/mm."


def crack_words(found: Crack) -> str:
    """How a single crack arrives."""
    width = number(found.width_mm)
    seen = "it is lost in the noise."
    if found.seen:
        seen = f"it is seen; two of them as far apart {'are told apart' if found.parted else 'run together'}."
    kept = f"keeps {number(100 * found.kept_share, 2)} % of its contrast in the image"
    return f"A single crack {width} mm wide {kept}: {seen}"


def smoothing(share: float | None) -> str:
    return "as it is" if share is None else f"{number(100 * share)} % left"


def place_rows(found: tuple[Place, ...]) -> Columns:
    """Detail near, at work, far, and at the edge."""
    snr = any(place.snr is not None for place in found)
    rows = [
        (
            PLACES[place.name],
            number(place.distance_mm),
            number(0.5 / place.resolved_lp_mm) if place.resolved_lp_mm else "nothing",
            place.limited_by or "–",
            number(place.lux),
            *(("–" if place.snr is None else number(place.snr),) if snr else ()),
        )
        for place in found
    ]
    return columns(("", "distance, mm", "smallest gap, mm", "limits", "light, lx", *(("SNR",) if snr else ())), rows)


def place_words(found: tuple[Place, ...], report: Report) -> str:
    """The depth of field, and what the edge does."""
    far = "far away" if report.detail.far_mm is None else f"{number(report.detail.far_mm)} mm"
    said = f"Defocus blurs by less than one pitch from {number(report.detail.near_mm)} mm to {far}."
    if any(place.name == "edge" for place in found):
        return f"{said} {EDGE}"
    return said + " No edge is reckoned along a bore, on a tilted target, or where the middle is dark."


def viewer_rows(found: Viewing) -> Columns:
    """The numbers of camera, chip or eye, with what they mean."""
    core = "core" if found.viewer == "camera" else "pixel"
    beat = found.even_relay_magnification is not None
    rows = [
        (f"signal to noise of one {core}", found.snr, "", "shot and read noise, and how unlike the cores are"),
        ("exposure", found.exposure_s and 1e3 * found.exposure_s, "ms", "fills half the well, or the longest allowed"),
        ("frames that it allows", found.frame_hz, "a second", "read-out alongside"),
        ("well filled", found.well_share and 100 * found.well_share, "%", f"of a pixel in a lit {core}"),
        (
            "pixels a core pitch",
            found.pixels_per_pitch,
            "",
            "✗ they beat with the cores" if beat else _enough(found),
        ),
        ("coarsest beat", found.beat_mm, "mm", "period at the target, at the worst turn of the camera"),
        ("eyepiece enlarges", found.eyepiece_magnification, "times", "against the naked eye at 250 mm"),
        ("angle between cores", found.angular_pitch_arcmin, "arcmin", "the eye parts about 1"),
        ("luminance seen", found.seen_cd_m2, "cd/m²", "of the face, through the eyepiece"),
    ]
    shown = [(name, f"{number(value)} {unit}".rstrip(), said) for name, value, unit, said in rows if value is not None]
    return columns(("quantity", "value", "meaning"), shown)


def _enough(found: Viewing) -> str:
    least = f"✓ at least {number(found.least_pixels_per_pitch)}"
    return f"{least}; measuring asks for {number(MEASURING_PIXELS_PER_PITCH)}"


def spot_words(found: Viewing) -> str:
    """The smallest round spot, and what it means."""
    if found.viewer == "eye":
        return "An eye counts no electrons: no smallest round spot is reckoned for it."
    if found.spot_mm is None:
        return "No round spot of this contrast is told from its surround in the signal that there is."
    return (
        f"A round pit of the same contrast is told from its surround from {number(found.spot_mm)} mm across: there the light "
        "counted over its blurred image outweighs the noise by the factor asked (Rose). One between cores may be missed."
    )


def viewer_words(found: Viewing) -> str:
    """The one thing to know of the viewer first."""
    pixels, least, worst = found.pixels_per_pitch, found.least_pixels_per_pitch, found.worst_pixels_per_pitch
    if found.viewer == "eye":
        return "An eye needs no exposure; what it sees is set by angle and luminance."
    if pixels is not None and found.even_relay_magnification is not None:
        return (
            f"✗ {number(pixels)} pixels a core pitch: below {number(least)} the pixels beat with the cores, worst at "
            f"{number(worst, 4)}. A relay of ×{number(found.even_relay_magnification)} would end it."
        )
    if found.snr is not None and found.well_share is not None and found.well_share < 0.45:
        return f"The longest exposure fills {number(100 * found.well_share)} % of the well: more light would lower the noise."
    return "The exposure fills half the well: more light shortens it and lowers no noise."


VIEWERS = {"camera": "The camera", "chip": "The chip", "eye": "The eye"}


def pitch_words(curve: Sharpness) -> str:
    """How to read the curve of the pitch."""
    if not curve.path.endswith("pitch_um"):
        return "The chip keeps its size; well and noise of a pixel stay as they are. Shaded: going on gains under 5 %."
    said = "Core share, NA and unevenness stay as they are; dotted, the lattice's own limit. Shaded: going on gains under 5 %."
    return said + " The ripples come from modes at their cutoff in cores of one size; real cores even them out."
