"""Block-triangular order: the irreducible blocks of a matched system, each after the blocks it needs.

References
----------
A. Pothen, C.-J. Fan: Computing the block triangular form of a sparse matrix. ACM Transactions on Mathematical
Software 16(4) (1990), 303-324 (the fine decomposition).
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Sequence
from heapq import heappop, heappush

from eqsheet.structure.strong_components import strong_components
from eqsheet.structure.verdict import Block


def ordered_blocks(
    columns: Sequence[int],
    rows: Sequence[Sequence[int]],
    column_match: Sequence[int],
    over_columns: Collection[int],
) -> tuple[Block, ...]:
    """Blocks for `columns` in order of solution.

    Parameters
    ----------
    columns : sequence of int
        Columns to be solved for, ascending: all matched, to rows that have none but these columns.
    rows : sequence of sequences of int
        Columns of each row.
    column_match : sequence of int
        Row matched to each column, -1 for none.
    over_columns : collection of int
        Those of the over-determined part; tested by ``in``.

    Notes
    -----
    A column needs the other columns of its row; the strongly connected components of that graph are the
    blocks, whichever maximum matching is used.
    """
    needs = [rows[row] if row >= 0 else () for row in column_match]
    components = strong_components(columns, needs)
    number = [-1] * len(column_match)
    for i, component in enumerate(components):
        for column in component:
            number[column] = i
    depends = []
    for i, component in enumerate(components):
        if len(component) == 1:
            needed = {number[c] for c in needs[component[0]]}
        else:
            component.sort()
            needed = {number[c] for column in component for c in needs[column]}
        needed.discard(i)
        depends.append(needed)
    order = topological_order([component[0] for component in components], depends)
    place = [0] * len(order)
    for i, component_number in enumerate(order):
        place[component_number] = i
    blocks = []
    for component_number in order:
        component = components[component_number]
        needed = depends[component_number]
        blocks.append(
            Block(
                (column_match[component[0]],)
                if len(component) == 1
                else tuple(sorted([column_match[column] for column in component])),
                tuple(component),
                tuple(sorted([place[j] for j in needed])) if needed else (),
                "over" if component[0] in over_columns else "well",
            )
        )
    return tuple(blocks)


def topological_order(keys: Sequence[int], depends: Sequence[Iterable[int]]) -> list[int]:
    """Node numbers, each after those it depends on; of those that could come next, the smallest key first.

    Parameters
    ----------
    keys : sequence of int
        A different key for each node.
    depends : sequence of iterables of int
        Nodes each node depends on, without duplicates; free of cycles.

    References
    ----------
    A. B. Kahn: Topological sorting of large networks. Communications of the ACM 5(11) (1962), 558-562.

    >>> topological_order([7, 5, 3], [[], [], [0]])
    [1, 0, 2]
    """
    dependents: list[list[int]] = [[] for _ in keys]
    waiting_for = [0] * len(keys)
    for node, needed in enumerate(depends):
        for other in needed:
            dependents[other].append(node)
            waiting_for[node] += 1
    ready: list[tuple[int, int]] = []
    for node, count in enumerate(waiting_for):
        if not count:
            heappush(ready, (keys[node], node))
    order = []
    while ready:
        node = heappop(ready)[1]
        order.append(node)
        for dependent in dependents[node]:
            waiting_for[dependent] -= 1
            if not waiting_for[dependent]:
                heappush(ready, (keys[dependent], dependent))
    return order
