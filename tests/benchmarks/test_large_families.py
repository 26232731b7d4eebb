"""The worksheets of `large_families`, at sizes at which they are checked against hand-written solutions."""

from pathlib import Path
from typing import Any

import family_texts as texts
import numpy as np
import pytest
from network_text import write_network

import eqsheet
from eqsheet.model.equation_group import LARGE_FAMILY


def test_tridiagonal_family(benchmark: Any) -> None:
    n = LARGE_FAMILY + 17
    solution = benchmark(lambda: eqsheet.parse(texts.tridiagonal(n)).solve())
    found = [solution[f"T[{i}]"].si for i in range(1, n + 1)]
    np.testing.assert_allclose(found, texts.tridiagonal_by_hand(n), rtol=1e-8, atol=1e-11)


def test_two_dimensional_family() -> None:
    n = 50
    solution = eqsheet.parse(texts.bratu(n)).solve()
    found = [solution[f"u[{i}, {j}]"].si for i in range(1, n + 1) for j in range(1, n + 1)]
    np.testing.assert_allclose(found, texts.bratu_by_hand(n), rtol=1e-9)


def test_chain() -> None:
    n = LARGE_FAMILY + 5
    solution = eqsheet.parse(texts.chain(n)).solve()
    x = 1.0
    for i in range(1, n + 1):
        x = 0.5 * x + 1.0 / (1.0 + x * x)
        assert solution[f"x[{i}]"].si == pytest.approx(x, rel=1e-14)
    assert {block.method for block in solution.blocks} == {"closed form"}


def test_cascade_keeps_its_balance() -> None:
    solution = eqsheet.parse(texts.cascade(100)).solve()
    assert solution.solved
    given, taken = 0.12 - solution["y[1]"].si, solution["x[100]"].si - 0.001
    assert 1.4 * taken == pytest.approx(given, rel=1e-12)


def test_network_takes_in_what_its_nodes_draw(tmp_path: Path) -> None:
    solution = eqsheet.load(write_network(tmp_path, 90)).solve()
    assert solution.solved, solution.diagnostics
    drawn = -solution["q[a0]"].to("L/s")
    assert drawn == pytest.approx(0.01 * 61, rel=1e-9)
