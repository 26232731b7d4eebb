"""Problems from formulas written once for any kind of number: floats, complex steps, sized numbers, 50
digits."""

from __future__ import annotations

import math

import numpy as np
from sized_numbers import SizedMath, sized

from eqsheet.solve.problem import Problem

# Complex-step derivatives are exact to rounding for any step this small (Squire and Trapp, SIAM Review 40,
# 1998).
COMPLEX_STEP = 1e-100


class ComplexMath:
    """The functions the published problems use, on arrays of complex numbers."""

    pi = math.pi
    exp = staticmethod(np.exp)
    log = staticmethod(np.log)
    sqrt = staticmethod(np.sqrt)
    sin = staticmethod(np.sin)
    cos = staticmethod(np.cos)
    atan = staticmethod(np.arctan)


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
        # Row j of the stepped unknowns holds unknown j in all n columns, stepped in column j.
        stepped = list(np.asarray(x)[:, None] + 1j * COMPLEX_STEP * np.eye(n))
        with np.errstate(all="ignore"):
            rows = [np.broadcast_to(np.imag(f), (n,)) / COMPLEX_STEP for f in formulas(stepped, ComplexMath)]
        return values, np.array(rows)

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
