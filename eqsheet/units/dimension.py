"""Dimensions: products of base dimensions with rational exponents."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from functools import lru_cache

SI_BASES = ("kg", "m", "s", "A", "K", "mol", "cd")


class Dimension(tuple[tuple[str, Fraction], ...]):
    """A dimension as sorted pairs (base unit, exponent), zero exponents left out.

    Bases are the SI base unit symbols and the symbols of worksheet-made base units (``EUR``).

    >>> speed = Dimension.of({"m": 1, "s": -1})
    >>> (speed * speed).text
    'm^2/s^2'
    >>> (speed / speed).text, Dimension.of({"s": -1}).text
    ('1', '1/s')
    """

    __slots__ = ()

    @staticmethod
    def of(exponents: Mapping[str, int | Fraction]) -> Dimension:
        """The dimension with the given exponents."""
        return Dimension(
            tuple((base, Fraction(power)) for base, power in sorted(exponents.items()) if power != 0)
        )

    def __mul__(self, other: Dimension) -> Dimension:  # type: ignore[override]  # no repetition
        if not self or not other:
            return self or other
        return _combine(self, other, 1)

    def __truediv__(self, other: Dimension) -> Dimension:
        return _combine(self, other, -1)

    def __pow__(self, power: Fraction | int) -> Dimension:
        return self if power == 1 or not self else _raise(self, power)

    @property
    def text(self) -> str:
        """Product of base units as it would be written in a worksheet; ``1`` for no dimension."""
        return _text(self)


@lru_cache(maxsize=4096)
def _combine(a: Dimension, b: Dimension, sign: int) -> Dimension:
    if not b:
        return a
    exponents = dict(a)
    for base, power in b:
        exponents[base] = exponents.get(base, Fraction(0)) + sign * power
    return Dimension.of(exponents)


@lru_cache(maxsize=4096)
def _raise(a: Dimension, power: Fraction | int) -> Dimension:
    return Dimension.of({base: exponent * power for base, exponent in a})


def _power(base: str, exponent: Fraction) -> str:
    if exponent == 1:
        return base
    return f"{base}^{exponent}" if exponent.denominator == 1 else f"{base}^({exponent})"


@lru_cache(maxsize=4096)
def _text(dimension: Dimension) -> str:
    order = {base: i for i, base in enumerate(SI_BASES)}
    pairs = sorted(dimension, key=lambda pair: (order.get(pair[0], len(order)), pair[0]))
    above = [_power(base, e) for base, e in pairs if e > 0]
    below = [_power(base, -e) for base, e in pairs if e < 0]
    if not above and not below:
        return "1"
    if not below:
        return "*".join(above)
    return ("*".join(above) or "1") + "/" + (below[0] if len(below) == 1 else "(" + "*".join(below) + ")")


DIMENSIONLESS = Dimension(())
