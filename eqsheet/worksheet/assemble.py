"""Puts together the public `Solution` from what the stages found."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from functools import partial
from types import MappingProxyType

from eqsheet.diagnostics.diagnostic import Diagnostic, Severity
from eqsheet.model.aggregate_parts import is_part
from eqsheet.syntax.nodes import Statement
from eqsheet.worksheet.alike import fold_alike
from eqsheet.worksheet.ambient_note import ambient_note
from eqsheet.worksheet.branches_taken import branches_taken
from eqsheet.worksheet.deferred import DeferredMapping, DeferredSequence
from eqsheet.worksheet.judge import judge_limits, judge_validity, known_bounds, limits_outside_curves
from eqsheet.worksheet.limits_without_value import limits_without_value
from eqsheet.worksheet.many_limits import failing_limits
from eqsheet.worksheet.prepare import Prepared
from eqsheet.worksheet.run import BlockRun, Run
from eqsheet.worksheet.shown_units import shown_unit
from eqsheet.worksheet.solution import BlockReport, LimitReport, QuantityValue, Solution
from eqsheet.worksheet.trust import digits_of

_RANK = {Severity.ERROR: 0, Severity.WARNING: 1, Severity.NOTE: 2}
# Errors that say the worksheet is sound but no solution was found.
UNSOLVED_CODES = frozenset(
    ("no-solution", "outside-bounds", "outside-curve", "step-read-backwards", "limit-without-value")
)


def assemble(name: str, prepared: Prepared, run: Run | None, timing: Mapping[str, float]) -> Solution:
    """The solution of a worksheet whose blocks have been run; `run` is None where no number may be computed."""
    diagnostics = list(prepared.diagnostics)
    limits: Sequence[LimitReport] = ()
    quantities: Mapping[str, QuantityValue] = {}
    best: dict[str, QuantityValue] = {}
    blocks: Sequence[BlockReport] = ()
    if run is not None:
        diagnostics += run.diagnostics
        diagnostics += known_bounds(prepared, run)
        diagnostics += judge_validity(prepared, run)
        diagnostics += limits_outside_curves(prepared, run)
        diagnostics += limits_without_value(prepared, run)
        limits = judge_limits(prepared, run)
        own: Mapping[int, int]
        if prepared.system.groups:
            blocks, own, quantities = _of_families(prepared, run)
        else:
            own = DeferredMapping(partial(own_statements, prepared, run))
            blocks = DeferredSequence(partial(_blocks, prepared, run))
            quantities = DeferredMapping(partial(_quantities, prepared, run, own))
        best = {
            prepared.system.names[q]: _value(prepared, run, own, q, si, math.inf)
            for q, si in run.best.items()
            if math.isfinite(si) and not is_part(prepared.system.names[q])
        }
    if prepared.system.uses_gauge:
        diagnostics.append(ambient_note(prepared))
    diagnostics = _distinct(diagnostics, prepared.system.names)
    return Solution(
        name,
        _status(diagnostics, limits),
        quantities if prepared.system.groups else MappingProxyType(quantities),
        blocks,
        limits,
        tuple(diagnostics),
        MappingProxyType(best),
        MappingProxyType(dict(timing)),
        prepared.statements,
        () if run is None else DeferredSequence(partial(branches_taken, prepared, run)),
    )


def _status(diagnostics: list[Diagnostic], limits: Sequence[LimitReport]) -> str:
    errors = {d.code for d in diagnostics if d.severity is Severity.ERROR}
    if errors - UNSOLVED_CODES:
        return "invalid"
    if errors:
        return "unsolved"
    return "outside-limits" if failing_limits(limits) else "solved"


def _distinct(diagnostics: list[Diagnostic], names: Sequence[str]) -> list[Diagnostic]:
    """Each diagnostic once, errors first, then by place."""
    if not diagnostics:
        return diagnostics
    unique = fold_alike(list(dict.fromkeys(diagnostics)), names)

    def key(diagnostic: Diagnostic) -> tuple[int, bool, int]:
        span = diagnostic.span
        own = span is not None and span.source.numbered
        return _RANK[diagnostic.severity], not own, span.start if span else 0

    return sorted(unique, key=key)


def _quantities(prepared: Prepared, run: Run, own: Mapping[int, int]) -> dict[str, QuantityValue]:
    """Values in order of showing: those of `show` first, then in the order of the text."""
    system = prepared.system
    places = [(p.statement, p.start, q) for q, p in enumerate(system.first_places)]
    if system.families:
        # The members of a family stand together, in their own order, where the first of them is named.
        earliest: dict[int, tuple[int, int]] = {}
        for statement, start, q in places:
            family = system.families[q]
            earliest[family] = min(earliest.get(family, (statement, start)), (statement, start))
        places = [(*earliest[system.families[q]], q) for _, _, q in places]
    order = [*system.shown, *(q for _, _, q in sorted(places) if q not in system.shown)]
    return {
        system.names[q]: _value(prepared, run, own, q, run.values[q], run.errors[q])
        for q in order
        if math.isfinite(run.values[q]) and not is_part(system.names[q])
    }


def own_statements(prepared: Prepared, run: Run) -> dict[int, int]:
    """The line that is a solved quantity's own, as a statement number: the equation of its block with it alone.

    A quantity alone on a left side goes before one alone on a right side, and the first line before others;
    where there is none the block's first line stands for it.
    """
    equations = prepared.system.equations
    own: dict[int, int] = {}
    for side in (0, 1):
        for block in run.blocks:
            for e in block.equations:
                formula = equations[e].formula
                operation, *rest = formula.tape.instructions[formula.tape.outputs[side]]
                if operation == "quantity":
                    quantity = formula.quantities[rest[0]]
                    if run.block_of.get(quantity) == block.number:
                        own.setdefault(quantity, formula.statement)
    for block in run.blocks:
        first = min(equations[e].place.statement for e in block.equations)
        for quantity in block.unknowns:
            own.setdefault(quantity, first)
    return own


def _value(
    prepared: Prepared,
    run: Run,
    own: Mapping[int, int],
    quantity: int,
    si: float,
    error_bound: float,
) -> QuantityValue:
    system = prepared.system
    block = run.block_of.get(quantity)
    return QuantityValue(
        system.names[quantity],
        si,
        prepared.kinds[quantity],
        block is None,
        block,
        _statement_of(prepared, own, quantity),
        error_bound,
        digits_of(si, error_bound),
        shown_unit(system, prepared.dimensions, prepared.kinds, quantity),
        system.unit_table,
        _tolerance_of(prepared, quantity) if block is None else "",
    )


def _tolerance_of(prepared: Prepared, quantity: int) -> str:
    setter = prepared.setters.get(quantity)
    tolerance = None if setter is None else prepared.system.equations[setter].tolerance
    return "" if tolerance is None else " ".join(tolerance.text.split())


def _statement_of(prepared: Prepared, own: Mapping[int, int], quantity: int) -> Statement | None:
    system = prepared.system
    if quantity in own:
        return system.statements[own[quantity]]
    setter = prepared.setters.get(quantity)
    return None if setter is None else system.statements[system.equations[setter].place.statement]


def _blocks(prepared: Prepared, run: Run) -> Sequence[BlockReport]:
    """Accounts of all blocks."""
    return [_block(prepared, block) for block in run.blocks]


def _block(prepared: Prepared, block: BlockRun) -> BlockReport:
    system = prepared.system
    own = set(block.unknowns)
    others = {q for e in block.equations for q in system.equations[e].formula.quantities if q not in own}
    numbers = sorted(system.equations[e].place.statement for e in block.equations)
    statements = tuple(system.statements[n] for n in numbers)
    unknowns = tuple(system.names[q] for q in block.unknowns)
    depends = tuple(system.names[q] for q in sorted(others))
    return _report(block, unknowns, statements, depends)


def _report(
    block: BlockRun, unknowns: Sequence[str], statements: Sequence[Statement], depends: Sequence[str]
) -> BlockReport:
    result = block.result
    if result is None:
        return BlockReport(block.number, unknowns, statements, depends, block.after)
    return BlockReport(
        block.number,
        unknowns,
        statements,
        depends,
        block.after,
        result.method,
        result.iterations,
        result.residual,
        result.condition,
        result.solved,
        result.outcome,
    )


def _of_families(
    prepared: Prepared, run: Run
) -> tuple[Sequence[BlockReport], Mapping[int, int], Mapping[str, QuantityValue]]:
    """Accounts of blocks, own statements and quantities, made when asked for."""
    from eqsheet.worksheet.group_equations import GroupedEquations
    from eqsheet.worksheet.lazy_solution import (
        LazyQuantities,
        Origins,
        OwnStatements,
        lazy_reports,
        order_of_showing,
    )

    equations = GroupedEquations(prepared.system)
    own = OwnStatements(equations, prepared, run)
    quantities = LazyQuantities(
        prepared.system,
        order_of_showing(prepared, run),
        lambda q: _value(prepared, run, own, q, run.values[q], run.errors[q]),
        Origins(equations, own, prepared, run),
    )
    return lazy_reports(equations, prepared, run.blocks, _report), own, quantities
