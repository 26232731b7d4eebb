"""The equations of one block as what the solver takes: callables over arrays or plain floats."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from eqsheet.model.branches import literal_values
from eqsheet.model.derive import equation_partials
from eqsheet.model.evidence_function import evidence_of_equations, evidence_of_outputs
from eqsheet.model.generate import DOMAIN_ERRORS, safe_function
from eqsheet.model.tape import Formula
from eqsheet.solve.problem import Problem, ScalarProblem, Vector
from eqsheet.worksheet.block_plan import plan_of
from eqsheet.worksheet.repeated_blocks import Repeats
from eqsheet.worksheet.starting_values import Start


def scalar_problem(formula: Formula, unknown: int, values: Sequence[float], start: Start) -> ScalarProblem:
    """One equation in one unknown.

    Parameters
    ----------
    unknown : int
        Quantity number.
    values : sequence of float
        SI values by quantity number; that of the unknown is not read.
    """
    slot = formula.quantities.index(unknown)
    both = safe_function(equation_partials(formula.tape, (slot,)))
    arguments = [values[q] for q in formula.quantities] + literal_values(formula)
    before, after = arguments[:slot], arguments[slot + 1 :]
    count = len(formula.quantities)
    no_errors = (0.0,) * count

    def linearise(x: float) -> tuple[float, float]:
        value, slope = both(*before, x, *after)
        return value, slope

    def residual(x: float) -> float:
        return linearise(x)[0]

    def size(x: float) -> float:
        point = [*before, x, *after]
        return max(evidence_of_outputs(formula.tape, point[:count], point[count:], no_errors)[1])

    return ScalarProblem(
        residual, linearise, size, start.values[0], start.lower[0], start.upper[0], start.magnitude[0]
    )


@dataclass(frozen=True, kw_only=True)
class BlockProblem(Problem):
    """The equations of a small block, with what its solution is judged by.

    Attributes
    ----------
    evidence : callable
        x (n,) to residuals, sizes and error bounds (n,) of the statements themselves, evaluated afresh.
    repeats : Repeats
        How often blocks of its shape have been solved.
    """

    evidence: Callable[[Vector], tuple[Vector, Vector, Vector]]
    repeats: Repeats


def block_problem(
    formulas: Sequence[Formula],
    unknowns: Sequence[int],
    values: Sequence[float],
    errors: Sequence[float],
    start: Start,
) -> BlockProblem:
    """Several equations in as many unknowns.

    Parameters
    ----------
    formulas : sequence of Formula
    unknowns : sequence of int
        Quantity numbers, ascending.
    values, errors : sequence of float
        SI values and error bounds by quantity number; those of the unknowns are not read.
    """
    n = len(unknowns)
    plan = plan_of(formulas, unknowns)
    code, literals, repeats = plan.code, plan.literals, plan.repeats
    parameters = [values[q] for q in plan.known]
    bounds = (*(0.0,) * n, *[errors[q] for q in plan.known])
    one_by_one = _OneByOne(formulas, unknowns, values)

    def linearise(x: Vector) -> tuple[Vector, Vector]:
        try:
            residuals, entries = code.linearise(x.tolist(), arguments)
        except DOMAIN_ERRORS:
            return one_by_one.linearise(x)
        jacobian = np.zeros(n * n)
        jacobian[repeats.places] = entries
        return np.array(residuals), jacobian.reshape(n, n)

    def residual(x: Vector) -> Vector:
        if not repeats.often:
            return linearise(x)[0]
        try:
            return np.array(code.residuals(x.tolist(), arguments))
        except DOMAIN_ERRORS:
            return linearise(x)[0]

    def evidence(x: Vector) -> tuple[Vector, Vector, Vector]:
        judge = evidence_of_equations(code.statements, n)
        residuals, sizes, both = np.array(judge((*x.tolist(), *parameters), literals, bounds))
        return residuals, sizes, both

    arguments = [*parameters, *literals]
    return BlockProblem(
        n,
        residual,
        linearise,
        one_by_one.sizes,
        np.array(start.values),
        np.array(start.lower),
        np.array(start.upper),
        np.array(start.magnitude),
        repeats.written(arguments),
        evidence=evidence,
        repeats=repeats,
    )


class _OneByOne:
    """Equation by equation, for points where the fast function of the whole block has no value."""

    def __init__(self, formulas: Sequence[Formula], unknowns: Sequence[int], values: Sequence[float]) -> None:
        self._formulas = formulas
        self._unknowns = unknowns
        self._values = values
        self._sized: tuple[Vector, Vector] | None = None

    def _inputs(self, x: Vector) -> Callable[[Formula], list[float]]:
        own = dict(zip(self._unknowns, x.tolist()))
        values = self._values
        return lambda formula: [own[q] if q in own else values[q] for q in formula.quantities]

    def linearise(self, x: Vector) -> tuple[Vector, Vector]:
        """Residuals and Jacobian with nan in the rows that have no value."""
        inputs = self._inputs(x)
        n = len(self._unknowns)
        residuals = np.full(n, math.nan)
        jacobian = np.zeros((n, n))
        position = {q: i for i, q in enumerate(self._unknowns)}
        for row, formula in enumerate(self._formulas):
            slots = tuple(s for s, q in enumerate(formula.quantities) if q in position)
            results = safe_function(equation_partials(formula.tape, slots))(
                *inputs(formula), *literal_values(formula)
            )
            value, *slopes = results if slots else (results,)
            residuals[row] = value
            for slot, slope in zip(slots, slopes):
                jacobian[row, position[formula.quantities[slot]]] = slope
        return residuals, jacobian

    def sizes(self, x: Vector) -> Vector:
        """Size of each equation at x."""
        # The end of an iteration asks several times about its last point.
        if self._sized is not None and np.array_equal(self._sized[0], x):
            return self._sized[1]
        inputs = self._inputs(x)
        sizes = np.empty(len(self._formulas))
        for row, formula in enumerate(self._formulas):
            arguments = inputs(formula)
            _, both, _ = evidence_of_outputs(
                formula.tape, arguments, literal_values(formula), (0.0,) * len(arguments)
            )
            sizes[row] = max(both)
        self._sized = x.copy(), sizes
        return sizes
