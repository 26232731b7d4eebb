"""Puts together the public `Solution` from what the stages found."""

from __future__ import annotations

import math
from collections.abc import Mapping
from types import MappingProxyType

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, Severity, note
from eqsheet.model.system import EquationSystem
from eqsheet.syntax.nodes import Statement
from eqsheet.units.display import format_value
from eqsheet.worksheet.failure_messages import digits_of
from eqsheet.worksheet.judge import judge_limits, judge_validity, known_bounds
from eqsheet.worksheet.own_line import own_line
from eqsheet.worksheet.places import span_of
from eqsheet.worksheet.prepare import Prepared
from eqsheet.worksheet.run import BlockRun, Run
from eqsheet.worksheet.shown_units import shown_unit
from eqsheet.worksheet.solution import BlockReport, LimitReport, QuantityValue, Solution

_RANK = {Severity.ERROR: 0, Severity.WARNING: 1, Severity.NOTE: 2}
# Errors that say the worksheet is sound but no solution was found.
UNSOLVED_CODES = frozenset(("no-solution", "outside-bounds"))


def assemble(name: str, prepared: Prepared, run: Run | None, timing: Mapping[str, float]) -> Solution:
    """The solution of a worksheet whose blocks have been run; `run` is None where no number may be computed."""
    diagnostics = list(prepared.diagnostics)
    limits: tuple[LimitReport, ...] = ()
    quantities: dict[str, QuantityValue] = {}
    best: dict[str, QuantityValue] = {}
    blocks: tuple[BlockReport, ...] = ()
    if run is not None:
        diagnostics += run.diagnostics
        diagnostics += known_bounds(prepared, run)
        diagnostics += judge_validity(prepared, run)
        limits = judge_limits(prepared, run)
        blocks = tuple(_block(prepared, block) for block in run.blocks)
        quantities = _quantities(prepared, run)
        best = {
            prepared.system.names[q]: _value(prepared, run, q, si, math.inf)
            for q, si in run.best.items()
            if math.isfinite(si)
        }
    if prepared.system.uses_gauge:
        diagnostics.append(_ambient_note(prepared.system))
    diagnostics = _distinct(diagnostics)
    return Solution(
        name,
        _status(diagnostics, limits),
        MappingProxyType(quantities),
        blocks,
        limits,
        tuple(diagnostics),
        MappingProxyType(best),
        MappingProxyType(dict(timing)),
        prepared.statements,
    )


def _status(diagnostics: list[Diagnostic], limits: tuple[LimitReport, ...]) -> str:
    errors = {d.code for d in diagnostics if d.severity is Severity.ERROR}
    if errors - UNSOLVED_CODES:
        return "invalid"
    if errors:
        return "unsolved"
    return "solved" if all(limit.holds for limit in limits) else "outside-limits"


def _distinct(diagnostics: list[Diagnostic]) -> list[Diagnostic]:
    """Each diagnostic once, errors first, then by place."""
    unique = list(dict.fromkeys(diagnostics))

    def key(diagnostic: Diagnostic) -> tuple[int, bool, int]:
        span = diagnostic.span
        own = span is not None and span.source.numbered
        return _RANK[diagnostic.severity], not own, span.start if span else 0

    return sorted(unique, key=key)


def _quantities(prepared: Prepared, run: Run) -> dict[str, QuantityValue]:
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
        system.names[q]: _value(prepared, run, q, run.values[q], run.errors[q])
        for q in order
        if math.isfinite(run.values[q])
    }


def _value(prepared: Prepared, run: Run, quantity: int, si: float, error_bound: float) -> QuantityValue:
    system = prepared.system
    block = run.block_of.get(quantity)
    return QuantityValue(
        system.names[quantity],
        si,
        prepared.kinds[quantity],
        block is None,
        block,
        _statement_of(prepared, run, quantity),
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


def _statement_of(prepared: Prepared, run: Run, quantity: int) -> Statement | None:
    system = prepared.system
    block = run.block_of.get(quantity)
    if block is not None:
        places = [system.equations[e].place for e in run.blocks[block - 1].equations]
        statements = [system.statements[place.statement] for place in places]
        return own_line(system.names[quantity], statements) or statements[0]
    setter = prepared.setters.get(quantity)
    return None if setter is None else system.statements[system.equations[setter].place.statement]


def _block(prepared: Prepared, block: BlockRun) -> BlockReport:
    system = prepared.system
    own = set(block.unknowns)
    others = {q for e in block.equations for q in system.equations[e].formula.quantities if q not in own}
    statements = tuple(system.statements[system.equations[e].place.statement] for e in block.equations)
    unknowns = tuple(system.names[q] for q in block.unknowns)
    depends = tuple(system.names[q] for q in sorted(others))
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
        "" if result.outcome is None else result.outcome.full,
    )


def _ambient_note(system: EquationSystem) -> Diagnostic:
    text = format_value(system.ambient / 1000.0)
    given = system.number("ambient")
    if given is None:
        place: tuple[Label, ...] = ()
        said = f"gauge pressures stand on the standard atmosphere, {text} kPa"
        help = "write `ambient = 84 kPa` or the like for another place"
    else:
        place = (Label(span_of(system, system.first_places[given])),)
        said = f"gauge pressures stand on the ambient pressure, {text} kPa"
        help = ""
    return note("ambient-pressure", said, *place, help=help)
