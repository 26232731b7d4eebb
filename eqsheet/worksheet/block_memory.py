"""Results of blocks kept while a worksheet is edited, so that an unchanged block is not solved again.

A block's result follows from its formulas, from the values and errors of the quantities it takes from elsewhere,
and from the guesses of its unknowns. Two blocks that agree in all of these have the same result, wherever they
stand and whatever numbers their quantities bear, so the remembered answer is the cold one.
"""

from __future__ import annotations

from collections.abc import Hashable, Sequence
from dataclasses import dataclass, replace

from eqsheet.model.tape import Formula
from eqsheet.solve.trail import Budget
from eqsheet.units.dimension import Dimension
from eqsheet.worksheet.guesses import Guesses
from eqsheet.worksheet.solve_block import BlockResult, Known, solve_equations

# About 2 kB a block of a few equations; enough for some states of a large worksheet, so that undo is free.
MOST_KEPT = 20_000


@dataclass(frozen=True, slots=True)
class _Kept:
    """A result and what it was worked out from, as far as the key does not say it."""

    formulas: tuple[Formula, ...]
    dimensions: tuple[Dimension | None, ...]
    result: BlockResult


class BlockMemory:
    """Solves blocks, and remembers what it has solved.

    Attributes
    ----------
    solved_anew, recalled : int
        How many blocks have been solved and how many were remembered, since the memory was made.
    """

    def __init__(self) -> None:
        self._kept: dict[Hashable, _Kept] = {}
        self.solved_anew = 0
        self.recalled = 0

    def solve(
        self,
        formulas: Sequence[Formula],
        unknowns: Sequence[int],
        known: Known,
        guesses: Guesses,
        dimensions: Sequence[Dimension | None],
        budget: Budget,
    ) -> BlockResult:
        """The solution of one block, as `solve_equations` gives it; same parameters."""
        key = _key(formulas, unknowns, known, guesses, budget)
        own = tuple([dimensions[q] for q in unknowns])
        kept = self._kept.pop(key, None)
        if kept is not None:
            result = _moved(kept, formulas, own)
            if result is not None:
                self.recalled += 1
                self._keep(key, _Kept(tuple(formulas), own, result))
                return result
        result = solve_equations(formulas, unknowns, known, guesses, dimensions, budget)
        self.solved_anew += 1
        self._keep(key, _Kept(tuple(formulas), own, result))
        return result

    def _keep(self, key: Hashable, kept: _Kept) -> None:
        self._kept[key] = kept
        if len(self._kept) > MOST_KEPT:
            del self._kept[next(iter(self._kept))]


def _key(
    formulas: Sequence[Formula], unknowns: Sequence[int], known: Known, guesses: Guesses, budget: Budget
) -> Hashable:
    """All a block's result depends on, but for places and dimensions.

    An unknown is written as its position (whole number), anything else as its value and error.
    """
    position = {q: i for i, q in enumerate(unknowns)}
    values, errors = known.values, known.errors
    equations = [
        (
            formula.tape,
            tuple([position[q] if q in position else (values[q], errors[q]) for q in formula.quantities]),
            tuple([literal.value for literal in formula.literals]),
        )
        for formula in formulas
    ]
    hints = [(guesses.near.get(q), guesses.lower.get(q), guesses.upper.get(q)) for q in unknowns]
    return tuple(equations), tuple(hints), budget


def _moved(
    kept: _Kept, formulas: Sequence[Formula], dimensions: tuple[Dimension | None, ...]
) -> BlockResult | None:
    """The kept result for the same equations where they stand now; None if they are not written the same."""
    if kept.dimensions != dimensions:
        return None
    # Formula by formula: two knowns of equal value may be told apart now and may not have been before.
    rebound = []
    same = True
    for old, new, settled in zip(kept.formulas, formulas, kept.result.formulas):
        if old.places != new.places:
            return None
        if old.statement == new.statement and old.quantities == new.quantities:
            rebound.append(settled)
            continue
        same = False
        number = dict(zip(old.quantities, new.quantities))
        quantities = tuple([number[q] for q in settled.quantities])
        rebound.append(replace(settled, quantities=quantities, statement=new.statement))
    return kept.result if same else replace(kept.result, formulas=tuple(rebound))
