"""Time of the structural analysis, and that it stays right at these sizes."""

from __future__ import annotations

import random
from typing import Any

import numpy as np
import pytest

from eqsheet.structure.analyse import analyse
from eqsheet.structure.analyse_sparse import analyse_sparse


def chain(size: int) -> list[list[int]]:
    """Each row settles a column from the one before: the shape of a long one-line calculation."""
    return [[0], *([i - 1, i] for i in range(1, size))]


def coupled(size: int) -> list[list[int]]:
    """A hidden diagonal and two more entries a row, rows in random order: mostly one large block."""
    draw = random.Random(size)
    rows = [[i, *draw.sample(range(size), 2)] for i in range(size)]
    draw.shuffle(rows)
    return rows


@pytest.mark.parametrize("size", [20, 1_000])
def test_coupled_system(benchmark: Any, size: int) -> None:
    structure = benchmark(analyse, coupled(size), size)
    assert structure.square
    assert max(len(block.rows) for block in structure.blocks) > size / 2


@pytest.mark.parametrize("size", [2_500, 5_000, 10_000])
def test_chain_of_one_line_equations(benchmark: Any, size: int) -> None:
    structure = benchmark(analyse, chain(size), size)
    assert [block.columns for block in structure.blocks] == [(i,) for i in range(size)]


def test_chain_of_100_000_rows_from_arrays(benchmark: Any) -> None:
    size = 100_000
    indptr = np.concatenate([[0], np.arange(1, 2 * size, 2)]).astype(np.int32)
    indices = np.concatenate([[0], np.column_stack([np.arange(size - 1), np.arange(1, size)]).ravel()])
    structure = benchmark(analyse_sparse, indptr, indices.astype(np.int32), size)
    assert [block.columns for block in structure.blocks] == [(i,) for i in range(size)]


def test_tridiagonal_family_of_100_000_rows_from_arrays(benchmark: Any) -> None:
    size = 100_000
    own = np.arange(size)
    indices = np.column_stack([np.maximum(own - 1, 0), own, np.minimum(own + 1, size - 1)]).ravel()
    indptr = np.arange(0, 3 * size + 1, 3)
    structure = benchmark(analyse_sparse, indptr.astype(np.int32), indices.astype(np.int32), size)
    assert [block.columns for block in structure.blocks] == [tuple(range(size))]
