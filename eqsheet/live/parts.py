"""A typed statement that is about one part of a longer one: a start value of a guess, a unit among those shown."""

from __future__ import annotations

from collections.abc import Iterable

from eqsheet.syntax.nodes import Guess, NamePattern, Show, Statement

Part = tuple[int, int, str]
"""Start and end in the old statement's logical line, and what is written there instead."""


def part_replaced_by(typed: Statement, statements: Iterable[Statement]) -> tuple[Statement, Part] | None:
    """The statement a part of which `typed` gives anew, and that part; None where there is none.

    A start value alone leaves the bounds that stand beside the old one; the first unit shown for a quantity counts,
    so another one would be without effect anywhere else.
    """
    if typed.off or typed.label or "\n" in typed.line.text:
        return None
    for old in statements:
        if not old.off and "\n" not in old.line.text:
            part = _part(typed, old)
            if part is not None:
                return old, part
    return None


def _part(typed: Statement, old: Statement) -> Part | None:
    new, node = typed.node, old.node
    text = typed.line.text
    if isinstance(new, Guess) and isinstance(node, Guess):
        only_start = new.near is not None and new.lower is None and new.upper is None
        if only_start and new.near is not None and node.near is not None and _target(new) == _target(node):
            return node.near.start, node.near.end, text[new.near.start : new.near.end]
    if isinstance(new, Show) and isinstance(node, Show) and len(new.items) == 1:
        item = new.items[0]
        for there in node.items:
            if (
                there.target.dotted == item.target.dotted
                and there.target.subscripts == item.target.subscripts
            ):
                return there.start, there.end, text[item.start : item.end]
    return None


def _target(guess: Guess) -> str:
    return guess.target.pattern if isinstance(guess.target, NamePattern) else guess.target.dotted
