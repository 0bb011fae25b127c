"""`check`: every published value against the formula that must give it; or one design against single rays."""

import argparse
import sys
from collections import Counter

from optics.commands.terminal import as_json, opened, paragraph, table
from optics.published import Checked, check, rows
from optics.spec import OutOfRange

RAYS, SEED = 200_000, 1


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "design",
        nargs="?",
        metavar="FILE_OR_NAME",
        help="a design to trace ray by ray and to hold against `size`; absent: the published values",
    )
    parser.add_argument("--rays", metavar="N", help=f"how many rays the lamp sends out ({RAYS:,})")
    parser.add_argument("--seed", metavar="S", help=f"of the random numbers, a whole number ({SEED})")
    parser.add_argument(
        "--set",
        dest="settings",
        action="append",
        default=[],
        metavar="PATH=VALUE",
        help="change one value of the design, as in guide.bundle.length_m=3; may be repeated",
    )
    parser.add_argument("--all", action="store_true", help="show every published row, not only those that differ")
    parser.add_argument("--json", action="store_true", help="as JSON")


def run(options: argparse.Namespace) -> int:
    if options.design is not None:
        return _run_rays(options)
    for name, given in (("--rays", options.rays), ("--seed", options.seed), ("--set", options.settings)):
        if given:
            raise OutOfRange(
                f"{name} is given without a design; name the design to trace, as in `check gearbox_tooth`."
            )
    checked = [check(row) for row in rows()]
    wrong = [item for item in checked if not item.met and not item.row.differs]
    if options.json:
        print(as_json({"rows": [_plain(item) for item in checked], "disagree": len(wrong)}))
        return 1 if wrong else 0
    shown = checked if options.all else [item for item in checked if not item.met]
    if shown:
        print(table([("", "quantity", "printed", "here", "source"), *map(_line, shown)], right=(2, 3)))
        print()
    bases = Counter(item.row.basis for item in checked)
    published = len(checked) - bases["remembered"]
    said = ", ".join(f"{count} {basis}" for basis, count in bases.most_common())
    print(
        paragraph(
            f"{len(checked)} rows from {len({item.row.source for item in checked})} sources ({said}): {published} "
            f"published or derived by an independent route, {bases['remembered']} from memory. {len(wrong)} disagree.",
            lead="",
        )
    )
    return 1 if wrong else 0


def _run_rays(options: argparse.Namespace) -> int:
    """The design traced ray by ray, each number beside that of `size`; status 1 and a sentence where they disagree."""
    from optics.commands.check_rays import against_rays
    from optics.study.rays_count import FEWEST, MOST

    rays = _whole("--rays", options.rays, RAYS, FEWEST, MOST)
    seed = _whole("--seed", options.seed, SEED, 0, 2**63 - 1)
    found = against_rays(opened(options).fiberscope, rays=rays, seed=seed)
    print(as_json(found.as_dict()) if options.json else found.written())
    if found.wrong:
        print(found.disagreement(), file=sys.stderr)
    return 1 if found.wrong else 0


def _whole(name: str, text: str | None, otherwise: int, low: int, high: int) -> int:
    """A whole number of the command line, or a sentence that says what is allowed."""
    try:
        value = otherwise if text is None else int(text)
    except ValueError:
        value = low - 1
    if not low <= value <= high:
        raise OutOfRange(f"{name} is {text}; it must be a whole number from {low} to {high}.")
    return value


def _line(item: Checked) -> tuple[str, ...]:
    mark = "agrees" if item.met else "differs, known" if item.row.differs else "DIFFERS"
    said = f"{item.row.source}, {item.row.at}" + (f": {item.row.differs}" if item.row.differs and not item.met else "")
    return mark, item.row.quantity, item.row.printed, f"{item.got:.7g}", said


def _plain(item: Checked) -> dict:
    row = item.row
    return {
        "source": row.source,
        "quantity": row.quantity,
        "printed": row.printed,
        "got": item.got,
        "tolerance": row.tolerance,
        "met": item.met,
        "differs": row.differs,
        "basis": row.basis,
        "at": row.at,
    }
