"""Code of whole blocks: the Newton step written out, and the statements joined as they are written."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest

from eqsheet.model.block_code import BlockCode, block_code
from eqsheet.model.evaluate import evaluate
from eqsheet.model.tape import Literal, TapeBuilder
from eqsheet.units.dimension import DIMENSIONLESS

N = 6


def ring() -> BlockCode:
    """x_i^2 + 3 x_i = x_(i+1)*p + 1 round a ring of six, with p known."""
    equations = []
    for i in range(N):
        b = TapeBuilder()
        x, after, p = b.quantity(0, (0, 0)), b.quantity(1, (0, 0)), b.quantity(2, (0, 0))
        one = b.literal(Literal(1.0, DIMENSIONLESS, "plain", 0, 1))
        left = b.apply("add", b.apply("power", x, Fraction(2)), b.apply("mul", b.constant(Fraction(3)), x))
        tape = b.tape((left, b.apply("add", b.apply("mul", after, p), one)))
        equations.append((tape, (i, (i + 1) % N, N)))
    code, _ = block_code(equations, range(N))
    return code


X = [0.3, 1.1, -0.4, 2.0, 0.7, 1.6]
P = [0.5] + [1.0] * N


def dense(code: BlockCode) -> tuple[np.ndarray, np.ndarray]:
    residuals, slopes = code.linearise(X, P)
    jacobian = np.zeros((N, N))
    for (row, column), slope in zip(code.pattern, slopes):
        jacobian[row, column] = slope
    return np.array(residuals), jacobian


@pytest.mark.parametrize("shift", range(3))
def test_written_step_is_the_newton_step_whatever_the_pivots(shift: int) -> None:
    code = ring()
    pivots = [(i, i) for i in np.roll(range(N), shift).tolist()]
    step, _ = code.newton_step(pivots)
    residuals, found, _ = step(X, P)
    wanted, jacobian = dense(code)
    assert residuals == tuple(wanted)
    np.testing.assert_allclose(found, np.linalg.solve(jacobian, -wanted), rtol=1e-13)


def test_pivots_off_the_diagonal_fill_in_and_still_give_the_step() -> None:
    code = ring()
    step, _ = code.newton_step([(i, (i + 1) % N) for i in range(N)])
    _, found, _ = step(X, P)
    wanted, jacobian = dense(code)
    np.testing.assert_allclose(found, np.linalg.solve(jacobian, -wanted), rtol=1e-12)


def test_correction_answers_other_residuals_with_the_same_jacobian() -> None:
    code = ring()
    step, correction = code.newton_step([(i, i) for i in range(N)])
    _, _, numbers = step(X, P)
    other = [1.0, -2.0, 0.5, 0.0, 3.0, 1.5]
    _, jacobian = dense(code)
    np.testing.assert_allclose(
        correction(other, (), numbers), np.linalg.solve(jacobian, -np.array(other)), rtol=1e-13
    )


def test_zero_pivot_raises() -> None:
    code = ring()
    step, _ = code.newton_step([(i, i) for i in range(N)])
    with pytest.raises(ZeroDivisionError):
        step([-1.5, *X[1:]], P)  # 2 x + 3 = 0


def test_statements_are_joined_as_written() -> None:
    tape = ring().statements
    values = evaluate(tape, [*X, P[0]], P[1:])
    sides = [values[o] for o in tape.outputs]
    for i in range(N):
        assert sides[2 * i] == X[i] ** 2 + 3 * X[i]
        assert sides[2 * i + 1] == X[(i + 1) % N] * P[0] + 1.0
