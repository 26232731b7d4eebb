"""Lowers one statement: equations and knowns, guesses, limits, shown units.

Each function takes a statement and gives a `LoweredStatement`, in which quantities have provisional numbers and
all places say statement 0. Nothing here depends on the other statements besides the `Context`, so that the
result can be kept while a worksheet is edited.
"""

from __future__ import annotations

import math
from collections.abc import Container, Iterable, Iterator, Sequence
from dataclasses import dataclass

from eqsheet.diagnostics.diagnostic import Severity
from eqsheet.model.branches import literal_values
from eqsheet.model.dimension_of import dimensions_of
from eqsheet.model.evaluate import evaluate
from eqsheet.model.families import FamilyReference
from eqsheet.model.findings import Finding
from eqsheet.model.indexing import Domain
from eqsheet.model.literal_kind import kind_of
from eqsheet.model.lower import FUNCTION_NAMES, Lowering
from eqsheet.model.no_value import no_value
from eqsheet.model.outside_curve import HELP as OUTSIDE_CURVE_HELP
from eqsheet.model.outside_curve import outside_curve, written
from eqsheet.model.scope import NO_INDICES, IndexScope, Surroundings
from eqsheet.model.system import EquationItem, Guard, LimitItem, Place, ToleranceOfKnown, Validity
from eqsheet.model.tape import Formula, Instruction, Literal, extract
from eqsheet.model.while_lowering import ConditionMet, Poisoned
from eqsheet.model.written_nodes import canonical, names_in
from eqsheet.syntax import nodes as syntax
from eqsheet.syntax.spine import operands_in_run
from eqsheet.units.dimension import DIMENSIONLESS, Dimension
from eqsheet.units.display import default_unit
from eqsheet.units.registry import UnitTable
from eqsheet.units.unit import Unit

_PRESSURE = Dimension.of({"kg": 1, "m": -1, "s": -2})


@dataclass(frozen=True, slots=True)
class GuessMeant:
    """A guess before its target is looked up: a quantity's provisional number, or that of a pattern over names."""

    target: int
    pattern: bool
    formula: Formula
    roles: tuple[str, ...]
    start: int
    end: int


@dataclass(frozen=True, slots=True)
class ShowMeant:
    """One item of a `show`: the quantity's provisional number, its unit, and the formula that ties them."""

    quantity: int
    unit: Unit | None
    formula: Formula | None
    start: int
    end: int


@dataclass(frozen=True, slots=True)
class LoweredStatement:
    """What one statement comes to; all but `findings` empty where it is not understood.

    Attributes
    ----------
    named : tuple of (int, int, int)
        Provisional numbers of the quantities it names, with start and end of the first place.
    conditions_name : tuple of (int, int, int)
        The same for quantities that only its validity conditions name.
    summed : frozenset of int
        Provisional numbers of members that it names in sums over ranges only, so that it does not make them.
    unit_hints : tuple of (int, Unit)
        Units in which it writes a quantity.
    curve_hints : tuple of (int, Unit)
        Units in which curves take or give a quantity; they count least.
    uses_gauge : bool
        Whether a gauge unit occurs.
    parts : tuple of PartMeant
        Equations that its large sums and the like come to.
    """

    equation: EquationItem | None = None
    guesses: tuple[GuessMeant, ...] = ()
    limit: LimitItem | None = None
    shows: tuple[ShowMeant, ...] = ()
    named: tuple[tuple[int, int, int], ...] = ()
    conditions_name: tuple[tuple[int, int, int], ...] = ()
    summed: frozenset[int] = frozenset()
    unit_hints: tuple[tuple[int, Unit], ...] = ()
    curve_hints: tuple[tuple[int, Unit], ...] = ()
    uses_gauge: bool = False
    findings: tuple[Finding, ...] = ()
    parts: tuple[PartMeant, ...] = ()


@dataclass(frozen=True, slots=True)
class PartMeant:
    """Equations for parts of a large sum, over a domain of their own: see `aggregate_parts`."""

    name: str
    domain: Domain
    lowered: LoweredStatement


def _lowering(statement: syntax.Statement, around: Surroundings) -> Lowering:
    return Lowering(around.context, around.names, statement.line.text, around.indices)


