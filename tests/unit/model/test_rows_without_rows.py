"""A table whose rows are still to be typed is said to be empty, and nothing breaks on it."""

from __future__ import annotations

import pytest

import eqsheet


@pytest.mark.parametrize(
    "rest", ["x = 3 m", "x[a] = 2*U[a]", "for i in bus:\n    y[i] = U[i]", "s = sum(U[i] for i in bus)"]
)
def test_a_heading_alone_is_said_to_have_no_rows(rest: str) -> None:
    solution = eqsheet.parse(f"rows bus: U in V\n{rest}\n").solve()
    assert "empty-group" in [d.code for d in solution.diagnostics]
    assert solution.status == "invalid"
