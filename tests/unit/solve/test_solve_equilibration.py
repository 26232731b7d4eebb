"""Factorisation where the sizes given for the unknowns are off by many powers of ten along a chain."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
import scipy.sparse as sp

from eqsheet.solve.factor import factorise


def chain(n: int) -> np.ndarray[Any, Any]:
    """Tridiagonal and well conditioned."""
    matrix = np.diag(np.full(n, -2.4)) + np.diag(np.full(n - 1, 1.4), -1) + np.diag(np.full(n - 1, 1.0), 1)
    return np.asarray(matrix)


@pytest.mark.parametrize("form", [np.asarray, sp.csc_matrix], ids=["dense", "sparse"])
@pytest.mark.parametrize("growth", [0.4, 1.0, 2.5])
def test_sizes_that_grow_along_a_chain(form: Callable[[Any], Any], growth: float) -> None:
    matrix = chain(60)
    weights = growth ** np.arange(60.0)
    solution = np.cos(np.arange(60.0))
    factor = factorise(form(matrix), weights)
    assert not factor.singular
    found = weights * factor.solve(matrix @ solution)
    assert abs(found - solution).max() < 1e-11


@pytest.mark.parametrize("form", [np.asarray, sp.csc_matrix], ids=["dense", "sparse"])
def test_a_singular_matrix_stays_singular(form: Callable[[Any], Any]) -> None:
    matrix = chain(20)
    matrix[7] = matrix[3] + matrix[12]
    assert factorise(form(matrix), np.ones(20)).singular
