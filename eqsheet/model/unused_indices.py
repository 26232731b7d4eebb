"""Lines of a family that do not name an index of it, so that they stand several times alike."""

from __future__ import annotations

import numpy as np

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.model.aggregate_parts import ENTRY
from eqsheet.model.indexing import Domain
from eqsheet.model.placed import Placed, Scope, hidden_index, is_hidden, visible_name
from eqsheet.model.written_nodes import names_in

CODE = "index-unused"


def unused_index(place: Placed, domain: Domain) -> Diagnostic | None:
    """What to say of an equation that several entries of its domain make alike; None where each is another."""
    if domain.size < 2 or any(ENTRY in name for name in domain.arrays):
        return None
    instance = place.instance.nodes if place.instance is not None else ()
    named = names_in((place.statement.node, *place.scope.nodes, *instance))
    unused = [name for name in domain.arrays if name not in named]
    if not unused or not _repeats(domain, [name for name in domain.arrays if name in named]):
        return None
    index = unused[-1]
    if is_hidden(index):
        return _of_instance(place.scope, index)
    return error(
        CODE,
        f"this line does not name the index `{index}`, so it stands several times alike",
        Label(place.statement.whole),
        help=f"take it out of the group, or name `{index}` in it",
    )


def _repeats(domain: Domain, used: list[str]) -> bool:
    """Whether entries agree in all the indices that are used."""
    if not used:
        return True
    columns = np.stack([domain.arrays[name] for name in used])
    return bool(np.unique(columns, axis=1).shape[1] < domain.size)


def _of_instance(scope: Scope, hidden: str) -> Diagnostic | None:
    """The same, said of the instance that stands in the family of the index."""
    index = visible_name(hidden)
    while scope.around is not None and hidden_index(index, scope.around.depth) != hidden:
        scope = scope.around
    if scope.use is None:
        return None
    return error(
        CODE,
        f"this instance does not name the index `{index}`, so it is made several times alike",
        Label(scope.use.whole),
        help=f"write `... as {scope.path[-1][0]}[{index}]`",
    )
