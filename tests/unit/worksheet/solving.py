"""Worksheets solved from text, and what was said of them, in few words."""

from __future__ import annotations

from textwrap import dedent

import eqsheet
from eqsheet.diagnostics.diagnostic import Diagnostic, Severity


def solve(text: str, changes: tuple[str, ...] = (), free: tuple[str, ...] = ()) -> eqsheet.Solution:
    return eqsheet.parse(dedent(text).strip("\n")).solve(changes, free)


def errors(solution: eqsheet.Solution) -> list[str]:
    """Codes of the errors, in order of their places."""
    return [d.code for d in solution.diagnostics if d.severity is Severity.ERROR]


def only(solution: eqsheet.Solution, code: str) -> Diagnostic:
    """The one diagnostic of a code."""
    (found,) = [d for d in solution.diagnostics if d.code == code]
    return found


def lines(diagnostic: Diagnostic) -> list[int]:
    """Lines pointed at, the primary one first."""
    return [label.span.line for label in diagnostic.labels]


def values(solution: eqsheet.Solution) -> dict[str, float]:
    """SI values by name."""
    return {name: value.si for name, value in solution.items()}
