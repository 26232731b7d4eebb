"""A note where a curve read backwards has its value at several arguments, and nothing says which is meant."""

from __future__ import annotations

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, note
from eqsheet.model.branches import quantities_under
from eqsheet.model.outside_curve import curve_arguments
from eqsheet.model.tape import Formula
from eqsheet.solve.other_roots import SAME
from eqsheet.worksheet.block_run import BlockRun
from eqsheet.worksheet.guesses import Guesses
from eqsheet.worksheet.prepare import Prepared
from eqsheet.worksheet.shown_units import shown_unit, written_quantity
from eqsheet.worksheet.solve_block import Known, closed_forms


def curve_choice_note(prepared: Prepared, run: BlockRun, known: Known, guesses: Guesses) -> list[Diagnostic]:
    """The note for a block of one equation; none where a guess was given, or bounds leave one solution."""
    result = run.result
    if result is None or not result.solved or result.method != "closed form":
        return []
    (unknown,) = run.unknowns
    formula = result.formulas[0]
    place = _read_at(formula, unknown)
    if place is None or unknown in guesses.near:
        return []
    taken = result.values[0]
    found = [r.values[0] for r in closed_forms(formula, unknown, known, guesses) if r.solved]
    others = sorted({value for value in found if abs(value - taken) > SAME * max(abs(value), abs(taken))})
    if not others:
        return []
    system = prepared.system
    kind = prepared.kinds[unknown]
    unit = shown_unit(system, prepared.dimensions, prepared.kinds, unknown)
    name = system.names[unknown]
    solve = "solves" if len(others) == 1 else "solve"
    rest = " and ".join(written_quantity(unit, kind, value) for value in others)
    return [
        note(
            "curve-with-several-solutions",
            f"`{name}` = {written_quantity(unit, kind, taken)} was taken, and {rest} {solve} this too",
            Label(system.statements[formula.statement].span(*place)),
            help=f"a guess, `{name} near ...`, or bounds (`within`) say which is meant",
        )
    ]


def _read_at(formula: Formula, unknown: int) -> tuple[int, int] | None:
    """Where a curve is read at an argument that holds the unknown; None where none is."""
    tape = formula.tape
    arguments = curve_arguments(tape)
    if not arguments or unknown not in formula.quantities:
        return None
    slot = formula.quantities.index(unknown)
    readers = [reader for reader, _, argument in arguments if slot in quantities_under(tape, argument)]
    return formula.places[readers[0]] if readers else None
