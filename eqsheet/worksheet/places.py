"""Places of the equation system as spans, labels and words."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from eqsheet.diagnostics.diagnostic import Label
from eqsheet.diagnostics.source import Span
from eqsheet.model.system import EquationSystem, Place

# Longer lists are folded: a reader acts on the first few and searches for the rest.
MOST_LISTED = 8
# A diagnostic with more places than this does not fit a screen.
MOST_LABELS = 6


def span_of(system: EquationSystem, place: Place) -> Span:
    """The span of a place."""
    return system.statements[place.statement].span(place.start, place.end)


def label_of(system: EquationSystem, place: Place, text: str = "") -> Label:
    """A label at a place."""
    return Label(span_of(system, place), text)


def line_words(system: EquationSystem, places: Iterable[Place]) -> str:
    """``line 3``, ``lines 3, 5 and 9``, ``line 3 of bus.csv``; the source's name where lines mean nothing.

    Lines are in ascending order, each once; those of the worksheet itself come first.
    """
    numbers: dict[str, set[int]] = {"": set()}
    others: set[str] = set()
    for place in places:
        statement = system.statements[place.statement]
        if statement.source.numbered:
            file = statement.source.name if statement.source.attached else ""
            numbers.setdefault(file, set()).add(statement.line.line)
        else:
            others.add(statement.source.name)
    words = []
    for file in sorted(numbers):
        if numbers[file]:
            lines = listed([str(n) for n in sorted(numbers[file])])
            words.append(f"line{'s' * (len(numbers[file]) > 1)} {lines}" + (f" of {file}" if file else ""))
    return " and ".join([*words, *sorted(others)])


def equation_words(system: EquationSystem, number: int) -> str:
    """``line 3``, and of a family which member: ``line 3 (i = 5)``."""
    item = system.equations[number]
    place = line_words(system, (item.place,))
    return f"{place} ({item.member})" if item.member else place


def listed(words: list[str], joint: str = "and") -> str:
    """``a``, ``a and b``, ``a, b and c``; long lists are folded.

    >>> listed(["a", "b", "c"])
    'a, b and c'
    """
    if len(words) > MOST_LISTED:
        words = [*words[: MOST_LISTED - 1], f"{len(words) - MOST_LISTED + 1} more"]
    if len(words) < 2:
        return "".join(words)
    return f"{', '.join(words[:-1])} {joint} {words[-1]}"


def quoted(names: Iterable[str], joint: str = "and") -> str:
    """Names in backquotes, listed."""
    every = names if isinstance(names, Sequence) else tuple(names)
    # Folded here, since a large family has more names than are worth putting in quotes.
    shown = every if len(every) <= MOST_LISTED else every[: MOST_LISTED - 1]
    words = [f"`{name}`" for name in shown]
    if len(shown) < len(every):
        words.append(f"{len(every) - len(shown)} more")
    return listed(words, joint)
