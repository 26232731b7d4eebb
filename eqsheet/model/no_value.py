"""Why a part of a formula has no finite value, in words: a division by zero, the root of a negative number."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from eqsheet.diagnostics.shortened import shortened
from eqsheet.model.evaluate import first_nonfinite
from eqsheet.model.tape import Formula, operands_of

_TOO_LARGE = "is beyond the range of floating-point numbers, about 1.8e308"
_LEAVES = frozenset(("quantity", "literal", "const"))


@dataclass(frozen=True, slots=True)
class NoValue:
    """A part of a formula that has no finite value.

    Attributes
    ----------
    start, end : int
        Its place in the logical line.
    reason : str
        What is wrong, with the part itself: "`sqrt(A - B)` takes the square root of a negative number".
    operands : tuple of (int, str)
        Instructions it is made from, and their text, where that does not show the value already: sums and
        products, not numbers or names.
    """

    start: int
    end: int
    reason: str
    operands: tuple[tuple[int, str], ...]


def no_value(formula: Formula, values: Sequence[Any], line: str) -> NoValue | None:
    """The first part of a formula without a finite value; None if all have one.

    Parameters
    ----------
    values : sequence of (float or bool)
        Of all instructions, as from `evaluate`.
    line : str
        The logical line that the formula comes from.
    """
    found = first_nonfinite(formula.tape, values)
    if found is None:
        return None
    instruction = formula.tape.instructions[found]
    start, end = formula.places[found]
    inner = operands_of(instruction)
    arguments = [values[i] for i in inner]
    if instruction[0] == "power":
        arguments.append(instruction[2])
    text = shortened(line[start:end])
    operands = tuple(
        (i, shortened(line[slice(*formula.places[i])]))
        for i in inner
        if formula.places[i] != (start, end) and not _is_plain(formula, i)
    )
    return NoValue(start, end, f"`{text}` {_reason(instruction[0], arguments)}", operands)


def _is_plain(formula: Formula, instruction: int) -> bool:
    """Whether the text of an instruction is a name or a number, with or without a sign."""
    operation, *operands = formula.tape.instructions[instruction]
    return operation in _LEAVES or (operation == "neg" and _is_plain(formula, operands[0]))


def _reason(operation: str, arguments: Sequence[Any]) -> str:
    """What an operation does with its operands that gives no finite value."""
    if not all(map(math.isfinite, arguments)):
        return "has no finite value"
    rule = _REASONS.get(operation)
    return (rule(*arguments) if rule is not None else "") or _TOO_LARGE


def _division(a: float, b: float) -> str:
    if b != 0.0:
        return ""
    return "divides zero by zero" if a == 0.0 else "divides by zero"


def _power(base: float, exponent: float | Fraction) -> str:
    if base == 0.0:
        return "raises zero to a negative power" if exponent < 0 else ""
    if base < 0.0 and exponent != int(exponent):
        return "raises a negative number to a power that is not whole"
    return ""


def _logarithm(a: float) -> str:
    return "takes the logarithm of zero" if a == 0.0 else "takes the logarithm of a negative number"


def _beyond_one(name: str) -> Callable[[float], str]:
    return lambda a: f"takes the {name} of a number outside -1 .. 1"


_REASONS: dict[str, Callable[..., str]] = {
    "div": _division,
    "power": _power,
    "pow": _power,
    "sqrt": lambda a: "takes the square root of a negative number",
    "ln": _logarithm,
    "log10": _logarithm,
    "asin": _beyond_one("arcsine"),
    "acos": _beyond_one("arccosine"),
    "gamma": lambda a: "takes the gamma function of zero or a negative whole number" if a <= 0.0 else "",
    "logmean": lambda a, b: "takes the mean of two numbers of different signs" if a * b < 0.0 else "",
}
