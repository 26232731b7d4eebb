"""Branches of formulas: which are settled by what is known, and which depend on what is being solved for."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from eqsheet.model.evaluate import evaluate
from eqsheet.model.specialise import conditions, specialise_formula
from eqsheet.model.tape import Formula, Tape, operands_of


def literal_values(formula: Formula) -> list[float]:
    """SI values of the formula's literals, in order."""
    return [literal.value for literal in formula.literals]


def settle(formula: Formula, known: Callable[[int], float | None]) -> Formula:
    """The formula without the conditions that known quantities decide.

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
            branches[condition.instruction] = results[condition.condition] is True
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
    """One undecided ``if`` of a group of formulas: which formula, and its instruction there."""

    formula: int
    instruction: int


def switches(formulas: Sequence[Formula]) -> tuple[Switch, ...]:
    """All undecided ``if`` instructions of the formulas, in order."""
    return tuple(
        Switch(number, condition.instruction)
        for number, formula in enumerate(formulas)
        for condition in conditions(formula.tape)
    )


def chosen_branches(
    formulas: Sequence[Formula], found: Sequence[Switch], values: Callable[[int], float]
) -> tuple[int, ...]:
    """The branch each switch takes at given values, 0 for the first; 0 too where the switch does not matter.

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
            taken[number, instruction] = 0 if truth else 1
    return tuple(taken.get((switch.formula, switch.instruction), 0) for switch in found)


def _reached(tape: Tape, results: Sequence[Any]) -> Mapping[int, bool]:
    """The ``if`` instructions that the outputs pass through, with the truth of their conditions."""
    reached: dict[int, bool] = {}
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
            reached[i] = results[condition] is True
            stack += [condition, a if reached[i] else b]
        else:
            stack.extend(operands_of(entry))
    return reached


def hold(
    formulas: Sequence[Formula], found: Sequence[Switch], branches: Sequence[int]
) -> tuple[Formula, ...]:
    """The formulas with every switch held at its branch."""
    held: dict[int, dict[int, bool]] = {}
    for switch, branch in zip(found, branches):
        held.setdefault(switch.formula, {})[switch.instruction] = branch == 0
    return tuple(
        specialise_formula(formula, held[number]) if number in held else formula
        for number, formula in enumerate(formulas)
    )
