"""Expressions as tapes: flat, hash-consed, and shared by all formulas of the same shape.

A *tape* is a tuple of instructions in evaluation order, each a tuple ``(operation, *operands)`` whose operands
are indices of earlier instructions (unless said otherwise below). Quantities and literals are numbered
locally, so ``a = b + 2 m`` and ``u = v + 7 s`` have one tape, which is differentiated, isolated and compiled
once. A *formula* binds a tape to the quantities and literals of a worksheet.

Operations
----------
======================================  =================================================================
``("quantity", k)``                     k-th quantity of the formula (leaf)
``("literal", k)``                      k-th literal of the formula, in SI (leaf)
``("const", v)``                        exact constant, `fractions.Fraction` or float (leaf; dimensionless;
                                        ``Fraction(0)`` fits any dimension)
``("neg", a)``, ``("add", a, b)``,      arithmetic
``("sub", a, b)``, ``("mul", a, b)``,
``("div", a, b)``
``("power", a, r)``                     a to the exact constant power r (`Fraction`, not an index)
``("pow", a, b)``                       general power; base and exponent dimensionless
``("sqrt", a)`` ... ``("erf", a)``      functions of one argument, see `UNARY_FUNCTIONS`
``("atan2", a, b)`` ...                 functions of two arguments, see `BINARY_FUNCTIONS`; ``min`` and
                                        ``max`` of more arguments are nested
``("strip", a, unit)``                  plain number of a in `unit` (a `Unit`, not an index)
``("attach", a, unit)``                 quantity of the plain number a in `unit`
``("curve", a, f)``                     value of a curve at a (f an `Interpolant`, not an index)
``("surface", a, b, f)``                value of a surface at a and b (likewise)
``("lt", a, b)``, ``("le", a, b)``,     comparisons (a > b is written with swapped operands)
``("eq", a, b)``
``("and", a, b)``, ``("or", a, b)``,    on truth values
``("not", a)``
``("if", c, a, b)``                     a where c, else b
======================================  =================================================================
"""

from __future__ import annotations

from dataclasses import dataclass, field
from fractions import Fraction
from functools import lru_cache
from typing import Any, TypeAlias

from eqsheet.units.dimension import Dimension

Instruction: TypeAlias = tuple[Any, ...]

UNARY_FUNCTIONS = (
    *("sqrt", "exp", "ln", "log10", "sin", "cos", "tan", "asin", "acos", "atan"),
    *("sinh", "cosh", "tanh", "abs", "sign", "erf", "gamma"),
)
BINARY_FUNCTIONS = ["atan2", "min", "max", "hypot", "logmean"]
COMPARISONS = ("lt", "le", "eq")


@dataclass(frozen=True, slots=True)
class Literal:
    """A number of the worksheet in SI base units.

    Attributes
    ----------
    value : float
        SI value, origin included.
    dimension : Dimension
    kind : str
        ``reading`` (degC, degF, gauge pressure), ``difference`` (delta_degC, and degC after ``±``), ``absolute`` (K,
        bar, Pa: a pure unit of temperature or pressure without origin) or ``plain`` (all else).
    start, end : int
        Place in the logical line.
    unit : str
        The unit as written, for messages; empty if none.
    index : str
        Name of the index it stands for in a family's formula, whose members give it values; else empty.
    """

    value: float
    dimension: Dimension
    kind: str
    start: int
    end: int
    unit: str = ""
    index: str = ""


@dataclass(frozen=True, slots=True)
class Tape:
    """A shape of expressions.

    Attributes
    ----------
    instructions : tuple of Instruction
        In evaluation order, without duplicates, each used by a later one or an output.
    outputs : tuple of int
        Indices of the results; for an equation (left, right).
    quantities, literals : int
        How many of each the tape takes.
    """

    instructions: tuple[Instruction, ...]
    outputs: tuple[int, ...]
    quantities: int
    literals: int
    _hash: int = field(init=False, repr=False, compare=False)
    # An exact 3 equals the float 3.0, but the tapes that hold them are not the same.
    _constants: tuple[type, ...] = field(init=False, repr=False)

    def __post_init__(self) -> None:
        kinds = tuple([type(i[1]) for i in self.instructions if i[0] == "const"])
        object.__setattr__(self, "_constants", kinds)
        # Taken once: a tape is a key of many memories, and hashing its fractions anew costs more than a look-up.
        content = (self.instructions, self.outputs, self.quantities, self.literals)
        object.__setattr__(self, "_hash", hash(content))

    def __hash__(self) -> int:
        return self._hash

    def __reduce__(self) -> tuple[type[Tape], tuple[object, ...]]:
        # Hashes of strings differ between processes, so the hash is not carried over.
        return Tape, (self.instructions, self.outputs, self.quantities, self.literals)


@lru_cache(maxsize=1 << 16)
def interned(tape: Tape) -> Tape:
    """The first tape seen that equals `tape`, so that later comparisons are by identity."""
    return tape


