"""Starting values where no guess is written: from bounds, else propagated from what is known, else typical.

The range of a curve bounds the start of an unknown that it is read at.
All rules but the last are independent of the units in use. The outcome does not depend on the order of the
lines, and no two unknowns are started at the same number, nor any at zero, where equal starts would make a
Jacobian singular.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, MutableMapping, Sequence
from dataclasses import dataclass
from heapq import heapify, heappop, heappush
from typing import NamedTuple

from eqsheet.model.branches import literal_values
from eqsheet.model.generate import value_function
from eqsheet.model.isolate import isolate
from eqsheet.model.tape import Formula, Tape
from eqsheet.units.dimension import Dimension
from eqsheet.worksheet.angles import angles
from eqsheet.worksheet.block_plan import plan_of
from eqsheet.worksheet.curve_ranges import Range, argument_ranges
from eqsheet.worksheet.guesses import Guesses
from eqsheet.worksheet.intervals import narrowed
from eqsheet.worksheet.start_plan import StartPlan, Told

# What a quantity of a dimension is like in engineering, in SI, where nothing in the worksheet tells.
TYPICAL: Mapping[str, float] = {
    "K": 300.0,  # near room temperature
    "kg/(m*s^2)": 1e5,  # the atmosphere
    "kg/m^3": 1e3,  # water
    "kg*m^2/s^2": 1e3,
    "kg*m^2/s^3": 1e3,
}
# Where the equations make a start zero: small against what is typical, but not zero.
NEAR_ZERO = 1e-3
# In a larger block carrying bounds through the equations takes longer than it helps.
MOST_NARROWED = 60
# An angle, in radians: nearer to zero than to a quarter of a turn, as angles between buses or of a deflection are, but
# not where a cosine has no slope.
SMALL_ANGLE = 0.1
# Values beyond this are no more than what equations without a solution run off to.
LARGEST_TOLD = 1e100
# Golden section: multiples of it modulo 1 spread evenly without repeating, so that starts differ.
GOLDEN_SECTION = 0.6180339887498949
# Bounds of a wider ratio are halved in the logarithm.
WIDE = 10.0


@dataclass(frozen=True, slots=True)
class Start:
    """Start of one block, in SI, by position of its unknowns.

    ``assumed`` holds the positions of unknowns without a guess of their own; ``blind`` those among them that
    neither bounds on both sides nor an equation placed, so that they were started at a typical value. ``typical`` are
    the values with what equations have told from those alone at a typical value too; empty where that is nothing.
    """

    values: tuple[float, ...]
    lower: tuple[float, ...]
    upper: tuple[float, ...]
    magnitude: tuple[float, ...]
    assumed: tuple[int, ...]
    blind: tuple[int, ...] = ()
    typical: tuple[float, ...] = ()


def starting_values(
    unknowns: Sequence[int],
    formulas: Sequence[Formula],
    values: Sequence[float],
    guesses: Guesses,
    dimensions: Sequence[Dimension | None],
) -> Start:
    """Start values, bounds and magnitudes of the unknowns of one block.

    Parameters
    ----------
    unknowns : sequence of int
        Quantity numbers, ascending.
    formulas : sequence of Formula
        The block's equations.
    values : sequence of float
        SI values by quantity number, nan where not known yet.
    """
    plan = plan_of(formulas, unknowns)
    if plan.start is not None and plan.start.guesses is guesses:
        again = plan.start.values(values)
        if again is not None:
            return _started_alike(plan.start.first, again)
    found: dict[int, float] = {}
    assumed = []
    blind = []
    room = _Room(guesses, argument_ranges(unknowns, formulas, values))
    for position, quantity in enumerate(unknowns):
        if quantity in guesses.near:
            found[quantity] = room.on_curves(guesses.near[quantity], quantity, position)
            continue
        assumed.append(position)
        between = point_between(*room.bounds(quantity), position)
        if between is not None:
            found[quantity] = between
    given = dict(found)
    propagation = _Propagation(unknowns, formulas, values, found)
    told = propagation.run(room)
    settled = len(found) == len(unknowns)
    zero = set(() if settled else _told_zero(unknowns, formulas, values, found))
    for position, quantity in enumerate(unknowns):
        if quantity in zero:
            # A difference of equal starts, such as an angle between buses: near zero, not anywhere.
            near = NEAR_ZERO * _typical(dimensions[quantity], position)
            propagation.put(quantity, _inside(near, room, quantity))
    propagation.run(room)
    if len(found) < len(unknowns):
        room = _narrowed(unknowns, formulas, values, room)
    placed = set(found)
    turned = angles(formulas) if len(found) < len(unknowns) else frozenset()

    def usual(quantity: int, position: int) -> float:
        size = _typical(dimensions[quantity], position)
        return _inside(SMALL_ANGLE * size if quantity in turned else size, room, quantity)

    for position, quantity in enumerate(unknowns):
        if quantity not in found:
            blind.append(position)
            propagation.put(quantity, usual(quantity, position))
            # One seed may let the equations tell the others.
            propagation.run(room)
    placed.update(unknowns[position] for position in blind)
    bounds = [guesses.bounds(quantity) for quantity in unknowns]
    start = Start(
        tuple(found[q] for q in unknowns),
        tuple(low for low, _ in bounds),
        tuple(high for _, high in bounds),
        tuple(_magnitude(found[q], room, q, dimensions[q]) for q in unknowns),
        tuple(assumed),
        tuple(blind),
        tuple(found[q] if q in placed else usual(q, p) for p, q in enumerate(unknowns))
        if len(placed) < len(unknowns)
        else (),
    )
    if plan.often and settled and told is not None and not room.ranges:
        plan.start = StartPlan(plan, guesses, given, told, start)
    return start


def _started_alike(first: Start, values: Sequence[float]) -> Start:
    """A start at other values that guesses, bounds and equations have told in the same way."""
    magnitude = tuple([abs(v) or m for v, m in zip(values, first.magnitude)])
    return Start(tuple(values), first.lower, first.upper, magnitude, first.assumed)


@dataclass(frozen=True, slots=True)
class _Room:
    """Where the unknowns may start: within their bounds, and where the curves they are read by have values."""

    guesses: Guesses
    ranges: Mapping[int, Range]

    def bounds(self, quantity: int) -> Range:
        """Lower and upper bound of a start; the quantity's own where no curve reaches into them."""
        low, high = self.guesses.bounds(quantity)
        if quantity not in self.ranges:
            return low, high
        first, last = self.ranges[quantity]
        narrow = max(low, first), min(high, last)
        return narrow if narrow[0] < narrow[1] else (low, high)

    def on_curves(self, value: float, quantity: int, position: int) -> float:
        """A start as written, moved into the range of the curves it is outside of."""
        first, last = self.ranges.get(quantity, (-math.inf, math.inf))
        if first <= value <= last:
            return value
        between = point_between(*self.bounds(quantity), position)
        return value if between is None else between


