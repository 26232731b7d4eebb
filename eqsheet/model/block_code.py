"""The equations of a block as functions of plain floats: residuals, slopes, and the Newton step written out.

All equations of a block share their subexpressions, so that one call for all of them takes a third of the time of
one call each (tests/benchmarks/test_codegen_speed.py). For a block that is solved again and again the elimination
of its sparse Jacobian is written out too, operation by operation in a given order of pivots: the step then costs
little more than the slopes, and no array is made on the way.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import cached_property, lru_cache
from typing import Any

from eqsheet.model.derive import jacobian
from eqsheet.model.generate import Function, grouped_function
from eqsheet.model.simplify import Simplifier, renumbered
from eqsheet.model.tape import Tape

MEMORY = 1 << 14

# For each equation its tape with the outputs (left, right), and which of the block's quantities it takes.
Shapes = tuple[tuple[Tape, tuple[int, ...]], ...]
Entry = tuple[int, int]


def block_code(
    equations: Sequence[tuple[Tape, tuple[int, ...]]], unknowns: Sequence[int]
) -> tuple[BlockCode, tuple[int, ...]]:
    """The code of a block, one for all blocks of the same shape, and the known quantities it takes.

    Parameters
    ----------
    equations : sequence of (Tape, tuple of int)
        For each equation its tape with the outputs (left, right), and the numbers of the quantities it takes.
    unknowns : sequence of int
        Numbers of the quantities to solve for, in the order of x.

    Returns
    -------
    code : BlockCode
    parameters : tuple of int
        Numbers of the known quantities at the head of p; the literals of each equation follow, equation by
        equation.
    """
    place = {number: i for i, number in enumerate(unknowns)}
    parameters: dict[int, int] = {}
    shapes = []
    for tape, quantities in equations:
        slots = []
        for number in quantities:
            if number not in place:
                place[number] = len(unknowns) + len(parameters)
                parameters[number] = len(parameters)
            slots.append(place[number])
        shapes.append((tape, tuple(slots)))
    return _code(tuple(shapes), len(unknowns), len(parameters)), tuple(parameters)


class BlockCode:
    """Functions of all blocks of one shape, each written when it is first asked for.

    All take ``(x, p)``, sequences of floats: the unknowns, and the known quantities followed by the literals. All
    raise one of `DOMAIN_ERRORS` outside the domain.

    Attributes
    ----------
    unknowns : int
    known : int
        Known quantities at the head of p.
    """

    def __init__(self, shapes: Shapes, unknowns: int, known: int) -> None:
        self._shapes = shapes
        self.unknowns = unknowns
        self.known = known
        self._literals = sum(tape.literals for tape, _ in shapes)

    @cached_property
    def residuals(self) -> Function:
        """``(x, p)`` to left - right of each equation."""
        writer, roots = self._roots()
        return grouped_function(self._tape(writer, roots), self.unknowns, (len(roots),))

    @cached_property
    def statements(self) -> Tape:
        """All equations as they are written, not simplified: outputs left and right of each in turn.

        It takes x and the known quantities, then the literals of each equation.
        """
        instructions: list[tuple[Any, ...]] = [("quantity", k) for k in range(self.unknowns + self.known)]
        outputs: list[int] = []
        literals = 0
        for tape, slots in self._shapes:
            new: list[int] = []
            for instruction in tape.instructions:
                operation = instruction[0]
                if operation == "quantity":
                    new.append(slots[instruction[1]])
                    continue
                if operation == "literal":
                    instruction = ("literal", literals + instruction[1])
                new.append(len(instructions))
                instructions.append(renumbered(instruction, new))
            literals += tape.literals
            outputs += [new[o] for o in tape.outputs]
        return Tape(tuple(instructions), tuple(outputs), self.unknowns + self.known, literals)

    @cached_property
    def _linearised(self) -> tuple[Function, tuple[Entry, ...]]:
        writer, roots = self._roots()
        entries = self._entries(writer, roots)
        tape = self._tape(writer, (*roots, *entries.values()))
        return grouped_function(tape, self.unknowns, (len(roots), len(entries))), tuple(entries)

    @property
    def linearise(self) -> Function:
        """``(x, p)`` to the residuals and, in the order of `pattern`, the derivatives that are not always zero."""
        return self._linearised[0]

    @property
    def pattern(self) -> tuple[Entry, ...]:
        """Equation and unknown of each derivative, row by row."""
        return self._linearised[1]

    def newton_step(self, pivots: Sequence[Entry]) -> tuple[Function, Function]:
        """The Newton step by elimination in a fixed order, without any search for pivots.

        Parameters
        ----------
        pivots : sequence of (int, int)
            Equation and unknown of each pivot, all equations and all unknowns once.

        Returns
        -------
        step : callable
            ``(x, p)`` to residuals r, the step ``-J^-1 r``, and the numbers of the elimination. Raises
            ZeroDivisionError too where a pivot is zero.
        correction : callable
            ``(r, (), numbers)`` to the step ``-J^-1 r`` for other residuals, with the J that gave the numbers.
        """
        writer, roots = self._roots()
        elimination = _Elimination(writer, self._entries(writer, roots), pivots)
        steps = elimination.solve(writer, roots, {})
        varying = elimination.varying()
        tape = self._tape(writer, (*roots, *steps, *varying))
        n = self.unknowns
        step = grouped_function(tape, n, (n, n, len(varying)))
        other = Simplifier()
        residuals = [other.put("quantity", k) for k in range(n)]
        numbers = {v: other.put("quantity", n + k) for k, v in enumerate(varying)}
        numbers |= {i: other.constant(c) for i, c in writer.constants.items()}
        outputs = elimination.solve(other, residuals, numbers)
        again = other.tape(tuple(outputs), n + len(varying), 0)
        return step, grouped_function(again, n, (n,), len(varying))

    def _roots(self) -> tuple[Simplifier, list[int]]:
        """A writer that holds left - right of each equation, and where."""
        writer = Simplifier()
        roots = []
        literals = 0
        for tape, slots in self._shapes:
            new = writer.copy(
                tape,
                [writer.put("quantity", k) for k in slots],
                [writer.put("literal", literals + k) for k in range(tape.literals)],
            )
            literals += tape.literals
            roots.append(writer.sub(new[tape.outputs[0]], new[tape.outputs[1]]))
        return writer, roots

    def _entries(self, writer: Simplifier, roots: Sequence[int]) -> dict[Entry, int]:
        """Where the derivatives that are not always zero stand, row by row."""
        n = self.unknowns
        slopes = jacobian(writer, roots, range(n))
        return {divmod(k, n): slope for k, slope in enumerate(slopes) if slope != writer.zero}

    def _tape(self, writer: Simplifier, outputs: Sequence[int]) -> Tape:
        return writer.tape(tuple(outputs), self.unknowns + self.known, self._literals)


@lru_cache(maxsize=MEMORY)
def _code(shapes: Shapes, unknowns: int, known: int) -> BlockCode:
    return BlockCode(shapes, unknowns, known)


class _Elimination:
    """Gaussian elimination of a sparse matrix of instructions (Duff, Erisman and Reid, Direct Methods for Sparse
    Matrices, 2nd edition, 2017, chapter 5, with the order of pivots given)."""

    def __init__(self, writer: Simplifier, entries: dict[Entry, int], pivots: Sequence[Entry]) -> None:
        matrix = dict(entries)
        by_column: dict[int, set[int]] = {}
        by_row: dict[int, set[int]] = {}
        for row, column in matrix:
            by_column.setdefault(column, set()).add(row)
            by_row.setdefault(row, set()).add(column)
        self._pivots = tuple(pivots)
        self._multipliers: list[list[tuple[int, int]]] = []
        self._rests: list[tuple[int, list[tuple[int, int]]]] = []
        for row, column in self._pivots:
            pivot = matrix[row, column]
            for rows in by_column.values():
                rows.discard(row)
            by_row[row].discard(column)
            across = sorted(by_row[row])
            multipliers = []
            for below in sorted(by_column[column]):
                multiplier = writer.div(matrix[below, column], pivot)
                multipliers.append((below, multiplier))
                by_row[below].discard(column)
                for k in across:
                    taken = writer.mul(multiplier, matrix[row, k])
                    old = matrix.get((below, k))
                    matrix[below, k] = writer.neg(taken) if old is None else writer.sub(old, taken)
                    by_row[below].add(k)
                    by_column[k].add(below)
            self._multipliers.append(multipliers)
            self._rests.append((pivot, [(k, matrix[row, k]) for k in across]))
        self._constants = frozenset(writer.constants)

    def varying(self) -> list[int]:
        """The instructions of the factors that are not constants, each once."""
        found: dict[int, None] = {}
        for multipliers, (pivot, rest) in zip(self._multipliers, self._rests):
            for instruction in (pivot, *(m for _, m in multipliers), *(e for _, e in rest)):
                if instruction not in self._constants:
                    found[instruction] = None
        return list(found)

    def solve(self, writer: Simplifier, residuals: Sequence[int], at: dict[int, int]) -> list[int]:
        """Instructions of ``-J^-1 r``, with the factors where `at` says that they stand, else where they are."""
        right = [writer.neg(r) for r in residuals]
        for (row, _), multipliers in zip(self._pivots, self._multipliers):
            for below, multiplier in multipliers:
                taken = writer.mul(at.get(multiplier, multiplier), right[row])
                right[below] = writer.sub(right[below], taken)
        found = [writer.zero] * len(right)
        for (row, column), (pivot, rest) in reversed(list(zip(self._pivots, self._rests))):
            value = right[row]
            for k, entry in rest:
                value = writer.sub(value, writer.mul(at.get(entry, entry), found[k]))
            found[column] = writer.div(value, at.get(pivot, pivot))
        return found
