"""Readings and differences within one formula: weights of its instructions and what they must satisfy.

A reading has an origin (20 degC, 3 barg), a difference has none. Give a reading the weight 1 and a difference
the weight 0: weights add where values are added, so ``T_2 - T_1`` has 0, ``T_1 + dT`` has 1, a mean
``(T_1 + T_2)/2`` has 1, and ``T_1 + 2 degC``, a slip, has 2. Sides of an equation have one weight.

Only certain misuse may be refused, so wherever a weight is in doubt there is none: products with quantities,
functions, and multiples such as ``0.53*p_1``, which is sound on absolute values. A value in K, Pa or bar can
be either.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction

from eqsheet.model.dimension_propagation import evaluate
from eqsheet.model.dimension_rules import rules_of
from eqsheet.model.interpolant import Interpolant
from eqsheet.model.kind_weights import (
    DIFFERENCE,
    ONE,
    READING,
    ZERO,
    Weight,
    added,
    forced_kinds,
    is_difference,
    scaled,
    with_known,
)
from eqsheet.model.tape import Formula, Instruction, Tape
from eqsheet.units.dimension import DIMENSIONLESS, Dimension
from eqsheet.units.unit import Unit

TEMPERATURE = Dimension.of({"K": 1})
PRESSURE = Dimension.of({"kg": 1, "m": -1, "s": -2})
KEPT_APART = (TEMPERATURE, PRESSURE)


@dataclass(frozen=True, slots=True)
class Agreement:
    """Two instructions that must be of one kind; ``right`` -1: ``left`` must have the weight `needed`."""

    left: int
    right: int
    owner: int
    needed: int = READING


@dataclass(frozen=True, slots=True)
class Breach:
    """An agreement that cannot hold, with the two weights."""

    agreement: Agreement
    left: Weight
    right: Weight


@dataclass(frozen=True, slots=True)
class KindVisit:
    """What a formula alone gives: kinds by slot, with the agreement that fixed each, and a breach if any."""

    solved: tuple[tuple[int, int, Agreement], ...]
    breach: Breach | None


class KindShape:
    """What all formulas of one tape, with literals and quantities of the same sorts, say about kinds.

    What follows from given kinds is remembered: a thousand lines of one shape are worked out once.
    """

    def __init__(self, formula: Formula, known: Sequence[Dimension | None]) -> None:
        self.formula = formula
        self.instructions = formula.tape.instructions
        self._weights: dict[tuple[int | None, ...], list[Weight | None]] = {}
        self._visits: dict[tuple[int | None, ...], KindVisit] = {}
        forms = rules_of(formula.tape, formula.alike).forms
        literals = [literal.dimension for literal in formula.literals]
        self.dimensions: list[Dimension] = []
        self.apart: list[bool] = []
        for form in forms:
            value, unknown = (DIMENSIONLESS, []) if form is None else evaluate(form, literals, known)
            self.dimensions.append(value)
            self.apart.append(not unknown and value in KEPT_APART)
        self.fits_any = [form is None for form in forms]
        self.numbers = self._numbers()
        self.agreements = self._agreements()
        self.free_sums = self._free_sums()

    @property
    def concerned(self) -> bool:
        """Whether temperatures or pressures occur at all."""
        return any(self.apart)

    # --- what does not depend on kinds -----------------------------------------------------------------

    def _numbers(self) -> list[Fraction | None]:
        """Values of the instructions that are numbers without quantities, exactly as typed."""
        numbers: list[Fraction | None] = []
        for operation, *operands in self.instructions:
            value: Fraction | None = None
            if operation == "const":
                value = Fraction(str(operands[0]))
            elif operation == "literal" and isinstance(operands[0], int):
                literal = self.formula.literals[operands[0]]
                value = Fraction(repr(literal.value)) if literal.dimension == DIMENSIONLESS else None
            elif operation in ("neg", "add", "sub", "mul", "div"):
                parts = [numbers[o] for o in operands if isinstance(o, int)]
                known = [part for part in parts if part is not None]
                value = _arithmetic(operation, known) if len(known) == len(parts) else None
            numbers.append(value)
        return numbers

    def _agreements(self) -> tuple[Agreement, ...]:
        found: list[Agreement] = []
        for owner, (operation, *operands) in enumerate(self.instructions):
            match operation, operands:
                case (("lt" | "le" | "eq" | "min" | "max"), [int(a), int(b)]):
                    found.append(Agreement(a, b, owner))
                case "if", [_, int(a), int(b)]:
                    found.append(Agreement(a, b, owner))
                case "strip", [int(a), Unit() as unit] if unit.reading:
                    found.append(Agreement(a, -1, owner, READING))
                case "strip", [int(a), Unit() as unit] if unit.difference:
                    found.append(Agreement(a, -1, owner, DIFFERENCE))
                case (("curve" | "surface"), [*arguments, Interpolant() as interpolant]):
                    found += [
                        Agreement(a, -1, owner, READING if unit.reading else DIFFERENCE)
                        for a, unit in zip(arguments, interpolant.heading.units)
                        if unit is not None and (unit.reading or unit.difference)
                    ]
        apart = set(self.formula.differences)
        found.extend(Agreement(i, -1, -1, DIFFERENCE) for i in self.formula.differences)
        found.extend(Agreement(a, b, -1) for a, b in self.formula.alike if a not in apart and b not in apart)
        return tuple(found)

    def _free_sums(self) -> tuple[int, ...]:
        """Sums with a reading written in them, in a product or a function, where nothing else judges them."""
        judged = {a.left for a in self.agreements} | {a.right for a in self.agreements}
        for operation, *operands in self.instructions:
            inner = [o for o in operands if isinstance(o, int)]
            summed = operation in ("add", "sub", "neg", "min", "max", "if")
            scaled = operation in ("mul", "div") and any(self.numbers[o] is not None for o in inner)
            if summed or scaled:
                judged.update(inner)
        holds = self._hold_readings()
        return tuple(
            i
            for i, instruction in enumerate(self.instructions)
            if instruction[0] in ("add", "sub") and i not in judged and holds[i]
        )

    def _hold_readings(self) -> list[bool]:
        """By instruction, whether a reading is written among the terms of a sum."""
        holds: list[bool] = []
        for operation, *operands in self.instructions:
            if operation == "literal" and isinstance(operands[0], int):
                holds.append(self.formula.literals[operands[0]].kind == "reading")
            else:
                summed = operation in ("add", "sub", "neg")
                holds.append(summed and any(holds[o] for o in operands if isinstance(o, int)))
        return holds

    # --- what does --------------------------------------------------------------------------------------

    def _key(self, kinds: Mapping[int, int]) -> tuple[int | None, ...]:
        return tuple([kinds.get(slot) for slot in range(len(self.formula.quantities))])

    def weights(self, kinds: Mapping[int, int]) -> list[Weight | None]:
        """Weight of each instruction, None where there is none; `kinds` by slot."""
        key = self._key(kinds)
        found = self._weights.get(key)
        if found is None:
            found = self._weights[key] = self._weigh(kinds)
        return found

    def visit(self, kinds: Mapping[int, int]) -> KindVisit:
        """What follows from the kinds known so far."""
        key = self._key(kinds)
        found = self._visits.get(key)
        if found is None:
            found = self._visits[key] = self._visit(kinds)
        return found

    def _weigh(self, kinds: Mapping[int, int]) -> list[Weight | None]:
        weights: list[Weight | None] = []
        for index in range(len(self.instructions)):
            weights.append(self._weight(index, weights, kinds) if self.apart[index] else None)
        return weights

    def _weight(self, index: int, weights: list[Weight | None], kinds: Mapping[int, int]) -> Weight | None:
        operation, *operands = self.instructions[index]
        either = Weight(Fraction(0), ((-1 - index, 1),))
        match operation, operands:
            case "quantity", [int(slot)]:
                if slot in kinds:
                    return Weight(Fraction(kinds[slot]))
                return Weight(Fraction(0), ((slot, 1),))
            case "literal", [int(slot)]:
                kind = self.formula.literals[slot].kind
                return ONE if kind == "reading" else ZERO if kind == "difference" else either
            case "attach", [_, Unit() as unit]:
                return ONE if unit.reading else ZERO if unit.difference else either
            case (("curve" | "surface"), [*_, Interpolant() as interpolant]):
                result = interpolant.heading.unit
                if result is None:
                    return None
                return ONE if result.reading else ZERO if result.difference else either
            case (("add" | "sub"), [int(a), int(b)]):
                return self._added(a, b, 1 if operation == "add" else -1, weights)
            case "neg", [int(a)]:
                inner = weights[a]
                return None if inner is None else scaled(inner, Fraction(-1))
            case (("mul" | "div"), [int(a), int(b)]):
                return self._multiplied(a, b, operation == "div", weights)
            case "power", [int(a), Fraction() as power] if power == 1:
                return weights[a]
            case "abs", [int(a)]:
                return ZERO if is_difference(weights[a]) else None
            case (("min" | "max"), [int(a), int(b)]):
                return weights[a] if weights[a] is not None else weights[b]
            case "if", [_, int(a), int(b)]:
                return weights[a] if weights[a] is not None else weights[b]
            case (("hypot" | "logmean"), [int(a), int(b)]):
                return ZERO if is_difference(weights[a]) and is_difference(weights[b]) else None
        return None

    def _added(self, a: int, b: int, sign: int, weights: list[Weight | None]) -> Weight | None:
        left, right = weights[a], weights[b]
        if self.fits_any[b]:
            return left
        if self.fits_any[a]:
            return None if right is None else scaled(right, Fraction(sign))
        if left is None or right is None:
            return self.sum_in_doubt(left, right, sign)
        return added(left, right, sign)

    def sum_in_doubt(self, left: Weight | None, right: Weight | None, sign: int) -> Weight | None:
        """Weight of a sum with a term that has none: none, as only what is certain may be refused."""
        return None

    def _multiplied(self, a: int, b: int, divided: bool, weights: list[Weight | None]) -> Weight | None:
        left, right = weights[a], weights[b]
        factor = self.numbers[b]
        if left is not None:
            if factor is not None:
                return scaled(left, 1 / factor if divided else factor) if factor else None
            return ZERO if is_difference(left) else None
        if right is None or divided:
            return None
        factor = self.numbers[a]
        if factor is not None:
            return scaled(right, factor) if factor else None
        return ZERO if is_difference(right) else None

    def _visit(self, kinds: Mapping[int, int]) -> KindVisit:
        now = dict(kinds)
        solved: list[tuple[int, int, Agreement]] = []
        either: dict[int, int] = {}
        progress = True
        while progress:
            progress = False
            weights = self.weights(now)
            for agreement in self.agreements:
                left = weights[agreement.left]
                right = (
                    weights[agreement.right] if agreement.right >= 0 else Weight(Fraction(agreement.needed))
                )
                if left is None or right is None or not (left.sound and right.sound):
                    continue
                gap = with_known(added(left, right, -1), now, either)
                forced = forced_kinds(gap)
                if forced is None:
                    return KindVisit(tuple(solved), Breach(agreement, left, right))
                for variable, kind in forced:
                    progress = True
                    if variable < 0:
                        either[variable] = kind
                    else:
                        now[variable] = kind
                        solved.append((variable, kind, agreement))
        for index in self.free_sums:
            weight = weights[index]
            if weight is not None and not weight.terms and weight.constant not in (READING, DIFFERENCE):
                return KindVisit(tuple(solved), Breach(Agreement(index, -1, index, READING), weight, ONE))
        return KindVisit(tuple(solved), None)


class PresumingShape(KindShape):
    """A shape that takes terms without weight for differences, as in ``T_1 + Q/(m*cp)`` or ``p_1 - rho*v^2/2``.

    Good enough to say in what kind a result is shown, not to refuse a line.
    """

    def sum_in_doubt(self, left: Weight | None, right: Weight | None, sign: int) -> Weight | None:
        """Weight of the other term."""
        if right is None:
            return left
        return scaled(right, Fraction(sign))


@dataclass(frozen=True, slots=True)
class KindReader:
    """A formula and its shape."""

    formula: Formula
    shape: KindShape

    @property
    def instructions(self) -> tuple[Instruction, ...]:
        """Of the tape."""
        return self.shape.instructions

    def weights(self, kinds: Mapping[int, int]) -> list[Weight | None]:
        """As `KindShape.weights`."""
        return self.shape.weights(kinds)

    def visit(self, kinds: Mapping[int, int]) -> KindVisit:
        """As `KindShape.visit`."""
        return self.shape.visit(kinds)

    def dimension(self, index: int) -> Dimension:
        """Of an instruction."""
        return self.shape.dimensions[index]

    def bareness(self, index: int) -> tuple[bool, int]:
        """Orders operands: single names and literals after expressions, later ones after earlier."""
        leaf = self.instructions[index][0] in ("quantity", "literal", "const")
        return leaf, self.formula.places[index][0]


class KindShapes:
    """The shapes of a worksheet's formulas, each made once, as `KindShape` or `PresumingShape`."""

    def __init__(self, dimensions: Sequence[Dimension | None], make: type[KindShape] = KindShape) -> None:
        self._make = make
        self._dimensions = dimensions
        numbers: dict[Dimension | None, int] = {}
        self._numbers = [numbers.setdefault(dimension, len(numbers)) for dimension in dimensions]
        self._shapes: dict[tuple[object, ...], KindShape] = {}
        self._tapes: dict[int, Tape] = {}

    def reader(self, formula: Formula) -> KindReader:
        """The formula with its shape."""
        # The tape is kept so that its identity stays its own; hashing all its instructions would be slow.
        self._tapes[id(formula.tape)] = formula.tape
        key = (
            id(formula.tape),
            formula.alike,
            formula.differences,
            # Values matter where they are plain numbers, which weigh what they multiply.
            *[(x.kind, id(x.dimension) if x.dimension else x.value) for x in formula.literals],
            *[self._numbers[q] for q in formula.quantities],
        )
        shape = self._shapes.get(key)
        if shape is None:
            known = [self._dimensions[q] for q in formula.quantities]
            shape = self._shapes[key] = self._make(formula, known)
        return KindReader(formula, shape)


def _arithmetic(operation: object, values: list[Fraction]) -> Fraction | None:
    a, b = values[0], values[-1]
    if operation == "neg":
        return -a
    if operation == "add":
        return a + b
    if operation == "sub":
        return a - b
    if operation == "mul":
        return a * b
    return a / b if b else None
