"""The line that is a quantity's own: the equation of its block that has it alone on a side."""

from __future__ import annotations

from collections.abc import Sequence

from eqsheet.syntax.nodes import Equation, Reference, Statement


def own_line(name: str, statements: Sequence[Statement]) -> Statement | None:
    """The first statement with the quantity alone on its left side, else on its right side, else None.

    In ``h = f*L/D*v^2/(2*g)  # friction`` the description speaks of ``h``, in whatever block it is solved.
    """
    for side in ("left", "right"):
        for statement in statements:
            if isinstance(statement.node, Equation) and _is_name(getattr(statement.node, side), name):
                return statement
    return None


def _is_name(expression: object, name: str) -> bool:
    return isinstance(expression, Reference) and expression.dotted == name and expression.subscripts is None