def lower_equation(statement: syntax.Statement, around: Surroundings) -> LoweredStatement:
    """An equation, and whether it is a known: one name against an expression without names."""
    node = statement.node
    assert isinstance(node, syntax.Equation)
    work = _lowering(statement, around)
    try:
        work.of_instance = around.in_instance
        left = work.value(node.left)
        work.of_instance = False
        right = work.value(node.right)
        work.valid(node.valid)
        target, value_node = _known_parts(node, around.indices, around.in_instance)
        tolerance = _tolerance(node, value_node, work) if node.tolerance else None
    except Poisoned:
        return _broken(work, node)
    formula = work.builder.formula((left, right), 0, ((left, right),))
    formula, valid, conditions_name = _with_conditions(formula, work.conditions)
    known, value = -1, math.nan
    hints: tuple[tuple[int, Unit], ...] = ()
    if target is not None and len(formula.quantities) == 1:
        known = formula.quantities[0]
        side = formula.tape.outputs[0 if value_node is node.right else 1]
        other = formula.tape.outputs[1 if side == formula.tape.outputs[0] else 0]
        values = evaluate(formula.tape, (math.nan,), literal_values(formula))
        value = values[other]
        by_member = any(literal.index for literal in formula.literals)
        if not math.isfinite(value) and not by_member:
            outside = outside_curve(formula.tape, values)
            if outside is not None:
                place = outside.place(formula)
                work.findings.append(
                    Finding("outside-curve", outside.message, *place, help=OUTSIDE_CURVE_HELP)
                )
                return _broken(work, node)
            name = work.text[target.start : target.end]
            alone = extract(formula, (other,))
            work.findings.append(without_value(alone, name, work.text, around.context.unit_table))
            return _broken(work, node)
        reads_curve = formula.tape.instructions[other][0] in ("curve", "surface")
        # `w = 2*pi*9 kHz` is an angular speed, which a unit of frequency must not show.
        reckoned_frequency = (
            work.first_unit is not None
            and work.first_unit.sense == "frequency"
            and not isinstance(value_node, syntax.Number)
        )
        if work.first_unit is not None and not reads_curve and not reckoned_frequency:
            hints = ((known, work.first_unit),)
    item = EquationItem(formula, Place(0, node.start, node.end), known, value, tolerance, valid)
    return LoweredStatement(
        equation=item,
        named=_named(formula),
        conditions_name=conditions_name,
        summed=frozenset(work.builder.quantities).difference(work.exist),
        unit_hints=hints,
        curve_hints=tuple(_units_of_curves(formula)) if around.context.curves else (),
        uses_gauge=uses_gauge(work),
        findings=tuple(work.findings),
        parts=_parts(work),
    )


def _with_conditions(
    formula: Formula, conditions: Sequence[ConditionMet]
) -> tuple[Formula, tuple[Validity, ...], tuple[tuple[int, int, int], ...]]:
    """The equation without its validity conditions, these, and the quantities that only they name."""
    if not conditions:
        return formula, (), ()
    valid = tuple(
        Validity(
            extract(formula, (met.instruction,)),
            met.text,
            Place(0, *met.place),
            tuple(Guard(extract(formula, (c,)), branch) for c, branch in met.guards),
        )
        for met in conditions
    )
    alone = extract(formula, formula.tape.outputs)
    own = set(alone.quantities)
    return alone, valid, tuple(n for n in _named(formula) if n[0] not in own)


def _parts(work: Lowering) -> tuple[PartMeant, ...]:
    """The equations of the parts of large sums."""
    found = []
    for part in work.parts:
        formula, valid, conditions_name = _with_conditions(part.formula, part.conditions)
        place = Place(0, *part.formula.places[part.formula.tape.outputs[0]])
        lowered = LoweredStatement(
            equation=EquationItem(formula, place, valid=valid),
            named=_named(formula),
            conditions_name=conditions_name,
            summed=part.summed,
            uses_gauge=_holds_gauge(formula.literals, formula.tape.instructions),
        )
        found.append(PartMeant(part.name, part.domain, lowered))
    return tuple(found)


