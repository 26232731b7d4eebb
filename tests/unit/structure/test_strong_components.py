"""Strongly connected components."""

from __future__ import annotations

from eqsheet.structure.strong_components import strong_components


def test_two_cycles_joined_one_way_are_two_components() -> None:
    components = strong_components(range(4), [[1], [0, 2], [3], [2]])
    assert [sorted(component) for component in components] == [[2, 3], [0, 1]]


def test_edge_to_itself_makes_no_larger_component() -> None:
    assert strong_components([0, 1], [[0, 1], [1]]) == [[1], [0]]


def test_edge_into_a_finished_component_does_not_join_it() -> None:
    # 0 leads to 1 and 2, 2 leads to 1: all apart.
    assert strong_components([0], [[1, 2], [], [1]]) == [[1], [2], [0]]


def test_only_what_the_starts_lead_to_is_found() -> None:
    assert strong_components([1], [[1], [], [0]]) == [[1]]


def test_long_path_and_long_cycle_need_no_recursion() -> None:
    size = 50_000
    path = [[i + 1] for i in range(size - 1)]
    assert len(strong_components(range(size), [*path, []])) == size
    assert len(strong_components(range(size), [*path, [0]])) == 1
