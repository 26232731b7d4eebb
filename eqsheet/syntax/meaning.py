"""Whether two texts say the same: trees compared without their positions."""

from __future__ import annotations

from dataclasses import fields
from typing import Any

from eqsheet.syntax.nodes import Document

_PLACES = frozenset(("start", "end", "operator_start", "name_end", "line", "source"))
_meaningful: dict[type, tuple[str, ...]] = {}


def _fields(kind: type) -> tuple[str, ...]:
    names = _meaningful.get(kind)
    if names is None:
        names = _meaningful[kind] = tuple(f.name for f in fields(kind) if f.name not in _PLACES)
    return names


def same_meaning(a: Any, b: Any) -> bool:
    """Whether two nodes, statements or documents differ in nothing but the places they stand at.

    Descriptions, sources, assumptions and sections are part of the meaning; other prose is not.

    >>> from eqsheet.syntax.parse import parsed_text
    >>> same_meaning(parsed_text("x=a*(b)").node, parsed_text("x  = a * b").node)
    True
    """
    waiting = [(a, b)]
    while waiting:
        a, b = waiting.pop()
        if type(a) is not type(b):
            return False
        if type(a) is tuple:
            if len(a) != len(b):
                return False
            waiting.extend(zip(a, b))
        elif type(a) is Document:
            waiting.append((a.statements, b.statements))
        elif hasattr(a, "__dataclass_fields__"):
            waiting.extend((getattr(a, name), getattr(b, name)) for name in _fields(type(a)))
        elif a != b:
            return False
    return True
