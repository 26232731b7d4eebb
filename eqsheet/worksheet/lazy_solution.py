"""The parts of a solution with large families that are made when asked for: quantities, blocks, own lines."""

from __future__ import annotations

from collections.abc import Callable, ItemsView, Iterator, Mapping, Sequence, ValuesView
from functools import cached_property
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from eqsheet.model.aggregate_parts import is_part
from eqsheet.model.grouping import PreferredUnits
from eqsheet.model.lazy_sequence import LazySequence
from eqsheet.model.system import EquationSystem
from eqsheet.syntax.nodes import Statement
from eqsheet.worksheet.block_run import BlockRun
from eqsheet.worksheet.deferred import DeferredSequence
from eqsheet.worksheet.group_equations import GroupedEquations
from eqsheet.worksheet.group_guesses import ByBlock
from eqsheet.worksheet.many_values import ManyQuantities, ManyValues
from eqsheet.worksheet.prepare import Prepared
from eqsheet.worksheet.run import Run
from eqsheet.worksheet.solution import BlockReport, QuantityValue

T = TypeVar("T")
Numbers = NDArray[np.int64]
# Longer lists are made item by item.
MOST_PICKED = 64


class LazyQuantities(ManyQuantities):
    """Quantities by name, in order of showing.

    Parameters
    ----------
    system : EquationSystem
    order : ndarray (m,)
        Numbers of the quantities there are, in order of showing.
    make : callable
        Quantity number to its value.
    origins : Origins
    """

    def __init__(
        self, system: EquationSystem, order: Numbers, make: Callable[[int], QuantityValue], origins: Origins
    ) -> None:
        self._system = system
        self._order = order
        self._there = np.zeros(len(system.names), dtype=bool)
        self._there[order] = True
        self._make = make
        self._origins = origins

    def __getitem__(self, name: str) -> QuantityValue:
        number = self._system.number(name) if isinstance(name, str) else None
        if number is None or not self._there[number]:
            raise KeyError(name)
        return self._make(number)

    def __iter__(self) -> Iterator[str]:
        names = self._system.names
        return (names[q] for q in self._order.tolist())

    def __len__(self) -> int:
        return len(self._order)

    def values(self) -> ValuesView[QuantityValue]:
        """As of any mapping, without looking numbers up by name."""
        return _MadeValues(self, self._order, self._make)

    def items(self) -> ItemsView[str, QuantityValue]:
        """As of any mapping, without looking numbers up by name."""
        return _MadeItems(self, self._order, self._make)

    def together(self, most: int) -> Sequence[ManyValues]:
        """See `ManyQuantities`."""
        order, origins, make = self._order, self._origins, self._make
        if not len(order):
            return ()
        statement, block = origins.statement[order], origins.block[order]
        firsts = self._system.firsts
        assert firsts is not None
        family = np.searchsorted(firsts, order, side="right")
        section = origins.section[statement]
        key = (section * (len(firsts) + 1) + family) * 2 + (block > 0)
        assert isinstance(self._system.units, PreferredUnits)
        units = self._system.units.apart()
        if units.any():
            key = key * (int(units.max()) + 1) + units[order]
        _, begins, which, counts = np.unique(key, return_index=True, return_inverse=True, return_counts=True)
        members = np.split(np.argsort(which, kind="stable"), np.cumsum(counts)[:-1])
        found: list[tuple[int, ManyValues]] = []
        for begin, positions in zip(begins.tolist(), members):
            if len(positions) <= most:
                found += [(begin, ManyValues.of((make(int(order[p])),))) for p in positions]
                continue
            si = origins.si[order[positions]]
            # Of a block of one equation the statement says it all.
            several = np.where(origins.equations[block[positions]] > 1, block[positions], 0)
            _, distinct = np.unique(np.stack([statement[positions], several]), axis=1, return_index=True)
            if len(distinct) > MOST_PICKED and not several.any():
                # Of the rows of a table the first and the last line are told.
                lines = origins.line[statement[positions[distinct]]]
                distinct = distinct[[lines.argmin(), lines.argmax()]]
            first, smallest, largest = (make(int(order[positions[p]])) for p in (0, si.argmin(), si.argmax()))
            of_each = tuple(make(int(order[positions[p]])) for p in np.sort(distinct))
            found.append((begin, ManyValues(len(positions), first, smallest, largest, of_each)))
        found.sort(key=lambda pair: pair[0])
        return tuple(values for _, values in found)

    def __repr__(self) -> str:
        return f"LazyQuantities({len(self)} quantities)"


