"""Exact constant arithmetic in exponents, so that ``x^(2/3)`` has an exact dimension."""

from __future__ import annotations

from fractions import Fraction

from eqsheet.syntax import nodes as syntax
from eqsheet.syntax.spine import left_spine

# Exponents beyond this size or denominator are not physics; they are computed in floats, which keeps exact
# arithmetic on the worksheet's numbers bounded.
LARGEST_EXACT_EXPONENT = 1000


def exact_value(node: syntax.Expression) -> Fraction | None:
    """Exact value of an expression of plain numbers, None if it is anything else or beyond physics.

    Constant arithmetic in exponents is exact, so that ``x^(2/3)`` has an exact dimension.
    """
    return _within_physics(_exact(node))


def _within_physics(value: Fraction | None) -> Fraction | None:
    if value is None or abs(value) > LARGEST_EXACT_EXPONENT or value.denominator > LARGEST_EXACT_EXPONENT:
        return None
    return value


def _exact(node: syntax.Expression) -> Fraction | None:
    if isinstance(node, syntax.Number):
        if node.unit is not None or abs(_decimal_exponent(node.text)) > 9 or len(node.text) > 30:
            return None
        return Fraction(node.text)
    if isinstance(node, syntax.Unary) and node.operator in "+-":
        operand = exact_value(node.operand)
        return operand if operand is None or node.operator == "+" else -operand
    if isinstance(node, syntax.Binary) and node.operator != "^":
        first, operations = left_spine(node)
        value = exact_value(first)
        for operation in operations:
            other = exact_value(operation.right)
            if value is None or other is None:
                return None
            value = _within_physics(_applied(operation.operator, value, other))
        return value
    return None


def _applied(operator: str, a: Fraction, b: Fraction) -> Fraction | None:
    if operator == "/":
        return None if b == 0 else a / b
    return {"+": a + b, "-": a - b, "*": a * b}[operator]


def _decimal_exponent(text: str) -> int:
    _, _, exponent = text.lower().partition("e")
    return int(exponent[:8]) if exponent else 0
