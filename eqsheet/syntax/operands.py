"""What may stand where: conditions where a condition is wanted, numbers where a number is."""

from __future__ import annotations

from eqsheet.syntax.nodes import Comparison, Expression, Logical, Text, Unary
from eqsheet.syntax.slip import Slip


def is_condition(node: Expression) -> bool:
    """Whether the expression is true or false rather than a number."""
    return isinstance(node, Comparison | Logical) or (isinstance(node, Unary) and node.operator == "not")


def as_number(node: Expression) -> Expression:
    """`node` where a number is wanted; a `Slip` if it is a condition or a quoted name."""
    if type(node) in NEEDS_A_LOOK:
        if is_condition(node):
            raise Slip(
                "condition-as-number",
                "a condition stands where a number is wanted",
                node.start,
                node.end,
                "choose a number by a condition: `if condition then a else b`",
            )
        if type(node) is Text:
            raise Slip(
                "text-as-number",
                "a quoted name stands where a number is wanted",
                node.start,
                node.end,
                'quoted names are members of a set: use them as subscripts, `x["NH4+"]`',
            )
    return node


NEEDS_A_LOOK = frozenset((Comparison, Logical, Unary, Text))


def as_condition(node: Expression) -> Expression:
    """`node` where a condition is wanted; a `Slip` if it is a number."""
    if not is_condition(node):
        raise Slip(
            "number-as-condition",
            "a number stands where a condition is wanted",
            node.start,
            node.end,
            "compare it with something, as in `x > 0`",
        )
    return node
