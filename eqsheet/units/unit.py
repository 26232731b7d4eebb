"""A unit: symbol, dimension, factor to SI, and origin where readings in it have one."""

from __future__ import annotations

from dataclasses import dataclass

from eqsheet.units.dimension import Dimension


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
