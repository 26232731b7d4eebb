"""What was typed at the prompt: a statement for the worksheet, a command, the name of a quantity, or neither.

A statement always wins: whatever can be read as one goes into the worksheet, even if its first word is that of
a command (``list = 3 m``).
"""

from __future__ import annotations

import re
from collections.abc import Container
from dataclasses import dataclass

from eqsheet.diagnostics.source import Source
from eqsheet.syntax.parse import parse_document

_NAME = r"[^\W\d][\w.\[\]\u0300-\u036f]*"
# An argument that goes on like a statement is none: `find = = 3 m` is a broken statement, not a search.
_TEXT = r"(?P<text>(?!=|near\b|within\b)\S.*)"
_NUMBER = r"(?P<first>\d+)"
_NUMBERS = rf"{_NUMBER}(?:(?:\s*\.\.\s*|\s+to\s+|\s+)(?P<last>\d+))?"


@dataclass(frozen=True, slots=True)
class Word:
    """One command: how it is written, and what it does, for the help."""

    name: str
    form: re.Pattern[str]
    usage: str
    says: str


def _word(name: str, rest: str, usage: str, says: str) -> Word:
    return Word(name, re.compile(rf"{name}{rest}\Z"), usage, says)


WORDS = (
    Word("line", re.compile(rf"{_NUMBER}\Z"), "12", "bring line 12 up for editing"),
    Word(
        "replace",
        re.compile(rf"{_NUMBER}\s*:\s*(?P<text>\S.*)\Z", re.DOTALL),
        "12: TEXT",
        "put TEXT in place of line 12",
    ),
    _word("insert", rf"\s+{_NUMBER}", "insert 12", "type lines to stand before line 12"),
    _word("delete", rf"\s+{_NUMBERS}", "delete 12 | delete 12 to 14", "take lines out"),
    _word("off", rf"\s+(?:{_NUMBER}|(?P<text>{_NAME}))", "off D | off 12", "switch off a known or a line"),
    _word("on", rf"\s+(?:{_NUMBER}|(?P<text>{_NAME}))", "on D | on 12", "switch it on again"),
    _word("undo", "", "undo", "take the last change back"),
    _word("redo", "", "redo", "do it again"),
    _word(
        "list",
        rf"(?:\s+(?:{_NUMBERS}|{_TEXT}))?",
        "list | list 20 to 40 | list Pipe",
        "the lines with their values; some of them; a section",
    ),
    _word("find", rf"\s+{_TEXT}", "find TEXT", "the lines that hold TEXT"),
    _word("results", "", "results", "the quantities in a table, and the limits"),
    _word("changes", "", "changes", "all that the last change moved"),
    _word("value", rf"\s+(?P<text>{_NAME})", "value D", "a quantity: its value and where it comes from"),
    _word("blocks", "", "blocks", "in what order the worksheet is solved"),
    _word("messages", "", "messages", "every error, warning and note"),
    _word("save", r"(?:\s+as\s+(?P<text>[^\s=].*))?", "save | save as FILE", "write the file"),
    _word("quit", "", "quit", "leave; asks if something is not saved"),
    _word("help", "", "help", "this page"),
)

_MARKS = re.compile(r"[=±\n]|\b(?:near|within)\b")
_KEYWORD = re.compile(
    r"\s*(?:#|(?:require|show|define|off|new\s+unit|for|rows|curve|surface|template|shared|use|include)\b)"
)


@dataclass(frozen=True, slots=True)
class Understood:
    """What was typed.

    Attributes
    ----------
    name : str
        Name of a `Word`; ``type`` for a statement or prose, ``value`` for the name of a quantity alone,
        ``neither`` for anything else.
    first, last : int or None
        Line numbers.
    text : str
    """

    name: str
    text: str = ""
    first: int | None = None
    last: int | None = None


def understood(typed: str, quantities: Container[str]) -> Understood:
    """What `typed` means where the worksheet has those quantities.

    >>> understood("delete 3 to 5", ())
    Understood(name='delete', text='', first=3, last=5)
    >>> understood("list = 3 m", ()).name, understood("list", ()).name, understood("v", {"v"}).name
    ('type', 'list', 'value')
    """
    text = typed.strip()
    if is_whole_statement(text):
        return Understood("type", typed)
    for word in WORDS:
        found = word.form.match(text)
        if found:
            parts = found.groupdict()
            first, last = parts.get("first"), parts.get("last")
            return Understood(
                word.name,
                (parts.get("text") or "").strip(),
                None if first is None else int(first[:9]),
                None if last is None else int(last[:9]),
            )
    if _MARKS.search(text) or _KEYWORD.match(text):
        return Understood("type", typed)
    return Understood("value" if text in quantities else "neither", text)


def is_whole_statement(text: str) -> bool:
    """Whether `text` holds nothing but statements and prose, all of which can be read."""
    document, found = parse_document(Source("typed", text))
    return not found and bool(document.statements or document.prose)
