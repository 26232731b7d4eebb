"""Ways through a tree of nodes."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import TypeAlias

from eqsheet.syntax.nodes import (
    Aggregate,
    Binary,
    Call,
    Comparison,
    Conditional,
    Definition,
    Equation,
    Expression,
    Family,
    Guess,
    IndexClause,
    Limit,
    Logical,
    Number,
    Range,
    Reference,
    Shared,
    Show,
    ShowItem,
    StatementNode,
    Text,
    Tolerance,
    Unary,
    Use,
)

Node: TypeAlias = object
"""Any node of the tree; nodes share no base class."""


def _present(*nodes: Node | None) -> tuple[Node, ...]:
    return tuple(node for node in nodes if node is not None)


def _clause(node: IndexClause) -> tuple[Node, ...]:
    return (node.over.first, node.over.last) if isinstance(node.over, Range) else (node.over,)


_CHILDREN: dict[type, Callable[..., tuple[Node, ...]]] = {
    Number: lambda n: (),
    Text: lambda n: (),
    Reference: lambda n: (*_present(n.owner), *(n.subscripts or ())),
    Unary: lambda n: (n.operand,),
    Binary: lambda n: (n.left, n.right),
    Comparison: lambda n: n.operands,
    Logical: lambda n: n.operands,
    Call: lambda n: n.arguments,
    Conditional: lambda n: (n.condition, n.then, n.otherwise),
    Aggregate: lambda n: (n.body, *n.clauses, *_present(n.filter)),
    IndexClause: _clause,
    Equation: lambda n: (n.left, n.right, *_present(n.tolerance), *n.valid),
    Tolerance: lambda n: _present(n.half_width, n.coverage),
    Guess: lambda n: _present(
        n.target if isinstance(n.target, Reference) else None, n.near, n.lower, n.upper
    ),
    Limit: lambda n: _present(n.condition, n.within),
    Show: lambda n: n.items,
    ShowItem: lambda n: (n.target,),
    Definition: lambda n: (n.body, *n.valid),
    Family: lambda n: (*n.clauses, *_present(n.filter)),
    Shared: lambda n: n.names,
    Use: lambda n: (n.instance,),
}


def children(node: Expression | StatementNode | Node) -> tuple[Node, ...]:
    """The expressions (and clauses, tolerances, shown items) directly below `node`, in order of writing.

    Units, parameters and columns are not expressions and are left out.
    """
    below = _CHILDREN.get(type(node))
    return below(node) if below is not None else ()


def walk(node: Expression | StatementNode | Node) -> Iterator[Node]:
    """`node` and all below it, parents first, without recursion."""
    waiting: list[Node] = [node]
    while waiting:
        here = waiting.pop()
        yield here
        waiting.extend(reversed(children(here)))
