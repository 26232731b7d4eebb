"""Where an equation is linear: in one quantity, however often it occurs, and in several together.

What counts is the form as written: sums, products with factors free of the quantities, and so on. No
terms are gathered, so ``x^2 - x^2 + x`` is not seen to be linear.
"""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

from eqsheet.model.derive import gradient
from eqsheet.model.simplify import Simplifier
from eqsheet.model.tape import Tape, operands_of

MEMORY = 1 << 14

_KEEPING = frozenset({"neg", "strip", "attach"})


def is_linear_in(tape: Tape, quantities: Collection[int]) -> bool:
    """Whether all outputs are sums of constants and constant multiples of `quantities`.

    Constant means free of `quantities`; other quantities may be anywhere. Products of two of them are not
    linear.

    >>> from eqsheet.model.tape import TapeBuilder
    >>> b = TapeBuilder()
    >>> x, y = b.quantity(0, (0, 1)), b.quantity(1, (4, 5))
    >>> tape = b.tape((x, b.apply("mul", x, y)))
    >>> is_linear_in(tape, {0}), is_linear_in(tape, {0, 1})
    (True, False)
    """
    return _is_linear(tape, frozenset(quantities))


@lru_cache(maxsize=MEMORY)
def _is_linear(tape: Tape, quantities: frozenset[int]) -> bool:
    degrees: list[int] = []
    instructions: tuple[tuple[Any, ...], ...] = tape.instructions
    for instruction in instructions:
        operation = instruction[0]
        if operation == "quantity":
            degrees.append(int(instruction[1] in quantities))
            continue
        used = [degrees[j] for j in operands_of(instruction)]
        if not any(used):
            degrees.append(0)
        elif operation in ("add", "sub"):
            degrees.append(max(used))
        elif operation in _KEEPING:
            degrees.append(used[0])
        elif operation == "mul":
            degrees.append(min(used[0] + used[1], _CURVED))
        elif operation == "div" and not used[1]:
            degrees.append(used[0])
        elif operation == "if" and not used[0]:
            degrees.append(max(used[1:]))
        else:
            degrees.append(_CURVED)
    return all(degrees[i] < _CURVED for i in tape.outputs)


# Degree of everything that is not linear.
_CURVED = 2


@dataclass(frozen=True, slots=True)
class Affine:
    """An equation as a*x + b = 0.

    Attributes
    ----------
    coefficients : Tape
        Outputs a and b; takes what the equation's tape takes, but does not use x.
    solution : Tape
        One output, -b/a; undefined where a is 0.
    """

    coefficients: Tape
    solution: Tape


@lru_cache(maxsize=MEMORY)
def affine_in(tape: Tape, k: int) -> Affine | None:
    """The equation of a tape with the outputs (left, right) as a*x + b = 0 for quantity `k`.

    None where it is not linear in that quantity or does not contain it.
    """
    if not _is_linear(tape, frozenset((k,))):
        return None
    writer = Simplifier()
    new = writer.copy(tape)
    left, right = tape.outputs
    slope = gradient(writer, writer.sub(new[left], new[right]), (k,))[0]
    if slope == writer.zero:
        return None
    leaves = [writer.put("quantity", i) if i != k else writer.zero for i in range(tape.quantities)]
    rest = writer.copy(tape, quantities=leaves)
    # right - left at x = 0 is -b, which saves a sign in the closed form.
    minus = writer.sub(rest[right], rest[left])
    counts = (tape.quantities, tape.literals)
    return Affine(
        writer.tape((slope, writer.neg(minus)), *counts), writer.tape((writer.div(minus, slope),), *counts)
    )
