"""One statement in canonical spacing: tokens stay as they are, only the blanks between them change."""

from __future__ import annotations

import re

from eqsheet.syntax.automaton import statement_automaton

Tokens = list[tuple[str, int, int]]

_ENDS_OF_OPERANDS = frozenset(("NAME", "NUMBER", "SIGNED_NUMBER", "TEXT", "UNIT", "PATTERN", "RPAR", "RSQB"))
_SIGNS = frozenset(("PLUS", "MINUS"))
_SPACED = frozenset(("EQUALS", "LESS", "LESS_EQUAL", "GREATER", "GREATER_EQUAL", "UNEQUAL", "PLUS_MINUS"))
_NUMBERS = frozenset(("NUMBER", "SIGNED_NUMBER"))
_NUMBER = re.compile(r"([+-]?)[ \t]*([0-9]+(?:\.[0-9]+)?(?:[eE][+-]?[0-9]+)?)[ ]?(.*)", re.DOTALL)

_PLAIN = re.compile(r"[0-9]+(?:\.[0-9]+)?(?:[eE][+-]?[0-9]+)?")


def spaced(text: str, indent: str) -> str:
    """The logical line `text` in canonical spacing, its further lines indented by `indent`.

    Around ``*`` and ``/`` the author's choice stands, one blank on both sides or none, except after a literal
    with a unit: blanks there keep the operator out of the unit. Breaks and comments inside stay.

    Raises
    ------
    Unexpected, Slip
        Where `text` is no statement.

    >>> spaced("x=a *b-( c[ i - 1 ]+10  )", "")
    'x = a * b - (c[i-1] + 10)'
    """
    tokens = statement_automaton().read(text)[1]
    parts = []
    places = _Places()
    for i, (terminal, start, end) in enumerate(tokens):
        if i:
            gap = text[tokens[i - 1][2] : start]
            if "\n" in gap:
                parts.append(_broken_gap(gap, indent))
            else:
                parts.append(" " * places.blanks(text, tokens, i))
        parts.append(_token(terminal, text[start:end]))
        places.pass_over(terminal)
    return "".join(parts)


def _token(terminal: str, text: str) -> str:
    if terminal in _NUMBERS:
        found = _NUMBER.fullmatch(text)
        assert found is not None, text  # the terminal is made so
        return f"{found[1]}{found[2]} {found[3]}".rstrip()
    if terminal == "LABEL":
        return text[:-1].rstrip() + ":"
    return "new unit" if terminal == "NEW_UNIT" else text


def _broken_gap(gap: str, indent: str) -> str:
    """The gap between two tokens on different lines: its comments and blank lines, then the indentation."""
    first, *inner, _ = gap.split("\n")
    apart = max(2, len(first) - len(first.lstrip(" ")))
    lines = [" " * apart + first.strip() if first.strip() else ""]
    lines += [indent + line.strip() if line.strip() else "" for line in inner]
    return "\n".join(lines) + "\n" + indent


class _Places:
    """Where in the statement the next token stands."""

    def __init__(self) -> None:
        self._brackets: list[str] = []
        self._clause: list[int] = []
        self._tolerance = False
        self._for = False

    def pass_over(self, terminal: str) -> None:
        if terminal in ("LPAR", "LSQB"):
            self._brackets.append(terminal)
        elif terminal in ("RPAR", "RSQB"):
            if self._clause and self._clause[-1] == len(self._brackets):
                self._clause.pop()
            self._brackets.pop()
        elif terminal == "FOR":
            self._for = True
        elif terminal == "IN" and self._for:
            self._clause.append(len(self._brackets))
        elif terminal in ("COMMA", "IF", "COLON"):
            if self._clause and self._clause[-1] == len(self._brackets):
                self._clause.pop()
        elif terminal == "PLUS_MINUS":
            self._tolerance = True

    @property
    def _tight(self) -> bool:
        """Inside subscripts and ranges, where sums are written without blanks: ``T[i-1]``, ``1..N-1``."""
        return "LSQB" in self._brackets or (bool(self._clause) and self._clause[-1] == len(self._brackets))

    def blanks(self, text: str, tokens: Tokens, i: int) -> int:
        """How many blanks belong between the tokens `i` - 1 and `i`, which stand on one line."""
        left = tokens[i - 1][0]
        right = tokens[i][0]
        if left in ("LPAR", "LSQB", "DOT", "CARET") or right in (
            *("RPAR", "RSQB", "DOT", "CARET", "COMMA", "COLON", "LSQB"),
        ):
            return 0
        if right == "LPAR" and left == "NAME":
            return 0
        if left in _SIGNS and _is_prefix(tokens, i - 1):
            return 0
        if self._tolerance and self._brackets and "EQUALS" in (left, right):
            return 0
        if "DOTS" in (left, right):
            return 0 if self._tight else 1
        for operator, place in ((right, i), (left, i - 1)):
            if operator in _SIGNS and not _is_prefix(tokens, place):
                return 0 if self._tight and not _sign_follows(tokens, place) else 1
            if operator in ("STAR", "SLASH"):
                return _around_product(text, tokens, place)
        return 1


def _is_prefix(tokens: Tokens, i: int) -> bool:
    return i == 0 or tokens[i - 1][0] not in _ENDS_OF_OPERANDS


def _sign_follows(tokens: Tokens, i: int) -> bool:
    """Whether another sign comes after token `i`: two together could be read as a tolerance."""
    return tokens[i + 1][0] in ("PLUS", "MINUS", "SIGNED_NUMBER")


def _around_product(text: str, tokens: Tokens, i: int) -> int:
    terminal, start, end = tokens[i - 1]
    if terminal in _NUMBERS and not _PLAIN.fullmatch(text, start, end):
        return 1
    before = text[end : tokens[i][1]]
    after = text[tokens[i][2] : tokens[i + 1][1]]
    return 1 if (before and "\n" not in before) or (after and "\n" not in after) else 0
