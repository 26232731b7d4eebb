"""Tearing: a few columns of a block that, once given, let the others be found one after the other.

A greedy form of the tearing of simultaneous equations: R. S. H. Mah, Chemical Process Structures and
Information Flows, Butterworths 1990, chapter 4. Finding the fewest is NP-hard, so each choice takes the
column that sets the most others free, and the smaller number on a tie.
"""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass


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
    tears: list[int] = []
    steps: list[tuple[int, int]] = []
    found: set[int] = set()
    used: set[int] = set()
    while len(found) < len(preferred):
        if len(tears) == most:
            return None
        best: tuple[int, list[tuple[int, int]]] | None = None
        for column in preferred:
            if column in found:
                continue
            freed = _freed(rows, gives, {*found, column}, used)
            if best is None or len(freed) > len(best[1]):
                best = column, freed
        assert best is not None
        column, freed = best
        tears.append(column)
        found.add(column)
        for row, given in freed:
            steps.append((row, given))
            found.add(given)
            used.add(row)
    rest = tuple(r for r in range(len(rows)) if r not in used)
    return Tearing(tuple(tears), tuple(steps), rest)


def _freed(
    rows: Sequence[Collection[int]],
    gives: Sequence[Sequence[int]],
    found: set[int],
    used: set[int],
) -> list[tuple[int, int]]:
    """The steps possible once the columns `found` are there, in order."""
    found = set(found)
    steps: list[tuple[int, int]] = []
    taken = set(used)
    again = True
    while again:
        again = False
        candidates = []
        for row, columns in enumerate(rows):
            if row in taken:
                continue
            missing = [c for c in columns if c not in found]
            if len(missing) == 1 and missing[0] in gives[row]:
                candidates.append((gives[row].index(missing[0]), row, missing[0]))
        # A row that gives its best column goes first: `f = g(Re)` before any equation turned round to f.
        for _, row, column in sorted(candidates):
            if column not in found:
                steps.append((row, column))
                found.add(column)
                taken.add(row)
                again = True
                break
    return steps
