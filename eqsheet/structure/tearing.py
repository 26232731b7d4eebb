"""Tearing: a few columns of a block that, once given, let the others be found one after the other.

A greedy form of the tearing of simultaneous equations: R. S. H. Mah, Chemical Process Structures and
Information Flows, Butterworths 1990, chapter 4. Finding the fewest is NP-hard, so each choice takes the
column that sets the most others free, and the smaller number on a tie.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass
from heapq import heappop, heappush


@dataclass(frozen=True, slots=True)
class Tearing:
    """How a block unravels.

    Attributes
    ----------
    tears : tuple of int
        Columns to be given, in the order chosen.
    steps : tuple of (int, int)
        (row, column): that row gives that column, from tears and columns of earlier steps.
    rest : tuple of int
        Rows left over, as many as tears; they must hold at the solution.
    """

    tears: tuple[int, ...]
    steps: tuple[tuple[int, int], ...]
    rest: tuple[int, ...]


def tear(
    rows: Sequence[Collection[int]],
    gives: Sequence[Sequence[int]],
    preferred: Sequence[int],
    most: int,
) -> Tearing | None:
    """A tearing of a square block, None where more than `most` columns would have to be given.

    Parameters
    ----------
    rows : sequence of collections of int
        Columns of each row.
    gives : sequence of sequences of int
        For each row the columns it can give once all its others are there, best first.
    preferred : sequence of int
        All columns; on a tie the earlier one is torn.
    most : int

    >>> tear([(0, 1), (1, 2), (0, 2)], [(1,), (2,), (0,)], [0, 1, 2], 1)
    Tearing(tears=(0,), steps=((0, 1), (1, 2)), rest=(2,))
    """
    column_rows: dict[int, list[int]] = {column: [] for column in preferred}
    for row, columns in enumerate(rows):
        for column in columns:
            column_rows[column].append(row)
    unravelling = _Unravelling(rows, gives, column_rows, set(), [len(columns) for columns in rows])
    tears: list[int] = []
    steps: list[tuple[int, int]] = []
    while len(unravelling.found) < len(preferred):
        if len(tears) == most:
            return None
        best: _Unravelling | None = None
        for column in preferred:
            if column in unravelling.found:
                continue
            tried = unravelling.with_given(column)
            if best is None or len(tried.steps) > len(best.steps):
                best, best_column = tried, column
        assert best is not None
        tears.append(best_column)
        steps += best.steps
        unravelling = best
    used = {row for row, _ in steps}
    return Tearing(tuple(tears), tuple(steps), tuple(r for r in range(len(rows)) if r not in used))


class _Unravelling:
    """What is found of a block so far; `steps` are those that the column given last set free, in order."""

    def __init__(
        self,
        rows: Sequence[Collection[int]],
        gives: Sequence[Sequence[int]],
        column_rows: Mapping[int, Sequence[int]],
        found: set[int],
        missing: list[int],
    ) -> None:
        self.rows = rows
        self.gives = gives
        self.column_rows = column_rows
        self.found = found
        self.missing = missing  # how many columns of each row are not found
        self.steps: list[tuple[int, int]] = []

    def with_given(self, column: int) -> _Unravelling:
        """A copy with one more column given and all steps taken that this makes possible."""
        copy = _Unravelling(self.rows, self.gives, self.column_rows, set(self.found), list(self.missing))
        # Rows that can give their last column, the best first: `f = g(Re)` goes before an equation that would
        # have to be turned round to f. A row may be in it twice; its column is found by then.
        ready: list[tuple[int, int, int]] = []
        if not self.found:
            for row, count in enumerate(copy.missing):
                if count == 1:
                    copy._offer(row, ready)
        copy._add(column, ready)
        while ready:
            _, row, given = heappop(ready)
            if given not in copy.found:
                copy.steps.append((row, given))
                copy._add(given, ready)
        return copy

    def _add(self, column: int, ready: list[tuple[int, int, int]]) -> None:
        self.found.add(column)
        for row in self.column_rows[column]:
            self.missing[row] -= 1
            if self.missing[row] == 1:
                self._offer(row, ready)

    def _offer(self, row: int, ready: list[tuple[int, int, int]]) -> None:
        for last in self.rows[row]:
            if last not in self.found:
                if last in self.gives[row]:
                    heappush(ready, (self.gives[row].index(last), row, last))
                return
