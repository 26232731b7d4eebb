"""Texts to documents: each logical line parsed by itself, then put into its group, with diagnostics."""

from __future__ import annotations

from functools import lru_cache

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.diagnostics.source import Source, Span
from eqsheet.syntax.automaton import statement_automaton
from eqsheet.syntax.bounds import LONGEST_STATEMENT, MOST_BROKEN_STATEMENTS, MOST_STATEMENTS
from eqsheet.syntax.build_statements import Parsed
from eqsheet.syntax.characters import refuse_foreign_characters
from eqsheet.syntax.depth import refuse_deep_brackets, refuse_deep_expression
from eqsheet.syntax.groups import Line, statements_of
from eqsheet.syntax.lines import Lines, logical_lines
from eqsheet.syntax.nodes import Document, LogicalLine, Statement
from eqsheet.syntax.slip import Slip, Unexpected
from eqsheet.syntax.slips import slip_of
from eqsheet.syntax.table import table_row

# Longer texts than this are rare; remembering them would make the bound on memory meaningless.
_REMEMBERED_LENGTH = 2000


def parse_document(source: Source) -> tuple[Document, tuple[Diagnostic, ...]]:
    """The document that `source` holds, broken statements left out, and what is wrong with it.

    >>> document, diagnostics = parse_document(Source("a", "x = 2*y\\ny = (3 m"))
    >>> [type(s.node).__name__ for s in document.statements], [d.code for d in diagnostics]
    (['Equation'], ['bracket-not-closed'])
    """
    cut = logical_lines(source)
    if len(cut.logical) - len(cut.table_rows) > MOST_STATEMENTS:
        return Document(source, (), cut.prose), (_too_large(source, cut.logical[MOST_STATEMENTS]),)
    diagnostics: list[Diagnostic] = []
    lines = []
    for number, line in enumerate(cut.logical):
        if len(diagnostics) >= MOST_BROKEN_STATEMENTS:
            diagnostics.append(_too_many(source, line))
            break
        parsed = None
        try:
            parsed = _parsed(cut, number, line)
        except Slip as slip:
            diagnostics.append(_diagnostic(slip, source, line))
        lines.append(Line(line, parsed))
    statements, found = statements_of(source, lines, cut.prose)
    diagnostics.extend(found)
    diagnostics.sort(key=lambda d: d.span.start if d.span else 0)
    return Document(source, statements, cut.prose), tuple(diagnostics)


def parse_statement(source: Source) -> tuple[Statement | None, tuple[Diagnostic, ...]]:
    """The one statement that `source` holds (with its group, if it has one), or None, and what is wrong."""
    document, diagnostics = parse_document(source)
    if len(document.statements) == 1 or diagnostics:
        return (document.statements[0] if document.statements else None), diagnostics
    if not document.statements:
        return None, (error("no-statement", "there is no statement here", Label(Span(source, 0, 0))),)
    second = document.statements[1]
    return document.statements[0], (
        error(
            "one-statement",
            "only one statement can stand here",
            Label(second.whole),
            help="give each statement by itself",
        ),
    )


def _parsed(cut: Lines, number: int, line: LogicalLine) -> Parsed:
    text = line.text
    if len(text) > LONGEST_STATEMENT:
        raise Slip(
            "statement-too-long",
            f"this statement has {len(text):,} characters; the limit is {LONGEST_STATEMENT:,}",
            0,
            min(len(text), 40),
            "name parts of the expression and use the names",
        )
    if number in cut.table_rows:
        return Parsed(table_row(text))
    if number in cut.open_brackets:
        offset = cut.open_brackets[number]
        refuse_deep_brackets(text)
        raise Slip(
            "bracket-not-closed",
            f"the bracket `{text[offset]}` is never closed",
            offset,
            offset + 1,
            "write " + ("`)`" if text[offset] == "(" else "`]`") + " where it ends",
        )
    if len(text) > _REMEMBERED_LENGTH:
        return parsed_text(text)
    found = _remembered(text)
    if isinstance(found, Slip):
        # A fresh one: raising a remembered exception would let its traceback grow.
        raise Slip(found.code, found.message, found.start, found.end, found.help, found.notes)
    return found


@lru_cache(maxsize=16384)
def _remembered(text: str) -> Parsed | Slip:
    try:
        return parsed_text(text)
    except Slip as slip:
        return slip.with_traceback(None)


def parsed_text(text: str) -> Parsed:
    """The statement that the text of one logical line holds.

    Raises
    ------
    Slip
        What keeps it from being read.
    """
    if not text.isascii():
        refuse_foreign_characters(text)
    refuse_deep_brackets(text)
    try:
        parsed: Parsed = statement_automaton().run(text)
    except Unexpected as unexpected:
        raise slip_of(text, unexpected) from None
    refuse_deep_expression(text, parsed.node)
    return parsed


def _diagnostic(slip: Slip, source: Source, line: LogicalLine) -> Diagnostic:
    span = Span(source, line.offset + slip.start, line.offset + slip.end)
    return error(slip.code, slip.message, Label(span), notes=slip.notes, help=slip.help)


def _too_large(source: Source, line: LogicalLine) -> Diagnostic:
    return error(
        "too-many-statements",
        f"the worksheet has more than {MOST_STATEMENTS:,} statements",
        Label(Span(source, line.offset, line.offset + len(line.text))),
        help="write equations that differ only in an index as a family: `for i in 1..N:`",
    )


def _too_many(source: Source, line: LogicalLine) -> Diagnostic:
    return error(
        "too-many-broken",
        f"{MOST_BROKEN_STATEMENTS} statements are broken; the rest of the text was not read",
        Label(Span(source, line.offset, line.offset + len(line.text))),
        help="check that this is a worksheet",
    )
