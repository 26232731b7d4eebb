"""A power of the distance is told from the end of a stretch of roots."""

from __future__ import annotations

from math import inf

import pytest

from eqsheet.solve.order_of_growth import grows_by_a_power

DISTANCES = [2.0**k for k in range(-20, 1)]
NOISE = 1e-10


@pytest.mark.parametrize("order", [2, 3, 5])
def test_a_power_is_told(order: int) -> None:
    assert grows_by_a_power([t**order for t in DISTANCES], NOISE)


@pytest.mark.parametrize("end", [1e-4, 3e-3, 0.05])
@pytest.mark.parametrize("order", [1, 2])
def test_a_stretch_of_roots_that_ends_is_none(end: float, order: int) -> None:
    assert not grows_by_a_power([max(t - end, 0.0) ** order for t in DISTANCES], NOISE)


def test_what_never_grows_or_leaves_the_domain_is_none() -> None:
    assert not grows_by_a_power([1e-17] * 20, NOISE)
    assert not grows_by_a_power([1e-17, inf], NOISE)
    assert not grows_by_a_power([], NOISE)


def test_a_search_that_loses_the_curve_is_none() -> None:
    assert not grows_by_a_power([1e-17, 1e-16, 2e-16, 0.3, 0.5, 0.9], NOISE)
