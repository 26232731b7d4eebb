"""Strongly connected components of a directed graph by Tarjan's method, without recursion."""

from __future__ import annotations

from collections.abc import Iterable, Sequence


def strong_components(nodes: Iterable[int], successors: Sequence[Sequence[int]]) -> list[list[int]]:
    """Strongly connected components, each after all components it has an edge to.

    Parameters
    ----------
    nodes : iterable of int
        Nodes to start from; with a node all nodes that can be reached from it are found.
    successors : sequence of sequences of int
        Ends of the edges out of each node.

    References
    ----------
    R. Tarjan: Depth-first search and linear graph algorithms. SIAM Journal on Computing 1(2) (1972), 146-160.

    >>> strong_components([0, 1, 2], [[1], [0, 2], []])
    [[2], [1, 0]]
    """
    beyond = len(successors) + 1
    number = [0] * len(successors)  # in order of first visit, from 1; `beyond` once its component is complete
    low = [0] * len(successors)  # smallest number known to be reachable through at most one edge back
    counter = 0
    open_nodes: list[int] = []
    components = []
    for root in nodes:
        if number[root]:
            continue
        counter += 1
        number[root] = low[root] = counter
        open_nodes.append(root)
        path = [(root, iter(successors[root]))]
        while path:
            node, edges = path[-1]
            for end in edges:
                if not number[end]:
                    counter += 1
                    number[end] = low[end] = counter
                    open_nodes.append(end)
                    path.append((end, iter(successors[end])))
                    break
                if number[end] < low[node]:
                    low[node] = number[end]
            else:
                path.pop()
                if low[node] < number[node]:
                    parent = path[-1][0]
                    if low[node] < low[parent]:
                        low[parent] = low[node]
                    continue
                component = []
                while True:
                    member = open_nodes.pop()
                    number[member] = beyond
                    component.append(member)
                    if member == node:
                        break
                components.append(component)
    return components
