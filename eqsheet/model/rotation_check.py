"""Warns where a rotational speed in rpm meets a frequency in Hz, or one of them a curve in the other.

Both have the dimension 1/s, but a turn is 2*pi rad: 60 rpm is 6.28 1/s and 1 Hz is 1 1/s, so that ``n = f/p``
with n in rpm and f in Hz is off by 2*pi. A factor of pi in a product is taken as the conversion being made.
"""

from __future__ import annotations

import re
from collections.abc import Collection, Iterator, Sequence

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, warning
from eqsheet.model.dimension_propagation import evaluate
from eqsheet.model.dimension_rules import KEEPS, LIKE, LIKE_TO_NONE, rules_of
from eqsheet.model.outside_curve import curve_arguments
from eqsheet.model.tape import Formula
from eqsheet.syntax.nodes import Statement
from eqsheet.units.dimension import DIMENSIONLESS, Dimension

CODE = "rpm-against-hz"

RATE = Dimension.of({"s": -1})
TURNS, CYCLES = "rpm", "Hz"
_NOTE = "1 rpm is 2*pi/60 rad/s and 1 Hz is 1/s: both are 1/s, but a turn counts 2*pi"
_HELP = "multiply the frequency by 2*pi, or give both in the same unit"
_TURNING = re.compile(r"k?rpm")
_CYCLING = re.compile(r"[kMGT]?Hz")


def rotation_diagnostics(
    formulas: Sequence[Formula],
    dimensions: Sequence[Dimension | None],
    statements: Sequence[Statement],
    names: Sequence[str],
) -> tuple[Diagnostic, ...]:
    """A warning for each place where a value in rpm must equal, or is added to, one in Hz, or is read at one."""
    if not any(_unit_flavour(literal.unit) for formula in formulas for literal in formula.literals):
        return ()
    written: dict[int, tuple[str, int, tuple[int, int]]] = {}
    for index, formula in enumerate(formulas):
        if len(formula.quantities) == 1 and dimensions[formula.quantities[0]] == RATE:
            for literal in formula.literals:
                flavour = _unit_flavour(literal.unit)
                if flavour:
                    written.setdefault(formula.quantities[0], (flavour, index, (literal.start, literal.end)))

    def given_elsewhere(formula: Formula, units: Collection[str]) -> Iterator[Label]:
        """Where quantities of a formula are given in one of these units by other lines."""
        for quantity in formula.quantities:
            flavour, index, place = written.get(quantity, ("", 0, (0, 0)))
            if flavour in units and formulas[index] is not formula:
                said = f"`{names[quantity]}` is given in {flavour} here"
                yield Label(statements[formulas[index].statement].span(*place), said)

    found: list[Diagnostic] = []
    for formula in formulas:
        flavours = {slot: written[q][0] for slot, q in enumerate(formula.quantities) if q in written}
        statement = statements[formula.statement]
        tastes, pairs = _tastes(formula, flavours, dimensions)
        for reader, argument, name, wanted in _arguments(formula, tastes):
            curve = formula.tape.instructions[reader][-1].heading.name
            text = statement.line.text[slice(*formula.places[argument])]
            found.append(
                warning(
                    CODE,
                    f"`{text}` is in {tastes[argument]}, but `{curve}` takes {name} in {wanted}",
                    Label(statement.span(*formula.places[argument])),
                    *given_elsewhere(formula, (tastes[argument],)),
                    notes=(_NOTE,),
                    help=_HELP,
                )
            )
        for left, right in pairs:
            units = (tastes[left], tastes[right])
            texts = [statement.line.text[slice(*formula.places[i])] for i in (left, right)]
            found.append(
                warning(
                    CODE,
                    f"`{texts[0]}` is in {units[0]}, but `{texts[1]}` in {units[1]}",
                    *(Label(statement.span(*formula.places[i])) for i in (right, left)),
                    *given_elsewhere(formula, units),
                    notes=(_NOTE,),
                    help=_HELP,
                )
            )
    return tuple(found)


def _unit_flavour(unit: str) -> str:
    if _TURNING.fullmatch(unit):
        return TURNS
    return CYCLES if _CYCLING.fullmatch(unit) else ""


def _arguments(formula: Formula, tastes: Sequence[str]) -> list[tuple[int, int, str, str]]:
    """Arguments of curves in the other unit than the heading's: reader, argument, its name, the heading's unit."""
    found = []
    for reader, position, argument in curve_arguments(formula.tape):
        heading = formula.tape.instructions[reader][-1].heading
        unit = heading.units[position]
        wanted = "" if unit is None else _unit_flavour(unit.text)
        if tastes and {tastes[argument], wanted} == {TURNS, CYCLES}:
            found.append((reader, argument, heading.arguments[position], wanted))
    return found


def _tastes(
    formula: Formula, flavours: dict[int, str], dimensions: Sequence[Dimension | None]
) -> tuple[Sequence[str], list[tuple[int, int]]]:
    """By instruction whether it is in rpm or Hz, and pairs that must be alike, one in rpm and one in Hz."""
    if not flavours and not any(_unit_flavour(literal.unit) for literal in formula.literals):
        return (), []
    forms = rules_of(formula.tape, formula.alike).forms
    known = [dimensions[q] for q in formula.quantities]
    literals = [literal.dimension for literal in formula.literals]
    plain: list[bool] = []
    for form in forms:
        value, unknown = (DIMENSIONLESS, []) if form is None else evaluate(form, literals, known)
        plain.append(not unknown and value == DIMENSIONLESS)
    taste: list[str] = []
    turned: list[bool] = []
    pairs = list(formula.alike)
    for index, (operation, *operands) in enumerate(formula.tape.instructions):
        inner = [o for o in operands if isinstance(o, int)]
        here, pi = "", False
        if operation == "quantity":
            here = flavours.get(inner[0], "")
        elif operation == "literal":
            here = _unit_flavour(formula.literals[inner[0]].unit)
        elif operation == "const":
            # pi is the only constant that is not exact.
            pi = isinstance(operands[0], float)
        elif operation in LIKE or operation in LIKE_TO_NONE:
            pairs.append((inner[0], inner[1]))
            here = (taste[inner[0]] or taste[inner[1]]) if operation in LIKE else ""
        elif operation in KEEPS:
            here, pi = taste[inner[0]], turned[inner[0]]
        elif operation in ("mul", "div"):
            a, b = inner
            pi = turned[a] or turned[b]
            if plain[b]:
                here = taste[a]
            elif plain[a] and operation == "mul":
                here = taste[b]
            here = "" if pi else here
        elif operation in ("curve", "surface"):
            unit = operands[-1].heading.unit
            here = "" if unit is None else _unit_flavour(unit.text)
        taste.append(here)
        turned.append(pi)
        assert len(taste) == index + 1
    return taste, [(a, b) for a, b in pairs if {taste[a], taste[b]} == {TURNS, CYCLES}]
