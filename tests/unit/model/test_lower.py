"""Expressions as instructions: precedence, exact numbers, units, and slips at the smallest guilty text."""

from __future__ import annotations

from fractions import Fraction

import pytest

import eqsheet
from eqsheet.diagnostics.source import Source
from eqsheet.model.build import build_system
from eqsheet.model.tape import Formula
from eqsheet.syntax.parse import parse_document


def formula(line: str) -> Formula:
    """The formula of one equation."""
    document, diagnostics = parse_document(Source("page", line))
    system, found = build_system(document.statements)
    assert not diagnostics and not found
    (item,) = system.equations
    return item.formula


def slip(line: str) -> tuple[str, str]:
    """Code of the one error, and the text it points at."""
    (found,) = [d for d in eqsheet.parse(line).solve().diagnostics if d.severity.value == "error"]
    assert found.span is not None
    return found.code, found.span.text


@pytest.mark.parametrize(
    ("expression", "value"),
    [
        ("-2^2", -4.0),
        ("2^3^2", 512.0),
        ("2*3^2", 18.0),
        ("-2*-3", 6.0),
        ("8/4/2", 1.0),
        ("8 - 4 - 2", 2.0),
        ("2 + 3*4", 14.0),
        ("6 - 2*-1", 8.0),
        ("(-8)^(1/3)", None),
        ("2^-1", 0.5),
        ("10 mm/2 mm", 5.0),
    ],
)
def test_precedence(expression: str, value: float | None) -> None:
    solution = eqsheet.parse(f"x = {expression}").solve()
    if value is None:
        assert [d.code for d in solution.diagnostics] == ["value-not-finite"]
    else:
        assert solution["x"].si == value


def test_exponents_are_exact() -> None:
    instructions = formula("y = x^(2/3)").tape.instructions
    assert ("power", 1, Fraction(2, 3)) in instructions


def test_formulas_that_differ_in_data_share_one_tape() -> None:
    first, second = formula("y = 3.7 mm * x + 0.1 m"), formula("b = 2.2 mm * a + 7.5 m")
    assert first.tape is second.tape or first.tape == second.tape
    assert [x.value for x in second.literals] == pytest.approx([0.0022, 7.5])


def test_literals_know_place_unit_and_kind() -> None:
    (literal,) = formula("T = x + 25.5 degC").literals
    assert (literal.value, literal.kind, literal.unit) == (pytest.approx(298.65), "reading", "degC")
    assert "T = x + 25.5 degC"[literal.start : literal.end] == "25.5 degC"


def test_places_of_instructions() -> None:
    found = formula("y = a*sin(b + c)")
    sine = next(i for i, entry in enumerate(found.tape.instructions) if entry[0] == "sin")
    start, end = found.places[sine]
    assert "y = a*sin(b + c)"[start:end] == "sin(b + c)"


@pytest.mark.parametrize(
    ("line", "code", "text"),
    [
        ("y = 2 + foo(3)", "unknown-function", "foo(3)"),
        ("y = 2 + const.nope", "unknown-constant", "const.nope"),
        ("y = 2 + pump.head", "unknown-instance", "pump.head"),
        ("y = 1 + 3 kgg", "unknown-unit", "kgg"),
        ("y = 1 + 3 m*kgg", "unknown-unit", "kgg"),
        ("y = atan2(1)", "argument-count", "atan2(1)"),
        ("y = 1 + (2 > 1)", "condition-as-number", "2 > 1"),
    ],
)
def test_slips_point_at_the_smallest_text(line: str, code: str, text: str) -> None:
    found_code, found_text = slip(line)
    assert found_code == code
    assert text in found_text or found_text in text


def test_names_close_to_a_slip_are_offered() -> None:
    solution = eqsheet.parse("define head(Q) = 2*Q\ny = haed(3)").solve()
    (found,) = [d for d in solution.diagnostics if d.code == "unknown-function"]
    assert "`head`" in found.help


def test_constants_have_dimensions() -> None:
    solution = eqsheet.parse("F = 2 kg*const.g_n").solve()
    assert solution["F"].to("N") == pytest.approx(19.6133, rel=1e-15)
