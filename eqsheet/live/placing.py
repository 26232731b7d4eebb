"""Where a typed statement goes, and what it looks like there."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise

from eqsheet.diagnostics.source import Source
from eqsheet.live.identity import replaced_by
from eqsheet.live.lines import Edit
from eqsheet.live.parts import Part, part_replaced_by
from eqsheet.syntax.lines import logical_lines, split_comment
from eqsheet.syntax.nodes import Document, Prose, Statement
from eqsheet.syntax.parse import parse_statement


def placed(text: str, lines: Sequence[str], document: Document, section: str | None) -> Edit:
    """The edit that brings `text` into the worksheet.

    Parameters
    ----------
    text : str
        What was typed: one statement, or prose, or something broken, which is taken in as it is.
    lines : sequence of str
    document : Document
        Of `lines`.
    section : str or None
        Title of the section last touched; what replaces nothing goes to its end. None for the end of all.
    """
    statement, found = parse_statement(Source("typed", text))
    if statement is not None and not found:
        old = replaced_by(statement, document.statements)
        if old is not None:
            first, last = span_of_lines(old, lines)
            new = _in_place_of(text, statement, lines[first : last + 1], old)
            return Edit(first, tuple(lines[first : last + 1]), new)
        part = part_replaced_by(statement, document.statements)
        if part is not None:
            return _with_part(lines, *part)
    at = len(lines) if text.startswith("##") else end_of_section(lines, document, section)
    new = tuple(text.split("\n"))
    if text.startswith("##") and at > 0 and lines[at - 1].strip():
        new = ("", *new)
    return Edit(at, (), new)


def pieces(text: str) -> list[str]:
    """The statements and lines of prose in `text`, each by itself, groups with their heads.

    >>> pieces("D = 5 mm  # bore\\n# a note\\nL = 2 m +\\n  3 m")
    ['D = 5 mm  # bore', '# a note', 'L = 2 m +\\n  3 m']
    """
    lines = text.split("\n")
    cut = logical_lines(Source("typed", text))
    outermost = min((line.indent for line in cut.logical), default=0)
    starts = {line.line - 1 for line in cut.logical if line.indent <= outermost}
    inside = {line.line - 1 + k for line in cut.logical for k in range(1 + line.text.count("\n"))} - starts
    starts.update(prose.line - 1 for prose in cut.prose if prose.line - 1 not in inside)
    starts.discard(0)
    edges = [0, *sorted(starts), len(lines)]
    found = ["\n".join(lines[a:b]).rstrip() for a, b in pairwise(edges)]
    return [piece for piece in found if piece.strip()]


def span_of_lines(statement: Statement, lines: Sequence[str]) -> tuple[int, int]:
    """First and last line index (from 0) of a statement, without its group."""
    first = statement.line.line - 1
    return first, min(first + statement.line.text.count("\n"), len(lines) - 1)


def statement_at(document: Document, index: int) -> Statement | None:
    """The statement, inside a group or not, that the line of that index (from 0) is part of, or None."""
    stack = list(document.statements)
    while stack:
        statement = stack.pop()
        first = statement.line.line - 1
        if first <= index <= first + statement.line.text.count("\n"):
            return statement
        stack.extend(statement.body)
    return None


def section_at(document: Document, index: int) -> str:
    """Title of the section the line of that index stands in; empty before the first."""
    title = ""
    for prose in document.prose:
        if prose.title and prose.line - 1 <= index:
            title = prose.title
    return title


def end_of_section(lines: Sequence[str], document: Document, section: str | None) -> int:
    """Index of the line before which something is added to the section: after its last line that is not blank."""
    end = len(lines)
    start = 0
    if section is not None:
        headings = [p for p in document.prose if p.title]
        start, end = _bounds(headings, section, len(lines))
    while end > start and not lines[end - 1].strip():
        end -= 1
    return end


def _bounds(headings: Sequence[Prose], section: str, count: int) -> tuple[int, int]:
    """First line index and end of a section; of the last of that title."""
    if not section:
        return 0, headings[0].line - 1 if headings else count
    for i in range(len(headings) - 1, -1, -1):
        if headings[i].title == section:
            return headings[i].line, headings[i + 1].line - 1 if i + 1 < len(headings) else count
    return 0, count


def _in_place_of(text: str, typed: Statement, taken: Sequence[str], old: Statement) -> tuple[str, ...]:
    """The typed lines with label, comment and indentation of the old statement, unless given anew."""
    indent = taken[0][: len(taken[0]) - len(taken[0].lstrip())]
    new = text.split("\n")
    new[0] = new[0].lstrip()
    if old.label and not typed.label:
        new[0] = _labelled(new[0], old.label, typed.off)
    new[0] = indent + new[0]
    if not typed.line.comment and old.line.comment:
        code, comment = split_comment(taken[-1])
        new[-1] = _commented(new[-1].rstrip(), code, comment or "")
    else:
        new[-1] = realigned(new[-1], taken[-1])
    return tuple(new)


def realigned(new: str, old: str) -> str:
    """The new line with its comment in the column of the old one's, where the comment is the same.

    >>> realigned("D = 5 mm  # bore", "D = 52.5 mm  # bore")
    'D = 5 mm     # bore'
    """
    code, comment = split_comment(new)
    before, same = split_comment(old)
    if comment is None or comment != same or code.strip() == before.strip():
        return new
    return _commented(new, before, comment)


def _with_part(lines: Sequence[str], old: Statement, part: Part) -> Edit:
    """The edit that writes a part of a statement of one line anew."""
    index = old.line.line - 1
    line = lines[index]
    start, end, text = part
    lead = len(line) - len(line.lstrip())
    return Edit(index, (line,), (realigned(line[: lead + start] + text + line[lead + end :], line),))


def _labelled(line: str, label: str, off: bool) -> str:
    if off:
        rest = line.removeprefix("off").lstrip()
        return f"off {label}: {rest}"
    return f"{label}: {line}"


def _commented(line: str, code: str, comment: str) -> str:
    """The line with the comment in the column where it stood, if there is room."""
    new = split_comment(line)[0].rstrip()
    gap = max(len(code) - len(new), 1 if code != code.rstrip() else 0)
    return f"{new}{' ' * gap}#{comment}"
