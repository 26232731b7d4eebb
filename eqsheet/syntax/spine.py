"""Long sums and products without recursion: ``a + b + c + d`` is one run of operands, however deep its tree."""

from __future__ import annotations

from eqsheet.syntax.nodes import Binary, Expression


def left_spine(node: Expression) -> tuple[Expression, list[Binary]]:
    """The first operand of a run of ``+ - * /``, and the operations done to it in turn.

    Operations of one rank are read from the left, so a sum of a thousand terms is a tree a thousand deep, all
    along its left operands; nobody would call it nested. A power is no part of the run: it is read from the right.

    >>> from eqsheet.syntax.parse import parsed_text
    >>> first, operations = left_spine(parsed_text("y = a*b - c^2 + d").node.right)
    >>> first.name, [operation.operator for operation in operations]
    ('a', ['*', '-', '+'])
    """
    operations: list[Binary] = []
    while type(node) is Binary and node.operator != "^":
        operations.append(node)
        node = node.left
    operations.reverse()
    return node, operations


def operands_in_run(node: Binary) -> tuple[Expression, ...]:
    """The operands of the run of ``+ - * /`` that `node` is; base and exponent of a power."""
    first, operations = left_spine(node)
    if not operations:
        return node.left, node.right
    return first, *(operation.right for operation in operations)
