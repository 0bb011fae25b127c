"""`python -m optics COMMAND ...`: light, detail, fit and passage of a fiberscope, from its design file."""

import argparse
import importlib
import os
import sys

from optics.spec import OutOfRange

# The commands, in the order in which one needs them; only the one that is asked for is imported.
COMMANDS = {
    "list": "the demo designs and the presets",
    "size": "light on the target, smallest detail, fit and caveats of one design",
    "check": "the published values that the formulas are held against, or one design traced ray by ray",
    "pick": "which combinations of parts do the job, which nearly do, and what to change",
    "split": "how to share a tube between image and light",
    "compare": "what one design has over another, and where one overtakes the other",
    "margins": "how sure a design is to meet its needs within its tolerances, and what decides",
    "bench": "readings from a bench, fitted by the design's own model",
    "draw": "one picture of one design, as PNG, SVG or PDF",
    "report": "the whole answer on paper as PDF, or the section as DXF",
}


def main(arguments: list[str] | None = None) -> int:
    arguments = sys.argv[1:] if arguments is None else arguments
    parser = argparse.ArgumentParser(prog="python -m optics", description=__doc__)
    commands = parser.add_subparsers(dest="command", required=True, metavar="COMMAND")
    for name, words in COMMANDS.items():
        one = commands.add_parser(name, help=words, description=words[0].upper() + words[1:] + ".")
        if name in arguments[:1]:
            module = importlib.import_module(f"optics.commands.{name}")
            module.add_arguments(one)
            one.set_defaults(run=module.run)
    try:
        options = parser.parse_args(arguments)
        return options.run(options)
    except OutOfRange as wrong:
        print(wrong, file=sys.stderr)
        return 1
    except BrokenPipeError:  # the reader (head, less) has seen enough
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0


if __name__ == "__main__":
    sys.exit(main())
