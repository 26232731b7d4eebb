"""Newton in plain floats: the way and the root of Newton with arrays."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from solve_problems import problem

from eqsheet.solve.ladder import solve_block
from eqsheet.solve.newton import newton
from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import Floats, Problem, WrittenStep
from eqsheet.solve.trail import Budget, Trail
from eqsheet.solve.written_newton import written_newton


def written(problem: Problem) -> WrittenStep:
    """The step of a problem as code would give it."""

    def step(x: Floats, arguments: Floats) -> tuple[Floats, Floats, Floats]:
        residual, jacobian = problem.linearise(np.array(x))
        if not np.isfinite(residual).all():
            raise ValueError("outside the domain")
        return residual.tolist(), np.linalg.solve(jacobian, -residual).tolist(), jacobian.ravel().tolist()

    def correction(residuals: Floats, nothing: tuple[()], numbers: Floats) -> Floats:
        jacobian = np.array(numbers).reshape(problem.n, problem.n)
        found: list[float] = np.linalg.solve(jacobian, -np.array(residuals)).tolist()
        return found

    return WrittenStep(step, correction)


def both(p: Problem) -> tuple[Outcome, Outcome | None]:
    """The outcomes with arrays and in plain floats."""
    arrays = newton(p, p.start, Trail("newton", p.start, Budget()))
    return arrays, written_newton(p, written(p), p.start, Trail("newton", p.start, Budget()))


def exponential(start: list[float], lower: list[float] | None = None, upper: list[float] | None = None):
    """ln(x) + y = 3, x = y^2 + 1e-3: needs damping from far off."""
    return problem(
        lambda x: [np.log(x[0]) + x[1] - 3, x[0] - x[1] ** 2 - 1e-3],
        lambda x: [[1 / x[0], 1], [1, -2 * x[1]]],
        start,
        lower,
        upper,
    )


@pytest.mark.parametrize(
    ("start", "lower", "upper"),
    [
        ([2.0, 2.0], None, None),
        ([9.0, 0.3], None, None),
        ([20.0, 1.0], None, None),
        ([30.0, 8.0], None, None),  # the full step leaves the domain of the logarithm
        ([0.05, 0.3], None, None),
        ([9.0, 0.3], [0.0, 0.0], [10.0, 4.0]),
        ([3.9, 3.9], [0.0, 0.0], [4.0, 4.0]),
        ([8.0, 30.0], [0.0, 0.0], [20.0, 4.0]),
    ],
)
def test_way_and_root_are_those_of_arrays(start, lower, upper) -> None:
    arrays, floats = both(exponential(start, lower, upper))
    assert arrays.status is Status.CONVERGED
    assert floats is not None
    assert floats.status is Status.CONVERGED
    assert floats.x.tolist() == arrays.x.tolist()  # to the last bit
    assert floats.on_bound == arrays.on_bound
    assert floats.iterations == arrays.iterations
    assert [s.limiting for s in floats.history] == [s.limiting for s in arrays.history]
    assert [s.damping for s in floats.history] == pytest.approx([s.damping for s in arrays.history])
    # Near the end residuals are rounding.
    for mine, theirs in zip(floats.history[:-2], arrays.history[:-2]):
        assert mine.residual == pytest.approx(theirs.residual, rel=1e-6)


def test_start_at_the_root_takes_no_step() -> None:
    p = problem(lambda x: [x[0] * x[1] - 6, x[0] + x[1] - 5], lambda x: [[x[1], x[0]], [1, 1]], [2.0, 3.0])
    _, floats = both(p)
    assert floats is not None
    assert floats.iterations == 0
    assert floats.x.tolist() == [2.0, 3.0]


@pytest.mark.parametrize(
    "p",
    [
        # No root: the step helps nowhere.
        problem(lambda x: [x[0] ** 2 + 1, x[1] - 1], lambda x: [[2 * x[0], 0], [0, 1]], [3.0, 0.5]),
        # Singular at the start.
        problem(lambda x: [x[0] ** 2 - 1, x[1] - 1], lambda x: [[2 * x[0], 0], [0, 1]], [0.0, 0.5]),
        # Outside the domain at the start.
        problem(
            lambda x: [np.sqrt(x[0]) - 1, x[1] - 1], lambda x: [[0.5 / np.sqrt(x[0]), 0], [0, 1]], [-1.0, 0.5]
        ),
    ],
)
def test_what_is_not_plain_is_left_alone(p: Problem) -> None:
    assert both(p)[1] is None


def test_double_root_is_not_called_a_plain_one() -> None:
    p = problem(lambda x: [(x[0] - 1) ** 2, x[1] - x[0]], lambda x: [[2 * x[0] - 2, 0], [-1, 1]], [3.0, 0.5])
    arrays, floats = both(p)
    assert arrays.status is Status.DOUBLE
    assert floats is None or floats.status is Status.DOUBLE


def test_ladder_takes_the_written_step_first_and_arrays_where_it_fails() -> None:
    p = exponential([9.0, 0.3])
    calls = []

    def counted(x: Floats, arguments: Floats) -> tuple[Floats, Floats, Floats]:
        calls.append(x)
        return written(p).step(x, arguments)

    def broken(x: Floats, arguments: Floats) -> tuple[Floats, Floats, Floats]:
        raise ZeroDivisionError

    correction = written(p).correction
    plain = solve_block(p)
    assert solve_block(replace(p, written=WrittenStep(counted, correction))).x.tolist() == plain.x.tolist()
    assert len(calls) > 3
    assert solve_block(replace(p, written=WrittenStep(broken, correction))).x.tolist() == plain.x.tolist()
