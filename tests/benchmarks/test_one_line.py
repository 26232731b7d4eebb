"""Thousands of explicit one-line equations, from text to answer."""

from __future__ import annotations

from typing import Any

import pytest
from one_line import one_line_worksheet

import eqsheet


def solve_text(text: str) -> Any:
    return eqsheet.parse(text).solve()


@pytest.mark.parametrize("size", [2_500, 5_000, 10_000])
def test_text_to_answer(benchmark: Any, size: int) -> None:
    text, expected = one_line_worksheet(size)
    assert len(expected) == size + 2
    solution = benchmark.pedantic(solve_text, args=(text,), rounds=1)
    assert {name: solution[name].si for name in expected} == pytest.approx(expected, rel=1e-12)
