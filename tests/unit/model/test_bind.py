"""Statements bound to members."""

from __future__ import annotations

import pytest

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.diagnostics.source import Source
from eqsheet.model.bind import merged
from eqsheet.model.build import build_system
from eqsheet.model.evaluate import evaluate
from eqsheet.model.system import EquationSystem
from eqsheet.model.tape import TapeBuilder
from eqsheet.syntax.parse import parse_document


def built(text: str) -> tuple[EquationSystem, tuple[Diagnostic, ...]]:
    document, found = parse_document(Source("x", text))
    assert found == ()
    return build_system(document.statements)


def incidence(text: str) -> list[list[str]]:
    """Names in each equation that is no known, in order of the text of members."""
    system, diagnostics = built(text)
    assert diagnostics == ()
    return sorted(
        [system.names[q] for q in item.formula.quantities] for item in system.equations if item.known < 0
    )


def test_each_member_has_an_equation_of_its_own() -> None:
    text = "for i in 1..2:\n    x[i] = 2*x[i-1]\nx[0] = 1\n"
    assert incidence(text) == [["x[1]", "x[0]"], ["x[2]", "x[1]"]]


def test_members_through_columns() -> None:
    text = "rows n: v\n    A 1\n    B 2\nrows l: a of n\n    L1 B\nfor k in l:\n    y[k] = v[a[k]]\n"
    assert incidence(text) == [["y[L1]", "v[B]"]]


def test_a_quantity_met_twice_in_one_member_is_one() -> None:
    text = "for i in 1..2, k in 1..2:\n    s[i, k] = x[i]*x[k]\nfor i in 1..2:\n    x[i]^2 = 3*i\n"
    assert ["s[1, 1]", "x[1]"] in incidence(text)
    assert ["s[1, 2]", "x[1]", "x[2]"] in incidence(text)


def test_indices_as_numbers() -> None:
    system, _ = built("for i in 1..3:\n    x[i] = 10*i\n")
    assert {system.names[item.known]: item.value for item in system.equations} == {
        "x[1]": 10,
        "x[2]": 20,
        "x[3]": 30,
    }


def test_equations_tell_their_members() -> None:
    text = "template t:\n    x = 2*y\nfor l in 1..2:\n    use t as p[l]:\n        y = l\nuse t as q:\n    y = 3\n"
    system, _ = built(text)
    of_template = (
        item for item in system.equations if system.statements[item.place.statement].line.line == 2
    )
    assert sorted(item.member for item in of_template) == ["p[1]", "p[2]", "q"]


@pytest.mark.parametrize(
    ("text", "code", "message"),
    [
        ("for i in 1..2:\n    x[i] = x[i+1]\n", "no-such-member", "there is no `x[3]` (at i = 2)"),
        ("x[1] = 1\ny = x\n", "family-without-subscript", "`x` is a family with 1 subscript"),
        ("x = 1\ny = x[2]\n", "not-a-family", "`x` is not a family, so it takes no subscript"),
        ("template t:\n    x = 1\nuse t as p\ny = p.z\n", "no-such-quantity", "`p` has no `z`"),
        ("x = 1\ny = p.z\n", "unknown-instance", "there is no instance `p`"),
    ],
)
def test_slips(text: str, code: str, message: str) -> None:
    _, diagnostics = built(text)
    assert [(d.code, d.message) for d in diagnostics] == [(code, message)]


def test_a_formula_with_two_slots_for_one_quantity_keeps_its_value() -> None:
    builder = TapeBuilder()
    a, b = builder.quantity(7, (0, 1)), builder.quantity(8, (2, 3))
    formula = builder.formula((builder.apply("mul", a, b), builder.apply("add", a, b)), 0, ())
    assert merged(formula) is formula
    both = merged(formula.__class__(formula.tape, (7, 7), formula.literals, formula.places, 0, (), ()))
    assert both.quantities == (7,)
    values = evaluate(both.tape, [5.0], [])
    assert [values[o] for o in both.tape.outputs] == [25.0, 10.0]
