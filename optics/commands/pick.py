"""`pick`: which combinations of parts do the job, which nearly do, and what to change."""

import argparse
import dataclasses
import sys
from typing import Any

from optics import presets
from optics.commands.terminal import add_design, as_json, paragraph, rounded, table
from optics.report.verdict import NAMES
from optics.study.pick import MOST, NEAREST, SEED, Failed, Pick, Picked, pick
from optics.study.pick_needs import SHORT
from optics.study.smallest_change import Change
from optics.units import unit_of

SHOWN, SHOWN_FAILED, NEAREST_SHOWN = 12, 5, 50


def add_arguments(parser: argparse.ArgumentParser) -> None:
    add_design(parser)
    parser.add_argument("--json", action="store_true", help="JSON alone, numbers unrounded")
    parser.add_argument(
        "--most",
        type=int,
        default=MOST,
        metavar="N",
        help=f"at most so many candidates, a seeded choice of all ({MOST})",
    )
    parser.add_argument("--seed", type=int, default=SEED, metavar="S", help=f"of that choice ({SEED})")
    parser.add_argument(
        "--nearest",
        type=int,
        metavar="N",
        help="so many failing candidates, the nearest ones, get the smallest change that helps "
        f"({NEAREST} in JSON, {NEAREST_SHOWN} as text)",
    )
    parser.add_argument("--show", type=int, default=SHOWN, metavar="N", help=f"so many picks in the table ({SHOWN})")


def run(options: argparse.Namespace) -> int:
    design = presets.open(options.design)
    given = dict(presets.parse_setting(text) for text in options.settings)
    progress = _bar if sys.stderr.isatty() and not options.json else None
    asked = options.nearest if options.nearest is not None else NEAREST if options.json else NEAREST_SHOWN
    found = pick(design, given, most=options.most, seed=options.seed, nearest=max(asked, 0), progress=progress)
    if progress:
        print("\r" + " " * 40 + "\r", end="", file=sys.stderr)
    print(as_json(as_dict(found)) if options.json else written(found, design.fiberscope.name, max(options.show, 0)))
    return 0


def as_dict(found: Picked) -> dict[str, Any]:
    """The JSON of `pick`."""
    relaxed = found.nearest_relaxation
    return {
        "picks": [dataclasses.asdict(each) for each in found.picks],
        "failed": [_failed(each) for each in found.failed],
        "candidates": found.candidates,
        "met": found.met,
        "impossible": found.impossible,
        "combinations": found.combinations,
        "failing": found.failing,
        "nearest_relaxation": relaxed
        and {"relax": [each.as_dict() for each in relaxed.relax], "set": relaxed.set, "words": relaxed.words},
        "sections": found.sections,
        "lights": found.lights,
    }


def _failed(each: Failed) -> dict[str, Any]:
    change = each.smallest_change
    return {"set": each.set, "first_reason": each.first_reason, "smallest_change": change and change.as_dict()}


def written(found: Picked, name: str, shown: int) -> str:
    """The answer as text: how many do the job, the picks, what fails first, the nearest misses, what to relax."""
    parts = [f"{name}: which combinations do the job", paragraph(_sentence(found), lead=""), ""]
    if found.picks:
        rows = [_row(number, each) for number, each in enumerate(found.picks[:shown], 1)]
        head = ("", "gap mm", "center lx", "outer mm", "bend mm", "margin", "cost", "")
        parts += [
            "Picks: none beats another in everything (margin of the closest need; cost class 1 to 5, trade rules)"
        ]
        parts += [table([head, *rows], right=(0, 1, 2, 3, 4, 5, 6)), ""]
        if len(found.picks) > shown:
            parts += [paragraph(f"{len(found.picks) - shown} more; --show or --json lists them all."), ""]
        parts += ["The first pick as settings", *_settings(found.picks[0].set), ""]
    if found.failing:
        rows = [(f"{count:,}", _short(name)) for name, count in found.failing.items()]
        parts += ["What fails first, in the order of the light", table(rows, right=(0,)), ""]
    near = _unlike(found)
    if near:
        parts += ["Nearest misses"]
        for each in near:
            parts += [paragraph(f"{_parts(each.set)}: {each.first_reason}", lead="  - ")]
            parts += [paragraph(_change(each.smallest_change), lead="      ")]
        parts += [""]
    if found.nearest_relaxation:
        relaxed = found.nearest_relaxation
        parts += ["Nothing does the job as asked. Nearest to it", paragraph(f"{relaxed.words} Then this does:")]
        parts += [paragraph(_parts(relaxed.set), lead="    "), *_settings(relaxed.set), ""]
    elif not found.met:
        parts += [
            paragraph("No single need, relaxed, would help: nothing is resolved, or no material stands the job."),
            "",
        ]
    return "\n".join(parts).rstrip()