def without_value(value: Formula, name: str, line: str, unit_table: UnitTable) -> Finding:
    """That the value of a known is not finite, and why."""
    values = evaluate(value.tape, (), literal_values(value))
    found = no_value(value, values, line)
    assert found is not None, "called for a value that is not finite"
    dimensions = dimensions_of(value, ())
    notes = tuple(
        f"`{text}` is {written(values[i], default_unit(dimensions[i] or DIMENSIONLESS, 'plain', unit_table))}"
        for i, text in found.operands
    )
    return Finding(
        "value-not-finite",
        f"`{name}` has no value: {found.reason}",
        found.start,
        found.end,
        notes=notes,
    )


def lower_guess(statement: syntax.Statement, around: Surroundings) -> LoweredStatement:
    """A guess: one formula that holds the start value and the bounds like its target."""
    node = statement.node
    assert isinstance(node, syntax.Guess)
    work = _lowering(statement, around)
    pattern = isinstance(node.target, syntax.NamePattern)
    try:
        parts = [
            (role, work.value(part))
            for role, part in (("near", node.near), ("lower", node.lower), ("upper", node.upper))
            if part is not None
        ]
        # A pattern stands for many quantities; each gets its own formula when the names are known, and until
        # then a provisional quantity of the pattern's name holds the place.
        work.of_instance = around.in_instance
        key = node.target.pattern if isinstance(node.target, syntax.NamePattern) else _key(node.target, work)
        number = work.number_of(key)
        work.of_instance = False
        target = work.builder.quantity(number, (node.target.start, node.target.end))
    except Poisoned:
        return _broken(work, node)
    outputs = tuple(index for _, index in parts)
    formula = work.builder.formula(outputs, 0, tuple((target, index) for index in outputs))
    literals = [p for p in (node.near, node.lower, node.upper) if isinstance(p, syntax.Number) and p.unit]
    hints = ((number, work.resolve(literals[0].unit)),) if literals and literals[0].unit else ()
    meant = GuessMeant(number, pattern, formula, tuple(role for role, _ in parts), node.start, node.end)
    return LoweredStatement(
        guesses=(meant,),
        named=_named(formula),
        unit_hints=() if pattern else hints,
        uses_gauge=uses_gauge(work),
        findings=tuple(work.findings),
        parts=_parts(work),
    )


def lower_limit(statement: syntax.Statement, around: Surroundings) -> LoweredStatement:
    """A limit: its operands as outputs of one formula, all alike."""
    node = statement.node
    assert isinstance(node, syntax.Limit)
    work = _lowering(statement, around)
    condition = node.condition
    if not isinstance(condition, syntax.Comparison):
        work.findings.append(
            Finding(
                "limit-form",
                "a limit compares quantities",
                condition.start,
                condition.end,
                "write one comparison or chain a line: `require 0.5 m/s <= v <= 2.5 m/s`",
            )
        )
        return _broken(work, node)
    try:
        operands = [work.value(operand) for operand in condition.operands]
        unit = work.first_unit
        within = None if node.within is None else work.value(node.within)
    except Poisoned:
        return _broken(work, node)
    alike = [(operands[0], other) for other in operands[1:]]
    differences: tuple[int, ...] = ()
    if within is not None and not node.relative:
        alike.append((operands[0], within))
        differences = (within,)
    outputs = (*operands, *(() if within is None else (within,)))
    formula = work.builder.formula(outputs, 0, tuple(alike), differences)
    references = [o for o in condition.operands if isinstance(o, syntax.Reference) and not _is_constant(o)]
    # The percent sign of `within 1 %` is no unit of the quantity.
    unit = unit if node.relative else work.first_unit
    hints = [
        (around.names.number(_key(reference, work)), unit)
        for reference in references
        if unit is not None and reference.name not in work.index_names
    ]
    text = statement.line.text[condition.start : node.end].strip()
    item = LimitItem(
        formula,
        condition.operators,
        within is not None,
        node.relative,
        text,
        Place(0, node.start, node.end),
        unit,
    )
    return LoweredStatement(
        limit=item,
        named=_named(formula),
        unit_hints=tuple(hints),
        uses_gauge=uses_gauge(work),
        findings=tuple(work.findings),
        parts=_parts(work),
    )


