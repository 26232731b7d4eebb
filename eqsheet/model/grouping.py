"""Gathers the statements of large families as arrays while a worksheet is bound, and what is then lazy.

Takes: bound statements. Gives: groups, and of each statement the entries that must be written out all the same.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import replace
from typing import TypeVar

import numpy as np

from eqsheet.model.bind import Bound
from eqsheet.model.equation_group import (
    Array,
    BoundFormula,
    EquationGroup,
    GuessGroup,
    LimitGroup,
    ValidityGroup,
    bound_formula,
    part_of,
    reads_curve,
    repeating,
    values_of_knowns,
)
from eqsheet.model.families import Numbering
from eqsheet.model.indexing import Codes, Domain
from eqsheet.model.lazy_sequence import LazySequence
from eqsheet.model.system import EquationItem, GuessItem, LimitItem, Place, Validity
from eqsheet.model.tape import Formula
from eqsheet.units.unit import Unit

T = TypeVar("T")


class Grouping:
    """Keeps statements with at least `least` members as groups.

    Parameters
    ----------
    numbering : Numbering
    least : int
    keep_knowns : bool
        Whether knowns may be kept so; not where one run sets or frees some of them.
    """

    def __init__(self, numbering: Numbering, least: int, keep_knowns: bool) -> None:
        self.equations: list[EquationGroup] = []
        self.guesses: list[GuessGroup] = []
        firsts = [*numbering.plain.values(), *(f.first for f in numbering.families.values())]
        self.firsts: Codes = np.array(sorted(firsts), dtype=np.int64)
        self._first_list = self.firsts.tolist()
        self._total = numbering.total
        self._least = least
        self._keep_knowns = keep_knowns

    def family(self, quantity: int) -> int:
        """Number of the first member of a quantity's family."""
        return int(self._first_list[bisect_right(self._first_list, quantity) - 1])

    def take_equation(
        self, item: EquationItem, bound: Bound, place: Place, member: Callable[[Domain, int], str]
    ) -> Bound | None:
        """Keep the equations of a statement; gives what must be written out, None for nothing."""
        if bound.domain.size < self._least:
            return bound
        if item.known >= 0 and (not self._keep_knowns or reads_curve(item.formula.tape)):
            return bound
        rest = None
        group = bound_formula(item.formula, bound, place.statement, bound.domain.size)
        mask = repeating(group)
        if mask.any():
            rest, bound = part_of(bound, mask), part_of(bound, ~mask)
            group = bound_formula(item.formula, bound, place.statement, bound.domain.size)
        domain = bound.domain
        known = values = None
        if item.known >= 0:
            known = np.broadcast_to(np.asarray(bound.columns[item.known]), (domain.size,))
            values = values_of_knowns(item, group)
        if domain.size:
            self.equations.append(
                EquationGroup(
                    group,
                    place,
                    known,
                    values,
                    lambda entry: member(domain, entry),
                    item.tolerance,
                    tuple(_validity(one, bound, place.statement) for one in item.valid),
                )
            )
        return rest

    def take_cells(self, first: EquationItem, known: Codes, values: Array, cells: Codes) -> bool:
        """Keep the knowns of a column; whether that was possible.

        Parameters
        ----------
        first : EquationItem
            The first of them.
        known, values : ndarray (m,)
            Quantity numbers and SI values.
        cells : ndarray (m, 3)
            Statement, start and end of each.
        """
        if len(known) < self._least or not self._keep_knowns:
            return False
        bound = BoundFormula(first.formula, known[:, None], (values,))
        self.equations.append(EquationGroup(bound, first.place, known, values, lambda _: "", cells=cells))
        return True

    def limits(self, item: LimitItem, bound: Bound, member: Callable[[int], str]) -> LimitGroup | None:
        """The limits of a statement kept as arrays, None where they must be written out."""
        if bound.domain.size < self._least or reads_curve(item.formula.tape):
            return None
        group = bound_formula(item.formula, bound, item.place.statement, bound.domain.size)
        if repeating(group).any():
            return None
        return LimitGroup(group, replace(item, formula=group.formula), member)

    def take_guesses(
        self,
        formula: Formula,
        bound: Bound,
        targets: Codes,
        place: Place,
        exact: bool,
        roles: tuple[str, ...],
    ) -> bool:
        """Keep the guesses of a statement for `targets`; whether that was possible."""
        if len(targets) < self._least or bound.domain.size not in (1, len(targets)):
            return False
        group = bound_formula(formula, bound, place.statement, len(targets))
        if any(literal.index for literal in formula.literals) and bound.domain.size != len(targets):
            return False
        if repeating(group).any():
            return False
        self.guesses.append(GuessGroup(targets, group, place, exact, roles))
        return True

    @property
    def found(self) -> bool:
        """Whether anything is kept as a group."""
        return bool(self.equations or self.guesses)

    def all_equations(self, written: Sequence[EquationItem]) -> Sequence[EquationItem]:
        """The equations written out, and those of the groups after them."""
        groups = [(len(group), group.item) for group in self.equations]
        return LazySequence([(len(written), tuple(written).__getitem__), *groups])

    @staticmethod
    def all_limits(parts: Sequence[LimitItem | LimitGroup]) -> Sequence[LimitItem]:
        """The limits in the order of the text."""
        return LazySequence(
            [(len(p), p.item) if isinstance(p, LimitGroup) else (1, _always(p)) for p in parts]
        )

    def guesses_twice(self, written: Sequence[GuessItem]) -> bool:
        """Whether two guesses by name give one quantity the same role, so that somebody has to be told."""
        for role in ("near", "lower", "upper"):
            targets = [g.targets for g in self.guesses if g.exact and role in g.roles]
            others = [g.quantity for g in written if g.exact and role in g.roles]
            numbers = np.concatenate([*targets, np.array(others, dtype=np.int64)])
            if len(numbers) and np.bincount(numbers).max() > 1:
                return True
        return False

    def all_guesses(self, written: Sequence[GuessItem]) -> Sequence[GuessItem]:
        """Guesses by name, then those by pattern; of each sort those written out first."""
        exact = tuple(item for item in written if item.exact)
        pattern = tuple(item for item in written if not item.exact)
        parts: list[tuple[int, Callable[[int], GuessItem]]] = [(len(exact), exact.__getitem__)]
        parts += [(len(g), g.item) for g in self.guesses if g.exact]
        parts.append((len(pattern), pattern.__getitem__))
        parts += [(len(g), g.item) for g in self.guesses if not g.exact]
        return LazySequence(parts)

    def by_family(self, of_first: Callable[[int], T]) -> Sequence[T]:
        """One item for each quantity: that of the first member of its family."""
        ends = [*self._first_list[1:], self._total]
        return LazySequence(
            [(end - first, _same(of_first, first)) for first, end in zip(self._first_list, ends)]
        )


