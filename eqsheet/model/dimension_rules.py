"""What a tape demands of the dimensions of its quantities, worked out once a tape.

Dimensions multiply, so every instruction's dimension is a product of powers of the dimensions of the tape's
quantities and literals: a `Form`. A `Demand` is a form that has to come out as a plain number.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache
from typing import TypeAlias

from eqsheet.model.interpolant import Heading
from eqsheet.model.tape import Instruction, Tape
from eqsheet.units.dimension import DIMENSIONLESS, Dimension
from eqsheet.units.unit import Unit

Exponent: TypeAlias = int | Fraction
Powers: TypeAlias = tuple[tuple[int, Exponent], ...]

HALF = Fraction(1, 2)

#: Operations whose operands must be alike and whose result is like them, with what messages call them.
LIKE = {
    "add": "sum",
    "sub": "difference",
    "min": "min",
    "max": "max",
    "hypot": "hypot",
    "logmean": "logmean",
}
#: Operations whose operands must be alike and whose result is a plain number or a truth value.
LIKE_TO_NONE = {"atan2": "atan2", "lt": "comparison", "le": "comparison", "eq": "comparison"}
#: Functions that take a plain number and give one.
OF_NUMBERS = frozenset(
    [
        "exp",
        "ln",
        "log10",
        "sin",
        "cos",
        "tan",
        "asin",
        "acos",
        "atan",
        "sinh",
        "cosh",
        "tanh",
        "erf",
        "gamma",
    ]
)
#: Operations that pass the dimension of their first operand on.
KEEPS = frozenset(["neg", "abs"])


@dataclass(frozen=True, slots=True)
class Form:
    """A product of powers: of quantities and literals by slot, and of a fixed dimension."""

    quantities: Powers
    literals: Powers
    constant: Dimension


@dataclass(frozen=True, slots=True)
class Demand:
    """A form that must be a plain number.

    Attributes
    ----------
    form : Form
        Dimension of ``left`` over that of ``right``.
    what : str
        What demands it, as messages call it: ``sum``, ``equation``, ``comparison``, a function's name ...
    left : int
        Instruction that is judged.
    right : int
        Instruction it must be like; -1 where it must have the dimension `needed`.
    needed : Dimension
        Dimension wanted of ``left`` where there is no ``right``.
    owner : int
        Instruction that demands it; -1 for a pair of the formula.
    """

    form: Form
    what: str
    left: int
    right: int
    needed: Dimension
    owner: int


@dataclass(frozen=True, slots=True)
class TapeRules:
    """Forms of a tape's instructions (None: fits any dimension, as 0 does) and all it demands."""

    tape: Tape
    forms: tuple[Form | None, ...]
    demands: tuple[Demand, ...]


PLAIN = Form((), (), DIMENSIONLESS)


def _whole(power: Exponent) -> Exponent:
    """The exponent as int where it is whole: ints are several times faster than fractions."""
    return power.numerator if power.denominator == 1 else power


def _merge(a: Powers, b: Powers, scale: Exponent) -> Powers:
    if not b:
        return a
    powers = dict(a)
    for slot, power in b:
        total = powers.get(slot, 0) + scale * power
        if total == 0:
            del powers[slot]
        else:
            powers[slot] = _whole(total)
    return tuple(sorted(powers.items()))


def times(a: Form, b: Form, scale: Exponent = 1) -> Form:
    """``a * b^scale``."""
    constant = a.constant
    if b.constant:
        constant = constant * (b.constant if scale == 1 else b.constant ** Fraction(scale))
    return Form(_merge(a.quantities, b.quantities, scale), _merge(a.literals, b.literals, scale), constant)


def raised(a: Form, power: Exponent) -> Form:
    """``a^power``."""
    return times(PLAIN, a, _whole(power)) if power != 0 else PLAIN


def fixed(dimension: Dimension) -> Form:
    """The form that is `dimension` whatever the quantities are."""
    return Form((), (), dimension)


class _Reader:
    """Goes through a tape once, collecting forms and demands."""

    def __init__(self) -> None:
        self.forms: list[Form | None] = []
        self.demands: list[Demand] = []

    def form(self, operand: object) -> Form | None:
        assert isinstance(operand, int)
        return self.forms[operand]

    def like(self, left: int, right: int, what: str, owner: int) -> Form | None:
        """Demand that both are alike; gives the form of either (None where both fit any)."""
        a, b = self.forms[left], self.forms[right]
        if a is None:
            return b
        if b is not None and a != b:
            self.demands.append(Demand(times(a, b, -1), what, left, right, DIMENSIONLESS, owner))
        return a

    def has(self, operand: int, needed: Dimension, what: str, owner: int) -> None:
        """Demand that the operand has the dimension `needed`."""
        a = self.forms[operand]
        if a is None:
            return
        form = times(a, fixed(needed), -1)
        if form != PLAIN:
            self.demands.append(Demand(form, what, operand, -1, needed, owner))

    def read(self, instruction: Instruction, owner: int) -> Form | None:
        operation = instruction[0]
        assert isinstance(operation, str)
        rule = _RULES.get(operation)
        if rule is not None:
            return rule(self, instruction, owner)
        if operation in LIKE:
            return self.like(instruction[1], instruction[2], LIKE[operation], owner)
        if operation in LIKE_TO_NONE:
            self.like(instruction[1], instruction[2], LIKE_TO_NONE[operation], owner)
            return PLAIN
        if operation in OF_NUMBERS:
            self.has(instruction[1], DIMENSIONLESS, operation, owner)
            return PLAIN
        if operation in KEEPS:
            return self.form(instruction[1])
        raise ValueError(f"no dimension rule for the operation {operation!r}")


