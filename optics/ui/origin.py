"""Where a value on the screen comes from: the design itself, its preset, or a default; and the help text that says so."""

from dataclasses import dataclass
from typing import Any

from pydantic.fields import FieldInfo

from optics.presets import FOLDERS, Document, value_at
from optics.spec import allowed
from optics.tables import UNSOURCED, Sourced, preset, preset_names, sources
from optics.ui.shape import bounds, extra
from optics.ui.words import exact, plain, sentence_case, with_unit

SOFT = ("assumed", "remembered")
UNSOURCED_WORDS = {
    "trade": "Common practice, no source",
    "assumed": "Assumed",
    "own_scenario": "Made up for this design",
}


@dataclass(frozen=True, slots=True)
class Origin:
    """The value in force at a path, whether the document names it, and what stands behind it."""

    value: Any
    named: bool
    behind: Sourced | None  # the preset's value, or the sourced default; None where there is neither
    from_preset: bool

    @property
    def soft(self) -> bool:
        """Whether the value in force rests on memory or on an assumption of ours."""
        return not self.named and self.behind is not None and self.behind.basis in SOFT

    @property
    def overrides(self) -> bool:
        """Whether the document says something else than the preset."""
        return self.named and self.from_preset and self.behind.value != self.value


def origin(document: Document, path: str, field: FieldInfo) -> Origin:
    """The value in force at a path of a document that need not be valid."""
    behind, from_preset = _preset_value(document, path), True
    if behind is None:
        behind, from_preset = _default(field), False
    named = value_at(document, path)
    if named is not None:
        return Origin(named, True, behind, from_preset)
    return Origin(behind.value if behind else field.get_default(), False, behind, from_preset)


def _preset_value(document: Document, path: str) -> Sourced | None:
    table, _, key = path.rpartition(".")
    name, folder = value_at(document, f"{table}.preset"), FOLDERS.get(table)
    if folder is None or name not in preset_names(folder):
        return None
    return preset(folder, name).values.get(key)


def _default(field: FieldInfo) -> Sourced | None:
    value = None if field.is_required() else field.get_default()
    if value is None:
        return None
    return Sourced(value, None, None, extra(field, "source") or "assumed", "", "assumed")


def told(found: Sourced) -> str:
    """Source, place and basis as a sentence: 'Source: Colorimetry, table 12 (read).'"""
    at = f"\\: {plain(found.at)}" if found.at else ""
    if found.source in UNSOURCED:
        basis = "" if found.source == "assumed" else f" ({found.basis})"
        return f"{UNSOURCED_WORDS[found.source]}{at}{basis}."
    book = sources().get(found.source, {})
    named = ", ".join(str(book[key]) for key in ("title", "year") if book.get(key)) or found.source
    return f"Source: {plain(named)}{', ' + plain(found.at) if found.at else ''} ({found.basis})."


def help_text(field: FieldInfo, name: str, found: Origin) -> str:
    """What a field is, where its value comes from, how far it may go."""
    lines = [sentence_case(plain(field.description or name)) + "."]
    if found.named:
        lines.append(
            "Set in this design."
            + (f" The preset has {with_unit(found.behind.value, name)}." if found.overrides else "")
        )
    if found.behind is not None and (not found.named or found.overrides):
        lines.append(("" if found.from_preset else "Default. ") + told(found.behind))
        if found.behind.low is not None and found.behind.high is not None:
            lines.append(f"Known to {exact(found.behind.low)}–{exact(found.behind.high)}.")
    elif not found.named and field.is_required():
        lines.append("Not set.")
    limits, usual = allowed(field), bounds(field).usual
    lines.append(
        " ".join(
            filter(
                None, (f"Allowed: {limits}." if limits else "", f"Usual: {usual[0]:g}–{usual[1]:g}." if usual else "")
            )
        )
    )
    return "\n\n".join(filter(None, lines))
