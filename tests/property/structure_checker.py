"""What makes a structural verdict right, from the definitions; every implementation goes through it."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

import networkx as nx

from eqsheet.structure.verdict import Structure

Rows = Sequence[Sequence[int]]


def check_matching(rows: Rows, row_match: Sequence[int], column_match: Sequence[int]) -> None:
    """Partners are mutual, and each pair is an entry of the system."""
    assert len(row_match) == len(rows)
    for row, column in enumerate(row_match):
        if column >= 0:
            assert column in rows[row]
            assert column_match[column] == row
    for column, row in enumerate(column_match):
        if row >= 0:
            assert row_match[row] == column


def check_maximum_matching(rows: Rows, row_match: Sequence[int], column_match: Sequence[int]) -> None:
    """The matching is valid, and a set of rows and columns of its size covers every entry (König's theorem).

    No matching can be larger than such a cover: each of its pairs needs a covering row or column of its own.
    """
    check_matching(rows, row_match, column_match)
    seen_rows = {row for row, column in enumerate(row_match) if column < 0}
    seen_columns: set[int] = set()
    pending = list(seen_rows)
    while pending:
        for column in rows[pending.pop()]:
            seen_columns.add(column)
            partner = column_match[column]
            if partner >= 0 and partner not in seen_rows:
                seen_rows.add(partner)
                pending.append(partner)
    covering_rows = set(range(len(rows))) - seen_rows
    assert all(
        row in covering_rows or column in seen_columns for row in range(len(rows)) for column in rows[row]
    )
    assert len(covering_rows) + len(seen_columns) == sum(column >= 0 for column in row_match)


def check_structure(rows: Rows, columns: int, structure: Structure) -> None:
    """All properties that can be checked in about linear time."""
    check_maximum_matching(rows, structure.row_match, structure.column_match)
    assert len(structure.column_match) == columns
    check_parts(rows, columns, structure)
    check_blocks(rows, structure)
    check_order(structure)
    check_troubles(rows, columns, structure)


def check_parts(rows: Rows, columns: int, structure: Structure) -> None:
    """The parts share out all rows and columns, have the right shapes, and are closed as they must be."""
    over, under, well = structure.over, structure.under, structure.well
    assert sorted(over.rows + under.rows + well.rows) == list(range(len(rows)))
    assert sorted(over.columns + under.columns + well.columns) == list(range(columns))
    for part in (over, under, well):
        assert list(part.rows) == sorted(part.rows)
        assert list(part.columns) == sorted(part.columns)
    assert len(over.rows) > len(over.columns) or not over.rows
    assert len(under.rows) < len(under.columns) or not under.columns
    assert len(well.rows) == len(well.columns)
    for part in (over, under, well):
        inside = set(part.columns)
        assert all(structure.row_match[row] in inside or structure.row_match[row] == -1 for row in part.rows)
    assert structure.unmatched_rows == tuple(r for r, c in enumerate(structure.row_match) if c < 0)
    assert structure.unmatched_columns == tuple(c for c, r in enumerate(structure.column_match) if r < 0)
    assert set(structure.unmatched_rows) <= set(over.rows)
    assert set(structure.unmatched_columns) <= set(under.columns)
    assert structure.square == (not over.rows and not under.columns)
    over_columns, not_under = set(over.columns), set(over.columns) | set(well.columns)
    assert all(column in over_columns for row in over.rows for column in rows[row])
    assert all(column in not_under for row in well.rows for column in rows[row])


def check_blocks(rows: Rows, structure: Structure) -> None:
    """Blocks share out what can be solved, are square, irreducible, and need earlier blocks only."""
    solvable = sorted(structure.over.columns + structure.well.columns)
    assert sorted(c for block in structure.blocks for c in block.columns) == solvable
    home = {column: i for i, block in enumerate(structure.blocks) for column in block.columns}
    over_columns = set(structure.over.columns)
    graph = nx.DiGraph()
    graph.add_nodes_from(solvable)
    for i, block in enumerate(structure.blocks):
        assert list(block.columns) == sorted(block.columns)
        assert list(block.rows) == sorted(structure.column_match[column] for column in block.columns)
        assert {column in over_columns for column in block.columns} == {block.part == "over"}
        used = {home[column] for row in block.rows for column in rows[row]} - {i}
        assert block.depends == tuple(sorted(used))
        assert all(needed < i for needed in block.depends)
        for row in block.rows:
            graph.add_edges_from((structure.row_match[row], column) for column in rows[row])
    expected = {frozenset(component) for component in nx.strongly_connected_components(graph)}
    assert {frozenset(block.columns) for block in structure.blocks} == expected


def check_order(structure: Structure) -> None:
    """Whatever was solved while a block was ready and waiting has a smaller first column."""
    first = [block.columns[0] for block in structure.blocks]
    for i, block in enumerate(structure.blocks):
        ready = max(block.depends, default=-1) + 1
        assert all(first[earlier] < first[i] for earlier in range(ready, i))


def check_troubles(rows: Rows, columns: int, structure: Structure) -> None:
    """Conflicts and shortfalls are the connected pieces of their parts, with the right counts."""
    over_pieces = _pieces(rows, structure.over.rows, structure.over.columns)
    assert {(c.rows, c.columns) for c in structure.conflicts} == over_pieces
    assert len(structure.conflicts) == len(over_pieces)
    for conflict in structure.conflicts:
        assert conflict.excess == len(conflict.rows) - len(conflict.columns) >= 1
        assert conflict.left_out == tuple(r for r in conflict.rows if structure.row_match[r] < 0)
        assert len(conflict.left_out) == conflict.excess
    assert [c.rows for c in structure.conflicts] == sorted(c.rows for c in structure.conflicts)

    under_pieces = _pieces(rows, structure.under.rows, structure.under.columns)
    assert {(s.rows, s.columns) for s in structure.shortfalls} == under_pieces
    assert len(structure.shortfalls) == len(under_pieces)
    for shortfall in structure.shortfalls:
        assert shortfall.missing == len(shortfall.columns) - len(shortfall.rows) >= 1
        assert shortfall.free == tuple(c for c in shortfall.columns if structure.column_match[c] < 0)
        assert len(shortfall.free) == shortfall.missing
    assert [s.columns for s in structure.shortfalls] == sorted(s.columns for s in structure.shortfalls)


def _pieces(
    rows: Rows, part_rows: Sequence[int], part_columns: Sequence[int]
) -> set[tuple[tuple[int, ...], tuple[int, ...]]]:
    graph = nx.Graph()
    graph.add_nodes_from(("row", row) for row in part_rows)
    graph.add_nodes_from(("column", column) for column in part_columns)
    inside = set(part_columns)
    graph.add_edges_from((("row", row), ("column", c)) for row in part_rows for c in rows[row] if c in inside)
    return {
        (
            tuple(sorted(number for side, number in piece if side == "row")),
            tuple(sorted(number for side, number in piece if side == "column")),
        )
        for piece in nx.connected_components(graph)
    }


def check_by_definition(rows: Rows, columns: int, structure: Structure) -> None:
    """The defining properties of parts and left-out rows, by trying each one; for small systems."""
    everything = range(len(rows))
    rank = len(covered(rows, everything))
    # A row is over-determined if some largest matching does without it, so that leaving it out costs nothing.
    assert structure.over.rows == tuple(
        row for row in everything if len(covered(rows, [r for r in everything if r != row])) == rank
    )
    by_column = transpose(rows, columns)
    assert structure.under.columns == tuple(
        column
        for column in range(columns)
        if len(covered(by_column, [c for c in range(columns) if c != column])) == rank
    )
    # Rows taken in order stay covered, so those that cannot be added are the latest that can be left out.
    assert set(structure.unmatched_rows) == set(everything) - covered(rows, everything)
    assert set(structure.unmatched_columns) == set(range(columns)) - covered(by_column, range(columns))


def covered(rows: Rows, chosen: Iterable[int]) -> set[int]:
    """Those of `chosen` that can be matched, each in turn in addition to those before it."""
    partner: dict[int, int] = {}

    def augment(row: int, seen: set[int]) -> bool:
        for column in rows[row]:
            if column not in seen:
                seen.add(column)
                if column not in partner or augment(partner[column], seen):
                    partner[column] = row
                    return True
        return False

    return {row for row in chosen if augment(row, set())}


def transpose(rows: Rows, columns: int) -> list[list[int]]:
    """Rows of each column, without duplicates."""
    by_column: list[list[int]] = [[] for _ in range(columns)]
    for number, row in enumerate(rows):
        for column in sorted(set(row)):
            by_column[column].append(number)
    return by_column
