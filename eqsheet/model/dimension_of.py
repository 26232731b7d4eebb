"""Dimension of each instruction of a formula whose quantities' dimensions are known."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction

from eqsheet.model.tape import Formula, Instruction
from eqsheet.units.dimension import DIMENSIONLESS, Dimension
from eqsheet.units.unit import Unit

_OF_FIRST = frozenset(("neg", "add", "sub", "abs", "min", "max", "hypot", "logmean"))


def dimensions_of(formula: Formula, dimensions: Sequence[Dimension | None]) -> tuple[Dimension | None, ...]:
    """Dimension by instruction, None where it is open; the formula is taken to be consistent.

    Parameters
    ----------
    dimensions : sequence of (Dimension or None)
        By quantity number of the worksheet.
    """
    found: list[Dimension | None] = []
    for instruction in formula.tape.instructions:
        found.append(_of(instruction, found, formula, dimensions))
    return tuple(found)


def _of(
    instruction: Instruction,
    found: Sequence[Dimension | None],
    formula: Formula,
    dimensions: Sequence[Dimension | None],
) -> Dimension | None:
    operation, *rest = instruction
    if operation == "quantity":
        return dimensions[formula.quantities[rest[0]]]
    if operation == "literal":
        return formula.literals[rest[0]].dimension
    if operation == "const":
        return None if rest[0] == 0 else DIMENSIONLESS
    if operation in _OF_FIRST:
        return next((found[i] for i in rest if found[i] is not None), None)
    if operation == "if":
        return found[rest[1]] if found[rest[1]] is not None else found[rest[2]]
    if operation in ("mul", "div"):
        a, b = found[rest[0]], found[rest[1]]
        if a is None or b is None:
            return None
        return a * b if operation == "mul" else a / b
    if operation == "power":
        base = found[rest[0]]
        return None if base is None else base ** rest[1]
    if operation == "sqrt":
        base = found[rest[0]]
        return None if base is None else base ** Fraction(1, 2)
    if operation == "attach":
        unit: Unit = rest[1]
        return unit.dimension
    if operation in ("curve", "surface"):
        dimension: Dimension = rest[-1].heading.dimension
        return dimension
    return DIMENSIONLESS
