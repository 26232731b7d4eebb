"""Maximum bipartite matching by Hopcroft and Karp's method of shortest augmenting paths."""

from __future__ import annotations

from collections.abc import Sequence


def maximum_matching(
    rows: Sequence[Sequence[int]], row_match: Sequence[int], column_match: Sequence[int]
) -> tuple[list[int], list[int]]:
    """Maximum matching reached from a given matching.

    Parameters
    ----------
    rows : sequence of sequences of int
        Columns of each row.
    row_match, column_match : sequence of int
        A valid matching to start from: partner of each row and of each column, -1 for none.

    Returns
    -------
    row_match, column_match : list of int
        A matching of greatest size. What was matched stays matched, though maybe to another partner.

    Notes
    -----
    Each phase finds the distance of every row from the unmatched rows along alternating paths (breadth
    first), then augments along a maximal set of disjoint shortest paths (depth first, without recursion).
    There are O(sqrt(n)) phases.

    References
    ----------
    J. E. Hopcroft, R. M. Karp: An n^(5/2) algorithm for maximum matchings in bipartite graphs. SIAM Journal
    on Computing 2(4) (1973), 225-231.

    >>> maximum_matching([[0, 1], [0]], [0, -1], [0, -1])
    ([1, 0], [1, 0])
    """
    row_match = list(row_match)
    column_match = list(column_match)
    if -1 not in row_match or -1 not in column_match:
        return row_match, column_match
    while True:
        unmatched = [r for r, column in enumerate(row_match) if column < 0 and rows[r]]
        level = _levels(rows, column_match, unmatched)
        if level is None:
            return row_match, column_match
        untried = [iter(row) for row in rows]
        for row in unmatched:
            # Columns chosen on the way down; the i-th one leads from the i-th row to the next.
            path, chosen = [row], []
            while path:
                last = path[-1]
                for column in untried[last]:
                    following = column_match[column]
                    if following < 0:
                        chosen.append(column)
                        for r, c in zip(path, chosen):
                            row_match[r] = c
                            column_match[c] = r
                            level[r] = -1
                        path = []
                        break
                    if level[following] == level[last] + 1:
                        chosen.append(column)
                        path.append(following)
                        break
                else:
                    level[last] = -1
                    path.pop()
                    if chosen:
                        chosen.pop()


def _levels(
    rows: Sequence[Sequence[int]], column_match: Sequence[int], unmatched: Sequence[int]
) -> list[int] | None:
    """Distance of each row from the unmatched rows, as far as an unmatched column; None without one."""
    level = [-1] * len(rows)
    for row in unmatched:
        level[row] = 0
    frontier = list(unmatched)
    depth = 0
    reached = False
    while frontier and not reached:
        depth += 1
        following: list[int] = []
        for row in frontier:
            for column in rows[row]:
                partner = column_match[column]
                if partner < 0:
                    reached = True
                elif level[partner] < 0:
                    level[partner] = depth
                    following.append(partner)
        frontier = following
    return level if reached else None