_Rule: TypeAlias = Callable[[_Reader, Instruction, int], Form | None]


def _quantity(reader: _Reader, instruction: Instruction, owner: int) -> Form:
    slot = instruction[1]
    assert isinstance(slot, int)
    return Form(((slot, 1),), (), DIMENSIONLESS)


def _literal(reader: _Reader, instruction: Instruction, owner: int) -> Form:
    slot = instruction[1]
    assert isinstance(slot, int)
    return Form((), ((slot, 1),), DIMENSIONLESS)


def _const(reader: _Reader, instruction: Instruction, owner: int) -> Form | None:
    return None if instruction[1] == 0 else PLAIN


def _mul(reader: _Reader, instruction: Instruction, owner: int) -> Form | None:
    a, b = reader.form(instruction[1]), reader.form(instruction[2])
    return None if a is None or b is None else times(a, b)


def _div(reader: _Reader, instruction: Instruction, owner: int) -> Form | None:
    a, b = reader.form(instruction[1]), reader.form(instruction[2])
    return None if a is None or b is None else times(a, b, -1)


def _power(reader: _Reader, instruction: Instruction, owner: int) -> Form | None:
    a, exponent = reader.form(instruction[1]), instruction[2]
    assert isinstance(exponent, Fraction)
    return PLAIN if exponent == 0 else None if a is None else raised(a, exponent)


def _sqrt(reader: _Reader, instruction: Instruction, owner: int) -> Form | None:
    a = reader.form(instruction[1])
    return None if a is None else raised(a, HALF)


def _pow(reader: _Reader, instruction: Instruction, owner: int) -> Form:
    base, exponent = instruction[1], instruction[2]
    assert isinstance(base, int) and isinstance(exponent, int)
    reader.has(base, DIMENSIONLESS, "base", owner)
    reader.has(exponent, DIMENSIONLESS, "exponent", owner)
    return PLAIN


def _if(reader: _Reader, instruction: Instruction, owner: int) -> Form | None:
    return reader.like(instruction[2], instruction[3], "if", owner)


def _strip(reader: _Reader, instruction: Instruction, owner: int) -> Form:
    operand, unit = instruction[1], instruction[2]
    assert isinstance(operand, int) and isinstance(unit, Unit)
    reader.has(operand, unit.dimension, "strip", owner)
    return PLAIN


def _attach(reader: _Reader, instruction: Instruction, owner: int) -> Form:
    operand, unit = instruction[1], instruction[2]
    assert isinstance(operand, int) and isinstance(unit, Unit)
    reader.has(operand, DIMENSIONLESS, "attach", owner)
    return fixed(unit.dimension)


def _interpolated(reader: _Reader, instruction: Instruction, owner: int) -> Form:
    _, *arguments, interpolant = instruction
    heading: Heading = interpolant.heading
    for argument, dimension in zip(arguments, heading.dimensions):
        reader.has(argument, dimension, heading.name, owner)
    return fixed(heading.dimension)


def _plain(reader: _Reader, instruction: Instruction, owner: int) -> Form:
    return PLAIN


_RULES: dict[str, _Rule] = {
    "quantity": _quantity,
    "literal": _literal,
    "const": _const,
    "mul": _mul,
    "div": _div,
    "power": _power,
    "sqrt": _sqrt,
    "pow": _pow,
    "if": _if,
    "strip": _strip,
    "attach": _attach,
    "curve": _interpolated,
    "surface": _interpolated,
    "sign": _plain,
    "and": _plain,
    "or": _plain,
    "not": _plain,
}


@lru_cache(maxsize=8192)
def rules_of(tape: Tape, alike: tuple[tuple[int, int], ...]) -> TapeRules:
    """Forms and demands of `tape`, and of the pairs of instructions `alike` of a formula.

    >>> from eqsheet.model.tape import TapeBuilder
    >>> b = TapeBuilder()
    >>> x, y = b.quantity(7, (0, 1)), b.quantity(8, (4, 5))
    >>> rules_of(b.tape((x, y)), ((x, y),)).demands[0].form.quantities
    ((0, 1), (1, -1))
    """
    reader = _Reader()
    for owner, instruction in enumerate(tape.instructions):
        reader.forms.append(reader.read(instruction, owner))
    for left, right in alike:
        reader.like(left, right, "equation", -1)
    return TapeRules(tape, tuple(reader.forms), tuple(reader.demands))
