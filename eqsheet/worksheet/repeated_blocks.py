"""What is written out for a block only once it has been solved often enough to pay for it."""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache

import numpy as np

from eqsheet.model.block_code import BlockCode
from eqsheet.model.generate import Function
from eqsheet.solve.factor import Factor
from eqsheet.solve.pivot_order import pivot_order
from eqsheet.solve.problem import WrittenStep

# Writing the step of twenty equations takes as long as some ten solves gain by it.
_SOLVES_WORTH_WRITING = 8
# An elimination of more multiplications is left to arrays.
_MOST_OPERATIONS = 1500


class Repeats:
    """How often blocks of one shape have been solved, and what has been written out for them.

    Attributes
    ----------
    code : BlockCode
    places : ndarray of int
        Where the derivatives of `BlockCode.linearise` stand in the Jacobian written row by row.
    """

    def __init__(self, code: BlockCode) -> None:
        n = code.unknowns
        self.code = code
        self.places = np.array([row * n + column for row, column in code.pattern], dtype=np.intp)
        self._solved = 0
        self._functions: tuple[Function, Function] | None = None

    @property
    def often(self) -> bool:
        """Whether code of their own pays for blocks of this shape."""
        return self._solved >= _SOLVES_WORTH_WRITING

    def solved(self, factor: Factor) -> None:
        """Count one more that has been solved; its scaled Jacobian tells which pivots are good ones."""
        self._solved += 1
        if self._solved != _SOLVES_WORTH_WRITING:
            return
        found = pivot_order(factor.matrix)
        if found is not None and found[1] <= _MOST_OPERATIONS:
            self._functions = self.code.newton_step(found[0])

    def written(self, arguments: Sequence[float]) -> WrittenStep | None:
        """The Newton step of a block with these known values and literals; None while it is not written out."""
        if self._functions is None:
            return None
        step, correction = self._functions
        return WrittenStep(step, correction, arguments)


@lru_cache(maxsize=1 << 12)
def repeats_of(code: BlockCode) -> Repeats:
    """The count for blocks of one shape."""
    return Repeats(code)
