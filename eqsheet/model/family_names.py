"""Names of quantities made when asked for, and quantities found by name without making all names."""

from __future__ import annotations

import re
from functools import cached_property
from typing import Any

import numpy as np

from eqsheet.model.families import Family, Numbering
from eqsheet.model.indexing import Indexing
from eqsheet.model.lazy_sequence import LazySequence

# Subscripts of a name, with quoted members in them.
_SUBSCRIPTS = re.compile(r'\[((?:"[^"]*"|[^\]"])*)\]')
_PARTS = re.compile(r'"[^"]*"|[^,\s]+')


class FamilyNames(LazySequence[str]):
    """Names by number of a worksheet with large families."""

    def __init__(self, numbering: Numbering, indexing: Indexing) -> None:
        self._indexing = indexing
        self._plain = numbering.plain
        self._families: dict[str, list[Family]] = {}
        parts: list[tuple[int, Any]] = []
        by_first: dict[int, str | Family] = {number: name for name, number in numbering.plain.items()}
        by_first.update({family.first: family for family in numbering.families.values()})
        for first in sorted(by_first):
            one = by_first[first]
            if isinstance(one, str):
                parts.append((1, _Constant(one)))
            else:
                parts.append((one.size, _Members(one, indexing)))
                self._families.setdefault(".".join(name for name, _ in one.path), []).append(one)
        super().__init__(parts)

    def number(self, name: str) -> int | None:
        """Number of the quantity of that name, None where there is none.

        >>> from eqsheet.model.families import Numbering
        >>> FamilyNames(Numbering({"a": 0, "b": 1}, {}, 2), Indexing()).number("b")
        1
        """
        plain = self._plain.get(name)
        if plain is not None:
            return plain
        subscripts = [text for inside in _SUBSCRIPTS.findall(name) for text in _PARTS.findall(inside)]
        for family in self._families.get(_SUBSCRIPTS.sub("", name), ()):
            codes = [self._code(s, text) for s, text in zip(family.sets, subscripts)]
            if len(subscripts) != len(family.sets) or None in codes:
                continue
            number = int(family.numbers([c for c in codes if c is not None], 1)[0])
            # Only the name as it is written elsewhere counts: `T[03]` is none.
            if number >= 0 and self[number] == name:
                return number
        return None

    def index(self, value: object, start: int = 0, stop: int | None = None) -> int:
        """As of any sequence, without a search."""
        found = self.number(value) if isinstance(value, str) else None
        if found is None or found < start or (stop is not None and found >= stop):
            raise ValueError(f"{value!r} is no name")
        return found

    def __contains__(self, value: object) -> bool:
        return isinstance(value, str) and self.number(value) is not None

    def _code(self, set_name: str, text: str) -> int | None:
        if set_name:
            return self._indexing.sets[set_name].positions.get(text.strip('"'))
        return int(text) if re.fullmatch(r"-?\d{1,18}", text) else None


class _Constant:
    """Makes one name."""

    def __init__(self, name: str) -> None:
        self._name = name

    def __call__(self, position: int) -> str:
        return self._name


class _Members:
    """Makes names of a family's members."""

    def __init__(self, family: Family, indexing: Indexing) -> None:
        self._family = family
        self._indexing = indexing

    def __call__(self, position: int) -> str:
        if self._simple is not None:
            return f"{self._simple}[{self._codes[position]}]"
        return self._family.name(position, self._indexing)

    @cached_property
    def _simple(self) -> str | None:
        """The name before the brackets, of families over whole numbers with one subscript."""
        family = self._family
        return family.path[0][0] if family.path[1:] == () and family.sets == ("",) else None

    @cached_property
    def _codes(self) -> Any:
        return np.ascontiguousarray(self._family.codes[:, 0])
