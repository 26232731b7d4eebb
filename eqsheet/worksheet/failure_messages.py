"""Why a block was not solved, and how far a solved one is to be trusted, in the worksheet's own terms."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from typing import TYPE_CHECKING

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error, note
from eqsheet.model.branches import literal_values, quantities_under
from eqsheet.model.dimension_of import dimensions_of
from eqsheet.model.evaluate import evaluate, first_nonfinite
from eqsheet.model.lazy_sequence import LazySequence
from eqsheet.model.no_value import NoValue, no_value
from eqsheet.model.specialise import conditions
from eqsheet.model.system import EquationSystem, Place
from eqsheet.model.tape import Formula
from eqsheet.solve.explain import Facts, explain
from eqsheet.solve.outcome import Status
from eqsheet.units.dimension import DIMENSIONLESS, Dimension
from eqsheet.units.display import default_unit
from eqsheet.worksheet.beyond_bounds import Beyond, beyond_bounds
from eqsheet.worksheet.curve_messages import curve_notes, outside_curve_diagnostic, stepped_diagnostic
from eqsheet.worksheet.guesses import Guesses
from eqsheet.worksheet.places import equation_words, label_of, line_words, quoted
from eqsheet.worksheet.proof_messages import Proof
from eqsheet.worksheet.shown_units import shown_unit, written_quantity
from eqsheet.worksheet.solve_block import BlockResult, Known
from eqsheet.worksheet.trust import digits_of

if TYPE_CHECKING:
    from eqsheet.worksheet.prepare import Prepared
    from eqsheet.worksheet.run import BlockRun

MOST_TERMS = 6
MOST_EQUATIONS = 3
MOST_PRESSED = 4
# Nearer than this to a bound, relative to its own size, an unknown rests on it.
ON_A_BOUND = 1e-6

_AT_MINIMUM = "no solution found: the search ended where no step brings the sides closer together"
_HEADLINES = {
    Status.STALLED: "no solution found",
    Status.MINIMUM: _AT_MINIMUM,
    Status.HELD: "no solution found within the bounds",
    Status.SINGULAR: "no solution found: the equations depend on each other at the best point",
    Status.CONTINUUM: "no single solution: the equations leave a combination of unknowns free",
    Status.DOMAIN: "no point found at which every equation has a value",
    Status.POLE: "no solution found: the two sides only jump past each other",
    Status.NO_SIGN_CHANGE: "no solution found: the two sides do not meet",
    Status.NO_CONSISTENT_BRANCH: "no solution found: each branch of the conditions, or step, leads into another one",
    Status.BUDGET: "no solution found within the iterations and time allowed",
    Status.INTERRUPTED: "interrupted before a solution was found",
}
# Ends of a search that bounds may have brought about.
_HELD_BACK = (Status.STALLED, Status.MINIMUM, Status.SINGULAR, Status.BUDGET)
# Failures that a start elsewhere would not mend.
_NO_START_HELPS = (Status.CONTINUUM, Status.NO_CONSISTENT_BRANCH)
_CURES = {
    Status.HELD: "widen the bounds named, or check the equation that pushes against them",
    Status.CONTINUUM: "one more independent equation or known is needed among these lines",
    Status.SINGULAR: "check that no equation of these lines repeats another, or start elsewhere with `near`",
    Status.DOMAIN: "give start values (`near`) or bounds (`within`) inside the domain of the equations",
    Status.NO_CONSISTENT_BRANCH: "let the branches meet where they switch, or check the condition",
    Status.MINIMUM: "check sign and size of the terms; a start elsewhere (`near`) may lead past this point",
    Status.NO_SIGN_CHANGE: "check sign and size of the terms, and the bounds if there are any",
}


def failure_diagnostic(
    system: EquationSystem,
    prepared: Prepared,
    run: BlockRun,
    known: Known,
    guesses: Guesses,
    before: Sequence[BlockRun] = (),
) -> Diagnostic:
    """What went wrong in a failed block: equations, terms, bounds, dependence, and what to try.

    Parameters
    ----------
    before : sequence of BlockRun
        The blocks before it, by number from 1.
    """
    result = run.result
    assert result is not None
    names = [system.names[q] for q in run.unknowns]
    places = [system.equations[e].place for e in run.equations]
    where = line_words(system, places)
    writer = _Writer(system, prepared, run, result, known, guesses)
    if result.outside:
        return writer.outside_bounds(where, names)
    by_curve = writer.by_curve(names)
    if by_curve is not None:
        return by_curve
    without_value = writer.without_value(names)
    if without_value is not None:
        return without_value
    status = result.outcome.status if result.outcome is not None else Status.STALLED
    if status.solved:
        status = Status.STALLED
    facts = (
        None if result.problem is None or result.outcome is None else explain(result.problem, result.outcome)
    )
    if facts is not None and facts.pressed and status in _HELD_BACK:
        status = Status.HELD
    beyond = writer.beyond()
    if beyond is not None and status not in (Status.CONTINUUM, Status.DOMAIN):
        status = Status.HELD
    worst = 0 if facts is None or not facts.worst else facts.worst[0][0]
    guilty = "the worst satisfied"
    if status is Status.NO_CONSISTENT_BRANCH:
        # Each branch by itself may be satisfied well; the trouble is where they switch.
        worst, guilty = next(((i, "it switches here") for i in writer.switching()), (worst, guilty))
    headline = _HEADLINES.get(status, "no solution found")
    if facts is not None and facts.local_minimum and status in (Status.STALLED, Status.SINGULAR):
        headline = _AT_MINIMUM
    proof = Proof(prepared, run, known, guesses, before)
    unreliable = writer.unreliable()
    headline = proof.headline or ("no value to rely on" if unreliable else headline)
    message = f"{headline}: {quoted(names)} from {where}"
    labels = [label_of(system, places[worst], guilty if len(places) > 1 else "")]
    others = sorted((p for i, p in enumerate(places) if i != worst), key=lambda p: (p.statement, p.start))
    shut_out = writer.shut_out_by(beyond)
    # One bound is as likely at fault as an equation; several at once rather follow from one.
    lines = dict.fromkeys(label_of(system, p) for p in others if p != places[worst])
    labels += shut_out[:1] + list(lines)[:8] + shut_out[1:]
    # A best point that satisfies what nothing can satisfy lies where a term is lost to underflow.
    notes = writer.at_best_point() if not proof or writer.gaps() else []
    notes += writer.found_beyond(beyond)
    notes += proof.notes()
    notes += [f"no digit of {quoted(unreliable)}, which it uses, is good"] if unreliable else []
    if facts is not None and facts.not_finite >= 0:
        notes += writer.not_finite(facts.not_finite)
    elif facts is not None:
        notes += writer.terms([i for i, _ in facts.worst[:MOST_EQUATIONS]] or [0])
        notes += writer.pressed(facts)
        notes += writer.dependence(facts)
    else:
        notes += writer.not_finite(0) or writer.terms([0])
        notes += writer.range_tried()
    notes += writer.jump()
    if not proof and status not in _NO_START_HELPS:
        notes += writer.blind_start()
    notes += curve_notes(writer.formulas, writer.point(), run.unknowns)
    help = _CURES.get(
        status, "give a start value near the solution (`near`), or check sign and size of the terms"
    )
    if proof and beyond is None:
        help = proof.help
    elif unreliable:
        help = (
            f"a small change of the inputs moves {quoted(unreliable)} much; check that it is posed as meant"
        )
    return error("no-solution", message, *labels, notes=tuple(notes), help=help)


class _Writer:
    """Notes about one failed block."""

    def __init__(
        self,
        system: EquationSystem,
        prepared: Prepared,
        run: BlockRun,
        result: BlockResult,
        known: Known,
        guesses: Guesses,
    ) -> None:
        self.system = system
        self.dimensions = prepared.dimensions
        self.kinds = prepared.kinds
        self.run = run
        self.result = result
        self.guesses = guesses
        # As they were before any branch or step was held.
        self.formulas = [prepared.formulas[e] for e in run.equations]
        self.own = dict(zip(run.unknowns, result.values))
        self.known = known

    def value(self, quantity: int, si: float) -> str:
        """A value of a quantity in its own unit."""
        unit = shown_unit(self.system, self.dimensions, self.kinds, quantity)
        return written_quantity(unit, self.kinds[quantity], si)

    def outside_bounds(self, where: str, names: Sequence[str]) -> Diagnostic:
        """A closed form has only values outside the bounds."""
        quantity = self.run.unknowns[self.result.outside[0]]
        value = self.result.values[self.result.outside[0]]
        low, high = self.guesses.bounds(quantity)
        role = "lower" if value < low else "upper"
        bound = low if role == "lower" else high
        place = self.system.equations[self.run.equations[0]].place
        bound_place = self.guesses.places.get((quantity, role))
        labels = [label_of(self.system, place)]
        if bound_place is not None:
            labels.append(label_of(self.system, bound_place, "the bound"))
        side = "below" if role == "lower" else "above"
        if bound_place is None:
            return error(
                "outside-bounds",
                f"{where} gives `{names[0]}` = {self.value(quantity, value)}, below absolute zero",
                *labels,
                help="check the equation and the values it uses",
            )
        return error(
            "outside-bounds",
            f"{where} gives `{names[0]}` = {self.value(quantity, value)}, {side} its bound {self.value(quantity, bound)}",
            *labels,
            help="widen the bound, or check the equation and the values it uses",
        )

    def beyond(self) -> Beyond | None:
        """A solution outside the bounds, if there is one."""
        if self.result.outcome is not None and self.result.outcome.status is Status.INTERRUPTED:
            return None
        return beyond_bounds(
            self.formulas,
            self.run.unknowns,
            self.known,
            self.guesses,
            self.dimensions,
            self.result.values,
        )

    def shut_out_by(self, beyond: Beyond | None) -> list[Label]:
        """The bounds that a solution does not lie in, those at zero last.

        A bound at zero is seldom the slip: there it is rather an equation that makes a quantity negative.
        """
        if beyond is None:
            return []
        places: tuple[dict[Place, None], dict[Place, None]] = ({}, {})
        for quantity in beyond.shut_out:
            low, high = self.guesses.bounds(quantity)
            role, bound = ("lower", low) if beyond.values[quantity] < low else ("upper", high)
            if (quantity, role) in self.guesses.places:
                places[bound == 0.0][self.guesses.places[quantity, role]] = None
        return [label_of(self.system, p, "shuts a solution out") for group in places for p in group]

    def found_beyond(self, beyond: Beyond | None) -> list[str]:
        """Where the solution outside the bounds lies."""
        if beyond is None:
            return []
        parts = [f"{self.system.names[q]} = {self.value(q, beyond.values[q])}" for q in beyond.shut_out[:4]]
        return [f"outside the bounds the equations are satisfied, with {', '.join(parts)}"]

    def point(self) -> Mapping[int, float]:
        """SI values of all quantities of the block's equations at the best point."""
        quantities = {q for formula in self.formulas for q in formula.quantities}
        return {q: self.own.get(q, self.known.values[q]) for q in quantities}

    def by_curve(self, names: Sequence[str]) -> Diagnostic | None:
        """A curve makes a solution impossible: read outside its range by what is known, or by steps backwards."""
        known = {q: math.nan if q in self.own else value for q, value in self.point().items()}
        for formula in self.formulas:
            outside = outside_curve_diagnostic(self.system, formula, known, names)
            if outside is not None:
                return outside
        return stepped_diagnostic(self.system, self.formulas, self.own)

    def at_best_point(self) -> list[str]:
        """Values of the unknowns at the best point."""
        parts = [f"{self.system.names[q]} = {self.value(q, v)}" for q, v in list(self.own.items())[:8]]
        finite = [p for p, v in zip(parts, self.own.values()) if math.isfinite(v)]
        return [f"best point: {', '.join(finite)}"] if finite else []

    def gaps(self) -> bool:
        """Whether an equation is not satisfied to the last digit at the best point."""
        return any(
            len({results[o] for o in formula.tape.outputs}) > 1
            for formula in self.result.formulas
            for results in (self._evaluate(formula),)
        )

    def terms(self, equations: Sequence[int]) -> list[str]:
        """Both sides of the worst equations with the size of each term."""
        notes = []
        for position in equations:
            formula = self.result.formulas[position]
            results = self._evaluate(formula)
            units = self._units(formula)
            sides = [
                " ".join(_signed(self._term(formula, i, results[i], units[i]), sign) for sign, i in terms)
                for terms in (_terms(formula, output) for output in formula.tape.outputs)
            ]
            place = equation_words(self.system, self.run.equations[position])
            left, right = formula.tape.outputs
            if results[left] == results[right]:
                continue
            totals = [units[o](results[o]) for o in formula.tape.outputs]
            note_text = f"{place}: {' against '.join(totals)}"
            if totals[0] == totals[1]:
                note_text += f", {units[left](abs(results[left] - results[right]))} apart"
            if any(len(_terms(formula, o)) > 1 for o in formula.tape.outputs):
                note_text += f"; term by term: {' = '.join(side.removeprefix('+ ') for side in sides)}"
            notes.append(note_text)
        return notes

    def _term(self, formula: Formula, instruction: int, value: float, unit: Callable[[float], str]) -> str:
        start, end = formula.places[instruction]
        text = self.system.statements[formula.statement].line.text[start:end]
        text = " ".join(text.split())
        if len(text) > 30:
            text = text[:27] + "..."
        return f"{text} ({unit(value)})"

    def _evaluate(self, formula: Formula) -> list[float]:
        inputs = [self.own.get(q, self.known.values[q]) for q in formula.quantities]
        return list(evaluate(formula.tape, inputs, literal_values(formula)))

    def _units(self, formula: Formula) -> list[Callable[[float], str]]:
        """For each instruction, what writes a value of its dimension."""
        table = self.system.unit_table

        def writer_for(dimension: Dimension | None) -> Callable[[float], str]:
            unit = default_unit(DIMENSIONLESS if dimension is None else dimension, "plain", table)
            return lambda si: written_quantity(unit, "plain", si)

        return [writer_for(d) for d in dimensions_of(formula, self.dimensions)]

    def not_finite(self, equation: int) -> list[str]:
        """The first part of the equation that has no value."""
        formula = self.result.formulas[equation]
        found = no_value(formula, self._evaluate(formula), self._line(formula))
        if found is None:
            return []
        place = equation_words(self.system, self.run.equations[equation])
        return [f"{place}: there {found.reason}"]

    def _line(self, formula: Formula) -> str:
        return self.system.statements[formula.statement].line.text

    def without_value(self, names: Sequence[str]) -> Diagnostic | None:
        """A part of an equation that has no value whatever the unknowns are; None for any other failure."""
        explicit = self.result.outcome is None and math.isnan(self.result.values[0])
        for formula in self.result.formulas if explicit else self.formulas:
            inputs = [1.0 if q in self.own else self.known.values[q] for q in formula.quantities]
            values = evaluate(formula.tape, inputs, literal_values(formula))
            part = first_nonfinite(formula.tape, values)
            # What stands in a branch may not be needed.
            if part is None or conditions(formula.tape):
                continue
            if any(formula.quantities[k] in self.own for k in quantities_under(formula.tape, part)):
                continue
            found = no_value(formula, values, self._line(formula))
            if found is not None:
                verb = "has no value" if explicit else "cannot be found"
                return self._without_value(f"{quoted(names)} {verb}", formula, values, found)
        return None

    def _without_value(
        self, what: str, formula: Formula, values: Sequence[float], found: NoValue
    ) -> Diagnostic:
        statement = self.system.statements[formula.statement]
        units = self._units(formula)
        parts = tuple(f"`{text}` is {units[i](values[i])}" for i, text in found.operands)
        others = [
            f"{self.system.names[q]} = {self.value(q, self.known.values[q])}"
            for q in formula.quantities
            if q not in self.own
        ]
        return error(
            "no-solution",
            f"{what}: {found.reason}",
            Label(statement.span(found.start, found.end)),
            notes=(*parts, *((f"here {', '.join(others)}",) if others else ())),
            help="check the values it uses, and the lines they come from",
        )

    def unreliable(self) -> list[str]:
        """Names of quantities found before that have no good digit, where these leave a solution none."""
        outcome = self.result.outcome
        if outcome is None or not outcome.solved:
            return []
        used = {q for formula in self.result.formulas for q in formula.quantities if q not in self.own}
        values, errors = self.known.values, self.known.errors
        poor = [q for q in sorted(used) if values[q] != 0.0 and digits_of(values[q], errors[q]) == 0]
        return [self.system.names[q] for q in poor]

    def pressed(self, facts: Facts) -> list[str]:
        """Unknowns on their bounds, and which equation pushes them; where none is, those heading past one."""
        resting, heading = [], []
        for position, side, equation in facts.pressed:
            quantity = self.run.unknowns[position]
            name = self.system.names[quantity]
            bound = self.guesses.bounds(quantity)[side > 0]
            which = f"{'lower' if side < 0 else 'upper'} bound {self.value(quantity, bound)}"
            place = equation_words(self.system, self.run.equations[equation])
            if abs(self.own[quantity] - bound) <= ON_A_BOUND * self._span(position):
                resting.append(f"`{name}` rests on its {which}; {place} pushes it there")
            else:
                heading.append(f"{place} would take `{name}` past its {which}")
        return (resting or heading)[:MOST_PRESSED]

    def _span(self, position: int) -> float:
        """What the distance of an unknown from a bound is large or small against."""
        quantity = self.run.unknowns[position]
        low, high = self.guesses.bounds(quantity)
        problem = self.result.problem
        start = self.result.start
        typical = 0.0 if problem is None else float(problem.magnitude[position])
        # What a start tells of the size is no more to be relied on than the start.
        typical = min(typical, start.typical[position]) if start is not None and start.typical else typical
        return min(max(abs(self.own[quantity]), typical), high - low)

    def dependence(self, facts: Facts) -> list[str]:
        """Equations that depend on each other and the combination of unknowns left free."""
        if not facts.dependent_equations:
            return []
        lines = line_words(
            self.system,
            [self.system.equations[self.run.equations[i]].place for i, _ in facts.dependent_equations],
        )
        free = quoted(self.system.names[self.run.unknowns[i]] for i, _ in facts.free_unknowns)
        if len(facts.dependent_equations) > 1 and lines.startswith("line "):
            lines = f"equations of {lines}"
        verb = "depend" if len(facts.dependent_equations) > 1 else "says nothing"
        tail = "on each other" if len(facts.dependent_equations) > 1 else "about the unknowns"
        return [f"near the best point {lines} {verb} {tail} and leave {free} free"]

    def range_tried(self) -> list[str]:
        """Bounds within which one unknown was searched."""
        quantity = self.run.unknowns[0]
        low, high = self.guesses.bounds(quantity)
        if not (math.isfinite(low) or math.isfinite(high)):
            return []
        parts = [self.value(quantity, b) if math.isfinite(b) else "" for b in (low, high)]
        return [f"searched within {parts[0]} .. {parts[1]}".replace("  ", " ")]

    def blind_start(self) -> list[str]:
        """Which unknowns had neither a guess nor bounds."""
        names = blind_names(self.system, self.run)
        return [f"{quoted(names)} {_was(names)} started without a guess"] if names else []

    def switching(self) -> list[int]:
        """Positions of the equations with a condition."""
        return [
            i for i, f in enumerate(self.formulas) if any(step[0] == "if" for step in f.tape.instructions)
        ]

    def jump(self) -> list[str]:
        """How far the branches lie apart."""
        parts = [
            f"{self.system.names[q]} by {self.value(q, abs(g))}"
            for q, g in zip(self.run.unknowns, self.result.gap)
            if g
        ]
        return [f"between the branches the solution jumps: {', '.join(parts)}"] if parts else []


