"""Refusal of expressions nested too deeply for the stages that walk trees by recursion."""

from __future__ import annotations

import re

from eqsheet.syntax.bounds import DEEPEST_EXPRESSION
from eqsheet.syntax.nodes import Binary, StatementNode
from eqsheet.syntax.slip import Slip
from eqsheet.syntax.spine import operands_in_run
from eqsheet.syntax.walk import Node, children

_BRACKETS = re.compile(r'"[^"\n]*"|#[^\n]*|[()\[\]]')
_CURE = "name parts of the expression in equations of their own and use the names"


def refuse_deep_brackets(text: str) -> None:
    """Raises a `Slip` at the bracket of `text` that is one too many inside one another."""
    if text.count("(") + text.count("[") <= DEEPEST_EXPRESSION:
        return
    depth = 0
    for found in _BRACKETS.finditer(text):
        mark = found.group()
        if mark in "([":
            depth += 1
            if depth > DEEPEST_EXPRESSION:
                raise Slip(
                    "nested-too-deeply",
                    f"brackets stand more than {DEEPEST_EXPRESSION} deep here",
                    found.start(),
                    found.end(),
                    _CURE,
                )
        elif mark in ")]":
            depth -= 1


def refuse_deep_expression(text: str, statement: StatementNode) -> None:
    """Raises a `Slip` if an expression of `statement` has too many operations one inside the other."""
    if len(text) <= DEEPEST_EXPRESSION:  # every step takes a character at least
        return
    level: list[Node] = [statement]
    depth = 0
    while level:
        level = [below for node in level for below in _inside(node)]
        depth += 1
        if depth > DEEPEST_EXPRESSION:
            raise Slip(
                "nested-too-deeply",
                f"the expression has more than {DEEPEST_EXPRESSION} operations one inside the other",
                0,
                min(len(text), 40),
                _CURE,
            )


def _inside(node: Node) -> tuple[Node, ...]:
    """The nodes one level deeper: a sum or product is one level, however many terms it has."""
    return operands_in_run(node) if type(node) is Binary else children(node)
