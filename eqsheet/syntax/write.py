"""Expressions and units back to text, with no more brackets than their meaning needs."""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import Any

from eqsheet.syntax.nodes import (
    Aggregate,
    Binary,
    Call,
    Comparison,
    Conditional,
    Expression,
    IndexClause,
    Logical,
    NamePattern,
    Number,
    Range,
    Reference,
    Text,
    Unary,
)
from eqsheet.syntax.spine import left_spine

# How tightly an expression holds together, loosest first; one that is looser than its place gets a bracket.
_CONDITIONAL, _OR, _AND, _NOT, _COMPARISON, _SUM, _PRODUCT, _SIGN, _POWER, _ATOM = range(10)
_BINDING = {"+": _SUM, "-": _SUM, "*": _PRODUCT, "/": _PRODUCT, "^": _POWER}

# After a literal with a unit, `*` or `/` directly before a symbol would be read as part of the unit.
_UNIT_GOES_ON = re.compile(r"[^\W\d_]|%|\([^\W\d_%]")


def write_expression(node: Expression | NamePattern) -> str:
    """The text of an expression, which parses to the same tree.

    >>> from eqsheet.syntax.parse import parsed_text
    >>> write_expression(parsed_text("x = ( (a)+b )*(10 bar / L)").node.right)
    '(a + b)*(10 bar / L)'
    """
    return node.pattern if isinstance(node, NamePattern) else _written(node, _CONDITIONAL)


def _written(node: Any, place: int) -> str:
    text, binding = _WRITERS[type(node)](node)
    return f"({text})" if binding < place else text


def _number(node: Number) -> tuple[str, int]:
    text = node.text if node.unit is None else f"{node.text} {node.unit.text}"
    return (f"-{text}", _SIGN) if node.negated else (text, _ATOM)


def _reference(node: Reference) -> tuple[str, int]:
    text = node.name if node.owner is None else f"{_reference(node.owner)[0]}.{node.name}"
    if node.subscripts is not None:
        text += "[" + ", ".join(_written(s, _SUM) for s in node.subscripts) + "]"
    return text, _ATOM


def _unary(node: Unary) -> tuple[str, int]:
    if node.operator == "not":
        return "not " + _written(node.operand, _NOT), _NOT
    operand = _written(node.operand, _SIGN)
    if type(node.operand) is Number and node.operand.unit is not None:
        # A sign directly before a literal with a unit is part of the literal.
        operand = f"({operand})"
    return node.operator + operand, _SIGN


def _binary(node: Binary) -> tuple[str, int]:
    operator = node.operator
    if operator == "^":
        base = _written(node.left, _ATOM)
        exponent = _written(node.right, _SIGN)
        if type(node.left) is Number and node.left.unit is not None and not base.startswith("("):
            base = f"({base})"
        if type(node.right) is Number and node.right.unit is not None:
            exponent = f"({exponent})"
        return f"{base}^{exponent}", _POWER
    first, operations = left_spine(node)
    parts = [_written(first, _BINDING[operations[0].operator])]
    for operation, above in zip(operations, (*operations[1:], None)):
        binding = _BINDING[operation.operator]
        right = _written(operation.right, binding + 1)
        apart = binding == _SUM or (_ends_in_unit(operation.left, parts[-1]) and _UNIT_GOES_ON.match(right))
        parts += [f" {operation.operator} " if apart else operation.operator, right]
        if above is not None and binding < _BINDING[above.operator]:
            parts = [f"({''.join(parts)})"]
    return "".join(parts), _BINDING[operator]


def _ends_in_unit(node: Expression, text: str) -> bool:
    """Whether `text`, written for `node`, ends in a unit that a following `*` or `/` would lengthen."""
    while isinstance(node, (Binary, Unary)):
        node = node.right if isinstance(node, Binary) else node.operand
    # Where a bracket stands round the literal, the text ends in that.
    return (
        isinstance(node, Number) and node.unit is not None and text.endswith(f"{node.text} {node.unit.text}")
    )


def _comparison(node: Comparison) -> tuple[str, int]:
    parts = [_written(node.operands[0], _SUM)]
    for operator, operand in zip(node.operators, node.operands[1:]):
        parts += [operator, _written(operand, _SUM)]
    return " ".join(parts), _COMPARISON


def _logical(node: Logical) -> tuple[str, int]:
    binding = _OR if node.operator == "or" else _AND
    return f" {node.operator} ".join(_written(o, binding + 1) for o in node.operands), binding


def _call(node: Call) -> tuple[str, int]:
    return f"{node.name}({', '.join(_written(a, _CONDITIONAL) for a in node.arguments)})", _ATOM


def _conditional(node: Conditional) -> tuple[str, int]:
    condition, then = _written(node.condition, _OR), _written(node.then, _CONDITIONAL)
    return f"if {condition} then {then} else {_written(node.otherwise, _CONDITIONAL)}", _CONDITIONAL


def _clause(node: IndexClause) -> str:
    if isinstance(node.over, Range):
        return f"{node.index} in {_written(node.over.first, _SUM)}..{_written(node.over.last, _SUM)}"
    return f"{node.index} in {_written(node.over, _SUM)}"


def _aggregate(node: Aggregate) -> tuple[str, int]:
    clauses = ", ".join(_clause(clause) for clause in node.clauses)
    condition = f" if {_written(node.filter, _OR)}" if node.filter is not None else ""
    return f"{node.function}({_written(node.body, _CONDITIONAL)} for {clauses}{condition})", _ATOM


_WRITERS: dict[type, Callable[[Any], tuple[str, int]]] = {
    Number: _number,
    Reference: _reference,
    Text: lambda node: (f'"{node.value}"', _ATOM),
    Unary: _unary,
    Binary: _binary,
    Comparison: _comparison,
    Logical: _logical,
    Call: _call,
    Conditional: _conditional,
    Aggregate: _aggregate,
}
