"""`check`: every published value against the formula that must give it."""

import argparse
from collections import Counter

from optics.commands.terminal import as_json, paragraph, table
from optics.published import Checked, check, rows


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--all", action="store_true", help="show every row, not only those that differ")
    parser.add_argument("--json", action="store_true", help="as JSON")


def run(options: argparse.Namespace) -> int:
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
            f"{len(checked)} rows from {len({item.row.source for item in checked})} sources ({said}): {published} published or derived by an "
            f"independent route, {bases['remembered']} from memory. {len(wrong)} disagree.",
            lead="",
        )
    )
    return 1 if wrong else 0


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
