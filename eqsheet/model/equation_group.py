"""Statements of large families kept as arrays: one formula and the numbers of the quantities of each member.

What needs a member by itself (a message, a branch) has its formula or item written out on demand.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from eqsheet.model.bind import Bound, merged
from eqsheet.model.evaluate import INTERPOLATED, evaluate_arrays
from eqsheet.model.indexing import Codes, Domain
from eqsheet.model.specialise import specialise, specialise_formula
from eqsheet.model.system import (
    EquationItem,
    Guard,
    GuessItem,
    LimitItem,
    Place,
    ToleranceOfKnown,
    Validity,
)
from eqsheet.model.tape import Formula, Literal, Tape

Array = NDArray[np.float64]

# From this many members on a statement is kept as arrays; below, written out, it takes less time than importing
# the library of sparse graphs.
LARGE_FAMILY = 1000


@dataclass(frozen=True)
class BoundFormula:
    """A formula over the entries of a domain.

    Attributes
    ----------
    formula : Formula
        Quantities are provisional numbers, of which nothing depends here.
    numbers : ndarray (members, slots)
        Quantity numbers, all different in a row; columns are contiguous.
    literals : tuple of (float or ndarray (members,))
        SI values, arrays where an index stands for the literal.
    """

    formula: Formula
    numbers: Codes
    literals: tuple[float | Array, ...]

    def __len__(self) -> int:
        return len(self.numbers)

    def at(self, entry: int) -> Formula:
        """The formula of one entry."""
        own: list[Literal] = [
            replace(literal, value=float(value[entry]), index="")
            if isinstance(value, np.ndarray)
            else literal
            for literal, value in zip(self.formula.literals, self.literals)
        ]
        numbers = tuple(self.numbers[entry].tolist())
        return replace(self.formula, quantities=numbers, literals=tuple(own))

    def part(self, entries: Codes) -> BoundFormula:
        """Some of the entries."""
        literals = tuple(v[entries] if isinstance(v, np.ndarray) else v for v in self.literals)
        return BoundFormula(self.formula, self.numbers.T[:, entries].T, literals)

    def specialised(self, branches: Mapping[int, bool]) -> BoundFormula:
        """With each ``if`` in `branches`, by instruction, replaced by the branch taken."""
        held = specialise(self.formula.tape, branches)
        literals = tuple(self.literals[k] for k in held.literals)
        numbers = self.numbers.T[list(held.quantities)].T
        return BoundFormula(specialise_formula(self.formula, branches), numbers, literals)

    def literals_of(self, entries: Codes) -> tuple[Array, ...]:
        """Values of the literals at some entries, an array each."""
        return tuple(
            value[entries] if isinstance(value, np.ndarray) else np.full(len(entries), value)
            for value in self.literals
        )


@dataclass(frozen=True)
class EquationGroup:
    """The equations of one statement of a large family.

    Attributes
    ----------
    bound : BoundFormula
    place : Place
    known : ndarray (members,) or None
        Numbers of the quantities it sets, where it is a known.
    values : ndarray (members,) or None
        SI values of the known.
    member : callable
        Position of an entry to what tells it from the others, see `EquationItem.member`.
    tolerance : ToleranceOfKnown or None
    valid : tuple of ValidityGroup
    unsettled : BoundFormula or None
        The formula with the conditions that knowns decide, which `bound` is without; None where it has none.
    cells : ndarray (members, 3) or None
        Statement, start and end of each, where they are the cells of a column and not of one statement.
    """

    bound: BoundFormula
    place: Place
    known: Codes | None
    values: Array | None
    member: Callable[[int], str]
    tolerance: ToleranceOfKnown | None = None
    valid: tuple[ValidityGroup, ...] = ()
    unsettled: BoundFormula | None = None
    cells: Codes | None = None

    def __len__(self) -> int:
        return len(self.bound)

    @property
    def statements(self) -> int | Codes:
        """The statement of all entries, or of each (members,)."""
        return self.place.statement if self.cells is None else self.cells[:, 0]

    def place_of(self, entry: int) -> Place:
        """Where one equation stands."""
        return self.place if self.cells is None else Place(*self.cells[entry].tolist())

    @property
    def as_written(self) -> BoundFormula:
        """The formula with all its conditions."""
        return self.unsettled or self.bound

    def item(self, entry: int) -> EquationItem:
        """One equation, written out."""
        formula, place = self.as_written.at(entry), self.place_of(entry)
        if self.cells is not None:
            cell = (place.start, place.end)
            formula = replace(formula, statement=place.statement, places=(cell,) * len(formula.places))
        valid = tuple(one.item(entry) for one in self.valid)
        known, value = -1, math.nan
        if self.known is not None and self.values is not None:
            known, value = int(self.known[entry]), float(self.values[entry])
        return EquationItem(formula, place, known, value, self.tolerance, valid, self.member(entry))

    def part(self, entries: Codes, bound: BoundFormula) -> EquationGroup:
        """Some of its entries, whose formula without the conditions that knowns decide is `bound`."""
        chosen = entries.tolist()
        return replace(
            self,
            bound=bound,
            member=lambda entry: self.member(chosen[entry]),
            valid=tuple(one.part(entries) for one in self.valid),
            unsettled=self.as_written.part(entries),
        )


@dataclass(frozen=True)
class ValidityGroup:
    """A validity condition of the equations of a large family; see `Validity`.

    Attributes
    ----------
    bound : BoundFormula
        In its rows a quantity may stand twice.
    shared : Validity
        What they have in common; its formulas are without meaning.
    guards : tuple of (BoundFormula, bool)
    """

    bound: BoundFormula
    shared: Validity
    guards: tuple[tuple[BoundFormula, bool], ...]

    def item(self, entry: int) -> Validity:
        """Of one member."""
        guards = tuple(Guard(merged(bound.at(entry)), branch) for bound, branch in self.guards)
        return replace(self.shared, formula=merged(self.bound.at(entry)), guards=guards)

    def part(self, entries: Codes) -> ValidityGroup:
        """Of some members."""
        guards = tuple((bound.part(entries), branch) for bound, branch in self.guards)
        return ValidityGroup(self.bound.part(entries), self.shared, guards)


@dataclass(frozen=True)
class GuessGroup:
    """The guesses of one statement for a large family; see `GuessItem`.

    Attributes
    ----------
    targets : ndarray (members,)
        Numbers of the quantities guessed.
    """

    targets: Codes
    bound: BoundFormula
    place: Place
    exact: bool
    roles: tuple[str, ...]

    def __len__(self) -> int:
        return len(self.targets)

    def item(self, entry: int) -> GuessItem:
        """One guess, written out."""
        return GuessItem(int(self.targets[entry]), self.place, self.exact, self.bound.at(entry), self.roles)


@dataclass(frozen=True)
class LimitGroup:
    """The limits of one statement for a large family; see `LimitItem`.

    Attributes
    ----------
    bound : BoundFormula
    shared : LimitItem
        What they have in common; its formula is that of `bound`.
    member : callable
        Position of an entry to what tells it from the others.
    """

    bound: BoundFormula
    shared: LimitItem
    member: Callable[[int], str]

    def __len__(self) -> int:
        return len(self.bound)

    def text(self, entry: int) -> str:
        """One limit as written, and which member it is for."""
        return f"{self.shared.text} ({self.member(entry)})"

    def item(self, entry: int) -> LimitItem:
        """One limit, written out."""
        return replace(self.shared, formula=self.bound.at(entry), text=self.text(entry))


def bound_formula(formula: Formula, bound: Bound, statement: int, members: int) -> BoundFormula:
    """The formula with the numbers of all entries; `members` of them even where nothing depends on an index."""
    columns = [np.broadcast_to(np.asarray(bound.columns[p]), (members,)) for p in formula.quantities]
    numbers = np.stack(columns) if columns else np.zeros((0, members), dtype=np.int64)
    literals = tuple(
        bound.domain.arrays[literal.index].astype(float) if literal.index else literal.value
        for literal in formula.literals
    )
    return BoundFormula(replace(formula, statement=statement), numbers.T, literals)


def repeating(bound: BoundFormula) -> NDArray[np.bool_]:
    """The entries (members,) in which one quantity stands in two slots: their tape is another."""
    ordered = np.sort(bound.numbers.T, axis=0)
    return np.asarray((ordered[1:] == ordered[:-1]).any(axis=0))


def part_of(bound: Bound, mask: NDArray[np.bool_]) -> Bound:
    """The entries for which `mask` holds."""
    return Bound(
        bound.domain.where(mask),
        {p: c if isinstance(c, int) else c[mask] for p, c in bound.columns.items()},
    )


def reads_curve(tape: Tape) -> bool:
    """Whether there are curves or surfaces in it, outside whose range some members may be."""
    return any(instruction[0] in INTERPOLATED for instruction in tape.instructions)


def values_of_knowns(item: EquationItem, bound: BoundFormula) -> Array:
    """SI values (members,) of a known with this formula; see `known_value`."""
    members = len(bound)
    if item.value == item.value:
        return np.full(members, item.value)
    left, right = bound.formula.tape.outputs
    side = right if bound.formula.tape.instructions[left][0] == "quantity" else left
    values = evaluate_arrays(bound.formula.tape, [np.full(members, np.nan)], bound.literals)
    return np.array(np.broadcast_to(np.asarray(values[side], dtype=float), (members,)))


def offsets(groups: Sequence[EquationGroup], first: int) -> list[int]:
    """Number of the first equation of each group where the first group's is `first`."""
    found = []
    for group in groups:
        found.append(first)
        first += len(group)
    return found


def entries_of(domain: Domain) -> Codes:
    """Positions of all entries of a domain."""
    return np.arange(domain.size, dtype=np.int64)