def _validity(one: Validity, bound: Bound, statement: int) -> ValidityGroup:
    """A validity condition over the entries of a domain."""
    members = bound.domain.size
    guards = tuple((bound_formula(g.formula, bound, statement, members), g.branch) for g in one.guards)
    shared = replace(one, place=replace(one.place, statement=statement))
    return ValidityGroup(bound_formula(one.formula, bound, statement, members), shared, guards)


def _always(item: T) -> Callable[[int], T]:
    return lambda _: item


def _same(of_first: Callable[[int], T], first: int) -> Callable[[int], T]:
    return lambda _: of_first(first)


class PreferredUnits(Mapping[int, Unit]):
    """Unit for each quantity by precedence, worked out when asked for.

    Parameters
    ----------
    own : sequence of mappings
        Units by quantity, the most preferred first; those of one mapping serve all the family before the next
        mapping is asked.
    firsts : ndarray
        Numbers of the first members of all families, ascending; plain quantities among them.
    total : int
    """

    def __init__(self, own: Sequence[Mapping[int, Unit | None]], firsts: Codes, total: int) -> None:
        self._own = [one for one in own if one]
        self._firsts = firsts.tolist()
        self._total = total
        self._common: list[dict[int, Unit | None]] = [{} for _ in self._own]

    def get(self, quantity: int, default: Unit | None = None) -> Unit | None:  # type: ignore[override]  # narrower
        """The unit, `default` where nothing tells one."""
        for own, common in zip(self._own, self._common):
            found = own.get(quantity)
            if found is None:
                found = self._of_family(own, common, bisect_right(self._firsts, quantity) - 1)
            if found is not None:
                return found
        return default

    def apart(self) -> Codes:
        """For each quantity 0, or a number for its unit where that is not the one of the first of its family."""
        found = np.zeros(self._total, dtype=np.int64)
        decided = np.zeros(len(self._firsts), dtype=bool)
        numbers: dict[str, int] = {}
        for own in self._own:
            units = {quantity: unit for quantity, unit in own.items() if unit is not None}
            quantities = np.fromiter(units, np.int64, len(units))
            family = np.searchsorted(self._firsts, quantities, side="right") - 1
            if len({unit.text for unit in units.values()}) > 1:
                common: dict[int, str] = {}
                for q, f in sorted(zip(quantities.tolist(), family.tolist())):
                    if not decided[f] and common.setdefault(f, units[q].text) != units[q].text:
                        found[q] = numbers.setdefault(units[q].text, len(numbers) + 1)
            decided[family] = True
        return found

    def _of_family(
        self, own: Mapping[int, Unit | None], common: dict[int, Unit | None], position: int
    ) -> Unit | None:
        if position not in common:
            first = self._firsts[position]
            end = self._firsts[position + 1] if position + 1 < len(self._firsts) else self._total
            units = (own.get(q) for q in range(first, end))
            common[position] = next((unit for unit in units if unit is not None), None)
        return common[position]

    def __getitem__(self, quantity: int) -> Unit:
        found = self.get(quantity)
        if found is None:
            raise KeyError(quantity)
        return found

    def __iter__(self) -> Iterator[int]:
        return (q for q in range(self._total) if self.get(q) is not None)

    def __len__(self) -> int:
        return sum(1 for _ in self)
