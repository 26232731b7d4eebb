"""The LALR(1) tables of the grammar: computed by lark, or read as they were written when the grammar last changed.

Computing them takes longer than reading, modelling and solving a worksheet of a page, so they are kept in
``tables.json`` beside this module, with a digest of the grammar they belong to; where it does not fit the
grammar at hand, they are computed anew. After a change of the grammar, run::

    python -m eqsheet.syntax.tables
"""

from __future__ import annotations

import json
from collections.abc import Iterator
from dataclasses import dataclass
from hashlib import sha256
from pathlib import Path
from typing import Any, NamedTuple, TypeAlias

from eqsheet.syntax.grammar_files import grammar_text

KEPT = Path(__file__).resolve().with_name("tables.json")


class Production(NamedTuple):
    """A production: how many parts it has, its alias (None: it passes its one part on), what it makes."""

    size: int
    alias: str | None
    origin: str


Moves: TypeAlias = dict[str, int]
"""By symbol: the state to go to, or ``-1 - n`` to reduce by production n."""


@dataclass(frozen=True, slots=True)
class Tables:
    """What the automaton runs on.

    Attributes
    ----------
    first, last : int
        The state to begin in, and the one in which a statement is complete.
    states : tuple of Moves
    productions : tuple of Production
    patterns : dict of str to str
        Regular expression of each terminal.
    """

    first: int
    last: int
    states: tuple[Moves, ...]
    productions: tuple[Production, ...]
    patterns: dict[str, str]


def tables() -> Tables:
    """The tables of the grammar: the kept ones if they belong to it, else computed."""
    grammar = grammar_text()
    return kept_tables(grammar) or computed_tables(grammar)


def kept_tables(grammar: str) -> Tables | None:
    """The tables kept for `grammar`; None where they are of another, or missing."""
    try:
        kept = json.loads(KEPT.read_text(encoding="utf-8"))
    except FileNotFoundError:
        return None
    if kept["grammar"] != _digest(grammar):
        return None
    productions = tuple(Production(*parts) for parts in kept["productions"])
    # Many states share their moves; nothing changes them.
    states = tuple(kept["moves"][row] for row in kept["states"])
    return Tables(kept["first"], kept["last"], states, productions, kept["patterns"])


def computed_tables(grammar: str) -> Tables:
    """The tables of `grammar`, computed by lark.

    Raises
    ------
    ValueError
        A production of more than one part has no alias.
    """
    # Imported here: where the kept tables fit, lark is not needed to run.
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
    order = _order(configuration.states, configuration.start_state, Shift)
    number = {state: i for i, state in enumerate(order)}
    productions: dict[Production, int] = {}
    states = []
    for state in order:
        moves: Moves = {}
        for symbol, (kind, target) in sorted(configuration.states[state].items()):
            if kind is Shift:
                moves[symbol] = number[target]
                continue
            production = Production(len(target.expansion), target.alias or None, str(target.origin.name))
            if production.alias is None and production.size != 1:
                raise ValueError(f"a production of {production.origin} needs an alias")
            moves[symbol] = -1 - productions.setdefault(production, len(productions))
        states.append(moves)
    patterns = {terminal.name: terminal.pattern.to_regexp() for terminal in engine.terminals}
    return Tables(
        number[configuration.start_state],
        number[configuration.end_state],
        tuple(states),
        tuple(productions),
        dict(sorted(patterns.items())),
    )


def _order(states: dict[Any, dict[str, Any]], first: Any, shift: Any) -> list[Any]:
    """States in the order in which they are met from `first`; lark's own changes from run to run."""
    met = {first: None}
    waiting = [first]
    for state in waiting:
        for _, (kind, target) in sorted(states[state].items()):
            if kind is shift and target not in met:
                met[target] = None
                waiting.append(target)
    return list(met)


def written_tables(grammar: str, made: Tables) -> str:
    """The text that keeps `made`, the tables of `grammar`."""
    rows: dict[str, int] = {}
    states = [rows.setdefault(json.dumps(moves), len(rows)) for moves in made.states]
    return (
        '{"grammar": '
        + json.dumps(_digest(grammar))
        + f',\n"first": {made.first}, "last": {made.last},\n"productions": '
        + json.dumps(made.productions)
        + f',\n"states": {json.dumps(states)},\n"moves": [\n'
        + ",\n".join(rows)
        + '],\n"patterns": '
        + json.dumps(made.patterns, indent=0, ensure_ascii=False)
        + "}\n"
    )


def _digest(grammar: str) -> str:
    return sha256(grammar.encode()).hexdigest()


if __name__ == "__main__":
    text = grammar_text()
    KEPT.write_text(written_tables(text, computed_tables(text)), encoding="utf-8")
