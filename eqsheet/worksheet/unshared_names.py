"""Names that an inner template shares with a template around it, which does not share them in its turn.

`shared rho` in a template means the `rho` of whatever stands around its instance. Where that is an instance of another
template, the name is local there, and free, unless that template shares it too: a line easily forgotten.
"""

from __future__ import annotations

import re
from collections.abc import Collection, Iterable, Iterator, Mapping, Sequence

from eqsheet.model.written_nodes import names_in
from eqsheet.syntax.nodes import Family, Shared, Statement, Template, Use

_SUBSCRIPTS = re.compile(r'\[(?:"[^"]*"|[^\]"])*\]')


def unshared_note(name: str, statements: Sequence[Statement], names: Collection[str]) -> str:
    """What to say of a free quantity that is there only because an inner template shares it; empty for all others.

    Parameters
    ----------
    name : str
        Full name of the quantity.
    statements : sequence of Statement
        Of the worksheet.
    names : collection of str
        Full names of all quantities.
    """
    *owners, last = _SUBSCRIPTS.sub("", name).split(".")
    if not owners:
        return ""
    templates = {s.node.name: s for s in statements if isinstance(s.node, Template)}
    outer = _template_of(owners, statements, templates)
    if outer is None or last in _own_names(outer):
        return ""
    around = [*owners[:-1], last]
    if not any(_SUBSCRIPTS.sub("", other).split(".") == around for other in names):
        return ""
    for use in _uses(outer.body):
        assert isinstance(use.node, Use)
        inner = templates.get(use.node.template)
        if inner is not None and last in _shared(inner):
            assert isinstance(outer.node, Template)
            return (
                f"`{name}` is there because `{use.node.template}` shares `{last}`: if that of the worksheet around "
                f"is meant, write `shared {last}` in `{outer.node.name}` too"
            )
    return ""


def _template_of(
    owners: Sequence[str], statements: Sequence[Statement], templates: Mapping[str, Statement]
) -> Statement | None:
    """The template of an instance by its path."""
    body: Sequence[Statement] = statements
    template: Statement | None = None
    for owner in owners:
        found = (
            u.node.template for u in _uses(body) if isinstance(u.node, Use) and u.node.instance.name == owner
        )
        template = templates.get(next(found, ""))
        if template is None:
            return None
        body = template.body
    return template


def _uses(body: Iterable[Statement]) -> Iterator[Statement]:
    for statement in body:
        if statement.off:
            continue
        if isinstance(statement.node, Use):
            yield statement
        elif isinstance(statement.node, Family):
            yield from _uses(statement.body)


def _own_names(template: Statement) -> set[str]:
    """Names in the lines of a template itself, shared ones included, those inside its instances left out."""
    found: set[str] = set()
    waiting = list(template.body)
    while waiting:
        statement = waiting.pop()
        if isinstance(statement.node, Family):
            waiting.extend(statement.body)
        elif not isinstance(statement.node, Use):
            found |= names_in((statement.node,))
    return found


def _shared(template: Statement) -> set[str]:
    return {
        reference.name
        for line in template.body
        if isinstance(line.node, Shared) and not line.off
        for reference in line.node.names
    }
