"""Bounds carried through the equations of a block, forwards and backwards, until they narrow no more.

Source: Benhamou, Goualard, Granvilliers and Puget, Revising hull and box consistency, Int. Conf. Logic
Programming 1999, the algorithm HC4-revise: each expression is given a range from its parts, then each part from
its expression. Of what is not monotone (a sine, a curve) see `interval_functions`. A branch of an
`if` has no say unless it is certain to be taken: where it has no value, the other one is.

The ranges hold every solution within the bounds; where one becomes empty there is none.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType
from typing import cast

from eqsheet.model.branches import literal_values
from eqsheet.model.tape import COMPARISONS, Formula, Instruction, operands_of
from eqsheet.worksheet.interval import (
    EVERYTHING,
    Interval,
    hull,
    increasing,
    magnitude,
    meet,
    minus,
    negated,
    over,
    plus,
    raised,
    root,
    times,
    widened,
)
from eqsheet.worksheet.interval_functions import (
    arc_cosine,
    cosine,
    of_arc_cosine,
    of_cosine,
    of_hyperbolic_cosine,
    of_larger,
    of_read,
    of_sine,
    of_smaller,
    of_tangent,
    read,
    sine,
    tangent,
)
from eqsheet.worksheet.interval_truth import FALSE, TRUE, compared, denied, joined, operands, sides

# Sweeps over all equations; ranges that still narrow do so slowly.
MOST_SWEEPS = 12
# A range that loses less than this part of itself is not worth another sweep.
_WORTH = 0.01
_NOTHING_HELD: Mapping[int, bool] = MappingProxyType({})


@dataclass(frozen=True, slots=True)
class Narrowed:
    """Where the solutions within the bounds are.

    Attributes
    ----------
    ranges : tuple of (float, float)
        SI, by position of the unknowns.
    empty : int
        Position of the equation that no values in the ranges satisfy, so that there is no solution; else -1.
    """

    ranges: tuple[Interval, ...]
    empty: int = -1


def narrowed(
    unknowns: Sequence[int],
    formulas: Sequence[Formula],
    values: Sequence[float],
    bounds: Sequence[Interval],
    errors: Sequence[float] | None = None,
    held: Sequence[Mapping[int, bool]] = (),
) -> Narrowed:
    """The bounds of the unknowns of a block, narrowed by its equations.

    Parameters
    ----------
    unknowns : sequence of int
        Quantity numbers.
    values : sequence of float
        SI values by quantity number; only those of no unknowns are read.
    bounds : sequence of (float, float)
        By position of the unknowns.
    errors : sequence of float, optional
        How far `values` may be off besides rounding.
    held : sequence of mapping of int to bool, optional
        Truth that conditions of each formula are to have, by instruction.
    """
    ranges = dict(zip(unknowns, bounds))
    own = set(unknowns)
    given = {
        q: _known(values[q], 0.0 if errors is None else errors[q])
        for formula in formulas
        for q in formula.quantities
        if q not in own
    }
    for _ in range(MOST_SWEEPS):
        before = dict(ranges)
        for position, formula in enumerate(formulas):
            if not _revise(formula, given, ranges, held[position] if held else _NOTHING_HELD):
                return Narrowed(tuple(before[q] for q in unknowns), position)
        if not any(_much(before[q], ranges[q]) for q in unknowns):
            break
    return Narrowed(tuple(ranges[q] for q in unknowns))


def _known(value: float, error: float) -> Interval:
    return widened(value - error, value + error)


def _much(before: Interval, after: Interval) -> bool:
    """Whether a range has narrowed by more than is not worth while."""
    if before == after:
        return False
    width = before[1] - before[0]
    return not math.isfinite(width) or after[1] - after[0] < (1.0 - _WORTH) * width


def _revise(
    formula: Formula,
    given: Mapping[int, Interval],
    ranges: dict[int, Interval],
    held: Mapping[int, bool],
) -> bool:
    """Narrow the ranges by one equation; False where it holds nowhere in them."""
    instructions = formula.tape.instructions
    literals = literal_values(formula)
    # None where an expression has no value; that matters where it is needed.
    of: list[Interval | None] = []
    for instruction in instructions:
        if instruction[0] == "quantity":
            quantity = formula.quantities[instruction[1]]
            of.append(ranges[quantity] if quantity in ranges else given[quantity])
        elif instruction[0] == "literal":
            of.append(widened(literals[instruction[1]], literals[instruction[1]]))
        else:
            of.append(_value(instruction, of))
        if len(of) - 1 in held:
            of[-1] = _met(of[-1], TRUE if held[len(of) - 1] else FALSE)
    left, right = formula.tape.outputs
    both = _met(of[left], of[right])
    of[left] = of[right] = both
    needed = [False] * len(instructions)
    needed[left] = needed[right] = True
    for index in range(len(instructions) - 1, -1, -1):
        whole = of[index]
        if not needed[index]:
            continue
        if whole is None:
            return False
        instruction = instructions[index]
        for part in _narrow(instruction, whole, of):
            if of[part] is None:
                return False
            needed[part] = True
        if instruction[0] == "quantity" and formula.quantities[instruction[1]] in ranges:
            ranges[formula.quantities[instruction[1]]] = whole
    return True


def _met(a: Interval | None, b: Interval | None) -> Interval | None:
    return None if a is None or b is None else meet(a, b)


def _value(instruction: Instruction, of: Sequence[Interval | None]) -> Interval | None:
    """Range of one expression from those of its parts; None where it has no value at all."""
    operation, *rest = instruction
    if operation == "if":
        condition, a, b = (of[i] for i in rest)
        if condition is None:
            return None
        first, second = _possible(condition, TRUE, a), _possible(condition, FALSE, b)
        return hull(first, second) if first and second else first or second
    if operation in ("and", "or"):
        first, second = of[rest[0]], of[rest[1]]
        return None if first is None else joined(operation, first, second)
    if operation == "power" and rest[1] == 0:
        return 1.0, 1.0
    if any(of[i] is None for i in operands_of(instruction)):
        return None
    return _forwards(instruction, cast("list[Interval]", of))


def _possible(condition: Interval, truth: Interval, value: Interval | None) -> Interval | None:
    """The range of a branch that is taken with this truth of its condition; None where it cannot be taken."""
    return value if meet(condition, truth) else None


def _narrow(instruction: Instruction, whole: Interval, of: list[Interval | None]) -> Sequence[int]:
    """Narrow the parts of one expression that its value depends on for certain; gives those."""
    operation, *rest = instruction
    if operation == "if":
        return _narrow_branches(whole, rest[0], rest[1], rest[2], of)
    if operation in ("and", "or"):
        return _narrow_joined(operation, whole, rest[0], rest[1], of)
    if operation == "power" and rest[1] == 0:
        return ()
    needed = operands_of(instruction)
    if not _backwards(instruction, whole, cast("list[Interval]", of)):
        of[needed[0]] = None
    return needed


def _narrow_branches(
    whole: Interval, condition: int, a: int, b: int, of: list[Interval | None]
) -> Sequence[int]:
    """As `_narrow` for an ``if``: a branch has its say where the other cannot give the value."""
    truth = of[condition]
    assert truth is not None, "an if has no value where its condition has none"
    first = _met(_possible(truth, TRUE, of[a]), whole)
    second = _met(_possible(truth, FALSE, of[b]), whole)
    if first and second:
        return (condition,)
    of[condition] = meet(truth, TRUE if first else FALSE)
    taken = a if first else b
    of[taken] = first or second
    return condition, taken


def _narrow_joined(
    operation: str, whole: Interval, a: int, b: int, of: list[Interval | None]
) -> Sequence[int]:
    """As `_narrow` for ``and`` and ``or``: the second operand is needed where the first does not decide."""
    first, second = of[a], of[b]
    assert first is not None, "they have no value where the first operand has none"
    of[a], of[b] = operands(operation, whole, first, second)
    return (a, b) if of[a] == (TRUE if operation == "and" else FALSE) else (a,)


# --- from the parts to the whole --------------------------------------------------------------------------


def _forwards(instruction: Instruction, of: Sequence[Interval]) -> Interval | None:
    """Range of one expression without conditions from those of its parts, all of which have one."""
    operation, *rest = instruction
    if operation == "const":
        value = float(rest[0])
        return widened(value, value)
    if operation in _OF_TWO:
        return _OF_TWO[operation](of[rest[0]], of[rest[1]])
    if operation == "power":
        return raised(of[rest[0]], float(rest[1]))
    if operation == "pow":
        logarithm = _logarithm_of_base(of[rest[0]])
        return EVERYTHING if logarithm is None else increasing(math.exp, times(logarithm, of[rest[1]]))
    if operation in _RISING:
        function, _, domain, _ = _RISING[operation]
        return increasing(function, of[rest[0]], domain)
    if operation in ("strip", "attach"):
        unit = rest[1]
        return increasing(unit.from_si if operation == "strip" else unit.to_si, of[rest[0]])
    if operation == "curve":
        return read(rest[1], of[rest[0]])
    if operation in _CERTAIN:
        return _CERTAIN[operation](of[rest[0]])
    if operation in COMPARISONS:
        return compared(operation, of[rest[0]], of[rest[1]])
    if operation == "not":
        return denied(of[rest[0]])
    return EVERYTHING


_HALF_TURN = (-1.0, 1.0)
_RIGHT_ANGLES = (-math.pi / 2, math.pi / 2)
_POSITIVE = (0.0, math.inf)


def _length(a: Interval, b: Interval) -> Interval | None:
    first, second = raised(a, 2.0), raised(b, 2.0)
    return None if first is None or second is None else increasing(math.sqrt, plus(first, second), _POSITIVE)


_OF_TWO: Mapping[str, Callable[[Interval, Interval], Interval | None]] = {
    "add": plus,
    "sub": minus,
    "mul": times,
    "div": over,
    "min": lambda a, b: (min(a[0], b[0]), min(a[1], b[1])),
    "max": lambda a, b: (max(a[0], b[0]), max(a[1], b[1])),
    "hypot": _length,
}


def _logarithm(of: Callable[[float], float]) -> Callable[[float], float]:
    return lambda x: -math.inf if x == 0.0 else of(x)


def _tangent(x: float) -> float:
    # The double nearest to a right angle has a finite tangent.
    return math.tan(x) if abs(x) < _RIGHT_ANGLES[1] else math.copysign(math.inf, x)


def _power_of_ten(x: float) -> float:
    return math.inf if x > 400.0 else float(10.0**x)


# Functions that rise: themselves, their inverse, their domain and their range.
_RISING: Mapping[str, tuple[Callable[[float], float], Callable[[float], float], Interval, Interval]] = {
    "sqrt": (math.sqrt, lambda y: y * y, _POSITIVE, _POSITIVE),
    "exp": (math.exp, _logarithm(math.log), EVERYTHING, _POSITIVE),
    "ln": (_logarithm(math.log), math.exp, _POSITIVE, EVERYTHING),
    "log10": (_logarithm(math.log10), _power_of_ten, _POSITIVE, EVERYTHING),
    "sinh": (math.sinh, math.asinh, EVERYTHING, EVERYTHING),
    "tanh": (math.tanh, math.atanh, EVERYTHING, _HALF_TURN),
    "atan": (math.atan, _tangent, EVERYTHING, _RIGHT_ANGLES),
    "asin": (math.asin, math.sin, _HALF_TURN, _RIGHT_ANGLES),
}
# What is certain of functions that do not rise throughout.
_CERTAIN: Mapping[str, Callable[[Interval], Interval | None]] = {
    "neg": negated,
    "abs": magnitude,
    "sin": sine,
    "cos": cosine,
    "tan": tangent,
    "erf": lambda a: increasing(math.erf, a),
    "sign": lambda a: (-1.0, 1.0),
    "cosh": lambda a: increasing(math.cosh, magnitude(a)),
    "acos": arc_cosine,
}


# --- from the whole to the parts --------------------------------------------------------------------------


def _backwards(instruction: Instruction, whole: Interval, of: list[Interval]) -> bool:
    """Narrow the parts of one expression by its range; False where a part has no value left."""
    operation, *rest = instruction
    parts: dict[int, Interval | None] = {}
    if operation in _TURNED:
        a, b = rest
        if a == b:
            return True
        first, second = _TURNED[operation](whole, of[a], of[b])
        parts = {a: first, b: second}
    elif operation == "power":
        parts = {rest[0]: root(whole, float(rest[1]), of[rest[0]]) if rest[1] else EVERYTHING}
    elif operation == "pow":
        logarithm = _logarithm_of_base(of[rest[0]])
        back = EVERYTHING if logarithm is None else increasing(_logarithm(math.log), whole, _POSITIVE)
        if logarithm is not None:
            exponent = None if back is None else _factor(back, logarithm)
            base = None if back is None else _factor(back, of[rest[1]])
            parts = {rest[0]: None if base is None else increasing(math.exp, base)}
            # The same for both, if one is the other.
            parts[rest[1]] = exponent if rest[0] != rest[1] else parts[rest[0]]
    elif operation in _RISING:
        _, inverse, domain, image = _RISING[operation]
        back = increasing(inverse, whole, image)
        parts = {rest[0]: None if back is None else meet(back, widened(*domain))}
    elif operation in ("strip", "attach"):
        unit = rest[1]
        parts = {rest[0]: increasing(unit.to_si if operation == "strip" else unit.from_si, whole)}
    elif operation == "neg":
        parts = {rest[0]: negated(whole)}
    elif operation == "abs":
        parts = {rest[0]: hull(negated(whole), whole)}
    elif operation in _OF_ONE:
        parts = {rest[0]: _OF_ONE[operation](whole, of[rest[0]])}
    elif operation == "curve":
        parts = {rest[0]: of_read(whole, rest[1], of[rest[0]])}
    elif operation in COMPARISONS:
        parts = dict(zip(rest, sides(operation, whole, of[rest[0]], of[rest[1]])))
    elif operation == "not":
        parts = {rest[0]: denied(whole)}
    for index, part in parts.items():
        kept = None if part is None else meet(of[index], part)
        if kept is None:
            return False
        of[index] = kept
    return True


def _logarithm_of_base(base: Interval) -> Interval | None:
    """Range of the logarithm of a base that is nowhere negative; None of any other."""
    return increasing(_logarithm(math.log), base) if base[0] >= 0.0 else None


def _of_product(whole: Interval, a: Interval, b: Interval) -> tuple[Interval | None, Interval | None]:
    return _factor(whole, b), _factor(whole, a)


def _factor(whole: Interval, other: Interval) -> Interval | None:
    """What times `other` gives `whole`: anything where both may be zero."""
    if other[0] <= 0.0 <= other[1] and whole[0] <= 0.0 <= whole[1]:
        return EVERYTHING
    return over(whole, other)


def _of_quotient(whole: Interval, a: Interval, b: Interval) -> tuple[Interval | None, Interval | None]:
    return times(whole, b), _factor(a, whole)


def _not_longer(whole: Interval, a: Interval) -> Interval | None:
    """What of `a` is no longer than the largest in `whole`."""
    return None if whole[1] < 0.0 else meet(a, (-whole[1], whole[1]))


# Functions of one argument: their range and that of the argument to what is left of the latter.
_OF_ONE: Mapping[str, Callable[[Interval, Interval], Interval | None]] = {
    "sin": of_sine,
    "cos": of_cosine,
    "tan": of_tangent,
    "acos": of_arc_cosine,
    "cosh": of_hyperbolic_cosine,
}
_TURNED: Mapping[str, Callable[[Interval, Interval, Interval], tuple[Interval | None, Interval | None]]] = {
    "add": lambda whole, a, b: (minus(whole, b), minus(whole, a)),
    "sub": lambda whole, a, b: (plus(whole, b), minus(a, whole)),
    "mul": _of_product,
    "div": _of_quotient,
    "min": of_smaller,
    "max": of_larger,
    "hypot": lambda whole, a, b: (_not_longer(whole, a), _not_longer(whole, b)),
}
