"""Conditions that indices alone decide, settled before anything is looked up: ``if i = 1 then T_in else T[i-1]``.

Only the branch that counts for a member is lowered for it, so that the other one need not make sense there.
"""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping, Sequence

import numpy as np

from eqsheet.model.indexing import Domain, Indexing, IndexSlip, holds
from eqsheet.model.written_nodes import names_in
from eqsheet.syntax import nodes as syntax
from eqsheet.syntax.walk import walk

Decided = Mapping[tuple[int, int], bool]


def index_conditions(
    statement: syntax.Statement, indices: Collection[str], domain: Domain, indexing: Indexing
) -> list[syntax.Expression]:
    """The conditions of ``if`` in a statement that name indices and nothing but what a filter may compare."""
    if not indices or "if" not in statement.line.text:
        return []
    found = (node.condition for node in walk(statement.node) if isinstance(node, syntax.Conditional))
    return [one for one in found if names_in((one,)) & set(indices) and _is_decided(one, domain, indexing)]


def by_condition(
    domain: Domain, conditions: Sequence[syntax.Expression], indexing: Indexing
) -> Iterator[tuple[Domain, Decided]]:
    """The parts of a domain in which the conditions hold or do not, with which of them do."""
    if not conditions or not domain.size:
        yield domain, {}
        return
    truths = np.stack([holds(condition, domain, indexing) for condition in conditions])
    patterns, of_entry = np.unique(truths, axis=1, return_inverse=True)
    places = [(condition.start, condition.end) for condition in conditions]
    for number, pattern in enumerate(patterns.T.tolist()):
        yield domain.where(np.ravel(of_entry) == number), dict(zip(places, pattern))


def _is_decided(condition: syntax.Expression, domain: Domain, indexing: Indexing) -> bool:
    try:
        holds(condition, domain, indexing)
    except IndexSlip:
        return False
    return True
