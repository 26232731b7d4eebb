"""Reports on limits, those on the members of a large family made when asked for."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from eqsheet.model.lazy_sequence import LazySequence
from eqsheet.syntax.nodes import Statement
from eqsheet.units.unit import Unit
from eqsheet.worksheet.many_limits import ManyLimits, WorstLimit
from eqsheet.worksheet.solution import LimitReport

Array = NDArray[np.float64]


@dataclass(frozen=True)
class JudgedFamily:
    """How one limit on a large family stands, see `LimitReport`.

    Attributes
    ----------
    text : callable
        Position to what the limit says there.
    holds : ndarray (members,)
    margin : ndarray (members,)
        nan where there is none.
    slack : ndarray (members,)
        In SI.
    unit : Unit
        For the slack; `unit_text` is how it is written for a difference.
    """

    statement: Statement
    text: Callable[[int], str]
    holds: NDArray[np.bool_]
    margin: Array
    slack: Array
    unit: Unit
    unit_text: str

    def __len__(self) -> int:
        return len(self.holds)

    def report(self, entry: int) -> LimitReport:
        """Of one member."""
        margin = float(self.margin[entry])
        return LimitReport(
            self.statement,
            self.text(entry),
            bool(self.holds[entry]),
            None if margin != margin else margin,
            self.unit.difference_from_si(float(self.slack[entry])),
            self.unit_text,
        )

    def worst(self) -> WorstLimit:
        """The member that fails most, or is nearest to it; the first of several."""
        badness = np.where(np.isnan(self.margin), self.slack, self.margin)
        badness = np.where(self.holds, badness, badness - np.ptp(badness) - 1.0)
        failing = len(self) - int(self.holds.sum())
        return WorstLimit(self.report(int(badness.argmin())), len(self), failing)


class LimitReports(LazySequence[LimitReport], ManyLimits):
    """Reports in the order of the text.

    Parameters
    ----------
    parts : sequence of (LimitReport or JudgedFamily)
    """

    def __init__(self, parts: Sequence[LimitReport | JudgedFamily]) -> None:
        super().__init__([_made(part) for part in parts])
        self._judged = tuple(parts)

    @property
    def failing(self) -> int:
        """See `ManyLimits`."""
        return sum(
            len(part) - int(part.holds.sum()) if isinstance(part, JudgedFamily) else not part.holds
            for part in self._judged
        )

    def together(self, most: int) -> Iterable[WorstLimit]:
        """See `ManyLimits`."""
        for part in self._judged:
            if isinstance(part, LimitReport):
                yield WorstLimit(part, 1, int(not part.holds))
            elif len(part) > most:
                yield part.worst()
            else:
                every = map(part.report, range(len(part)))
                yield from (WorstLimit(one, 1, int(not one.holds)) for one in every)


def _made(part: LimitReport | JudgedFamily) -> tuple[int, Callable[[int], LimitReport]]:
    if isinstance(part, JudgedFamily):
        return len(part), part.report
    return 1, lambda _: part
