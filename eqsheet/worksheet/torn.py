"""A block with its explicit equations used up: a few torn unknowns, the others by closed forms from them.

The torn problem has few unknowns and starts with most equations satisfied, which makes a poor start good. Its
solution is only a start: the block is always solved once more untorn.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from eqsheet.model.branches import literal_values
from eqsheet.model.derive import equation_partials, partials
from eqsheet.model.evaluate import evaluate_with_evidence
from eqsheet.model.generate import safe_function
from eqsheet.model.isolate import isolate
from eqsheet.model.tape import Formula
from eqsheet.solve.problem import Problem, Vector
from eqsheet.structure.tearing import Tearing, tear
from eqsheet.worksheet.starting_values import Start

# Beyond this many torn unknowns tearing brings nothing over solving the block as it is.
MOST_TEARS = 4
# The way from the torn unknowns to all others is gone step by step in plain floats, a microsecond or two each. Stages
# with a recycle, up to two hundred unknowns, are solved in a tenth of a second so, and not at all untorn.
LARGEST_BLOCK = 300


@dataclass(frozen=True, slots=True)
class Step:
    """One unknown from others, or what is left of an equation.

    Attributes
    ----------
    position : int
        Of the unknown in the block, of the equation among those left over.
    functions : tuple of callable
        (value, slopes) for each closed form, the principal first; an equation has one, for its residual.
    arguments : tuple of float
        What they take: quantities, those of the block still to be filled in, and literals.
    inputs : tuple of (int, int)
        Slot and position of each unknown of the block to be filled in.
    """

    position: int
    functions: tuple[Callable[..., Any], ...]
    arguments: tuple[float, ...]
    inputs: tuple[tuple[int, int], ...]

    def filled(self, values: Sequence[float]) -> list[float]:
        """The arguments with the unknowns of the block, by position in it."""
        arguments = list(self.arguments)
        for slot, position in self.inputs:
            arguments[slot] = values[position]
        return arguments


class TornBlock:
    """A block, its tearing, and the way from torn unknowns to all of them.

    Attributes
    ----------
    tears : tuple of int
        Positions of the torn unknowns in the block.
    """

    def __init__(
        self,
        formulas: Sequence[Formula],
        unknowns: Sequence[int],
        values: Sequence[float],
        start: Start,
        tearing: Tearing,
    ) -> None:
        self.tears = tearing.tears
        self._formulas = formulas
        self._unknowns = unknowns
        self._values = values
        self._start = start
        self._position = {q: i for i, q in enumerate(unknowns)}
        self._steps = [self._step(formulas[row], column) for row, column in tearing.steps]
        self._left_over = [formulas[row] for row in tearing.rest]

    def _step(self, formula: Formula, position: int) -> Step:
        slot = formula.quantities.index(self._unknowns[position])
        isolation = isolate(formula.tape, slot)
        assert isolation is not None
        inputs = tuple(i for i in self._inputs(formula) if i[0] != slot)
        slots = tuple(s for s, _ in inputs)
        functions = tuple(safe_function(partials(c.tape, 0, slots)) for c in isolation.candidates)
        return Step(position, functions, self._arguments(formula), inputs)

    def _rest(self, formula: Formula, position: int) -> Step:
        inputs = self._inputs(formula)
        function = safe_function(equation_partials(formula.tape, tuple(s for s, _ in inputs)))
        return Step(position, (function,), self._arguments(formula), inputs)

    def _inputs(self, formula: Formula) -> tuple[tuple[int, int], ...]:
        return tuple((s, self._position[q]) for s, q in enumerate(formula.quantities) if q in self._position)

    def _arguments(self, formula: Formula) -> tuple[float, ...]:
        known = (math.nan if q in self._position else self._values[q] for q in formula.quantities)
        return (*known, *literal_values(formula))

    def expand(self, x: Sequence[float]) -> tuple[list[float], Vector]:
        """All unknowns from the torn ones, and their derivatives with respect to those.

        Parameters
        ----------
        x : sequence of float
            Torn unknowns.

        Returns
        -------
        values : list of float
            By position in the block; nan from where the chain breaks.
        slopes : ndarray (n, tears)
        """
        n = len(self._unknowns)
        values = [math.nan] * n
        slopes = np.zeros((n, len(self.tears)))
        for k, position in enumerate(self.tears):
            values[position] = float(x[k])
            slopes[position, k] = 1.0
        for step in self._steps:
            self._take(step, values, slopes)
        return values, slopes

    def _take(self, step: Step, values: list[float], slopes: Vector) -> None:
        arguments = step.filled(values)
        low, high = self._start.lower[step.position], self._start.upper[step.position]
        for function in step.functions:
            result = function(*arguments)
            value, *parts = result if step.inputs else (result,)
            if low < value < high:
                values[step.position] = value
                for (_, position), part in zip(step.inputs, parts):
                    slopes[step.position] += part * slopes[position]
                return

    def problem(self) -> Problem:
        """The torn problem: the left-over equations in the torn unknowns."""
        start = self._start
        pick = list(self.tears)
        rest = [self._rest(formula, row) for row, formula in enumerate(self._left_over)]

        def linearise(x: Vector) -> tuple[Vector, Vector]:
            residuals = np.empty(len(rest))
            jacobian = np.zeros((len(rest), len(pick)))
            # A slope may be infinite, as that of a curve read backwards where it is level.
            with np.errstate(invalid="ignore"):
                values, slopes = self.expand(x.tolist())
                for left in rest:
                    result = left.functions[0](*left.filled(values))
                    residuals[left.position], *parts = result if left.inputs else (result,)
                    for (_, position), part in zip(left.inputs, parts):
                        jacobian[left.position] += part * slopes[position]
            return residuals, jacobian

        def sizes(x: Vector) -> Vector:
            values, _ = self.expand(x.tolist())
            found = np.zeros(len(rest))
            for left, formula in zip(rest, self._left_over):
                quantities = left.filled(values)[: len(formula.quantities)]
                evidence = evaluate_with_evidence(formula.tape, quantities, literal_values(formula))
                found[left.position] = max(evidence.sizes[o] for o in formula.tape.outputs)
            return found

        return Problem(
            len(pick),
            lambda x: linearise(x)[0],
            linearise,
            sizes,
            np.array(start.values)[pick],
            np.array(start.lower)[pick],
            np.array(start.upper)[pick],
            np.array(start.magnitude)[pick],
        )


def torn_block(
    formulas: Sequence[Formula], unknowns: Sequence[int], values: Sequence[float], start: Start
) -> TornBlock | None:
    """The block torn, None where that would not leave it much smaller.

    Unknowns with a guess are torn before those without, so that what the user knows is used.
    """
    n = len(unknowns)
    if not 2 <= n <= LARGEST_BLOCK:
        return None
    position = {q: i for i, q in enumerate(unknowns)}
    rows = [tuple(position[q] for q in f.quantities if q in position) for f in formulas]
    gives = [_given(formula, position) for formula in formulas]
    assumed = set(start.assumed)
    preferred = [i for i in range(n) if i not in assumed] + sorted(assumed)
    tearing = tear(rows, gives, preferred, min(MOST_TEARS, n // 2))
    return None if tearing is None else TornBlock(formulas, unknowns, values, start, tearing)


def _given(formula: Formula, position: dict[int, int]) -> list[int]:
    """Block unknowns that the equation gives in closed form, those that stand alone on a side first."""
    alone: list[int] = []
    turned: list[int] = []
    instructions = formula.tape.instructions
    sides = {instructions[o] for o in formula.tape.outputs}
    for slot, quantity in enumerate(formula.quantities):
        if quantity not in position or isolate(formula.tape, slot) is None:
            continue
        (alone if ("quantity", slot) in sides else turned).append(position[quantity])
    return alone + turned
