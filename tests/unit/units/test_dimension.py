"""Dimensions as values: products, powers, text."""

from __future__ import annotations

from fractions import Fraction

import pytest

from eqsheet.units.dimension import DIMENSIONLESS, Dimension


def test_zero_exponents_are_left_out() -> None:
    assert Dimension.of({"m": 0}) == DIMENSIONLESS


def test_order_of_making_does_not_matter() -> None:
    assert Dimension.of({"m": 1, "s": -2}) == Dimension.of({"s": -2, "m": 1})
    assert hash(Dimension.of({"m": 1, "s": -2})) == hash(Dimension.of({"s": -2, "m": 1}))


def test_products_cancel() -> None:
    speed = Dimension.of({"m": 1, "s": -1})
    assert speed * Dimension.of({"s": 1}) == Dimension.of({"m": 1})
    assert speed / speed == DIMENSIONLESS


def test_powers_may_be_broken() -> None:
    assert Dimension.of({"m": 2, "s": -1}) ** Fraction(1, 2) == Dimension.of({"m": 1, "s": Fraction(-1, 2)})
    assert Dimension.of({"m": 2}) ** 0 == DIMENSIONLESS


@pytest.mark.parametrize(
    ("exponents", "text"),
    [
        ({}, "1"),
        ({"m": 1}, "m"),
        ({"s": -1}, "1/s"),
        ({"s": -1, "m": -2}, "1/(m^2*s)"),
        ({"kg": 1, "m": -1, "s": -2}, "kg/(m*s^2)"),
        ({"EUR": 1, "kg": 1}, "kg*EUR"),
        ({"m": Fraction(1, 2)}, "m^(1/2)"),
    ],
)
def test_text(exponents: dict[str, int | Fraction], text: str) -> None:
    assert Dimension.of(exponents).text == text
