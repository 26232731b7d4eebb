"""Warns of angles without a unit that are hardly radians: ``cos(30)``, and ``alpha = 30`` used in ``cos(alpha)``.

Only whole numbers beyond a full turn are doubted, and only where they stand as the argument themselves: what is worked
out, ``sin(2*pi*50*t)``, is in radians in every textbook.
"""

from __future__ import annotations

import math
import re
from collections.abc import Sequence

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, warning
from eqsheet.model.tape import Formula, Tape
from eqsheet.syntax.nodes import Equation, Statement

CODE = "angle-without-unit"

_OF_ANGLES = frozenset(("sin", "cos", "tan"))
_WHOLE = re.compile(r"-?[0-9]+")


def bare_angle_diagnostics(
    formulas: Sequence[Formula], statements: Sequence[Statement], names: Sequence[str]
) -> tuple[Diagnostic, ...]:
    """A warning for each whole number beyond a full turn that a sine, cosine or tangent is taken of."""
    arguments: dict[int, tuple[int, ...]] = {}
    users = [(formula, argument) for formula in formulas for argument in _arguments(formula.tape, arguments)]
    if not users:
        return ()
    knowns: dict[int, Label] = {}
    for formula in formulas:
        if len(formula.tape.instructions) <= 3 and isinstance(statements[formula.statement].node, Equation):
            _note_known(formula, statements, knowns)
    found: dict[tuple[int, int], Diagnostic] = {}
    for formula, argument in users:
        label = Label(statements[formula.statement].span(*formula.places[argument]))
        operation, slot = formula.tape.instructions[argument][:2]
        if operation == "quantity":
            known = knowns.get(formula.quantities[slot])
            if known is not None:
                name = names[formula.quantities[slot]]
                found.setdefault(
                    (id(known), 0), _warning(f"`{name}`", known, Label(label.span, "taken in rad here"))
                )
        elif _is_doubtful(formula, argument, label.span.text):
            found.setdefault((formula.statement, label.span.start), _warning(f"`{label.span.text}`", label))
    return tuple(found.values())


def _arguments(tape: Tape, known: dict[int, tuple[int, ...]]) -> tuple[int, ...]:
    """Arguments of sines and the like, remembered by the tape's identity."""
    found = known.get(id(tape))
    if found is None:
        found = known[id(tape)] = tuple(i[1] for i in tape.instructions if i[0] in _OF_ANGLES)
    return found


def _is_doubtful(formula: Formula, instruction: int, text: str) -> bool:
    """Whether the text of an instruction is a whole number without unit beyond a full turn."""
    if _WHOLE.fullmatch(text) is None or abs(float(text)) <= 2.0 * math.pi:
        return False
    return formula.tape.instructions[instruction][0] in ("const", "literal", "neg")


def _note_known(formula: Formula, statements: Sequence[Statement], knowns: dict[int, Label]) -> None:
    for instruction, place in enumerate(formula.places):
        span = statements[formula.statement].span(*place)
        if _is_doubtful(formula, instruction, span.text):
            knowns[formula.quantities[0]] = Label(span)


def _warning(what: str, first: Label, *others: Label) -> Diagnostic:
    number = first.span.text
    return warning(
        CODE,
        f"{what} is an angle without a unit, so it is taken in rad",
        first,
        *others,
        help=f"write `{number} deg` for degrees, `{number} rad` if radians are meant",
    )
