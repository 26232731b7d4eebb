"""Lowers syntax expressions to tape instructions: names bound, units resolved, definitions written out.

Takes: expression nodes of one statement. Gives: instructions in a `TapeBuilder`, validity conditions met on
the way, and findings. Quantities keep provisional numbers from a `NameTable`.
"""

from __future__ import annotations

import math
import sys
from collections.abc import Callable, Mapping
from contextlib import suppress
from fractions import Fraction
from typing import Any, Never

from eqsheet.model.aggregate_parts import JOINED, MANY, Part, in_parts
from eqsheet.model.exact import exact_value
from eqsheet.model.families import NOWHERE, FamilyReference, with_fixed
from eqsheet.model.indexing import Domain, Indexing, IndexSlip, filtered, grown, holds, index_twice
from eqsheet.model.interpolant import Interpolant
from eqsheet.model.literal_kind import kind_of, shortened_number
from eqsheet.model.lowering_findings import LoweringFindings
from eqsheet.model.member_arguments import hides, with_members
from eqsheet.model.operations import ARITHMETIC, COMPARISON, EMPTY
from eqsheet.model.reserved_names import CODE as RESERVED_CODE
from eqsheet.model.reserved_names import RESERVED
from eqsheet.model.scope import NO_INDICES, Context, IndexScope, NameTable, OfInstance, QuantityKey
from eqsheet.model.spelling import did_you_mean
from eqsheet.model.tape import BINARY_FUNCTIONS, UNARY_FUNCTIONS, Literal, TapeBuilder
from eqsheet.model.while_lowering import ConditionMet, NeedsMembers, Place2, Poisoned
from eqsheet.model.written_nodes import canonical, names_in
from eqsheet.syntax import nodes as syntax
from eqsheet.syntax.spine import left_spine
from eqsheet.units.constants import constant, constant_names
from eqsheet.units.dimension import DIMENSIONLESS
from eqsheet.units.registry import UnitProblem
from eqsheet.units.unit import Unit

# Whole numbers up to this size are part of a formula's shape (the 2 in x^2/2, the 4 in 4*pi); larger ones and
# decimals are data, so that formulas that differ only in data share one tape.
LARGEST_STRUCTURAL_INTEGER = 12
# A definition that calls definitions can write out to exponential size; this many instructions are refused.
LARGEST_FORMULA = 20_000

FUNCTION_NAMES = frozenset((*UNARY_FUNCTIONS, *BINARY_FUNCTIONS))
AGGREGATE_NAMES = frozenset(("sum", "prod"))
TRUTH_OPERATIONS = frozenset(("lt", "le", "eq", "and", "or", "not"))


