"""Changes for one run: statements that replace or join those of the worksheet, and knowns switched off."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.diagnostics.source import Source
from eqsheet.model.gather import not_a_known
from eqsheet.model.lower_statements import known_name
from eqsheet.syntax.nodes import Equation, Statement
from eqsheet.syntax.parse import parse_statement


def apply_changes(
    statements: Sequence[Statement], changes: Sequence[str], free: Sequence[str]
) -> tuple[tuple[Statement, ...], tuple[str, ...], tuple[Diagnostic, ...]]:
    """The statements with changes applied, and the names still to be freed (members of families).

    Parameters
    ----------
    changes : sequence of str
        Statements; a known replaces the known of its name (in its place), anything else is added.
    free : sequence of str
        Names of knowns to switch off.
    """
    if not changes and not free:
        return tuple(statements), (), ()
    result = list(statements)
    diagnostics: list[Diagnostic] = []
    members = tuple(name for name in free if "[" in name or "." in name)
    for name in free:
        if name not in members:
            _switch_off(result, name, diagnostics)
    for text in changes:
        source = Source("--with", text, numbered=False)
        statement, found = parse_statement(source)
        diagnostics.extend(found)
        if statement is not None and not found:
            _put(result, statement)
    return tuple(result), members, tuple(diagnostics)


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
    mentioned = any(isinstance(s.node, Equation) and name in s.line.text for s in result)
    diagnostics.append(not_a_known(name, knowns, mentioned))