def lower_show(statement: syntax.Statement, around: Surroundings) -> LoweredStatement:
    """Shown units, each tied to its quantity by a formula so that their dimensions must agree."""
    node = statement.node
    assert isinstance(node, syntax.Show)
    work = _lowering(statement, around)
    shows: list[ShowMeant] = []
    gauge = False
    for item in node.items:
        one = _lowering(statement, around)
        try:
            number = around.names.number(_key(item.target, one))
            unit = None if item.unit is None else one.resolve(item.unit)
        except Poisoned:
            work.findings.extend(one.findings)
            continue
        formula = None
        if unit is not None and item.unit is not None:
            quantity = one.builder.quantity(number, (item.target.start, item.target.end))
            kind = "absolute" if kind_of(unit) == "reading" else kind_of(unit)
            literal = one.builder.literal(
                Literal(1.0, unit.dimension, kind, item.unit.start, item.unit.end, unit.text)
            )
            formula = one.builder.formula((quantity, literal), 0, ((quantity, literal),))
            gauge = gauge or is_gauge(unit)
        shows.append(ShowMeant(number, unit, formula, item.target.start, item.target.end))
    return LoweredStatement(
        shows=tuple(shows),
        named=tuple((s.quantity, s.start, s.end) for s in shows),
        uses_gauge=gauge,
        findings=tuple(work.findings),
    )


def is_gauge(unit: Unit) -> bool:
    """Whether values in the unit are gauge pressures."""
    return unit.reading and unit.dimension == _PRESSURE


def uses_gauge(work: Lowering) -> bool:
    """Whether a literal of the formula is a gauge pressure, or a curve takes or gives one."""
    return _holds_gauge(work.builder.literals, work.builder.instructions)


def _holds_gauge(literals: Iterable[Literal], instructions: Iterable[Instruction]) -> bool:
    return any(x.kind == "reading" and x.dimension == _PRESSURE for x in literals) or any(
        unit is not None and unit.reading and unit.dimension == _PRESSURE
        for instruction in instructions
        if instruction[0] in ("curve", "surface")
        for unit in (*instruction[-1].heading.units, instruction[-1].heading.unit)
    )


def _units_of_curves(formula: Formula) -> Iterator[tuple[int, Unit]]:
    """Quantities that stand alone as arguments of curves, or against one, with the units of its heading."""
    instructions = formula.tape.instructions

    def quantity(instruction: int) -> int | None:
        operation, *rest = instructions[instruction]
        return formula.quantities[rest[0]] if operation == "quantity" else None

    for operation, *operands in instructions:
        if operation in ("curve", "surface"):
            *arguments, interpolant = operands
            for argument, unit in zip(arguments, interpolant.heading.units):
                number = quantity(argument)
                if number is not None and unit is not None:
                    yield number, unit
    for side, other in (formula.tape.outputs, formula.tape.outputs[::-1]):
        number = quantity(side)
        operation, *operands = instructions[other]
        if number is not None and operation in ("curve", "surface"):
            unit = operands[-1].heading.unit
            if unit is not None:
                yield number, unit


def _is_plain_reference(node: syntax.Expression) -> bool:
    return (
        isinstance(node, syntax.Reference)
        and node.owner is None
        and node.subscripts is None
        and node.name != "pi"
    )


def _key(node: syntax.Reference, work: Lowering) -> str | FamilyReference:
    """What a reference names; goes through `value` for the findings of what is no quantity."""
    if _is_constant(node) or node.name in work.index_names:
        work.value(node)
        work.findings.append(
            Finding("name-needed", "the name of a quantity is needed here", node.start, node.end)
        )
        raise Poisoned
    work.check_name(node)
    return node.name if _is_plain_reference(node) else work.reference(node)


def known_name(statement: syntax.Statement) -> str | None:
    """Name of the quantity that a statement sets if it is a known, else None."""
    node = statement.node
    if not isinstance(node, syntax.Equation):
        return None
    target, _ = _known_parts(node, NO_INDICES)
    return None if target is None else canonical(target, {})


def _known_parts(
    node: syntax.Equation, indices: IndexScope, in_instance: bool = False
) -> tuple[syntax.Reference | None, syntax.Expression | None]:
    """The quantity set and its value expression; (None, None) for an equation."""
    known_indices = {*indices.free, *indices.fixed}
    for target, value in ((node.left, node.right), (node.right, node.left)):
        if not isinstance(target, syntax.Reference) or _is_constant(target):
            continue
        if target.name in known_indices and not (in_instance and target is node.left):
            continue
        if not _has_names(value, known_indices):
            return target, value
    return None, None


