"""Findings of the model: diagnostics in the making, with places relative to their logical line.

They stay relative so that what was found in an unchanged line can be used again wherever the line now stands.
"""

from __future__ import annotations

from collections.abc import Container
from dataclasses import dataclass

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, Severity
from eqsheet.syntax.nodes import Statement


@dataclass(frozen=True, slots=True)
class Finding:
    """Code, message and cure, at the characters `start` to `end` of a logical line.

    ``symbol`` is a unit that was not found, ``cure_if_quantity`` what to say where a quantity has that name.
    """

    code: str
    message: str
    start: int
    end: int
    help: str = ""
    notes: tuple[str, ...] = ()
    severity: Severity = Severity.ERROR
    symbol: str = ""
    cure_if_quantity: str = ""

    def at(self, statement: Statement, quantities: Container[str] = ()) -> Diagnostic:
        """The diagnostic, placed in the source of `statement`.

        Parameters
        ----------
        quantities : container of str
            Names of the worksheet's quantities: a unit that is none may have been meant as one of them.
        """
        label = Label(statement.span(self.start, self.end))
        help = self.help
        if self.cure_if_quantity and self.symbol in quantities:
            help = f"`{self.symbol}` is a quantity of the worksheet: {self.cure_if_quantity}"
        return Diagnostic(self.code, self.severity, self.message, (label,), self.notes, help)
