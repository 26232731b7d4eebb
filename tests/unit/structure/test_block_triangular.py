"""Blocks and their order."""

from __future__ import annotations

from eqsheet.structure.block_triangular import ordered_blocks, topological_order


def test_blocks_do_not_depend_on_the_partners_inside_them() -> None:
    rows = [[0, 1], [0, 1], [1, 2]]
    one = ordered_blocks([0, 1, 2], rows, [0, 1, 2], set())
    other = ordered_blocks([0, 1, 2], rows, [1, 0, 2], set())
    assert one == other
    assert [block.rows for block in one] == [(0, 1), (2,)]


def test_columns_that_are_not_asked_for_get_no_block() -> None:
    blocks = ordered_blocks([0], [[0], [1, 2]], [0, 1, -1], set())
    assert [block.columns for block in blocks] == [(0,)]


def test_blocks_know_their_part() -> None:
    blocks = ordered_blocks([0, 1], [[0], [0, 1]], [0, 1], {0})
    assert [block.part for block in blocks] == ["over", "well"]


def test_smallest_key_goes_first_unless_it_must_wait() -> None:
    assert topological_order([0, 1, 2, 3], [[2], [], [], [1]]) == [1, 2, 0, 3]
