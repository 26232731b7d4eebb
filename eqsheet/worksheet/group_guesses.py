"""Guesses of a worksheet with large families, worked out as arrays."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.model.equation_group import GuessGroup
from eqsheet.model.evaluate import evaluate_arrays
from eqsheet.model.system import EquationSystem, Place
from eqsheet.worksheet.guesses import Guesses, slots_used, values_of_guess, work_out_guesses
from eqsheet.worksheet.prepare import Prepared

Array = NDArray[np.float64]
Numbers = NDArray[np.int64]


class ByQuantity(Mapping[int, float]):
    """A mapping from quantity numbers to values, over an array with nan where there is none."""

    def __init__(self, array: Array) -> None:
        self.array = array

    def __getitem__(self, quantity: int) -> float:
        value = float(self.array[quantity])
        if value != value:
            raise KeyError(quantity)
        return value

    def get(self, quantity: int, default: Any = None) -> Any:
        """As of any mapping."""
        value = float(self.array[quantity])
        return default if value != value else value

    def __contains__(self, quantity: object) -> bool:
        return isinstance(quantity, int) and self.array[quantity] == self.array[quantity]

    def __iter__(self) -> Iterator[int]:
        return iter(np.flatnonzero(~np.isnan(self.array)).tolist())

    def __len__(self) -> int:
        return int((~np.isnan(self.array)).sum())


class ByBlock(Mapping[int, int]):
    """A mapping from quantity numbers to block numbers, over an array with 0 where there is none."""

    def __init__(self, array: NDArray[np.int32]) -> None:
        self.array = array

    def __getitem__(self, quantity: int) -> int:
        number = int(self.array[quantity])
        if not number:
            raise KeyError(quantity)
        return number

    def __iter__(self) -> Iterator[int]:
        return iter(np.flatnonzero(self.array).tolist())

    def __len__(self) -> int:
        return int(np.count_nonzero(self.array))


class _Places(Mapping[tuple[int, str], Place]):
    """Places by quantity and role: `which` holds positions in `places`, -1 for none."""

    def __init__(self, places: list[Place], which: Mapping[str, NDArray[np.int32]]) -> None:
        self._places = places
        self._which = which

    def __getitem__(self, key: tuple[int, str]) -> Place:
        quantity, role = key
        position = int(self._which[role][quantity])
        if position < 0:
            raise KeyError(key)
        return self._places[position]

    def __iter__(self) -> Iterator[tuple[int, str]]:
        return ((q, role) for role, which in self._which.items() for q in np.flatnonzero(which >= 0).tolist())

    def __len__(self) -> int:
        return sum(int((which >= 0).sum()) for which in self._which.values())


@dataclass(frozen=True)
class GuessArrays:
    """Start values and bounds (quantities,) in SI, nan where nothing was written."""

    near: Array
    lower: Array
    upper: Array


def guess_arrays(guesses: Guesses, total: int) -> GuessArrays:
    """Guesses as arrays over all quantities."""
    return GuessArrays(*(_array(one, total) for one in (guesses.near, guesses.lower, guesses.upper)))


def _array(values: Mapping[int, float], total: int) -> Array:
    if isinstance(values, ByQuantity):
        return values.array
    array = np.full(total, math.nan)
    for quantity, value in values.items():
        array[quantity] = value
    return array


def work_out_group_guesses(prepared: Prepared) -> tuple[Guesses, tuple[Diagnostic, ...]]:
    """As `work_out_guesses`, which it leaves all to where something is to be said or followed up."""
    found = _plain_guesses(prepared)
    if found is not None:
        return found, ()
    from eqsheet.worksheet.follow_from_knowns import follow_from_knowns

    return work_out_guesses(prepared.system, follow_from_knowns(prepared), prepared.kinds)


def _plain_guesses(prepared: Prepared) -> Guesses | None:
    """Guesses from knowns alone that nothing is wrong with; else None."""
    system = prepared.system
    total = len(system.names)
    work = _Work(total)
    known = np.full(total, math.nan)
    numbers = np.fromiter(prepared.known_values.keys(), np.int64, len(prepared.known_values))
    known[numbers] = np.fromiter(prepared.known_values.values(), float, len(numbers))
    for exact in (True, False):
        for item in system.written_guesses:
            if item.exact != exact:
                continue
            said: list[Diagnostic] = []
            values = values_of_guess(system, item, prepared.known_values, said)
            if said:
                return None
            for role, value in zip(item.roles, values):
                work.put(role, np.array([item.quantity]), np.array([value]), item.place)
        for group in system.guess_groups:
            if group.exact != exact:
                continue
            arrays = _values(group, known)
            if arrays is None:
                return None
            for role, array in zip(group.roles, arrays):
                work.put(role, group.targets, array, group.place)
    _above_zero(system, prepared, work)
    near, lower, upper = (work.values[role] for role in ("near", "lower", "upper"))
    with np.errstate(invalid="ignore"):
        empty = ~(lower < upper) & ~np.isnan(lower) & ~np.isnan(upper)
        outside = (near < lower) | (near > upper)
    if empty.any() or (outside & np.isnan(known)).any():
        return None
    return Guesses(ByQuantity(near), ByQuantity(lower), ByQuantity(upper), _Places(work.places, work.which))


class _Work:
    """Values gathered so far, by role; the first to come stays."""

    def __init__(self, total: int) -> None:
        self.values = {role: np.full(total, math.nan) for role in ("near", "lower", "upper")}
        self.which = {role: np.full(total, -1, dtype=np.int32) for role in self.values}
        self.places: list[Place] = []

    def put(self, role: str, targets: Numbers, values: Array, place: Place) -> None:
        """Give the targets that have none their value."""
        free = np.isnan(self.values[role][targets])
        self.values[role][targets[free]] = values[free]
        self.which[role][targets[free]] = len(self.places)
        self.places.append(place)


def _values(group: GuessGroup, known: Array) -> tuple[Array, ...] | None:
    """Values of the outputs for all members; None where a quantity they take is no known, or one is not finite."""
    bound = group.bound
    used = slots_used(bound.formula.tape)
    columns = []
    for slot in range(bound.numbers.shape[1]):
        numbers = bound.numbers[:, slot]
        own = np.zeros(len(numbers), dtype=bool) if slot in used else numbers == group.targets
        if (np.isnan(known[numbers]) & ~own).any():
            return None
        columns.append(known[numbers])
    values = evaluate_arrays(bound.formula.tape, columns, bound.literals)
    found = tuple(
        np.broadcast_to(np.asarray(values[o], dtype=float), (len(group),)) for o in bound.formula.tape.outputs
    )
    return found if all(np.isfinite(one).all() for one in found) else None


def _above_zero(system: EquationSystem, prepared: Prepared, work: _Work) -> None:
    """Readings are kept above absolute zero."""
    assert system.firsts is not None
    ends = np.append(system.firsts[1:], len(system.names))
    lower, which = work.values["lower"], work.which["lower"]
    for first, end in zip(system.firsts.tolist(), ends.tolist()):
        if prepared.kinds[first] == "reading":
            part = slice(first, end)
            low = np.isnan(lower[part]) | (lower[part] < 0.0)
            lower[part][low] = 0.0
            which[part][low] = -1
