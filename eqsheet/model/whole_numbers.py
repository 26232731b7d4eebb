"""Whole numbers that ranges and subscripts may count by: knowns, and sums and products of them, in each scope.

A template has its own, so that instances of one template may have ranges of different lengths.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Mapping, Sequence
from dataclasses import dataclass, field, replace
from operator import add, mul, sub

from eqsheet.model.families import FamilyReference
from eqsheet.model.indexing import Indexing, whole_number
from eqsheet.model.placed import WORKSHEET, Placed, Scope
from eqsheet.syntax import nodes as syntax
from eqsheet.syntax.spine import left_spine

_OPERATIONS: Mapping[str, Callable[[int, int], int]] = {"+": add, "-": sub, "*": mul}
# Beyond this floats have gaps, and no range is so long.
_LARGEST = 2**53


@dataclass
class WholeNumbers:
    """The whole numbers of a worksheet by scope.

    Parameters
    ----------
    placed : sequence of Placed
        All statements in their places.
    mentioned : collection of str
        Names that ranges and subscripts mention; without any there is nothing to work out.
    """

    placed: Sequence[Placed]
    mentioned: Collection[str]
    _lines: dict[str, list[tuple[Scope, syntax.Expression]]] = field(default_factory=dict)
    _values: dict[str, int | None] = field(default_factory=dict)
    _of_scope: dict[str, dict[str, int | None]] = field(default_factory=dict)
    _indexings: dict[int, Indexing] = field(default_factory=dict)

    def __post_init__(self) -> None:
        if not self.mentioned:
            return
        for place in self.placed:
            node = place.statement.node
            if isinstance(node, syntax.Equation):
                self._note(place, node.left, node.right)
                self._note(place, node.right, node.left)
        for key in self._lines:
            scope, _, name = key.rpartition(".")
            if scope and name in self.mentioned:
                self._of_scope.setdefault(scope, {})[name] = self._value(key)

    def of_worksheet(self) -> Mapping[str, int]:
        """Those outside templates, by name."""
        found = ((name, self._value(name)) for name in self._lines if name in self.mentioned)
        return {name: value for name, value in found if value is not None}

    def indexing(self, around: Indexing, scope: Scope) -> Indexing:
        """What subscripts may refer to in a scope.

        Parameters
        ----------
        around : Indexing
            That of the worksheet.
        """
        if scope is WORKSHEET or not self.mentioned:
            return around
        if id(scope) not in self._indexings:
            own = self.local(scope)
            whole = {name: value for name, value in {**around.whole, **own}.items() if value is not None}
            self._indexings[id(scope)] = replace(around, whole=whole) if own else around
        return self._indexings[id(scope)]

    def local(self, scope: Scope) -> Mapping[str, int | None]:
        """Names that count otherwise in a scope than in the worksheet; None for one that is no whole number there."""
        if scope is WORKSHEET or not self.mentioned:
            return {}
        own = dict(self._of_scope.get(scope.text, {}))
        for name in scope.shared.intersection(self.mentioned):
            key = _text(scope.resolve(name))
            if key in self._lines and key != name:
                own[name] = self._value(key)
        return own

    def _note(self, place: Placed, target: syntax.Expression, value: syntax.Expression) -> None:
        if not isinstance(target, syntax.Reference) or target.subscripts is not None:
            return
        if place.heads and place.instance is None:
            return
        if target.owner is not None:
            key = target.dotted if place.scope is WORKSHEET and place.instance is None else ""
        else:
            key = _text((place.instance or place.scope).resolve(target.name))
        if not key:
            return
        lines = self._lines.setdefault(key, [])
        if place.heads and whole_number(value) is None:
            # It may differ from instance to instance, and is no one number.
            return
        # What is set for one run goes before the worksheet's own line.
        lines.insert(len(lines) if place.statement.source.numbered else 0, (place.scope, value))

    def _value(self, key: str) -> int | None:
        if key not in self._values:
            self._values[key] = None  # while it is worked out, for lines that go in a circle
            values = (self._of(value, scope) for scope, value in self._lines.get(key, ()))
            self._values[key] = next((value for value in values if value is not None), None)
        return self._values[key]

    def _of(self, node: syntax.Expression, scope: Scope) -> int | None:
        """The value of an expression of whole numbers, None for any other."""
        match node:
            case syntax.Reference(owner=None, subscripts=None):
                return self._value(_text(scope.resolve(node.name)))
            case syntax.Binary():
                first, operations = left_spine(node)
                result = self._of(first, scope)
                for part in operations:
                    other = self._of(part.right, scope)
                    if result is None or other is None or part.operator not in _OPERATIONS:
                        return None
                    result = _OPERATIONS[part.operator](result, other)
                return result if result is not None and abs(result) <= _LARGEST else None
        return whole_number(node)


def _text(key: str | FamilyReference) -> str:
    return key if isinstance(key, str) else key.text
