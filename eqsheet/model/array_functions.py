"""The functions of the language on arrays, by the names that generated array code uses.

They follow `functions` value for value, with nan and infinities where those raise. `scipy.special` is loaded
only where a worksheet uses ``erf`` or ``gamma``.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from eqsheet.model.functions import _CLOSE, SLOPE_SERIES, SLOPE_SERIES_REACHES


def _erf(a: Any) -> Any:
    from scipy.special import erf

    return erf(a)


def _gamma(a: Any) -> Any:
    from scipy.special import gamma

    a = np.asarray(a, dtype=float)
    # At its poles the function has no value, as in `math`; the library gives signed infinities at 0 only.
    return np.where((a <= 0) & (a == np.floor(a)), np.nan, gamma(a))


def _digamma(a: Any) -> Any:
    from scipy.special import digamma

    a = np.asarray(a, dtype=float)
    return np.where((a <= 0) & (a == np.floor(a)), np.nan, digamma(a))


def _log_ratio(a: Any, b: Any) -> Any:
    y = np.divide(a - b, a + b)
    return np.where(np.abs(y) < _CLOSE, 2.0 * np.arctanh(y), np.log(np.divide(a, b)))


def _logmean(a: Any, b: Any) -> Any:
    a, b = np.asarray(a, dtype=float), np.asarray(b, dtype=float)
    mean = np.divide(a - b, _log_ratio(a, b))
    return np.where(a == b, a, np.where((a == 0.0) | (b == 0.0), 0.0, mean))


def _logmean_slope(a: Any, b: Any) -> Any:
    a, b = np.asarray(a, dtype=float), np.asarray(b, dtype=float)
    s = _log_ratio(b, a)
    near = np.clip(s, -SLOPE_SERIES_REACHES, SLOPE_SERIES_REACHES)
    total: Any = 0.0
    for factor in SLOPE_SERIES:
        total = total * near + factor
    far = np.divide(np.expm1(s) - s, s * s)
    slope = np.where(np.abs(s) > SLOPE_SERIES_REACHES, far, total)
    return np.where((b == 0.0) & (a != 0.0), 0.0, slope)


# Truth values are 0.0, 1.0 or, where something was compared with nan, nan: an `if` must not hide it.


def _truth_of(holds: Any, a: Any, b: Any) -> Any:
    return np.where(np.isnan(a) | np.isnan(b), np.nan, holds)


def _less(a: Any, b: Any) -> Any:
    return _truth_of(np.less(a, b), a, b)


def _less_equal(a: Any, b: Any) -> Any:
    return _truth_of(np.less_equal(a, b), a, b)


def _equal(a: Any, b: Any) -> Any:
    return _truth_of(np.equal(a, b), a, b)


def _both(a: Any, b: Any) -> Any:
    return np.where(np.equal(a, 1.0), b, a)


def _either(a: Any, b: Any) -> Any:
    return np.where(np.equal(a, 0.0), b, a)


def _negate(a: Any) -> Any:
    return 1.0 - a


def _choose(condition: Any, a: Any, b: Any) -> Any:
    return np.where(np.isnan(condition), np.nan, np.where(np.equal(condition, 1.0), a, b))


ARRAY_FUNCTIONS: dict[str, Callable[..., Any]] = {
    "sqrt": np.sqrt,
    "exp": np.exp,
    "ln": np.log,
    "log10": np.log10,
    "sin": np.sin,
    "cos": np.cos,
    "tan": np.tan,
    "asin": np.arcsin,
    "acos": np.arccos,
    "atan": np.arctan,
    "sinh": np.sinh,
    "cosh": np.cosh,
    "tanh": np.tanh,
    "abs": np.abs,
    "sign": np.sign,
    "erf": _erf,
    "gamma": _gamma,
    "digamma": _digamma,
    "asinh": np.arcsinh,
    "acosh": np.arccosh,
    "atanh": np.arctanh,
    "atan2": np.arctan2,
    "min": np.minimum,
    "max": np.maximum,
    "hypot": np.hypot,
    "logmean": _logmean,
    "logmean_slope": _logmean_slope,
    # `float_power` never takes the detour over whole numbers that `power` takes for integer arrays.
    "pow": np.float_power,
    "divide": np.divide,
    "less": _less,
    "less_equal": _less_equal,
    "equal": _equal,
    "both": _both,
    "either": _either,
    "negate": _negate,
    "choose": _choose,
    "errstate": np.errstate,
}

# All operations of a tape that take only instructions, for the interpreter.
ARRAY_OPERATIONS: dict[str, Callable[..., Any]] = {
    **ARRAY_FUNCTIONS,
    "neg": np.negative,
    "add": np.add,
    "sub": np.subtract,
    "mul": np.multiply,
    "div": np.divide,
    "lt": _less,
    "le": _less_equal,
    "eq": _equal,
    "and": _both,
    "or": _either,
    "not": _negate,
    "if": _choose,
}
