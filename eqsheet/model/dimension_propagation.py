"""One pass of dimension inference over a set of formulas: what follows, and where it contradicts itself.

Almost every line of a worksheet leaves at most one dimension open, so formulas are first visited from a
worklist, each giving what it alone can. What remains goes to Gaussian elimination. What one visit finds
depends only on the shape of the formula and on the dimensions already known in it, so it is remembered: a
thousand lines of one shape are worked out once.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass, field
from fractions import Fraction
from typing import TypeAlias

from eqsheet.model.dimension_elimination import Elimination, Row
from eqsheet.model.dimension_rules import Exponent, Form, TapeRules, rules_of
from eqsheet.model.tape import Formula
from eqsheet.units.dimension import DIMENSIONLESS, Dimension

UNKNOWN = -1


@dataclass(frozen=True, slots=True)
class Reason:
    """Why a quantity has its dimension: a demand (by its number) of a formula (by its number)."""

    formula: int
    demand: int


@dataclass(frozen=True, slots=True)
class Visit:
    """What a formula alone gives: dimensions by slot, the first broken demand or -1, demands still open."""

    solved: tuple[tuple[int, int, int], ...]
    broken: int
    open: tuple[int, ...]


_SlotDimensions: TypeAlias = list[Dimension | None]


def evaluate(
    form: Form, literals: Sequence[Dimension], known: Sequence[Dimension | None]
) -> tuple[Dimension, list[tuple[int, Exponent]]]:
    """The form's value as far as known, and the powers of the slots that are not."""
    value = form.constant
    for slot, power in form.literals:
        dimension = literals[slot]
        if dimension:
            value = value * dimension**power
    unknown: list[tuple[int, Exponent]] = []
    for slot, power in form.quantities:
        given = known[slot]
        if given is None:
            unknown.append((slot, power))
        elif given:
            value = value * given**power
    return value, unknown


class Worklines:
    """The formulas of a worksheet ready for passes: rules, numbered dimensions, users of each quantity."""

    def __init__(self, formulas: Sequence[Formula], quantities: int) -> None:
        self.formulas = formulas
        self.quantities = quantities
        self.dimensions: list[Dimension] = [DIMENSIONLESS]
        self.visits = 0
        self._numbers: dict[Dimension, int] = {DIMENSIONLESS: 0}
        self._numbers_of_objects: dict[int, int] = {}
        self._shapes: dict[tuple[object, ...], int] = {}
        self._memory: dict[tuple[int, tuple[int, ...]], Visit] = {}
        self.rules: list[TapeRules] = []
        self.shapes: list[int] = []
        self.users: list[list[int]] = [[] for _ in range(quantities)]
        self._of_statement: dict[int, list[int]] = {}
        rules_of_tapes: dict[tuple[int, tuple[tuple[int, int], ...]], tuple[int, TapeRules]] = {}
        for index, formula in enumerate(formulas):
            # The tape's identity saves hashing all its instructions again for each formula that shares it.
            key = (id(formula.tape), formula.alike)
            found = rules_of_tapes.get(key)
            if found is None:
                found = rules_of_tapes[key] = (len(rules_of_tapes), rules_of(formula.tape, formula.alike))
            self.rules.append(found[1])
            shape = (found[0], *[self._number_of_object(literal.dimension) for literal in formula.literals])
            self.shapes.append(self._shapes.setdefault(shape, len(self._shapes)))
            for quantity in formula.quantities:
                self.users[quantity].append(index)
            self._of_statement.setdefault(formula.statement, []).append(index)

    def siblings(self, index: int) -> list[int]:
        """All formulas of the statement that formula `index` comes from: they stand and fall together."""
        return self._of_statement[self.formulas[index].statement]

    def number(self, dimension: Dimension) -> int:
        """Number of the dimension; comparing numbers is much faster than comparing dimensions."""
        found = self._numbers.get(dimension)
        if found is None:
            found = self._numbers[dimension] = len(self.dimensions)
            self.dimensions.append(dimension)
        return found

    def _number_of_object(self, dimension: Dimension) -> int:
        found = self._numbers_of_objects.get(id(dimension))
        if found is None:
            found = self._numbers_of_objects[id(dimension)] = self.number(dimension)
        return found

    def visit(self, index: int, state: list[int]) -> Visit:
        """What formula `index` gives, the dimensions of the quantities being known as in `state`."""
        self.visits += 1
        known = tuple([state[quantity] for quantity in self.formulas[index].quantities])
        key = (self.shapes[index], known)
        found = self._memory.get(key)
        if found is None:
            found = self._memory[key] = self._work_out(index, known)
        return found

    def literals(self, index: int) -> list[Dimension]:
        """Dimensions of the literals of formula `index`."""
        return [literal.dimension for literal in self.formulas[index].literals]

    def _work_out(self, index: int, numbers: tuple[int, ...]) -> Visit:
        literals = self.literals(index)
        known: _SlotDimensions = [self.dimensions[n] if n != UNKNOWN else None for n in numbers]
        demands = self.rules[index].demands
        solved: list[tuple[int, int, int]] = []
        broken = UNKNOWN
        waiting = list(range(len(demands)))
        progress = True
        while progress and waiting:
            progress = False
            still: list[int] = []
            for demand in waiting:
                value, unknown = evaluate(demands[demand].form, literals, known)
                if not unknown:
                    if value and broken == UNKNOWN:
                        broken = demand
                elif len(unknown) == 1:
                    slot, power = unknown[0]
                    dimension = value if power == -1 else value ** (Fraction(-1) / power)
                    known[slot] = dimension
                    solved.append((slot, self.number(dimension), demand))
                    progress = True
                else:
                    still.append(demand)
            waiting = still
        return Visit(tuple(solved), broken, tuple(waiting))


