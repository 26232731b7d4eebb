"""Gaussian elimination over the rationals, for demands that no single line can settle.

The unknowns are dimensions, written additively: a row says that the sum of ``coefficient * unknown`` plus a
constant dimension is none. Elimination gives the most general unifier: what is fixed, what stays free, and
how free ones hang together.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field
from fractions import Fraction

from eqsheet.model.dimension_rules import Exponent
from eqsheet.units.dimension import Dimension


@dataclass(frozen=True, slots=True)
class Row:
    """``constant * product of unknown^coefficient`` is a plain number; ``source`` is its formula."""

    terms: tuple[tuple[int, Exponent], ...]
    constant: Dimension
    source: int


@dataclass(slots=True)
class _Reduced:
    """A row being reduced, with the sources of the rows and the pivots that went into it."""

    terms: dict[int, Exponent]
    constant: Dimension
    sources: set[int] = field(default_factory=set)


@dataclass(frozen=True, slots=True)
class _Pivot:
    """``unknown = constant * product of other^power``; ``used`` are the pivots that were put in to get it."""

    terms: tuple[tuple[int, Exponent], ...]
    constant: Dimension
    source: int
    used: tuple[int, ...]


class Elimination:
    """Takes rows one by one and keeps them in triangular form.

    A pivot's expression holds only unknowns that were free when it was added, so putting pivots into a row
    ends after at most as many rounds as there are pivots.
    """

    def __init__(self) -> None:
        self.pivots: dict[int, _Pivot] = {}

    def copy(self) -> Elimination:
        """An independent elimination with the same rows."""
        twin = Elimination()
        twin.pivots = dict(self.pivots)
        return twin

    def reduce(self, terms: Iterable[tuple[int, Exponent]], constant: Dimension) -> tuple[_Reduced, set[int]]:
        """The row with all pivots put in, and the pivots used."""
        row = _Reduced(dict(terms), constant)
        used: set[int] = set()
        ready = [unknown for unknown in row.terms if unknown in self.pivots]
        while ready:
            unknown = ready.pop()
            power = row.terms.pop(unknown, 0)
            if power == 0:
                continue
            pivot = self.pivots[unknown]
            used.add(unknown)
            row.constant = row.constant * pivot.constant ** Fraction(power)
            for other, exponent in pivot.terms:
                total = row.terms.get(other, 0) + power * exponent
                if total == 0:
                    del row.terms[other]
                    continue
                row.terms[other] = total
                if other in self.pivots:
                    ready.append(other)
        return row, used

    def add(self, row: Row, often: dict[int, int] | None = None) -> frozenset[int]:
        """Take the row in; gives the sources that contradict one another, empty where it fits.

        `often` says in how many rows an unknown stands; the rarest is made the pivot, which keeps rows short.
        """
        reduced, used = self.reduce(row.terms, row.constant)
        if not reduced.terms:
            return self.sources(used) | {row.source} if reduced.constant else frozenset()
        counts = often or {}
        unknown = min(reduced.terms, key=lambda u: (counts.get(u, 0), u))
        scale = Fraction(-1) / Fraction(reduced.terms.pop(unknown))
        terms = tuple((other, power * scale) for other, power in sorted(reduced.terms.items()))
        self.pivots[unknown] = _Pivot(terms, reduced.constant**scale, row.source, tuple(sorted(used)))
        return frozenset()

    def sources(self, unknowns: Iterable[int]) -> frozenset[int]:
        """Sources of all rows that went into the pivots `unknowns`."""
        found: set[int] = set()
        seen: set[int] = set()
        stack = [u for u in unknowns if u in self.pivots]
        while stack:
            unknown = stack.pop()
            if unknown in seen:
                continue
            seen.add(unknown)
            pivot = self.pivots[unknown]
            found.add(pivot.source)
            stack.extend(pivot.used)
            stack.extend(other for other, _ in pivot.terms if other in self.pivots)
        return frozenset(found)

    def settled(self) -> tuple[dict[int, Dimension], dict[int, _Reduced]]:
        """What is fixed, and the others expressed by what stays free."""
        fixed: dict[int, Dimension] = {}
        open_ones: dict[int, _Reduced] = {}
        # A later pivot never stands on an earlier one, so going backwards every expression is final at once.
        for unknown, pivot in reversed(self.pivots.items()):
            row = _Reduced({}, pivot.constant)
            for other, power in pivot.terms:
                if other in fixed:
                    row.constant = row.constant * fixed[other] ** Fraction(power)
                    continue
                parts = open_ones[other] if other in open_ones else _Reduced({other: 1}, Dimension(()))
                row.constant = row.constant * parts.constant ** Fraction(power)
                for free, exponent in parts.terms.items():
                    total = row.terms.get(free, 0) + power * exponent
                    if total == 0:
                        del row.terms[free]
                    else:
                        row.terms[free] = total
            if row.terms:
                open_ones[unknown] = row
            else:
                fixed[unknown] = row.constant
        return fixed, open_ones
