"""The verdict on small systems whose answer is plain by hand. Letters in comments: rows as equations."""

from __future__ import annotations

import subprocess
import sys

import pytest

from eqsheet.structure.analyse import analyse
from eqsheet.structure.verdict import Block, Conflict, Part, Shortfall


def test_one_line_after_another_gives_a_block_a_line() -> None:
    # c = f(a, b); a = 1; b = f(a)
    structure = analyse([[0, 1, 2], [0], [0, 1]], 3)
    assert structure.blocks == (
        Block((1,), (0,), (), "well"),
        Block((2,), (1,), (0,), "well"),
        Block((0,), (2,), (0, 1), "well"),
    )
    assert structure.square
    assert structure.row_match == (2, 0, 1)


def test_coupled_lines_form_one_block_between_those_before_and_after() -> None:
    structure = analyse([[0], [0, 1, 2], [1, 2], [2, 3]], 4)
    assert [(block.rows, block.columns, block.depends) for block in structure.blocks] == [
        ((0,), (0,), ()),
        ((1, 2), (1, 2), (0,)),
        ((3,), (3,), (1,)),
    ]


def test_of_blocks_that_could_come_next_the_smallest_column_does() -> None:
    # Column 0 waits for 3; 1 and 2 are ready at once.
    structure = analyse([[0, 3], [1], [2], [3]], 4)
    assert [block.columns for block in structure.blocks] == [(1,), (2,), (3,), (0,)]


def test_quantity_set_twice_is_a_conflict_of_the_two_rows() -> None:
    structure = analyse([[0], [0], [0, 1]], 2)
    assert structure.conflicts == (Conflict((0, 1), (0,), 1, (1,)),)
    assert structure.unmatched_rows == (1,)
    assert [(block.columns, block.part) for block in structure.blocks] == [((0,), "over"), ((1,), "well")]


def test_independent_conflicts_are_reported_one_by_one() -> None:
    structure = analyse([[0], [1], [1], [0], [0]], 2)
    assert structure.conflicts == (
        Conflict((0, 3, 4), (0,), 2, (3, 4)),
        Conflict((1, 2), (1,), 1, (2,)),
    )


def test_conflict_through_a_chain_names_the_whole_chain() -> None:
    # a = 1; b = f(a); c = f(b); c = 4
    structure = analyse([[0], [0, 1], [1, 2], [2]], 3)
    assert structure.conflicts == (Conflict((0, 1, 2, 3), (0, 1, 2), 1, (3,)),)
    assert [block.columns for block in structure.blocks] == [(0,), (1,), (2,)]


def test_row_without_columns_is_a_conflict_of_its_own() -> None:
    structure = analyse([[], [0]], 1)
    assert structure.conflicts == (Conflict((0,), (), 1, (0,)),)
    assert structure.well == Part((1,), (0,))


def test_missing_row_leaves_the_columns_it_would_settle_free() -> None:
    # a + b = 3 is short of one; c = 1 is settled all the same
    structure = analyse([[0, 1], [2]], 3)
    assert structure.shortfalls == (Shortfall((0,), (0, 1), 1, (1,)),)
    assert structure.under == Part((0,), (0, 1))
    assert [block.columns for block in structure.blocks] == [(2,)]


def test_column_without_rows_is_a_shortfall_of_its_own() -> None:
    structure = analyse([[1]], 2)
    assert structure.shortfalls == (Shortfall((), (0,), 1, (0,)),)


def test_settled_columns_do_not_join_independent_shortfalls() -> None:
    # Both short pairs use column 0, which is settled.
    structure = analyse([[0], [0, 1, 2], [0, 3, 4]], 5)
    assert structure.shortfalls == (
        Shortfall((1,), (1, 2), 1, (2,)),
        Shortfall((2,), (3, 4), 1, (4,)),
    )


def test_square_but_singular_system_has_both_troubles() -> None:
    # Two rows fight over column 0 while columns 1 and 2 share one row.
    structure = analyse([[0], [0], [1, 2]], 3)
    assert not structure.square
    assert structure.conflicts == (Conflict((0, 1), (0,), 1, (1,)),)
    assert structure.shortfalls == (Shortfall((2,), (1, 2), 1, (2,)),)
    assert structure.well == Part((), ())


@pytest.mark.parametrize("rows", [[[0, 2]], [[-1, 0]], [[-1]], [[7]]])
def test_column_out_of_range_is_refused(rows: list[list[int]]) -> None:
    with pytest.raises(ValueError, match="row 0"):
        analyse(rows, 2)


def test_input_is_left_as_it_was() -> None:
    rows = [[2, 0, 0], [1, 0], [2]]
    analyse(rows, 3)
    assert rows == [[2, 0, 0], [1, 0], [2]]


def test_neither_numpy_nor_scipy_is_imported() -> None:
    code = (
        "import sys; from eqsheet.structure.analyse import analyse; analyse([[0], [0]], 2);"
        "print(sorted({name.partition('.')[0] for name in sys.modules} & {'numpy', 'scipy', 'networkx'}))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
