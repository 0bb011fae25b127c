"""The Pareto set: designs that no other is at least as good as in everything and better in something."""

import numpy as np

BLOCK = 256  # rows held against the set at a time


def pareto_rows(small: np.ndarray) -> np.ndarray:
    """Rows of [design, objective], each objective to be small, that none dominates; of equal ones the first.

    >>> pareto_rows(np.array([[1.0, 3.0], [2.0, 2.0], [2.0, 3.0], [1.0, 3.0]])).tolist()
    [0, 1]
    """
    _, first = np.unique(small, axis=0, return_index=True)
    rows = np.sort(first)
    # A design comes before all that it dominates where they are sorted by their objectives one after another.
    rows = rows[np.lexsort((rows, *small[rows].T[::-1]))]
    kept = small[:0]
    found: list[int] = []
    for start in range(0, len(rows), BLOCK):
        block = rows[start : start + BLOCK]
        block = block[~_dominated(small[block], kept)]
        block = block[~_dominated(small[block], small[block])]
        kept = np.concatenate([kept, small[block]])
        found.extend(block.tolist())
    return np.array(sorted(found), int)


def _dominated(here: np.ndarray, by: np.ndarray) -> np.ndarray:
    """Whether a row is beaten by one of the others, which differ from it or are it [row]."""
    beaten = np.zeros(len(here), bool)
    no_worse = np.ones((len(here), len(by)), bool)
    better = np.zeros((len(here), len(by)), bool)
    for mine, other in zip(here.T, by.T):
        no_worse &= other[None, :] <= mine[:, None]
        better |= other[None, :] < mine[:, None]
    if len(by):
        beaten = (no_worse & better).any(axis=1)
    return beaten
