"""Exact partial derivatives of tapes.

Reverse accumulation (Griewank and Walther, Evaluating Derivatives, 2nd edition, 2008, chapter 3): from the
output backwards each instruction gets the derivative of the output with respect to it, its adjoint, and hands
it on to its operands, so that all partial derivatives together cost a small multiple of the value. Everything
is written by a `Simplifier`, which shares what value and derivatives have in common.

Where the derivative does not exist, one is chosen that keeps Newton's method alive: 0 for ``abs``, ``sign``
and ``hypot`` at their kink; that of the first argument for ``min`` and ``max`` of equal numbers; that of the
branch taken for ``if``; that to the right at a corner of a curve; 0 for a curve by steps. The derivative of
``sqrt`` at 0 is infinite.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from fractions import Fraction
from functools import lru_cache
from typing import Any

from eqsheet.model.simplify import ARITY, Simplifier
from eqsheet.model.tape import Tape
from eqsheet.units.unit import Unit

MEMORY = 1 << 14


@lru_cache(maxsize=MEMORY)
def residual_tape(tape: Tape) -> Tape:
    """The tape of left - right, from one with the outputs (left, right); simplified.

    >>> from eqsheet.model.tape import TapeBuilder
    >>> b = TapeBuilder()
    >>> tape = b.tape((b.quantity(7, (0, 1)), b.quantity(8, (4, 5))))
    >>> residual_tape(tape).instructions
    (('quantity', 0), ('quantity', 1), ('sub', 0, 1))
    """
    writer = Simplifier()
    new = writer.copy(tape)
    left, right = tape.outputs
    return writer.tape((writer.sub(new[left], new[right]),), tape.quantities, tape.literals)


@lru_cache(maxsize=MEMORY)
def partials(tape: Tape, output: int, wanted: tuple[int, ...]) -> Tape:
    """The tape of an output and its partial derivatives.

    Parameters
    ----------
    tape : Tape
    output : int
        Position in ``tape.outputs``.
    wanted : tuple of int
        Numbers of the quantities to differentiate with respect to.

    Returns
    -------
    Tape
        Outputs: the value, then the derivative with respect to each of `wanted`. It takes the same quantities
        and literals as `tape`.

    Raises
    ------
    ValueError
        The output contains a function that has no derivative on tapes (``digamma``, ``logmean_slope``: the
        second derivatives of ``gamma`` and ``logmean``).
    """
    writer = Simplifier()
    root = writer.copy(tape)[tape.outputs[output]]
    slopes = gradient(writer, root, wanted)
    return writer.tape((root, *slopes), tape.quantities, tape.literals)


@lru_cache(maxsize=MEMORY)
def equation_partials(tape: Tape, wanted: tuple[int, ...]) -> Tape:
    """The tape of left - right and its partial derivatives, from one with the outputs (left, right)."""
    writer = Simplifier()
    new = writer.copy(tape)
    left, right = tape.outputs
    root = writer.sub(new[left], new[right])
    return writer.tape((root, *gradient(writer, root, wanted)), tape.quantities, tape.literals)


def gradient(writer: Simplifier, root: int, wanted: tuple[int, ...]) -> tuple[int, ...]:
    """Indices of the derivatives of instruction `root` with respect to the quantities `wanted`."""
    return jacobian(writer, (root,), wanted)


def jacobian(writer: Simplifier, roots: Sequence[int], wanted: Sequence[int]) -> tuple[int, ...]:
    """Indices of the derivatives of each of `roots` with respect to each quantity of `wanted`, row by row."""
    rows = _Gradient(writer, tuple(writer.put("quantity", k) for k in wanted))
    return tuple(slope for root in roots for slope in rows.of(root))


class _Gradient:
    """Derivatives of instructions of one writer with respect to some of its leaves."""

    def __init__(self, writer: Simplifier, leaves: tuple[int, ...]) -> None:
        self.writer = writer
        self.leaves = leaves
        self._wanted = frozenset(leaves)
        self.depends: list[bool] = []
        self.adjoint: dict[int, int] = {}
        self._known: dict[int, tuple[int, ...]] = {}

    def of(self, root: int) -> tuple[int, ...]:
        """Indices of the derivatives of `root` with respect to each leaf."""
        known = self._known.get(root)
        if known is not None:
            return known
        self._extend(root)
        outer, self.adjoint = self.adjoint, {}
        if self.depends[root]:
            self.adjoint[root] = self.writer.one
            for i in range(root, -1, -1):
                if i in self.adjoint:
                    self._hand_on(i)
        slopes = tuple(self.adjoint.get(leaf, self.writer.zero) for leaf in self.leaves)
        self.adjoint = outer
        self._known[root] = slopes
        return slopes

    def _extend(self, root: int) -> None:
        instructions, depends = self.writer.instructions, self.depends
        for i in range(len(depends), root + 1):
            instruction = instructions[i]
            hit = i in self._wanted
            for j in instruction[1 : 1 + ARITY[instruction[0]]]:
                if depends[j]:
                    hit = True
                    break
            depends.append(hit)

    def _hand_on(self, v: int) -> None:
        instruction = self.writer.instructions[v]
        operation = instruction[0]
        if operation == "quantity":
            return
        rule = _RULES.get(operation)
        if rule is not None:
            rule(self, v, self.adjoint[v], *instruction[1:])
        elif operation in _SLOPES:
            a = instruction[1]
            self.give(a, self.writer.mul(self.adjoint[v], _SLOPES[operation](self.writer, a, v)))
        else:
            raise ValueError(f"no derivative on tapes for {operation}")

    def give(self, i: int, term: int) -> None:
        """Add `term` to the adjoint of instruction i."""
        if self.depends[i]:
            sofar = self.adjoint.get(i)
            self.adjoint[i] = term if sofar is None else self.writer.add(sofar, term)

    def give_selected(self, adjoint: int, condition: int, a: int, b: int) -> None:
        """Hand on past a selection between `a` and `b`.

        The selection is made on the finished derivatives, not on the adjoints: a derivative of the
        branch not taken may be infinite, and 0 times infinity is not 0. Nor is it where the adjoint is infinite,
        as that of ``sqrt(max(x, 0))`` is for negative x, so that a branch that does not change hands on nothing.
        """
        writer = self.writer
        for leaf, x, y in zip(self.leaves, self.of(a), self.of(b)):
            if x == y == writer.zero:
                continue
            self.give(leaf, self._times(adjoint, writer.select(condition, x, y)))

    def _times(self, adjoint: int, slope: int) -> int:
        """The product, taken inside the branches of a slope one of which is zero."""
        writer = self.writer
        operation, *rest = writer.instructions[slope]
        if operation != "if" or not self._may_be_zero(slope):
            return writer.mul(adjoint, slope)
        condition, a, b = rest
        return writer.select(condition, self._times(adjoint, a), self._times(adjoint, b))

    def _may_be_zero(self, slope: int) -> bool:
        """Whether a slope is zero for certain where some branches are taken."""
        if slope == self.writer.zero:
            return True
        operation, *rest = self.writer.instructions[slope]
        return operation == "if" and (self._may_be_zero(rest[1]) or self._may_be_zero(rest[2]))


# Rules of operations with more than one operand, or an operand that is no index: called with the gradient,
# the instruction, its adjoint and its operands. An adjoint is only written out where the operand needs it.


def _add(g: _Gradient, v: int, adjoint: int, a: int, b: int) -> None:
    g.give(a, adjoint)
    g.give(b, adjoint)


def _sub(g: _Gradient, v: int, adjoint: int, a: int, b: int) -> None:
    g.give(a, adjoint)
    if g.depends[b]:
        g.give(b, g.writer.neg(adjoint))


def _neg(g: _Gradient, v: int, adjoint: int, a: int) -> None:
    g.give(a, g.writer.neg(adjoint))


def _mul(g: _Gradient, v: int, adjoint: int, a: int, b: int) -> None:
    if g.depends[a]:
        g.give(a, g.writer.mul(adjoint, b))
    if g.depends[b]:
        g.give(b, g.writer.mul(adjoint, a))


def _div(g: _Gradient, v: int, adjoint: int, a: int, b: int) -> None:
    scaled = g.writer.div(adjoint, b)
    g.give(a, scaled)
    if g.depends[b]:
        g.give(b, g.writer.neg(g.writer.mul(scaled, v)))


def _power(g: _Gradient, v: int, adjoint: int, a: int, r: Fraction) -> None:
    w = g.writer
    g.give(a, w.mul(adjoint, w.mul(w.constant(r), w.power(a, r - 1))))


def _pow(g: _Gradient, v: int, adjoint: int, a: int, b: int) -> None:
    w = g.writer
    if g.depends[a]:
        g.give(a, w.mul(adjoint, w.mul(b, w.pow(a, w.sub(b, w.one)))))
    if g.depends[b]:
        slope = w.mul(v, w.function("ln", a))
        if a not in w.constants:
            # 0^b stays 0 as b changes, though ln(0) is infinite.
            slope = w.select(w.put("eq", a, w.zero), w.zero, slope)
        g.give(b, w.mul(adjoint, slope))


def _if(g: _Gradient, v: int, adjoint: int, condition: int, a: int, b: int) -> None:
    g.give_selected(adjoint, condition, a, b)


def _min(g: _Gradient, v: int, adjoint: int, a: int, b: int) -> None:
    g.give_selected(adjoint, g.writer.put("le", a, b), a, b)


def _max(g: _Gradient, v: int, adjoint: int, a: int, b: int) -> None:
    g.give_selected(adjoint, g.writer.put("le", b, a), a, b)


def _atan2(g: _Gradient, v: int, adjoint: int, y: int, x: int) -> None:
    w = g.writer
    scaled = w.div(adjoint, w.add(w.mul(y, y), w.mul(x, x)))
    g.give(y, w.mul(scaled, x))
    g.give(x, w.neg(w.mul(scaled, y)))


def _hypot(g: _Gradient, v: int, adjoint: int, a: int, b: int) -> None:
    w = g.writer
    scaled = w.select(w.put("eq", v, w.zero), w.zero, w.div(adjoint, v))
    g.give(a, w.mul(scaled, a))
    g.give(b, w.mul(scaled, b))


def _logmean(g: _Gradient, v: int, adjoint: int, a: int, b: int) -> None:
    w = g.writer
    if g.depends[a]:
        g.give(a, w.mul(adjoint, w.put("logmean_slope", a, b)))
    if g.depends[b]:
        g.give(b, w.mul(adjoint, w.put("logmean_slope", b, a)))


def _strip(g: _Gradient, v: int, adjoint: int, a: int, unit: Unit) -> None:
    g.give(a, g.writer.div(adjoint, g.writer.constant(unit.factor)))


def _attach(g: _Gradient, v: int, adjoint: int, a: int, unit: Unit) -> None:
    g.give(a, g.writer.mul(adjoint, g.writer.constant(unit.factor)))


def _interpolated(g: _Gradient, v: int, adjoint: int, *operands: Any) -> None:
    *arguments, interpolant = operands
    if interpolant.is_stepped:
        return
    operation = g.writer.instructions[v][0]
    for a, slope in zip(arguments, interpolant.partials):
        if g.depends[a]:
            g.give(a, g.writer.mul(adjoint, g.writer.put(operation, *arguments, slope)))


_RULES: dict[str, Callable[..., None]] = {
    "add": _add,
    "sub": _sub,
    "neg": _neg,
    "mul": _mul,
    "div": _div,
    "power": _power,
    "pow": _pow,
    "if": _if,
    "min": _min,
    "max": _max,
    "atan2": _atan2,
    "hypot": _hypot,
    "logmean": _logmean,
    "strip": _strip,
    "attach": _attach,
    "curve": _interpolated,
    "surface": _interpolated,
}


# Derivatives of functions of one argument: called with the writer, the argument and the value.


def _inverse_root(w: Simplifier, square: int) -> int:
    return w.div(w.one, w.function("sqrt", square))


def _one_less_square(w: Simplifier, a: int) -> int:
    # (1 - a)(1 + a) keeps its digits near a = 1, where 1 - a^2 cancels.
    return w.mul(w.sub(w.one, a), w.add(w.one, a))


def _tanh_slope(w: Simplifier, a: int, v: int) -> int:
    # 1 - tanh^2 cancels and cosh overflows for large arguments; with u = exp(-2|a|) it is 4u/(1 + u)^2.
    u = w.function("exp", w.mul(w.constant(Fraction(-2)), w.function("abs", a)))
    return w.div(w.mul(w.constant(Fraction(4)), u), w.power(w.add(w.one, u), Fraction(2)))


_SLOPES: dict[str, Callable[[Simplifier, int, int], int]] = {
    "sqrt": lambda w, a, v: w.div(w.constant(Fraction(1, 2)), v),
    "exp": lambda w, a, v: v,
    "ln": lambda w, a, v: w.div(w.one, a),
    "log10": lambda w, a, v: w.div(w.constant(1.0 / math.log(10.0)), a),
    "sin": lambda w, a, v: w.function("cos", a),
    "cos": lambda w, a, v: w.neg(w.function("sin", a)),
    "tan": lambda w, a, v: w.add(w.one, w.power(v, Fraction(2))),
    "asin": lambda w, a, v: _inverse_root(w, _one_less_square(w, a)),
    "acos": lambda w, a, v: w.neg(_inverse_root(w, _one_less_square(w, a))),
    "atan": lambda w, a, v: w.div(w.one, w.add(w.one, w.power(a, Fraction(2)))),
    "sinh": lambda w, a, v: w.function("cosh", a),
    "cosh": lambda w, a, v: w.function("sinh", a),
    "tanh": _tanh_slope,
    "abs": lambda w, a, v: w.function("sign", a),
    "sign": lambda w, a, v: w.zero,
    "erf": lambda w, a, v: w.mul(
        w.constant(2.0 / math.sqrt(math.pi)), w.function("exp", w.neg(w.power(a, Fraction(2))))
    ),
    "gamma": lambda w, a, v: w.mul(v, w.function("digamma", a)),
    "asinh": lambda w, a, v: _inverse_root(w, w.add(w.one, w.power(a, Fraction(2)))),
    "acosh": lambda w, a, v: _inverse_root(w, w.mul(w.sub(a, w.one), w.add(a, w.one))),
    "atanh": lambda w, a, v: w.div(w.one, _one_less_square(w, a)),
}
