"""Limits and validity ranges at a solution."""

from __future__ import annotations

import math
from collections.abc import Sequence

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error, warning
from eqsheet.model.branches import literal_values
from eqsheet.model.dimension_of import dimensions_of
from eqsheet.model.evaluate import Evidence, as_typed, evaluate, evaluate_with_evidence
from eqsheet.model.outside_curve import outside_curve
from eqsheet.model.system import EquationItem, LimitItem, Validity
from eqsheet.model.tape import Formula
from eqsheet.units.dimension import Dimension
from eqsheet.units.display import default_unit
from eqsheet.units.unit import Unit
from eqsheet.worksheet.curve_messages import outside_curve_diagnostic
from eqsheet.worksheet.places import label_of, quoted
from eqsheet.worksheet.prepare import Prepared
from eqsheet.worksheet.run import Run
from eqsheet.worksheet.shown_units import shown_unit, written_quantity
from eqsheet.worksheet.solution import LimitReport

_WITH_READINGS = frozenset((Dimension.of({"K": 1}), Dimension.of({"kg": 1, "m": -1, "s": -2})))


def judge_limits(prepared: Prepared, run: Run) -> Sequence[LimitReport]:
    """Every limit whose quantities are all found, in the order of the text."""
    if prepared.system.groups:
        from eqsheet.worksheet.judge_families import judge_limits_of_families

        return judge_limits_of_families(prepared, run)
    reports = (judge_limit(prepared, run, item) for item in prepared.system.limits)
    return tuple([report for report in reports if report is not None])


def judge_limit(prepared: Prepared, run: Run, item: LimitItem) -> LimitReport | None:
    """One limit; None where a quantity is not found, a curve is read outside its range, or a side has no value."""
    formula = item.formula
    inputs = [run.values[q] for q in formula.quantities]
    if not all(map(math.isfinite, inputs)):
        return None
    evidence = evaluate_with_evidence(
        formula.tape, inputs, literal_values(formula), [run.errors[q] for q in formula.quantities]
    )
    if outside_curve(formula.tape, evidence.values) is not None:
        return None
    if not all(math.isfinite(evidence.values[output]) for output in formula.tape.outputs):
        return None
    return _report(prepared, item, evidence)


def limits_outside_curves(prepared: Prepared, run: Run) -> tuple[Diagnostic, ...]:
    """An error for each limit that cannot be judged because it reads a curve outside its range."""
    found = (
        outside_curve_diagnostic(
            prepared.system, item.formula, {q: run.values[q] for q in item.formula.quantities}
        )
        for item in prepared.system.limit_parts
        if isinstance(item, LimitItem)
    )
    return tuple(diagnostic for diagnostic in found if diagnostic is not None)


def _report(prepared: Prepared, item: LimitItem, evidence: Evidence) -> LimitReport:
    system = prepared.system
    operands = operands_compared(item)
    unit, relative = slack_unit(prepared, item)
    links = [
        _link(item, operator, a, b, evidence)
        for operator, a, b in zip(item.operators, operands, operands[1:])
    ]
    holds = all(slack >= -room for slack, _, room in links)
    slack, scale, _ = min(links, key=lambda link: link[0])
    if holds:
        # Past the limit by rounding alone is at the limit.
        slack = max(slack, 0.0)
    margin = None if scale == 0.0 or not relative else slack / abs(scale)
    return LimitReport(
        system.statements[item.place.statement],
        item.text,
        holds,
        margin,
        unit.difference_from_si(slack),
        difference_text(unit.text, prepared),
    )


def operands_compared(item: LimitItem) -> tuple[int, ...]:
    """Instructions of the sides of its comparisons, in order."""
    outputs = item.formula.tape.outputs
    return outputs[:-1] if item.within else outputs


def slack_unit(prepared: Prepared, item: LimitItem) -> tuple[Unit, bool]:
    """The unit of a limit's slack, and whether it has a margin too, which readings have not."""
    operands = operands_compared(item)
    found = dimensions_of(item.formula, prepared.dimensions)
    dimension = next((d for o in operands if (d := found[o]) is not None), Dimension(()))
    unit = item.unit
    if unit is None or unit.dimension != dimension:
        unit = _unit_of_a_side(prepared, item, operands, dimension)
    return unit, not (dimension in _WITH_READINGS and _compares_readings(prepared, item, operands))


def _unit_of_a_side(
    prepared: Prepared, item: LimitItem, operands: Sequence[int], dimension: Dimension
) -> Unit:
    """Unit of the first quantity that is a side by itself, else the one of the fixed table."""
    system = prepared.system
    for operand in operands:
        operation, *rest = item.formula.tape.instructions[operand]
        if operation == "quantity":
            quantity = item.formula.quantities[rest[0]]
            return shown_unit(system, prepared.dimensions, prepared.kinds, quantity)
    return default_unit(dimension, "plain", system.unit_table)


def _link(item: LimitItem, operator: str, a: int, b: int, evidence: Evidence) -> tuple[float, float, float]:
    """Slack of one comparison, the limit it is relative to, and the forward error of its sides."""
    values, errors = evidence.values, evidence.errors
    left, right = values[a], values[b]
    room = errors[a] + errors[b] + as_typed(left) + as_typed(right)
    if operator == "=":
        allowed = abs(values[item.formula.tape.outputs[-1]])
        if item.relative:
            allowed *= abs(right)
        return allowed - abs(left - right), allowed, room
    return (right - left if operator in ("<", "<=") else left - right), _limit_side(item, a, b, values), room