class Lowering(LoweringFindings):
    """One formula in the making.

    Attributes
    ----------
    builder : TapeBuilder
    findings : list of Finding
    conditions : list of ConditionMet
    parts : list of Part
        Equations of large sums and the like.
    exist : set of int
        Provisional numbers of the quantities named elsewhere than as the members that an index of a sum over a
        range runs through: such a sum takes the members there are, and makes none.
    """

    def __init__(
        self, context: Context, names: NameTable, text: str, indices: IndexScope = NO_INDICES
    ) -> None:
        super().__init__(text)
        self.builder = TapeBuilder()
        self.conditions: list[ConditionMet] = []
        self.parts: list[Part] = []
        self.exist: set[int] = set()
        self.first_unit: Unit | None = None
        self._context = context
        self._names = names
        self._parameters: Mapping[str, int] = {}
        self._guards: tuple[tuple[int, bool], ...] = ()
        self._calls: tuple[str, ...] = ()
        self._empirical = ""
        self._free = indices.free
        self._fixed = dict(indices.fixed)
        self._decided = indices.decided
        self._whole_here = indices.whole
        self._whole = {name: value for name, value in indices.whole.items() if value is not None}
        self._own_indexing = context.indexing_with(indices.whole)
        self._around = frozenset((*indices.free, *indices.fixed))
        self._running: frozenset[str] = frozenset()
        self.of_instance = False
        self._written_out: dict[tuple[str, tuple[int, ...]], int] = {}

    @property
    def _indexing(self) -> Indexing:
        """What subscripts may refer to: a definition sees the worksheet's, not the template's that uses it."""
        return self._context.indexing if self._calls else self._own_indexing

    @property
    def index_names(self) -> frozenset[str]:
        """The indices in force."""
        return frozenset(name for name in (*self._free, *self._fixed) if self._is_index(name))

    def _is_index(self, name: str) -> bool:
        """Whether an index counts as one here: on the left of a line in an instance's group the family's do not."""
        return not (self.of_instance and name in self._around)

    # --- entry points ---------------------------------------------------------------------------------

    def value(self, node: syntax.Expression) -> int:
        """Index of the instruction for a number-valued expression.

        Raises
        ------
        Poisoned
            After noting a finding.
        """
        index = _LOWER[type(node)](self, node)
        if self.builder.instructions[index][0] in TRUTH_OPERATIONS:
            self._refuse(
                "condition-as-number",
                "a condition stands where a number is needed",
                node,
                help="write `if condition then a else b`",
            )
        return index

    def truth(self, node: syntax.Expression) -> int:
        """Index of the instruction for a condition."""
        index = _LOWER[type(node)](self, node)
        if self.builder.instructions[index][0] not in TRUTH_OPERATIONS:
            self._refuse(
                "number-as-condition",
                "a number stands where a condition is needed",
                node,
                help="compare it with something: `x > 0`",
            )
        return index

    def valid(self, conditions: tuple[syntax.Expression, ...]) -> None:
        """Note validity conditions of the equation itself."""
        for node in conditions:
            place = (node.start, node.end)
            self.conditions.append(
                ConditionMet(self.truth(node), self._guards, self.text[node.start : node.end], place)
            )

    def try_body(self, definition: syntax.Definition) -> None:
        """Lower a definition's body with stand-ins for its parameters, for the findings in its own line."""
        stand_ins = {
            p.name: self.builder.quantity(self._names.number(p.name), (p.start, p.end))
            for p in definition.parameters
        }
        self._parameters = stand_ins
        self._calls = (definition.name,)
        for unit in (*(p.unit for p in definition.parameters), definition.result_unit):
            if unit is not None:
                self.resolve(unit)
        if definition.result_unit is not None:
            self._empirical = definition.name
        self.value(definition.body)
        self._empirical = ""
        self.valid(definition.valid)

    def resolve(self, unit: syntax.UnitText) -> Unit:
        """The unit as resolved; raises Poisoned after noting why it cannot be."""
        factors = tuple((factor.symbol, factor.exponent) for factor in unit.factors)
        resolved = self._context.unit_table.resolve(unit.text, factors)
        if isinstance(resolved, UnitProblem):
            factor = unit.factors[resolved.index] if unit.factors else unit
            self._note_unit(resolved, unit, factor)
            raise Poisoned
        return resolved

    def number(self, node: syntax.Number) -> tuple[float, Unit | None]:
        """The literal's value as written (sign included) and its unit."""
        value = float(node.text)
        if math.isinf(value):
            self._refuse(
                "number-too-large",
                f"the number {shortened_number(node.text)} is too large",
                node,
                help="numbers go up to about 1.8e308",
            )
        unit = None if node.unit is None else self.resolve(node.unit)
        return (-value if node.negated else value), unit

    # --- node by node -----------------------------------------------------------------------------------

    def _number(self, node: syntax.Number) -> int:
        value, unit = self.number(node)
        place = self._place(node)
        if unit is None:
            if value == 0.0:
                return self.builder.constant(Fraction(0), place)
            if value <= LARGEST_STRUCTURAL_INTEGER and value.is_integer():
                return self.builder.constant(Fraction(int(value)), place)
            return self.builder.literal(Literal(value, DIMENSIONLESS, "plain", *place))
        if self.first_unit is None:
            self.first_unit = unit
        si = unit.to_si(value)
        if math.isinf(si):
            self._refuse("number-too-large", f"{shortened_number(node.text)} {unit.text} is too large", node)
        if value != 0.0 and not unit.reading and abs(si) < sys.float_info.min:
            self._refuse(
                "number-out-of-range",
                f"{shortened_number(node.text)} {unit.text} is too small for floating-point arithmetic in SI units",
                node,
                help="check the exponent",
            )
        return self.builder.literal(Literal(si, unit.dimension, kind_of(unit), *place, unit.text))

    def _reference(self, node: syntax.Reference) -> int:
        place = self._place(node)
        if node.owner is not None and node.owner.owner is None and node.owner.name == "const":
            return self._constant(node, place)
        if node.owner is not None or node.subscripts is not None:
            self.check_name(node)
            return self._quantity(self.reference(node), node)
        parameter = self._parameters.get(node.name)
        if parameter is not None:
            return parameter
        if (node.name in self._fixed or node.name in self._free) and self._is_index(node.name):
            return self._index(node, place)
        if node.name == "pi":
            return self.builder.constant(math.pi, place)
        self.check_name(node)
        return self._quantity(node.name, node)

    def check_name(self, node: syntax.Reference) -> None:
        """A quantity or instance may not bear a reserved name."""
        first = node
        while first.owner is not None:
            first = first.owner
        if first.name in RESERVED:
            help = "choose another name"
            self._refuse(
                RESERVED_CODE, f"{RESERVED[first.name]}, so no quantity can be called so", first, help
            )

    def _quantity(self, key: str | FamilyReference, node: syntax.Reference) -> int:
        """The leaf for a quantity of the worksheet."""
        if self._empirical:
            self._refuse(
                "quantity-in-empirical-formula",
                f"`{node.name}` is a quantity of the worksheet, which the empirical formula "
                f"`{self._empirical}` cannot use",
                node,
                help=f"make it a parameter with a unit: `{self._empirical}(..., {node.name} in UNIT)`",
            )
        number = self.number_of(key)
        if isinstance(key, str) or not key.runs_with(self._running):
            self.exist.add(number)
        return self.builder.quantity(number, self._place(node))

    def number_of(self, key: str | FamilyReference) -> int:
        """Provisional number of a quantity, of the instance's where the line is read in an instance's name."""
        return self._names.number(OfInstance(key) if self.of_instance else key)

    def reference(self, node: syntax.Reference) -> FamilyReference:
        """A reference with subscripts or owners, its subscripts still to be worked out."""
        path: list[tuple[str, int]] = []
        subscripts: list[syntax.Expression] = []
        step: syntax.Reference | None = node
        chain: list[syntax.Reference] = []
        while step is not None:
            chain.append(step)
            step = step.owner
        for part in reversed(chain):
            own = part.subscripts or ()
            path.append((part.name, len(own)))
            subscripts.extend(own)
        whole = {} if self._calls else self._whole
        decided = {**{name: (value, "") for name, value in whole.items()}, **self._fixed}
        written = tuple(canonical(s, decided) for s in subscripts)
        place = NOWHERE if self._calls else (node.start, node.end)
        nodes, fixed = tuple(subscripts), dict(self._fixed)
        return FamilyReference(tuple(path), written, nodes, fixed, place, whole=whole)

    def _index(self, node: syntax.Reference, place: Place2) -> int:
        """An index as a number."""
        code, set_name = self._fixed.get(node.name, (0, self._free.get(node.name, "")))
        if set_name:
            self._refuse(
                "member-as-number",
                f"`{node.name}` is a member of `{set_name}`, not a number",
                node,
                help="members may be compared, and stand in brackets",
            )
        if node.name in self._fixed:
            return self.builder.constant(Fraction(code), place)
        return self.builder.literal(Literal(math.nan, DIMENSIONLESS, "plain", *place, index=node.name))

    def _constant(self, node: syntax.Reference, place: Place2) -> int:
        found = constant(node.name)
        if found is None:
            self._refuse(
                "unknown-constant",
                f"there is no constant `const.{node.name}`",
                node,
                help=did_you_mean(node.name, constant_names())
                or "the constants are " + ", ".join(sorted(constant_names())),
            )
        literal = Literal(found.value, found.dimension, "plain", *place)
        return self.builder.literal(literal)

    def _text_node(self, node: syntax.Text) -> int:
        self._refuse("text-as-number", "a quoted name stands where a number is needed", node)

    def _unary(self, node: syntax.Unary) -> int:
        if node.operator == "not":
            return self.builder.apply("not", self.truth(node.operand), place=self._place(node))
        operand = self.value(node.operand)
        if node.operator == "+":
            return operand
        if self.builder.instructions[operand] == ("const", Fraction(0)):
            return operand
        return self.builder.apply("neg", operand, place=self._place(node))

    def _binary(self, node: syntax.Binary) -> int:
        if node.operator == "^":
            return self._power(node)
        first, operations = left_spine(node)
        result = self.value(first)
        for part in operations:
            other = self.value(part.right)
            result = self.builder.apply(ARITHMETIC[part.operator], result, other, place=self._place(part))
        return result

    def _power(self, node: syntax.Binary) -> int:
        place = self._place(node)
        base = self.value(node.left)
        exponent = exact_value(node.right)
        if exponent is not None:
            return self.builder.apply("power", base, exponent, place=place)
        power = self.value(node.right)
        instruction = self.builder.instructions[power]
        if instruction[0] == "const" and isinstance(instruction[1], Fraction):
            # A parameter of a definition that stands for a whole number: `define f(x, n) = x^n`.
            return self.builder.apply("power", base, instruction[1], place=place)
        return self.builder.apply("pow", base, power, place=place)

    def _comparison(self, node: syntax.Comparison) -> int:
        place = self._place(node)
        if any(self._names_member(operand) for operand in node.operands):
            return self._membership(node, place)
        operands = [self.value(operand) for operand in node.operands]
        links = []
        for operator, a, b in zip(node.operators, operands, operands[1:]):
            operation, swapped = COMPARISON[operator]
            pair = (b, a) if swapped else (a, b)
            links.append(self.builder.apply(operation, *pair, place=place))
        return self._join("and", links, place)

    def _logical(self, node: syntax.Logical) -> int:
        operands = [self.truth(operand) for operand in node.operands]
        return self._join(node.operator, operands, self._place(node))

    def _join(self, operation: str, links: list[int], place: Place2) -> int:
        result = links[0]
        for link in links[1:]:
            result = self.builder.apply(operation, result, link, place=place)
        return result

    def _conditional(self, node: syntax.Conditional) -> int:
        decided = self._decision(node.condition)
        if decided is not None:
            return self.value(node.then if decided else node.otherwise)
        condition = self.truth(node.condition)
        outer = self._guards
        self._guards = (*outer, (condition, True))
        then = self.value(node.then)
        self._guards = (*outer, (condition, False))
        otherwise = self.value(node.otherwise)
        self._guards = outer
        return self.builder.apply("if", condition, then, otherwise, place=self._place(node))

    def _decision(self, condition: syntax.Expression) -> bool | None:
        """Whether a condition on indices alone holds; None for one that is not decided here."""
        if not self._calls and (condition.start, condition.end) in self._decided:
            return self._decided[condition.start, condition.end]
        names = names_in((condition,))
        if not names & set(self._fixed) or names & {*self._parameters, *self._free}:
            return None
        try:
            return bool(holds(condition, with_fixed(Domain(), self._fixed), self._indexing)[0])
        except IndexSlip:
            return None

    def _aggregate(self, node: syntax.Aggregate) -> int:
        """A sum, product, minimum or maximum written out over its members."""
        used = names_in((*node.clauses, node.filter))
        if used & set(self._free):
            raise NeedsMembers
        outer, outside = self._fixed, self._running
        try:
            domain = with_fixed(Domain(), self._around_aggregate(node))
            for clause in node.clauses:
                if clause.index in self._free and not self._calls:
                    raise index_twice(clause)
                domain = grown(domain, clause, self._indexing)
            domain = filtered(domain, node.filter, self._indexing)
        except IndexSlip as slip:
            self._note_finding(slip.finding)
            raise Poisoned from None
        under_family = bool(names_in((node.body,)) & set(self._free))
        if under_family and domain.size > LARGEST_FORMULA // 4:
            raise NeedsMembers
        if domain.size >= MANY and self._stands_alone and not under_family:
            with suppress(NeedsMembers):
                return in_parts(self, node, domain, self._indexing)
        place, parts = self._place(node), list[int]()
        inner = {clause.index: domain.sets[clause.index] for clause in node.clauses}
        self._running = outside.union(n for n in inner if not inner[n])
        for entry in range(domain.size):
            members = {n: (int(domain.arrays[n][entry]), inner[n]) for n in inner}
            self._fixed = {**outer, **members}
            parts.append(self.value(node.body))
            if len(self.builder.instructions) > LARGEST_FORMULA:
                self._refuse(
                    "formula-too-large",
                    f"written out, this formula has over {LARGEST_FORMULA} operations",
                    node,
                )
        self._fixed, self._running = outer, outside
        if parts:
            return self._join(JOINED[node.function], parts, place)
        if node.function in EMPTY:
            return self.builder.constant(EMPTY[node.function], place)
        return self._refuse(
            "empty-aggregate",
            f"`{node.function}` over no members has no value",
            node,
            help="the index set or the filter leaves nothing",
        )

    def _around_aggregate(self, node: syntax.Aggregate) -> Mapping[str, tuple[int, str]]:
        """The indices with one member that an aggregate stands under; in a definition its own go before them."""
        own = {clause.index for clause in node.clauses} if self._calls else ()
        return {name: member for name, member in self._fixed.items() if name not in own}

    @property
    def _stands_alone(self) -> bool:
        """Whether what stands here is of the statement itself, and of no branch."""
        return not (self._calls or self._empirical or self._guards or self.of_instance)

    def inside(self, sets: Mapping[str, str]) -> Lowering:
        """For a formula of its own in which some indices run over their members; findings are shared."""
        indices = IndexScope(sets, self._fixed, whole=self._whole_here)
        lowering = Lowering(self._context, self._names, self.text, indices)
        lowering.findings = self.findings
        lowering.parts = self.parts
        return lowering

    def key_of(self, number: int) -> QuantityKey:
        """What a provisional number refers to."""
        return self._names.names[number]

    @property
    def fixed(self) -> Mapping[str, tuple[int, str]]:
        """Indices that have one member here, with their codes and sets."""
        return self._fixed

    def _names_member(self, node: syntax.Expression) -> bool:
        """Whether a side of a comparison stands for a member of a named set."""
        if isinstance(node, syntax.Text):
            return True
        if not isinstance(node, syntax.Reference):
            return False
        if node.subscripts is not None:
            return node.dotted in self._indexing.columns
        return bool(self._free.get(node.name) or self._fixed.get(node.name, (0, ""))[1])

    def _membership(self, node: syntax.Comparison, place: Place2) -> int:
        """A comparison of members: decided here, since members are not numbers."""
        if names_in((node,)) & set(self._free):
            raise NeedsMembers
        try:
            true = bool(holds(node, with_fixed(Domain(), self._fixed), self._indexing)[0])
        except IndexSlip as slip:
            self._note_finding(slip.finding)
            raise Poisoned from None
        zero = self.builder.constant(Fraction(0), place)
        return self.builder.apply("le" if true else "lt", zero, zero, place=place)

    def _call(self, node: syntax.Call) -> int:
        definition = self._context.definitions.get(node.name)
        if definition is not None:
            return self._use(node, definition)
        curve = self._context.curves.get(node.name)
        if curve is not None:
            return self._interpolated(node, curve)
        if node.name not in FUNCTION_NAMES:
            self._refuse_call(node)
        arguments = [self.value(argument) for argument in node.arguments]
        place = self._place(node)
        if node.name in ("min", "max"):
            if len(arguments) < 2:
                self._refuse_without_members(node)
            return self._join(node.name, arguments, place)
        needed = 1 if node.name in UNARY_FUNCTIONS else 2
        if len(arguments) != needed:
            self._refuse_count(node, needed)
        return self.builder.apply(node.name, *arguments, place=place)

    def _interpolated(self, node: syntax.Call, interpolant: Interpolant) -> int:
        """A curve or surface read at its arguments."""
        wanted = len(interpolant.axes)
        if len(node.arguments) != wanted:
            self._refuse_count(node, wanted)
        arguments = [self.value(argument) for argument in node.arguments]
        operation = "curve" if wanted == 1 else "surface"
        return self.builder.apply(operation, *arguments, interpolant, place=self._place(node))

    def _use(self, node: syntax.Call, statement: syntax.Statement) -> int:
        definition = statement.node
        assert isinstance(definition, syntax.Definition)
        if node.name in self._calls:
            self._refuse(
                "definition-uses-itself",
                f"the definition `{node.name}` uses itself",
                node,
                help="a definition is written out at each use, so it cannot stand inside its own body",
            )
        if len(node.arguments) != len(definition.parameters):
            self._refuse_count(node, len(definition.parameters))
        members = {n for n, of in self._free.items() if of} | {n for n, (_, of) in self._fixed.items() if of}
        meant, needed = with_members(definition, node.arguments, members)
        if meant is not definition and (hidden := hides(definition, node.arguments)):
            self._refuse("index-twice", f"`{node.name}` has an index `{hidden}` of its own", node)
        given = zip(definition.parameters, node.arguments)
        arguments = {p.name: self.value(argument) for p, argument in given if p.name in needed}
        key = (node.name, tuple(arguments.values()))
        if meant is not definition:
            return self._write_out(node, statement, meant, arguments)
        if key not in self._written_out or definition.valid:
            self._written_out[key] = self._write_out(node, statement, definition, arguments)
        return self._written_out[key]

    def _write_out(
        self,
        node: syntax.Call,
        statement: syntax.Statement,
        definition: syntax.Definition,
        outside: dict[str, int],
    ) -> int:
        if len(self.builder.instructions) > LARGEST_FORMULA:
            self._refuse(
                "formula-too-large", f"written out, this formula has over {LARGEST_FORMULA} operations", node
            )
        saved = self._parameters, self._calls, self._empirical, self._fixed_place, self.text
        place = self._place(node)
        self._calls = (*self._calls, node.name)
        self._fixed_place = place
        self.text = statement.line.text
        try:
            inside = outside
            if definition.result_unit is not None:
                inside = {
                    p.name: self.builder.apply("strip", outside[p.name], self.resolve(p.unit), place=place)
                    if p.unit is not None
                    else outside[p.name]
                    for p in definition.parameters
                    if p.name in outside
                }
                self._empirical = node.name
            self._parameters = inside
            result = self.value(definition.body)
            if definition.result_unit is not None:
                unit = self.resolve(definition.result_unit)
                result = self.builder.apply("attach", result, unit, place=place)
            self._parameters, self._empirical = outside, ""
            for condition in definition.valid:
                text = f"{self.text[condition.start : condition.end]} (of {node.name})"
                self.conditions.append(ConditionMet(self.truth(condition), self._guards, text, place))
        finally:
            self._parameters, self._calls, self._empirical, self._fixed_place, self.text = saved
        return result

    def _refuse_call(self, node: syntax.Call) -> Never:
        if node.name == "log":
            self._refuse_logarithm(node)
        if node.name in self._names.numbers or node.name in self._parameters:
            self._refuse_quantity_as_function(node)
        if node.name in AGGREGATE_NAMES:
            self._refuse_without_members(node)
        self._refuse_unknown_function(
            node, (*FUNCTION_NAMES, *self._context.definitions, *self._context.curves)
        )


_LOWER: dict[type, Callable[[Lowering, Any], int]] = {
    syntax.Number: Lowering._number,
    syntax.Reference: Lowering._reference,
    syntax.Text: Lowering._text_node,
    syntax.Unary: Lowering._unary,
    syntax.Binary: Lowering._binary,
    syntax.Comparison: Lowering._comparison,
    syntax.Logical: Lowering._logical,
    syntax.Call: Lowering._call,
    syntax.Conditional: Lowering._conditional,
    syntax.Aggregate: Lowering._aggregate,
}
