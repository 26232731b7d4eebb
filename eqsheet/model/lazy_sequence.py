"""Immutable sequences whose items are made when asked for: what a large family has one of a member.

A tuple of a million objects costs hundreds of megabytes and seconds, of which a reader looks at a few. Such a
sequence knows how to make each item, and makes it anew each time.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Callable, Iterator, Sequence
from itertools import accumulate
from typing import Generic, TypeVar, overload

T = TypeVar("T")


class LazySequence(Sequence[T], Generic[T]):
    """Several parts one after the other, each a count and a function from positions in it to items.

    >>> squares = LazySequence([(2, ("a", "b").__getitem__), (1_000_000, lambda i: str(i * i))])
    >>> len(squares), squares[1], squares[5], squares[-1], squares[1:4]
    (1000002, 'b', '9', '999998000001', ('b', '0', '1'))
    """

    __slots__ = ("_ends", "_makers")

    def __init__(self, parts: Sequence[tuple[int, Callable[[int], T]]]) -> None:
        used = [part for part in parts if part[0]]
        self._ends = list(accumulate(count for count, _ in used))
        self._makers = [maker for _, maker in used]

    def __len__(self) -> int:
        return self._ends[-1] if self._ends else 0

    @overload
    def __getitem__(self, index: int) -> T: ...
    @overload
    def __getitem__(self, index: slice) -> tuple[T, ...]: ...
    def __getitem__(self, index: int | slice) -> T | tuple[T, ...]:
        if isinstance(index, slice):
            return tuple([self[i] for i in range(*index.indices(len(self)))])
        if index < 0:
            index += len(self)
        part = bisect_right(self._ends, index)
        if index < 0 or part == len(self._ends):
            raise IndexError("no such item")
        return self._makers[part](index - (self._ends[part - 1] if part else 0))

    def __iter__(self) -> Iterator[T]:
        start = 0
        for end, maker in zip(self._ends, self._makers):
            yield from map(maker, range(end - start))
            start = end

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, LazySequence | tuple):
            return NotImplemented
        return len(self) == len(other) and all(a == b for a, b in zip(self, other))

    def __hash__(self) -> int:
        return hash((len(self), self[0] if len(self) else None))

    def __repr__(self) -> str:
        shown = ", ".join(repr(item) for item in self[:3])
        return f"LazySequence({shown}{', ...' if len(self) > 3 else ''}; {len(self)} items)"
