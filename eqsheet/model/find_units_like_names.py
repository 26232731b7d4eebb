"""Finds the literals of a worksheet whose unit ends in a name that counts where they stand."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from functools import partial

from eqsheet.model.domains import visible
from eqsheet.model.families import Numbering
from eqsheet.model.gather import Work
from eqsheet.model.tape import Literal
from eqsheet.model.units_like_names import UnitLikeName, units_like_names
from eqsheet.syntax import nodes as syntax
from eqsheet.syntax.walk import walk


def find_units_like_names(work: Iterable[Work], numbering: Numbering) -> tuple[UnitLikeName, ...]:
    """Those in equations, limits and guesses, each once."""
    found: dict[tuple[int, int], UnitLikeName] = {}
    for one in work:
        for candidate in units_like_names(one.number, _literals(one), partial(_named, one, numbering)):
            found.setdefault((candidate.statement, candidate.start), candidate)
    return tuple(found.values())


def _literals(one: Work) -> Iterator[Literal]:
    lowered = one.lowered
    if lowered.equation is not None:
        yield from lowered.equation.formula.literals
    if lowered.limit is not None:
        yield from lowered.limit.formula.literals
    for guess in lowered.guesses:
        yield from guess.formula.literals


def _named(one: Work, numbering: Numbering, symbol: str) -> int | None:
    """Number of the quantity that a symbol would name, -1 for an index that is a number, None for neither."""
    statement = one.place.statement
    if symbol in visible(one.domain.sets):
        return None if one.domain.sets[symbol] else -1
    if " for " in statement.line.text and any(
        isinstance(n, syntax.IndexClause) and n.index == symbol and isinstance(n.over, syntax.Range)
        for n in walk(statement.node)
    ):
        return -1
    key = one.place.scope.resolve(symbol)
    if isinstance(key, str):
        return numbering.plain.get(key)
    family = numbering.families.get(key.path)
    return None if family is None else family.first
