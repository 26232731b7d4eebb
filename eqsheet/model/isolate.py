"""Closed forms: the quantity that occurs once in an equation, by inverting the operations around it.

Where an operation has several inverses, each gives a candidate. The first one is the principal value: the
positive root, the angle the inverse function returns. Sine, cosine and tangent give the candidates within
about one turn of 0 on either side; solutions further out are left to Newton's method. A candidate is genuine
where its condition holds; the caller evaluates the equation itself afresh anyway.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache
from typing import Any

from eqsheet.model.interpolant import Interpolant
from eqsheet.model.interpolation import slack
from eqsheet.model.simplify import Simplifier, uses
from eqsheet.model.tape import Tape, operands_of

MEMORY = 1 << 14
# Nested inverses multiply the candidates; an equation with more than this many is left to Newton's method.
_MOST_CANDIDATES = 24


@dataclass(frozen=True, slots=True)
class Candidate:
    """One closed form of a quantity.

    Attributes
    ----------
    tape : Tape
        One output, the quantity's value; it takes the same quantities and literals as the equation's tape,
        but does not use the quantity itself.
    condition : Tape or None
        One output, a truth value: whether the candidate solves the equation; nan counts as no. None where it
        always does.
    """

    tape: Tape
    condition: Tape | None


@dataclass(frozen=True, slots=True)
class Isolation:
    """The closed forms of a quantity, in fixed order, the principal one first."""

    candidates: tuple[Candidate, ...]


@lru_cache(maxsize=MEMORY)
def isolate(tape: Tape, k: int) -> Isolation | None:
    """Closed forms of quantity `k` from a tape with the outputs (left, right).

    None where the quantity does not occur exactly once, stands inside ``if``, ``min``, ``max``, ``sign``,
    ``erf``, ``gamma`` or ``logmean``, in a surface or in a curve that is level somewhere, or there would be too
    many candidates. A curve that turns has one inverse for each monotone run.

    >>> from eqsheet.model.tape import TapeBuilder
    >>> b = TapeBuilder()
    >>> x, y = b.quantity(0, (0, 1)), b.quantity(1, (4, 5))
    >>> isolate(b.tape((y, b.apply("exp", x))), 0).candidates[0].tape.instructions
    (('quantity', 1), ('ln', 0))
    """
    path = _path(tape, k)
    if path is None:
        return None
    side, steps = path
    writer = Simplifier()
    new = writer.copy(tape)
    branches = [_Branch(new[tape.outputs[1 - side]], ())]
    instructions: tuple[tuple[Any, ...], ...] = tape.instructions
    for i, position in steps:
        operation, *rest = instructions[i]
        inverse = _INVERSES.get((operation, position))
        if inverse is None:
            return None
        others = [new[j] if isinstance(j, int) and p != position else j for p, j in enumerate(rest)]
        branches = [inner for branch in branches for inner in inverse(writer, branch, *others)]
        if not 0 < len(branches) <= _MOST_CANDIDATES:
            return None
    return Isolation(tuple(_candidate(writer, branch, tape) for branch in branches))


@dataclass(frozen=True, slots=True)
class _Branch:
    """What the expression around the quantity must be, and the conditions gathered so far (all
    instructions)."""

    target: int
    conditions: tuple[int, ...]

    def to(self, target: int, *conditions: int) -> _Branch:
        return _Branch(target, self.conditions + conditions)


def _candidate(writer: Simplifier, branch: _Branch, tape: Tape) -> Candidate:
    condition = None
    if branch.conditions:
        together = branch.conditions[0]
        for one in branch.conditions[1:]:
            together = writer.put("and", together, one)
        condition = writer.tape((together,), tape.quantities, tape.literals)
    return Candidate(writer.tape((branch.target,), tape.quantities, tape.literals), condition)


def _path(tape: Tape, k: int) -> tuple[int, list[tuple[int, int]]] | None:
    """The side the quantity is on, and the way to it from there: (instruction, position of the operand).

    None where there is not exactly one way.
    """
    instructions = tape.instructions
    if ("quantity", k) not in instructions or tape.outputs[0] == tape.outputs[1]:
        return None
    leaf = instructions.index(("quantity", k))
    wanted = uses(instructions, tape.outputs)
    steps: list[tuple[int, int]] = []
    at = leaf
    for i in range(leaf + 1, len(instructions)):
        used = operands_of(instructions[i])
        if at not in used or not wanted[i]:
            continue
        # Another use, of this or of what is further in, shows as a second user below.
        if used.count(at) > 1:
            return None
        steps.append((i, used.index(at)))
        at = i
    on_path = [leaf, *(i for i, _ in steps)]
    users = dict.fromkeys(on_path, 0)
    for i, instruction in enumerate(instructions):
        if wanted[i]:
            for j in operands_of(instruction):
                if j in users:
                    users[j] += 1
    if any(users[i] != 1 for i in on_path[:-1]) or users[on_path[-1]] or at not in tape.outputs:
        return None
    if any(i in tape.outputs for i in on_path[:-1]):
        return None
    return tape.outputs.index(at), steps[::-1]


# --- inverses ---------------------------------------------------------------------------------------------
# Each takes the writer, a branch and the operands of the instruction; the one at the quantity's position is
# the old tape's and not used.

_Inverse = Callable[..., list[_Branch]]


def _not_negative(w: Simplifier, t: int) -> int:
    return w.put("le", w.zero, t)


def _positive(w: Simplifier, t: int) -> int:
    return w.put("lt", w.zero, t)


def _within(w: Simplifier, lower: float, t: int, upper: float) -> int:
    return w.put("and", w.put("le", w.constant(lower), t), w.put("le", t, w.constant(upper)))


def _plain(inverse: Callable[[Simplifier, int, Any, Any], int]) -> _Inverse:
    """An operation of two operands with one inverse, which holds everywhere."""
    return lambda w, b, x, y: [b.to(inverse(w, b.target, x, y))]


def _single(inverse: Callable[[Simplifier, int], int]) -> _Inverse:
    """A function of one argument with one inverse, which holds everywhere."""
    return lambda w, b, a: [b.to(inverse(w, b.target))]


def _function(operation: str) -> _Inverse:
    return _single(lambda w, t: w.function(operation, t))


def _of_power(w: Simplifier, b: _Branch, a: int, r: Fraction) -> list[_Branch]:
    if r == 0:
        return []  # 1, whatever the base
    t, inverse = b.target, 1 / r
    if r.denominator > 1:
        # Such a power is real for bases that are not negative only, and is not negative itself.
        return [b.to(w.power(t, inverse), _not_negative(w, t))]
    if r.numerator % 2 == 0:
        root = w.power(t, inverse)
        return [b.to(root, _not_negative(w, t)), b.to(w.neg(root), _not_negative(w, t))]
    if abs(r) == 1:
        return [b.to(w.power(t, inverse))]
    size = w.power(w.function("abs", t), inverse)
    return [b.to(w.mul(w.function("sign", t), size))]


def _of_base(w: Simplifier, b: _Branch, base: int, exponent: int) -> list[_Branch]:
    # Whether the exponent is even, odd or no whole number shows only in its value: (-1)^exponent is 1, -1 or nan.
    t, inverse = b.target, w.div(w.one, exponent)
    negative = w.neg(w.pow(w.function("abs", t), inverse))
    parity = w.pow(w.constant(Fraction(-1)), exponent)
    same_sign = w.put("eq", parity, w.function("sign", t))
    return [b.to(w.pow(t, inverse), _not_negative(w, t)), b.to(negative, same_sign)]


def _of_exponent(w: Simplifier, b: _Branch, base: int, exponent: int) -> list[_Branch]:
    logarithms = w.div(w.function("ln", b.target), w.function("ln", base))
    not_one = w.put("not", w.put("eq", base, w.one))
    return [b.to(logarithms, _positive(w, b.target), not_one)]


def _of_sqrt(w: Simplifier, b: _Branch, a: int) -> list[_Branch]:
    return [b.to(w.power(b.target, Fraction(2)), _not_negative(w, b.target))]


def _of_exp(w: Simplifier, b: _Branch, a: int) -> list[_Branch]:
    return [b.to(w.function("ln", b.target), _positive(w, b.target))]


def _of_abs(w: Simplifier, b: _Branch, a: int) -> list[_Branch]:
    condition = _not_negative(w, b.target)
    return [b.to(b.target, condition), b.to(w.neg(b.target), condition)]


def _of_cosh(w: Simplifier, b: _Branch, a: int) -> list[_Branch]:
    condition = w.put("le", w.one, b.target)
    root = w.function("acosh", b.target)
    return [b.to(root, condition), b.to(w.neg(root), condition)]


def _of_tanh(w: Simplifier, b: _Branch, a: int) -> list[_Branch]:
    inside = w.put("lt", w.function("abs", b.target), w.one)
    return [b.to(w.function("atanh", b.target), inside)]


def _of_sin(w: Simplifier, b: _Branch, a: int) -> list[_Branch]:
    angle = w.function("asin", b.target)
    condition = _within(w, -1.0, b.target, 1.0)
    turn, half = w.constant(math.tau), w.constant(math.pi)
    minus_half = w.constant(-math.pi)
    others = (w.sub(half, angle), w.add(angle, turn), w.sub(minus_half, angle), w.sub(angle, turn))
    return [b.to(x, condition) for x in (angle, *others)]


def _of_cos(w: Simplifier, b: _Branch, a: int) -> list[_Branch]:
    angle = w.function("acos", b.target)
    condition = _within(w, -1.0, b.target, 1.0)
    turn = w.constant(math.tau)
    others = (w.neg(angle), w.sub(turn, angle), w.add(angle, turn), w.sub(angle, turn))
    return [b.to(x, condition) for x in (angle, *others)]


def _of_tan(w: Simplifier, b: _Branch, a: int) -> list[_Branch]:
    angle = w.function("atan", b.target)
    shifts = [w.constant(n * math.pi) for n in (1, -1, 2, -2)]
    return [b.to(angle), *(b.to(w.add(angle, shift)) for shift in shifts)]


def _of_principal(operation: str, lower: float, upper: float) -> _Inverse:
    """An inverse circular function, whose values lie between `lower` and `upper`."""

    def invert(w: Simplifier, b: _Branch, a: int) -> list[_Branch]:
        return [b.to(w.function(operation, b.target), _within(w, lower, b.target, upper))]

    return invert


def _of_hypot(w: Simplifier, b: _Branch, other: int) -> list[_Branch]:
    t = b.target
    condition = w.put("le", w.function("abs", other), t)
    root = w.function("sqrt", w.mul(w.sub(t, other), w.add(t, other)))
    return [b.to(root, condition), b.to(w.neg(root), condition)]


def _of_curve(w: Simplifier, b: _Branch, a: int, curve: Interpolant) -> list[_Branch]:
    found = []
    for inverse in curve.inverses:
        (values,) = inverse.axes
        room = slack(values)
        condition = _within(w, values[0] - room, b.target, values[-1] + room)
        found.append(b.to(w.put("curve", b.target, inverse), condition))
    return found


def _of_angle_height(w: Simplifier, b: _Branch, y: int, x: int) -> list[_Branch]:
    # Genuine where the angle lies on the side of the y axis that x is on.
    same_side = w.put("lt", w.zero, w.mul(w.function("cos", b.target), x))
    angle = _within(w, -math.pi, b.target, math.pi)
    return [b.to(w.mul(x, w.function("tan", b.target)), angle, same_side)]


def _of_angle_width(w: Simplifier, b: _Branch, y: int, x: int) -> list[_Branch]:
    same_side = w.put("lt", w.zero, w.mul(w.function("sin", b.target), y))
    angle = _within(w, -math.pi, b.target, math.pi)
    return [b.to(w.div(y, w.function("tan", b.target)), angle, same_side)]


_INVERSES: dict[tuple[str, int], _Inverse] = {
    ("neg", 0): _single(lambda w, t: w.neg(t)),
    ("add", 0): _plain(lambda w, t, x, y: w.sub(t, y)),
    ("add", 1): _plain(lambda w, t, x, y: w.sub(t, x)),
    ("sub", 0): _plain(lambda w, t, x, y: w.add(t, y)),
    ("sub", 1): _plain(lambda w, t, x, y: w.sub(x, t)),
    ("mul", 0): _plain(lambda w, t, x, y: w.div(t, y)),
    ("mul", 1): _plain(lambda w, t, x, y: w.div(t, x)),
    ("div", 0): _plain(lambda w, t, x, y: w.mul(t, y)),
    ("div", 1): _plain(lambda w, t, x, y: w.div(x, t)),
    ("strip", 0): _plain(lambda w, t, x, unit: w.put("attach", t, unit)),
    ("attach", 0): _plain(lambda w, t, x, unit: w.put("strip", t, unit)),
    ("power", 0): _of_power,
    ("pow", 0): _of_base,
    ("pow", 1): _of_exponent,
    ("sqrt", 0): _of_sqrt,
    ("exp", 0): _of_exp,
    ("ln", 0): _function("exp"),
    ("log10", 0): _single(lambda w, t: w.pow(w.constant(Fraction(10)), t)),
    ("abs", 0): _of_abs,
    ("sin", 0): _of_sin,
    ("cos", 0): _of_cos,
    ("tan", 0): _of_tan,
    ("asin", 0): _of_principal("sin", -math.pi / 2, math.pi / 2),
    ("acos", 0): _of_principal("cos", 0.0, math.pi),
    ("atan", 0): _of_principal("tan", -math.pi / 2, math.pi / 2),
    ("sinh", 0): _function("asinh"),
    ("cosh", 0): _of_cosh,
    ("tanh", 0): _of_tanh,
    ("asinh", 0): _function("sinh"),
    ("hypot", 0): lambda w, b, x, y: _of_hypot(w, b, y),
    ("hypot", 1): lambda w, b, x, y: _of_hypot(w, b, x),
    ("atan2", 0): _of_angle_height,
    ("atan2", 1): _of_angle_width,
    ("curve", 0): _of_curve,
}
