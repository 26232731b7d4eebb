"""Arrays that look like tuples."""

import numpy as np
import pytest

from eqsheet.structure.analyse import analyse
from eqsheet.structure.analyse_sparse import analyse_sparse
from eqsheet.structure.array_sequence import LONG, ArraySequence, as_sequence


def test_items_are_plain_numbers() -> None:
    numbers = ArraySequence[int](np.arange(4, dtype=np.int32))
    assert [type(item) for item in numbers] == [int] * 4
    assert (type(numbers[-1]), numbers[-1]) == (int, 3)
    assert numbers[1:] == (1, 2, 3)
    assert [type(item) for item in numbers[1:]] == [int] * 3
    assert type(ArraySequence[float](np.ones(2))[0]) is float


def test_it_ends() -> None:
    with pytest.raises(IndexError):
        ArraySequence[int](np.arange(4))[4]


def test_equal_to_a_tuple_of_the_same_numbers_and_to_nothing_else() -> None:
    numbers = ArraySequence[int](np.arange(3))
    assert numbers == (0, 1, 2)
    assert numbers == ArraySequence[int](np.arange(3))
    assert hash(numbers) == hash((0, 1, 2))
    assert numbers != (0, 1)
    assert numbers != (0, 1, 3)
    assert numbers != [0, 1, 2]


def test_it_cannot_be_changed_and_is_an_array_again_at_once() -> None:
    numbers = ArraySequence[int](np.arange(3))
    back = np.asarray(numbers)
    assert back.tolist() == [0, 1, 2]
    with pytest.raises(ValueError, match="read-only"):
        back[0] = 7
    copied = np.array(numbers, dtype=float)
    copied[0] = 7.0
    assert numbers[0] == 0


def test_short_sequences_are_tuples() -> None:
    assert as_sequence(np.arange(LONG - 1)) == tuple(range(LONG - 1))
    assert isinstance(as_sequence(np.arange(LONG - 1)), tuple)
    assert isinstance(as_sequence(np.arange(LONG)), ArraySequence)


def test_a_large_verdict_is_the_same_as_from_lists() -> None:
    # A ring of more columns than are kept as tuples, and a chain that hangs on it.
    n = LONG + 50
    rows = [[i, (i + 1) % n] for i in range(n)] + [[n + i, n + i - 1] for i in range(n)]
    indptr = np.arange(0, 4 * n + 1, 2)
    sparse = analyse_sparse(indptr, np.array(rows).ravel(), 2 * n)
    plain = analyse(rows, 2 * n)
    assert sparse.blocks == plain.blocks
    assert isinstance(sparse.blocks[0].rows, ArraySequence)
    assert sparse.well == plain.well
    assert sparse.row_match[n:] == plain.row_match[n:]
    assert sparse.square