def _narrowed(
    unknowns: Sequence[int], formulas: Sequence[Formula], values: Sequence[float], room: _Room
) -> _Room:
    """The room that bounds carried through the equations leave; as it is where there is no solution in it."""
    if len(unknowns) > MOST_NARROWED:
        return room
    found = narrowed(unknowns, formulas, values, [room.bounds(q) for q in unknowns])
    if found.empty >= 0:
        return room
    ranges = {
        q: (low, high)
        for q, (low, high) in zip(unknowns, found.ranges)
        if low < LARGEST_TOLD and high > -LARGEST_TOLD
    }
    return _Room(room.guesses, ranges)


def point_between(low: float, high: float, position: int) -> float | None:
    """A point well inside finite bounds, different for each position; None where a side is open."""
    if not (math.isfinite(low) and math.isfinite(high)):
        return None
    part = 0.35 + 0.3 * ((position + 1) * GOLDEN_SECTION % 1.0)
    if low > 0.0 and high / low > WIDE:
        return float(low * (high / low) ** part)
    return low + part * (high - low)


def _stands_alone(tape: Tape, output: int, slot: int) -> bool:
    """Whether an expression is a quantity, or that times or by a number: in which scale it is written is no matter."""
    instructions = tape.instructions
    operation, *rest = instructions[output]
    while operation in ("mul", "div", "neg"):
        factors = [i for i in rest if instructions[i][0] not in ("literal", "const")]
        if len(factors) != 1 or (operation == "div" and factors[0] != rest[0]):
            return False
        operation, *rest = instructions[factors[0]]
    return (operation, *rest) == ("quantity", slot)


