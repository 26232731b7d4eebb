"""Limits over large families taken together: the worst member, and how many fail."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from eqsheet.worksheet.solution import LimitReport


@dataclass(frozen=True, slots=True)
class WorstLimit:
    """One limit, or the worst of many of one statement.

    Attributes
    ----------
    count, failing : int
        How many limits there are, and how many of them fail.
    """

    limit: LimitReport
    count: int
    failing: int


class ManyLimits(Sequence[LimitReport]):
    """Reports on limits, most of which are never made one by one."""

    @property
    @abstractmethod
    def failing(self) -> int:
        """How many fail."""

    @abstractmethod
    def together(self, most: int) -> Iterable[WorstLimit]:
        """The limits in the order of the text, those over a family of more than `most` by its worst member."""


def failing_limits(limits: Sequence[LimitReport]) -> int:
    """How many of some limits fail."""
    return limits.failing if isinstance(limits, ManyLimits) else sum(not limit.holds for limit in limits)


def worst_of_each(limits: Iterable[LimitReport], most: int) -> Iterable[WorstLimit]:
    """The limits, see `ManyLimits.together`."""
    if isinstance(limits, ManyLimits):
        return limits.together(most)
    return [WorstLimit(limit, 1, int(not limit.holds)) for limit in limits]
