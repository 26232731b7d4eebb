"""Definitions used with members: ``define head(n) = z[n] + 1 m`` and ``head(A)``, or ``head(n)`` over a set.

A parameter that stands in brackets is replaced there by the argument as written, since a member has no value.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import fields, replace
from typing import Any

from eqsheet.model.written_nodes import names_in
from eqsheet.syntax import nodes as syntax
from eqsheet.syntax.walk import walk


def with_members(
    definition: syntax.Definition, arguments: tuple[syntax.Expression, ...], members: Collection[str]
) -> tuple[syntax.Definition, frozenset[str]]:
    """The definition with its arguments in brackets, and the parameters whose values are needed all the same.

    Parameters
    ----------
    members : collection of str
        Indices that stand for members of a set: an argument that is one of them is put in everywhere.
    """
    given = {p.name: argument for p, argument in zip(definition.parameters, arguments)}
    anywhere = {
        name: argument
        for name, argument in given.items()
        if isinstance(argument, syntax.Text)
        or (
            isinstance(argument, syntax.Reference)
            and argument.subscripts is None
            and argument.dotted in members
        )
    }
    parts = (definition.body, *definition.valid)
    in_brackets = names_in(s for part in parts for s in _subscripts(part)).intersection(given)
    if not in_brackets and not anywhere:
        return definition, frozenset(given)
    needed = frozenset(given).intersection(_outside(parts)) - anywhere.keys()
    body, *valid = (_put_in(part, given, anywhere) for part in parts)
    return replace(definition, body=body, valid=tuple(valid)), needed


def hides(definition: syntax.Definition, arguments: tuple[syntax.Expression, ...]) -> str:
    """A name in the arguments that an aggregate of the definition has for its index; empty if there is none."""
    own = {node.index for node in walk(definition) if isinstance(node, syntax.IndexClause)}
    return min(own & names_in(arguments), default="")


def _subscripts(node: syntax.Expression) -> list[syntax.Expression]:
    return [s for one in walk(node) if isinstance(one, syntax.Reference) for s in one.subscripts or ()]


def _outside(parts: tuple[syntax.Expression, ...]) -> set[str]:
    """Names that stand outside brackets."""
    found: set[str] = set()
    waiting: list[Any] = list(parts)
    while waiting:
        node = waiting.pop()
        if isinstance(node, syntax.Reference):
            if node.owner is None and node.subscripts is None:
                found.add(node.name)
        elif isinstance(node, tuple):
            waiting.extend(node)
        elif hasattr(node, "__dataclass_fields__"):
            waiting.extend(getattr(node, field.name) for field in fields(node))
    return found


def _put_in(node: Any, inside: Mapping[str, Any], outside: Mapping[str, Any]) -> Any:
    """A node with names replaced: those in `inside` within brackets, those in `outside` elsewhere."""
    if isinstance(node, tuple):
        return tuple(_put_in(one, inside, outside) for one in node)
    if not hasattr(node, "__dataclass_fields__"):
        return node
    if isinstance(node, syntax.Reference):
        if node.owner is None and node.subscripts is None:
            return outside.get(node.name, node)
        owner = node.owner if node.owner is None else _put_in(node.owner, inside, {})
        subscripts = node.subscripts and _put_in(node.subscripts, inside, inside)
        return replace(node, owner=owner, subscripts=subscripts)
    return replace(node, **{f.name: _put_in(getattr(node, f.name), inside, outside) for f in fields(node)})
