"""Texts to trees and back: nothing is lost, nothing raises, whatever the text."""

from __future__ import annotations

from hypothesis import assume, given, settings
from hypothesis import strategies as st
from strategies import (
    conditions,
    expressions,
    mutated_texts,
    respaced_texts,
    statement_texts,
    worksheet_texts,
)

from eqsheet.diagnostics.source import Source
from eqsheet.syntax.automaton import statement_automaton
from eqsheet.syntax.format import format_document, laid_out
from eqsheet.syntax.lines import logical_lines
from eqsheet.syntax.meaning import same_meaning
from eqsheet.syntax.nodes import Expression, Statement
from eqsheet.syntax.parse import parse_document, parsed_text
from eqsheet.syntax.write import write_expression

statement_automaton()  # made before the first test, which would be charged for it


@given(expressions)
def test_written_expression_parses_to_the_same_tree(expression: Expression) -> None:
    node = parsed_text(f"y = {write_expression(expression)}").node
    assert same_meaning(node.right, expression), write_expression(expression)  # type: ignore[union-attr]  # an equation


@given(conditions)
def test_written_condition_parses_to_the_same_tree(condition: Expression) -> None:
    node = parsed_text(f"y = if {write_expression(condition)} then 1 else 2").node
    assert same_meaning(node.right.condition, condition), write_expression(condition)  # type: ignore[union-attr]  # an equation with a conditional


@given(statement_texts)
def test_strategies_make_valid_statements(text: str) -> None:
    _, diagnostics = parse_document(Source("a", text))
    assert not diagnostics, (text, diagnostics)


@given(worksheet_texts | respaced_texts())
@settings(max_examples=300)
def test_formatting_keeps_the_meaning_without_its_own_check(text: str) -> None:
    source = Source("a", text)
    document, diagnostics = parse_document(source)
    unsure = any(d.code in ("stray-indentation", "nested-too-deeply") for d in diagnostics)
    after = laid_out(text, logical_lines(source), unsure)
    again, found = parse_document(Source("a", after))
    assert same_meaning(document, again), after
    # Tabs are written as spaces, which mends a mixture of the two; nothing else comes or goes.
    assert [d.code for d in found] == [d.code for d in diagnostics if d.code != "mixed-indentation"], after


@given(worksheet_texts | respaced_texts() | mutated_texts())
@settings(max_examples=300)
def test_formatting_twice_changes_nothing_more(text: str) -> None:
    once = format_document(Source("a", text))
    assert format_document(Source("a", once)) == once


@given(st.text(max_size=80) | mutated_texts())
@settings(max_examples=500)
def test_every_text_gives_statements_or_placed_diagnostics(text: str) -> None:
    text = text.replace("\r", "\n")
    source = Source("a", text)
    document, diagnostics = parse_document(source)
    for diagnostic in diagnostics:
        assert diagnostic.span is not None
        assert 0 <= diagnostic.span.start <= diagnostic.span.end <= len(text)
        assert "\n" not in diagnostic.message
        assert diagnostic.help, diagnostic
    for statement in document.statements:
        _check_places(statement)


def _check_places(statement: Statement) -> None:
    text = statement.source.text
    start = statement.line.offset
    assert text[start : start + len(statement.line.text)] == statement.line.text
    assert 0 <= statement.node.start <= statement.node.end <= len(statement.line.text)
    for below in statement.body:
        _check_places(below)


@given(worksheet_texts, st.integers(0, 5), st.sampled_from(("x = (a + b", "x = 2 3", "y ==", "x = a +", '"')))
def test_a_broken_line_hides_no_other_statement(text: str, place: int, broken: str) -> None:
    document, diagnostics = parse_document(Source("a", text))
    assume(not diagnostics)
    starts = [s.line.line - 1 for s in document.statements] or [0]
    lines = text.split("\n")
    at = starts[place % len(starts)]
    # A line that begins with an operator goes on with the line before, broken or not.
    assume(not lines[at].lstrip().startswith(("-", "+")))
    worse, found = parse_document(Source("a", "\n".join([*lines[:at], broken, *lines[at:]])))
    assert len(found) == 1
    assert same_meaning(worse.statements, document.statements)
