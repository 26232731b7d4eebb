"""Any text at all goes through the whole pipeline: what comes out is a solution or a diagnostic with a place."""

from __future__ import annotations

import json
import math

import pytest
from hypothesis import HealthCheck, example, given, settings
from hypothesis import strategies as st
from strategies import SENSIBLE, mutated_texts, renumbered_worksheets, slipped_worksheets, worksheet_texts

import eqsheet
from eqsheet.app import exit_status
from eqsheet.diagnostics.oneline import one_line
from eqsheet.diagnostics.terminal import render
from eqsheet.review.json_form import solution_text
from eqsheet.review.order_of_solution import block_lines
from eqsheet.review.table import solution_lines, verdict_line
from eqsheet.solve.trail import Budget
from eqsheet.syntax.automaton import statement_automaton

# A warning of numpy would reach the user's terminal.
pytestmark = pytest.mark.filterwarnings("error")

statement_automaton()  # made before the first test, which would be charged for it

SHORT = Budget(iterations=20, seconds=0.3)


def checked(text: str) -> eqsheet.Solution:
    """The solution of a text, after checking what holds of every solution."""
    solution = eqsheet.parse(text, "page").solve(budget=SHORT)
    errors = [d for d in solution.diagnostics if d.severity.value == "error"]
    assert solution.status in exit_status.OF_SOLUTION
    assert bool(errors) == (solution.status in ("invalid", "unsolved"))
    if solution.status == "solved":
        assert all(limit.holds for limit in solution.limits)
    for diagnostic in solution.diagnostics:
        for label in diagnostic.labels:
            assert 0 <= label.span.start <= label.span.end <= len(label.span.source.text)
        assert "\n" not in diagnostic.message
        assert len(one_line(diagnostic).splitlines()) == 1
        render(diagnostic)
    for diagnostic in errors:
        assert diagnostic.span is not None, diagnostic
    for value in solution.values():
        assert math.isfinite(value.si)
    assert json.loads(solution_text(solution))["status"] == solution.status
    verdict_line(solution)
    solution_lines(solution)
    block_lines(solution)
    return solution


@given(slipped_worksheets())
@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@example("a = 3 m\nb = 3 s\na = b*1")
@example("x = 1e308 km")
@example("x + y = 1e200\nx^3 - y^3 = 1e300\nx near 1e150")
@example("x = 1e-300\ny = x^2\nz = 1/y")
@example("x^2 = -1\ny = x")
@example("x^0 = 9")
@example("x = x")
@example("x*0 = 0")
@example("1 = 1")
def test_worksheets_with_slips(text: str) -> None:
    checked(text)


@given(renumbered_worksheets())
@settings(max_examples=100, deadline=None, suppress_health_check=[HealthCheck.too_slow])
def test_worksheets_with_other_numbers(text: str) -> None:
    checked(text)


@given(worksheet_texts | mutated_texts())
@settings(max_examples=100, deadline=None, suppress_health_check=[HealthCheck.too_slow])
def test_grammatical_and_mutated_texts(text: str) -> None:
    checked(text)


@given(st.text(max_size=60))
@settings(max_examples=100, deadline=None)
def test_any_text(text: str) -> None:
    checked(text)


@given(st.binary(max_size=80))
@settings(max_examples=100, deadline=None)
def test_any_bytes_that_are_text(content: bytes) -> None:
    checked(content.decode("utf-8", errors="replace"))


@given(slipped_worksheets() | renumbered_worksheets(), st.randoms(use_true_random=False))
@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.too_slow])
def test_the_order_of_lines_changes_neither_verdict_nor_value(text: str, random: object) -> None:
    lines = text.split("\n")
    shuffled = lines.copy()
    random.shuffle(shuffled)  # type: ignore[attr-defined]  # hypothesis gives no public name to its generator
    first, second = eqsheet.parse(text).solve(), eqsheet.parse("\n".join(shuffled)).solve()
    assert first.status == second.status
    assert {n: v.si for n, v in first.items()} == {n: v.si for n, v in second.items()}


def test_the_sensible_worksheets_are_sensible() -> None:
    for text in SENSIBLE:
        assert eqsheet.parse(text).solve().status in ("solved", "outside-limits"), text
