"""Domains of statements in their places: the indices of the `for` lines around them, member by member.

A template is closed: the indices around its `use` tell the instances apart, but none of its lines can name them.
In its domain they have hidden names, which no name in a worksheet looks like.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, warning
from eqsheet.model.indexing import Domain, Indexing, IndexSlip, filtered, grown
from eqsheet.model.placed import Placed, Scope, hidden_index, is_hidden
from eqsheet.model.whole_numbers import WholeNumbers
from eqsheet.syntax import nodes as syntax

_ONE = Domain()


@dataclass
class Domains:
    """Domains worked out so far; what is wrong with a `for` line is added to `diagnostics`, once."""

    indexing: Indexing
    whole: WholeNumbers
    diagnostics: list[Diagnostic]
    _known: dict[tuple[int, ...], Domain | None] = field(default_factory=dict)
    _around: dict[int, Domain | None] = field(default_factory=dict)

    def of(self, place: Placed) -> Domain | None:
        """The domain of a statement, None where a `for` line around it is wrong."""
        return self._over(place.scope, place.heads)

    def _over(self, scope: Scope, heads: Sequence[syntax.Statement]) -> Domain | None:
        base = self._of_instance(scope)
        return None if base is None else self._grown(base, heads, self.whole.indexing(self.indexing, scope))

    def _of_instance(self, scope: Scope) -> Domain | None:
        """What the lines of an instance start from: the indices around its `use` under hidden names."""
        if scope.around is None:
            return _ONE
        if id(scope) not in self._around:
            outer = self._over(scope.around, scope.heads)
            self._around[id(scope)] = outer if outer is None else _hidden(outer, scope.around.depth)
        return self._around[id(scope)]

    def _grown(self, base: Domain, heads: Sequence[syntax.Statement], indexing: Indexing) -> Domain | None:
        if not heads:
            return base
        # Domains of instances and what counts in them are kept as long as this object, so that identities tell
        # them apart.
        key = (id(base), id(indexing), *map(id, heads))
        if key not in self._known:
            outer = self._grown(base, heads[:-1], indexing)
            self._known[key] = outer if outer is None else self._one_more(outer, heads[-1], indexing)
        return self._known[key]

    def _one_more(self, outer: Domain, head: syntax.Statement, indexing: Indexing) -> Domain | None:
        node = head.node
        assert isinstance(node, syntax.Family)
        try:
            result = outer
            for clause in node.clauses:
                result = grown(result, clause, indexing)
            result = filtered(result, node.filter, indexing)
        except IndexSlip as slip:
            self._say(slip.finding.at(head))
            return None
        if not result.size and outer.size:
            self._say(_empty_family(head))
        return result

    def _say(self, diagnostic: Diagnostic) -> None:
        if diagnostic not in self.diagnostics:
            self.diagnostics.append(diagnostic)


def visible(sets: Mapping[str, str]) -> Mapping[str, str]:
    """The indices that a statement can name, of those of its domain, with their sets.

    >>> visible({"i": "", "k'0": "branch"})
    {'i': ''}
    """
    return {name: set_name for name, set_name in sets.items() if not is_hidden(name)}


def _hidden(domain: Domain, depth: int) -> Domain:
    if not domain.arrays:
        return domain
    names = {n: n if is_hidden(n) else hidden_index(n, depth) for n in domain.arrays}
    return Domain(
        domain.size,
        {names[n]: array for n, array in domain.arrays.items()},
        {names[n]: set_name for n, set_name in domain.sets.items()},
    )


def _empty_family(head: syntax.Statement) -> Diagnostic:
    return warning(
        "empty-family",
        "this family has no members",
        Label(head.whole),
        help="its lines are not used; check the range or the filter",
    )
