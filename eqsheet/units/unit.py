"""A unit: symbol, dimension, factor to SI, and origin where readings in it have one."""

from __future__ import annotations

import math
from dataclasses import dataclass

from eqsheet.units.dimension import Dimension

# Rounding a larger number might lead beyond the range of floats.
_LARGEST_ROUNDED = 1e300


@dataclass(frozen=True, slots=True)
class Unit:
    """A unit, simple or compound.

    Attributes
    ----------
    text : str
        As written.
    dimension : Dimension
    factor : float
        One of it in SI base units.
    origin : float
        SI value of its zero (273.15 for degC, the ambient pressure for barg); 0.0 for most.
    reading : bool
        Whether values in it are readings, with an origin.
    difference : bool
        Whether values in it can only be differences (``delta_degC``).
    sense : str
        What the dimension does not tell: ``angle`` (rad, deg, rev), ``rotation`` (rpm, rad/s, rev/min),
        ``frequency`` (Hz), else empty. Never changes a number; ground for a warning only.
    """

    text: str
    dimension: Dimension
    factor: float
    origin: float = 0.0
    reading: bool = False
    difference: bool = False
    sense: str = ""

    def to_si(self, value: float) -> float:
        """SI value of `value` read in this unit, origin included."""
        share = self._share
        return (value / share if share else value * self.factor) + self.origin

    def from_si(self, value: float) -> float:
        """Value in this unit of the SI value of a reading."""
        return self.difference_from_si(value - self.origin)

    def as_written(self, si: float) -> float:
        """`from_si` as a person would write it: a short number that `to_si` takes back to the very same value.

        Division does not undo multiplication to the last digit, and an origin takes digits away: 12 degF come back
        from kelvin as 11.999999999999943. Of the numbers that stand for one SI value the one written is meant.

        >>> from eqsheet.units.registry import UnitTable
        >>> inch = UnitTable.standard().lookup("in")
        >>> inch.from_si(inch.to_si(1.5)), inch.as_written(inch.to_si(1.5))
        (1.4999999999999998, 1.5)
        """
        value = self.from_si(si)
        if value == 0.0 or not abs(value) < _LARGEST_ROUNDED:
            return value
        # From two decimals less than one unit in the last place of the SI value leaves certain. Near absolute zero it is
        # the origin, taken off and put on again, that has been rounded most.
        place = max(math.ulp(si), math.ulp(self.origin))
        certain = -math.ceil(math.log10(place) - math.log10(self.factor))
        for kept in range(certain - 2, certain + 3):
            short = round(value, kept)
            if self.to_si(short) == si:
                return short
        return value

    def difference_from_si(self, value: float) -> float:
        """Value in this unit of the SI value of a difference."""
        share = self._share
        return value * share if share else value / self.factor

    @property
    def _share(self) -> float:
        """How many of it make the SI unit, where that is a whole number above 1; else 0.

        57 % is the double nearest to 0.57 when divided by 100, and not when multiplied by 0.01.
        """
        whole = float(round(1.0 / self.factor)) if self.factor < 1.0 else 0.0
        return whole if whole and 1.0 / whole == self.factor else 0.0
