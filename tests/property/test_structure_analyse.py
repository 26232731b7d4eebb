"""The verdict has its defining properties on any system, whichever implementation gives it."""

from __future__ import annotations

import random
from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st
from structure_checker import check_by_definition, check_structure
from structure_strategies import System, square_systems, systems

from eqsheet.structure.analyse import analyse
from eqsheet.structure.analyse_sparse import analyse_sparse
from eqsheet.structure.verdict import Structure

Analysis = Callable[[list[list[int]], int], Structure]


def analyse_arrays(rows: list[list[int]], columns: int) -> Structure:
    indptr = np.cumsum([0, *(len(row) for row in rows)], dtype=np.int32)
    return analyse_sparse(indptr, np.array([c for row in rows for c in row], dtype=np.int32), columns)


implementations = pytest.mark.parametrize("analysis", [analyse, analyse_arrays], ids=["lists", "arrays"])


@implementations
@given(system=systems)
@example(system=([], 0))
@example(system=([[]], 0))
@example(system=([], 1))
def test_verdict_has_the_defining_properties(analysis: Analysis, system: System) -> None:
    rows, columns = system
    structure = analysis(rows, columns)
    check_structure(rows, columns, structure)
    check_by_definition(rows, columns, structure)


@given(system=systems)
def test_both_implementations_agree_but_for_partners_inside_blocks(system: System) -> None:
    one, other = analyse(*system), analyse_arrays(*system)
    assert replace(one, row_match=(), column_match=()) == replace(other, row_match=(), column_match=())


@implementations
@given(system=systems, shuffle=st.randoms(use_true_random=False))
def test_order_and_repetition_of_entries_do_not_matter(
    analysis: Analysis, system: System, shuffle: random.Random
) -> None:
    rows, columns = system
    shuffled = [row + row[:1] for row in rows]
    for row in shuffled:
        shuffle.shuffle(row)
    assert analysis(shuffled, columns) == analysis(rows, columns)


@implementations
@given(system=systems, data=st.data())
def test_parts_and_troubles_follow_a_renumbering(
    analysis: Analysis, system: System, data: st.DataObject
) -> None:
    rows, columns = system
    new_row = data.draw(st.permutations(range(len(rows))))
    new_column = data.draw(st.permutations(range(columns)))
    renumbered: list[list[int]] = [[] for _ in rows]
    for old, row in enumerate(rows):
        renumbered[new_row[old]] = [new_column[column] for column in row]
    before, after = analysis(rows, columns), analysis(renumbered, columns)

    def moved(
        part_rows: tuple[int, ...], part_columns: tuple[int, ...]
    ) -> tuple[frozenset[int], frozenset[int]]:
        return frozenset(new_row[r] for r in part_rows), frozenset(new_column[c] for c in part_columns)

    for name in ("over", "under", "well"):
        part, other = getattr(before, name), getattr(after, name)
        assert moved(part.rows, part.columns) == (frozenset(other.rows), frozenset(other.columns))
    assert {moved(c.rows, c.columns) for c in before.conflicts} == {
        (frozenset(c.rows), frozenset(c.columns)) for c in after.conflicts
    }
    assert {moved(s.rows, s.columns) for s in before.shortfalls} == {
        (frozenset(s.rows), frozenset(s.columns)) for s in after.shortfalls
    }
    # Blocks of the over-determined part depend on which rows are left out, hence on the numbering.
    assert {moved(b.rows, b.columns) for b in before.blocks if b.part == "well"} == {
        (frozenset(b.rows), frozenset(b.columns)) for b in after.blocks if b.part == "well"
    }


@implementations
@given(system=square_systems(), extra=st.data())
def test_a_repeated_row_is_left_out_itself(analysis: Analysis, system: System, extra: st.DataObject) -> None:
    """An editor adds lines at the end: the line added last is the one to blame, whatever it competes with."""
    rows, columns = system
    repeated = extra.draw(st.sampled_from(rows))
    structure = analysis([*rows, repeated], columns)
    assert structure.unmatched_rows == (len(rows),)
    assert structure.over.rows
    assert len(structure.conflicts) == 1


@implementations
@pytest.mark.parametrize("seed", range(3))
@pytest.mark.parametrize("extra", [-15, 0, 15])
def test_systems_of_some_hundred_rows(analysis: Analysis, seed: int, extra: int) -> None:
    draw = random.Random(seed)
    columns = 300
    rows = [draw.sample(range(columns), draw.randint(1, 3)) for _ in range(columns + extra)]
    structure = analysis(rows, columns)
    check_structure(rows, columns, structure)
    check_by_definition(rows, columns, structure)
