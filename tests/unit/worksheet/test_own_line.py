"""Which line of a block is a quantity's own."""

from __future__ import annotations

from textwrap import dedent

from eqsheet.diagnostics.source import Source
from eqsheet.syntax.nodes import Statement
from eqsheet.syntax.parse import parse_document
from eqsheet.worksheet.own_line import own_line

BLOCK = """
    h = k*v^2           # head lost
    2*v + h = w         # balance
    w = v + 1 m         # comes second for w
    v near 2 m
    show v
"""


def statements() -> tuple[Statement, ...]:
    document, diagnostics = parse_document(Source("page", dedent(BLOCK)))
    assert not diagnostics
    return document.statements


def test_alone_on_the_left() -> None:
    found = own_line("h", statements())
    assert found is not None
    assert found.description == "head lost"


def test_left_goes_before_right_whatever_the_order() -> None:
    found = own_line("w", statements())
    assert found is not None
    assert found.description == "comes second for w"


def test_right_counts_where_no_left_does() -> None:
    found = own_line("w", statements()[:2])
    assert found is not None
    assert found.description == "balance"


def test_a_guess_or_a_share_in_a_line_is_no_own_line() -> None:
    assert own_line("v", statements()) is None
