"""What designs share: codes that tell distinct inputs apart, and blocks of results joined again."""

from collections.abc import Iterable
from dataclasses import replace

import numpy as np

from optics.chain.columns import ABSENT, Columns
from optics.chain.evaluate import Figures
from optics.chain.light import Light
from optics.chain.target import Lit


class Codes:
    """Codes of the columns that are not the same in all designs, joined on demand."""

    def __init__(self, count: int, found: dict[str, np.ndarray]):
        self.count, self.found = count, found

    def of(self, prefixes: tuple[str, ...]) -> np.ndarray:
        """One code for everything under these tables."""
        parts = [code for path, code in self.found.items() if path.startswith(prefixes)]
        return grouped(parts)[1] if parts else np.zeros(self.count, int)


def codes_of(columns: Columns) -> Codes:
    found = {}
    for path, column in sorted(columns.number.items()):
        filled = np.where(np.isnan(column), ABSENT, column).reshape(columns.count, -1)
        for item in range(filled.shape[1]):
            if (filled[:, item] != filled[0, item]).any():
                found[f"{path}.{item}"] = code_of(filled[:, item])
    for path, column in sorted(columns.text.items()):
        if (column != column[0]).any():
            order = {text: place for place, text in enumerate(sorted(set(column.tolist())))}
            found[f"{path}.text"] = np.array([order[text] for text in column.tolist()])
    for path, curves in sorted(columns.curve.items()):
        if (curves.row != curves.row[0]).any():
            found[f"{path}.curve"] = curves.row - curves.row.min()
    return Codes(columns.count, found)


def code_of(column: np.ndarray) -> np.ndarray:
    return np.unique(np.where(np.isnan(column), ABSENT, column), return_inverse=True)[1].ravel()


def grouped(parts: list[np.ndarray]) -> tuple[np.ndarray, np.ndarray]:
    """(first row of each distinct combination, for every row which of them it is)."""
    code = np.zeros(len(parts[0]), np.int64)
    for part in parts:
        size = int(part.max()) + 1
        if int(code.max()) >= (1 << 62) // size:
            code = np.unique(code, return_inverse=True)[1].ravel().astype(np.int64)
        code = code * size + part
    _, first, inverse = np.unique(code, return_index=True, return_inverse=True)
    return first, inverse.ravel()


def taken_rows(table: dict[str, np.ndarray], rows: np.ndarray) -> dict[str, np.ndarray]:
    return {name: found[rows] for name, found in table.items()}


def lit_rows(lit: Light, rows: np.ndarray) -> Light:
    return replace(
        lit, beam=replace(lit.beam, power_w_nm=lit.beam.power_w_nm[rows], sine2_edges=lit.beam.sine2_edges[rows])
    )


def joined_light(parts: list[Light]) -> Light:
    """Blocks of light as one; a step that a block does not have is nan there."""
    counts = [len(part.lamp_w_nm) for part in parts]
    beam = replace(
        parts[0].beam,
        power_w_nm=np.concatenate([part.beam.power_w_nm for part in parts]),
        sine2_edges=np.concatenate([part.beam.sine2_edges for part in parts]),
    )
    after = stacked([part.after_lm for part in parts], counts)
    return Light(
        np.concatenate([part.lamp_w_nm for part in parts]),
        beam,
        after,
        stacked([part.value for part in parts], counts),
    )


def joined_lit(parts: Iterable[Lit]) -> Lit:
    parts = list(parts)
    counts = [len(part.center_w_m2_nm) for part in parts]
    return Lit(np.concatenate([part.center_w_m2_nm for part in parts]), stacked([part.value for part in parts], counts))


def joined(parts: list[Figures], counts: list[int]) -> Figures:
    return Figures(
        stacked([part.value for part in parts], counts), stacked([part.after_lm for part in parts], counts), {}
    )


def stacked(tables: list[dict[str, np.ndarray]], counts: list[int]) -> dict[str, np.ndarray]:
    names = dict.fromkeys(name for table in tables for name in table)
    return {
        name: np.concatenate([table.get(name, np.full(count, np.nan)) for table, count in zip(tables, counts)])
        for name in names
    }
