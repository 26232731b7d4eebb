"""Checks templates that nothing uses: their names, units and dimensions, as if each were used once.

A library of templates is written before the worksheets that use it, and a slip in it should not wait for them.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence

from eqsheet.diagnostics.diagnostic import Diagnostic, Severity
from eqsheet.diagnostics.source import Source
from eqsheet.model.build import build_system
from eqsheet.model.family_units import check_units_by_family
from eqsheet.syntax.nodes import (
    Curve,
    Definition,
    NewUnit,
    Rows,
    Statement,
    Template,
    Use,
)
from eqsheet.syntax.parse import parse_statement

# What a use is lowered against; equations of the worksheet say nothing of a template that it does not use.
_AROUND = (Curve, Definition, NewUnit, Rows, Template)
# What depends on where and how a template is used: sizes of ranges, and names of the worksheet.
_OF_A_USE = frozenset(
    ("range-not-whole", "no-such-member", "unknown-name", "unknown-instance", "no-such-quantity")
)


def unused_template_diagnostics(statements: Sequence[Statement]) -> list[Diagnostic]:
    """Errors in the lines of templates that no `use` leads to."""
    templates = {s.node.name: s for s in statements if isinstance(s.node, Template) and not s.off and s.body}
    if not templates:
        return []
    outside = [s for s in statements if not isinstance(s.node, Template)]
    reached = _reached(_used_in(outside), templates)
    found: list[Diagnostic] = []
    for name, template in templates.items():
        if name not in reached:
            fresh = _reached({name}, templates) - reached
            reached |= fresh
            found += _as_used_once(template, name, statements, [templates[n] for n in fresh])
    return found


def _used_in(statements: Iterable[Statement]) -> set[str]:
    return {s.node.template for s in _all(statements) if isinstance(s.node, Use)}


def _all(statements: Iterable[Statement]) -> Iterator[Statement]:
    for statement in statements:
        if not statement.off:
            yield statement
            yield from _all(statement.body)


def _reached(names: Iterable[str], templates: dict[str, Statement]) -> set[str]:
    """The templates of some names, and those that they use in turn."""
    reached: set[str] = set()
    waiting = [name for name in names if name in templates]
    while waiting:
        name = waiting.pop()
        if name not in reached:
            reached.add(name)
            waiting.extend(n for n in _used_in(templates[name].body) if n in templates)
    return reached


def _as_used_once(
    template: Statement, name: str, statements: Sequence[Statement], fresh: Sequence[Statement]
) -> list[Diagnostic]:
    """Errors in the bodies of the templates in `fresh`, which a use of the first of them leads to."""
    use, _ = parse_statement(Source(template.source.name, f"use {name} as {name}", numbered=False))
    assert use is not None
    around = [s for s in statements if isinstance(s.node, _AROUND)]
    system, found = build_system([*around, use])
    diagnostics = (*found, *check_units_by_family(system).diagnostics)
    lines = [(s.source, s.line) for one in fresh for s in _all(one.body)]
    return [
        d
        for d in diagnostics
        if d.severity is Severity.ERROR
        and d.code not in _OF_A_USE
        and (span := d.span) is not None
        and any(
            span.source is source and line.offset <= span.start <= line.offset + len(line.text)
            for source, line in lines
        )
    ]
