"""Where the equations of a worksheet with large families stand: in which group, at which entry, of which statement."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from eqsheet.model.aggregate_parts import is_part
from eqsheet.model.equation_group import EquationGroup, offsets
from eqsheet.model.system import EquationSystem
from eqsheet.model.tape import Formula
from eqsheet.worksheet.array_equations import Shape, shapes_of

Numbers = NDArray[np.int64]


class GroupedEquations:
    """The equations of a system as arrays.

    Attributes
    ----------
    written : int
        How many equations stand before those of groups.
    groups : tuple of EquationGroup
    starts : ndarray (groups,)
        Number of the first equation of each group.
    statement : ndarray (equations,)
        Statement of each equation.
    known : ndarray (equations,)
        Whether it is a known.
    part : ndarray (quantities,)
        Whether it is a part of a large sum.
    """

    def __init__(self, system: EquationSystem) -> None:
        written = system.written
        self.written = len(written)
        self.groups: tuple[EquationGroup, ...] = system.groups
        self.starts: Numbers = np.array(offsets(system.groups, self.written), dtype=np.int64)
        total = len(system.equations)
        self.statement = np.empty(total, dtype=np.int32)
        self.known = np.zeros(total, dtype=bool)
        for number, item in enumerate(written):
            self.statement[number] = item.place.statement
            self.known[number] = item.known >= 0
        self.part = np.zeros(len(system.names), dtype=bool)
        firsts = [] if system.firsts is None else system.firsts.tolist()
        for first, end in zip(firsts, [*firsts[1:], len(system.names)]):
            self.part[first:end] = is_part(system.names[first])
        for start, group in zip(self.starts.tolist(), self.groups):
            self.statement[start : start + len(group)] = group.statements
            self.known[start : start + len(group)] = group.known is not None

    def group_of(self, equation: int) -> tuple[int, int]:
        """Position of its group and its entry there; group -1 and its own number for one written out."""
        if equation < self.written:
            return -1, equation
        group = int(np.searchsorted(self.starts, equation, side="right")) - 1
        return group, equation - int(self.starts[group])

    def in_text_order(self, equations: Sequence[int]) -> Numbers:
        """Equation numbers by statement."""
        numbers = np.array(equations, dtype=np.int64)
        return numbers[np.argsort(self.statement[numbers], kind="stable")]

    def parts(self, equations: Numbers) -> tuple[Numbers, list[tuple[EquationGroup, Numbers, Numbers]]]:
        """Positions of those written out; and of each group its positions and the entries they are."""
        position = np.searchsorted(self.starts, equations, side="right") - 1
        apart = np.flatnonzero(position < 0)
        found = []
        for number, group in enumerate(self.groups):
            rows = np.flatnonzero(position == number)
            if len(rows):
                found.append((group, rows, equations[rows] - self.starts[number]))
        return apart, found

    def shapes(self, equations: Numbers, formulas: Sequence[Formula]) -> tuple[Shape, ...]:
        """The equations of a block by their tapes.

        Parameters
        ----------
        formulas : sequence of Formula
            Of those of `equations` that are written out, in their order.
        """
        apart, parts = self.parts(equations)
        shapes = [
            Shape(shape.tape, apart[shape.rows], shape.quantities, shape.literals)
            for shape in shapes_of(formulas)
        ]
        for group, rows, entries in parts:
            whole = len(entries) == len(group) and bool((entries == np.arange(len(group))).all())
            numbers = group.bound.numbers if whole else group.bound.numbers.T[:, entries].T
            shapes.append(Shape(group.bound.formula.tape, rows, numbers, group.bound.literals_of(entries)))
        return tuple(shapes)

    def outside(self, equations: Numbers, formulas: Sequence[Formula], unknowns: Sequence[int]) -> list[int]:
        """Quantities that the equations of a block take besides its unknowns, ascending."""
        _, parts = self.parts(equations)
        arrays = [np.unique(group.as_written.numbers[entries]) for group, _, entries in parts]
        arrays.append(np.array([q for formula in formulas for q in formula.quantities], dtype=np.int64))
        found: list[int] = np.setdiff1d(np.concatenate(arrays), np.array(unknowns, dtype=np.int64)).tolist()
        return found
