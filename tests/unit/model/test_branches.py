"""Branches: settled by knowns, chosen at values, held while solving."""

from __future__ import annotations

import math

from eqsheet.diagnostics.source import Source
from eqsheet.model.branches import chosen_branches, hold, literal_values, quantities_under, settle, switches
from eqsheet.model.build import build_system
from eqsheet.model.evaluate import evaluate
from eqsheet.model.interpolant import Heading, stepped_curve
from eqsheet.model.system import EquationSystem
from eqsheet.model.tape import Formula, TapeBuilder
from eqsheet.syntax.parse import parse_document

TWO = "y = if x < a then (if x < b then 1 else 2) else 3*z"


def system_of(line: str) -> tuple[EquationSystem, Formula]:
    document, diagnostics = parse_document(Source("page", line))
    system, found = build_system(document.statements)
    assert not diagnostics and not found
    return system, system.equations[-1].formula


def settled(line: str, **known: float) -> tuple[Formula, set[str]]:
    """The formula with some quantities known, and the names still in it."""
    system, formula = system_of(line)
    result = settle(formula, lambda q: known.get(system.names[q]))
    return result, {system.names[q] for q in result.quantities}


def test_a_formula_without_conditions_is_itself() -> None:
    _, formula = system_of("y = 2*x")
    assert settle(formula, lambda _: 1.0) is formula
    assert switches([formula]) == ()


def test_a_condition_on_knowns_is_settled_and_its_other_branch_forgotten() -> None:
    result, names = settled(TWO, x=5.0, a=1.0)
    assert names == {"y", "z"}
    assert switches([result]) == ()


def test_a_condition_on_unknowns_stays() -> None:
    result, names = settled(TWO, x=0.0, a=1.0)
    assert names == {"x", "b", "y"}
    assert len(switches([result])) == 1


def test_the_truth_at_equality() -> None:
    below, _ = settled("y = if x < a then p else q", x=1.0, a=1.0)
    at_most, _ = settled("y = if x <= a then p else q", x=1.0, a=1.0)
    assert [len(f.quantities) for f in (below, at_most)] == [2, 2]
    assert below.quantities != at_most.quantities


def test_branches_chosen_at_values() -> None:
    system, formula = system_of(TWO)
    found = switches([formula])
    assert len(found) == 2

    def at(**values: float) -> tuple[int, ...]:
        return chosen_branches([formula], found, lambda q: values[system.names[q]])

    base = {"y": 0.0, "z": 0.0, "a": 10.0, "b": 5.0}
    inner_first = at(x=1.0, **base), at(x=7.0, **base)
    assert sum(inner_first[0]) == 0
    assert sum(inner_first[1]) == 1
    # where the outer condition is false the inner one does not matter, and is said to be the first
    assert sum(at(x=20.0, **base)) == 1


def test_held_formulas_have_no_switches_and_the_value_of_the_branch() -> None:
    system, formula = system_of("y = if x < 2 then 10 + x else 20 + x")
    found = switches([formula])
    for branch, value in ((0, 17.0), (1, 27.0)):
        (held,) = hold([formula], found, [branch])
        assert switches([held]) == ()
        inputs = [{"x": 7.0, "y": 0.0}[system.names[q]] for q in held.quantities]
        values = evaluate(held.tape, inputs, literal_values(held))
        assert values[held.tape.outputs[1]] == value


def test_quantities_under_an_instruction() -> None:
    system, formula = system_of("y = sin(a*b) + c")
    sine = next(i for i, entry in enumerate(formula.tape.instructions) if entry[0] == "sin")
    names = {system.names[formula.quantities[k]] for k in quantities_under(formula.tape, sine)}
    assert names == {"a", "b"}


def test_each_step_of_a_curve_is_a_branch() -> None:
    steps = stepped_curve(Heading("size", ("x",), (None,), None), [1.0, 2.0, 5.0], [10.0, 20.0, 50.0])
    b = TapeBuilder()
    y, x = b.quantity(7, (0, 1)), b.quantity(8, (9, 10))
    formula = b.formula((y, b.apply("curve", x, steps, place=(4, 11))), 0)
    assert switches([formula], {7}) == ()
    found = switches([formula], {8})
    assert [switch.count for switch in found] == [3]
    for value, branch in ((0.5, 0), (1.0, 0), (1.5, 1), (5.0, 2), (6.0, 3)):
        assert chosen_branches([formula], found, lambda q, v=value: v) == (branch,)
    for branch, value in enumerate([10.0, 20.0, 50.0]):
        (held,) = hold([formula], found, [branch])
        assert switches([held], {8}) == ()
        assert held.quantities == (7,)
        assert [literal.value for literal in held.literals] == [value]
        assert (held.literals[0].start, held.literals[0].end) == (4, 11)
    (outside,) = hold([formula], found, [3])
    assert math.isnan(outside.literals[0].value)
