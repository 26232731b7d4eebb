"""Solves one block by the cheapest method that fits, and judges the result afresh.

Closed form by isolation, else closed form of a linear equation, else a linear step, else the ladder of the
solve layer; conditions that depend on the block's own unknowns are held, checked and switched.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TypeAlias

import numpy as np

from eqsheet.model.branches import (
    Switch,
    literal_values,
    quantities_under,
    settle,
    switches,
)
from eqsheet.model.evaluate import evaluate
from eqsheet.model.evidence_function import evidence_of_outputs
from eqsheet.model.isolate import isolate
from eqsheet.model.linear import affine_in
from eqsheet.model.tape import Formula, Tape
from eqsheet.solve.factor import Factor
from eqsheet.solve.kind_of_root import LARGEST_EXAMINED
from eqsheet.solve.ladder import DEFAULT_BUDGET, solve_block, solve_scalar
from eqsheet.solve.linear import linear_step
from eqsheet.solve.near_zero import own_magnitudes
from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import Problem, Vector
from eqsheet.solve.scalar_newton import confirmed_scalar
from eqsheet.solve.termination import ACCEPTABLE, NEIGHBOURHOOD, confirmed
from eqsheet.solve.trail import Budget, Rung, Trail
from eqsheet.solve.verdict import Verdict, judge, judge_by_factor, unfit
from eqsheet.structure.array_sequence import as_sequence
from eqsheet.units.dimension import Dimension
from eqsheet.worksheet.array_equations import LARGE_BLOCK, ArrayBlock, ArrayProblem, shapes_of
from eqsheet.worksheet.block_equations import BlockProblem, block_problem, scalar_problem
from eqsheet.worksheet.block_plan import plan_of
from eqsheet.worksheet.guesses import Guesses
from eqsheet.worksheet.intervals import narrowed
from eqsheet.worksheet.less_blind import less_blind
from eqsheet.worksheet.starting_values import MOST_NARROWED, Start, starting_values
from eqsheet.worksheet.torn import TornBlock, torn_block

# Rounding of a closed form may put its value this far past a bound, relative to the bound.
PAST_BOUND = 1e-12
Ladder: TypeAlias = Callable[
    [Problem, Budget, Sequence[tuple[str, Rung]], Callable[[], bool] | None], Outcome
]


@dataclass(frozen=True)
class BlockResult:
    """What became of one block.

    Attributes
    ----------
    solved : bool
    values, errors : sequence of float
        By position of the unknowns; the best point and infinities where it is not solved.
    method : str
    iterations : int
    residual : float
        Scaled, evaluated afresh.
    condition : float
    formulas : sequence of Formula
        The equations with the branches taken.
    outcome : Outcome or None
        The solver's account; None for closed forms.
    start : Start or None
        Where it was started; None for closed forms.
    gap : tuple of float
        With no consistent branch: how far the solutions lie apart, by unknown.
    outside : tuple of int
        Positions of unknowns that a closed form puts outside their bounds.
    problem : Problem or None
        For explaining a failure.
    """

    solved: bool
    values: Sequence[float]
    errors: Sequence[float]
    method: str
    iterations: int = 0
    residual: float = 0.0
    condition: float = 1.0
    formulas: Sequence[Formula] = ()
    outcome: Outcome | None = None
    start: Start | None = None
    gap: tuple[float, ...] = ()
    outside: tuple[int, ...] = ()
    problem: Problem | None = None


@dataclass(frozen=True, slots=True)
class Known:
    """What is known when a block is solved: SI values and error bounds by quantity number, nan where unknown."""

    values: Sequence[float]
    errors: Sequence[float]


def solve_equations(
    formulas: Sequence[Formula],
    unknowns: Sequence[int],
    known: Known,
    guesses: Guesses,
    dimensions: Sequence[Dimension | None],
    budget: Budget = DEFAULT_BUDGET,
) -> BlockResult:
    """The solution of one block.

    Parameters
    ----------
    formulas : sequence of Formula
        As many as unknowns.
    unknowns : sequence of int
        Quantity numbers, ascending.
    """
    values = known.values
    plan = plan_of(formulas, unknowns)
    formulas = plan.formulas
    found: tuple[Switch, ...] = ()
    if not plan.plain:
        formulas = tuple(settle(f, lambda q: None if q in plan.own else values[q]) for f in formulas)
        found = switches(formulas, plan.own)
    if not found:
        if len(unknowns) == 1 and unknowns[0] in formulas[0].quantities:
            closed = closed_form(formulas[0], unknowns[0], known, guesses)
            if closed is not None:
                return closed
        start = starting_values(unknowns, formulas, values, guesses, dimensions)
        return _iterate(formulas, unknowns, known, start, budget)
    start = starting_values(unknowns, formulas, values, guesses, dimensions)
    # Most blocks have no condition left to be decided.
    from eqsheet.worksheet.held_branches import by_held_branches

    return by_held_branches(formulas, unknowns, known, guesses, start, budget)


def closed_form(formula: Formula, unknown: int, known: Known, guesses: Guesses) -> BlockResult | None:
    """The best closed form; None where there is none with a finite value that solves the equation.

    A quantity set to what has no value (``y = sqrt(x)`` at a negative x) fails here: no search would help.
    """
    found = next(closed_forms(formula, unknown, known, guesses), None)
    if found is None and _set_to_nothing(formula, unknown, known):
        return BlockResult(False, (math.nan,), (math.inf,), "closed form", formulas=(formula,))
    return found


def _set_to_nothing(formula: Formula, unknown: int, known: Known) -> bool:
    """Whether the unknown stands alone on one side and the other side, free of it, has no finite value."""
    tape = formula.tape
    leaf = ("quantity", formula.quantities.index(unknown))
    sides = [o for o in tape.outputs if tape.instructions[o] != leaf]
    if len(sides) != 1 or leaf[1] in quantities_under(tape, sides[0]):
        return False
    values = evaluate(tape, [known.values[q] for q in formula.quantities], literal_values(formula))
    return not math.isfinite(values[sides[0]])


def closed_forms(formula: Formula, unknown: int, known: Known, guesses: Guesses) -> Iterator[BlockResult]:
    """The values an isolated or linear equation gives, best first.

    Those inside the bounds go before those outside; among them the one nearest to the guess is best, without a
    guess the principal one.
    """
    found = _candidates(formula, unknown, known)
    low, high = guesses.bounds(unknown)
    near = guesses.near.get(unknown)
    if near is not None:
        found.sort(key=lambda c: abs(c[0] - near))
    if len(found) > 1:
        found.sort(key=lambda c: not _within(c[0], low, high))
    for value, error in found:
        result = _checked(formula, unknown, known, value, error, _within(value, low, high))
        if result is not None:
            yield result


def _candidates(formula: Formula, unknown: int, known: Known) -> list[tuple[float, float]]:
    """Finite values of the closed forms with their error bounds, the principal one first."""
    tape = formula.tape
    slot = formula.quantities.index(unknown)
    isolation = isolate(tape, slot)
    inputs = [known.values[q] for q in formula.quantities]
    literals = literal_values(formula)
    errors = [known.errors[q] for q in formula.quantities]
    found: list[tuple[float, float]] = []

    def consider(form: Tape, condition: Tape | None) -> None:
        (value,), _, (error,) = evidence_of_outputs(form, inputs, literals, errors)
        if not math.isfinite(value):
            return
        if condition is None or evaluate(condition, inputs, literals)[condition.outputs[0]] is True:
            found.append((value, error))

    if isolation is not None:
        for candidate in isolation.candidates:
            consider(candidate.tape, candidate.condition)
    else:
        affine = affine_in(tape, slot)
        if affine is not None:
            consider(affine.solution, None)
    return found


def _checked(
    formula: Formula, unknown: int, known: Known, value: float, error: float, inside: bool
) -> BlockResult | None:
    """The value as a result if the equation, evaluated afresh, bears it out."""
    tape = formula.tape
    inputs = [value if q == unknown else known.values[q] for q in formula.quantities]
    (left, right), sizes, bounds = evidence_of_outputs(
        tape, inputs, literal_values(formula), (0.0,) * len(inputs)
    )
    residual = abs(left - right)
    size = max(sizes)
    # What the equation makes of an uncertainty of the value by its own error is no sign of a wrong value.
    bound = sum(bounds)
    if not residual <= max(ACCEPTABLE * size, bound):
        return None
    if not math.isfinite(error) and _inputs_are_good(formula, (unknown,), known):
        return None
    return BlockResult(
        inside,
        (value,),
        (error,),
        "closed form",
        residual=residual / size if size > 0 else 0.0,
        formulas=(formula,),
        outside=() if inside else (0,),
    )


def _noise(formulas: Sequence[Formula], unknowns: Sequence[int], known: Known, bounds: Vector) -> bool:
    """Whether an error bound without end comes from an equation all of whose inputs are good."""
    if np.isfinite(bounds).all():
        return False
    return any(
        not math.isfinite(bound) and _inputs_are_good(formula, unknowns, known)
        for bound, formula in zip(bounds.tolist(), formulas)
    )


def _inputs_are_good(formula: Formula, unknowns: Sequence[int], known: Known) -> bool:
    """Whether what the equation takes from elsewhere is known to some digits.

    If so, a bound without end means that the equation makes noise of it, as a division by what is zero but for
    rounding does: no digit of the result could be relied on.
    """
    return all(math.isfinite(known.errors[q]) for q in formula.quantities if q not in unknowns)


def _within(value: float, low: float, high: float) -> bool:
    slack = PAST_BOUND * abs(value)
    return low - slack <= value <= high + slack


def solve_plain(
    formulas: Sequence[Formula],
    unknowns: Sequence[int],
    known: Known,
    start: Start,
    budget: Budget,
    ladder: Ladder = solve_block,
) -> tuple[Outcome, Problem | None]:
    """The solver's outcome for equations without undecided conditions.

    Parameters
    ----------
    ladder : callable
        What several equations are solved by, as `solve_block`.
    """
    if len(unknowns) == 1:
        if unknowns[0] not in formulas[0].quantities:
            return _without_unknown(formulas[0], known, start), None
        return solve_scalar(scalar_problem(formulas[0], unknowns[0], known.values, start), budget), None
    problem = problem_of(formulas, unknowns, known, start)
    if plan_of(formulas, unknowns).linear:
        return linear_step(problem, problem.start, Trail("linear", problem.start, budget)), problem
    if start.blind:
        problem = less_blind(formulas, unknowns, known.values, start, problem)

    def through_tears(block: Problem, at: Vector, trail: Trail) -> Outcome:
        return _through_tears(torn_block(formulas, unknowns, known.values, start), block, trail)

    def hopeless() -> bool:
        bounds = list(zip(start.lower, start.upper))
        return (
            len(unknowns) <= MOST_NARROWED
            and narrowed(unknowns, formulas, known.values, bounds, known.errors).empty >= 0
        )

    return ladder(problem, budget, (("torn", through_tears),), hopeless), problem


def _without_unknown(formula: Formula, known: Known, start: Start) -> Outcome:
    """The outcome where the branch taken has lost the unknown: any value will do, or none."""
    inputs = [known.values[q] for q in formula.quantities]
    errors = [known.errors[q] for q in formula.quantities]
    (left, right), sizes, bounds = evidence_of_outputs(formula.tape, inputs, literal_values(formula), errors)
    holds = abs(left - right) <= max(ACCEPTABLE * max(sizes), sum(bounds))
    status = Status.CONTINUUM if holds else Status.SINGULAR
    return Outcome(status, np.array(start.values), 0.0 if holds else math.inf, 0, "newton")


def problem_of(formulas: Sequence[Formula], unknowns: Sequence[int], known: Known, start: Start) -> Problem:
    """The block for the solver: as arrays where it is large, else as one generated function."""
    if len(unknowns) < LARGE_BLOCK:
        return block_problem(formulas, unknowns, known.values, known.errors, start)
    numbers = np.array(unknowns, dtype=np.int64)
    block = ArrayBlock(shapes_of(formulas), numbers, np.array(known.values), np.array(known.errors))
    return block.problem(start)


def _through_tears(torn: TornBlock | None, problem: Problem, trail: Trail) -> Outcome:
    """The block solved through its torn unknowns and then untorn from there; STALLED where that fails."""
    if torn is None:
        return trail.close(Status.STALLED)
    outcome = solve_block(torn.problem(), trail.budget)
    if outcome.status is Status.INTERRUPTED:
        raise KeyboardInterrupt
    values, _ = torn.expand(np.asarray(outcome.x).tolist())
    if not all(map(math.isfinite, values)):
        return trail.close(Status.STALLED)
    point = np.array(values)
    magnitude = np.where(point != 0.0, np.abs(point), problem.magnitude)
    polished = solve_block(replace(problem, start=point, magnitude=magnitude), trail.budget)
    if not polished.solved:
        return trail.close(Status.STALLED)
    return replace(
        polished, method=f"torn {outcome.method}", iterations=outcome.iterations + polished.iterations
    )


def _iterate(
    formulas: tuple[Formula, ...], unknowns: Sequence[int], known: Known, start: Start, budget: Budget
) -> BlockResult:
    outcome, problem = solve_plain(formulas, unknowns, known, start, budget)
    kinks = plan_of(formulas, unknowns).kinked
    if kinks and outcome.solved and len(unknowns) <= LARGEST_EXAMINED:
        from eqsheet.worksheet.kinks import beyond_the_kinks

        posed = problem or scalar_problem(formulas[0], unknowns[0], known.values, start)
        with_kinks = [formulas[k] for k in kinks]
        outcome = beyond_the_kinks(outcome, posed, with_kinks, unknowns, known.values, start)
    return judged(formulas, unknowns, known, start, outcome, problem)


def _evidence(
    formulas: Sequence[Formula], own: Mapping[int, float], known: Known
) -> tuple[Vector, Vector, Vector]:
    """Residuals, sizes and error bounds of the equations, evaluated afresh one by one."""
    residuals, sizes, bounds = [], [], []
    for formula in formulas:
        (left, right), both_sizes, both_errors = evidence_of_outputs(
            formula.tape,
            [own[q] if q in own else known.values[q] for q in formula.quantities],
            literal_values(formula),
            [0.0 if q in own else known.errors[q] for q in formula.quantities],
        )
        residuals.append(left - right)
        sizes.append(max(both_sizes))
        bounds.append(sum(both_errors))
    return np.array(residuals), np.array(sizes), np.array(bounds)


def _noise_left_out(x: Vector, verdict: Verdict, start: Start) -> Vector | None:
    """The point with zero for unknowns next to it that are no larger than their error; None where there are none."""
    noise = ~(verdict.forward_error < verdict.reach) & (x != 0.0)
    noise &= verdict.reach <= NEIGHBOURHOOD * np.array(start.magnitude)
    zero = np.where(noise, 0.0, x)
    inside = (np.array(start.lower) <= zero) & (zero <= np.array(start.upper))
    return zero if noise.any() and inside[noise].all() else None


def _confirmed(
    problem: Problem | None,
    formulas: Sequence[Formula],
    unknowns: Sequence[int],
    known: Known,
    start: Start,
    x: Vector,
) -> bool:
    """Whether residuals that only the rounding of the unknowns explains belong to a root, and not to a pole."""
    if problem is not None:
        return confirmed(own_magnitudes(problem, x), x, *problem.linearise(x))
    scalar = scalar_problem(formulas[0], unknowns[0], known.values, start)
    return confirmed_scalar(scalar, float(x[0]), *scalar.linearise(float(x[0])))


def judged(
    formulas: Sequence[Formula],
    unknowns: Sequence[int],
    known: Known,
    start: Start,
    outcome: Outcome,
    problem: Problem | None,
    gap: tuple[float, ...] = (),
) -> BlockResult:
    """The solver's outcome, believed only where the equations evaluated afresh bear it out."""
    x = np.asarray(outcome.x, dtype=float)
    values = as_sequence(x)
    factor = outcome.factor
    if factor is not None and not isinstance(problem, BlockProblem):
        # Too large to be kept with the solution.
        outcome = replace(outcome, factor=None)

    def failed() -> BlockResult:
        return BlockResult(
            False,
            values,
            (math.inf,) * len(values),
            outcome.method,
            outcome.iterations,
            outcome.residual,
            math.inf,
            formulas,
            outcome,
            start,
            gap,
            problem=problem,
        )

    def verdict_on(point: Vector, factor: Factor | None) -> Verdict:
        if isinstance(problem, ArrayProblem | BlockProblem):
            evidence = problem.evidence(point)
        else:
            evidence = _evidence(formulas, dict(zip(unknowns, point.tolist())), known)
        if not isinstance(problem, ArrayProblem) and _noise(formulas, unknowns, known, evidence[2]):
            return unfit(point.size)
        if isinstance(problem, BlockProblem) and factor is not None:
            return judge_by_factor(*evidence, factor, point)
        if problem is not None:
            return judge(*evidence, problem.linearise(point)[1], point, problem.magnitude, factor)
        scalar = scalar_problem(formulas[0], unknowns[0], known.values, start)
        slope = scalar.linearise(float(point[0]))[1]
        return judge(*evidence, np.array([[slope]]), point, np.array(start.magnitude))

    if not outcome.solved:
        return failed()
    verdict = verdict_on(x, factor)
    if not (verdict.forward_error < verdict.reach).all():
        zero = _noise_left_out(x, verdict, start)
        at_zero = verdict if zero is None else verdict_on(zero, None)
        if zero is not None and at_zero.solved:
            x, verdict, values = zero, at_zero, as_sequence(zero)
    if verdict.excused and not _confirmed(problem, formulas, unknowns, known, start, x):
        return failed()
    if isinstance(problem, BlockProblem) and verdict.solved and factor is not None:
        problem.repeats.solved(factor)
    if not verdict.solved:
        return failed()
    return BlockResult(
        True,
        values,
        as_sequence(verdict.forward_error),
        outcome.method,
        outcome.iterations,
        verdict.residual,
        verdict.condition,
        formulas,
        outcome,
        start,
        problem=problem,
    )
