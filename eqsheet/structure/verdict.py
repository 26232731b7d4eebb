"""What a structural analysis says: parts, troubles, blocks. Rows are equations, columns are unknowns."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Literal, NamedTuple, TypeAlias

Adjacency: TypeAlias = Sequence[Sequence[int]] | Mapping[int, Sequence[int]]
"""Neighbours by number: of all rows (a sequence), or of some of them (a mapping)."""


class Part(NamedTuple):
    """A part of the coarse decomposition.

    Attributes
    ----------
    rows, columns : sequence of int
        Ascending.
    """

    rows: Sequence[int]
    columns: Sequence[int]


class Block(NamedTuple):
    """Rows that must be solved together, for as many columns.

    A named tuple, since a system may have hundreds of thousands of blocks.

    Attributes
    ----------
    rows, columns : sequence of int
        Ascending, equally many.
    depends : tuple of int
        Numbers of the blocks whose columns occur in `rows`; ascending, all smaller than the block's own.
    part : "well" or "over"
        "over" where the block belongs to the over-determined part with its left-out rows removed.
    """

    rows: Sequence[int]
    columns: Sequence[int]
    depends: tuple[int, ...]
    part: Literal["well", "over"]


@dataclass(frozen=True, slots=True)
class Conflict:
    """Connected rows that are more than their columns.

    Attributes
    ----------
    rows, columns : tuple of int
        Ascending. Any single row of `rows` can be left out without losing the means to find `columns`.
    excess : int
        How many rows must be left out: ``len(rows) - len(columns)``, at least 1.
    left_out : tuple of int
        The rows left out here, the latest possible choice; `excess` of them.
    """

    rows: tuple[int, ...]
    columns: tuple[int, ...]
    excess: int
    left_out: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Shortfall:
    """Connected columns that are more than the rows left to find them.

    Attributes
    ----------
    rows, columns : tuple of int
        Ascending. Any single column of `columns` can be fixed without over-determining `rows`.
    missing : int
        How many columns must be fixed: ``len(columns) - len(rows)``, at least 1.
    free : tuple of int
        The columns left unmatched here, the latest possible choice; `missing` of them.
    """

    rows: tuple[int, ...]
    columns: tuple[int, ...]
    missing: int
    free: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Structure:
    """The verdict on a system of rows and columns.

    Sequences are tuples, those of a large system arrays that look like them (`ArraySequence`).

    Attributes
    ----------
    row_match : sequence of int
        Column matched to each row, -1 for none.
    column_match : sequence of int
        Row matched to each column, -1 for none.
    over, under, well : Part
        The over-, under- and well-determined part; together all rows and all columns.
    unmatched_rows, unmatched_columns : tuple of int
        Ascending. Of all choices the latest rows and the latest columns: each set is the greatest in
        lexicographic order, read from its greatest number down.
    blocks : tuple of Block
        In order of solution; cover the well-determined part and the over-determined part without its
        unmatched rows. Among blocks that could come next, the one with the smallest column does.
    conflicts : tuple of Conflict
        One for each connected piece of the over-determined part, ordered by first row.
    shortfalls : tuple of Shortfall
        One for each connected piece of the under-determined part, ordered by first column.
    """

    row_match: Sequence[int]
    column_match: Sequence[int]
    over: Part
    under: Part
    well: Part
    unmatched_rows: tuple[int, ...]
    unmatched_columns: tuple[int, ...]
    blocks: tuple[Block, ...]
    conflicts: tuple[Conflict, ...]
    shortfalls: tuple[Shortfall, ...]

    @property
    def square(self) -> bool:
        """Whether every row and every column is matched."""
        return not self.unmatched_rows and not self.unmatched_columns
