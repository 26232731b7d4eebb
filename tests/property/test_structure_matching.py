"""Every way to a maximum matching gives one, and as large as the ones of reference libraries."""

from __future__ import annotations

import random
from collections.abc import Callable

import networkx as nx
import numpy as np
import pytest
from hypothesis import given
from scipy.sparse import csr_array
from scipy.sparse.csgraph import maximum_bipartite_matching
from structure_checker import check_matching, check_maximum_matching, covered, transpose
from structure_strategies import System, systems

from eqsheet.structure.analyse import analyse
from eqsheet.structure.hopcroft_karp import maximum_matching
from eqsheet.structure.karp_sipser import first_matching
from eqsheet.structure.transversal_basis import circuit, leave_out_latest

Matching = tuple[list[int], list[int]]


def from_nothing(rows: list[list[int]], columns: int) -> Matching:
    return maximum_matching(rows, [-1] * len(rows), [-1] * columns)


def from_forced_pairs(rows: list[list[int]], columns: int) -> Matching:
    return maximum_matching(rows, *first_matching(rows, transpose(rows, columns)))


def with_latest_left_out(rows: list[list[int]], columns: int) -> Matching:
    row_match, column_match = from_nothing(rows, columns)
    leave_out_latest(range(len(rows)), transpose(rows, columns), row_match, column_match)
    leave_out_latest(range(columns), rows, column_match, row_match)
    return row_match, column_match


ways = pytest.mark.parametrize("way", [from_nothing, from_forced_pairs, with_latest_left_out])


def distinct(system: System) -> System:
    rows, columns = system
    return [sorted(set(row)) for row in rows], columns


def size_by_scipy(rows: list[list[int]], columns: int) -> int:
    entries = [(i, c) for i, row in enumerate(rows) for c in row]
    if not entries:
        return 0
    matrix = csr_array((np.ones(len(entries)), tuple(zip(*entries))), shape=(len(rows), columns))
    return int((maximum_bipartite_matching(matrix, perm_type="column") >= 0).sum())


def size_by_networkx(rows: list[list[int]]) -> int:
    graph = nx.Graph()
    graph.add_nodes_from(("row", i) for i in range(len(rows)))
    graph.add_edges_from((("row", i), ("column", c)) for i, row in enumerate(rows) for c in row)
    top = [("row", i) for i in range(len(rows))]
    return len(nx.bipartite.hopcroft_karp_matching(graph, top)) // 2


@ways
@given(system=systems)
def test_matching_is_maximum(way: Callable[..., Matching], system: System) -> None:
    rows, columns = distinct(system)
    row_match, column_match = way(rows, columns)
    check_maximum_matching(rows, row_match, column_match)
    size = sum(column >= 0 for column in row_match)
    assert size == size_by_scipy(rows, columns)
    assert size == size_by_networkx(rows)


@ways
@pytest.mark.parametrize("entries", [2, 3, 4])
def test_matching_is_maximum_in_systems_of_thousands(way: Callable[..., Matching], entries: int) -> None:
    draw = random.Random(entries)
    rows = [sorted(draw.sample(range(2000), entries)) for _ in range(2000)]
    check_maximum_matching(rows, *way(rows, 2000))


@given(system=systems)
def test_first_matching_is_valid_and_cannot_be_extended_by_a_single_pair(system: System) -> None:
    rows, columns = distinct(system)
    row_match, column_match = first_matching(rows, transpose(rows, columns))
    check_matching(rows, row_match, column_match)
    for row, match in enumerate(row_match):
        assert match >= 0 or all(column_match[column] >= 0 for column in rows[row])


@given(system=systems)
def test_circuit_is_over_determined_and_any_one_row_less_is_not(system: System) -> None:
    rows, columns = distinct(system)
    structure = analyse(rows, columns)
    for left_out in structure.unmatched_rows:
        members = circuit(left_out, rows, structure.column_match)
        assert left_out in members
        assert len(covered(rows, members)) == len(members) - 1
        for row in members:
            rest = [other for other in members if other != row]
            assert len(covered(rows, rest)) == len(rest)
