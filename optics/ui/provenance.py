"""Every value in force and where it comes from, as a table, and how much of it is soft."""

from collections.abc import Mapping

from optics.tables import UNSOURCED, Sourced, sources
from optics.ui.origin import SOFT, UNSOURCED_WORDS
from optics.ui.rows import Columns, columns
from optics.ui.words import exact


def table(sourced: Mapping[str, Sourced]) -> Columns:
    """Every value in force with its tolerance and where it comes from."""
    return columns(
        ("path", "value", "low", "high", "source", "place", "basis"),
        [_row(path, found) for path, found in sourced.items()],
    )


def _row(path: str, found: Sourced) -> tuple[str, ...]:
    low, high = ("" if bound is None else f"{bound:g}" for bound in (found.low, found.high))
    if found.source == "own_scenario":
        return path, exact(found.value), low, high, "this design", "", "given"
    return (
        path,
        exact(found.value),
        low,
        high,
        book(found.source),
        found.at,
        f"{'≈ ' if found.basis in SOFT else ''}{found.basis}",
    )


def book(key: str) -> str:
    """A source by its title."""
    return UNSOURCED_WORDS[key].lower() if key in UNSOURCED else str(sources().get(key, {}).get("title", key))


def softness(sourced: Mapping[str, Sourced]) -> str:
    """How many of the values that the design does not state itself rest on memory or on an assumption."""
    given = [found for found in sourced.values() if found.source != "own_scenario"]
    soft = sum(found.basis in SOFT for found in given)
    return (
        f"{soft} of {len(given)} values from presets and defaults ({soft / max(len(given), 1):.0%}) are remembered or assumed ≈; "
        "the others are read, digitized or derived."
    )
