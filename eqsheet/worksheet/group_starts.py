"""Starting values of a large block of families, worked out as arrays.

The rules are those of `starting_values`, but for two. A family is no chain: an equation tells no start from one that
an equation of the same form has told before it, for errors would grow from member to member. And what nothing tells
starts near the members of its family that have a value; members are alike.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from functools import cached_property
from typing import cast

import numpy as np
from numpy.typing import NDArray

from eqsheet.model.evaluate import evaluate_arrays
from eqsheet.model.isolate import isolate
from eqsheet.units.dimension import Dimension
from eqsheet.worksheet.angles import slots_of_angles
from eqsheet.worksheet.array_equations import Shape
from eqsheet.worksheet.curve_ranges import Range
from eqsheet.worksheet.group_guesses import GuessArrays
from eqsheet.worksheet.starting_values import (
    GOLDEN_SECTION,
    NEAR_ZERO,
    SMALL_ANGLE,
    WIDE,
    Start,
    typical_size,
)

Numbers = NDArray[np.int64]
Array = NDArray[np.float64]
Mask = NDArray[np.bool_]
# Where the known members of a family are zero the others start at this part of their typical size: nearer, differences
# between them would be too small to take their scale from.
BESIDE_ZERO = 0.1
# Forms of equations that are told apart as origins of a start; more share the marks of others.
_MARKS = 64


def group_starts(
    shapes: Sequence[Shape],
    unknowns: Numbers,
    values: Array,
    guesses: GuessArrays,
    ranges: Mapping[int, Range],
    firsts: Numbers,
    parts: Mask,
    dimensions: Sequence[Dimension | None],
) -> Start:
    """Start values, bounds and magnitudes of the unknowns of one block.

    Parameters
    ----------
    shapes : sequence of Shape
        The block's equations.
    unknowns : ndarray (n,)
        Quantity numbers, ascending.
    values : ndarray (quantities,)
        SI values, nan where not known yet.
    guesses : GuessArrays
    ranges : mapping of int to (float, float)
        Where curves have values, by quantity number: see `argument_ranges`.
    firsts : ndarray
        Numbers of the first members of all families, ascending; quantities that are no family among them.
    parts : ndarray (quantities,)
        Which quantities are parts of large sums: they follow from the others.
    dimensions : sequence of (Dimension or None)
        By quantity.
    """
    low, high = guesses.lower[unknowns], guesses.upper[unknowns]
    low, high = np.where(np.isnan(low), -math.inf, low), np.where(np.isnan(high), math.inf, high)
    work = _Work(shapes, unknowns, values, *_room(unknowns, low, high, ranges))
    near = guesses.near[unknowns]
    assumed = np.flatnonzero(np.isnan(near) & ~parts[unknowns])
    between = _between(work.low, work.high, work.share)
    outside = np.isnan(near) | (_limits(unknowns, ranges) & ((near < work.low) | (near > work.high)))
    given = np.where(outside & ~np.isnan(between), between, near)
    work.open = np.isnan(given)
    work.current[unknowns] = given
    blind: list[int] = []
    if work.open_positions().size:
        work.tell()
        zero = np.flatnonzero(work.told_zero & work.open)
        sizes = _sizes(unknowns[zero], firsts, dimensions)
        work.put(zero, NEAR_ZERO * sizes * (1.0 + 0.2 * work.share[zero]))
        work.tell()
        while work.open_positions().size:
            seeded = _next_family(work, firsts, parts)
            blind += seeded[~parts[unknowns[seeded]]].tolist()
            size = float(_sizes(unknowns[seeded[:1]], firsts, dimensions)[0])
            if work.are_angles[unknowns[seeded[0]]]:
                size *= SMALL_ANGLE
            work.put(seeded, _like_others(work, seeded, firsts, size))
            work.tell()
    start = work.current[unknowns]
    magnitude = np.abs(start)
    bare = np.flatnonzero(magnitude == 0.0)
    magnitude[bare] = _magnitudes(low[bare], high[bare], _sizes(unknowns[bare], firsts, dimensions))
    return Start(
        _as_it_is(start),
        _as_it_is(low),
        _as_it_is(high),
        _as_it_is(magnitude),
        tuple(assumed.tolist()),
        tuple(sorted(blind)),
    )


def _as_it_is(array: Array) -> tuple[float, ...]:
    """The array, which serves as the sequence of floats it is; a tuple of a million would take long to make."""
    return cast(tuple[float, ...], array)


class _Work:
    """Starts so far, and the equations that can tell more of them.

    Attributes
    ----------
    current : ndarray (quantities,)
        Known values and starts, nan where there is none yet.
    open : ndarray (n,) of bool
        Which unknowns have no start.
    told_zero : ndarray (n,) of bool
        Which of them some equation makes exactly zero.
    low, high : ndarray (n,)
        Where the unknowns may start.
    share : ndarray (n,)
        Numbers between 0 and 1, different for all unknowns, so that no two start at the same number.
    """

    def __init__(
        self, shapes: Sequence[Shape], unknowns: Numbers, values: Array, low: Array, high: Array
    ) -> None:
        total = len(values)
        self.unknowns = unknowns
        self.low, self.high = low, high
        self.share = np.asarray((np.arange(len(unknowns)) + 1.0) * GOLDEN_SECTION % 1.0, dtype=float)
        self.current = values.copy()
        self.open: Mask = np.ones(len(unknowns), dtype=bool)
        self.told_zero = np.zeros(len(unknowns), dtype=bool)
        self._position = np.full(total, -1, dtype=np.int64)
        self._position[unknowns] = np.arange(len(unknowns))
        self._shapes = shapes
        self._asked = [np.zeros(len(shape.rows), dtype=bool) for shape in shapes]
        # Which forms of equations a start comes from, by quantity, a bit each.
        self._origin = np.zeros(total, dtype=np.uint64)

    @cached_property
    def have_own_equations(self) -> Mask:
        """Which quantities (quantities,) stand alone on a side of some equation."""
        found = np.zeros(len(self.current), dtype=bool)
        for shape in self._shapes:
            for output in shape.tape.outputs:
                operation, *rest = shape.tape.instructions[output]
                if operation == "quantity":
                    found[shape.quantities[:, rest[0]]] = True
        return found

    @cached_property
    def are_angles(self) -> Mask:
        """Which quantities (quantities,) are angles in every equation they occur in; see `angles`."""
        under, elsewhere = (np.zeros(len(self.current), dtype=bool) for _ in range(2))
        for shape in self._shapes:
            for slots, found in zip(slots_of_angles(shape.tape), (under, elsewhere)):
                found[shape.quantities[:, list(slots)]] = True
        return under & ~elsewhere

    def open_positions(self) -> Numbers:
        """Positions of the unknowns without a start."""
        return np.flatnonzero(self.open)

    def put(self, positions: Numbers, starts: Array) -> None:
        """Give unknowns their starts, moved inside their bounds."""
        self.current[self.unknowns[positions]] = _inside(starts, self.low[positions], self.high[positions])
        self.open[positions] = False

    def tell(self) -> None:
        """Let each equation with one start missing tell it, until none does."""
        while any(self._ask(number, shape) for number, shape in enumerate(self._shapes)):
            pass

    def _ask(self, number: int, shape: Shape) -> bool:
        """Let the equations of one form tell what they can; whether they did."""
        asked = self._asked[number]
        missing = self._missing(shape.quantities)
        rows = np.flatnonzero((missing.sum(axis=1) == 1) & ~asked)
        if not len(rows):
            return False
        asked[rows] = True
        mark = np.uint64(1 << number % _MARKS)
        origin = np.bitwise_or.reduce(self._origin[shape.quantities[rows]], axis=1)
        fresh = (origin & mark) == 0
        rows, origin = rows[fresh], origin[fresh]
        slots = missing[rows].argmax(axis=1)
        told = False
        for slot in np.flatnonzero(np.bincount(slots)).tolist():
            mine = slots == slot
            told = self._tell_slot(shape, slot, rows[mine], origin[mine] | mark) or told
        return told

    def _missing(self, quantities: Numbers) -> Mask:
        position = self._position[quantities]
        return np.asarray((position >= 0) & self.open[position])

    def _tell_slot(self, shape: Shape, slot: int, rows: Numbers, origin: NDArray[np.uint64]) -> bool:
        """Let some equations tell the unknown in one of their slots; whether they did."""
        positions = self._position[shape.quantities[rows, slot]]
        starts, zero = self._values(shape, slot, rows)
        self.told_zero[positions[zero]] = True
        able = np.flatnonzero(~np.isnan(starts) & self.open[positions])
        # Of several that tell the same the first does.
        positions, firsts = np.unique(positions[able], return_index=True)
        chosen = able[firsts]
        self.put(positions, starts[chosen])
        self._origin[self.unknowns[positions]] = origin[chosen]
        return bool(len(positions))

    def _values(self, shape: Shape, slot: int, rows: Numbers) -> tuple[Array, Mask]:
        """What equations make one of their quantities, nan where nothing or zero; and where zero."""
        found, zero = np.full(len(rows), math.nan), np.zeros(len(rows), dtype=bool)
        isolation = isolate(shape.tape, slot)
        if isolation is None:
            return found, zero
        inputs = tuple(self.current[shape.quantities[rows].T])
        literals = tuple(literal[rows] for literal in shape.literals)
        with np.errstate(all="ignore"):
            for candidate in isolation.candidates:
                (output,) = candidate.tape.outputs
                result = np.asarray(evaluate_arrays(candidate.tape, inputs, literals)[output], dtype=float)
                result = np.broadcast_to(result, (len(rows),))
                zero |= result == 0.0
                found = np.where(np.isnan(found) & np.isfinite(result) & (result != 0.0), result, found)
        return found, zero


def _room(unknowns: Numbers, low: Array, high: Array, ranges: Mapping[int, Range]) -> tuple[Array, Array]:
    """Bounds (n,) of the starts: the unknowns' own, narrowed to the ranges of curves that reach into them."""
    low, high = low.copy(), high.copy()
    for quantity, (first, last) in ranges.items():
        position = int(np.searchsorted(unknowns, quantity))
        narrow = max(low[position], first), min(high[position], last)
        if narrow[0] < narrow[1]:
            low[position], high[position] = narrow
    return low, high


