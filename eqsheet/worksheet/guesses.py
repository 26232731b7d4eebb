"""Guesses worked out from the knowns: start values and bounds in SI."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from functools import lru_cache
from typing import NamedTuple

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error, warning
from eqsheet.model.branches import quantities_under
from eqsheet.model.evaluate import evaluate
from eqsheet.model.no_value import no_value
from eqsheet.model.system import EquationSystem, GuessItem, Place
from eqsheet.model.tape import Formula, Tape
from eqsheet.worksheet.curve_messages import outside_curve_diagnostic
from eqsheet.worksheet.places import quoted, span_of

# Worksheets whose constant guesses are kept.
MOST_KEPT = 64


@dataclass(frozen=True)
class Guesses:
    """Start values and bounds by quantity number, in SI; what was not written is missing.

    ``places`` holds the statement that gave the bound or start value, by (quantity, role).
    """

    near: Mapping[int, float] = field(default_factory=dict)
    lower: Mapping[int, float] = field(default_factory=dict)
    upper: Mapping[int, float] = field(default_factory=dict)
    places: Mapping[tuple[int, str], Place] = field(default_factory=dict)

    def bounds(self, quantity: int) -> tuple[float, float]:
        """Bounds of a quantity, infinite where there are none."""
        return self.lower.get(quantity, -math.inf), self.upper.get(quantity, math.inf)


def work_out_guesses(
    system: EquationSystem, known_values: Mapping[int, float], kinds: Sequence[str] = ()
) -> tuple[Guesses, tuple[Diagnostic, ...]]:
    """Evaluate all guesses; those by name go before those by pattern.

    Readings (of temperature, of pressure) are kept above absolute zero besides.

    Parameters
    ----------
    known_values : mapping of quantity number to SI value
        All a guess may use: knowns, and what follows from them line by line.
    kinds : sequence of str
        Of each quantity, ``reading``, ``difference`` or ``plain``.
    """
    by_role: dict[str, dict[int, float]] = {"near": {}, "lower": {}, "upper": {}}
    places: dict[tuple[int, str], Place] = {}
    diagnostics: list[Diagnostic] = []
    for item in system.guesses:
        values = values_of_guess(system, item, known_values, diagnostics)
        for role, value in zip(item.roles, values):
            if item.quantity not in by_role[role]:
                by_role[role][item.quantity] = value
                places[item.quantity, role] = item.place
    for quantity, kind in enumerate(kinds):
        if kind == "reading" and by_role["lower"].get(quantity, -1.0) < 0.0:
            by_role["lower"][quantity] = 0.0
            places.pop((quantity, "lower"), None)
    _check_ranges(system, by_role, places, known_values, diagnostics)
    return Guesses(by_role["near"], by_role["lower"], by_role["upper"], places), tuple(diagnostics)


class _Constant(NamedTuple):
    """What guesses come to that use no quantity, None where some do or there is something to be said of them."""

    items: Sequence[GuessItem]
    kinds: Sequence[str]
    guesses: Guesses | None


_constant: dict[tuple[int, int], _Constant] = {}


def constant_guesses(system: EquationSystem, kinds: Sequence[str]) -> Guesses | None:
    """The guesses of a worksheet in which none depends on any value, and none is wrong; None of any other.

    They are worked out once for these very guesses, which a worksheet solved again has still.
    """
    key = id(system.guesses), id(kinds)
    kept = _constant.get(key)
    if kept is None:
        found = None
        if not any(slots_used(item.formula.tape) for item in system.guesses):
            # Without any known no guess is excused for lying outside bounds.
            guesses, diagnostics = work_out_guesses(system, {}, kinds)
            found = None if diagnostics else guesses
        while len(_constant) >= MOST_KEPT:
            _constant.pop(next(iter(_constant)), None)
        kept = _constant[key] = _Constant(system.guesses, kinds, found)
    return kept.guesses


def values_of_guess(
    system: EquationSystem,
    item: GuessItem,
    known_values: Mapping[int, float],
    diagnostics: list[Diagnostic],
) -> tuple[float, ...]:
    """Values of one guess by role; none where something is wrong with it, which is added to `diagnostics`."""
    formula = item.formula
    used = slots_used(formula.tape)
    unknown = [
        system.names[q]
        for slot, q in enumerate(formula.quantities)
        if q not in known_values and (q != item.quantity or slot in used)
    ]
    here = Label(span_of(system, item.place))
    if unknown:
        diagnostics.append(
            error(
                "guess-not-known",
                f"the guess uses {quoted(sorted(set(unknown)))}, which {'is' if len(unknown) == 1 else 'are'} not known",
                here,
                help="a guess may use knowns, and what follows from them line by line",
            )
        )
        return ()
    values = evaluate(
        formula.tape,
        [known_values.get(q, math.nan) for q in formula.quantities],
        [literal.value for literal in formula.literals],
    )
    found = tuple(float(values[o]) for o in formula.tape.outputs)
    if not all(map(math.isfinite, found)):
        outside = outside_curve_diagnostic(
            system, formula, {q: known_values.get(q, math.nan) for q in formula.quantities}
        )
        if outside is not None:
            diagnostics.append(outside)
            return ()
        diagnostics.append(_without_value(system, formula, values))
        return ()
    return found


def _without_value(system: EquationSystem, formula: Formula, values: Sequence[float]) -> Diagnostic:
    """That a guess has no finite value, and why."""
    statement = system.statements[formula.statement]
    part = no_value(formula, values, statement.line.text)
    assert part is not None, "called for a guess that is not finite"
    return error(
        "value-not-finite",
        f"the guess has no value: {part.reason}",
        Label(statement.span(part.start, part.end)),
        help="check the values it uses",
    )


@lru_cache(maxsize=4096)
def slots_used(tape: Tape) -> frozenset[int]:
    """Quantities of the tape that its outputs depend on, by slot."""
    return frozenset().union(*(quantities_under(tape, o) for o in tape.outputs))


def _check_ranges(
    system: EquationSystem,
    by_role: dict[str, dict[int, float]],
    places: Mapping[tuple[int, str], Place],
    known_values: Mapping[int, float],
    diagnostics: list[Diagnostic],
) -> None:
    near, lower, upper = by_role["near"], by_role["lower"], by_role["upper"]
    for quantity in list(lower):
        if quantity in upper and not lower[quantity] < upper[quantity]:
            diagnostics.append(
                error(
                    "bounds-empty",
                    f"the bounds of `{system.names[quantity]}` leave no room: the lower one is not below the upper",
                    Label(span_of(system, places[quantity, "upper"])),
                )
            )
            del lower[quantity], upper[quantity]
    for quantity, value in near.items():
        low, high = lower.get(quantity, -math.inf), upper.get(quantity, math.inf)
        if not low <= value <= high and quantity not in known_values:
            diagnostics.append(
                warning(
                    "guess-outside-bounds",
                    f"the start value of `{system.names[quantity]}` lies outside its bounds; the nearer bound is used",
                    Label(span_of(system, places[quantity, "near"])),
                )
            )
            near[quantity] = min(max(value, low), high)
