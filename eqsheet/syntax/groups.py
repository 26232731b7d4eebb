"""Indented groups: which statement stands inside which, and whether colon and group go together."""

from __future__ import annotations

import re
from collections.abc import Sequence
from typing import NamedTuple

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.diagnostics.source import Source, Span
from eqsheet.syntax.build_statements import Parsed
from eqsheet.syntax.nodes import Curve, Family, LogicalLine, Prose, Rows, Statement, Template, Use
from eqsheet.syntax.remarks import remarks


class Line(NamedTuple):
    """A logical line and the statement it holds, None where it is broken."""

    line: LogicalLine
    parsed: Parsed | None


# Groups inside groups beyond this are a mishap of indentation, not a worksheet.
_DEEPEST_GROUP = 20

_TABLES = (Rows, Curve)
_BROKEN_HEAD = re.compile(r"(?:off[ \t]+|\w+[ \t]*:[ \t]*)*(?:for|rows|curve|surface|template|use)(?!\w)")


def statements_of(
    source: Source, lines: Sequence[Line], prose: tuple[Prose, ...]
) -> tuple[tuple[Statement, ...], tuple[Diagnostic, ...]]:
    """The statements with their groups, and what is wrong with the grouping."""
    grouping = _Grouping(source, lines, prose)
    outermost = min((line.line.indent for line in lines), default=0)
    statements = grouping.group(outermost, False, 0)
    return statements, (*grouping.diagnostics, *mixed_indentation(source, lines))


def mixed_indentation(source: Source, lines: Sequence[Line]) -> tuple[Diagnostic, ...]:
    """A diagnostic at the first line indented by other characters than the lines before it."""
    if "\t" not in source.text:
        return ()
    used = ""
    for line, _ in lines:
        start = source.line_starts[line.line - 1]
        blank = source.text[start : line.offset]
        used = used or blank[:1]
        if blank.strip(used or None):
            return (
                error(
                    "mixed-indentation",
                    "tabs and spaces are mixed in the indentation",
                    Label(Span(source, start, line.offset)),
                    help="indent with spaces only, four for each level",
                ),
            )
    return ()


class _Grouping:
    def __init__(self, source: Source, lines: Sequence[Line], prose: tuple[Prose, ...]) -> None:
        self._source = source
        self._lines = lines
        self._next = 0
        self._headings = [note for note in prose if note.title]
        self._heading = 0
        self._section = ""
        self.diagnostics: list[Diagnostic] = []

    def group(self, indent: int, off: bool, depth: int) -> tuple[Statement, ...]:
        """The statements from the next line on, down to the first that is indented less than `indent`."""
        statements = []
        lines = self._lines
        stray = indent
        may_hold_group = False
        while self._next < len(lines):
            line, parsed = lines[self._next]
            if line.indent < indent:
                break
            if line.indent > indent and line.indent != stray and not may_hold_group:
                self._refuse_indent(line)
            stray = line.indent
            self._next += 1
            section = self._section_at(line.line)
            if parsed is None:
                may_hold_group = self._skip_group_of_broken(line)
                continue
            may_hold_group = False
            body = self._body(line, parsed, off or parsed.off, depth)
            description, origin, assumption = remarks(line.comment)
            statements.append(
                Statement(
                    parsed.node,
                    line,
                    self._source,
                    parsed.label,
                    off or parsed.off,
                    description,
                    origin,
                    assumption,
                    section,
                    body,
                )
            )
        return tuple(statements)

    def _section_at(self, line: int) -> str:
        while self._heading < len(self._headings) and self._headings[self._heading].line < line:
            self._section = self._headings[self._heading].title
            self._heading += 1
        return self._section

    def _indent_below(self, line: LogicalLine) -> int | None:
        """Indentation of the next line if it stands in a group below `line`."""
        if self._next < len(self._lines):
            below = self._lines[self._next].line.indent
            if below > line.indent:
                return below
        return None

    def _body(self, line: LogicalLine, parsed: Parsed, off: bool, depth: int) -> tuple[Statement, ...]:
        node = parsed.node
        below = self._indent_below(line)
        table = isinstance(node, _TABLES) and node.path is None
        if not table and not isinstance(node, (Family, Template, Use)):
            return ()
        colon = not isinstance(node, Use) or line.text.endswith(":")
        if below is None:
            if colon:
                self._refuse_colon(line)
            return ()
        if not colon:
            self._want_colon(line)
        if depth >= _DEEPEST_GROUP:
            self.diagnostics.append(
                error(
                    "nested-too-deeply",
                    f"groups stand more than {_DEEPEST_GROUP} deep here",
                    Label(self._place(line, 0, len(line.text))),
                    help="write the inner groups as templates",
                )
            )
            self._skip_group(line)
            return ()
        return self._table(line, off) if table else self.group(below, off, depth + 1)

    def _table(self, head: LogicalLine, off: bool) -> tuple[Statement, ...]:
        """Rows below `head`; their indentation may vary, as columns of numbers are set to the right."""
        rows = []
        while self._next < len(self._lines) and self._lines[self._next].line.indent > head.indent:
            line, parsed = self._lines[self._next]
            self._next += 1
            if parsed is not None:
                description, origin, assumption = remarks(line.comment)
                rows.append(
                    Statement(
                        parsed.node,
                        line,
                        self._source,
                        off=off,
                        description=description,
                        origin=origin,
                        assumption=assumption,
                        section=self._section,
                    )
                )
        return tuple(rows)

    def _skip_group_of_broken(self, line: LogicalLine) -> bool:
        """Passes over the group of a broken head; whether the broken line might be one."""
        below = self._indent_below(line)
        if below is None or not (line.text.endswith(":") or _BROKEN_HEAD.match(line.text)):
            return True
        self._skip_group(line)
        return False

    def _skip_group(self, head: LogicalLine) -> None:
        while self._next < len(self._lines) and self._lines[self._next].line.indent > head.indent:
            self._next += 1

    def _place(self, line: LogicalLine, start: int, end: int) -> Span:
        return Span(self._source, line.offset + start, line.offset + end)

    def _refuse_indent(self, line: LogicalLine) -> None:
        self.diagnostics.append(
            error(
                "stray-indentation",
                "this line is indented, but the line above it opens no group",
                Label(self._place(line, 0, min(len(line.text), 40))),
                help="start it where the lines above start; only `for`, `rows`, `curve`, `surface`, `template` and "
                "`use` have indented lines below; to go on with a statement, end its line with an operator",
            )
        )

    def _refuse_colon(self, line: LogicalLine) -> None:
        colon = line.text.rfind(":")
        self.diagnostics.append(
            error(
                "empty-group",
                "nothing stands indented below this line",
                Label(self._place(line, colon, colon + 1)),
                help="indent the lines that belong to it by four spaces",
            )
        )

    def _want_colon(self, line: LogicalLine) -> None:
        self.diagnostics.append(
            error(
                "colon-missing",
                "a colon is missing before the indented lines",
                Label(self._place(line, len(line.text) - 1, len(line.text))),
                help="end this line with a colon",
            )
        )
