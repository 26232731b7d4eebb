"""From text to ordered blocks: every stage before any number is computed, in order.

The pass list reads top to bottom in `prepare`. Each pass takes values and gives a value and diagnostics.
"""

from __future__ import annotations

import time
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from eqsheet.diagnostics.diagnostic import Diagnostic, Severity
from eqsheet.model.branches import settle
from eqsheet.model.build import build_system
from eqsheet.model.dimension_messages import OPEN
from eqsheet.model.family_units import check_units_by_family
from eqsheet.model.lowered_cache import LoweredCache
from eqsheet.model.system import EquationSystem
from eqsheet.model.tape import Formula
from eqsheet.structure.analyse import analyse
from eqsheet.structure.verdict import Structure
from eqsheet.syntax.nodes import Statement
from eqsheet.units.dimension import Dimension
from eqsheet.worksheet.echoes import without_echoes
from eqsheet.worksheet.structure_messages import structure_diagnostics
from eqsheet.worksheet.without_unknowns import Checked, check_without_unknowns


@dataclass(frozen=True)
class Prepared:
    """A worksheet ready for numbers.

    Attributes
    ----------
    statements : tuple of Statement
        All of them, those switched off included.
    system : EquationSystem
    formulas : tuple of Formula
        Of each equation of the system, conditions on knowns alone settled.
    rows : tuple of int
        Equation numbers that take part in the structure: all but those without unknowns and repeated knowns.
    structure : Structure
        Its rows are positions in `rows`, its columns are quantity numbers.
    dimensions : tuple of (Dimension or None)
        By quantity.
    kinds : tuple of str
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
    formulas: tuple[Formula, ...]
    rows: tuple[int, ...]
    structure: Structure
    dimensions: tuple[Dimension | None, ...]
    kinds: tuple[str, ...]
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
) -> Prepared:
    """Build, infer dimensions, settle, and find the order of solution.

    Parameters
    ----------
    statements : sequence of Statement
    earlier : sequence of Diagnostic
        What reading the text has found; errors among them keep numbers from being computed.
    cache, freed
        See `build_system`.
    """
    clock = time.perf_counter
    begin = clock()
    system, found = build_system(statements, cache, freed)
    diagnostics = [*earlier, *without_echoes(found, earlier)]
    units = check_units_by_family(system)
    diagnostics += _of_a_whole(units.diagnostics, diagnostics)
    known_values: dict[int, float] = {}
    setters: dict[int, int] = {}
    for number, item in enumerate(system.equations):
        if item.known >= 0:
            known_values.setdefault(item.known, item.value)
            setters.setdefault(item.known, number)
    settled = tuple(settle(item.formula, known_values.get) for item in system.equations)
    modelled = clock()
    checked: Checked = check_without_unknowns(system, settled, known_values, units.clashing)
    diagnostics += checked.diagnostics
    structure = analyse([settled[i].quantities for i in checked.rows], len(system.names))
    valid_text = not any(d.severity is Severity.ERROR for d in (*earlier, *found, *units.diagnostics))
    if valid_text:
        diagnostics += structure_diagnostics(system, settled, checked.rows, structure)
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


def _of_a_whole(found: Sequence[Diagnostic], earlier: Sequence[Diagnostic]) -> list[Diagnostic]:
    """The findings on units, without those on open dimensions where a broken statement may have fixed them."""
    broken = any(d.severity is Severity.ERROR for d in (*earlier, *found))
    return [d for d in found if not broken or d.code != OPEN]
