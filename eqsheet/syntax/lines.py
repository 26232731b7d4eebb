"""Logical lines: where statements begin and end, before anything is parsed, so that none can hide another.

A statement goes on while a bracket is open, where a line ends in an operator or a comma, or where the next
line begins with an operator (``then``, ``else``, ``and``, ``or``, ``valid`` and ``within`` count as such). It
never swallows a line at the same or a lower indentation that looks like the start of another statement: a
bracket left open is then a slip of its own line only. The rows of a table are one line each.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from types import MappingProxyType
from typing import NamedTuple

from eqsheet.diagnostics.source import Source
from eqsheet.syntax.nodes import LogicalLine, Prose

TAB_WIDTH = 4
_REMEMBERED_LENGTH = 300

_NAME = r"[^\W\d][\w\u0300-\u036f]*"
# Also where the head is broken: its indented lines are then still rows, and not a broken statement each.
_TABLE_HEAD = re.compile(
    rf"(?:off[ \t]+|{_NAME}[ \t]*:[ \t]*)*(?:rows|curve|surface)[ \t]+{_NAME}[ \t]*(?![-=*/+^])"
)
_GOES_ON = re.compile(r"(?:[-+*/^=<>(\[,±]|(?<!\w)(?:and|or|not|then|else|if))$")
# `* within 0 ..` is a pattern, though not one that is taken; `* near + 3` goes on with a factor of that name.
_PATTERN = r"\*[\w.*]*[ \t]+(?:within(?!\w)|near[ \t]+[\w(])"
_CARRIES_ON = re.compile(
    rf"\s*(?!{_PATTERN})(?:[-+*/^=<>,±]|!=|\.\.|&&|\|\||(?:and|or|then|else|valid|within)(?!\w)(?![ \t]*[=:]))"
)
_STARTS = re.compile(
    r"\s*(?:"
    r"(?:require|show|define|new[ \t]+unit|rows|curve|surface|template|shared|use|include)"
    r"(?!\w)(?![ \t]*[=*/+\-^])"
    r"|off[ \t]+[^\W\d]"
    rf"|{_NAME}[\w.*]*\*[\w.*]*[ \t]+(?:near|within)(?!\w)"
    r"|for[ \t].*:[ \t]*(?:#|$)"
    rf"|{_NAME}(?:\[[^\]=]*\]|\.{_NAME})*[ \t]*(?:=|:|(?:near|within)(?!\w))"
    r")"
)
# The blank before the title is easily forgotten; `##x = 3 m` is rather a statement that was put aside.
_HEADING = re.compile(r"(#{2,6})(?:[ \t]+|(?=[^\W\d_][^=]*$))(.*\S)[ \t]*$")
_EQUALS_OR_BRACKET = re.compile(r'"[^"\n]*"|[<>!]=|=|[()\[\]]')
_TEXT_OR_COMMENT = re.compile(r'"[^"\n]*"|#')


@dataclass(frozen=True, slots=True)
class Lines:
    """A source cut up.

    Attributes
    ----------
    logical : tuple of LogicalLine
    table_rows : frozenset of int
        Numbers (positions in `logical`) of the lines that are rows of a table.
    open_brackets : mapping of int to int
        By number of the logical line: offset in its text of the bracket that is never closed.
    prose : tuple of Prose
    """

    logical: tuple[LogicalLine, ...]
    table_rows: frozenset[int]
    open_brackets: Mapping[int, int]
    prose: tuple[Prose, ...]


def split_comment(line: str) -> tuple[str, str | None]:
    """The code of a physical line and its comment without ``#`` (None if there is none).

    >>> split_comment('x = a["#1"]  # first')
    ('x = a["#1"]  ', ' first')
    """
    mark = line.find("#")
    if mark < 0:
        return line, None
    if '"' in line[:mark]:
        for found in _TEXT_OR_COMMENT.finditer(line):
            if found.group() == "#":
                mark = found.start()
                break
        else:
            return line, None
    return line[:mark], line[mark + 1 :]


def indentation(line: str) -> int:
    """Columns of blank space before the text, a tab reaching to the next multiple of `TAB_WIDTH`."""
    columns = 0
    for character in line:
        if character == " ":
            columns += 1
        elif character == "\t":
            columns += TAB_WIDTH - columns % TAB_WIDTH
        else:
            break
    return columns


def logical_lines(source: Source) -> Lines:
    """The logical lines and the prose of `source`."""
    return _Splitter(source.text).lines()


class _AboutLine(NamedTuple):
    """What a physical line says for itself, wherever it stands.

    Attributes
    ----------
    code, comment
        As from `split_comment`.
    stripped : str
        The code without outer blanks.
    lead : int
        Characters before the code.
    indent : int
        Columns of indentation; 0 where there is no code.
    depth : int
        Brackets opened less brackets closed.
    goes_on, carries_on : bool
        The statement goes on below it; it goes on with the statement above.
    """

    code: str
    comment: str | None
    stripped: str
    lead: int
    indent: int
    depth: int
    goes_on: bool
    carries_on: bool


def _about(line: str) -> _AboutLine:
    # Most lines are met again after each edit of a worksheet; long ones are rare and not worth the memory.
    return _remembered_line(line) if len(line) <= _REMEMBERED_LENGTH else _read_line(line)


def _read_line(line: str) -> _AboutLine:
    code, comment = split_comment(line)
    stripped = code.strip()
    if not stripped:
        return _AboutLine(code, comment, "", len(code), 0, 0, False, False)
    return _AboutLine(
        code,
        comment,
        stripped,
        len(code) - len(code.lstrip()),
        indentation(line) if line[0] in " \t" else 0,
        _depth(code),
        _GOES_ON.search(stripped) is not None,
        _CARRIES_ON.match(line) is not None,
    )


_remembered_line = lru_cache(maxsize=1 << 14)(_read_line)


class _Splitter:
    def __init__(self, text: str) -> None:
        self._physical = text.split("\n")
        self._logical: list[LogicalLine] = []
        self._table_rows: set[int] = set()
        self._open: dict[int, int] = {}
        self._prose: list[Prose] = []

    def lines(self) -> Lines:
        physical = self._physical
        offset = number = 0
        table_indent: int | None = None
        while number < len(physical):
            line = physical[number]
            here = _about(line)
            stripped, comment, indent = here.stripped, here.comment, here.indent
            if not stripped:
                if comment is not None:
                    self._add_prose(number, line.strip())
                offset += len(line) + 1
                number += 1
                continue
            start = offset + here.lead
            if table_indent is not None and indent > table_indent:
                self._table_rows.add(len(self._logical))
                self._logical.append(
                    LogicalLine(stripped, start, number + 1, indent, (comment or "").strip())
                )
                offset += len(line) + 1
                number += 1
                continue
            if self._stands_alone(number, here):
                last, depth = number, here.depth
            else:
                last, depth = self._last_line(number, here.code, indent)
            if last == number:
                text = stripped
                offset += len(line) + 1
            else:
                taken = physical[number : last + 1]
                code, comment = split_comment(taken[-1])
                whole = "\n".join((*taken[:-1], code))
                text = whole.strip()
                offset += sum(map(len, taken)) + len(taken)
            if depth > 0:
                self._open[len(self._logical)] = _never_closed(text)
            self._logical.append(LogicalLine(text, start, number + 1, indent, (comment or "").strip()))
            table_indent = indent if _TABLE_HEAD.match(text) else None
            number = last + 1
        return Lines(
            tuple(self._logical),
            frozenset(self._table_rows),
            MappingProxyType(self._open),
            tuple(self._prose),
        )

    def _add_prose(self, number: int, line: str) -> None:
        heading = _HEADING.match(line)
        if heading:
            title = heading[2]
            self._prose.append(Prose(number + 1, title, title, len(heading[1])))
        else:
            self._prose.append(Prose(number + 1, line[1:].removeprefix(" ")))

    def _stands_alone(self, number: int, here: _AboutLine) -> bool:
        """Whether the statement plainly ends in its first line; what `_last_line` finds for nearly every line."""
        if here.depth > 0 or here.goes_on:
            return False
        if number + 1 == len(self._physical):
            return True
        below = _about(self._physical[number + 1])
        return not below.stripped or not below.carries_on

    def _last_line(self, first: int, code: str, indent: int) -> tuple[int, int]:
        """Number of the last physical line of the statement from `first` on, and brackets left open."""
        physical = self._physical
        last = first
        depth = _depth(code)
        stripped = code.rstrip()
        number = first + 1
        while number < len(physical):
            line = physical[number]
            code, comment = split_comment(line)
            wanted = depth > 0 or _GOES_ON.search(stripped) is not None
            if not code.strip():
                # Blank lines and comments may stand inside a statement, headings may not.
                if not wanted or (comment is not None and _HEADING.match(line.strip())):
                    break
                number += 1
                continue
            if wanted:
                if indentation(line) <= indent and _starts_statement(line, code):
                    break
            elif number != last + 1 or not _CARRIES_ON.match(line) or _opens_group(stripped):
                break
            depth += _depth(code)
            stripped = code.rstrip()
            last = number
            number += 1
        return last, depth


def _starts_statement(line: str, code: str) -> bool:
    """Whether the physical line looks like the start of a statement."""
    if _STARTS.match(line):
        return True
    if "=" not in code or _CARRIES_ON.match(line):
        return False
    depth = 0
    for found in _EQUALS_OR_BRACKET.finditer(code):
        mark = found.group()
        depth += (mark in "([") - (mark in ")]")
        if depth < 0:
            return False
        if depth == 0 and mark == "=":
            return True
    return False


def _opens_group(code: str) -> bool:
    """Whether lines below `code` are a group of their own, where a row may begin with a sign."""
    return code.endswith(":") or _TABLE_HEAD.match(code.lstrip()) is not None


def _depth(code: str) -> int:
    if '"' in code:
        code = re.sub(r'"[^"]*"', "", code)
    return code.count("(") + code.count("[") - code.count(")") - code.count("]")


def _never_closed(text: str) -> int:
    """Offset of the outermost bracket of `text` that nothing closes."""
    opened: list[int] = []
    for found in re.finditer(r'"[^"\n]*"|#[^\n]*|[()\[\]]', text):
        mark = found.group()
        if mark in "([":
            opened.append(found.start())
        elif mark in ")]" and opened:
            opened.pop()
    return opened[-1] if opened else 0