@dataclass(slots=True)
class Inference:
    """What one pass found.

    Attributes
    ----------
    state : list of int
        Number of each quantity's dimension, -1 where nothing fixes it.
    reasons : dict of int to Reason
        For quantities a single demand fixed.
    broken : list of (int, int)
        Formulas that contradict the rest, as met, each with the demand that failed (-1: elimination).
    conflict : tuple of int
        Formulas that together bring about the first contradiction, nearest to it first.
    open : dict of int to tuple of int
        Demands, by formula, that hold several unknown dimensions.
    elimination : Elimination
        Those demands, solved.
    fixed_together : frozenset of int
        Quantities that only elimination fixed.
    """

    state: list[int]
    reasons: dict[int, Reason] = field(default_factory=dict)
    broken: list[tuple[int, int]] = field(default_factory=list)
    conflict: tuple[int, ...] = ()
    open: dict[int, tuple[int, ...]] = field(default_factory=dict)
    elimination: Elimination = field(default_factory=Elimination)
    fixed_together: frozenset[int] = frozenset()


def propagate(lines: Worklines, known: Mapping[int, Dimension], without: Collection[int] = ()) -> Inference:
    """All that the formulas, those in `without` left out, say about the dimensions.

    A formula that contradicts what is known by then is noted and gives nothing further.
    """
    found = Inference([UNKNOWN] * lines.quantities)
    for quantity, dimension in known.items():
        found.state[quantity] = lines.number(dimension)
    # Knowns come first: a dimension written down is the better witness than one worked out.
    singles = [index for index, f in enumerate(lines.formulas) if len(f.quantities) <= 1]
    others = [index for index, f in enumerate(lines.formulas) if len(f.quantities) > 1]
    left_out = set(without)
    touched = _round(lines, found, singles, left_out)
    _finish(lines, found, sorted({*others, *touched}), left_out)
    return found


def propagate_without(
    lines: Worklines, found: Inference, removed: Collection[int], set_aside: Collection[int]
) -> Inference:
    """`found` as it would be without the formulas `removed` too; only what hangs on them is worked out again.

    Reasons hold only what is new. Open demands that neither fixed nor contradicted anything are left alone.
    """
    lost = _hanging_on(lines, found, removed)
    lost.update(found.fixed_together)
    again = Inference(list(found.state))
    for quantity in lost:
        again.state[quantity] = UNKNOWN
    users = {user for quantity in lost for user in lines.users[quantity]}
    broken = {formula for formula, _ in found.broken}
    again.broken = [pair for pair in found.broken if pair[0] not in users and pair[0] not in removed]
    if found.fixed_together or any(demand == UNKNOWN for _, demand in found.broken):
        again.open = {
            formula: demands
            for formula, demands in found.open.items()
            if formula not in users and formula not in removed
        }
    left_out = {*set_aside, *removed, *(broken - users)}
    _finish(lines, again, sorted(users), left_out)
    return again


def _hanging_on(lines: Worklines, found: Inference, removed: Collection[int]) -> set[int]:
    """Quantities whose dimensions were worked out by way of the formulas `removed`."""
    lost = [q for index in removed for q in lines.formulas[index].quantities if _reason_is(found, q, index)]
    seen = set(lost)
    for quantity in lost:
        for user in lines.users[quantity]:
            for other in lines.formulas[user].quantities:
                if other not in seen and _reason_is(found, other, user):
                    seen.add(other)
                    lost.append(other)
    return seen


def _reason_is(found: Inference, quantity: int, formula: int) -> bool:
    reason = found.reasons.get(quantity)
    return reason is not None and reason.formula == formula


