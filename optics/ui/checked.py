"""The published rows, checked once and told in words."""

import streamlit as st

from optics.published import Checked, check, rows
from optics.ui.provenance import book
from optics.ui.rows import Columns, columns


@st.cache_resource(max_entries=1, show_spinner="Checking the published values")
def everything() -> list[Checked]:
    """Every row with what the formula gives: some seconds the first time, then kept."""
    return [check(row) for row in rows()]


def summary(found: list[Checked]) -> str:
    agree, known = sum(item.met for item in found), sum(not item.met and bool(item.row.differs) for item in found)
    remembered = sum(item.row.basis == "remembered" for item in found)
    wrong = len(found) - agree - known
    return (
        f"{agree} of {len(found)} values agree, {known} differ for a stated reason, {wrong} disagree. "
        f"{remembered} are from memory; the others stand in {len({item.row.source for item in found})} sources "
        "or come from a route of their own."
    )


def table(found: list[Checked], only_differing: bool) -> Columns:
    rows_shown = [_row(item) for item in found if not (only_differing and item.met)]
    return columns(("", "quantity", "printed", "here", "source", "place", "basis", "why it differs"), rows_shown)


def _row(item: Checked) -> tuple[str, ...]:
    mark = "✓ agrees" if item.met else "○ differs, known" if item.row.differs else "✗ disagrees"
    return (
        mark,
        item.row.quantity,
        item.row.printed,
        f"{item.got:.7g}",
        book(item.row.source),
        item.row.at,
        item.row.basis,
        item.row.differs or "",
    )