class _MadeValues(ValuesView[QuantityValue]):
    """Values made one by one, in order."""

    def __init__(self, mapping: LazyQuantities, order: Numbers, make: Callable[[int], QuantityValue]) -> None:
        super().__init__(mapping)
        self._numbers = order
        self._make = make

    def __iter__(self) -> Iterator[QuantityValue]:
        return map(self._make, self._numbers.tolist())


class _MadeItems(ItemsView[str, QuantityValue]):
    """Names and values made one by one, in order."""

    def __init__(self, mapping: LazyQuantities, order: Numbers, make: Callable[[int], QuantityValue]) -> None:
        super().__init__(mapping)
        self._numbers = order
        self._make = make

    def __iter__(self) -> Iterator[tuple[str, QuantityValue]]:
        return ((value.name, value) for value in map(self._make, self._numbers.tolist()))


class Origins:
    """Where the values of quantities come from, as arrays, worked out once somebody asks.

    Attributes
    ----------
    si : ndarray (quantities,)
        Values.
    block : ndarray (quantities,)
        Number of the block that gives each, 0 for none.
    statement : ndarray (quantities,)
        The own statement of each solved one, that which sets a known; -1 for neither.
    equations : ndarray (blocks + 1,)
        How many equations each block has, by its number.
    line : ndarray (statements,)
        Line of each statement, in its file.
    section : ndarray (statements + 1,)
        A number for the section of each statement; the last serves those without one.
    """

    def __init__(self, equations: GroupedEquations, own: OwnStatements, prepared: Prepared, run: Run) -> None:
        self._needed = equations, own, prepared, run

    @cached_property
    def si(self) -> NDArray[np.float64]:
        """See above."""
        return np.array(self._needed[3].values)

    @cached_property
    def block(self) -> Numbers:
        """See above."""
        _, _, prepared, run = self._needed
        return _array(run.block_of, len(prepared.system.names))

    @cached_property
    def statement(self) -> Numbers:
        """See above."""
        equations, own, prepared, _ = self._needed
        found = own.array.copy()
        setters = prepared.setters
        quantities = np.fromiter(setters.keys(), np.int64, len(setters))
        lines = equations.statement[np.fromiter(setters.values(), np.int64, len(setters))]
        free = found[quantities] < 0
        found[quantities[free]] = lines[free]
        return found

    @cached_property
    def equations(self) -> Numbers:
        """See above."""
        _, _, prepared, _ = self._needed
        return np.bincount(_blocks_of_equations(prepared, self.block), minlength=int(self.block.max()) + 1)

    @cached_property
    def line(self) -> Numbers:
        """See above."""
        return np.array([s.line.line for s in self._needed[2].system.statements], dtype=np.int64)

    @cached_property
    def section(self) -> Numbers:
        """See above."""
        titles: dict[str, int] = {"": 0}
        statements = self._needed[2].system.statements
        numbers = [titles.setdefault(statement.section, len(titles)) for statement in statements]
        return np.array([*numbers, 0], dtype=np.int64)


def order_of_showing(prepared: Prepared, run: Run) -> Numbers:
    """Numbers of the quantities found: those of `show` first, then families by their first place in the text."""
    system = prepared.system
    assert system.firsts is not None
    every = system.firsts.tolist()
    ends_of = dict(zip(every, [*every[1:], len(system.names)]))
    firsts = [first for first in every if not is_part(system.names[first])]
    ends = [ends_of[first] for first in firsts]
    places = [system.first_places[first] for first in firsts]
    spans = sorted((p.statement, p.start, first, end) for p, first, end in zip(places, firsts, ends))
    ranges = [np.arange(first, end, dtype=np.int64) for _, _, first, end in spans]
    rest = np.concatenate(ranges) if ranges else np.zeros(0, dtype=np.int64)
    shown = np.fromiter(system.shown, np.int64, len(system.shown))
    order = np.concatenate([shown, rest[~np.isin(rest, shown)]]) if len(shown) else rest
    return np.asarray(order[np.isfinite(np.array(run.values)[order])])


