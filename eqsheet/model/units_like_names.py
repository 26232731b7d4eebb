"""Warns of units whose last symbol is a quantity or an index too, where it might as well be meant: ``10 bar/L``.

The rules say that a unit reaches as far as it can. Where only that reading fits the other lines nobody needs to be
told; where only the other one fits the clash of dimensions says so.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, warning
from eqsheet.model.infer_dimensions import DimensionResult, infer_dimensions
from eqsheet.model.tape import Formula, Literal
from eqsheet.syntax.nodes import Statement
from eqsheet.units.dimension import DIMENSIONLESS, Dimension
from eqsheet.units.registry import UnitProblem, UnitTable

CODE = "unit-like-name"
#: Formulas looked at in all, each as often as a unit is in doubt; beyond that nothing is said.
MOST_EFFORT = 200_000
_LAST_SYMBOL = re.compile(r"(.+)([*/·])([^\W\d]\w*)")


@dataclass(frozen=True, slots=True)
class UnitLikeName:
    """A literal whose unit ends in the name of a quantity or an index.

    Attributes
    ----------
    statement, start : int
        Which literal it is.
    rest, operator, symbol : str
        Its unit, taken apart: ``bar``, ``/``, ``L``.
    quantity : int
        Number of the quantity, -1 for an index.
    """

    statement: int
    start: int
    rest: str
    operator: str
    symbol: str
    quantity: int


def units_like_names(
    statement: int, literals: Iterable[Literal], named: Callable[[str], int | None]
) -> Iterator[UnitLikeName]:
    """The literals of a statement whose units end in a name.

    Parameters
    ----------
    named : callable
        Symbol to the number of the quantity of that name there, -1 for an index, None for neither.
    """
    for literal in literals:
        parts = _LAST_SYMBOL.fullmatch(literal.unit)
        if parts is None:
            continue
        quantity = named(parts[3])
        if quantity is not None:
            yield UnitLikeName(statement, literal.start, parts[1], parts[2], parts[3], quantity)


def doubtful_units(
    candidates: Sequence[UnitLikeName],
    formulas: Sequence[Formula],
    result: DimensionResult,
    statements: Sequence[Statement],
    unit_table: UnitTable,
) -> tuple[Diagnostic, ...]:
    """A warning for each unit that would fit as a quantity or an index too.

    Parameters
    ----------
    candidates : sequence of UnitLikeName
        Quantities are numbered as in `formulas`.
    """
    if not candidates or result.clashes or len(candidates) * len(formulas) > MOST_EFFORT:
        return ()
    return tuple(
        _warning(one, literal, statements[one.statement])
        for one in candidates
        if (literal := _literal(one, formulas)) is not None
        and _fits(one, literal, formulas, result, unit_table)
    )


def _literal(one: UnitLikeName, formulas: Sequence[Formula]) -> Literal | None:
    own = (f.literals for f in formulas if f.statement == one.statement)
    return next((literal for literals in own for literal in literals if _is(literal, one)), None)


def _is(literal: Literal, one: UnitLikeName) -> bool:
    return literal.start == one.start and bool(literal.unit)


def _fits(
    one: UnitLikeName,
    literal: Literal,
    formulas: Sequence[Formula],
    result: DimensionResult,
    unit_table: UnitTable,
) -> bool:
    """Whether the dimensions agree as well with the symbol as a name."""
    unit = unit_table.resolve(one.symbol, ((one.symbol, Fraction(1)),))
    named: Dimension | None = DIMENSIONLESS if one.quantity < 0 else result.dimensions[one.quantity]
    if isinstance(unit, UnitProblem) or named is None:
        return False
    factor = named / unit.dimension
    if factor == DIMENSIONLESS:
        return True
    other = literal.dimension / factor if one.operator == "/" else literal.dimension * factor
    # The literal may stand in several formulas, as for members told apart, and several times in one, as in a sum.
    read = [
        replace(f, literals=tuple(replace(x, dimension=other) if _is(x, one) else x for x in f.literals))
        if f.statement == one.statement
        else f
        for f in formulas
    ]
    return not infer_dimensions(read, len(result.dimensions)).clashes


def _warning(one: UnitLikeName, literal: Literal, statement: Statement) -> Diagnostic:
    text = statement.line.text[literal.start : literal.end]
    number = text[: len(text) - len(literal.unit)].rstrip()
    what = "an index" if one.quantity < 0 else "a quantity"
    return warning(
        CODE,
        f"`{one.symbol}` is read as a unit in `{text}`, and is {what} too",
        Label(statement.span(literal.start, literal.end)),
        help=f"if {what} is meant, put spaces: `{number} {one.rest} {one.operator} {one.symbol}`; "
        "a shown unit of the result, `show x in ...`, settles it for the unit",
    )
