"""Tearing of a block."""

from __future__ import annotations

import random

from hypothesis import given
from hypothesis import strategies as st

from eqsheet.structure.tearing import Tearing, tear


def test_one_tear_opens_a_ring() -> None:
    rows = [(0, 1), (1, 2), (2, 3), (0, 3)]
    assert tear(rows, [(1,), (2,), (3,), (0,)], [0, 1, 2, 3], 1) == Tearing(
        (0,), ((0, 1), (1, 2), (2, 3)), (3,)
    )


def test_column_that_frees_the_most_is_torn() -> None:
    # All rows hold column 2; each could give its other column.
    rows = [(0, 2), (1, 2), (2, 3), (0, 1, 3)]
    assert tear(rows, [(0,), (1,), (3,), (3,)], [0, 1, 2, 3], 1) == Tearing(
        (2,), ((0, 0), (1, 1), (2, 3)), (3,)
    )


def test_on_a_tie_the_preferred_column_is_torn() -> None:
    rows, gives = [(0, 1), (0, 1)], [(0, 1), (0, 1)]
    preferred_last = tear(rows, gives, [1, 0], 1)
    assert preferred_last is not None
    assert preferred_last.tears == (1,)


def test_row_that_gives_its_best_column_goes_first() -> None:
    # Both rows could give column 1 once column 0 is there; row 1 would rather give it.
    torn = tear([(0, 1), (0, 1)], [(0, 1), (1, 0)], [0, 1], 1)
    assert torn == Tearing((0,), ((1, 1),), (0,))


def test_column_no_row_can_give_is_torn_itself() -> None:
    assert tear([(0, 1), (0, 1)], [(), ()], [0, 1], 2) == Tearing((0, 1), (), (0, 1))


def test_more_tears_than_allowed_is_no_tearing() -> None:
    assert tear([(0, 1), (0, 1)], [(), ()], [0, 1], 1) is None


@given(size=st.integers(1, 12), draw=st.randoms(use_true_random=False))
def test_every_step_uses_what_is_there_and_in_the_end_all_is_found(size: int, draw: random.Random) -> None:
    rows = [draw.sample(range(size), draw.randint(1, min(4, size))) for _ in range(size)]
    gives = [draw.sample(row, draw.randint(0, len(row))) for row in rows]
    torn = tear(rows, gives, range(size), size)
    assert torn is not None
    found = set(torn.tears)
    for row, column in torn.steps:
        assert column in gives[row]
        assert column not in found
        assert set(rows[row]) <= found | {column}
        found.add(column)
    assert found == set(range(size))
    assert sorted([*torn.rest, *(row for row, _ in torn.steps)]) == list(range(size))
    assert len(torn.rest) == len(torn.tears)
