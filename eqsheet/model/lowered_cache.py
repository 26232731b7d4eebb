"""Lowered statements kept while a worksheet is edited, and what makes them stale."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

from eqsheet.model.indexing import Indexing
from eqsheet.model.lower_statements import (
    LoweredStatement,
    lower_equation,
    lower_guess,
    lower_limit,
    lower_show,
)
from eqsheet.model.scope import Context, IndexScope, NameTable, Surroundings
from eqsheet.model.while_lowering import NeedsMembers
from eqsheet.syntax import nodes as syntax

_LOWER: dict[type, Callable[[syntax.Statement, Surroundings], LoweredStatement]] = {
    syntax.Equation: lower_equation,
    syntax.Guess: lower_guess,
    syntax.Limit: lower_limit,
    syntax.Show: lower_show,
}


@dataclass
class LoweredCache:
    """Lowered statements by their text, kept while a worksheet is edited.

    Places in them are relative to the statement, so they serve wherever it now stands. The whole cache is
    dropped when units, definitions or index sets change, since every statement may depend on them.
    """

    names: NameTable = field(default_factory=NameTable)
    context: Context | None = None
    entries: dict[object, LoweredStatement | None] = field(default_factory=dict)

    def enter(self, context: Context) -> None:
        """Use the cache under `context`."""
        if self.context is None or not _same_context(self.context, context) or len(self.entries) > 200_000:
            self.entries.clear()
            self.names = NameTable()
        self.context = context

    def lowered(
        self, statement: syntax.Statement, indices: IndexScope, in_instance: bool
    ) -> LoweredStatement | None:
        """The lowered statement, worked out now if it is new; None where each member needs one of its own."""
        text = statement.line.text
        plain = not indices.free and not indices.fixed and not indices.whole and not in_instance
        key: object = text if plain else (text, _signature(indices), in_instance)
        if key in self.entries:
            return self.entries[key]
        assert self.context is not None
        found: LoweredStatement | None
        try:
            around = Surroundings(self.context, self.names, indices, in_instance)
            found = _LOWER[type(statement.node)](statement, around)
        except NeedsMembers:
            found = None
        self.entries[key] = found
        return found


def _signature(indices: IndexScope) -> tuple[object, ...]:
    parts = (indices.free, indices.fixed, indices.decided, indices.whole)
    return tuple(tuple(sorted(one.items())) for one in parts)


def _same_context(a: Context, b: Context) -> bool:
    mine, other = a.unit_table, b.unit_table
    if mine is not other and (mine.ambient, mine.added) != (other.ambient, other.added):
        return False
    if a.definitions.keys() != b.definitions.keys() or not _same_indexing(a.indexing, b.indexing):
        return False
    if a.curves != b.curves:
        return False
    # The node follows from the text, and comparing trees would recurse down their longest sum.
    return all(x.line.text == b.definitions[name].line.text for name, x in a.definitions.items())


def _same_indexing(a: Indexing, b: Indexing) -> bool:
    if a.whole != b.whole or a.sets.keys() != b.sets.keys() or a.columns.keys() != b.columns.keys():
        return False
    return all(s.members == b.sets[n].members for n, s in a.sets.items()) and all(
        (c.rows, c.of, c.codes.tolist()) == (d.rows, d.of, d.codes.tolist())
        for n, c in a.columns.items()
        if (d := b.columns[n]) is not None
    )
