"""Conditions of a tape, and the tape with some of its branches held."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

from eqsheet.model.simplify import Simplifier, renumbered, uses
from eqsheet.model.tape import COMPARISONS, Formula, Tape, interned, operands_of

MEMORY = 1 << 14


@dataclass(frozen=True, slots=True)
class Comparison:
    """One comparison a condition depends on.

    Attributes
    ----------
    instruction : int
        Its index.
    operation : str
        ``lt``, ``le`` or ``eq``.
    gap : Tape
        One output, left - right: the comparison ``a < b`` holds where a - b is below 0, ``le`` where it is
        at most 0, ``eq`` where it is 0. Its size is the distance to the switch.
    """

    instruction: int
    operation: str
    gap: Tape


@dataclass(frozen=True, slots=True)
class Condition:
    """One ``if`` of a tape.

    Attributes
    ----------
    instruction : int
        Index of the ``if``.
    condition : int
        Index of the instruction whose truth it depends on.
    truth : Tape
        One output, that truth value.
    comparisons : tuple of Comparison
        All comparisons the truth value is made of, in the order of the tape.
    """

    instruction: int
    condition: int
    truth: Tape
    comparisons: tuple[Comparison, ...]


@lru_cache(maxsize=MEMORY)
def conditions(tape: Tape) -> tuple[Condition, ...]:
    """All ``if`` instructions the outputs depend on, inner ones before outer ones."""
    found = []
    instructions: tuple[tuple[Any, ...], ...] = tape.instructions
    wanted = uses(instructions, tape.outputs)
    for i, instruction in enumerate(instructions):
        if wanted[i] and instruction[0] == "if":
            condition = instruction[1]
            found.append(
                Condition(i, condition, _extract(tape, condition), tuple(_comparisons(tape, condition)))
            )
    return tuple(found)


def _extract(tape: Tape, instruction: int) -> Tape:
    writer = Simplifier()
    new = writer.copy(tape)
    return writer.tape((new[instruction],), tape.quantities, tape.literals)


def _comparisons(tape: Tape, condition: int) -> list[Comparison]:
    instructions: tuple[tuple[Any, ...], ...] = tape.instructions
    reached = {condition}
    # Only the logic counts: comparisons inside the operands of a comparison belong to ifs of their own.
    for i in range(condition, -1, -1):
        if i in reached and instructions[i][0] in ("and", "or", "not"):
            reached.update(operands_of(instructions[i]))
    found = []
    for i in sorted(reached):
        operation = instructions[i][0]
        if operation in COMPARISONS:
            writer = Simplifier()
            new = writer.copy(tape)
            gap = writer.sub(new[instructions[i][1]], new[instructions[i][2]])
            found.append(Comparison(i, operation, writer.tape((gap,), tape.quantities, tape.literals)))
    return found


@dataclass(frozen=True, slots=True)
class Specialised:
    """A tape with branches held.

    Attributes
    ----------
    tape : Tape
    quantities, literals : tuple of int
        Old numbers of the quantities and literals it still takes, in the order of their new numbers.
    numbers : tuple of (int or None)
        For each old instruction its new index; an ``if`` held has that of its branch, one no longer needed
        None.
    """

    tape: Tape
    quantities: tuple[int, ...]
    literals: tuple[int, ...]
    numbers: tuple[int | None, ...]


def specialise(tape: Tape, branches: Mapping[int, bool]) -> Specialised:
    """`tape` with each ``if`` in `branches` replaced by the branch taken (True: the first).

    Parameters
    ----------
    tape : Tape
    branches : mapping of int to bool
        By index of the ``if`` instruction; those on branches given up do no harm.
    """
    return _specialise(tape, tuple(sorted(branches.items())))


@lru_cache(maxsize=MEMORY)
def _specialise(tape: Tape, branches: tuple[tuple[int, bool], ...]) -> Specialised:
    instructions: tuple[tuple[Any, ...], ...] = tape.instructions
    stands_for = list(range(len(instructions)))
    for i, taken in branches:
        _, _, a, b = instructions[i]
        stands_for[i] = a if taken else b
    # Operands have lower indices, so one pass resolves an if whose branch is itself an if held.
    for i in range(len(instructions)):
        stands_for[i] = stands_for[stands_for[i]]
    changed = [renumbered(instruction, stands_for) for instruction in instructions]
    wanted = uses(changed, [stands_for[i] for i in tape.outputs])
    quantities, literals = _leaves(changed, wanted, "quantity"), _leaves(changed, wanted, "literal")
    slots = {("quantity", k): slot for slot, k in enumerate(quantities)}
    slots |= {("literal", k): slot for slot, k in enumerate(literals)}
    index: dict[tuple[tuple[Any, ...], type], int] = {}
    new: dict[int, int] = {}
    for i, instruction in enumerate(changed):
        if wanted[i]:
            leaf = instruction[0] in ("quantity", "literal")
            written = (instruction[0], slots[instruction]) if leaf else renumbered(instruction, new)
            # Two instructions may have become the same; the exact 0 and the float 0.0 are not.
            new[i] = index.setdefault((written, type(written[-1])), len(index))
    held = Tape(
        tuple(written for written, _ in index),
        tuple(new[stands_for[i]] for i in tape.outputs),
        len(quantities),
        len(literals),
    )
    numbers = tuple(new.get(j) for j in stands_for)
    return Specialised(interned(held), quantities, literals, numbers)


def _leaves(instructions: list[tuple[Any, ...]], wanted: list[int], kind: str) -> tuple[int, ...]:
    return tuple(sorted({x[1] for i, x in enumerate(instructions) if wanted[i] and x[0] == kind}))


def specialise_formula(formula: Formula, branches: Mapping[int, bool]) -> Formula:
    """`formula` with each ``if`` in `branches` (by instruction) replaced by the branch taken.

    Quantities and literals no longer used are dropped, and so are pairs of `alike` and members of
    `differences` that name an instruction no longer there.
    """
    held = specialise(formula.tape, branches)
    places: list[tuple[int, int]] = [(0, 0)] * len(held.tape.instructions)
    # An if held shares its number with its branch, which has the lower index and the place wanted.
    for i in range(len(held.numbers) - 1, -1, -1):
        number = held.numbers[i]
        if number is not None:
            places[number] = formula.places[i]
    numbers = held.numbers
    pairs = [(numbers[a], numbers[b]) for a, b in formula.alike]
    members = [numbers[i] for i in formula.differences]
    return Formula(
        held.tape,
        tuple(formula.quantities[k] for k in held.quantities),
        tuple(formula.literals[k] for k in held.literals),
        tuple(places),
        formula.statement,
        tuple((a, b) for a, b in pairs if a is not None and b is not None),
        tuple(i for i in members if i is not None),
    )
