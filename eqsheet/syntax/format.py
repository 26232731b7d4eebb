"""Worksheets in canonical layout: same meaning, same comments, even spacing."""

from __future__ import annotations

from eqsheet.diagnostics.source import Source
from eqsheet.syntax.lines import Lines, indentation, logical_lines
from eqsheet.syntax.meaning import same_meaning
from eqsheet.syntax.nodes import LogicalLine
from eqsheet.syntax.parse import parse_document
from eqsheet.syntax.slip import Slip, Unexpected
from eqsheet.syntax.spacing import spaced

INDENT = 4
_MOST_BLANK_LINES = 2

# Where these are found, the indentation does not say what is meant, and is left alone.
_UNSURE = frozenset(("stray-indentation", "nested-too-deeply"))


def format_document(source: Source) -> str:
    """The text of `source` in canonical layout, line ends as ``\\n``.

    One blank round ``=``, comparisons, ``+`` and ``-``; none round ``^``; round ``*`` and ``/`` as the author
    chose, both sides alike; four spaces for each level; at most two blank lines together; two spaces before an
    end comment, or more where the author has set it apart: then it keeps its column. Line breaks, prose, the
    columns of tables and broken statements stay as they are.

    The result is parsed and compared; should it differ in meaning, the text is given back unchanged.

    >>> format_document(Source("a", "x=2*y   #twice\\n\\n\\n\\n\\ny  = 3mm"))
    'x = 2*y  # twice\\n\\n\\ny = 3 mm\\n'
    """
    document, diagnostics = parse_document(source)
    keep = any(diagnostic.code in _UNSURE for diagnostic in diagnostics)
    text = laid_out(source.text, logical_lines(source), keep)
    again, found = parse_document(Source(source.name, text))
    if len(found) > len(diagnostics) or not same_meaning(document, again):
        return source.text
    return text


def laid_out(text: str, lines: Lines, keep_indentation: bool) -> str:
    """`text`, cut up as `lines`, in canonical layout, without the check that its meaning is kept."""
    physical = text.split("\n")
    indents = _indents(lines, keep_indentation)
    result: list[str] = []
    at = 0
    for number, line in enumerate(lines.logical):
        result += _prose(physical[at : line.line - 1], indents, lines, number)
        height = line.text.count("\n") + 1
        at = line.line - 1 + height
        taken = physical[line.line - 1 : at]
        result += _statement(line, taken, indents[number], number in lines.table_rows)
    result += _prose(physical[at:], indents, lines, len(lines.logical))
    return _few_blank_lines(result)


def _statement(line: LogicalLine, taken: list[str], indent: int, row: bool) -> list[str]:
    blank = " " * indent
    if row:
        text = line.text
    else:
        try:
            text = spaced(line.text, blank + " " * INDENT)
        except (Slip, Unexpected):
            return [blank + taken[0].lstrip(), *taken[1:]]
    parts = [part.rstrip() for part in (blank + text).split("\n")]
    if line.comment:
        parts[-1] = f"{parts[-1]}  ".ljust(_column_of_comment(line, taken[-1])) + f"# {line.comment}"
    return parts


def _column_of_comment(line: LogicalLine, written: str) -> int:
    """The column an author has put an end comment in; 0 where it only follows the statement."""
    last = line.text.split("\n")[-1]
    end = written.index(last) + len(last)
    column = written.index("#", end)
    gap = written[end:column]
    return column if len(gap) > 1 and "\t" not in written[:column] else 0


def _indents(lines: Lines, keep: bool) -> list[int]:
    """Indentation of each logical line: four for each level, rows of a table as they stand to one another."""
    if keep:
        return [line.indent for line in lines.logical]
    indents: list[int] = []
    levels: list[int] = []
    for number, line in enumerate(lines.logical):
        if number in lines.table_rows:
            indents.append(line.indent)
            continue
        while levels and line.indent < levels[-1]:
            levels.pop()
        if not levels or line.indent > levels[-1]:
            levels.append(line.indent)
        indents.append(INDENT * (len(levels) - 1))
    _move_tables(lines, indents)
    return indents


def _move_tables(lines: Lines, indents: list[int]) -> None:
    rows = sorted(lines.table_rows)
    while rows:
        first = last = rows[0]
        while last + 1 in lines.table_rows:
            last += 1
        leftmost = min(indents[first : last + 1])
        head = indents[first - 1]
        for row in range(first, last + 1):
            indents[row] += head + INDENT - leftmost
        rows = [row for row in rows if row > last]


def _prose(block: list[str], indents: list[int], lines: Lines, following: int) -> list[str]:
    """Comments and blank lines before the logical line `following`, indented like the line they go with."""
    result = []
    for line in block:
        stripped = line.strip()
        if not stripped:
            result.append("")
            continue
        result.append(" " * _prose_indent(indentation(line), indents, lines, following) + stripped)
    return result


def _prose_indent(written: int, indents: list[int], lines: Lines, following: int) -> int:
    """Indentation for a comment that stands at `written`: that of the line it goes with, after it or before."""
    if following < len(indents) and lines.logical[following].indent == written:
        return indents[following]
    for number in range(following - 1, -1, -1):
        if number not in lines.table_rows and lines.logical[number].indent <= written:
            return indents[number] if lines.logical[number].indent == written else 0
    return 0


def _few_blank_lines(lines: list[str]) -> str:
    kept: list[str] = []
    for line in lines:
        if line or (kept and any(kept[-_MOST_BLANK_LINES:])):
            kept.append(line)
    while kept and not kept[-1]:
        kept.pop()
    return "\n".join(kept) + "\n" if kept else ""
