"""Small problems for the solver tests, each a few lines of numpy."""

from __future__ import annotations

import math

import numpy as np

from eqsheet.solve.problem import Problem, ScalarProblem


def problem(residual, jacobian, start, lower=None, upper=None, magnitude=None, sizes=None, seen=None):
    """A `Problem`; every point that residual or Jacobian is asked for is appended to `seen`."""
    start = np.asarray(start, dtype=float)
    n = start.size

    def evaluate(x):
        if seen is not None:
            seen.append(x.copy())
        with np.errstate(all="ignore"):
            return np.asarray(residual(x), dtype=float)

    def linearise(x):
        values = evaluate(x)
        with np.errstate(all="ignore"):
            return values, np.asarray(jacobian(x), dtype=float)

    return Problem(
        n,
        evaluate,
        linearise,
        (lambda x: np.zeros(n)) if sizes is None else sizes,
        start,
        np.full(n, -np.inf) if lower is None else np.asarray(lower, dtype=float),
        np.full(n, np.inf) if upper is None else np.asarray(upper, dtype=float),
        np.maximum(np.abs(start), 1e-3) if magnitude is None else np.asarray(magnitude, dtype=float),
    )


def scalar(residual, slope, start, lower=-math.inf, upper=math.inf, magnitude=1.0, size=None, seen=None):
    """A `ScalarProblem` from functions that may raise outside their domain."""

    def guarded(function, x):
        try:
            return float(function(x))
        except (ValueError, ZeroDivisionError, OverflowError):
            return math.nan

    def evaluate(x):
        if seen is not None:
            seen.append(x)
        return guarded(residual, x)

    return ScalarProblem(
        evaluate,
        lambda x: (evaluate(x), guarded(slope, x)),
        (lambda x: 0.0) if size is None else size,
        start,
        lower,
        upper,
        magnitude,
    )