def _limit_side(item: LimitItem, a: int, b: int, values: Sequence[float]) -> float:
    return float(values[limit_side(item, a, b)])


def limit_side(item: LimitItem, a: int, b: int) -> int:
    """The side that a margin is relative to: the one that is no more than literals; where both move, the right one."""
    instructions = item.formula.tape.instructions
    fixed = [i for i in (b, a) if instructions[i][0] in ("literal", "const")]
    return fixed[0] if fixed else b


def _compares_readings(prepared: Prepared, item: LimitItem, operands: Sequence[int]) -> bool:
    """Whether a limit is on readings, which have no ratio."""
    formula = item.formula
    for operand in operands:
        operation, *rest = formula.tape.instructions[operand]
        if operation == "literal" and formula.literals[rest[0]].kind == "reading":
            return True
        if operation == "quantity" and prepared.kinds[formula.quantities[rest[0]]] == "reading":
            return True
    return False


def difference_text(text: str, prepared: Prepared) -> str:
    """The unit of a slack: a distance between readings is a difference, between degC one in K."""
    unit = prepared.system.unit_table.lookup(text) if text else None
    if unit is None or not unit.reading:
        return text or "1"
    if unit.dimension == Dimension.of({"K": 1}):
        return "K" if text == "degC" else f"delta_{text}"
    return text.removesuffix("g")


def judge_validity(prepared: Prepared, run: Run) -> tuple[Diagnostic, ...]:
    """A warning for each validity range that the solution leaves, where its formula is in use."""
    system = prepared.system
    diagnostics: list[Diagnostic] = []
    if system.groups:
        from eqsheet.worksheet.validity_of_families import judge_validity_of_families

        return judge_validity_of_families(prepared, run)
    if not any(item.valid for item in system.equations):
        return ()
    used = _quantities_used(prepared, run)
    produced = {equation: block.unknowns for block in run.blocks for equation in block.equations}
    for number, item in enumerate(system.equations):
        unknowns = produced.get(number, ())
        if unknowns and not any(q in used for q in unknowns) and len(unknowns) == 1:
            continue
        diagnostics += ranges_left(prepared, run, item)
    return tuple(diagnostics)


def ranges_left(prepared: Prepared, run: Run, item: EquationItem) -> list[Diagnostic]:
    """A warning for each validity range of an equation that the solution leaves."""
    return [
        range_left(prepared, run, validity)
        for validity in item.valid
        if _applies(validity, run) and not _truth(validity.formula, run)
    ]


def _quantities_used(prepared: Prepared, run: Run) -> set[int]:
    """Quantities that matter: named in a formula in use besides their own, or in none but their own at all."""
    system = prepared.system
    own = {e: set(b.unknowns) for b in run.blocks for e in b.equations}
    in_use: set[int] = set()
    mentioned: set[int] = set()
    for number, (item, formula) in enumerate(zip(system.equations, run.formulas)):
        mine = own.get(number, set())
        in_use.update(q for q in formula.quantities if q not in mine)
        mentioned.update(q for q in item.formula.quantities if q not in mine)
    for limit in system.limits:
        in_use.update(limit.formula.quantities)
    return in_use | (set(range(len(system.names))) - mentioned)


def _applies(validity: Validity, run: Run) -> bool:
    for guard in validity.guards:
        if not _finite(guard.formula, run) or _truth(guard.formula, run) != guard.branch:
            return False
    return _finite(validity.formula, run)


def _finite(formula: Formula, run: Run) -> bool:
    return all(math.isfinite(run.values[q]) for q in formula.quantities)


def _truth(formula: Formula, run: Run) -> bool:
    values = evaluate(formula.tape, [run.values[q] for q in formula.quantities], literal_values(formula))
    return values[formula.tape.outputs[0]] is True


def range_left(prepared: Prepared, run: Run, validity: Validity) -> Diagnostic:
    system = prepared.system
    dimensions, kinds = prepared.dimensions, prepared.kinds
    values = [
        f"`{system.names[q]}` is "
        + written_quantity(shown_unit(system, dimensions, kinds, q), kinds[q], run.values[q])
        for q in validity.formula.quantities
    ]
    return warning(
        "outside-validity",
        f"the solution leaves the range `{validity.text}`",
        label_of(system, validity.place),
        notes=(", ".join(values),) if values else (),
        help="use a formula valid there, or say in the line that it is taken beyond its range",
    )


def known_bounds(prepared: Prepared, run: Run) -> tuple[Diagnostic, ...]:
    """An error for each known that lies outside the bounds a guess gives it."""
    system = prepared.system
    found = []
    lower, upper = run.guesses.lower, run.guesses.upper
    for quantity, value in prepared.known_values.items():
        if quantity not in lower and quantity not in upper:
            continue
        low, high = run.guesses.bounds(quantity)
        if low <= value <= high:
            continue
        role, bound = ("lower", low) if value < low else ("upper", high)
        unit = shown_unit(system, prepared.dimensions, prepared.kinds, quantity)
        kind = prepared.kinds[quantity]
        item = system.equations[prepared.setters[quantity]]
        here = Label(label_of(system, item.place).span)
        said = f"{quoted([system.names[quantity]])} = {written_quantity(unit, kind, value)} is"
        place = run.guesses.places.get((quantity, role))
        if place is None:
            found.append(error("outside-bounds", f"{said} below absolute zero", here))
            continue
        side = "below" if role == "lower" else "above"
        found.append(
            error(
                "outside-bounds",
                f"{said} {side} its bound {written_quantity(unit, kind, bound)}",
                here,
                Label(label_of(system, place).span, "the bound"),
            )
        )
    return tuple(found)
