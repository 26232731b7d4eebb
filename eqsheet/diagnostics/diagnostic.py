"""The one type for everything the program has to say about a worksheet."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum

from eqsheet.diagnostics.source import Span


class Severity(Enum):
    """How much a diagnostic weighs; an error keeps the worksheet from being valid or solved."""

    ERROR = "error"
    WARNING = "warning"
    NOTE = "note"


@dataclass(frozen=True, slots=True)
class Label:
    """A place and what to say of it (empty text: just point)."""

    span: Span
    text: str = ""


@dataclass(frozen=True, slots=True)
class Diagnostic:
    """One finding.

    Attributes
    ----------
    code : str
        Stable name of the defect, words joined by hyphens; registered in `codes`.
    severity : Severity
    message : str
        Headline; stands alone on one line.
    labels : tuple of Label
        Places; the first is the primary one. Empty only where no place exists (an unreadable file).
    notes : tuple of str
        Further facts, one line each.
    help : str
        The cure, as advice; empty where there is none to give.
    file : str
        Name of the file where there is no label to take it from.
    """

    code: str
    severity: Severity
    message: str
    labels: tuple[Label, ...] = ()
    notes: tuple[str, ...] = ()
    help: str = ""
    file: str = ""

    @property
    def span(self) -> Span | None:
        """The primary place, if there is one."""
        return self.labels[0].span if self.labels else None


def error(code: str, message: str, *labels: Label, notes: tuple[str, ...] = (), help: str = "") -> Diagnostic:
    """A diagnostic of severity error."""
    return Diagnostic(code, Severity.ERROR, message, labels, notes, help)


def warning(
    code: str, message: str, *labels: Label, notes: tuple[str, ...] = (), help: str = ""
) -> Diagnostic:
    """A diagnostic of severity warning."""
    return Diagnostic(code, Severity.WARNING, message, labels, notes, help)


def note(code: str, message: str, *labels: Label, notes: tuple[str, ...] = (), help: str = "") -> Diagnostic:
    """A diagnostic of severity note."""
    return Diagnostic(code, Severity.NOTE, message, labels, notes, help)
