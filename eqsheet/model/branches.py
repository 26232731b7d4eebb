"""Branches of formulas: which are settled by what is known, and which depend on what is being solved for.

A curve by steps that is read at an unknown branches too: each step is a branch, on which its value is fixed.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Collection, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

from eqsheet.model.evaluate import evaluate, used_instructions
from eqsheet.model.interpolant import Interpolant
from eqsheet.model.interpolation import step_at
from eqsheet.model.outside_curve import curve_arguments
from eqsheet.model.specialise import conditions, specialise_formula
from eqsheet.model.tape import Formula, Literal, Tape, operands_of


def literal_values(formula: Formula) -> list[float]:
    """SI values of the formula's literals, in order."""
    return [literal.value for literal in formula.literals]


def settle(formula: Formula, known: Callable[[int], float | None]) -> Formula:
    """The formula without the conditions that known quantities decide.

    A condition that has no value there is left undecided.

    Parameters
    ----------
    known : callable
        Quantity number to its SI value, None where it has none. A `dict.get` will do.
    """
    tape = formula.tape
    if not conditions(tape):
        return formula
    values = [known(q) for q in formula.quantities]
    results: list[Any] | None = None
    branches: dict[int, bool] = {}
    for condition in conditions(tape):
        if all(values[k] is not None for k in quantities_under(tape, condition.condition)):
            if results is None:
                numbers = [float("nan") if v is None else v for v in values]
                results = evaluate(tape, numbers, literal_values(formula))
            truth = results[condition.condition]
            if truth == truth:
                branches[condition.instruction] = truth is True
    return specialise_formula(formula, branches) if branches else formula


def quantities_under(tape: Tape, instruction: int) -> frozenset[int]:
    """Local numbers of the quantities an instruction depends on."""
    found: set[int] = set()
    seen = {instruction}
    stack = [instruction]
    while stack:
        i = stack.pop()
        entry: tuple[Any, ...] = tape.instructions[i]
        if entry[0] == "quantity":
            found.add(entry[1])
        for operand in operands_of(entry):
            if operand not in seen:
                seen.add(operand)
                stack.append(operand)
    return frozenset(found)


@dataclass(frozen=True, slots=True)
class Switch:
    """One undecided ``if``, or curve by steps, of a group of formulas.

    Attributes
    ----------
    formula, instruction : int
        Which formula, and its instruction there.
    count : int
        Number of branches.
    """

    formula: int
    instruction: int
    count: int = 2


def switches(formulas: Sequence[Formula], unknowns: Collection[int] = ()) -> tuple[Switch, ...]:
    """All undecided ``if`` instructions of the formulas, in order, and the curves by steps read at `unknowns`."""
    found = []
    for number, formula in enumerate(formulas):
        found += [Switch(number, condition.instruction) for condition in conditions(formula.tape)]
        readers = {
            reader: len(formula.tape.instructions[reader][-1].pieces)
            for reader, _, argument in curve_arguments(formula.tape)
            if formula.tape.instructions[reader][-1].is_stepped
            and any(formula.quantities[k] in unknowns for k in quantities_under(formula.tape, argument))
        }
        found += [Switch(number, reader, count) for reader, count in readers.items()]
    return tuple(found)


def chosen_branches(
    formulas: Sequence[Formula], found: Sequence[Switch], values: Callable[[int], float]
) -> tuple[int, ...]:
    """The branch each switch takes at given values, 0 for the first; 0 too where the switch does not matter.

    Where a condition has no value, or a curve by steps is read outside its range, its number of branches, which
    stands for none of them.

    Parameters
    ----------
    values : callable
        Quantity number to SI value.
    """
    taken: dict[tuple[int, int], int] = {}
    for number, formula in enumerate(formulas):
        tape = formula.tape
        results = evaluate(tape, [values(q) for q in formula.quantities], literal_values(formula))
        for instruction, truth in _reached(tape, results).items():
            taken[number, instruction] = (0 if truth else 1) if truth == truth else 2
        if curve_arguments(tape):
            used = used_instructions(tape, results)
            for switch in found:
                if switch.formula == number and used[switch.instruction]:
                    operation, *operands = tape.instructions[switch.instruction]
                    if operation in ("curve", "surface"):
                        *arguments, interpolant = operands
                        taken[number, switch.instruction] = _step(
                            interpolant, [results[a] for a in arguments]
                        )
    return tuple(taken.get((switch.formula, switch.instruction), 0) for switch in found)


