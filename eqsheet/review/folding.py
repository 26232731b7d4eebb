"""Large families in a line: how the members of a table of results are put together.

Small families are shown member by member. Of a large one a reader wants the smallest and the largest value and where
they are, of a limit over it the worst member; the line stays where it is whatever the values are, so that a
difference between two runs is easy to read.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

from eqsheet.units.display import format_value
from eqsheet.worksheet.many_limits import WorstLimit, worst_of_each
from eqsheet.worksheet.many_values import ManyQuantities, ManyValues
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


def values_together(quantities: Mapping[str, QuantityValue]) -> Sequence[ManyValues]:
    """The values in order of showing, with the members of large families taken together: see `ManyQuantities`."""
    if isinstance(quantities, ManyQuantities):
        return quantities.together(MOST_MEMBERS)
    groups: dict[tuple[str, str, bool, str], list[QuantityValue]] = {}
    for value in quantities.values():
        section = "" if value.statement is None else value.statement.section
        groups.setdefault((section, family_name(value.name), value.known, value.unit), []).append(value)
    result: list[ManyValues] = []
    for group in groups.values():
        together = [group] if len(group) > MOST_MEMBERS else [[value] for value in group]
        result += [ManyValues.of(one) for one in together]
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


def extremes(group: ManyValues) -> Extremes:
    """Of a family with members of one dimension."""
    unit = group.first.unit
    smallest, largest = group.smallest, group.largest
    low = format_value(smallest.to(unit), smallest.digits)
    high = format_value(largest.to(unit), largest.digits)
    if low == high:
        return Extremes(low, f"all {group.count:,} members")
    words = f"{group.count:,} members, smallest {smallest.name}, largest {largest.name}"
    return Extremes(f"{low} .. {high}", words)


def worst_limits(limits: Iterable[LimitReport]) -> list[tuple[LimitReport, str]]:
    """The limits, of a large family the worst member alone with a count of the others in words."""
    groups: dict[int, list[WorstLimit]] = {}
    for one in worst_of_each(limits, MOST_MEMBERS):
        groups.setdefault(id(one.limit.statement), []).append(one)
    result: list[tuple[LimitReport, str]] = []
    for group in groups.values():
        count = sum(one.count for one in group)
        if count <= MOST_MEMBERS:
            result += [(one.limit, "") for one in group]
            continue
        failing = sum(one.failing for one in group)
        words = f"worst of {count:,}" + (f", of which {failing:,} fail" if failing > 1 else "")
        result.append((min((one.limit for one in group), key=_badness), words))
    return result


def _badness(limit: LimitReport) -> tuple[bool, float]:
    return limit.holds, limit.slack if limit.margin is None else limit.margin
