"""Dimensions and kinds inferred once a family: all its members are one quantity to the unit check."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TypeVar

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.model.aggregate_parts import is_like_members
from eqsheet.model.bind import merged
from eqsheet.model.check_units import check_units
from eqsheet.model.equation_group import LimitGroup, offsets
from eqsheet.model.lazy_sequence import LazySequence
from eqsheet.model.system import EquationSystem
from eqsheet.model.tape import Formula
from eqsheet.model.units_like_names import doubtful_units
from eqsheet.units.dimension import Dimension

T = TypeVar("T")

_SUBSCRIPTS = re.compile(r"\[[^\]]*\]")


@dataclass(frozen=True, slots=True)
class FamilyUnits:
    """What the unit check says, by quantity.

    Attributes
    ----------
    dimensions : sequence of (Dimension or None)
    kinds : sequence of str
        ``reading``, ``difference`` or ``plain``.
    clashing : frozenset of int
        Equations whose dimensions do not fit.
    diagnostics : tuple of Diagnostic
    """

    dimensions: Sequence[Dimension | None]
    kinds: Sequence[str]
    clashing: frozenset[int]
    diagnostics: tuple[Diagnostic, ...]


def check_units_by_family(system: EquationSystem) -> FamilyUnits:
    """Infer the dimensions and kinds of all quantities of a system."""
    formulas: list[Formula] = []
    stands_for: list[int] = []
    physical = 0
    seen: set[object] = set()
    # Families are numbered without gaps: a number that no formula mentions would count as a quantity.
    firsts = sorted(set(system.families)) if system.firsts is None else system.firsts.tolist()
    family_of = _family_numbers(system, firsts)
    stands_in = _like_their_members(system, firsts, family_of)
    if stands_in:
        firsts = [first for family, first in enumerate(firsts) if family not in stands_in]
        family_of = _without_parts(family_of, stands_in)
    for number, formula, is_physical in _everything(system):
        if system.families:
            if stands_in and _makes_part(formula, system):
                continue
            numbers = tuple([family_of[q] for q in formula.quantities])
            # Branches of one line may share a tape; their literals stand in different places.
            key = (formula.statement, formula.tape, numbers, formula.places)
            if key in seen:
                continue
            seen.add(key)
            formula = merged(replace(formula, quantities=numbers))
        formulas.append(formula)
        stands_for.append(number)
        physical += is_physical
    names = system.names
    if system.families:
        names = tuple([_SUBSCRIPTS.sub("", names[first]) for first in firsts])
    units = check_units(formulas, system.statements, names, range(physical, len(formulas)))
    dimensions: Sequence[Dimension | None] = units.dimensions.dimensions
    kinds: Sequence[str] = tuple(["plain" if kind == "unknown" else kind for kind in units.kinds.kinds])
    if system.firsts is not None:
        every = system.firsts.tolist()
        dimensions = _for_all_members([dimensions[family_of[f]] for f in every], every, len(system.names))
        kinds = _for_all_members([kinds[family_of[f]] for f in every], every, len(system.names))
    elif system.families:
        dimensions = tuple([dimensions[f] for f in family_of])
        kinds = tuple([kinds[f] for f in family_of])
    candidates = [
        replace(one, quantity=family_of[one.quantity]) if one.quantity >= 0 and system.families else one
        for one in system.units_like_names
    ]
    doubtful = doubtful_units(candidates, formulas, units.dimensions, system.statements, system.unit_table)
    clashing = frozenset(stands_for[clash.formula] for clash in units.dimensions.clashes)
    return FamilyUnits(dimensions, kinds, clashing - {-1}, (*units.diagnostics, *doubtful))


def _family_numbers(system: EquationSystem, firsts: Sequence[int]) -> Sequence[int]:
    """The number of each quantity's family among `firsts`."""
    if system.firsts is not None:
        return _for_all_members(range(len(firsts)), firsts, len(system.names))
    compact = {first: i for i, first in enumerate(firsts)}
    return tuple([compact[first] for first in system.families])


def _like_their_members(
    system: EquationSystem, firsts: Sequence[int], family_of: Sequence[int]
) -> dict[int, int]:
    """Families of parts of sums and extremes, with the family of what they are made from, which they are like.

    So that a slip is put down to the line that has it, not to the parts.
    """
    parts = {i for i, first in enumerate(firsts) if is_like_members(system.names[first])}
    if not parts:
        return {}
    made_from: dict[int, int] = {}
    groups = (group.bound.at(0) for group in system.groups)
    for formula in (*(item.formula for item in system.written), *groups):
        operation, *rest = formula.tape.instructions[formula.tape.outputs[0]]
        if operation == "quantity":
            part = family_of[formula.quantities[rest[0]]]
            others = [f for q in formula.quantities if (f := family_of[q]) != part]
            if part in parts and others:
                made_from[part] = others[0]
    for part in made_from:
        while made_from[part] in made_from:
            made_from[part] = made_from[made_from[part]]
    return made_from


def _makes_part(formula: Formula, system: EquationSystem) -> bool:
    """Whether it is one of the formulas that `_like_their_members` has told the outcome of.

    All of such a formula stands for one place, which no two sides of an equation of the text do.
    """
    operation, *rest = formula.tape.instructions[formula.tape.outputs[0]]
    if operation != "quantity" or len(set(formula.places)) > 1:
        return False
    return is_like_members(system.names[formula.quantities[rest[0]]])


def _without_parts(family_of: Sequence[int], stands_in: Mapping[int, int]) -> Sequence[int]:
    """Family numbers without gaps where some families go under the numbers of others."""
    count = max(family_of[len(family_of) - 1], *stands_in) + 1
    own = [family for family in range(count) if family not in stands_in]
    compact = {family: i for i, family in enumerate(own)}
    number = [compact[stands_in.get(family, family)] for family in range(count)]
    return LazySequence([(len(family_of), lambda quantity: number[family_of[quantity]])])


def _for_all_members(of_families: Sequence[T], firsts: Sequence[int], total: int) -> Sequence[T]:
    """What the families have, as a sequence over quantities."""

    def of_family(i: int) -> Callable[[int], T]:
        return lambda _: of_families[i]

    ends = [*firsts[1:], total]
    return LazySequence([(end - first, of_family(i)) for i, (first, end) in enumerate(zip(firsts, ends))])


def _everything(system: EquationSystem) -> Iterator[tuple[int, Formula, bool]]:
    """Equation number (-1 for none), formula, and whether it states physics; those that do come first.

    The first member of a group stands for all of them.
    """
    written = system.written
    for number, item in enumerate(written):
        yield number, item.formula, True
    for number, group in zip(offsets(system.groups, len(written)), system.groups):
        yield number, group.bound.at(0), True
    for item in written:
        for validity in item.valid:
            yield -1, validity.formula, True
    for group in system.groups:
        for condition in group.valid:
            yield -1, merged(condition.bound.at(0)), True
    if not system.guess_groups:
        for guess in system.guesses:
            yield -1, guess.formula, False
    else:
        for formula in _of_guesses(system):
            yield -1, formula, False
    for part in system.limit_parts:
        yield -1, part.bound.at(0) if isinstance(part, LimitGroup) else part.formula, False
    for formula in system.shows:
        yield -1, formula, False


def _of_guesses(system: EquationSystem) -> Iterator[Formula]:
    """The formulas of guesses written out, and one of each group."""
    for guess in system.written_guesses:
        yield guess.formula
    for group in system.guess_groups:
        yield group.bound.at(0)
