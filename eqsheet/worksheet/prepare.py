"""From text to ordered blocks: every stage before any number is computed, in order.

The pass list reads top to bottom in `prepare`. Each pass takes values and gives a value and diagnostics.
"""

from __future__ import annotations

import sys
import time
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from eqsheet.diagnostics.diagnostic import Diagnostic, Severity
from eqsheet.model.branches import settle
from eqsheet.model.build import build_system
from eqsheet.model.dimension_messages import OPEN
from eqsheet.model.equation_group import LARGE_FAMILY
from eqsheet.model.family_units import check_units_by_family
from eqsheet.model.lowered_cache import LoweredCache
from eqsheet.model.system import EquationSystem
from eqsheet.model.tape import Formula
from eqsheet.structure.analyse import analyse
from eqsheet.structure.verdict import Structure
from eqsheet.syntax.nodes import Statement
from eqsheet.units.dimension import Dimension
from eqsheet.worksheet.echoes import without_echoes
from eqsheet.worksheet.group_prepare import (
    all_hold_unknowns,
    knowns_of_groups,
    settle_groups,
    settled_formulas,
    structure_of_groups,
)
from eqsheet.worksheet.structure_messages import structure_diagnostics
from eqsheet.worksheet.unused_templates import unused_template_diagnostics
from eqsheet.worksheet.without_unknowns import Checked, check_without_unknowns


@dataclass(frozen=True)
class Prepared:
    """A worksheet ready for numbers.

    Attributes
    ----------
    statements : tuple of Statement
        All of them, those switched off included.
    system : EquationSystem
    formulas : sequence of Formula
        Of each equation of the system, conditions on knowns alone settled.
    rows : sequence of int
        Equation numbers that take part in the structure: all but those without unknowns and repeated knowns.
    structure : Structure
        Its rows are positions in `rows`, its columns are quantity numbers.
    dimensions : sequence of (Dimension or None)
        By quantity.
    kinds : sequence of str
        ``reading``, ``difference`` or ``plain`` for each quantity.
    known_values : mapping of int to float
    setters : mapping of int to int
        Equation number of the known that sets a quantity.
    diagnostics : tuple of Diagnostic
    valid_text : bool
        No error in text, names, units or dimensions, so that numbers may be computed.
    contested : frozenset of int
        Quantities set to several values, so that nothing can be computed from them.
    """

    statements: tuple[Statement, ...]
    system: EquationSystem
    formulas: Sequence[Formula]
    rows: Sequence[int]
    structure: Structure
    dimensions: Sequence[Dimension | None]
    kinds: Sequence[str]
    known_values: Mapping[int, float]
    setters: Mapping[int, int]
    diagnostics: tuple[Diagnostic, ...]
    valid_text: bool
    timing: Mapping[str, float] = field(default_factory=dict)
    contested: frozenset[int] = frozenset()


def prepare(
    statements: Sequence[Statement],
    earlier: Sequence[Diagnostic],
    cache: LoweredCache | None = None,
    freed: Sequence[str] = (),
    large_family: int = LARGE_FAMILY,
) -> Prepared:
    """Build, infer dimensions, settle, and find the order of solution.

    Parameters
    ----------
    statements : sequence of Statement
    earlier : sequence of Diagnostic
        What reading the text has found; errors among them keep numbers from being computed.
    cache, freed, large_family
        See `build_system`.
    """
    clock = time.perf_counter
    begin = clock()
    system, found = build_system(statements, cache, freed, large_family)
    found = (*found, *unused_template_diagnostics(statements))
    diagnostics = [*earlier, *without_echoes(found, earlier)]
    units = check_units_by_family(system)
    diagnostics += _of_a_whole(units.diagnostics, diagnostics)
    known_values: dict[int, float] = {}
    setters: dict[int, int] = {}
    for number, item in enumerate(system.written):
        if item.known >= 0:
            known_values.setdefault(item.known, item.value)
            setters.setdefault(item.known, number)
    settled: Sequence[Formula]
    if system.groups:
        knowns_of_groups(system, known_values, setters)
        system = settle_groups(system, known_values)
        settled = settled_formulas(system, known_values)
    else:
        settled = tuple(settle(item.formula, known_values.get) for item in system.equations)
    modelled = clock()
    whole = _whole_structure(system, settled, known_values) if system.groups else None
    if whole is not None:
        checked, structure = Checked(range(len(system.equations)), ()), whole
    elif system.groups:
        # Something is to be said of members, which needs them and their order as written.
        return prepare(statements, earlier, cache, freed, sys.maxsize)
    else:
        checked = check_without_unknowns(system, settled, known_values, units.clashing)
        structure = analyse([settled[i].quantities for i in checked.rows], len(system.names))
    diagnostics += checked.diagnostics
    valid_text = not any(d.severity is Severity.ERROR for d in (*earlier, *found, *units.diagnostics))
    if valid_text:
        diagnostics += structure_diagnostics(system, settled, checked.rows, structure, statements)
    done = clock()
    timing = {"model": modelled - begin, "structure": done - modelled}
    return Prepared(
        tuple(statements),
        system,
        settled,
        checked.rows,
        structure,
        units.dimensions,
        units.kinds,
        known_values,
        setters,
        tuple(diagnostics),
        valid_text,
        timing,
        checked.contested,
    )


def _whole_structure(
    system: EquationSystem, settled: Sequence[Formula], known_values: Mapping[int, float]
) -> Structure | None:
    """The order of solution with large families as arrays, None where that is not all there is to say."""
    if not all_hold_unknowns(system, settled, known_values):
        return None
    structure = structure_of_groups(system, settled)
    return structure if structure.square else None


def _of_a_whole(found: Sequence[Diagnostic], earlier: Sequence[Diagnostic]) -> list[Diagnostic]:
    """The findings on units, without those on open dimensions where a broken statement may have fixed them."""
    broken = any(d.severity is Severity.ERROR for d in (*earlier, *found))
    return [d for d in found if not broken or d.code != OPEN]
