"""Runs of the published problems from 1x, 10x and 100x their starts, each judged by outside arithmetic."""

from __future__ import annotations

import time
from dataclasses import dataclass

import mpmath
import numpy as np
from more_garbow_hillstrom import PROBLEMS, Published
from plain_problem import plain_problem

from eqsheet.solve.explain import explain
from eqsheet.solve.ladder import solve_block
from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import Problem
from eqsheet.solve.trail import Budget

FACTORS = (1, 10, 100)
# The formulas are written for any kind of number and slow; a verdict must not hang on the load of the
# machine.
PATIENT = Budget(seconds=120.0)
# A root in 50 digits must lie this near to the solution, relative to max(|x|, 1); a double root is known to
# half the digits.
SINGLE, MULTIPLE = 1e-9, 1e-4
# Residuals at 50 digits, relative to the size of the terms.
RESIDUAL = 1e-10


@dataclass(frozen=True)
class Run:
    """One problem from one start.

    Attributes
    ----------
    published : Published
    factor : int
        Multiple of the published start.
    problem : Problem
    outcome : Outcome
    true_residual : float
        Largest residual at 50 digits relative to the size of the equation; inf where not called solved.
    to_root : float
        Relative distance to the root that 50-digit steps from the solution lead to.
    seconds : float
    """

    published: Published
    factor: int
    problem: Problem
    outcome: Outcome
    true_residual: float
    to_root: float
    seconds: float

    @property
    def false_success(self) -> bool:
        """Called solved, and is not."""
        if not self.outcome.solved:
            return False
        near = MULTIPLE if self.outcome.status is Status.DOUBLE else SINGLE
        return not (self.published.has_root and self.true_residual <= RESIDUAL and self.to_root <= near)

    @property
    def right(self) -> bool:
        """A root where there is one; where there is none, said to be singular or at a minimum."""
        if self.published.has_root:
            return self.outcome.solved and not self.false_success
        if self.outcome.solved:
            return False
        return self.outcome.status is Status.SINGULAR or explain(self.problem, self.outcome).local_minimum


def run(published: Published, factor: int) -> Run:
    """The run of one problem."""
    start = factor * np.array(published.start, dtype=float)
    # The paper gives no typical sizes: one, or that of the start.
    problem = plain_problem(published.formulas, start, magnitude=np.maximum(np.abs(start), 1.0))
    begin = time.perf_counter()
    outcome = solve_block(problem, PATIENT)
    seconds = time.perf_counter() - begin
    residual, distance = np.inf, np.inf
    if outcome.solved:
        residual = residual_at_50_digits(published.formulas, outcome.x, problem)
        distance = distance_to_root(published.formulas, outcome.x)
    return Run(published, factor, problem, outcome, residual, distance, seconds)


def residual_at_50_digits(formulas, x, problem) -> float:
    """Largest residual of the floats x, evaluated with 50 digits, relative to the size of the equation."""
    from eqsheet.solve.termination import equation_sizes

    sizes = equation_sizes(problem, x, problem.linearise(x)[1])
    with mpmath.workdps(50):
        values = formulas([mpmath.mpf(float(v)) for v in x], mpmath)
        return max(abs(float(v)) / s if s > 0 else abs(float(v)) for v, s in zip(values, sizes))


def distance_to_root(formulas, x) -> float:
    """Distance, relative to max(|x|, 1), to what Gauss-Newton steps of least norm in 50 digits converge to.

    inf where they do not converge to a root.
    """
    with mpmath.workdps(50):
        point = mpmath.matrix([mpmath.mpf(float(v)) for v in x])
        begin = point.copy()
        small = mpmath.mpf(10) ** -20
        for _ in range(120):
            values = mpmath.matrix(formulas(list(point), mpmath))
            if not any(values):
                # A root as it stands, where a singular Jacobian leaves no step.
                break
            try:
                step = mpmath.lu_solve(_differences(formulas, point, values), values)
            except (ZeroDivisionError, TypeError):
                # mpmath's two ways to say that the Jacobian is singular in 50 digits.
                return float("inf")
            point -= step
            if mpmath.norm(step, mpmath.inf) <= small * max(1, mpmath.norm(point, mpmath.inf)):
                break
        else:
            return float("inf")
        if mpmath.norm(mpmath.matrix(formulas(list(point), mpmath)), mpmath.inf) > mpmath.mpf(10) ** -18:
            return float("inf")
        return float(max(abs(a - b) / max(1, abs(b)) for a, b in zip(begin, point)))


def _differences(formulas, point, values):
    """Jacobian by central differences in 50 digits: good to about 30."""
    n = len(point)
    jacobian = mpmath.matrix(n, n)
    for j in range(n):
        step = mpmath.mpf(10) ** -16 * max(abs(point[j]), mpmath.mpf(10) ** -6)
        above, below = list(point), list(point)
        above[j] += step
        below[j] -= step
        for i, (high, low) in enumerate(zip(formulas(above, mpmath), formulas(below, mpmath))):
            jacobian[i, j] = (high - low) / (2 * step)
    return jacobian


def all_runs():
    """Every problem from every start."""
    for published in PROBLEMS:
        for factor in FACTORS:
            yield run(published, factor)
