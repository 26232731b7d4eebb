"""Exit statuses, the same for every command."""

from __future__ import annotations

from collections.abc import Iterable

SOLVED = 0
OUTSIDE_LIMITS = 1
WRONG_USAGE = 2
INVALID = 3
UNSOLVED = 4
UNREADABLE = 66
OWN_MISTAKE = 70
UNWRITABLE = 73
INTERRUPTED = 130

OF_SOLUTION = {
    "solved": SOLVED,
    "outside-limits": OUTSIDE_LIMITS,
    "invalid": INVALID,
    "unsolved": UNSOLVED,
}

# Of several files the status that asks most urgently for work wins: an invalid worksheet before an unsolved one.
_RANK = (SOLVED, OUTSIDE_LIMITS, UNSOLVED, INVALID, UNREADABLE, UNWRITABLE)


def worst(statuses: Iterable[int]) -> int:
    """The status of several files.

    >>> worst([SOLVED, INVALID, UNSOLVED])
    3
    """
    return max(statuses, key=_RANK.index, default=SOLVED)
