"""Numbers that carry the size of the terms they were made of, for the `sizes` of published problems.

A sum has the size of its largest term, a product the product of the sizes; functions start afresh at their
value.
"""

from __future__ import annotations

import math
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Sized:
    """A value with a size, closed under arithmetic with plain numbers."""

    value: float
    size: float

    def __add__(self, other):
        other = sized(other)
        return Sized(self.value + other.value, max(self.size, other.size))

    def __sub__(self, other):
        other = sized(other)
        return Sized(self.value - other.value, max(self.size, other.size))

    def __rsub__(self, other):
        return sized(other) - self

    def __mul__(self, other):
        other = sized(other)
        return Sized(self.value * other.value, self.size * other.size)

    def __truediv__(self, other):
        other = sized(other)
        return Sized(self.value / other.value, self.size / abs(other.value))

    def __rtruediv__(self, other):
        return sized(other) / self

    def __pow__(self, exponent):
        exponent = sized(exponent).value
        value = self.value**exponent
        return Sized(value, self.size**exponent if exponent > 0.0 else abs(value))

    def __rpow__(self, base):
        value = base**self.value
        return Sized(value, abs(value))

    def __neg__(self):
        return Sized(-self.value, self.size)

    def __abs__(self):
        return Sized(abs(self.value), self.size)

    def __lt__(self, other):
        return self.value < sized(other).value

    def __gt__(self, other):
        return self.value > sized(other).value

    __radd__ = __add__
    __rmul__ = __mul__


def sized(number) -> Sized:
    """The number itself, or a plain one with its own size."""
    return number if isinstance(number, Sized) else Sized(float(number), abs(float(number)))


def _function(of):
    def apply(argument: Sized) -> Sized:
        value = of(argument.value)
        return Sized(value, abs(value))

    return apply


class SizedMath:
    """The functions the published problems use, on sized numbers."""

    pi = math.pi
    exp = staticmethod(_function(math.exp))
    log = staticmethod(_function(math.log))
    sqrt = staticmethod(_function(math.sqrt))
    sin = staticmethod(_function(math.sin))
    cos = staticmethod(_function(math.cos))
    atan = staticmethod(_function(math.atan))
