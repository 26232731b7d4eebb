"""Where a dimension comes from, and where in a formula that is blamed for a clash the guilty text is."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass
from fractions import Fraction
from typing import TypeAlias

from eqsheet.model.dimension_elimination import Elimination
from eqsheet.model.dimension_propagation import (
    UNKNOWN,
    Inference,
    Worklines,
    demand_row,
)
from eqsheet.model.dimension_rules import KEEPS, LIKE, Demand, Exponent, Form
from eqsheet.model.dimension_suspects import Suspect, suspects
from eqsheet.model.tape import Formula
from eqsheet.units.dimension import DIMENSIONLESS, Dimension

Place: TypeAlias = tuple[int, int]


@dataclass(frozen=True, slots=True)
class Origin:
    """Where a dimension comes from: a formula and the place in its logical line."""

    formula: int
    place: Place


@dataclass(frozen=True, slots=True)
class Part:
    """A quantity in a clash, its dimension (None: open) and what fixed it (None: this formula, or given)."""

    quantity: int
    power: Exponent
    dimension: Dimension | None
    origin: Origin | None


@dataclass(frozen=True, slots=True)
class Clash:
    """A formula that contradicts the others.

    Attributes
    ----------
    formula : int
    place : (int, int)
        The guilty text in its logical line.
    found : Dimension or None
        Dimension of that text; None where it holds quantities without dimension.
    expected : Dimension or None
        Dimension it ought to have; None as above.
    excess : Dimension
        ``found / expected``, never a plain number.
    what : str
        What demands it: ``equation``, ``sum``, ``comparison``, a function's name, ``exponent`` ...
    against : (int, int) or None
        Place, in the same line, of the text it ought to be like; None where a fixed dimension is demanded.
    other_formula : int
        The formula that fixed the dimension expected; -1 where that is the same line alone.
    other_place : (int, int)
        The place in that other line.
    guilty, innocent : tuple of Part
        Quantities in the guilty text and in the text it ought to be like.
    bare : int
        The quantity the other text consists of, or -1.
    literal : bool
        Whether the guilty text is a single literal.
    suspects : tuple of Suspect
        Knowns whose unit, were it another, would make the formula fit.
    """

    formula: int
    place: Place
    found: Dimension | None
    expected: Dimension | None
    excess: Dimension
    what: str
    against: Place | None
    other_formula: int
    other_place: Place
    guilty: tuple[Part, ...]
    innocent: tuple[Part, ...]
    bare: int
    literal: bool
    suspects: tuple[Suspect, ...]


# --- where a dimension comes from ---------------------------------------------------------------------------


def origins_of(lines: Worklines, given: Collection[int], found: Inference) -> tuple[Origin | None, ...]:
    """For each quantity the line that fixed its dimension, and the place in it."""
    origins: list[Origin | None] = [None] * lines.quantities
    for quantity in range(lines.quantities):
        if quantity in given or found.state[quantity] == UNKNOWN:
            continue
        reason = found.reasons.get(quantity)
        if reason is not None:
            demand = lines.rules[reason.formula].demands[reason.demand]
            place = _witness(lines.formulas[reason.formula], demand, quantity)
            origins[quantity] = Origin(reason.formula, place)
        elif quantity in found.fixed_together:
            source = found.elimination.pivots[quantity].source
            origins[quantity] = Origin(source, extent(lines.formulas[source]))
    return tuple(origins)


def _witness(formula: Formula, demand: Demand, quantity: int) -> Place:
    """Place of what the quantity was likened to, where it stands alone on one side; else the whole."""
    sides = (demand.left, demand.right)
    for side, other in (sides, sides[::-1]):
        if side < 0:
            continue
        instruction = formula.tape.instructions[side]
        slot = instruction[1]
        if instruction[0] == "quantity" and isinstance(slot, int) and formula.quantities[slot] == quantity:
            return formula.places[other] if other >= 0 else formula.places[demand.owner]
    if demand.owner >= 0:
        return formula.places[demand.owner]
    return extent(formula)


def extent(formula: Formula) -> Place:
    """Place from the first to the last output of the formula."""
    places = [formula.places[output] for output in formula.tape.outputs] or list(formula.places)
    return min(start for start, _ in places), max(end for _, end in places)


# --- the guilty text ----------------------------------------------------------------------------------------

#: What an operand comes to: its dimension, and what of it stays open.
_Value: TypeAlias = tuple[Dimension, tuple[tuple[int, Exponent], ...]]


class _Judge:
    """Values of the operands of one formula, in the light of all the others."""

    def __init__(self, lines: Worklines, found: Inference, index: int) -> None:
        self.lines = lines
        self.index = index
        self.formula = lines.formulas[index]
        self.rules = lines.rules[index]
        self.state = found.state
        self.outside = found.elimination
        self.elimination = found.elimination.copy()
        # The formula's own demands may fix what the others leave open; the first that fails is the clash.
        self.failed: list[Demand] = []
        for number, demand in enumerate(self.rules.demands):
            if self.elimination.add(demand_row(lines, index, number, found.state)):
                self.failed.append(demand)

    def value(self, form: Form, elimination: Elimination | None = None) -> _Value:
        dimension = form.constant
        for slot, power in form.literals:
            dimension = dimension * self.formula.literals[slot].dimension ** Fraction(power)
        terms: list[tuple[int, Exponent]] = []
        for slot, power in form.quantities:
            number = self.state[self.formula.quantities[slot]]
            if number == UNKNOWN:
                terms.append((self.formula.quantities[slot], power))
            else:
                dimension = dimension * self.lines.dimensions[number] ** Fraction(power)
        reduced, _ = (elimination or self.elimination).reduce(terms, dimension)
        return reduced.constant, tuple(sorted(reduced.terms.items()))

    def value_of(self, instruction: int) -> _Value | None:
        form = self.rules.forms[instruction]
        return None if form is None else self.value(form)

    def dimension_of(self, instruction: int) -> Dimension | None:
        value = self.value_of(instruction)
        return None if value is None or value[1] else value[0]

    def parts(self, instruction: int, origins: tuple[Origin | None, ...]) -> tuple[Part, ...]:
        """The quantities that the instruction's dimension depends on."""
        parts: dict[int, Part] = {}
        for inner in self._terms(instruction):
            form = self.rules.forms[inner]
            for slot, power in form.quantities if form is not None else ():
                quantity = self.formula.quantities[slot]
                value = self.value(Form(((slot, 1),), (), DIMENSIONLESS))
                dimension = None if value[1] else value[0]
                parts.setdefault(quantity, Part(quantity, power, dimension, origins[quantity]))
        return tuple(parts.values())

    def _terms(self, instruction: int) -> list[int]:
        """The instruction taken apart into its terms, down to where it is no sum any more."""
        terms: list[int] = []
        waiting = [instruction]
        while waiting:
            inner = waiting.pop()
            operands = self.operands_alike(inner)
            waiting.extend(reversed(operands))
            if not operands:
                terms.append(inner)
        return terms

    def operands_alike(self, instruction: int) -> list[int]:
        """Operands that have the instruction's own dimension; none for a product, a function or a leaf."""
        operation, *operands = self.formula.tape.instructions[instruction]
        if operation == "if":
            operands = operands[1:]
        elif operation not in _TRANSPARENT:
            return []
        return [o for o in operands if isinstance(o, int)]

    def closest(self, guilty: int, expected: Dimension | None) -> int:
        """The one term of `guilty` that by itself is not as expected, where the others could be."""
        while expected is not None:
            operands = [(o, self.rules.forms[o]) for o in self.operands_alike(guilty)]
            bad: list[int] = []
            for operand, form in operands:
                value = None if form is None else self.value(form, self.outside)
                if value is None or value[1] or value[0] == expected:
                    continue
                bad.append(operand)
            if len(bad) != 1:
                break
            guilty = bad[0]
        return guilty

    def bare(self, instruction: int) -> int:
        """The quantity that the instruction is, or -1."""
        operation, *operands = self.formula.tape.instructions[instruction]
        slot = operands[0]
        return self.formula.quantities[slot] if operation == "quantity" and isinstance(slot, int) else -1

    def is_leaf(self, instruction: int) -> bool:
        return self.formula.tape.instructions[instruction][0] in ("quantity", "literal", "const")

    def surroundings(self, instruction: int) -> list[_Value]:
        """Values of the operands that, further out, must be like the one at hand."""
        values: list[_Value] = []
        inner = instruction
        for owner in range(instruction + 1, len(self.formula.tape.instructions)):
            operation, *operands = self.formula.tape.instructions[owner]
            if inner not in operands or operation not in _TRANSPARENT:
                continue
            values.extend(self._siblings(operands, inner))
            inner = owner
        for left, right in self.formula.alike:
            if inner in (left, right):
                values.extend(self._siblings([left, right], inner))
        return values

    def _siblings(self, operands: list[object], inner: int) -> list[_Value]:
        siblings = (self.value_of(o) for o in operands if isinstance(o, int) and o != inner)
        return [value for value in siblings if value is not None]

    def weight(self, instruction: int) -> tuple[int, int]:
        """How much is written there: sides that say more are more likely wrong; at par the later one."""
        start = self.formula.places[instruction][0]
        operation = self.formula.tape.instructions[instruction][0]
        return (0 if operation == "quantity" else 1 if self.is_leaf(instruction) else 2, start)


