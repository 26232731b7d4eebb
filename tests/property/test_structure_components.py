"""Strong components and topological orders agree with a reference library."""

from __future__ import annotations

import networkx as nx
from hypothesis import given
from hypothesis import strategies as st

from eqsheet.structure.block_triangular import topological_order
from eqsheet.structure.strong_components import strong_components


@st.composite
def directed_graphs(draw: st.DrawFn) -> list[list[int]]:
    size = draw(st.integers(1, 12))
    return draw(
        st.lists(st.lists(st.integers(0, size - 1), max_size=3), min_size=size, max_size=size), label="edges"
    )


@given(directed_graphs())
def test_strong_components_equal_those_of_networkx(successors: list[list[int]]) -> None:
    graph = nx.DiGraph()
    graph.add_nodes_from(range(len(successors)))
    graph.add_edges_from((node, end) for node, ends in enumerate(successors) for end in ends)
    components = strong_components(range(len(successors)), successors)
    expected = {frozenset(component) for component in nx.strongly_connected_components(graph)}
    assert {frozenset(component) for component in components} == expected
    assert len(components) == len(expected)


@given(directed_graphs())
def test_strong_components_come_after_those_they_lead_to(successors: list[list[int]]) -> None:
    components = strong_components(range(len(successors)), successors)
    place = {node: i for i, component in enumerate(components) for node in component}
    assert all(place[end] <= place[node] for node, ends in enumerate(successors) for end in ends)


@given(directed_graphs(), st.data())
def test_topological_order_is_the_lexicographic_one(edges: list[list[int]], data: st.DataObject) -> None:
    depends = [{end for end in ends if end < node} for node, ends in enumerate(edges)]
    keys = data.draw(st.permutations(range(len(edges))))
    graph = nx.DiGraph()
    graph.add_nodes_from(range(len(edges)))
    graph.add_edges_from((other, node) for node, needed in enumerate(depends) for other in needed)
    expected = list(nx.lexicographical_topological_sort(graph, key=lambda node: keys[node]))
    assert topological_order(keys, depends) == expected
