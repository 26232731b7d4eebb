"""Large families in a line: how the members of a table of results are put together.

Small families are shown member by member. Of a large one a reader wants the smallest and the largest value and where
they are, of a limit over it the worst member; the line stays where it is whatever the values are, so that a
difference between two runs is easy to read.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from eqsheet.units.display import format_value
from eqsheet.worksheet.solution import LimitReport, QuantityValue

# A family of more members is folded.
MOST_MEMBERS = 12
_SUBSCRIPTS = re.compile(r'\[(?:"[^"]*"|[^\]"])*\]')


def family_name(name: str) -> str:
    """The name without its subscripts: ``p.dP`` of ``p[P12].dP``.

    >>> family_name('x[3, "NH4+"]')
    'x'
    """
    return _SUBSCRIPTS.sub("", name)


def families(values: Iterable[QuantityValue]) -> list[list[QuantityValue]]:
    """The values with the members of large families together; every other value in a list of its own.

    Known members and solved ones of a family are kept apart. A family stands where its first member does.
    """
    groups: dict[tuple[str, bool], list[QuantityValue]] = {}
    for value in values:
        groups.setdefault((family_name(value.name), value.known), []).append(value)
    result: list[list[QuantityValue]] = []
    for group in groups.values():
        result += [group] if len(group) > MOST_MEMBERS else [[value] for value in group]
    return result


@dataclass(frozen=True, slots=True)
class Extremes:
    """Smallest and largest member of a family.

    Attributes
    ----------
    text : str
        ``20.1 .. 78.2``, or one value where all are alike; in the unit of the first member.
    words : str
        Which members they are.
    """

    text: str
    words: str


def extremes(group: Sequence[QuantityValue]) -> Extremes:
    """Of a family with members of one dimension; ties go to the first member."""
    unit = group[0].unit
    smallest = min(group, key=lambda value: value.si)
    largest = max(group, key=lambda value: value.si)
    low = format_value(smallest.to(unit), smallest.digits)
    high = format_value(largest.to(unit), largest.digits)
    if low == high:
        return Extremes(low, f"all {len(group):,} members")
    words = f"{len(group):,} members, smallest {smallest.name}, largest {largest.name}"
    return Extremes(f"{low} .. {high}", words)


def worst_limits(limits: Iterable[LimitReport]) -> list[tuple[LimitReport, str]]:
    """The limits, of a large family the worst member alone with a count of the others in words."""
    groups: dict[int, list[LimitReport]] = {}
    for limit in limits:
        groups.setdefault(id(limit.statement), []).append(limit)
    result: list[tuple[LimitReport, str]] = []
    for group in groups.values():
        if len(group) <= MOST_MEMBERS:
            result += [(limit, "") for limit in group]
            continue
        failing = sum(not limit.holds for limit in group)
        words = f"worst of {len(group):,}" + (f", of which {failing:,} fail" if failing > 1 else "")
        result.append((min(group, key=_badness), words))
    return result


def _badness(limit: LimitReport) -> tuple[bool, float]:
    return limit.holds, limit.slack if limit.margin is None else limit.margin
