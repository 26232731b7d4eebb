"""Where a formula reads a curve outside its range, in words."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

from eqsheet.model.evaluate import used_instructions
from eqsheet.model.interpolant import Interpolant
from eqsheet.model.interpolation import slack
from eqsheet.model.tape import Formula, Tape
from eqsheet.units.display import format_value
from eqsheet.units.unit import Unit

_DIGITS = 6
HELP = "a curve is never carried on beyond its points: add points, or keep the argument inside"


@dataclass(frozen=True, slots=True)
class OutsideCurve:
    """A curve read outside its range.

    Attributes
    ----------
    reader, argument : int
        The instructions that read the curve, and of the argument.
    message : str
        Curve, value and range.
    """

    reader: int
    argument: int
    message: str

    def place(self, formula: Formula) -> tuple[int, int]:
        """The place of the argument in the line; that of the whole call where the argument is one named before."""
        (start, end), (first, last) = formula.places[self.argument], formula.places[self.reader]
        return (start, end) if first <= start and end <= last else (first, last)


@lru_cache(maxsize=1 << 14)
def curve_arguments(tape: Tape) -> tuple[tuple[int, int, int], ...]:
    """Arguments of curves and surfaces: the instruction that reads one, which argument, its instruction."""
    return tuple(
        (reader, position, argument)
        for reader, instruction in enumerate(tape.instructions)
        if instruction[0] in ("curve", "surface")
        for position, argument in enumerate(instruction[1:-1])
    )


def outside_curve(tape: Tape, values: Sequence[Any]) -> OutsideCurve | None:
    """The first argument outside the range of its curve, of those the outputs depend on; None if there is none.

    Parameters
    ----------
    values : sequence of (float or bool)
        Of all instructions, as from `evaluate`.
    """
    arguments = curve_arguments(tape)
    if not arguments:
        return None
    used = used_instructions(tape, values)
    for reader, position, argument in arguments:
        value = values[argument]
        if not used[reader] or not math.isfinite(value):
            continue
        interpolant: Interpolant = tape.instructions[reader][-1]
        low, high = interpolant.ranges[position]
        room = slack(interpolant.axes[position])
        if not low - room <= value <= high + room:
            return OutsideCurve(reader, argument, _message(interpolant, position, value))
    return None


def range_text(interpolant: Interpolant, position: int) -> str:
    """``0 .. 30 m^3/h``, and ``.. 32 mm`` where there is no smallest argument."""
    unit = interpolant.heading.units[position]
    low, high = interpolant.ranges[position]
    last = written(high, unit)
    return f"{_number(low, unit, _DIGITS)} .. {last}" if math.isfinite(low) else f".. {last}"


def _message(interpolant: Interpolant, position: int, value: float) -> str:
    heading = interpolant.heading
    return (
        f"`{heading.name}` is read at {heading.arguments[position]} = "
        f"{written(value, heading.units[position])}, outside its range {range_text(interpolant, position)}"
    )


def written(value: float, unit: Unit | None) -> str:
    """An SI value in a unit, as a worksheet has it."""
    number = _number(value, unit, _DIGITS)
    if unit is None or unit.text in ("", "1"):
        return number
    return f"{number}%" if unit.text == "%" else f"{number} {unit.text}"


def _number(value: float, unit: Unit | None, digits: int) -> str:
    return format_value(value if unit is None else unit.from_si(value), digits)
