"""Parts of a solution put together when somebody first looks at them."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from functools import cached_property
from typing import TypeVar, overload

K = TypeVar("K")
V = TypeVar("V")
T = TypeVar("T", covariant=True)


class DeferredMapping(Mapping[K, V]):
    """A mapping that is made once, at the first look.

    Parameters
    ----------
    make : callable
        Without arguments, to the mapping.

    >>> squares = DeferredMapping(lambda: {2: 4, 3: 9})
    >>> squares[3], len(squares)
    (9, 2)
    """

    def __init__(self, make: Callable[[], Mapping[K, V]]) -> None:
        self._make = make

    @cached_property
    def _made(self) -> Mapping[K, V]:
        return self._make()

    def __getitem__(self, key: K) -> V:
        return self._made[key]

    def __iter__(self) -> Iterator[K]:
        return iter(self._made)

    def __len__(self) -> int:
        return len(self._made)

    def __repr__(self) -> str:
        return repr(dict(self._made))


class DeferredSequence(Sequence[T]):
    """A sequence that is made once, at the first look.

    Parameters
    ----------
    make : callable
        Without arguments, to the items.

    >>> letters = DeferredSequence(lambda: "ab")
    >>> letters[-1], len(letters), letters == ("a", "b")
    ('b', 2, True)
    """

    def __init__(self, make: Callable[[], Sequence[T]]) -> None:
        self._make = make

    @cached_property
    def _made(self) -> tuple[T, ...]:
        return tuple(self._make())

    @overload
    def __getitem__(self, index: int) -> T: ...
    @overload
    def __getitem__(self, index: slice) -> tuple[T, ...]: ...
    def __getitem__(self, index: int | slice) -> T | tuple[T, ...]:
        return self._made[index]

    def __len__(self) -> int:
        return len(self._made)

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, DeferredSequence | tuple):
            return NotImplemented
        return self._made == tuple(other)

    def __hash__(self) -> int:
        return hash(self._made)

    def __repr__(self) -> str:
        return repr(self._made)
