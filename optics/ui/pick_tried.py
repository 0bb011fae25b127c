"""What a search goes through, in words for the screen."""

import re
from dataclasses import dataclass

from optics.ui.pick_words import Parts
from optics.ui.rows import Columns, columns
from optics.ui.words import plain

AXES = {
    "guide": "light guides",
    "lamp": "lamps",
    "ports": "shapes of light ports",
    "image": "image parts with their lenses",
}


@dataclass(frozen=True, slots=True)
class Tried:
    """One axis of a search: how many choices, and what they are."""

    count: int
    name: str
    what: str


def tried(axis: str, made: list[Parts]) -> Tried:
    """The choices of one axis in words, each once."""
    read = {"guide": lambda one: one.guide.split(",")[0], "lamp": lambda one: one.lamp, "image": lambda one: one.image}
    said = [read[axis](one) if axis in read else one.guide.rpartition(", ")[2] for one in made]
    if axis in ("guide", "image"):
        said = gathered(said)
    return Tried(max(len(made) - 1, 1), AXES.get(axis, axis), "; ".join(dict.fromkeys(said)))


def gathered(said: list[str]) -> list[str]:
    """Sizes of the same part behind one another.

    >>> gathered(["glass ⌀ 1 mm", "glass ⌀ 2 mm", "chip"])
    ['glass ⌀ 1, 2 mm', 'chip']
    """
    sizes: dict[str, list[str]] = {}
    for one in dict.fromkeys(said):
        found = re.fullmatch(r"(.+) ⌀ ([\d.]+) mm", one)
        sizes.setdefault(found[1] if found else one, []).extend([found[2]] if found else [])
    return [f"{name} ⌀ {', '.join(many)} mm" if many else name for name, many in sizes.items()]


def search_words(found: tuple[Tried, ...]) -> str:
    said = [f"{each.count} {each.name if each.count > 1 else 'of the ' + each.name}" for each in found]
    listed = f"{', '.join(said[:-1])} and {said[-1]}" if len(said) > 1 else said[0]
    return (
        f"A search puts together {listed}, sends each combination through the whole chain, and keeps those that no other "
        "beats in everything: detail, light, outer diameter, bend radius and cost class. The job stays as the sketch has it."
    )


def tried_table(found: tuple[Tried, ...]) -> Columns:
    rows = [(f"{each.count} {each.name}", plain(each.what)) for each in found]
    return columns(("tried", "the design's own first"), rows)