def _terms(formula: Formula, output: int) -> list[tuple[int, int]]:
    """The terms of a sum with their signs: (+1 or -1, instruction)."""
    found: list[tuple[int, int]] = []
    stack = [(1, output)]
    while stack:
        sign, i = stack.pop()
        operation, *rest = formula.tape.instructions[i]
        if operation == "add":
            stack += [(sign, rest[1]), (sign, rest[0])]
        elif operation == "sub":
            stack += [(-sign, rest[1]), (sign, rest[0])]
        elif operation == "neg":
            stack.append((-sign, rest[0]))
        else:
            found.append((sign, i))
    return found[:MOST_TERMS]


def _signed(text: str, sign: int) -> str:
    return f"+ {text}" if sign > 0 else f"- {text}"


def start_note(system: EquationSystem, run: BlockRun) -> list[Diagnostic]:
    """A note that names the unknowns of a solved block started without a guess, where a start matters.

    A block that was not solved says so itself, where a start could have helped.
    """
    if not blind_names(system, run):
        return []
    place = min((system.equations[e].place for e in run.equations), key=lambda p: (p.statement, p.start))
    return start_note_at(system, run, place)


def start_note_at(system: EquationSystem, run: BlockRun, place: Place) -> list[Diagnostic]:
    """`start_note` where the first place of the block's equations is known."""
    names = blind_names(system, run)
    if not names or run.result is None or not run.result.solved:
        return []
    return [
        note(
            "started-without-guess",
            f"{quoted(names)} {_was(names)} started without a guess",
            Label(label_of(system, place).span),
            help="a guess (`near`) or bounds (`within`) make sure which solution is meant",
        )
    ]


def blind_names(system: EquationSystem, run: BlockRun) -> Sequence[str]:
    """Names of the unknowns started without a guess, where a start matters.

    An unknown between bounds, or told by an equation from the starts of others, needs none and is not named.
    """
    result = run.result
    if result is None or result.start is None or result.method in ("closed form", "linear"):
        return ()
    blind = result.start.blind
    return LazySequence([(len(blind), lambda i: system.names[run.unknowns[blind[i]]])])


def _was(names: Sequence[str]) -> str:
    return "was" if len(names) == 1 else "were"
