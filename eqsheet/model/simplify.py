"""Tapes written with simplification: exact constants folded, neutral operands dropped, nothing twice.

The rules hold wherever the expression has a value. They may drop an operand that has none (``0*x`` is 0 even
where x is infinite), which is wanted in derivatives; `evaluate` judges a statement from its own tape, which
is never simplified.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from fractions import Fraction
from operator import add, mul, sub, truediv
from typing import Any

from eqsheet.model.functions import ALL_BINARY_FUNCTIONS, ALL_UNARY_FUNCTIONS, UNARY, as_float
from eqsheet.model.tape import Tape

ZERO = Fraction(0)
ONE = Fraction(1)
# Whole powers of exact constants are folded up to this exponent; beyond it the fraction may grow without
# bound.
_LARGEST_FOLDED_POWER = 16

# Number of operands of each operation that are instructions; what follows them (a power, a unit, an
# interpolant) is not.
ARITY: dict[Any, int] = {
    **dict.fromkeys(("quantity", "literal", "const"), 0),
    **dict.fromkeys(("neg", "power", "strip", "attach", "curve", "not", *ALL_UNARY_FUNCTIONS), 1),
    **dict.fromkeys(("add", "sub", "mul", "div", "pow", "lt", "le", "eq", "and", "or"), 2),
    **dict.fromkeys(("surface", *ALL_BINARY_FUNCTIONS), 2),
    "if": 3,
}


def renumbered(instruction: tuple[Any, ...], new: Sequence[int] | dict[int, int]) -> tuple[Any, ...]:
    """`instruction` with each operand i replaced by ``new[i]``; leaves are left alone."""
    count = ARITY[instruction[0]]
    if count == 2:
        return (instruction[0], new[instruction[1]], new[instruction[2]], *instruction[3:])
    if count == 1:
        return (instruction[0], new[instruction[1]], *instruction[2:])
    if count == 0:
        return instruction
    return (instruction[0], *[new[i] for i in instruction[1:]])


def uses(instructions: Sequence[tuple[Any, ...]], outputs: Sequence[int]) -> list[int]:
    """For each instruction, how often it is used by `outputs` and by what they need; 0 where it is not needed."""
    counts = [0] * len(instructions)
    for i in outputs:
        counts[i] += 1
    for i in range(len(instructions) - 1, -1, -1):
        if counts[i]:
            instruction = instructions[i]
            for j in instruction[1 : 1 + ARITY[instruction[0]]]:
                counts[j] += 1
    return counts


def prune(tape: Tape) -> tuple[Tape, tuple[int | None, ...]]:
    """`tape` without the instructions no output needs, and the new number of each old instruction.

    The numbers of quantities and literals stay as they are.
    """
    kept, new = _kept(tape.instructions, tape.outputs)
    outputs = tuple(new[i] for i in tape.outputs)
    numbers = tuple(new.get(i) for i in range(len(tape.instructions)))
    return Tape(kept, outputs, tape.quantities, tape.literals), numbers


def _kept(
    instructions: Sequence[tuple[Any, ...]], outputs: Sequence[int]
) -> tuple[tuple[tuple[Any, ...], ...], dict[int, int]]:
    kept: list[tuple[Any, ...]] = []
    new: dict[int, int] = {}
    for i, count in enumerate(uses(instructions, outputs)):
        if count:
            new[i] = len(kept)
            kept.append(renumbered(instructions[i], new))
    return tuple(kept), new


def _folded(operation: Callable[[Any, Any], Any], x: Any, y: Any) -> Any:
    try:
        return operation(x, y)
    except OverflowError:  # a fraction beyond the floats beside a float
        return operation(as_float(x), as_float(y))


class Simplifier:
    """Writes instructions, each in its simplest form, and gives their indices.

    >>> s = Simplifier()
    >>> x = s.put("quantity", 0)
    >>> s.add(x, s.mul(s.constant(ZERO), s.put("literal", 0))) == x
    True
    """

    def __init__(self) -> None:
        self.instructions: list[tuple[Any, ...]] = []
        self.constants: dict[int, Any] = {}
        self._index: dict[tuple[Any, ...], int] = {}
        self.zero = self.constant(ZERO)
        self.one = self.constant(ONE)

    # --- plain writing ------------------------------------------------------------------------------------

    def put(self, *instruction: Any) -> int:
        """Index of `instruction` as it is, written if it is not there yet."""
        index = self._index.get(instruction)
        if index is None:
            index = self._index[instruction] = len(self.instructions)
            self.instructions.append(instruction)
        return index

    def constant(self, value: Fraction | float) -> int:
        """Index of an exact constant."""
        # Hashing a fraction takes as long as all the rest here, so its parts are the key.
        key: tuple[Any, ...] = ("const", value)
        if isinstance(value, Fraction):
            key = ("const", value.numerator, value.denominator)
        index = self._index.get(key)
        if index is None:
            index = self._index[key] = len(self.instructions)
            self.instructions.append(("const", value))
            self.constants[index] = value
        return index

    def copy(
        self, tape: Tape, quantities: Sequence[int] | None = None, literals: Sequence[int] | None = None
    ) -> list[int]:
        """Simplified copy of all instructions of `tape`: for each its index here.

        `quantities` and `literals` give the indices here that stand for the tape's leaves; without them the
        leaves keep their numbers.
        """
        new: list[int] = []
        instructions: tuple[tuple[Any, ...], ...] = tape.instructions
        for instruction in instructions:
            operation = instruction[0]
            if operation == "quantity":
                index = self.put(*instruction) if quantities is None else quantities[instruction[1]]
            elif operation == "literal":
                index = self.put(*instruction) if literals is None else literals[instruction[1]]
            elif operation == "const":
                index = self.constant(instruction[1])
            else:
                index = self.apply(*renumbered(instruction, new))
            new.append(index)
        return new

    def tape(self, outputs: Sequence[int], quantities: int, literals: int) -> Tape:
        """The tape of `outputs`, without what they do not need."""
        kept, new = _kept(self.instructions, outputs)
        return Tape(kept, tuple(new[i] for i in outputs), quantities, literals)

    # --- simplified writing -------------------------------------------------------------------------------

    def apply(self, operation: str, *operands: Any) -> int:
        """Index of the simplified instruction; the operands as in a tape, leaves excluded."""
        method = _METHODS.get(operation)
        if method is not None:
            return method(self, *operands)
        if operation in UNARY:
            return self.function(operation, *operands)
        return self.put(operation, *operands)

    def neg(self, a: int) -> int:
        """-a"""
        value = self.constants.get(a)
        if value is not None:
            return self.constant(-value)
        operation, *rest = self.instructions[a]
        if operation == "neg":
            return int(rest[0])
        if operation == "sub":
            return self.put("sub", rest[1], rest[0])
        return self.put("neg", a)

    def add(self, a: int, b: int) -> int:
        """a + b"""
        if a == self.zero:
            return b
        if b == self.zero:
            return a
        x, y = self.constants.get(a), self.constants.get(b)
        if x is not None and y is not None:
            return self.constant(_folded(add, x, y))
        inner = self.instructions[b]
        if inner[0] == "neg":
            return self.sub(a, inner[1])
        inner = self.instructions[a]
        if inner[0] == "neg":
            return self.sub(b, inner[1])
        return self.put("add", a, b) if a < b else self.put("add", b, a)

    def sub(self, a: int, b: int) -> int:
        """a - b"""
        if b == self.zero:
            return a
        if a == self.zero:
            return self.neg(b)
        if a == b:
            return self.zero
        x, y = self.constants.get(a), self.constants.get(b)
        if x is not None and y is not None:
            return self.constant(_folded(sub, x, y))
        inner = self.instructions[b]
        if inner[0] == "neg":
            return self.add(a, inner[1])
        inner = self.instructions[a]
        if inner[0] == "neg":
            return self.neg(self.add(inner[1], b))
        return self.put("sub", a, b)

    def mul(self, a: int, b: int) -> int:
        """a * b"""
        if a == self.one:
            return b
        if b == self.one:
            return a
        if a == self.zero or b == self.zero:
            return self.zero
        x, y = self.constants.get(a), self.constants.get(b)
        if y is not None:
            if x is not None:
                return self.constant(_folded(mul, x, y))
            a, b, x = b, a, y
        p, q = self.instructions[a], self.instructions[b]
        if x is not None:
            if x == -1:
                return self.neg(b)
            if q[0] == "mul" and q[1] in self.constants:
                return self.mul(self.constant(_folded(mul, x, self.constants[q[1]])), q[2])
        if q[0] == "neg":
            return self.mul(self.constant(-x), q[1]) if x is not None else self.neg(self.mul(a, q[1]))
        if p[0] == "neg":
            return self.neg(self.mul(p[1], b))
        if q[0] == "div" and q[1] == self.one:
            return self.div(a, q[2])
        if p[0] == "div" and p[1] == self.one:
            return self.div(b, p[2])
        if x is not None or a < b:
            return self.put("mul", a, b)
        return self.put("mul", b, a)

    def div(self, a: int, b: int) -> int:
        """a / b"""
        if b == self.one:
            return a
        if b == self.zero:
            return self.put("div", a, b)
        if a == self.zero:
            return a
        x, y = self.constants.get(a), self.constants.get(b)
        if y is not None:
            if x is not None:
                return self.constant(_folded(truediv, x, y)) if y else self.put("div", a, b)
            if y == -1:
                return self.neg(a)
        p, q = self.instructions[a], self.instructions[b]
        if p[0] == "neg":
            return self.neg(self.div(p[1], b))
        if q[0] == "neg":
            return self.neg(self.div(a, q[1]))
        if q[0] == "div" and q[1] == self.one:
            return self.mul(a, q[2])
        return self.put("div", a, b)

    def power(self, a: int, r: Fraction) -> int:
        """a to the exact power r; a^0 is 1"""
        if r == 0:
            return self.one
        if r == 1:
            return a
        value = self.constants.get(a)
        if (
            isinstance(value, Fraction)
            and r.denominator == 1
            and abs(r.numerator) <= _LARGEST_FOLDED_POWER
            and (value or r > 0)
        ):
            return self.constant(Fraction(value**r.numerator))
        inner = self.instructions[a]
        if inner[0] == "power" and r.denominator == 1 and inner[2].denominator == 1:
            return self.power(inner[1], inner[2] * r)
        if inner[0] == "neg" and r.denominator == 1:
            positive = self.power(inner[1], r)
            return positive if r.numerator % 2 == 0 else self.neg(positive)
        key = ("power", a, r.numerator, r.denominator)
        index = self._index.get(key)
        if index is None:
            index = self._index[key] = len(self.instructions)
            self.instructions.append(("power", a, r))
        return index

    def pow(self, a: int, b: int) -> int:
        """a to the power b"""
        exponent = self.constants.get(b)
        if isinstance(exponent, Fraction):
            return self.power(a, exponent)
        if a == self.one:
            return a
        return self.put("pow", a, b)

    def function(self, operation: str, a: int) -> int:
        """A function of one argument; of a constant it becomes a constant where it has a value."""
        constant = self.constants.get(a)
        if constant is not None:
            try:
                return self.constant(UNARY[operation].value(float(constant)))
            except (ValueError, ZeroDivisionError, OverflowError):
                pass
        return self.put(operation, a)

    def select(self, condition: int, a: int, b: int) -> int:
        """a where the condition holds, else b"""
        return a if a == b else self.put("if", condition, a, b)


_METHODS: dict[str, Callable[..., int]] = {
    "neg": Simplifier.neg,
    "add": Simplifier.add,
    "sub": Simplifier.sub,
    "mul": Simplifier.mul,
    "div": Simplifier.div,
    "power": Simplifier.power,
    "pow": Simplifier.pow,
    "if": Simplifier.select,
}