@dataclass(frozen=True, slots=True)
class Formula:
    """A tape bound to the quantities of a worksheet.

    Attributes
    ----------
    tape : Tape
    quantities : tuple of int
        Numbers (in the equation system) of the quantities the tape takes, all different.
    literals : tuple of Literal
    places : tuple of (int, int)
        For each instruction of the tape, start and end of what it stands for in the logical line.
    statement : int
        Number of the statement it comes from.
    alike : tuple of (int, int)
        Pairs of instructions whose dimensions (and kinds) must agree besides what the tape itself demands: an
        equation has ``((left, right),)``.
    differences : tuple of int
        Instructions that stand for a difference (the ``within`` of a limit, a tolerance).
    """

    tape: Tape
    quantities: tuple[int, ...]
    literals: tuple[Literal, ...]
    places: tuple[tuple[int, int], ...]
    statement: int
    alike: tuple[tuple[int, int], ...] = ()
    differences: tuple[int, ...] = ()


def extract(formula: Formula, outputs: tuple[int, ...]) -> Formula:
    """The formula of `outputs` alone: instructions, quantities and literals they do not need are left out.

    Pairs of `alike` and `differences` are kept where all they name is kept.
    """
    instructions = formula.tape.instructions
    needed = [False] * len(instructions)
    for output in outputs:
        needed[output] = True
    for i in range(len(instructions) - 1, -1, -1):
        if needed[i]:
            for operand in operands_of(instructions[i]):
                needed[operand] = True
    number: dict[int, int] = {}
    kept: list[Instruction] = []
    slots: tuple[list[int], list[int]] = ([], [])
    for i, instruction in enumerate(instructions):
        if not needed[i]:
            continue
        number[i] = len(kept)
        operation = instruction[0]
        if operation in ("quantity", "literal"):
            own = slots[operation == "literal"]
            own.append(instruction[1])
            kept.append((operation, len(own) - 1))
        elif operation == "const":
            kept.append(instruction)
        else:
            operands = operands_of(instruction)
            rest = instruction[1 + len(operands) :]
            kept.append((operation, *(number[a] for a in operands), *rest))
    return Formula(
        Tape(tuple(kept), tuple(number[o] for o in outputs), len(slots[0]), len(slots[1])),
        tuple(formula.quantities[k] for k in slots[0]),
        tuple(formula.literals[k] for k in slots[1]),
        tuple(place for place, need in zip(formula.places, needed) if need),
        formula.statement,
        tuple((number[a], number[b]) for a, b in formula.alike if a in number and b in number),
        tuple(number[a] for a in formula.differences if a in number),
    )


_LEAVES = frozenset(("quantity", "literal", "const"))
_ONE_OPERAND = frozenset(("power", "strip", "attach", "curve"))


def operands_of(instruction: Instruction) -> tuple[int, ...]:
    """Indices of the instructions it takes its values from.

    >>> operands_of(("add", 3, 4)), operands_of(("power", 3, Fraction(2))), operands_of(("quantity", 0))
    ((3, 4), (3,), ())
    """
    operation = instruction[0]
    if operation in _LEAVES:
        return ()
    if operation in _ONE_OPERAND:
        return (instruction[1],)
    if operation == "surface":
        return instruction[1:3]
    return instruction[1:]


class TapeBuilder:
    """Writes one tape, using an instruction again where it occurs again.

    >>> b = TapeBuilder()
    >>> x = b.quantity(41, (0, 1))
    >>> y = b.apply("add", b.apply("power", x, Fraction(2)), b.apply("power", x, Fraction(2)))
    >>> b.tape((y,)).instructions
    (('quantity', 0), ('power', 0, Fraction(2, 1)), ('add', 1, 1))
    """

    def __init__(self) -> None:
        self.instructions: list[Instruction] = []
        self.places: list[tuple[int, int]] = []
        self.quantities: list[int] = []
        self.literals: list[Literal] = []
        self._index: dict[tuple[object, ...], int] = {}
        self._slots: dict[int, int] = {}

    def apply(self, operation: str, *operands: object, place: tuple[int, int] = (0, 0)) -> int:
        """Index of the instruction, added if it is not there yet."""
        # Fraction(1) == 1.0 hash alike, so the type of a constant is part of its key.
        key = (operation, *operands, type(operands[-1]))
        known = self._index.get(key)
        if known is not None:
            return known
        index = len(self.instructions)
        self._index[key] = index
        self.instructions.append((operation, *operands))
        self.places.append(place)
        return index

    def quantity(self, number: int, place: tuple[int, int]) -> int:
        """Index of the leaf for quantity `number` of the equation system."""
        slot = self._slots.get(number)
        if slot is None:
            slot = self._slots[number] = len(self.quantities)
            self.quantities.append(number)
        return self.apply("quantity", slot, place=place)

    def literal(self, literal: Literal) -> int:
        """Index of a new leaf for `literal`."""
        self.literals.append(literal)
        return self.apply("literal", len(self.literals) - 1, place=(literal.start, literal.end))

    def constant(self, value: Fraction | float, place: tuple[int, int] = (0, 0)) -> int:
        """Index of the leaf for an exact constant."""
        return self.apply("const", value, place=place)

    def tape(self, outputs: tuple[int, ...]) -> Tape:
        """The finished tape; instructions no output needs are kept (places must keep their numbers)."""
        return interned(Tape(tuple(self.instructions), outputs, len(self.quantities), len(self.literals)))

    def formula(
        self,
        outputs: tuple[int, ...],
        statement: int,
        alike: tuple[tuple[int, int], ...] = (),
        differences: tuple[int, ...] = (),
    ) -> Formula:
        """The finished tape bound to what was put in."""
        return Formula(
            self.tape(outputs),
            tuple(self.quantities),
            tuple(self.literals),
            tuple(self.places),
            statement,
            alike,
            differences,
        )
