"""What curves have to do with a block that was not solved, or a limit that has no value."""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping, Sequence

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.model.branches import literal_values, quantities_under
from eqsheet.model.evaluate import evaluate
from eqsheet.model.interpolant import Interpolant
from eqsheet.model.outside_curve import HELP, curve_arguments, outside_curve, range_text, written
from eqsheet.model.system import EquationSystem
from eqsheet.model.tape import Formula, Tape, operands_of
from eqsheet.worksheet.places import quoted

#: Codes that say a curve makes a solution impossible, wherever the search starts.
OF_CURVES = frozenset(("outside-curve", "step-read-backwards"))
# How near to an end of a range a search counts as stopped there, relative to the range.
_AT_THE_END = 1e-6
_MOST_CURVES = 3


def outside_curve_diagnostic(
    system: EquationSystem, formula: Formula, values: Mapping[int, float], wanted: Sequence[str] = ()
) -> Diagnostic | None:
    """The error that a formula reads a curve outside its range at these values; None where it does not.

    Parameters
    ----------
    values : mapping
        Quantity number to SI value, nan where not known.
    wanted : sequence of str
        Names of the quantities that are not found because of it.
    """
    tape = formula.tape
    if not curve_arguments(tape):
        return None
    results = evaluate(tape, [values[q] for q in formula.quantities], literal_values(formula))
    found = outside_curve(tape, results)
    if found is None:
        return None
    place = Label(system.statements[formula.statement].span(*found.place(formula)))
    # Where nothing is wanted, as in a limit, the members it is about tell it from its like.
    members = [name for name in (system.names[q] for q in formula.quantities) if "[" in name]
    about = (f"this is about {quoted(members)}",) if members else ()
    notes = (f"{quoted(wanted)} cannot be found",) if wanted else about
    return error("outside-curve", found.message, place, notes=notes, help=HELP)


def stepped_diagnostic(
    system: EquationSystem, formulas: Sequence[Formula], unknowns: Collection[int]
) -> Diagnostic | None:
    """The error that an unknown stands in arguments of curves by steps only; None where none does."""
    with_steps = [formula for formula in formulas if _has_steps(formula.tape)]
    for unknown in sorted(unknowns) if with_steps else ():
        readers = [
            (formula, reader, argument)
            for formula in with_steps
            if unknown in formula.quantities
            for reader, argument in _stepped(formula, formula.quantities.index(unknown))
        ]
        if readers and not any(_stands_free(formula, unknown) for formula in formulas):
            formula, reader, argument = readers[0]
            name = formula.tape.instructions[reader][-1].heading.name
            return error(
                "step-read-backwards",
                f"`{system.names[unknown]}` cannot be found from `{name}`, which goes by steps",
                Label(system.statements[formula.statement].span(*formula.places[argument])),
                notes=("one value of such a curve stands for a whole range of arguments",),
                help=f"find `{system.names[unknown]}` by another equation, or read the curve smooth or `by line`",
            )
    return None


def _has_steps(tape: Tape) -> bool:
    """Whether a curve by steps is read."""
    return any(tape.instructions[reader][-1].is_stepped for reader, _, _ in curve_arguments(tape))


def _stepped(formula: Formula, slot: int) -> Iterator[tuple[int, int]]:
    tape = formula.tape
    for reader, _, argument in curve_arguments(tape):
        if tape.instructions[reader][-1].is_stepped and slot in quantities_under(tape, argument):
            yield reader, argument


def _stands_free(formula: Formula, unknown: int) -> bool:
    """Whether the quantity is reached from an output past curves by steps."""
    tape = formula.tape
    if unknown not in formula.quantities:
        return False
    leaf = ("quantity", formula.quantities.index(unknown))
    free = [False] * len(tape.instructions)
    for i, instruction in enumerate(tape.instructions):
        if instruction[0] in ("curve", "surface") and instruction[-1].is_stepped:
            continue
        free[i] = instruction == leaf or any(free[a] for a in operands_of(instruction))
    return any(free[o] for o in tape.outputs)


def curve_notes(formulas: Sequence[Formula], values: Mapping[int, float], own: Collection[int]) -> list[str]:
    """Ranges of the curves read at unknowns of a failed block, and where the search stopped at an end of one."""
    notes: list[str] = []
    for formula in formulas:
        tape = formula.tape
        results: Sequence[float] = ()
        for reader, position, argument in curve_arguments(tape):
            if not any(formula.quantities[k] in own for k in quantities_under(tape, argument)):
                continue
            if not results:
                results = evaluate(tape, [values[q] for q in formula.quantities], literal_values(formula))
            note = _range_note(tape.instructions[reader][-1], position, results[argument])
            if note not in notes:
                notes.append(note)
    return notes[:_MOST_CURVES]


def _range_note(interpolant: Interpolant, position: int, value: float) -> str:
    heading = interpolant.heading
    name = heading.arguments[position]
    text = f"`{heading.name}` has values for {name} in {range_text(interpolant, position)}"
    low, high = interpolant.ranges[position]
    if interpolant.is_stepped:
        return f"{text}; it goes by steps, and it may be that none of its values leads back to itself"
    span = high - low
    for end in (low, high):
        if abs(value - end) <= _AT_THE_END * span:
            unit = heading.units[position]
            return f"{text}; the search stopped at its end, {name} = {written(end, unit)}"
    return text
