"""Random incidences of rows and columns."""

from __future__ import annotations

from hypothesis import strategies as st

System = tuple[list[list[int]], int]
"""Columns of each row (duplicates allowed), and the number of columns."""


@st.composite
def sparse_systems(draw: st.DrawFn, most: int = 12) -> System:
    """Any system: empty rows, unused columns, duplicates, more rows than columns or fewer."""
    columns = draw(st.integers(0, most))
    row = st.lists(st.integers(0, columns - 1), max_size=4) if columns else st.just([])
    return draw(st.lists(row, max_size=most + 2)), columns


@st.composite
def square_systems(draw: st.DrawFn, most: int = 12) -> System:
    """Systems with a complete matching: a hidden permutation and further entries."""
    size = draw(st.integers(1, most))
    hidden = draw(st.permutations(range(size)))
    others = st.lists(st.integers(0, size - 1), max_size=2)
    return [[column, *draw(others)] for column in hidden], size


@st.composite
def nearly_square_systems(draw: st.DrawFn, most: int = 12) -> System:
    """A system with a complete matching from which a few rows are dropped and to which a few are added."""
    rows, columns = draw(square_systems(most))
    dropped = draw(st.sets(st.integers(0, len(rows) - 1), max_size=2))
    added = draw(st.lists(st.lists(st.integers(0, columns - 1), max_size=3), max_size=2))
    return [row for i, row in enumerate(rows) if i not in dropped] + added, columns


systems = st.one_of(sparse_systems(), square_systems(), nearly_square_systems())