def _limits(unknowns: Numbers, ranges: Mapping[int, Range]) -> Mask:
    """Which unknowns (n,) are read by curves."""
    return np.isin(unknowns, np.fromiter(ranges, np.int64, len(ranges)))


def _between(low: Array, high: Array, share: Array) -> Array:
    """Points inside finite bounds (n,), as `starting_values` takes them; nan where a side is open."""
    part = 0.35 + 0.3 * share
    with np.errstate(all="ignore"):
        ratio = high / low
        wide = (low > 0.0) & (ratio > WIDE)
        found = np.where(wide, low * ratio**part, low + part * (high - low))
    return np.where(np.isfinite(low) & np.isfinite(high), found, math.nan)


def _inside(starts: Array, low: Array, high: Array) -> Array:
    """The starts, mirrored or moved to the inner side of a bound they pass."""
    found = starts.copy()
    for candidate in (np.abs(starts), -np.abs(starts)):
        wrong = ~((low < found) & (found < high))
        found = np.where(wrong & (low < candidate) & (candidate < high), candidate, found)
    left = np.flatnonzero(~((low < found) & (found < high)))
    if len(left):
        found[left] = _moved(starts[left], low[left], high[left])
    return found


def _moved(starts: Array, low: Array, high: Array) -> Array:
    """Points on the inner side of bounds that the starts pass on either side of zero."""
    size = np.where(starts != 0.0, np.abs(starts), 1.0)
    above = low + 0.5 * np.where(low != 0.0, np.abs(low), size)
    below = high - 0.5 * np.where(high != 0.0, np.abs(high), size)
    between = _between(low, high, np.zeros(len(starts)))
    return np.where(np.isnan(between), np.where(np.isfinite(low), above, below), between)


