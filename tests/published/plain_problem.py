"""Problems from formulas written once for any kind of number: floats, complex steps, sized numbers, 50
digits."""

from __future__ import annotations

import cmath
import math

import numpy as np
from sized_numbers import SizedMath, sized

from eqsheet.solve.problem import Problem

# Complex-step derivatives are exact to rounding for any step this small (Squire and Trapp, SIAM Review 40,
# 1998).
COMPLEX_STEP = 1e-100


class ComplexMath:
    """The functions the published problems use, on complex numbers."""

    pi = math.pi
    exp = staticmethod(cmath.exp)
    log = staticmethod(cmath.log)
    sqrt = staticmethod(cmath.sqrt)
    sin = staticmethod(cmath.sin)
    cos = staticmethod(cmath.cos)
    atan = staticmethod(cmath.atan)


ARITHMETIC = (OverflowError, ZeroDivisionError, ValueError)


def plain_problem(formulas, start, lower=None, upper=None, magnitude=None, seen=None) -> Problem:
    """A `Problem` from ``formulas(x, m)``, which gives the list of residuals of the list x with functions
    from m.

    Parameters
    ----------
    seen : list or None
        Every point evaluated is appended to it.
    """
    start = np.asarray(start, dtype=float)
    n = start.size
    nans = np.full(n, np.nan)

    def note(x):
        if seen is not None:
            seen.append(np.array(x))

    def residual(x):
        note(x)
        try:
            return np.array(formulas([float(v) for v in x], math), dtype=float)
        except (*ARITHMETIC, TypeError):
            return nans

    def linearise(x):
        values = residual(x)
        jacobian = np.full((n, n), np.nan)
        try:
            for j in range(n):
                moved = [complex(v) for v in x]
                moved[j] += 1j * COMPLEX_STEP
                jacobian[:, j] = [complex(f).imag / COMPLEX_STEP for f in formulas(moved, ComplexMath)]
        except ARITHMETIC:
            pass
        return values, jacobian

    def sizes(x):
        note(x)
        try:
            return np.array([sized(f).size for f in formulas([sized(v) for v in x], SizedMath)])
        except ARITHMETIC:
            return np.zeros(n)

    return Problem(
        n,
        residual,
        linearise,
        sizes,
        start,
        np.full(n, -np.inf) if lower is None else np.asarray(lower, dtype=float),
        np.full(n, np.inf) if upper is None else np.asarray(upper, dtype=float),
        np.maximum(np.abs(start), 1e-3) if magnitude is None else np.asarray(magnitude, dtype=float),
    )
