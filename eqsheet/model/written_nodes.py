"""Syntax nodes as they are written: names they hold, and subscripts as text that tells them apart."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import fields, replace
from typing import Any

from eqsheet.syntax import nodes as syntax
from eqsheet.syntax.spine import left_spine


def canonical(node: syntax.Expression, fixed: Mapping[str, tuple[int, str]]) -> str:
    """A subscript as text that is the same for the same meaning in one place: fixed indices by their members."""
    match node:
        case syntax.Number():
            return f"-{node.text}" if node.negated else node.text
        case syntax.Text():
            return f'"{node.value}"'
        case syntax.Reference():
            if node.dotted in fixed:
                code, set_name = fixed[node.dotted]
                return f"{set_name}#{code}"
            inner = "" if node.subscripts is None else ",".join(canonical(s, fixed) for s in node.subscripts)
            return f"{node.dotted}[{inner}]" if inner else node.dotted
        case syntax.Unary():
            return f"{node.operator}({canonical(node.operand, fixed)})"
        case syntax.Binary(operator="^"):
            return f"({canonical(node.left, fixed)}^{canonical(node.right, fixed)})"
        case syntax.Binary():
            first, operations = left_spine(node)
            rest = (f"{part.operator}{canonical(part.right, fixed)})" for part in operations)
            return "".join(("(" * len(operations), canonical(first, fixed), *rest))
    return f"{node.start}:{node.end}"


def names_in(nodes: Iterable[object]) -> set[str]:
    """All plain names that occur in some nodes of the tree."""
    found: set[str] = set()
    stack = list(nodes)
    while stack:
        node = stack.pop()
        if isinstance(node, syntax.Reference) and node.owner is None:
            found.add(node.name)
        if isinstance(node, tuple):
            stack.extend(node)
        elif hasattr(node, "__dataclass_fields__"):
            stack.extend(getattr(node, name) for name in node.__dataclass_fields__)
    return found


def renamed(node: Any, names: Mapping[str, str]) -> Any:
    """A subscript, or a tuple of them, with the indices in `names` under their new names."""
    if isinstance(node, tuple):
        return tuple(renamed(one, names) for one in node)
    if not hasattr(node, "__dataclass_fields__"):
        return node
    changed = {f.name: renamed(getattr(node, f.name), names) for f in fields(node)}
    if isinstance(node, syntax.Reference) and node.owner is None and node.subscripts is None:
        changed["name"] = names.get(node.name, node.name)
    return replace(node, **changed)