def _step(interpolant: Interpolant, arguments: Sequence[float]) -> int:
    try:
        return step_at(interpolant, arguments)
    except ValueError:
        return len(interpolant.pieces)


def conditions_met(formula: Formula, values: Callable[[int], float]) -> list[tuple[int, bool]]:
    """The conditions that decide a formula at given values: (instruction, truth), in the order of the tape.

    Conditions in a branch not taken are left out, and so are those without a value.
    """
    tape = formula.tape
    results = evaluate(tape, [values(q) for q in formula.quantities], literal_values(formula))
    reached = _reached(tape, results)
    return sorted(
        {tape.instructions[i][1]: truth is True for i, truth in reached.items() if truth == truth}.items()
    )


def _reached(tape: Tape, results: Sequence[Any]) -> Mapping[int, bool | float]:
    """The ``if`` instructions that the outputs pass through, with the truth of their conditions, nan for none."""
    reached: dict[int, bool | float] = {}
    seen: set[int] = set()
    stack = list(tape.outputs)
    while stack:
        i = stack.pop()
        if i in seen:
            continue
        seen.add(i)
        entry: tuple[Any, ...] = tape.instructions[i]
        if entry[0] == "if":
            _, condition, a, b = entry
            reached[i] = results[condition]
            stack += [condition, a if reached[i] is True else b]
        else:
            stack.extend(operands_of(entry))
    return reached


def held_conditions(
    formulas: Sequence[Formula], found: Sequence[Switch], branches: Sequence[int]
) -> tuple[Mapping[int, bool], ...] | None:
    """Truth of the conditions that decide each formula with switches held at their branches, by instruction.

    None where one condition would have to hold and not to hold. Conditions in a branch not taken are left out, and
    so are switches whose branch is negative, which are not held.
    """
    taken = [
        {s.instruction: b == 0 for s, b in zip(found, branches) if s.formula == number and b >= 0}
        for number in range(len(formulas))
    ]
    conditions_of: list[Mapping[int, bool]] = []
    for formula, own in zip(formulas, taken):
        truth: dict[int, bool] = {}
        seen: set[int] = set()
        stack = list(formula.tape.outputs)
        while stack:
            i = stack.pop()
            if i in seen:
                continue
            seen.add(i)
            entry: tuple[Any, ...] = formula.tape.instructions[i]
            if entry[0] != "if":
                stack.extend(operands_of(entry))
                continue
            _, condition, a, b = entry
            stack.append(condition)
            if i in own:
                if truth.setdefault(condition, own[i]) != own[i]:
                    return None
                stack.append(a if own[i] else b)
        conditions_of.append(truth)
    return tuple(conditions_of)


def hold(
    formulas: Sequence[Formula], found: Sequence[Switch], branches: Sequence[int]
) -> tuple[Formula, ...]:
    """The formulas with every switch held at its branch."""
    held: dict[int, dict[int, bool]] = {}
    fixed = list(formulas)
    for switch, branch in zip(found, branches):
        taken = held.setdefault(switch.formula, {})
        if formulas[switch.formula].tape.instructions[switch.instruction][0] == "if":
            taken[switch.instruction] = branch == 0
        else:
            fixed[switch.formula] = _on_step(fixed[switch.formula], switch.instruction, branch)
    return tuple(
        specialise_formula(formula, held[number]) if number in held else formula
        for number, formula in enumerate(fixed)
    )


def _on_step(formula: Formula, reader: int, branch: int) -> Formula:
    """The formula with the value of a curve by steps written in its place; nan outside the range."""
    tape = formula.tape
    interpolant: Interpolant = tape.instructions[reader][-1]
    value = interpolant.pieces[branch][0] if branch < len(interpolant.pieces) else math.nan
    literal = Literal(value, interpolant.heading.dimension, "plain", *formula.places[reader])
    instructions = list(tape.instructions)
    instructions[reader] = ("literal", tape.literals)
    return replace(
        formula,
        tape=Tape(tuple(instructions), tape.outputs, tape.quantities, tape.literals + 1),
        literals=(*formula.literals, literal),
    )
