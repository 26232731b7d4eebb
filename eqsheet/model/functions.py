"""The functions of the language on plain floats: values, slopes and how well they are rounded.

Besides the worksheet's functions (`tape.UNARY_FUNCTIONS`, `tape.BINARY_FUNCTIONS`) there are a few that only
the calculus writes, on derivative and inverse tapes: ``digamma``, ``logmean_slope``, ``asinh``, ``acosh``,
``atanh``. Values come from `math` where it has the function. All raise ValueError, ZeroDivisionError or
OverflowError outside their domain, as `math` does; nothing here ever gives a complex number.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction

from eqsheet.model.tape import BINARY_FUNCTIONS, UNARY_FUNCTIONS

INNER_UNARY_FUNCTIONS = ("digamma", "asinh", "acosh", "atanh")
INNER_BINARY_FUNCTIONS = ("logmean_slope",)
ALL_UNARY_FUNCTIONS = (*UNARY_FUNCTIONS, *INNER_UNARY_FUNCTIONS)
ALL_BINARY_FUNCTIONS = (*BINARY_FUNCTIONS, *INNER_BINARY_FUNCTIONS)

# Where a and b are closer than this (as |a-b|/|a+b|), ln(a/b) is taken as 2*atanh((a-b)/(a+b)), which does
# not cancel; beyond it the rounding of the quotient near 1 would lose digits in atanh.
_CLOSE = 0.5
# Up to this |s| the series of the slope of the logarithmic mean is summed; beyond it the closed form loses less than
# two bits.
SLOPE_SERIES_REACHES = 0.5
# 1/n! for n = 16 down to 2, the factors of the series: what is left out is below the rounding of the sum.
SLOPE_SERIES = tuple([1.0 / math.factorial(n) for n in range(16, 1, -1)])
# Bernoulli numbers B_2k/(2k), k = 1.. of the asymptotic series of digamma (Abramowitz and Stegun 6.3.18).
_DIGAMMA_SERIES = (1 / 12, -1 / 120, 1 / 252, -1 / 240, 1 / 132, -691 / 32760, 1 / 12)
# From here the seven terms are below rounding level.
_DIGAMMA_LARGE = 10.0


def sign(a: float) -> float:
    """-1, 0 or 1 by the sign of `a`; nan for nan."""
    if a > 0.0:
        return 1.0
    if a < 0.0:
        return -1.0
    return a if a != a else 0.0


def smaller(a: float, b: float) -> float:
    """The smaller of two numbers; nan if either is."""
    return b if b < a or b != b else a


def larger(a: float, b: float) -> float:
    """The larger of two numbers; nan if either is."""
    return b if b > a or b != b else a


def _log_ratio(a: float, b: float) -> float:
    """ln(a/b) of two numbers of one sign, without cancellation where they are close."""
    y = (a - b) / (a + b)
    return 2.0 * math.atanh(y) if -_CLOSE < y < _CLOSE else math.log(a / b)


def logmean(a: float, b: float) -> float:
    """Logarithmic mean (a - b)/ln(a/b) of two numbers of one sign; a where they are equal, 0 where one is 0.

    Raises
    ------
    ValueError
        The numbers have different signs.
    """
    if a == b:
        return a
    if a == 0.0 or b == 0.0:
        return 0.0
    return (a - b) / _log_ratio(a, b)


def logmean_slope(a: float, b: float) -> float:
    """Derivative of the logarithmic mean with respect to its first argument.

    With s = ln(b/a) it is (exp(s) - 1 - s)/s^2, which has the power series 1/2 + s/6 + s^2/24 + ... around
    s = 0; the one with respect to the second argument is ``logmean_slope(b, a)``.

    Raises
    ------
    ValueError, ZeroDivisionError, OverflowError
        The numbers have different signs; both, or the first one, are 0 or too small beside the other.
    """
    if b == 0.0 and a != 0.0:
        return 0.0
    s = _log_ratio(b, a)
    if not -SLOPE_SERIES_REACHES <= s <= SLOPE_SERIES_REACHES:
        return (math.expm1(s) - s) / (s * s)
    total = 0.0
    for factor in SLOPE_SERIES:
        total = total * s + factor
    return total


def digamma(a: float) -> float:
    """Derivative of ln(gamma(a)).

    Recurrence, asymptotic series and reflection: Abramowitz and Stegun, Handbook of Mathematical Functions,
    6.3.5, 6.3.18 and 6.3.7.

    Raises
    ------
    ValueError
        `a` is zero or a negative whole number.
    """
    if a <= 0.0:
        if a == math.floor(a):
            raise ValueError("digamma has a pole here")
        # tan has period pi: reducing first keeps its argument exact.
        return digamma(1.0 - a) - math.pi / math.tan(math.pi * (a - math.floor(a)))
    shift = 0.0
    while a < _DIGAMMA_LARGE:
        shift += 1.0 / a
        a += 1.0
    square = 1.0 / (a * a)
    series = 0.0
    for coefficient in reversed(_DIGAMMA_SERIES):
        series = (series + coefficient) * square
    return math.log(a) - 0.5 / a - series - shift


def trigamma(a: float) -> float:
    """Derivative of digamma; Abramowitz and Stegun 6.4.6, 6.4.12 and 6.4.7. Raises ValueError at its poles."""
    if a <= 0.0:
        if a == math.floor(a):
            raise ValueError("trigamma has a pole here")
        return (math.pi / math.sin(math.pi * (a - math.floor(a)))) ** 2 - trigamma(1.0 - a)
    shift = 0.0
    while a < _DIGAMMA_LARGE:
        shift += 1.0 / (a * a)
        a += 1.0
    square = 1.0 / (a * a)
    series = 0.0
    for n, coefficient in reversed(list(enumerate(_DIGAMMA_SERIES, start=1))):
        series = (series + 2 * n * coefficient) * square
    return 1.0 / a + 0.5 * square + series / a + shift


@dataclass(frozen=True, slots=True)
class UnaryFunction:
    """A function of one argument.

    Attributes
    ----------
    value : callable
        Its value at a float.
    slope : callable
        Its derivative, from the argument and the value.
    units : float
        Bound of its rounding error in units of 2^-53 of the result; two for a good `math` function, more
        where the platform promises less.
    """

    value: Callable[[float], float]
    slope: Callable[[float, float], float]
    units: float = 4.0


UNARY: dict[str, UnaryFunction] = {
    "sqrt": UnaryFunction(math.sqrt, lambda a, v: 0.5 / v, 1.0),
    "exp": UnaryFunction(math.exp, lambda a, v: v),
    "ln": UnaryFunction(math.log, lambda a, v: 1.0 / a),
    "log10": UnaryFunction(math.log10, lambda a, v: 1.0 / (a * math.log(10.0))),
    "sin": UnaryFunction(math.sin, lambda a, v: math.cos(a)),
    "cos": UnaryFunction(math.cos, lambda a, v: -math.sin(a)),
    "tan": UnaryFunction(math.tan, lambda a, v: 1.0 + v * v),
    "asin": UnaryFunction(math.asin, lambda a, v: 1.0 / math.sqrt((1.0 - a) * (1.0 + a))),
    "acos": UnaryFunction(math.acos, lambda a, v: -1.0 / math.sqrt((1.0 - a) * (1.0 + a))),
    "atan": UnaryFunction(math.atan, lambda a, v: 1.0 / (1.0 + a * a)),
    "sinh": UnaryFunction(math.sinh, lambda a, v: math.cosh(a)),
    "cosh": UnaryFunction(math.cosh, lambda a, v: math.sinh(a)),
    "tanh": UnaryFunction(math.tanh, lambda a, v: (1.0 - v) * (1.0 + v)),
    "abs": UnaryFunction(abs, lambda a, v: sign(a), 0.0),
    "sign": UnaryFunction(sign, lambda a, v: 0.0, 0.0),
    "erf": UnaryFunction(math.erf, lambda a, v: 2.0 / math.sqrt(math.pi) * math.exp(-a * a)),
    # CPython documents its gamma as good to about ten units in the last place.
    "gamma": UnaryFunction(math.gamma, lambda a, v: v * digamma(a), 24.0),
    "digamma": UnaryFunction(digamma, lambda a, v: trigamma(a), 64.0),
    "asinh": UnaryFunction(math.asinh, lambda a, v: 1.0 / math.sqrt(1.0 + a * a)),
    "acosh": UnaryFunction(math.acosh, lambda a, v: 1.0 / math.sqrt((a - 1.0) * (a + 1.0))),
    "atanh": UnaryFunction(math.atanh, lambda a, v: 1.0 / ((1.0 - a) * (1.0 + a))),
}

BINARY: dict[str, Callable[[float, float], float]] = {
    "atan2": math.atan2,
    "min": smaller,
    "max": larger,
    "hypot": math.hypot,
    "logmean": logmean,
    "logmean_slope": logmean_slope,
}


def as_float(constant: Fraction | float) -> float:
    """Nearest float of an exact constant, infinite where it is too large."""
    try:
        # The quotient is what `float` gives too, in a fraction of the time.
        return (
            constant.numerator / constant.denominator if isinstance(constant, Fraction) else float(constant)
        )
    except OverflowError:
        return math.inf if constant > 0 else -math.inf
