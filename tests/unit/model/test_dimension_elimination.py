"""Elimination over rational exponents, against hand-worked systems."""

from __future__ import annotations

from fractions import Fraction

from eqsheet.model.dimension_elimination import Elimination, Row
from eqsheet.units.dimension import DIMENSIONLESS, Dimension

METRE = Dimension.of({"m": 1})
SECOND = Dimension.of({"s": 1})


def over(dimension: Dimension) -> Dimension:
    return DIMENSIONLESS / dimension


def test_two_products_fix_two_unknowns() -> None:
    """x*y = m^2 and x/y = 1 give x = y = m."""
    e = Elimination()
    assert not e.add(Row(((0, 1), (1, 1)), over(METRE**2), 0))
    assert not e.add(Row(((0, 1), (1, -1)), DIMENSIONLESS, 1))
    fixed, open_ones = e.settled()
    assert fixed == {0: METRE, 1: METRE}
    assert open_ones == {}


def test_a_free_unknown_is_kept_in_the_expression_of_the_other() -> None:
    e = Elimination()
    e.add(Row(((0, 2), (1, 3)), over(METRE), 0))
    fixed, open_ones = e.settled()
    assert fixed == {}
    assert open_ones[0].constant == METRE ** Fraction(1, 2)
    assert open_ones[0].terms == {1: Fraction(-3, 2)}


def test_a_contradiction_names_all_its_sources() -> None:
    """x*y = m, y*z = s, x/z = m fails: from the first two x/z = m/s."""
    e = Elimination()
    assert not e.add(Row(((0, 1), (1, 1)), over(METRE), 10))
    assert not e.add(Row(((1, 1), (2, 1)), over(SECOND), 11))
    assert not e.add(Row(((5, 1),), over(SECOND), 12))
    assert e.add(Row(((0, 1), (2, -1)), over(METRE), 13)) == {10, 11, 13}


def test_a_row_that_follows_adds_nothing() -> None:
    e = Elimination()
    e.add(Row(((0, 1), (1, 1)), over(METRE), 0))
    assert not e.add(Row(((0, 2), (1, 2)), over(METRE**2), 1))
    assert len(e.pivots) == 1


def test_a_copy_is_independent() -> None:
    e = Elimination()
    e.add(Row(((0, 1), (1, 1)), over(METRE), 0))
    twin = e.copy()
    twin.add(Row(((0, 1), (1, -1)), over(METRE), 1))
    assert e.settled()[0] == {}
    assert twin.settled()[0] == {0: METRE, 1: DIMENSIONLESS}


def test_a_pivot_that_comes_back_is_put_in_again() -> None:
    """a = b*c, b = d, then a/(c*d) must vanish although b is eliminated after a."""
    e = Elimination()
    e.add(Row(((0, 1), (1, -1), (2, -1)), DIMENSIONLESS, 0))
    e.add(Row(((1, 1), (3, -1)), DIMENSIONLESS, 1))
    reduced, _ = e.reduce(((0, 1), (2, -1), (3, -1)), DIMENSIONLESS)
    assert reduced.terms == {}
    assert reduced.constant == DIMENSIONLESS
