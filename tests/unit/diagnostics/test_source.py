"""Places in a text."""

from __future__ import annotations

import pytest

from eqsheet.diagnostics.source import Source, Span


@pytest.mark.parametrize(
    ("offset", "place"),
    [(0, (1, 1)), (2, (1, 3)), (3, (2, 1)), (4, (3, 1)), (6, (3, 3))],
)
def test_line_and_column(offset: int, place: tuple[int, int]) -> None:
    assert Source("a", "ab\n\ncd").line_and_column(offset) == place


@pytest.mark.parametrize(("line", "text"), [(1, "ab"), (2, ""), (3, "cd"), (4, ""), (0, "")])
def test_line_text(line: int, text: str) -> None:
    assert Source("a", "ab\n\ncd").line_text(line) == text


def test_span() -> None:
    span = Span(Source("a", "ab\ncde"), 4, 6)
    assert (span.line, span.column, span.text) == (2, 2, "de")
