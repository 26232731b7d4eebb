"""Completes what is being typed: names, units after a number, keywords and commands at the start of a line."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Iterator

from prompt_toolkit.completion import CompleteEvent, Completer, Completion
from prompt_toolkit.document import Document

from eqsheet.app.editor.words import WORDS
from eqsheet.model.tape import BINARY_FUNCTIONS, UNARY_FUNCTIONS

KEYWORDS = ("require", "show", "define", "off", "new unit")
_INSIDE = ("if", "then", "else", "and", "or", "not", "near", "within", "valid", "in", "pi", "const.")
_COMMANDS = tuple(sorted({w.name for w in WORDS} - {"line", "replace"}))
# A number and a blank, or a unit begun directly after it: what follows is a unit.
_BEGUN = r"(?P<unit>(?:[^\W\d_]+(?:[*/·(][^\W\d_]*|\^[-\d]+)*)?)\Z"
_UNIT = re.compile(rf"(?:^|[^\w.])\d[\d.]*(?:[eE][-+]?\d+)? ?{_BEGUN}")
_IN_UNIT = re.compile(rf"\bin {_BEGUN}")
_LAST_SYMBOL = re.compile(r"[^\W\d]*\Z")
_WORD = re.compile(r"[^\W\d][\w.]*\Z")
_NAMES_AFTER = re.compile(r"\s*(?:off|on|value)\s+[\w.]*\Z")
MOST = 60


class WorksheetCompleter(Completer):
    """Completions for a statement or a command.

    Parameters
    ----------
    names, units : callable
        Names of quantities and definitions, and symbols of units, as they are now.
    """

    def __init__(self, names: Callable[[], Iterable[str]], units: Callable[[], Iterable[str]]) -> None:
        self._names = names
        self._units = units

    def get_completions(self, document: Document, complete_event: CompleteEvent) -> Iterator[Completion]:
        """See `Completer`."""
        before = document.text_before_cursor
        started, candidates = self.candidates(before)
        for candidate in candidates:
            yield Completion(candidate, start_position=-len(started))

    def candidates(self, before: str) -> tuple[str, list[str]]:
        """The word that is begun before the cursor, and what it may become, the likeliest first."""
        line = before.rsplit("\n", 1)[-1]
        if "#" in line:
            return "", []
        unit = _UNIT.search(line) or _IN_UNIT.search(line)
        if unit is not None:
            started = _matched(_LAST_SYMBOL, unit["unit"])
            return started, _beginning(started, sorted(self._units(), key=lambda u: (len(u), u)))
        started = _matched(_WORD, line)
        names = sorted(self._names())
        if _NAMES_AFTER.match(line):
            return started, _beginning(started, names)
        if line[: len(line) - len(started)].strip():
            return started, _beginning(started, [*names, *_functions(), *_INSIDE]) if started else []
        return started, _beginning(started, [*names, *KEYWORDS, *_COMMANDS])


def _matched(pattern: re.Pattern[str], text: str) -> str:
    found = pattern.search(text)
    return found.group() if found else ""


def _functions() -> list[str]:
    return [f"{name}(" for name in sorted({*UNARY_FUNCTIONS, *BINARY_FUNCTIONS})]


def _beginning(started: str, candidates: Iterable[str]) -> list[str]:
    found = [c for c in dict.fromkeys(candidates) if c.startswith(started) and c != started]
    return found[:MOST]
