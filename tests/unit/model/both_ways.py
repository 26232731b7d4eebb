"""What is said of a worksheet with families written out and with families as arrays, which must be the same."""

from __future__ import annotations

import sys

import eqsheet
from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.worksheet.prepare import Prepared, prepare


def prepared(text: str, large_family: int = sys.maxsize) -> Prepared:
    """A worksheet up to the order of solution; statements with `large_family` members on are kept as arrays."""
    sheet = eqsheet.parse(text)
    return prepare(sheet.document.statements, sheet.diagnostics, large_family=large_family)


def said(text: str) -> list[Diagnostic]:
    """The diagnostics before any number is computed; those of both ways agree, in their order too."""
    written = list(prepared(text).diagnostics)
    assert list(map(repr, prepared(text, 2).diagnostics)) == list(map(repr, written))
    return written


def codes(text: str) -> list[str]:
    """The codes of what is said."""
    return [diagnostic.code for diagnostic in said(text)]


def only(text: str, code: str) -> Diagnostic:
    """The one thing said, which has this code."""
    (found,) = said(text)
    assert found.code == code, found.message
    return found
