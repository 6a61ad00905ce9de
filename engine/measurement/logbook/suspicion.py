"""The record of one suspicion, and the ranges of rows it names."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

MOST_RANGES = 50


class Suspicion(NamedTuple):
    """Something that looks wrong: ``rows`` are (first, last) row numbers in the file, ``count`` all rows meant.

    ``mend`` is ("unit", …) or ("basis", …), what the whole column would have to be for nothing to look wrong;
    empty where that is not known.
    """

    kind: str
    channel: str
    sentence: str
    rows: tuple[tuple[int, int], ...]
    count: int
    remedy: str
    mend: tuple[str, ...] = ()

    def __str__(self) -> str:
        return f"{self.sentence} ({self.where}): {self.remedy}" if self.rows else f"{self.sentence}: {self.remedy}"

    @property
    def where(self) -> str:
        """The rows in words: "rows 5, 9-12 and more"."""
        parts = [str(a) if a == b else f"{a}\u2013{b}" for a, b in self.rows[:6]]
        word = "row " if len(self.rows) == 1 and self.rows[0][0] == self.rows[0][1] else "rows "
        return word + ", ".join(parts) + (" and more" if len(self.rows) > 6 else "")


def ranges(rows: np.ndarray, mask: np.ndarray) -> tuple[tuple[tuple[int, int], ...], int]:
    """The masked rows as (first, last) row numbers, at most ``MOST_RANGES`` of them, and how many rows.

    >>> ranges(np.array([2, 3, 4, 9]), np.array([True, True, False, True]))
    (((2, 3), (9, 9)), 3)
    """
    edges = np.flatnonzero(np.diff(np.concatenate([[False], mask, [False]]).astype(np.int8)))
    pairs = edges.reshape(-1, 2)[:MOST_RANGES]
    return tuple((int(rows[a]), int(rows[b - 1])) for a, b in pairs), int(mask.sum())
