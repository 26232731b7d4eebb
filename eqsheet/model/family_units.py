"""Dimensions and kinds inferred once a family: all its members are one quantity to the unit check."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, replace

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.model.bind import merged
from eqsheet.model.check_units import check_units
from eqsheet.model.system import EquationSystem
from eqsheet.model.tape import Formula
from eqsheet.units.dimension import Dimension

_SUBSCRIPTS = re.compile(r"\[[^\]]*\]")


@dataclass(frozen=True, slots=True)
class FamilyUnits:
    """What the unit check says, by quantity.

    Attributes
    ----------
    dimensions : tuple of (Dimension or None)
    kinds : tuple of str
        ``reading``, ``difference`` or ``plain``.
    clashing : frozenset of int
        Equations whose dimensions do not fit.
    diagnostics : tuple of Diagnostic
    """

    dimensions: tuple[Dimension | None, ...]
    kinds: tuple[str, ...]
    clashing: frozenset[int]
    diagnostics: tuple[Diagnostic, ...]


def check_units_by_family(system: EquationSystem) -> FamilyUnits:
    """Infer the dimensions and kinds of all quantities of a system."""
    formulas: list[Formula] = []
    stands_for: list[int] = []
    physical = 0
    seen: set[object] = set()
    # Families are numbered without gaps: a number that no formula mentions would count as a quantity.
    compact = {first: i for i, first in enumerate(sorted(set(system.families)))}
    family_of = tuple([compact[first] for first in system.families])
    for number, formula, is_physical in _everything(system):
        if system.families:
            numbers = tuple([family_of[q] for q in formula.quantities])
            key = (formula.statement, formula.tape, numbers)
            if key in seen:
                continue
            seen.add(key)
            formula = merged(replace(formula, quantities=numbers))
        formulas.append(formula)
        stands_for.append(number)
        physical += is_physical
    names = system.names
    if system.families:
        names = tuple([_SUBSCRIPTS.sub("", names[first]) for first in compact])
    units = check_units(formulas, system.statements, names, range(physical, len(formulas)))
    dimensions = units.dimensions.dimensions
    kinds = tuple(["plain" if kind == "unknown" else kind for kind in units.kinds.kinds])
    if system.families:
        dimensions = tuple([dimensions[f] for f in family_of])
        kinds = tuple([kinds[f] for f in family_of])
    clashing = frozenset(stands_for[clash.formula] for clash in units.dimensions.clashes)
    return FamilyUnits(dimensions, kinds, clashing - {-1}, units.diagnostics)


def _everything(system: EquationSystem) -> Iterator[tuple[int, Formula, bool]]:
    """Equation number (-1 for none), formula, and whether it states physics; those that do come first."""
    for number, item in enumerate(system.equations):
        yield number, item.formula, True
    for item in system.equations:
        for validity in item.valid:
            yield -1, validity.formula, True
    for guess in system.guesses:
        yield -1, guess.formula, False
    for limit in system.limits:
        yield -1, limit.formula, False
    for formula in system.shows:
        yield -1, formula, False
