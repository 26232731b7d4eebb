"""Long sequences of numbers kept as the arrays they come from: no object a number until somebody looks at one."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any, TypeVar, overload

import numpy as np
from numpy.typing import NDArray

T = TypeVar("T", int, float)

# Shorter sequences are tuples: those are faster to look into.
LONG = 200


class ArraySequence(Sequence[T]):
    """The items of an array (n,) as plain numbers; equal to a tuple of the same numbers.

    The array is not to be changed afterwards, and cannot be through this. ``numpy.asarray`` gives it back.

    >>> numbers = ArraySequence(np.arange(5))
    >>> numbers[-1], numbers[1:3], numbers == (0, 1, 2, 3, 4), numbers
    (4, (1, 2), True, ArraySequence(0, 1, 2, ...; 5 items))
    """

    __slots__ = ("_array",)

    def __init__(self, array: NDArray[Any]) -> None:
        self._array = array.view()
        self._array.flags.writeable = False

    def __array__(self, dtype: Any = None, copy: bool | None = None) -> NDArray[Any]:
        return np.array(self._array, dtype=dtype, copy=copy)

    def __len__(self) -> int:
        return len(self._array)

    @overload
    def __getitem__(self, index: int) -> T: ...
    @overload
    def __getitem__(self, index: slice) -> tuple[T, ...]: ...
    def __getitem__(self, index: int | slice) -> T | tuple[T, ...]:
        if isinstance(index, slice):
            return tuple(self._array[index].tolist())
        item: T = self._array.item(index)
        return item

    def __iter__(self) -> Iterator[T]:
        return iter(self._array.tolist())

    def __eq__(self, other: object) -> bool:
        if isinstance(other, ArraySequence):
            return np.array_equal(self._array, other._array)
        if isinstance(other, tuple):
            return len(other) == len(self) and all(a == b for a, b in zip(self, other))
        return NotImplemented

    def __hash__(self) -> int:
        return hash(tuple(self))

    def __repr__(self) -> str:
        shown = ", ".join(repr(item) for item in self[:3])
        return f"ArraySequence({shown}{', ...' if len(self) > 3 else ''}; {len(self)} items)"


def as_sequence(array: NDArray[Any]) -> Sequence[Any]:
    """The items of an array (n,) as an immutable sequence of plain numbers."""
    return ArraySequence(array) if len(array) >= LONG else tuple(array.tolist())
