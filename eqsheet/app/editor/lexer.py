"""Highlights statements with restraint: keywords bold, comments slanted; colour is kept for severity."""

from __future__ import annotations

import re
from collections.abc import Callable

from prompt_toolkit.document import Document
from prompt_toolkit.formatted_text import StyleAndTextTuples
from prompt_toolkit.lexers import Lexer

from eqsheet.syntax.lines import split_comment

_KEYWORD = re.compile(
    r"^\s*(?:require|show|define|off|new\s+unit|for|rows|curve|surface|template|shared|use|include)\b"
    r"|\b(?:if|then|else|and|or|not|valid)\b|(?<=\w)\s+(?:near|within|in)\b"
)


class WorksheetLexer(Lexer):
    """Fragments of each line with the classes ``keyword`` and ``comment``."""

    def lex_document(self, document: Document) -> Callable[[int], StyleAndTextTuples]:
        """See `Lexer`."""
        lines = document.lines

        def line(number: int) -> StyleAndTextTuples:
            return fragments(lines[number]) if number < len(lines) else []

        return line


def fragments(line: str) -> StyleAndTextTuples:
    """The pieces of one line with their styles.

    >>> fragments("show V in L/min  # flow")
    [('class:keyword', 'show'), ('', ' V'), ('class:keyword', ' in'), ('', ' L/min  '), ('class:comment', '# flow')]
    """
    code = split_comment(line)[0]
    found: StyleAndTextTuples = []
    done = 0
    for keyword in _KEYWORD.finditer(code):
        found.append(("", code[done : keyword.start()]))
        found.append(("class:keyword", keyword.group()))
        done = keyword.end()
    found.append(("", code[done:]))
    found.append(("class:comment", line[len(code) :]))
    return [piece for piece in found if piece[1]]