_TRANSPARENT = LIKE.keys() | KEEPS


def fits(lines: Worklines, found: Inference, index: int) -> bool:
    """Whether formula `index` agrees with what the formulas behind `found` say."""
    return not _Judge(lines, found, index).failed


def describe_clash(
    lines: Worklines, found: Inference, origins: tuple[Origin | None, ...], index: int
) -> Clash | None:
    """The clash of formula `index` with what all the others say; None where it fits them."""
    judge = _Judge(lines, found, index)
    if not judge.failed:
        return None
    demand = judge.failed[0]
    guilty, other = demand.left, demand.right
    if other >= 0:
        guilty, other = _guilty_side(judge, demand)
        expected = judge.dimension_of(other)
        excess = _excess(judge, guilty, other)
        guilty = judge.closest(guilty, expected)
    else:
        value = judge.value_of(guilty)
        assert value is not None
        excess = value[0] / demand.needed
        expected = demand.needed
    innocent = judge.parts(other, origins) if other >= 0 else ()
    bare = judge.bare(other) if other >= 0 else -1
    guilty_parts = judge.parts(guilty, origins)
    witness = _witness_of(index, innocent if other >= 0 else guilty_parts)
    return Clash(
        formula=index,
        place=judge.formula.places[guilty],
        found=judge.dimension_of(guilty),
        expected=expected,
        excess=excess,
        what=demand.what,
        against=judge.formula.places[other] if other >= 0 else None,
        other_formula=witness.formula if witness else -1,
        other_place=witness.place if witness else (0, 0),
        guilty=guilty_parts,
        innocent=innocent,
        bare=bare,
        literal=judge.formula.tape.instructions[guilty][0] in ("literal", "const"),
        suspects=suspects(lines, found, index, _changes(judge, guilty, bare, guilty_parts, excess)),
    )


