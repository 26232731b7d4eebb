"""Texts of unreasonable size or depth are refused with a diagnostic, in bounded time."""

from __future__ import annotations

import time

import pytest

from eqsheet.diagnostics.source import Source
from eqsheet.syntax.bounds import MOST_BROKEN_STATEMENTS
from eqsheet.syntax.parse import parse_document

HUGE = {
    "10,000 nested brackets": ("x = " + "(" * 10000 + "1" + ")" * 10000, "statement-too-long"),
    "9,000 nested brackets": ("x = " + "(" * 9000 + "1" + ")" * 9000, "nested-too-deeply"),
    "9,000 open brackets": ("x = " + "(" * 9000, "nested-too-deeply"),
    "a line of 100,000 characters": ("x = " + "a + " * 25000 + "a", "statement-too-long"),
    "a sum of sums": ("x = " + "a+(" * 5000 + "a" + ")" * 5000, "statement-too-long"),
    "a sum of sums of sums": ("x = " + "a+(" * 4000 + "a" + ")" * 4000, "nested-too-deeply"),
    "brackets to the left": ("x = " + "(" * 4000 + "a" + "+a)" * 4000, "nested-too-deeply"),
    "a chain of powers": ("x = " + "2^" * 3000 + "2", "nested-too-deeply"),
    "a chain of signs": ("x = " + "-" * 5000 + "a", "nested-too-deeply"),
    "a chain of conditions": ("x = " + "if a<b then 1 else " * 800 + "1", "nested-too-deeply"),
    "a chain of owners": ("x = " + "a." * 5000 + "b", "nested-too-deeply"),
    "groups in groups": ("".join(" " * i + "for i in 1..3:\n" for i in range(300)), "nested-too-deeply"),
    "10 MB in one line": ("x" * 10_000_000, "statement-too-long"),
    "an open bracket before many lines": ("x = (" + "\n  a" * 200_000, "statement-too-long"),
}


@pytest.mark.parametrize("name", HUGE)
def test_unreasonable_text_is_refused_quickly(name: str) -> None:
    text, code = HUGE[name]
    started = time.perf_counter()
    _, found = parse_document(Source("sheet", text))
    assert [d.code for d in found] == [code]
    assert time.perf_counter() - started < 5


def test_reading_stops_after_many_broken_statements() -> None:
    _, found = parse_document(Source("sheet", "x = 2(a)\n" * 100_000))
    assert len(found) == MOST_BROKEN_STATEMENTS + 1
    assert found[-1].code == "too-many-broken"


def test_deepest_allowed_expression_is_read() -> None:
    document, found = parse_document(
        Source("sheet", "x = " + "(" * 150 + "a" + ")" * 150 + "\ny = " + "2^" * 190 + "a")
    )
    assert not found
    assert len(document.statements) == 2


def test_terms_side_by_side_are_not_nested() -> None:
    """A sum or product is as deep as its deepest operand, however many it has."""
    document, found = parse_document(
        Source("sheet", "x = " + "a+" * 5000 + "a\ny = " + "a*b - " * 3000 + "(a + b)/c")
    )
    assert not found
    assert len(document.statements) == 2