def _unlike(found: Picked) -> list[Failed]:
    """The nearest failures that differ in what fails, in what would help, or in the image."""
    seen: dict[tuple[str, ...], Failed] = {}
    for each in found.failed[:NEAREST_SHOWN]:
        image = str(each.set.get("image.bundle.preset")), str(each.set.get("image.chip.preset"))
        kind = each.first_reason.split(":")[0], each.smallest_change.path if each.smallest_change else ""
        seen.setdefault((*kind, *image), each)
    return list(seen.values())[:SHOWN_FAILED]


def _sentence(found: Picked) -> str:
    said = f"{found.met:,} of {found.candidates:,} candidates meet everything; {len(found.picks)} of them are picked."
    if found.combinations > found.candidates + found.impossible:
        said += f" They are a seeded choice of {found.combinations:,} combinations."
    if found.impossible:
        said += f" {found.impossible:,} more cannot be built."
    return said + f" {found.sections:,} sections and {found.lights:,} lights differ among them."


def _row(number: int, each: Pick) -> tuple[str, ...]:
    # The lens is chosen for the field of view, so that margin says nothing.
    worst = min((line.margin for line in each.needs if line.name != "field_of_view_deg"), default=None)
    summary = each.summary
    light = summary.target_center_lux
    return (
        str(number),
        rounded(summary.smallest_gap_mm),
        rounded(light),
        rounded(summary.outer_diameter_mm),
        rounded(summary.bend_radius_mm),
        "-" if worst is None else f"{worst:+.0%}",
        str(each.cost_class),
        _parts(each.set),
    )


def _parts(made: dict[str, Any]) -> str:
    """A candidate in a few words: guide, lamp, ports, image."""
    if not made:
        return "the design as it stands"
    image = made.get("image.chip.preset") if made.get("image.form") == "chip" else made.get("image.bundle.preset")
    said = [_plain(made.get("guide.fiber.preset"), "own fiber")]
    if "guide.bundle.diameter_mm" in made:
        said[0] += f" {made['guide.bundle.diameter_mm']:g} mm"
    said.append(_plain(made.get("source.lamp.preset"), "own lamp"))
    if "scene.ports.form" in made:
        said.append({"round": "round ports", "annulus": "ring"}.get(made["scene.ports.form"], made["scene.ports.form"]))
    if "image.objective.focal_mm" in made:
        chip = made.get("image.form") == "chip"
        picture = ("chip " if chip else "") + _plain(image, "own image")
        size = "" if "image.bundle.diameter_mm" not in made else f" {made['image.bundle.diameter_mm']:g} mm"
        said.append(
            f"{picture}{size}, f {made['image.objective.focal_mm']:g} mm f/{made['image.objective.f_number']:g}"
        )
    return "; ".join(said)


def _plain(name: str | None, own: str) -> str:
    return own if name is None else name.replace("_", " ")


def _settings(made: dict[str, Any]) -> list[str]:
    if not made:
        return ["    (none: the design as it stands)"]
    return [f"    --set {path}={value}" for path, value in made.items() if not isinstance(value, dict)]


def _short(name: str) -> str:
    return SHORT.get(name) or NAMES[name]


def _change(change: Change | None) -> str:
    if change is None:
        return "no single number, changed within its usual bounds, makes it pass"
    unit = {"mm": " mm", "um": " um", "lm": " lm", "w": " W", "s": " s", "deg": " deg"}.get(
        unit_of(change.path) or "", ""
    )
    ratio = change.after / change.before - 1
    digits = next((n for n in range(3, 9) if f"{change.after:.{n}g}" != f"{change.before:.{n}g}"), 9)
    after, before = (f"{number:.{digits}g}" for number in (change.after, change.before))
    return f"passes with {change.path} = {after}{unit} instead of {before}{unit} ({ratio:+.2%})"


def _bar(share_done: float) -> None:
    print(f"\r  {share_done:.0%} of the candidates", end="", file=sys.stderr, flush=True)
