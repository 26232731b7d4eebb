"""The blocks that are solved, in order: what the structure tells, without those of the knowns."""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

from eqsheet.structure.verdict import Structure
from eqsheet.worksheet.prepare import Prepared

# Worksheets whose order is kept.
MOST_KEPT = 16


class Ordered(NamedTuple):
    """One block.

    Attributes
    ----------
    number : int
        From 1; knowns are not counted.
    equations : tuple of int
        Numbers in the system, ascending.
    unknowns : tuple of int
        Quantity numbers, ascending.
    after : tuple of int
        Numbers of the blocks it depends on directly.
    """

    number: int
    equations: tuple[int, ...]
    unknowns: tuple[int, ...]
    after: tuple[int, ...]


class _Kept(NamedTuple):
    structure: Structure
    rows: Sequence[int]
    blocks: tuple[Ordered, ...]


_kept: dict[tuple[int, int], _Kept] = {}


def blocks_in_order(prepared: Prepared) -> tuple[Ordered, ...]:
    """The blocks of a worksheet; worked out once for a structure, which other values of knowns do not touch."""
    key = id(prepared.structure), id(prepared.rows)
    kept = _kept.get(key)
    if kept is None:
        while len(_kept) >= MOST_KEPT:
            _kept.pop(next(iter(_kept)), None)
        kept = _kept[key] = _Kept(prepared.structure, prepared.rows, tuple(_ordered(prepared)))
    return kept.blocks


def _ordered(prepared: Prepared) -> list[Ordered]:
    rows, equations = prepared.rows, prepared.system.equations
    numbers: dict[int, int] = {}
    found: list[Ordered] = []
    for position, block in enumerate(prepared.structure.blocks):
        own = tuple([rows[r] for r in block.rows])
        if len(own) == 1 and equations[own[0]].known >= 0:
            continue
        numbers[position] = number = len(found) + 1
        after = tuple([numbers[d] for d in block.depends if d in numbers])
        found.append(Ordered(number, own, tuple(block.columns), after))
    return found
