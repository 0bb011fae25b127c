"""`list`: the demo designs and the presets, each in one line."""

import argparse

from optics.commands.terminal import as_json, paragraph, rounded, table
from optics.presets import FOLDERS
from optics.tables import PRESETS, preset, preset_names, read_toml


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("folder", nargs="?", metavar="FOLDER", help="only one folder of presets, such as fibers")
    parser.add_argument(
        "--remembered",
        action="store_true",
        help="instead: every preset value that is only remembered, with its tolerance",
    )
    parser.add_argument("--json", action="store_true", help="as JSON")


def run(options: argparse.Namespace) -> int:
    found = _everything()
    if options.folder is not None:
        from optics.spec import OutOfRange

        if options.folder not in found:
            raise OutOfRange(f"FOLDER is {options.folder!r}; it must be one of: {', '.join(found)}.")
        found = {options.folder: found[options.folder]}
    if options.remembered:
        rows = [
            row
            for folder, names in found.items()
            if folder != "fiberscopes"
            for name, _ in names
            for row in _soft(folder, name)
        ]
        heads = ("preset", "value", "is", "low", "high", "source")
        if options.json:
            print(as_json([dict(zip(heads, row)) for row in rows]))
        else:
            print(table([heads, *rows], right=(2, 3, 4)))
        return 0
    if options.json:
        print(
            as_json({folder: [{"name": name, "note": note} for name, note in rows] for folder, rows in found.items()})
        )
        return 0
    for folder, rows in found.items():
        print(folder.replace("_", " ").capitalize() + (" (demo designs, invented)" if folder == "fiberscopes" else ""))
        print(table(rows))
        print()
    print(
        paragraph(
            "Open one with `python -m optics size NAME`; pull a preset into a design with --set guide.fiber.preset=NAME.",
            lead="",
        )
    )
    return 0


def _soft(folder: str, name: str) -> list[tuple[str, ...]]:
    """The remembered values and curves of one preset, as texts; a curve's limits are factors on all of it."""
    found = preset(folder, name)
    values = [(key, item.value, item) for key, item in found.values.items()]
    curves = [(key, "curve", item) for key, item in found.curves.items()]
    return [
        (
            f"{folder}/{name}",
            key,
            rounded(value),
            *(rounded(getattr(item, end, None) or getattr(item, f"{end}_share", None)) for end in ("low", "high")),
            f"{item.source}, {item.at}" if item.at else item.source,
        )
        for key, value, item in [*values, *curves]
        if item.basis == "remembered"
    ]


def _everything() -> dict[str, list[tuple[str, str]]]:
    """(name, note) of everything in presets/, demo designs first, then along the light."""
    found = {
        "fiberscopes": [
            (name, read_toml(PRESETS / "fiberscopes" / f"{name}.toml").get("note", ""))
            for name in preset_names("fiberscopes")
        ]
    }
    for folder in dict.fromkeys(FOLDERS.values()):
        found[folder] = [(name, preset(folder, name).note) for name in preset_names(folder)]
    return {folder: rows for folder, rows in found.items() if rows}
