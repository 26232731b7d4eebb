"""A worksheet prepared again after an edit of its text that has changed nothing but the numbers of knowns.

The usual edit is of this kind. Dimensions, kinds and structure are taken over from the text before, as in
`prepare_changed`; statements and places are those of the new text.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from eqsheet.model.branches import settle
from eqsheet.model.check_units import AMBIENT
from eqsheet.model.lower_statements import known_name
from eqsheet.model.lowered_cache import LoweredCache
from eqsheet.model.scope import IndexScope
from eqsheet.model.system import EquationItem, Place
from eqsheet.syntax.nodes import Include, Statement
from eqsheet.worksheet.prepare import Prepared
from eqsheet.worksheet.prepare_changed import Unchanged, differ_in_numbers_only

# An edit that touches more statements than this gains little from being looked at one by one.
MOST_CHANGED = 8


def prepare_edited(base: Unchanged, statements: Sequence[Statement], cache: LoweredCache) -> Prepared | None:
    """The worksheet of `statements`, prepared from what is known of the text before.

    Parameters
    ----------
    base : Unchanged
        The text before.
    statements : sequence of Statement
        Of the new text, which was read without a finding.
    cache : LoweredCache
        The one that `base` was prepared with, last of all.

    Returns
    -------
    Prepared or None
        None where the edit may touch more than values.
    """
    before = base.prepared
    if not base.only_values or before.diagnostics or len(before.statements) != len(statements):
        return None
    changed = []
    for old, new in zip(before.statements, statements):
        if old.body or new.body or isinstance(new.node, Include) or getattr(new.node, "path", None):
            return None
        if old.line.text != new.line.text:
            changed.append((old, new))
            if len(changed) > MOST_CHANGED:
                return None
    system = before.system
    if not _same(system.statements, [s for s in before.statements if not s.off]):
        return None
    used = tuple([s for s in statements if not s.off])
    number_of = {id(statement): number for number, statement in enumerate(system.statements)}
    equations, formulas = list(system.equations), list(before.formulas)
    first_places, values = list(system.first_places), dict(before.known_values)
    for old, new in changed:
        if old.off and new.off:
            continue
        found = None if old.off or new.off else _known(before, old, new, number_of[id(old)], cache)
        if found is None:
            return None
        quantity, item, place = found
        setter = before.setters[quantity]
        equations[setter], values[quantity] = item, item.value
        formulas[setter] = item.formula
        if first_places[quantity].statement == place.statement:
            first_places[quantity] = place
    for number in base.conditional if changed else ():
        settled = settle(equations[number].formula, values.get)
        if settled.tape != formulas[number].tape or settled.quantities != formulas[number].quantities:
            return None
        formulas[number] = settled
    return replace(
        before,
        statements=tuple(statements),
        system=replace(system, statements=used, first_places=tuple(first_places), equations=tuple(equations)),
        formulas=tuple(formulas),
        known_values=values,
    )


def _same(a: Sequence[Statement], b: Sequence[Statement]) -> bool:
    return len(a) == len(b) and all(x is y for x, y in zip(a, b))


def _known(
    before: Prepared, old: Statement, new: Statement, number: int, cache: LoweredCache
) -> tuple[int, EquationItem, Place] | None:
    """Quantity, equation and first place of a known whose number has changed; None where more has."""
    name = known_name(new)
    if name is None or name == AMBIENT or known_name(old) != name or old.label != new.label:
        return None
    quantity = before.system.number(name)
    setter = None if quantity is None else before.setters.get(quantity)
    if quantity is None or setter is None:
        return None
    item = before.system.equations[setter]
    first, then = cache.lowered(old, IndexScope(), False), cache.lowered(new, IndexScope(), False)
    if item.place.statement != number or first is None or then is None:
        return None
    if not differ_in_numbers_only(first, then):
        return None
    assert then.equation is not None
    equation = then.equation
    formula = replace(item.formula, literals=equation.formula.literals, places=equation.formula.places)
    place = Place(number, equation.place.start, equation.place.end)
    (_, start, end), *_ = then.named
    return (
        quantity,
        replace(item, formula=formula, place=place, value=equation.value),
        Place(number, start, end),
    )