def own_statement_numbers(equations: GroupedEquations, prepared: Prepared, run: Run) -> Numbers:
    """As `assemble.own_statements`, as an array (quantities,) with -1 where there is none."""
    system = prepared.system
    total = len(system.names)
    block_of = _array(run.block_of, total)
    block_of_equation = _blocks_of_equations(prepared, block_of)
    own = np.full(total, -1, dtype=np.int64)
    for side in (0, 1):
        statements, quantities = [], []
        for number, item in enumerate(system.written):
            tape = item.formula.tape
            operation, *rest = tape.instructions[tape.outputs[side]]
            if operation == "quantity":
                quantity = item.formula.quantities[rest[0]]
                if block_of[quantity] and block_of[quantity] == block_of_equation[number]:
                    statements.append(np.array([item.formula.statement]))
                    quantities.append(np.array([quantity]))
        for start, group in zip(equations.starts.tolist(), equations.groups):
            tape = group.bound.formula.tape
            operation, *rest = tape.instructions[tape.outputs[side]]
            if operation == "quantity":
                numbers = group.bound.numbers[:, rest[0]]
                there = block_of_equation[start : start + len(group)] == block_of[numbers]
                there &= block_of[numbers] > 0
                quantities.append(numbers[there])
                statements.append(np.full(int(there.sum()), group.place.statement))
        if quantities:
            _put_first(own, np.concatenate(quantities), np.concatenate(statements))
    first = _first_statements(equations, block_of_equation)
    missing = (own < 0) & (block_of > 0)
    own[missing] = first[block_of[missing]]
    return own


def _array(block_of: Mapping[int, int], total: int) -> Numbers:
    """Block numbers by quantity, 0 for none."""
    if isinstance(block_of, ByBlock):
        return block_of.array.astype(np.int64)
    found = np.zeros(total, dtype=np.int64)
    for quantity, number in block_of.items():
        found[quantity] = number
    return found


def _blocks_of_equations(prepared: Prepared, block_of: Numbers) -> Numbers:
    """Number of the block that each equation belongs to, 0 for none."""
    found = np.zeros(len(prepared.system.equations), dtype=np.int64)
    for block in prepared.structure.blocks:
        number = block_of[block.columns[0]]
        if len(block.rows) == 1:
            found[prepared.rows[block.rows[0]]] = number
        else:
            found[[prepared.rows[r] for r in block.rows]] = number
    return found


def _put_first(own: Numbers, quantities: Numbers, statements: Numbers) -> None:
    """Give each quantity that has none the first of its statements."""
    free = own[quantities] < 0
    quantities, statements = quantities[free], statements[free]
    latest_first = np.argsort(-statements, kind="stable")
    own[quantities[latest_first]] = statements[latest_first]


def _first_statements(equations: GroupedEquations, block_of_equation: Numbers) -> Numbers:
    """The first statement of each block, by its number."""
    count = int(block_of_equation.max()) + 1 if len(block_of_equation) else 1
    first = np.full(count, np.iinfo(np.int64).max, dtype=np.int64)
    np.minimum.at(first, block_of_equation, equations.statement)
    return first


class OwnStatements(Mapping[int, int]):
    """`own_statement_numbers` by quantity, worked out once somebody asks."""

    def __init__(self, equations: GroupedEquations, prepared: Prepared, run: Run) -> None:
        self._needed = equations, prepared, run

    @cached_property
    def array(self) -> Numbers:
        """Statement numbers, -1 where there is none."""
        return own_statement_numbers(*self._needed)

    def __getitem__(self, key: int) -> int:
        value = int(self.array[key])
        if value < 0:
            raise KeyError(key)
        return value

    def __contains__(self, key: object) -> bool:
        return isinstance(key, int) and bool(self.array[key] >= 0)

    def __iter__(self) -> Iterator[int]:
        return iter(np.flatnonzero(self.array >= 0).tolist())

    def __len__(self) -> int:
        return int((self.array >= 0).sum())


def lazy_reports(
    equations: GroupedEquations,
    prepared: Prepared,
    blocks: Sequence[BlockRun],
    report: Callable[[BlockRun, Sequence[str], Sequence[Statement], Sequence[str]], BlockReport],
) -> Sequence[BlockReport]:
    """The accounts of all blocks.

    Parameters
    ----------
    report : callable
        Block, names of its unknowns, its statements, names of what else it takes, to its account.
    """
    system = prepared.system
    names = system.names

    def make(i: int) -> BlockReport:
        block = blocks[i]
        numbers = np.array(block.equations, dtype=np.int64)
        apart = [system.equations[int(n)].formula for n in numbers[numbers < equations.written]]
        unknowns = block.unknowns
        others = DeferredSequence(lambda: _picked(names, equations.outside(numbers, apart, unknowns)))
        placed = equations.statement[numbers].tolist()
        return report(
            block,
            _picked(names, unknowns),
            _picked(system.statements, placed),
            others,
        )

    return LazySequence([(len(blocks), make)])


def _picked(items: Sequence[T], numbers: Sequence[int]) -> Sequence[T]:
    """The items of some numbers, on demand where they are many."""
    if len(numbers) < MOST_PICKED:
        return tuple([items[n] for n in numbers])
    return LazySequence([(len(numbers), lambda i: items[numbers[i]])])
