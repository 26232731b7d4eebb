"""Members of families that a statement given for one run sets, and that no line of the worksheet mentions."""

from __future__ import annotations

from collections.abc import Collection, Iterator

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.model.families import Family, Numbering
from eqsheet.model.gather import Gathered
from eqsheet.model.indexing import Indexing


def unmentioned_members(
    gathered: Gathered, numbering: Numbering, indexing: Indexing, columns: Collection[str]
) -> Iterator[Diagnostic]:
    """An error for each: it would add a quantity that nothing depends on, where a slip is likely.

    Parameters
    ----------
    columns : collection of str
        Names of the columns of tables, which mention all their members.
    """
    statements = gathered.statements
    for item in gathered.equations:
        statement = statements[item.place.statement]
        if item.known < 0 or statement.source.numbered:
            continue
        family = next(
            (f for f in numbering.families.values() if f.sets and 0 <= item.known - f.first < f.size), None
        )
        if (
            family is None
            or family.size < 2
            or family.path[0][0] in columns
            or _is_mentioned(gathered, item.known)
        ):
            continue
        name = family.name(item.known - family.first, indexing)
        first, last = _other_ends(family, item.known - family.first)
        yield error(
            "no-such-member",
            f"there is no `{name}`",
            Label(statement.span(item.place.start, item.place.end)),
            notes=(
                f"the members run from `{family.name(first, indexing)}` to `{family.name(last, indexing)}`",
            ),
            help="set a member that the worksheet has",
        )


def _is_mentioned(gathered: Gathered, quantity: int) -> bool:
    """Whether a line of the worksheet itself has the quantity."""
    own = (i for i in gathered.equations if gathered.statements[i.place.statement].source.numbered)
    if any(quantity in item.formula.quantities for item in own):
        return True
    groups = gathered.grouping.equations if gathered.grouping is not None else []
    return any(bool((group.bound.numbers == quantity).any()) for group in groups)


def _other_ends(family: Family, member: int) -> tuple[int, int]:
    """First and last of the other members."""
    return int(member == 0), family.size - 1 - (member == family.size - 1)
