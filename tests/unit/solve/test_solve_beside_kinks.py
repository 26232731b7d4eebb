"""Roots at a kink with nothing but roots beyond it are told from isolated ones."""

from __future__ import annotations

import numpy as np
import pytest
from solve_problems import problem, scalar

from eqsheet.solve.beside_kinks import curve_beside, roots_beside


def flat_below_one():
    """``max(x + y - 1, 0) = 0, x = 2 y``: roots along the whole line from (2/3, 1/3) down."""

    def rising(x):
        return x[0] + x[1] >= 1

    return problem(
        lambda x: [x[0] + x[1] - 1 if rising(x) else 0.0, x[0] - 2 * x[1]],
        lambda x: [[1, 1] if rising(x) else [0, 0], [1, -2]],
        [2.0, 2.0],
    )


def bent():
    """``abs(x) = 2 y, x + y = 0``: a kink at the one root, and a slope on either side of it."""
    return problem(
        lambda x: [abs(x[0]) - 2 * x[1], x[0] + x[1]],
        lambda x: [[np.sign(x[0]), -2], [1, 1]],
        [1.0, 1.0],
    )


def test_a_line_of_roots_that_begins_at_the_kink_is_seen() -> None:
    found = curve_beside(flat_below_one(), np.array([2 / 3, 1 / 3]))
    assert found is not None
    left, right = found
    assert abs(left[0]) == pytest.approx(1.0)
    # In units of the unknowns' own sizes, both become smaller alike.
    assert right[0] == pytest.approx(right[1])


def test_a_kink_with_slopes_on_both_sides_is_no_matter() -> None:
    assert curve_beside(bent(), np.zeros(2)) is None


@pytest.mark.parametrize("at", [1.0, 1e-3, -5.0])
def test_one_unknown(at: float) -> None:
    flat = scalar(
        lambda x: max(x - at, 0.0), lambda x: float(x >= at), at, size=lambda x: max(abs(x), abs(at))
    )
    steep = scalar(lambda x: x - at, lambda x: 1.0, at, size=lambda x: max(abs(x), abs(at)))
    assert roots_beside(flat, at)
    assert not roots_beside(steep, at)
