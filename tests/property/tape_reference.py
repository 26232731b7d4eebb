"""Tapes evaluated by mpmath and written as sympy expressions: independent of our own arithmetic."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from fractions import Fraction
from typing import Any

import mpmath
import sympy

from eqsheet.model.tape import Tape


class NoValue(Exception):
    """An instruction needed has no real value."""


def _real(value: Any) -> Any:
    if isinstance(value, mpmath.mpc) or not mpmath.isfinite(value):
        raise NoValue
    return value


def _exact(value: Fraction | float) -> Any:
    fraction = Fraction(value)
    return mpmath.mpf(fraction.numerator) / fraction.denominator


def _logmean(a: Any, b: Any) -> Any:
    if a == b:
        return a
    if a == 0 or b == 0:
        return mpmath.mpf(0)
    if a * b < 0:
        raise NoValue
    with mpmath.extradps(100):  # numbers nearly equal cancel
        return (a - b) / mpmath.log(a / b)


def _divide(a: Any, b: Any) -> Any:
    if b == 0:
        raise NoValue
    return a / b


def _power(a: Any, r: Any) -> Any:
    if a == 0 and r < 0:
        raise NoValue
    if a < 0 and r != int(r):
        raise NoValue
    return mpmath.power(a, r)


def _gamma(a: Any) -> Any:
    if a <= 0 and a == mpmath.floor(a):
        raise NoValue
    return mpmath.gamma(a)


def _ln(a: Any) -> Any:
    if a <= 0:
        raise NoValue
    return mpmath.log(a)


_STEPS: dict[str, Callable[..., Any]] = {
    "neg": lambda a: -a,
    "add": lambda a, b: a + b,
    "sub": lambda a, b: a - b,
    "mul": lambda a, b: a * b,
    "div": _divide,
    "pow": _power,
    "sqrt": mpmath.sqrt,
    "exp": mpmath.exp,
    "ln": _ln,
    "log10": lambda a: _ln(a) / mpmath.log(10),
    "sin": mpmath.sin,
    "cos": mpmath.cos,
    "tan": mpmath.tan,
    "asin": mpmath.asin,
    "acos": mpmath.acos,
    "atan": mpmath.atan,
    "sinh": mpmath.sinh,
    "cosh": mpmath.cosh,
    "tanh": mpmath.tanh,
    "abs": abs,
    "sign": mpmath.sign,
    "erf": mpmath.erf,
    "gamma": _gamma,
    "atan2": mpmath.atan2,
    "min": min,
    "max": max,
    "hypot": mpmath.hypot,
    "logmean": _logmean,
    "lt": lambda a, b: a < b,
    "le": lambda a, b: a <= b,
    "eq": lambda a, b: a == b,
}


def reference(tape: Tape, output: int, quantities: Sequence[Any], literals: Sequence[Any]) -> Any:
    """Value of one output at the working precision of mpmath; branches not taken are not evaluated.

    Raises
    ------
    NoValue
    """
    known: dict[int, Any] = {}

    def value(i: int) -> Any:
        if i not in known:
            known[i] = compute(*tape.instructions[i])
        return known[i]

    def compute(operation: Any, *rest: Any) -> Any:
        if operation == "quantity":
            return mpmath.mpf(quantities[rest[0]])
        if operation == "literal":
            return mpmath.mpf(literals[rest[0]])
        if operation == "const":
            return _exact(rest[0])
        if operation == "if":
            return value(rest[1] if value(rest[0]) else rest[2])
        if operation == "and":
            return value(rest[0]) and value(rest[1])
        if operation == "or":
            return value(rest[0]) or value(rest[1])
        if operation == "not":
            return not value(rest[0])
        if operation == "power":
            return _real(_power(value(rest[0]), _exact(rest[1])))
        if operation == "strip":
            return _real((value(rest[0]) - _exact(rest[1].origin)) / _exact(rest[1].factor))
        if operation == "attach":
            return _real(value(rest[0]) * _exact(rest[1].factor) + _exact(rest[1].origin))
        result = _STEPS[operation](*[value(i) for i in rest])
        return result if operation in ("lt", "le", "eq") else _real(result)

    return value(tape.outputs[output])


_SYMBOLIC: dict[str, Callable[..., Any]] = {
    "neg": lambda a: -a,
    "add": lambda a, b: a + b,
    "sub": lambda a, b: a - b,
    "mul": lambda a, b: a * b,
    "div": lambda a, b: a / b,
    "pow": lambda a, b: a**b,
    "ln": sympy.log,
    "log10": lambda a: sympy.log(a) / sympy.log(10),
    "abs": sympy.Abs,
    "min": lambda a, b: sympy.Piecewise((a, a <= b), (b, True)),
    "max": lambda a, b: sympy.Piecewise((a, a >= b), (b, True)),
    "hypot": lambda a, b: sympy.sqrt(a * a + b * b),
    "logmean": lambda a, b: (a - b) / sympy.log(a / b),
    **{name: getattr(sympy, name) for name in ["sqrt", "exp", "sin", "cos", "tan", "asin", "acos", "atan"]},
    **{name: getattr(sympy, name) for name in ["sinh", "cosh", "tanh", "sign", "erf", "gamma", "atan2"]},
}


def symbolic(tape: Tape, output: int, symbols: Sequence[sympy.Symbol]) -> sympy.Expr:
    """One output as a sympy expression of a tape without literals and conditions."""
    expressions: list[Any] = []
    for operation, *rest in tape.instructions:
        if operation == "quantity":
            expressions.append(symbols[rest[0]])
        elif operation == "const":
            fraction = Fraction(rest[0])
            expressions.append(sympy.Rational(fraction.numerator, fraction.denominator))
        elif operation == "power":
            expressions.append(expressions[rest[0]] ** sympy.Rational(rest[1].numerator, rest[1].denominator))
        else:
            expressions.append(_SYMBOLIC[str(operation)](*[expressions[i] for i in rest]))
    return expressions[tape.outputs[output]]
