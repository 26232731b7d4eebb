"""The afresh judgement of a solution: is it one, and how many digits of it are to be trusted."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from eqsheet.solve.factor import TINY, Factor, factorise
from eqsheet.solve.problem import Matrix, Vector
from eqsheet.solve.termination import ACCEPTABLE, ZERO_FLOOR

UNIT_ROUNDOFF = 2.0**-53
# A running error bound counts every rounding as if all pushed the same way; a residual within it is zero as
# far as doubles tell. The unknowns themselves are rounded too, which moves a residual by up to this many
# roundings of |J| |x|.
ROUNDED_UNKNOWNS = 4.0
# A residual that many times the bound of its own rounding is looked at once more.
EXCUSED = 2.0**20
# Digits a double carries.
MOST_DIGITS = 15


@dataclass(frozen=True, slots=True)
class Verdict:
    """What the equations, evaluated afresh at the solution, say of it.

    Attributes
    ----------
    solved : bool
        Every residual is zero as far as doubles can tell, or within `ACCEPTABLE` of the size of its equation.
    worst : int
        Equation with the largest scaled residual.
    residual : float
        That residual, relative to the size of the equation; inf if not finite.
    condition : float
        Condition number of the scaled Jacobian (maximum norm): relative error of the equations times this
        is the relative error of the unknowns at worst.
    forward_error : ndarray (n,)
        Estimate of the error of each unknown, in its own unit.
    reach : ndarray (n,)
        Size of each unknown.
    excused : bool
        Whether a residual is far more than the evaluation at this very point rounds, so that only the rounding of the
        unknowns explains it: as beside a pole.
    """

    solved: bool
    worst: int
    residual: float
    condition: float
    forward_error: Vector
    reach: Vector
    excused: bool = False

    @property
    def digits(self) -> tuple[int, ...]:
        """Significant digits of each unknown to trust, 0 to 15."""
        with np.errstate(divide="ignore"):
            digits = np.floor(-np.log10(np.maximum(self.forward_error / np.maximum(self.reach, TINY), 1e-16)))
        # An error that is no number leaves no digits.
        return tuple(np.clip(np.nan_to_num(digits, nan=0.0), 0, MOST_DIGITS).astype(int).tolist())


def judge(
    residual: Vector,
    sizes: Vector,
    error_bounds: Vector,
    jacobian: Matrix,
    x: Vector,
    magnitude: Vector,
    factor: Factor | None = None,
) -> Verdict:
    """The verdict on x.

    Parameters
    ----------
    residual : ndarray (n,)
        Residuals evaluated afresh at x, unscaled.
    sizes : ndarray (n,)
        Size of each equation at x, from a size propagated through its expression.
    error_bounds : ndarray (n,)
        Running error bound of each residual (Higham 2002, section 3.3), in its own unit.
    jacobian : ndarray (n, n)
    x, magnitude : ndarray (n,)
        The magnitude is the scale of the factorisation for unknowns that are zero.
    factor : Factor, optional
        Of a Jacobian at x or next to it, where there is one already.

    Notes
    -----
    The forward error is ``|J^-1| (|r| + bound)``, componentwise (Higham 2002, section 7.1).
    """
    if not np.isfinite(abs(jacobian).sum()):
        return unfit(residual.size, int(np.isfinite(residual).argmin()))
    size = np.abs(x)
    if factor is None:
        factor = factorise(jacobian, np.maximum(size, ZERO_FLOOR * magnitude))
    return _judged(residual, sizes, error_bounds, abs(jacobian) @ size, factor, size)


def judge_by_factor(
    residual: Vector, sizes: Vector, error_bounds: Vector, factor: Factor, x: Vector
) -> Verdict:
    """`judge` by what is factorised already: a Jacobian at x or next to it."""
    size = np.abs(x)
    slopes = factor.rows * (abs(factor.matrix) @ (size / factor.weights))
    return _judged(residual, sizes, error_bounds, slopes, factor, size)


def unfit(count: int, worst: int = 0) -> Verdict:
    """The verdict where something is not finite, or nothing but noise."""
    nothing = np.full(count, np.inf)
    return Verdict(False, worst, np.inf, np.inf, nothing, np.ones(count))


def _judged(
    residual: Vector,
    sizes: Vector,
    error_bounds: Vector,
    slopes: Vector,
    factor: Factor,
    reach: Vector,
) -> Verdict:
    """The verdict, with ``reach = |x|`` and ``slopes = |J| |x|`` (n,)."""
    if not np.isfinite(residual).all():
        return unfit(residual.size, int(np.isfinite(residual).argmin()))
    rounding = error_bounds + ROUNDED_UNKNOWNS * UNIT_ROUNDOFF * slopes
    allowed = np.maximum(ACCEPTABLE * sizes, rounding)
    gaps = np.abs(residual)
    shares = gaps / np.maximum(allowed, TINY)
    worst = int(shares.argmax())
    size = max(float(sizes[worst]), float(slopes[worst]), TINY)
    if factor.singular:
        error = np.full(reach.size, np.inf)
    else:
        error = factor.weights * _absolute_solve(factor.inverse, (gaps + rounding) / factor.rows)
    solved = bool((gaps <= allowed).all())
    excused = bool((gaps > EXCUSED * error_bounds).any())
    return Verdict(solved, worst, float(gaps[worst]) / size, factor.condition, error, reach, excused)


def _absolute_solve(inverse: Matrix, right: Vector) -> Vector:
    """``|A^-1| right``; for a sparse factorisation the lower estimate ``|A^-1 right|``."""
    if isinstance(inverse, np.ndarray):
        return np.asarray(np.abs(inverse) @ right)
    return np.asarray(np.abs(inverse @ right))