def _changes(
    judge: _Judge, guilty: int, bare: int, parts: tuple[Part, ...], excess: Dimension
) -> dict[int, Dimension]:
    """Factors that would make a clash go away: on the quantity that stands alone, else on those of the guilty text."""
    if not parts:
        return {bare: excess} if bare >= 0 else {}
    if judge.operands_alike(guilty):
        # The terms of a sum fail together.
        return {}
    return {
        part.quantity: (DIMENSIONLESS / excess) ** (1 / Fraction(part.power)) for part in parts if part.power
    }


def _guilty_side(judge: _Judge, demand: Demand) -> tuple[int, int]:
    """Which of the two operands is wrong: the one that what stands around does not agree with."""
    left, right = demand.left, demand.right
    a, b = judge.value_of(left), judge.value_of(right)
    if demand.owner >= 0:
        for value in judge.surroundings(demand.owner):
            if value == a:
                return right, left
            if value == b:
                return left, right
    return (left, right) if judge.weight(left) > judge.weight(right) else (right, left)


def _excess(judge: _Judge, guilty: int, other: int) -> Dimension:
    a, b = judge.value_of(guilty), judge.value_of(other)
    assert a is not None and b is not None
    return a[0] / b[0]


def _witness_of(index: int, parts: tuple[Part, ...]) -> Origin | None:
    """The line to show beside the clash: the one that fixed the first quantity fixed elsewhere."""
    origins = [part.origin for part in parts if part.dimension and part.origin is not None]
    origins += [part.origin for part in parts if part.origin is not None]
    return next((origin for origin in origins if origin.formula != index), None)
