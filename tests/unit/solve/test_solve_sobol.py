"""Sobol's points against a library's, and what makes them of use."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.stats import qmc

from eqsheet.solve.sobol import sobol


@pytest.mark.parametrize("dimensions", [1, 2, 10, 53])
def test_the_points_are_those_of_the_library_but_for_a_digital_shift(dimensions: int) -> None:
    """Exclusive or with the first point, which is zero before the shift, takes the shift out."""
    own = np.floor(sobol(dimensions, 256) * 2.0**32).astype(np.uint64)
    library = qmc.Sobol(dimensions, scramble=False, bits=32).random(256)
    assert ((own ^ own[0]) == (library * 2.0**32).astype(np.uint64)).all()


def test_every_sixteenth_of_every_axis_holds_as_many_points() -> None:
    points = sobol(120, 64)
    assert points.shape == (64, 120)
    for axis in points.T:
        assert np.bincount((axis * 16).astype(int), minlength=16).tolist() == [4] * 16


def test_points_lie_strictly_inside_and_no_two_axes_are_alike() -> None:
    points = sobol(120, 64)
    assert (points > 0.0).all() and (points < 1.0).all()
    assert len({tuple(axis) for axis in points.T.tolist()}) == 120


def test_the_cube_is_filled_much_more_evenly_than_by_chance() -> None:
    chance = np.random.default_rng(1).random((256, 5))
    assert qmc.discrepancy(sobol(5, 256)) < 0.1 * qmc.discrepancy(chance)
