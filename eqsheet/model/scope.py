"""What names mean while statements are lowered: units, definitions, indices, and numbers for quantities."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import TypeAlias

from eqsheet.model.families import FamilyReference
from eqsheet.model.indexing import Indexing
from eqsheet.model.interpolant import Interpolant
from eqsheet.syntax import nodes as syntax
from eqsheet.units.registry import UnitTable


@dataclass(frozen=True, slots=True)
class OfInstance:
    """A quantity of the instance whose group a line stands in, as against one of the worksheet around it."""

    key: str | FamilyReference


QuantityKey: TypeAlias = str | FamilyReference | OfInstance


class NameTable:
    """Provisional numbers for quantities as referred to, in order of first sight."""

    def __init__(self) -> None:
        self.numbers: dict[QuantityKey, int] = {}
        self.names: list[QuantityKey] = []

    def number(self, name: QuantityKey) -> int:
        """The number of `name`, given now if it has none."""
        number = self.numbers.get(name)
        if number is None:
            number = self.numbers[name] = len(self.names)
            self.names.append(name)
        return number


@dataclass(frozen=True)
class Context:
    """What expressions are read against: units in force, definitions by name, and what subscripts refer to.

    Curves and surfaces stand by name too, those that can be used.
    """

    unit_table: UnitTable
    definitions: Mapping[str, syntax.Statement] = field(default_factory=dict)
    indexing: Indexing = field(default_factory=Indexing)
    curves: Mapping[str, Interpolant] = field(default_factory=dict)

    def indexing_with(self, whole: Mapping[str, int | None]) -> Indexing:
        """What subscripts may refer to where some names are other whole numbers, or none; see `IndexScope.whole`."""
        if not whole:
            return self.indexing
        numbers = {**self.indexing.whole, **whole}
        return replace(self.indexing, whole={n: v for n, v in numbers.items() if v is not None})


@dataclass(frozen=True)
class IndexScope:
    """The indices in force at a statement.

    Attributes
    ----------
    free : mapping of str to str
        Indices that run over a domain, with their sets (empty: whole numbers); one formula serves all members.
    fixed : mapping of str to (int, str)
        Indices that have one member here: code and set.
    decided : mapping of (int, int) to bool
        Conditions on indices that are decided for all members here, by their place in the line.
    whole : mapping of str to (int or None)
        Names that are whole numbers of the template the line is in; None for one that only the worksheet has.
    """

    free: Mapping[str, str] = field(default_factory=dict)
    fixed: Mapping[str, tuple[int, str]] = field(default_factory=dict)
    decided: Mapping[tuple[int, int], bool] = field(default_factory=dict)
    whole: Mapping[str, int | None] = field(default_factory=dict)


NO_INDICES = IndexScope()


@dataclass(frozen=True, slots=True)
class Surroundings:
    """What one statement is lowered against.

    Attributes
    ----------
    context : Context
    names : NameTable
        Takes the quantities that the statement names.
    indices : IndexScope
    in_instance : bool
        Whether the statement stands in the group of a `use`, so that the names on its left are the instance's.
    """

    context: Context
    names: NameTable
    indices: IndexScope = NO_INDICES
    in_instance: bool = False