class _Propagation:
    """Lets each equation with one magnitude missing tell it, until none does.

    An equation with the missing magnitude alone on a side goes before one that has to be turned: ``h = Nu*k/d`` is
    what h is, while what a balance leaves for it may be the small difference of rough starts. Among equals they are
    asked in turn, round after round; each is asked when it comes to have one magnitude missing, and not again, so
    that the time is linear in their length.

    Parameters
    ----------
    unknowns, formulas, values
        As in `starting_values`.
    found : mutable mapping of int to float
        Starts so far; those told are added.
    """

    def __init__(
        self,
        unknowns: Sequence[int],
        formulas: Sequence[Formula],
        values: Sequence[float],
        found: MutableMapping[int, float],
    ) -> None:
        self._formulas = formulas
        self._values = values
        self._found = found
        self._missing: list[set[int]] = []
        self._readers: dict[int, list[int]] = {q: [] for q in unknowns if q not in found}
        # Equations to be asked: whether they have to be turned, by round and number.
        self._ready: list[tuple[bool, int, int]] = []
        if not self._readers:
            return
        for number, formula in enumerate(formulas):
            missing = {q for q in formula.quantities if q in self._readers}
            self._missing.append(missing)
            for quantity in missing:
                self._readers[quantity].append(number)
            if len(missing) == 1:
                self._ready.append((self._turned(number), 0, number))
        heapify(self._ready)

    def _turned(self, number: int) -> bool:
        """Whether the one magnitude missing in an equation does not stand alone on a side, but for a factor."""
        formula = self._formulas[number]
        (quantity,) = self._missing[number]
        slot = formula.quantities.index(quantity)
        return not any(_stands_alone(formula.tape, output, slot) for output in formula.tape.outputs)

    def put(self, quantity: int, start: float, after: tuple[int, int] = (0, -1)) -> None:
        """Give an unknown its start; `after` is the round and number of the equation that has told it."""
        self._found[quantity] = start
        turn, by = after
        for number in self._readers[quantity]:
            self._missing[number].discard(quantity)
            if len(self._missing[number]) == 1:
                heappush(self._ready, (self._turned(number), turn if number > by else turn + 1, number))

    def run(self, room: _Room) -> list[Told] | None:
        """Ask the equations until none has one magnitude missing.

        Returns
        -------
        list of Told or None
            What has been told, in order; None where it was not all plain: an equation had no value to tell or a value
            was moved inside its bounds.
        """
        told: list[Told] = []
        plain = True
        while self._ready:
            _, turn, number = heappop(self._ready)
            if not self._missing[number]:
                continue
            (quantity,) = self._missing[number]
            formula = self._formulas[number]
            value = _told(formula, quantity, self._values, self._found)
            if value is None:
                plain = plain and isolate(formula.tape, formula.quantities.index(quantity)) is None
                continue
            start = _inside(value.value, room, quantity)
            plain = plain and start == value.value and value.candidate == 0
            told.append(Told(number, quantity, value.candidate))
            self.put(quantity, start, (turn, number))
        return told if plain else None


def _told_zero(
    unknowns: Sequence[int],
    formulas: Sequence[Formula],
    values: Sequence[float],
    found: Mapping[int, float],
) -> list[int]:
    """The unknowns without a start that some equation makes exactly zero."""
    wanted = {q for q in unknowns if q not in found}
    told: dict[int, None] = {}
    for formula in formulas:
        missing = [q for q in formula.quantities if q in wanted]
        if len(missing) == 1 and 0.0 in _candidates(formula, missing[0], values, found):
            told[missing[0]] = None
    return list(told)


class _Value(NamedTuple):
    """A value, and which of the closed forms it is of."""

    value: float
    candidate: int


def _told(
    formula: Formula, quantity: int, values: Sequence[float], found: Mapping[int, float]
) -> _Value | None:
    """What the equation makes the quantity, with the others at their values or starts; zero tells nothing."""
    found_values = enumerate(_candidates(formula, quantity, values, found))
    return next((_Value(value, i) for i, value in found_values if value != 0.0), None)


def _candidates(
    formula: Formula, quantity: int, values: Sequence[float], found: Mapping[int, float]
) -> Iterator[float]:
    isolation = isolate(formula.tape, formula.quantities.index(quantity))
    if isolation is None:
        return
    inputs = [found.get(q, values[q]) for q in formula.quantities]
    for candidate in isolation.candidates:
        result = value_function(candidate.tape)(*inputs, *literal_values(formula))
        if math.isfinite(result):
            yield float(result)


def typical_size(dimension: Dimension | None) -> float:
    """What a quantity of a dimension is like where nothing tells."""
    return TYPICAL.get("" if dimension is None else dimension.text, 1.0)


def _typical(dimension: Dimension | None, position: int) -> float:
    return typical_size(dimension) * (1.0 + 0.2 * ((position + 1) * GOLDEN_SECTION % 1.0))


def _inside(value: float, room: _Room, quantity: int) -> float:
    """The value, mirrored or moved to the inner side of a bound it passes."""
    low, high = room.bounds(quantity)
    if low < value < high:
        return value
    for candidate in (abs(value), -abs(value)):
        if low < candidate < high:
            return candidate
    if math.isfinite(low) and math.isfinite(high):
        return point_between(low, high, 0) or low
    if math.isfinite(low):
        return low + (abs(low) or abs(value) or 1.0) * 0.5
    return high - (abs(high) or abs(value) or 1.0) * 0.5


def _magnitude(value: float, room: _Room, quantity: int, dimension: Dimension | None) -> float:
    """Typical size of an unknown, > 0."""
    if value != 0.0:
        return abs(value)
    low, high = room.bounds(quantity)
    finite = [abs(b) for b in (low, high) if math.isfinite(b) and b != 0.0]
    return max(finite) if finite else typical_size(dimension)
