"""`list`: the demo designs and the presets, each in one line."""

import argparse

from optics.commands.terminal import as_json, paragraph, table
from optics.presets import FOLDERS
from optics.tables import PRESETS, preset, preset_names, read_toml


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("folder", nargs="?", metavar="FOLDER", help="only one folder of presets, such as fibers")
    parser.add_argument("--json", action="store_true", help="as JSON")


def run(options: argparse.Namespace) -> int:
    found = _everything()
    if options.folder is not None:
        from optics.spec import OutOfRange

        if options.folder not in found:
            raise OutOfRange(f"FOLDER is {options.folder!r}; it must be one of: {', '.join(found)}.")
        found = {options.folder: found[options.folder]}
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
