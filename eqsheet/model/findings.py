"""Findings of the model: diagnostics in the making, with places relative to their logical line.

They stay relative so that what was found in an unchanged line can be used again wherever the line now stands.
"""

from __future__ import annotations

from dataclasses import dataclass

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, Severity
from eqsheet.syntax.nodes import Statement


@dataclass(frozen=True, slots=True)
class Finding:
    """Code, message and cure, at the characters `start` to `end` of a logical line."""

    code: str
    message: str
    start: int
    end: int
    help: str = ""
    notes: tuple[str, ...] = ()
    severity: Severity = Severity.ERROR

    def at(self, statement: Statement) -> Diagnostic:
        """The diagnostic, placed in the source of `statement`."""
        label = Label(statement.span(self.start, self.end))
        return Diagnostic(self.code, self.severity, self.message, (label,), self.notes, self.help)
