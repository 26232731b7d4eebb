"""A prepared worksheet with knowns set to other values, without preparing it anew.

Another number in the place of a number changes no dimension, no kind and nothing of the structure, so all of these
are taken over. Whatever might change more than that is left to `prepare`: another unit or form of the value, index
sets that a known may size, conditions that a known settles, equations among knowns alone.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TypeVar

from eqsheet.diagnostics.source import Source
from eqsheet.model.branches import settle
from eqsheet.model.check_units import AMBIENT
from eqsheet.model.lower_statements import LoweredStatement, known_name
from eqsheet.model.lowered_cache import LoweredCache
from eqsheet.model.scope import IndexScope
from eqsheet.model.system import EquationItem, Place
from eqsheet.model.tape import Literal
from eqsheet.syntax.nodes import Statement
from eqsheet.syntax.parse import parse_statement
from eqsheet.worksheet.prepare import Prepared

T = TypeVar("T")


@dataclass(frozen=True, slots=True)
class Unchanged:
    """A worksheet prepared without changes, and what changes of its knowns may touch.

    Attributes
    ----------
    prepared : Prepared
    only_values : bool
        Whether the value of a known can change nothing but values and branches.
    conditional : tuple of int
        Numbers of the equations with conditions.
    """

    prepared: Prepared
    only_values: bool
    conditional: tuple[int, ...]


def unchanged(prepared: Prepared) -> Unchanged:
    """The prepared worksheet, ready for `prepare_changed`."""
    system = prepared.system
    return Unchanged(
        prepared,
        prepared.valid_text and not system.families and len(prepared.rows) == len(system.equations),
        tuple(
            number
            for number, item in enumerate(system.written)
            if any(instruction[0] == "if" for instruction in item.formula.tape.instructions)
        ),
    )


def prepare_changed(base: Unchanged, changes: Sequence[str], cache: LoweredCache) -> Prepared | None:
    """The worksheet with each change put in the place of the known of its name.

    Parameters
    ----------
    base : Unchanged
    changes : sequence of str
        Statements.
    cache : LoweredCache
        The one that `base` was prepared with.

    Returns
    -------
    Prepared or None
        None where the changes may touch more than values.
    """
    prepared: Prepared | None = base.prepared
    if changes and not base.only_values:
        return None
    for text in changes:
        if prepared is not None:
            prepared = _with_known(prepared, text, cache)
    if prepared is None or not (changes and base.conditional):
        return prepared
    formulas = list(prepared.formulas)
    for number in base.conditional:
        settled = settle(prepared.system.equations[number].formula, prepared.known_values.get)
        if settled.tape != formulas[number].tape or settled.quantities != formulas[number].quantities:
            return None
        formulas[number] = settled
    return replace(prepared, formulas=tuple(formulas))


def _with_known(base: Prepared, text: str, cache: LoweredCache) -> Prepared | None:
    statement, found = parse_statement(Source("--with", text, numbered=False))
    name = None if statement is None or found else known_name(statement)
    if statement is None or name is None or name == AMBIENT or statement.label:
        return None
    system = base.system
    quantity = system.number(name)
    setter = None if quantity is None else base.setters.get(quantity)
    if quantity is None or setter is None:
        return None
    item = system.equations[setter]
    number = item.place.statement
    old = system.statements[number]
    position = next((i for i, other in enumerate(base.statements) if other is old), None)
    if position is None or known_name(old) != name or old.label or _spoken_of(base, old):
        return None
    # The place in the worksheet stays, and with it section and description.
    new = replace(statement, section=old.section, description=statement.description or old.description)
    before, after = cache.lowered(old, IndexScope(), False), cache.lowered(new, IndexScope(), False)
    if before is None or after is None or not differ_in_numbers_only(before, after):
        return None
    assert after.equation is not None
    changed = replace(
        item,
        formula=replace(
            item.formula, literals=after.equation.formula.literals, places=after.equation.formula.places
        ),
        place=Place(number, after.equation.place.start, after.equation.place.end),
        value=after.equation.value,
    )
    (_, start, end), *_ = after.named
    first_places = tuple(system.first_places)
    if first_places[quantity].statement == number:
        first_places = _put(first_places, quantity, Place(number, start, end))
    return replace(
        base,
        statements=_put(base.statements, position, new),
        system=replace(
            system,
            statements=_put(system.statements, number, new),
            first_places=first_places,
            equations=_put(tuple(system.equations), setter, changed),
        ),
        formulas=_put(tuple(base.formulas), setter, changed.formula),
        known_values={**base.known_values, quantity: changed.value},
    )


def differ_in_numbers_only(before: LoweredStatement, after: LoweredStatement) -> bool:
    """Whether two knowns differ in nothing but their numbers."""
    old, new = before.equation, after.equation
    if old is None or new is None or before.findings or after.findings:
        return False
    return (
        old.formula.tape == new.formula.tape
        and _units(old) == _units(new)
        and before.unit_hints == after.unit_hints
        and old.tolerance is None
        and new.tolerance is None
        and not old.valid
        and not new.valid
    )


def _units(item: EquationItem) -> list[tuple[object, ...]]:
    literals: tuple[Literal, ...] = item.formula.literals
    return [(literal.dimension, literal.kind, literal.unit, literal.index) for literal in literals]


def _spoken_of(base: Prepared, statement: Statement) -> bool:
    """Whether a diagnostic points at the statement."""
    whole = statement.whole
    return any(
        label.span.source is whole.source and label.span.start < whole.end and whole.start <= label.span.end
        for diagnostic in base.diagnostics
        for label in diagnostic.labels
    )


def _put(values: tuple[T, ...], position: int, value: T) -> tuple[T, ...]:
    return (*values[:position], value, *values[position + 1 :])
