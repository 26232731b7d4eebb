"""The values of a large family taken together: how many, the smallest, the largest, and where they come from."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from eqsheet.worksheet.solution import QuantityValue


@dataclass(frozen=True, slots=True)
class ManyValues:
    """Values that stand together in a table: a single one, or the known or the solved members of a large family.

    Attributes
    ----------
    count : int
    first, smallest, largest : QuantityValue
        Ties go to the first member.
    origins : tuple of QuantityValue
        At least one for each line or block that values come from.
    """

    count: int
    first: QuantityValue
    smallest: QuantityValue
    largest: QuantityValue
    origins: tuple[QuantityValue, ...]

    @staticmethod
    def of(values: Sequence[QuantityValue]) -> ManyValues:
        """Values that were made already."""
        smallest = min(values, key=lambda value: value.si)
        largest = max(values, key=lambda value: value.si)
        return ManyValues(len(values), values[0], smallest, largest, tuple(values))


class ManyQuantities(Mapping[str, QuantityValue]):
    """Quantities by name, most of which are never made one by one."""

    @abstractmethod
    def together(self, most: int) -> Sequence[ManyValues]:
        """The values in order of showing.

        Parameters
        ----------
        most : int
            Members of a family that come from one section and are more than this, known ones and solved ones
            apart, and those in another unit, are taken together where the first of them stands.
        """
