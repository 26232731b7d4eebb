"""Changes for one run: statements that replace or join those of the worksheet, and knowns switched off."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.diagnostics.source import Source, Span
from eqsheet.model.lower_statements import known_name
from eqsheet.model.spelling import did_you_mean
from eqsheet.syntax.nodes import Equation, Statement
from eqsheet.syntax.parse import parse_statement


def apply_changes(
    statements: Sequence[Statement], changes: Sequence[str], free: Sequence[str]
) -> tuple[tuple[Statement, ...], tuple[Diagnostic, ...]]:
    """The statements with changes applied.

    Parameters
    ----------
    changes : sequence of str
        Statements; a known replaces the known of its name (in its place), anything else is added.
    free : sequence of str
        Names of knowns to switch off.
    """
    if not changes and not free:
        return tuple(statements), ()
    result = list(statements)
    diagnostics: list[Diagnostic] = []
    for name in free:
        _switch_off(result, name, diagnostics)
    for text in changes:
        source = Source("--with", text, numbered=False)
        statement, found = parse_statement(source)
        diagnostics.extend(found)
        if statement is not None and not found:
            _put(result, statement)
    return tuple(result), tuple(diagnostics)


def _put(result: list[Statement], statement: Statement) -> None:
    name = known_name(statement)
    if name is not None:
        for i, other in enumerate(result):
            if not other.off and known_name(other) == name:
                # The place in the worksheet stays, and with it section and description.
                result[i] = replace(
                    statement, section=other.section, description=statement.description or other.description
                )
                return
    result.append(statement)


def _switch_off(result: list[Statement], name: str, diagnostics: list[Diagnostic]) -> None:
    found = False
    for i, statement in enumerate(result):
        if not statement.off and known_name(statement) == name:
            result[i] = replace(statement, off=True)
            found = True
    if found:
        return
    knowns = [n for n in map(known_name, result) if n is not None]
    source = Source("--free", name, numbered=False)
    mentioned = any(isinstance(s.node, Equation) and name in s.line.text for s in result)
    diagnostics.append(
        error(
            "not-a-known",
            f"`{name}` is not set by a line of its own, so it cannot be freed",
            Label(Span(source, 0, len(name))),
            help=did_you_mean(name, knowns) or ("it is already an unknown" if mentioned else ""),
        )
    )
