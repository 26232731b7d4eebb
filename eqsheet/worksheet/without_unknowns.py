"""Equations that hold no unknown: repeated knowns, and checks among knowns, true or false."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error, note
from eqsheet.model.evaluate import evaluate_with_evidence
from eqsheet.model.system import EquationSystem
from eqsheet.model.tape import Formula
from eqsheet.worksheet.places import label_of, line_words, span_of
from eqsheet.worksheet.written_values import written

# Knowns are typed with few digits, so an equation among knowns alone holds if it holds to this part of the size
# of its terms.
EQUAL_TO = 1e-9


@dataclass(frozen=True, slots=True)
class Checked:
    """Equations left for the structure (by number), and what was found about the others."""

    rows: tuple[int, ...]
    diagnostics: tuple[Diagnostic, ...]


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
    setter: dict[int, int] = {}
    for number, (item, formula) in enumerate(zip(system.equations, formulas)):
        if item.known >= 0:
            first = setter.setdefault(item.known, number)
            if first == number:
                rows.append(number)
            else:
                diagnostics.append(_set_twice(system, first, number))
        elif any(q not in known_values for q in formula.quantities):
            rows.append(number)
        elif number not in clashing:
            diagnostics.append(_check(system, number, formula, known_values, setter))
    return Checked(tuple(rows), tuple(diagnostics))


def _set_twice(system: EquationSystem, first: int, second: int) -> Diagnostic:
    a, b = system.equations[first], system.equations[second]
    if a.place.statement > b.place.statement:
        a, b = b, a
    name = system.names[a.known]
    same = "to the same value " if a.value == b.value else ""
    return error(
        "set-twice",
        f"`{name}` is set twice {same}on {line_words(system, (a.place, b.place))}".replace("  ", " "),
        label_of(system, b.place, "again here"),
        label_of(system, a.place, "first here"),
        help="keep one of the two lines, or switch one `off`",
    )


def _check(
    system: EquationSystem,
    number: int,
    formula: Formula,
    known_values: Mapping[int, float],
    setter: Mapping[int, int],
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
    knowns = [system.equations[setter[q]] for q in formula.quantities if q in setter]
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
