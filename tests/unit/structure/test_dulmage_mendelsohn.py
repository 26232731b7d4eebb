"""Coarse parts and their connected pieces."""

from __future__ import annotations

from eqsheet.structure.dulmage_mendelsohn import coarse_parts, connected_pieces, reached
from eqsheet.structure.verdict import Part


def test_rows_are_reached_by_alternating_paths_only() -> None:
    # Row 2 is unmatched; it holds column 1 of row 1, which holds column 0 of row 0. Row 3 only uses column 0.
    rows = [[0], [0, 1], [1], [0, 2]]
    assert reached([2], rows, [0, 1, 3]) == {0, 1, 2}


def test_parts_take_the_partners_along() -> None:
    parts = coarse_parts({0, 1}, {1, 2}, [0, -1, 1, 3], [0, 2, -1, 3])
    assert parts == (Part((0, 1), (0,)), Part((2,), (1, 2)), Part((3,), (3,)))


def test_pieces_that_share_nothing_are_apart() -> None:
    assert connected_pieces([0, 1, 2, 3], [7, 8], {0: [8], 1: [7], 2: [7, 9], 3: [9]}) == [
        ((0,), (8,)),
        ((1, 2), (7,)),
        ((3,), ()),
    ]
