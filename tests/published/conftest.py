"""What the published checks share: text in, a solution out, and a look at why if there is none."""

from __future__ import annotations

from collections.abc import Callable
from textwrap import dedent

import pytest

import eqsheet


@pytest.fixture
def solved() -> Callable[[str], eqsheet.Solution]:
    """Solves a text, its common indentation removed; one that is not solved fails the test, saying why."""

    def solve(text: str) -> eqsheet.Solution:
        solution = eqsheet.parse(dedent(text)).solve()
        said = "\n".join(f"{d.code}: {d.message}" for d in solution.diagnostics)
        assert solution.status == "solved", f"{solution.status}\n{said}"
        return solution

    return solve
