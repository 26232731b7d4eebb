"""The parser of one statement: lark's LALR(1) tables, driven so that nodes are built as productions complete.

lark reads the grammar and computes the tables; they are run here and not by lark's own loop, because a
worksheet of many short statements spends its time in that loop: productions that only pass a value on
(``sum: product``) are followed once for each (state, symbol, next terminal) and then remembered, and the
scanner looks only for what can stand where it is.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Mapping
from functools import cache
from typing import Any, NamedTuple, TypeAlias

from eqsheet.syntax.grammar_files import grammar_text
from eqsheet.syntax.slip import Unexpected


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


_WORDS_OF_STATEMENTS = _words(
    "LABEL PATTERN OFF REQUIRE SHOW DEFINE NEW_UNIT FOR ROWS CURVE TEMPLATE SHARED USE INCLUDE"
)
_OPERANDS = _words("SIGNED_NUMBER NUMBER IF NOT NAME LPAR MINUS PLUS TEXT DOTS")
_AFTER_OPERAND = _words(
    "PLUS_MINUS STAR SLASH PLUS MINUS CARET LPAR RPAR COMMA EQUALS LESS_EQUAL GREATER_EQUAL UNEQUAL LESS "
    "GREATER DOTS DOT LSQB RSQB COLON THEN ELSE AND OR IN NEAR WITHIN VALID FROM OF BY AS FOR IF"
)
# Terminals an operand can end with; after any other, an operand must come (or a unit, after `in`).
_ENDS_OF_OPERANDS = _words("NAME NUMBER SIGNED_NUMBER TEXT UNIT PATTERN RPAR RSQB")

_BLANK = r"\s*(?:#[^\n]*\s*)*"


_blank_match = re.compile(_BLANK).match


def _end_of_blank(text: str, position: int) -> int:
    blank = _blank_match(text, position)
    return blank.end() if blank else position


class _Scanner(NamedTuple):
    start: re.Pattern[str]
    operand: re.Pattern[str]
    after: re.Pattern[str]
    unit: re.Pattern[str]


class Automaton:
    """Tables and scanners of a grammar, with the actions that make its nodes.

    Parameters
    ----------
    grammar : str
        In lark's notation; every production of more than one part has an alias.
    actions : mapping of str to Action
        By alias.
    terminals : mapping of str to (terminal, start, end, text) -> value
        Makers for terminals whose value is not the `Token` itself.
    """

    def __init__(
        self,
        grammar: str,
        actions: Mapping[str, Action],
        terminals: Mapping[str, Callable[[int, int, str], Any]],
    ) -> None:
        # Imported here: a worksheet taken from a record or a test of nodes needs no parser.
        import lark
        from lark.lexer import Lexer
        from lark.parsers.lalr_analysis import Shift

        class Unused(Lexer):
            """Stands in for lark's lexer, whose scanners would be compiled for nothing."""

            def __init__(self, configuration: Any) -> None:
                pass

            def lex(self, lexer_state: Any, parser_state: Any) -> Iterator[Any]:
                return iter(())

        engine = lark.Lark(grammar, parser="lalr", lexer=Unused, maybe_placeholders=False)
        configuration = engine.parse_interactive("").parser_state.parse_conf
        number = {state: i for i, state in enumerate(configuration.states)}
        self._first = number[configuration.start_state]
        self._last = number[configuration.end_state]
        self._moves: list[dict[str, Any]] = []
        for table in configuration.states.values():
            moves: dict[str, Any] = {}
            for symbol, (kind, target) in table.items():
                if kind is Shift:
                    moves[symbol] = number[target]
                else:
                    size = len(target.expansion)
                    action = actions[target.alias] if target.alias else None
                    if action is None and size != 1:
                        raise ValueError(f"a production of {target.origin.name} needs an alias")
                    moves[symbol] = (size, action, target.origin.name)
            self._moves.append(moves)
        patterns = {t.name: t.pattern.to_regexp() for t in engine.terminals}
        self._scanner = _Scanner(
            *(
                re.compile(_BLANK + "(?:" + "|".join(f"(?P<{name}>{patterns[name]})" for name in names) + ")")
                for names in (_WORDS_OF_STATEMENTS + _OPERANDS, _OPERANDS, _AFTER_OPERAND, ["UNIT"])
            )
        )
        self._following = dict.fromkeys(_ENDS_OF_OPERANDS, self._scanner.after.match)
        self._following |= {"LABEL": self._scanner.start.match, "OFF": self._scanner.start.match}
        self._makers = dict(terminals)
        self._jumps: dict[tuple[int, str, str], int] = {}

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
        following, operand, unit = self._following, self._scanner.operand.match, self._scanner.unit.match
        match = self._scanner.start.match
        states: list[int] = [self._first]
        values: list[Any] = []
        read: list[tuple[str, int, int]] = []
        length = len(text)
        position = 0
        set_clause = False
        while True:
            state = states[-1]
            found = match(text, position)
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
                match = operand if set_clause else unit
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

    return Automaton(grammar_text(), ACTIONS, TERMINALS)
