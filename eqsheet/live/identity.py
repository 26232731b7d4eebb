"""What a statement is about, so that one that is typed replaces the one it is meant to replace."""

from __future__ import annotations

from collections.abc import Iterable

from eqsheet.model.lower_statements import known_name
from eqsheet.syntax.nodes import Definition, Guess, NamePattern, NewUnit, Statement

Identity = tuple[str, str]


def identities(statement: Statement) -> tuple[Identity, ...]:
    """What may stand only once in a worksheet and what this statement gives, the weightiest first.

    A label, the known of a name, a definition, a new unit, the start value and the bounds of a quantity.

    >>> from eqsheet.diagnostics.source import Source
    >>> from eqsheet.syntax.parse import parse_statement
    >>> identities(parse_statement(Source("a", "bore: D = 5 mm"))[0])
    (('label', 'bore'), ('known', 'D'))
    """
    found: list[Identity] = []
    if statement.label:
        found.append(("label", statement.label))
    name = known_name(statement)
    node = statement.node
    if name is not None:
        found.append(("known", name))
    elif isinstance(node, Definition):
        found.append(("definition", node.name))
    elif isinstance(node, NewUnit):
        found.append(("unit", node.symbol))
    elif isinstance(node, Guess):
        target = node.target.pattern if isinstance(node.target, NamePattern) else node.target.dotted
        if node.near is not None:
            found.append(("near", target))
        if node.lower is not None or node.upper is not None:
            found.append(("within", target))
    return tuple(found)


def replaced_by(typed: Statement, statements: Iterable[Statement]) -> Statement | None:
    """The statement that `typed` is to take the place of, or None.

    A statement in use goes before one that is switched off; a guess is replaced only by one that gives all
    that it gives, so that bounds are not lost with a new start value.
    """
    mine = identities(typed)
    named = {name for _, name in mine}
    best: tuple[tuple[bool, int], Statement] | None = None
    for statement in statements:
        if not any(name in statement.line.text for name in named):
            continue  # spares most of them the closer look
        theirs = identities(statement)
        shared = [mine.index(identity) for identity in theirs if identity in mine]
        if not shared:
            continue
        guesses = isinstance(statement.node, Guess) and isinstance(typed.node, Guess)
        if guesses and not set(theirs) <= set(mine):
            continue
        rank = (statement.off, min(shared))
        if best is None or rank < best[0]:
            best = (rank, statement)
    return None if best is None else best[1]