def _is_constant(node: syntax.Reference) -> bool:
    """Whether a reference is to ``pi`` or ``const.*``."""
    if node.owner is not None:
        return node.owner.dotted == "const"
    return node.name == "pi"


def _has_names(node: syntax.Expression, indices: Container[str]) -> bool:
    """Whether a quantity or a definition occurs (pi, const.*, indices and built-in functions apart)."""
    match node:
        case syntax.Number():
            return False
        case syntax.Reference():
            is_index = node.owner is None and node.subscripts is None and node.name in indices
            return not (_is_constant(node) or is_index)
        case syntax.Unary():
            return _has_names(node.operand, indices)
        case syntax.Binary():
            return any(_has_names(operand, indices) for operand in operands_in_run(node))
        case syntax.Call():
            in_names = node.name not in FUNCTION_NAMES
            return in_names or any(_has_names(a, indices) for a in node.arguments)
        case _:
            return True


def _tolerance(
    node: syntax.Equation, value_node: syntax.Expression | None, work: Lowering
) -> ToleranceOfKnown | None:
    """The tolerance in SI; relative where written in % on a value that is not in %."""
    written = node.tolerance
    assert written is not None
    half, unit = work.number(written.half_width)
    start, end = written.start, written.end
    text = work.text[start:end]
    coverage = None if written.coverage is None else work.number(written.coverage)[0]
    if coverage is not None and coverage <= 0:
        work.findings.append(Finding("tolerance-form", "the coverage factor k must be positive", start, end))
        raise Poisoned
    if half < 0:
        work.findings.append(Finding("tolerance-form", "a tolerance is not negative", start, end))
        raise Poisoned
    inner = value_node.operand if isinstance(value_node, syntax.Unary) else value_node
    if not isinstance(inner, syntax.Number):
        work.findings.append(
            Finding(
                "tolerance-form",
                "a tolerance needs a known with a literal value",
                start,
                end,
                "work the value out: `D = 52.5 mm ± 0.1 mm`",
            )
        )
        raise Poisoned
    value, value_unit = work.number(inner)
    if unit is not None and unit.text == "%" and (value_unit is None or value_unit.text != "%"):
        size = abs(value) if value_unit is None else abs(value_unit.to_si(value))
        if value_unit is not None and value_unit.reading:
            work.findings.append(
                Finding(
                    "tolerance-form",
                    "a relative tolerance on a reading has no meaning",
                    start,
                    end,
                    "give the tolerance as a difference, `T = 20 degC ± 0.5 K`",
                )
            )
            raise Poisoned
        return ToleranceOfKnown(half / 100.0 * size, coverage, text)
    dimension = DIMENSIONLESS if unit is None else unit.dimension
    expected = DIMENSIONLESS if value_unit is None else value_unit.dimension
    if dimension != expected:
        work.findings.append(
            Finding(
                "tolerance-unit",
                f"the tolerance is in {_unit_words(unit)}, the value in {_unit_words(value_unit)}",
                start,
                end,
            )
        )
        raise Poisoned
    factor = 1.0 if unit is None else unit.factor
    return ToleranceOfKnown(half * factor, coverage, text)


def _unit_words(unit: Unit | None) -> str:
    return "no unit" if unit is None else unit.text


def _named(formula: Formula) -> tuple[tuple[int, int, int], ...]:
    return tuple(
        (formula.quantities[instruction[1]], *place)
        for instruction, place in zip(formula.tape.instructions, formula.places)
        if instruction[0] == "quantity"
    )


def _broken(work: Lowering, node: syntax.StatementNode) -> LoweredStatement:
    """Only the findings; the names still count as seen, so that they are not reported as unknown."""
    # Lowering stopped at the slip, so that not all of them are in the formula.
    numbers = dict.fromkeys((*work.builder.quantities, *map(work.number_of, sorted(names_in((node,))))))
    named = tuple((number, node.start, node.end) for number in numbers)
    severe = [f for f in work.findings if f.severity is Severity.ERROR]
    assert severe, "a broken statement must say why"
    return LoweredStatement(named=named, findings=tuple(work.findings))
