"""Edits of lines, and their history."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Edit:
    """Lines `old` from index `start` (from 0) on are replaced by lines `new`."""

    start: int
    old: tuple[str, ...]
    new: tuple[str, ...]

    def applied(self, lines: Sequence[str]) -> tuple[str, ...]:
        """The lines with this edit done.

        Raises
        ------
        ValueError
            If `old` does not stand there.

        >>> Edit(1, ("b",), ("x", "y")).applied(("a", "b", "c"))
        ('a', 'x', 'y', 'c')
        """
        end = self.start + len(self.old)
        if self.start < 0 or end > len(lines) or tuple(lines[self.start : end]) != self.old:
            raise ValueError(f"the lines from {self.start + 1} on are not those the edit replaces")
        return (*lines[: self.start], *self.new, *lines[end:])

    @property
    def undone(self) -> Edit:
        """The edit that takes this one back."""
        return Edit(self.start, self.new, self.old)


def between(old: Sequence[str], new: Sequence[str]) -> Edit:
    """The smallest single edit that makes `old` into `new`.

    >>> between(("a", "b", "c"), ("a", "x", "y", "c"))
    Edit(start=1, old=('b',), new=('x', 'y'))
    """
    shorter = min(len(old), len(new))
    head = 0
    while head < shorter and old[head] == new[head]:
        head += 1
    tail = 0
    while tail < shorter - head and old[-1 - tail] == new[-1 - tail]:
        tail += 1
    return Edit(head, tuple(old[head : len(old) - tail]), tuple(new[head : len(new) - tail]))


@dataclass(frozen=True, slots=True)
class History:
    """Edits done and edits taken back, newest last."""

    done: tuple[Edit, ...] = ()
    taken_back: tuple[Edit, ...] = ()

    def after(self, edit: Edit) -> History:
        """The history with one more edit; what had been taken back is forgotten."""
        return History((*self.done, edit))

    def back(self) -> tuple[Edit, History] | None:
        """The edit to do in order to undo, and the history then; None where there is nothing to undo."""
        if not self.done:
            return None
        last = self.done[-1]
        return last.undone, History(self.done[:-1], (*self.taken_back, last))

    def forth(self) -> tuple[Edit, History] | None:
        """The edit to do in order to redo, and the history then; None where there is nothing to redo."""
        if not self.taken_back:
            return None
        next_one = self.taken_back[-1]
        return next_one, History((*self.done, next_one), self.taken_back[:-1])
