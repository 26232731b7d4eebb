"""Which blocks are single equations of large families with one closed form, so that runs of them make chains."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from eqsheet.worksheet.group_chain import ChainPart, ClosedForm, only_closed_form
from eqsheet.worksheet.group_equations import GroupedEquations
from eqsheet.worksheet.prepare import Prepared

Numbers = NDArray[np.int64]


class Singles:
    """The blocks of a structure as arrays.

    Attributes
    ----------
    numbers : ndarray (blocks,)
        Number of each block, from 1; 0 for those of knowns.
    columns : ndarray (blocks,)
        First unknown of each.
    """

    def __init__(self, prepared: Prepared, equations: GroupedEquations) -> None:
        blocks = prepared.structure.blocks
        rows = prepared.rows
        count = len(blocks)
        self._equations = equations
        first = np.fromiter((rows[block.rows[0]] for block in blocks), np.int64, count)
        single = np.fromiter((len(block.rows) for block in blocks), np.int64, count) == 1
        self.columns: Numbers = np.fromiter((block.columns[0] for block in blocks), np.int64, count)
        counted = ~(single & equations.known[first])
        self.numbers: Numbers = np.where(counted, np.cumsum(counted), 0)
        # By block: position of the group and the slot solved for as one code, -1 where it makes no chain.
        self._form = np.full(count, -1, dtype=np.int64)
        self._entry = np.zeros(count, dtype=np.int64)
        self._closed: dict[int, tuple[int, int, ClosedForm]] = {}
        group_of = np.searchsorted(equations.starts, first, side="right") - 1
        for position, group in enumerate(equations.groups):
            mine = np.flatnonzero(single & counted & (group_of == position))
            if not len(mine):
                continue
            entries = first[mine] - equations.starts[position]
            self._entry[mine] = entries
            slots = (group.bound.numbers[entries] == self.columns[mine, None]).argmax(axis=1)
            for slot in np.flatnonzero(np.bincount(slots)).tolist():
                closed = only_closed_form(group.bound.formula.tape, slot)
                if closed is not None:
                    self._form[mine[slots == slot]] = len(self._closed)
                    self._closed[len(self._closed)] = position, slot, closed

    def runs(self, least: int) -> Iterator[Numbers]:
        """Positions of runs of at least `least` blocks that can be part of a chain; knowns between are left out."""
        solved = np.flatnonzero(self.numbers)
        able = self._form[solved] >= 0
        edges = np.flatnonzero(np.diff(np.concatenate([[False], able, [False]]).astype(np.int8)))
        for begin, end in zip(edges[::2].tolist(), edges[1::2].tolist()):
            if end - begin >= least:
                yield solved[begin:end]

    def parts(self, where: Numbers) -> list[ChainPart]:
        """The blocks of a run, given by their positions, by group and slot."""
        forms = self._form[where]
        found = []
        for form in np.flatnonzero(np.bincount(forms)).tolist():
            position, slot, closed = self._closed[form]
            positions = np.flatnonzero(forms == form)
            found.append(
                ChainPart(
                    self._equations.groups[position],
                    slot,
                    closed,
                    positions,
                    self._entry[where][positions],
                )
            )
        return found
