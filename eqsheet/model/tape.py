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
``("lt", a, b)``, ``("le", a, b)``,     comparisons (a > b is written with swapped operands)
``("eq", a, b)``
``("and", a, b)``, ``("or", a, b)``,    on truth values
``("not", a)``
``("if", c, a, b)``                     a where c, else b
======================================  =================================================================
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from typing import TypeAlias

from eqsheet.units.dimension import Dimension

Instruction: TypeAlias = tuple[object, ...]

UNARY_FUNCTIONS = (
    "sqrt exp ln log10 sin cos tan asin acos atan sinh cosh tanh abs sign erf gamma".split()
)
BINARY_FUNCTIONS = "atan2 min max hypot logmean".split()
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
    """

    value: float
    dimension: Dimension
    kind: str
    start: int
    end: int


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
        return Tape(tuple(self.instructions), outputs, len(self.quantities), len(self.literals))

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
