"""Unknowns that are angles: those that occur under a sine, cosine or tangent and nowhere else.

Their dimension does not tell, since a radian is a plain number.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache

from eqsheet.model.tape import Formula, Tape, operands_of

_WAVES = frozenset(("sin", "cos", "tan"))


def angles(formulas: Sequence[Formula]) -> frozenset[int]:
    """Quantity numbers of all that are angles in every equation they occur in."""
    inside: set[int] = set()
    outside: set[int] = set()
    for formula in formulas:
        under, elsewhere = slots_of_angles(formula.tape)
        inside.update(formula.quantities[slot] for slot in under)
        outside.update(formula.quantities[slot] for slot in elsewhere)
    return frozenset(inside - outside)


@lru_cache(maxsize=4096)
def slots_of_angles(tape: Tape) -> tuple[frozenset[int], frozenset[int]]:
    """Slots of the quantities that waves are taken of, and of those that occur elsewhere too."""
    # Whether an instruction is reached from an output without passing through a wave, and through one.
    plainly = [False] * len(tape.instructions)
    waved = [False] * len(tape.instructions)
    for output in tape.outputs:
        plainly[output] = True
    for index in range(len(tape.instructions) - 1, -1, -1):
        instruction = tape.instructions[index]
        for operand in operands_of(instruction):
            plainly[operand] |= plainly[index] and instruction[0] not in _WAVES
            waved[operand] |= waved[index] or (plainly[index] and instruction[0] in _WAVES)
    slots = [(i, entry[1]) for i, entry in enumerate(tape.instructions) if entry[0] == "quantity"]
    return frozenset(s for i, s in slots if waved[i]), frozenset(s for i, s in slots if plainly[i])