def _next_family(work: _Work, firsts: Numbers, parts: Mask) -> Numbers:
    """Positions of the unknowns without a start that are of one family, the next to be started.

    Quantities with an equation of their own, which tells them once the others have a start, come after those, and
    parts of sums last.
    """
    left = work.open_positions()
    later = work.have_own_equations[work.unknowns[left]] + 2 * parts[work.unknowns[left]]
    family = np.searchsorted(firsts, work.unknowns[left], side="right")
    return np.asarray(left[family == family[later.argmin()]])


def _like_others(work: _Work, positions: Numbers, firsts: Numbers, size: float) -> Array:
    """Starts of members of one family near those that have a value, else near its typical size."""
    share = work.share[positions]
    family = int(np.searchsorted(firsts, work.unknowns[positions[0]], side="right"))
    end = firsts[family] if family < len(firsts) else len(work.current)
    members = work.current[firsts[family - 1] : end]
    members = members[np.isfinite(members)]
    if not len(members):
        return np.asarray(size * (1.0 + 0.2 * share))
    low, high = float(members.min()), float(members.max())
    if low < high:
        return _between(np.full(len(share), low), np.full(len(share), high), share)
    if low == 0.0:
        return np.asarray(BESIDE_ZERO * size * (1.0 + 0.2 * share))
    return np.asarray(low * (0.9 + 0.2 * share))


def _sizes(quantities: Numbers, firsts: Numbers, dimensions: Sequence[Dimension | None]) -> Array:
    """Typical size of some quantities."""
    families, which = np.unique(np.searchsorted(firsts, quantities, side="right") - 1, return_inverse=True)
    sizes = [typical_size(dimensions[int(firsts[family])]) for family in families]
    return np.array(sizes, dtype=float)[which]


def _magnitudes(low: Array, high: Array, sizes: Array) -> Array:
    """Sizes of unknowns that start at zero: by their bounds, else as given."""
    with np.errstate(invalid="ignore"):
        bounds = np.maximum(*(np.where(np.isfinite(one), np.abs(one), 0.0) for one in (low, high)))
    return np.where(bounds > 0.0, bounds, sizes)
