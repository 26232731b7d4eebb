"""Equations that hold no unknown: repeated knowns, and checks among knowns, true or false."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error, note
from eqsheet.diagnostics.source import Span
from eqsheet.model.evaluate import evaluate_with_evidence
from eqsheet.model.system import EquationItem, EquationSystem
from eqsheet.model.tape import Formula
from eqsheet.worksheet.places import MOST_LABELS, label_of, line_words, span_of
from eqsheet.worksheet.written_values import written

# Knowns are typed with few digits, so an equation among knowns alone holds if it holds to this part of the size
# of its terms.
EQUAL_TO = 1e-9


@dataclass(frozen=True, slots=True)
class Checked:
    """Equations left for the structure (by number), and what was found about the others.

    The order of ``rows`` says which goes first where there are too many: see `_doubtful_last`.
    ``contested`` holds the quantities that are set to several values, so that none can be relied on.
    """

    rows: Sequence[int]
    diagnostics: tuple[Diagnostic, ...]
    contested: frozenset[int] = frozenset()


def check_without_unknowns(
    system: EquationSystem,
    formulas: Sequence[Formula],
    known_values: Mapping[int, float],
    clashing: Collection[int] = (),
) -> Checked:
    """Set aside the equations that hold knowns only, and say whether they are true.

    Parameters
    ----------
    formulas : sequence of Formula
        Of each equation, conditions on knowns settled.
    known_values : mapping of quantity number to SI value
    clashing : collection of int
        Equations whose dimensions do not fit; whether they are true has no meaning.
    """
    rows: list[int] = []
    diagnostics: list[Diagnostic] = []
    setters: dict[int, list[EquationItem]] = {}
    for item in system.equations:
        if item.known >= 0:
            setters.setdefault(item.known, []).append(item)
    repeated = {quantity: items for quantity, items in setters.items() if len(items) > 1}
    contested = frozenset(quantity for quantity, items in repeated.items() if not _one_value(items))
    seen: set[int] = set()
    # A clash is told of one member of a family, and is one of all.
    wrong = {system.equations[number].place.statement for number in clashing}
    for number, (item, formula) in enumerate(zip(system.equations, formulas)):
        if item.known >= 0:
            if item.known not in seen:
                rows.append(number)
                seen.add(item.known)
        elif any(q not in known_values for q in formula.quantities):
            rows.append(number)
        elif item.place.statement not in wrong and contested.isdisjoint(formula.quantities):
            diagnostics.append(_check(system, number, formula, known_values, setters))
    diagnostics += [_set_twice(system, items) for items in repeated.values()]
    return Checked(_doubtful_last(system, rows), tuple(diagnostics), contested)


def _doubtful_last(system: EquationSystem, rows: Sequence[int]) -> tuple[int, ...]:
    """The equations with the knowns last whose quantity another equation has alone on a side.

    Where statements compete, such a known is the likely one too many: ``Q = 20 L/min`` beside ``Q = v*A``.
    """
    explicit = {q for number in rows for q in _alone_on_a_side(system.equations[number])}
    doubtful = [number for number in rows if system.equations[number].known in explicit]
    return (
        (*(n for n in rows if system.equations[n].known not in explicit), *doubtful)
        if doubtful
        else tuple(rows)
    )


def _alone_on_a_side(item: EquationItem) -> list[int]:
    """Quantities that an equation which is no known has alone on its left or right side."""
    if item.known >= 0:
        return []
    tape = item.formula.tape
    sides = [tape.instructions[output] for output in tape.outputs]
    return [item.formula.quantities[entry[1]] for entry in sides if entry[0] == "quantity"]


def _one_value(items: Sequence[EquationItem]) -> bool:
    first = items[0].value
    return all(abs(item.value - first) <= EQUAL_TO * abs(first) for item in items)


def _set_twice(system: EquationSystem, items: Sequence[EquationItem]) -> Diagnostic:
    """One diagnostic for a quantity however often it is set."""
    items = sorted(items, key=lambda item: _in_text(span_of(system, item.place)))
    first, again, *more = items
    name = system.names[first.known]
    count = "twice" if not more else f"{len(items)} times"
    same = " to the same value" if _one_value(items) else ""
    return error(
        "set-twice",
        f"`{name}` is set {count}{same} on {line_words(system, [item.place for item in items])}",
        label_of(system, again.place, "again here"),
        label_of(system, first.place, "first here"),
        *[label_of(system, item.place, "and here") for item in more[: MOST_LABELS - 2]],
        help="keep one of the lines, or switch the others `off`"
        if more
        else "keep one of the two lines, or switch one `off`",
    )


def _in_text(span: Span) -> tuple[bool, bool, str, int]:
    """Order of reading: the worksheet itself, its other files by name, then what is given for this run."""
    return not span.source.numbered, span.source.attached, span.source.name, span.start


def _check(
    system: EquationSystem,
    number: int,
    formula: Formula,
    known_values: Mapping[int, float],
    setters: Mapping[int, Sequence[EquationItem]],
) -> Diagnostic:
    item = system.equations[number]
    evidence = evaluate_with_evidence(
        formula.tape,
        [known_values[q] for q in formula.quantities],
        [literal.value for literal in formula.literals],
    )
    left, right = formula.tape.outputs
    gap = abs(evidence.values[left] - evidence.values[right])
    size = max(evidence.sizes[left], evidence.sizes[right])
    here = Label(span_of(system, item.place))
    text = span_of(system, item.place).text
    if gap <= EQUAL_TO * size + evidence.errors[left] + evidence.errors[right]:
        return note(
            "equation-always-true",
            f"`{text}` holds no unknown, and is true",
            here,
        )
    knowns = [setters[q][0] for q in formula.quantities if q in setters]
    names = ", ".join(f"`{system.names[k.known]}`" for k in knowns)
    sides = f"left side {written(evidence.values[left])}, right side {written(evidence.values[right])}, in SI units"
    return error(
        "equation-always-false",
        f"`{text}` holds no unknown, and is false",
        here,
        *(label_of(system, k.place, f"`{system.names[k.known]}` is set here") for k in knowns),
        notes=(sides,),
        help=f"switch this line `off`, or one of those that set {names}" if names else "correct the equation",
    )
