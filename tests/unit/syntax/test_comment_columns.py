"""End comments that the author has lined up stay lined up."""

from __future__ import annotations

import pytest

from eqsheet.diagnostics.source import Source
from eqsheet.syntax.format import format_document


@pytest.mark.parametrize(
    ("text", "tidy"),
    [
        ("D=52 mm       # bore\nL = 3 m       # length\n", "D = 52 mm     # bore\nL = 3 m       # length\n"),
        ("D = 52 mm # bore\n", "D = 52 mm  # bore\n"),
        ("D = 52 mm#bore\n", "D = 52 mm  # bore\n"),
        ("D=2*(a+b)  # no room for a column\n", "D = 2*(a + b)  # no room for a column\n"),
        ("D = 52 mm\t\t# bore\n", "D = 52 mm  # bore\n"),
        ("y = a +\n    b       # sum\n", "y = a +\n    b       # sum\n"),
    ],
    ids=["lined up", "one blank", "none", "grown past it", "tabs", "continued"],
)
def test_end_comment(text: str, tidy: str) -> None:
    assert format_document(Source("page", text)) == tidy
    assert format_document(Source("page", tidy)) == tidy