def _finish(lines: Worklines, found: Inference, queue: list[int], left_out: set[int]) -> None:
    """Visit round by round until nothing new comes out, then solve what is left by elimination."""
    while queue:
        queue = sorted(_round(lines, found, queue, left_out))
    if found.open:
        _eliminate(lines, found)


def _round(lines: Worklines, found: Inference, queue: list[int], left_out: set[int]) -> set[int]:
    """Visit all formulas in the light of the same knowledge; gives those to visit in the next round.

    Rounds keep the reasons short: a dimension is put down to the fewest lines it follows from.
    """
    state = found.state
    news: list[tuple[int, int, Reason]] = []
    for index in queue:
        if index in left_out:
            continue
        visit = lines.visit(index, state)
        if visit.broken != UNKNOWN:
            if not found.conflict:
                found.conflict = _conflict_of_demand(lines, found, index, visit)
            found.broken.append((index, visit.broken))
            left_out.add(index)
            found.open.pop(index, None)
            continue
        if visit.open:
            found.open[index] = visit.open
        else:
            found.open.pop(index, None)
        quantities = lines.formulas[index].quantities
        for slot, dimension, demand in visit.solved:
            news.append((quantities[slot], dimension, Reason(index, demand)))
    touched: set[int] = set()
    for quantity, dimension, reason in news:
        if state[quantity] == UNKNOWN:
            state[quantity] = dimension
            found.reasons[quantity] = reason
            touched.update(lines.users[quantity])
        elif state[quantity] != dimension:
            touched.add(reason.formula)
    return touched - left_out


def demand_row(lines: Worklines, index: int, demand: int, state: list[int]) -> Row:
    """The demand over the quantities whose dimensions are not known in `state`."""
    formula = lines.formulas[index]
    known: _SlotDimensions = [
        lines.dimensions[state[q]] if state[q] != UNKNOWN else None for q in formula.quantities
    ]
    value, unknown = evaluate(lines.rules[index].demands[demand].form, lines.literals(index), known)
    return Row(tuple((formula.quantities[slot], power) for slot, power in unknown), value, index)


def _eliminate(lines: Worklines, found: Inference) -> None:
    rows = [
        demand_row(lines, index, demand, found.state)
        for index, demands in sorted(found.open.items())
        for demand in demands
    ]
    lines.visits += len(rows)
    often = Counter(unknown for row in rows for unknown, _ in row.terms)
    rows.sort(key=lambda row: len(row.terms))
    dropped: set[int] = set()
    for row in rows:
        if row.source in dropped:
            continue
        contradiction = found.elimination.add(row, often)
        if contradiction:
            if not found.conflict:
                found.conflict = _with_reasons(lines, found, contradiction)
            found.broken.append((row.source, UNKNOWN))
            dropped.add(row.source)
    fixed, _ = found.elimination.settled()
    found.fixed_together = frozenset(fixed)
    for quantity, fixed_dimension in fixed.items():
        found.state[quantity] = lines.number(fixed_dimension)


def _conflict_of_demand(lines: Worklines, found: Inference, index: int, visit: Visit) -> tuple[int, ...]:
    """Formulas behind the dimensions that meet in the broken demand of formula `index`, nearest first."""
    quantities = lines.formulas[index].quantities
    own = {quantities[slot]: demand for slot, _, demand in visit.solved}
    demands = lines.rules[index].demands
    start = [quantities[slot] for slot, _ in demands[visit.broken].form.quantities]
    for quantity in start:
        if quantity in own:
            more = (quantities[slot] for slot, _ in demands[own[quantity]].form.quantities)
            start.extend(q for q in more if q not in start)
    return _behind(lines, found, [index], [q for q in start if q not in own])


def _with_reasons(lines: Worklines, found: Inference, conflict: frozenset[int]) -> tuple[int, ...]:
    """The formulas in `conflict` and those behind the dimensions known in them."""
    formulas = sorted(conflict)
    return _behind(
        lines, found, formulas, [q for index in formulas for q in lines.formulas[index].quantities]
    )


def _behind(
    lines: Worklines, found: Inference, formulas: list[int], quantities: list[int]
) -> tuple[int, ...]:
    """The formulas, and all that the dimensions of the quantities follow from, nearest first."""
    whole = dict.fromkeys(formulas)
    queue = list(dict.fromkeys(quantities))
    seen = set(queue)
    for quantity in queue:
        reason = found.reasons.get(quantity)
        if reason is None:
            continue
        whole[reason.formula] = None
        form = lines.rules[reason.formula].demands[reason.demand].form
        for slot, _ in form.quantities:
            other = lines.formulas[reason.formula].quantities[slot]
            if other not in seen:
                seen.add(other)
                queue.append(other)
    return tuple(whole)
