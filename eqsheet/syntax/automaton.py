"""The parser of one statement: lark's LALR(1) tables, driven so that nodes are built as productions complete.

lark reads the grammar and computes the tables; they are run here and not by lark's own loop, because a
worksheet of many short statements spends its time in that loop: productions that only pass a value on
(``sum: product``) are followed once for each (state, symbol, next terminal) and then remembered, and the
scanner looks only for what can stand where it is.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping, Sequence
from functools import cache, cached_property
from typing import Any, NamedTuple, TypeAlias

from eqsheet.syntax.slip import Unexpected
from eqsheet.syntax.tables import Tables, tables


class Token(NamedTuple):
    """A terminal as met: its name in the grammar, its place and its text."""

    terminal: str
    start: int
    end: int
    text: str


Action: TypeAlias = Callable[[list[Any]], Any]
"""Makes the value of a production from the values of its parts."""


def _words(text: str) -> list[str]:
    return text.split()


_STARTS = _words("LABEL PATTERN OFF REQUIRE SHOW DEFINE NEW_UNIT FOR ROWS CURVE TEMPLATE SHARED USE INCLUDE")
_OPERANDS = _words("SIGNED_NUMBER NUMBER IF NOT NAME LPAR MINUS PLUS TEXT DOTS")
_AFTER_OPERAND = _words(
    "PLUS_MINUS STAR SLASH PLUS MINUS CARET LPAR RPAR COMMA EQUALS LESS_EQUAL GREATER_EQUAL UNEQUAL LESS "
    "GREATER DOTS DOT LSQB RSQB COLON THEN ELSE AND OR IN NEAR WITHIN VALID FROM OF BY AS FOR IF"
)
# Terminals an operand can end with; after any other, an operand must come (or a unit, after `in`).
_ENDS_OF_OPERANDS = _words("NAME NUMBER SIGNED_NUMBER TEXT UNIT PATTERN RPAR RSQB")

_BLANK = r"\s*(?:#[^\n]*\s*)*"


_Match: TypeAlias = Callable[[str, int], "re.Match[str] | None"]

_blank_match = re.compile(_BLANK).match


def _end_of_blank(text: str, position: int) -> int:
    blank = _blank_match(text, position)
    return blank.end() if blank else position


class Automaton:
    """Tables and scanners of a grammar, with the actions that make its nodes.

    Parameters
    ----------
    tables : Tables
    actions : mapping of str to Action
        By alias.
    terminals : mapping of str to (terminal, start, end, text) -> value
        Makers for terminals whose value is not the `Token` itself.
    """

    def __init__(
        self,
        tables: Tables,
        actions: Mapping[str, Action],
        terminals: Mapping[str, Callable[[int, int, str], Any]],
    ) -> None:
        self._first, self._last = tables.first, tables.last
        reductions = [(p.size, actions[p.alias] if p.alias else None, p.origin) for p in tables.productions]
        moves: dict[int, dict[str, Any]] = {}
        for row in tables.states:
            if id(row) not in moves:
                moves[id(row)] = {s: m if m >= 0 else reductions[-1 - m] for s, m in row.items()}
        self._moves = [moves[id(row)] for row in tables.states]
        self._patterns = tables.patterns
        self._start, self._operand, self._after = map(self._scanner, (_STARTS, _OPERANDS, _AFTER_OPERAND))
        self._following = dict.fromkeys(_ENDS_OF_OPERANDS, self._after)
        self._following |= {"LABEL": self._start, "OFF": self._start}
        self._makers = dict(terminals)
        self._jumps: dict[tuple[int, str, str], int] = {}

    def _scanner(self, names: Sequence[str]) -> _Match:
        alternatives = "|".join(f"(?P<{name}>{self._patterns[name]})" for name in names)
        return re.compile(f"{_BLANK}(?:{alternatives})").match

    @cached_property
    def _unit(self) -> _Match:
        return self._scanner(["UNIT"])

    def run(self, text: str) -> Any:
        """The value of the statement `text`; see `read`."""
        return self.read(text)[0]

    def read(self, text: str) -> tuple[Any, list[tuple[str, int, int]]]:
        """The value of the statement `text`, and its tokens (terminal, start, end).

        Raises
        ------
        Unexpected
            Where the text does not fit the grammar.
        Slip
            From an action that refuses what it is given.
        """
        moves, jumps, makers = self._moves, self._jumps, self._makers
        following, operand, match = self._following, self._operand, self._start
        states: list[int] = [self._first]
        values: list[Any] = []
        read: list[tuple[str, int, int]] = []
        length = len(text)
        position = 0
        set_clause = False
        while True:
            state = states[-1]
            found = match(text, position)
            if found is None and match is self._start:
                found = operand(text, position)
            if found is not None:
                terminal: str = found.lastgroup  # type: ignore[assignment]  # every alternative is a named group
                start, end = found.span(terminal)
            else:
                terminal = "$END"
                start = end = _end_of_blank(text, position)
                if end != length:
                    raise self._unexpected(end, read)
            while True:
                move = moves[state].get(terminal)
                if move.__class__ is tuple:
                    size, action, origin = move
                    if action is not None:
                        values[-size:] = [action(values[-size:])]
                    del states[-size:]
                    below = states[-1]
                    jump = jumps.get((below, origin, terminal))
                    if jump is None:
                        jump = self._jump(below, origin, terminal)
                    state = jump
                    states.append(state)
                    if state == self._last:
                        return values[-1], read
                elif move is None:
                    raise self._unexpected(start, read)
                else:
                    break
            states.append(move)
            read.append((terminal, start, end))
            maker = makers.get(terminal)
            if maker is None:
                values.append(Token(terminal, start, end, text[start:end]))
            else:
                values.append(maker(start, end, text[start:end]))
            position = end
            if terminal == "IN":
                # `T in degC` names a unit, `for i in 1..N` a set; after a `for` no unit can follow `in`.
                match = operand if set_clause else self._unit
            else:
                match = following.get(terminal, operand)
                set_clause = set_clause or terminal == "FOR"

    def _jump(self, below: int, origin: str, terminal: str) -> int:
        """The state after `origin` is put on `below`, past productions that only pass its value on."""
        state: int = self._moves[below][origin]
        while state != self._last:
            move = self._moves[state].get(terminal)
            if move.__class__ is not tuple or move[1] is not None:
                break
            state = self._moves[below][move[2]]
        self._jumps[(below, origin, terminal)] = state
        return state

    def _unexpected(self, position: int, read: list[tuple[str, int, int]]) -> Unexpected:
        states = [self._first]
        for terminal, _, _ in read:
            self._feed(states, terminal)
        # LALR merges states, so the table of one also lists terminals that fit only elsewhere: try each.
        listed = sorted(symbol for symbol in self._moves[states[-1]] if symbol.isupper())
        expected = tuple(terminal for terminal in listed if self._feed(list(states), terminal))
        return Unexpected(position, expected, tuple(read))

    def _feed(self, states: list[int], terminal: str) -> bool:
        """Whether `terminal` fits after `states`, which are moved on by it, without any value."""
        while True:
            move = self._moves[states[-1]].get(terminal)
            if move is None:
                return False
            if move.__class__ is not tuple:
                states.append(move)
                return True
            size, _, origin = move
            del states[-size:]
            states.append(self._moves[states[-1]][origin])
            if states[-1] == self._last:
                return True


@cache
def statement_automaton() -> Automaton:
    """The one automaton for statements, made when first wanted."""
    from eqsheet.syntax.build_statements import ACTIONS, TERMINALS

    return Automaton(tables(), ACTIONS, TERMINALS)
