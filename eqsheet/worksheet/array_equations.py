"""The equations of a large block as arrays: one evaluation for each shape, the Jacobian as sparse triplets."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from eqsheet.model.array_evidence import evaluate_arrays_with_evidence
from eqsheet.model.branches import literal_values
from eqsheet.model.derive import equation_partials
from eqsheet.model.generate import array_function
from eqsheet.model.tape import Formula, Tape
from eqsheet.solve.problem import Matrix, Problem, Vector
from eqsheet.solve.sparse_pattern import Pattern
from eqsheet.worksheet.starting_values import Start

Numbers = NDArray[np.int64]

# From this many unknowns on arrays and a sparse Jacobian beat generated code for the block as a whole.
LARGE_BLOCK = 60


@dataclass(frozen=True)
class Shape:
    """Equations of a block that share a tape.

    Attributes
    ----------
    tape : Tape
    rows : ndarray (m,)
        Their positions in the block.
    quantities : ndarray (m, q)
        Quantity numbers.
    literals : tuple of ndarray (m,)
    """

    tape: Tape
    rows: Numbers
    quantities: Numbers
    literals: tuple[Vector, ...]


def shapes_of(formulas: Sequence[Formula]) -> tuple[Shape, ...]:
    """The equations grouped by tape, in order of first occurrence."""
    groups: dict[Tape, list[int]] = {}
    for row, formula in enumerate(formulas):
        groups.setdefault(formula.tape, []).append(row)
    shapes = []
    for tape, rows in groups.items():
        quantities = np.array([formulas[r].quantities for r in rows], dtype=np.int64)
        literals = np.array([literal_values(formulas[r]) for r in rows]).reshape(len(rows), -1)
        shapes.append(
            Shape(
                tape,
                np.array(rows, dtype=np.int64),
                quantities.reshape(len(rows), -1),
                tuple(np.ascontiguousarray(literals[:, k]) for k in range(tape.literals)),
            )
        )
    return tuple(shapes)


class ArrayBlock:
    """Residuals, Jacobian and evidence of a block over all its equations at once.

    Parameters
    ----------
    shapes : sequence of Shape
    unknowns : ndarray (n,)
        Quantity numbers, ascending.
    values, errors : ndarray (quantities,)
        SI values and error bounds of all quantities of the worksheet; not changed.
    """

    def __init__(self, shapes: Sequence[Shape], unknowns: Numbers, values: Vector, errors: Vector) -> None:
        self._shapes = shapes
        self._unknowns = unknowns
        self._values = values.copy()
        self._errors = errors
        self._n = len(unknowns)
        position = np.full(len(values), -1, dtype=np.int64)
        position[unknowns] = np.arange(self._n)
        self._own = position >= 0
        # For every shape the slots that hold unknowns for any of its rows, with the rows and columns of their
        # entries in the Jacobian.
        self._parts = []
        for shape in shapes:
            slots = tuple(
                k for k in range(shape.tape.quantities) if (position[shape.quantities[:, k]] >= 0).any()
            )
            entries = []
            for k in slots:
                columns = position[shape.quantities[:, k]]
                there = columns >= 0
                mask = None if there.all() else there
                entries.append(
                    (
                        mask,
                        shape.rows if mask is None else shape.rows[mask],
                        columns if mask is None else columns[mask],
                    )
                )
            function = array_function(equation_partials(shape.tape, slots))
            self._parts.append((shape, function, entries))
        rows = np.concatenate([r for _, _, e in self._parts for _, r, _ in e])
        columns = np.concatenate([c for _, _, e in self._parts for _, _, c in e])
        self._triplets = _Triplets(rows, columns, self._n)

    def linearise(self, x: Vector) -> tuple[Vector, Matrix]:
        """Residuals (n,) and sparse Jacobian (n, n) at x."""
        values = self._values
        values[self._unknowns] = x
        residuals = np.empty(self._n)
        entries = []
        for shape, function, places in self._parts:
            results = function(*values[shape.quantities.T], *shape.literals)
            first, *slopes = results if places else (results,)
            residuals[shape.rows] = first
            m = len(shape.rows)
            for (mask, _, _), slope in zip(places, slopes):
                wide = np.broadcast_to(np.asarray(slope, dtype=float), (m,))
                entries.append(wide if mask is None else wide[mask])
        return residuals, self._triplets.matrix(np.concatenate(entries))

    def evidence(self, x: Vector) -> tuple[Vector, Vector, Vector]:
        """Residuals, sizes and error bounds (n,) at x, evaluated afresh from the statements."""
        values = self._values
        values[self._unknowns] = x
        errors = np.where(self._own, 0.0, self._errors)
        residuals, sizes, bounds = np.empty(self._n), np.empty(self._n), np.empty(self._n)
        for shape, _, _ in self._parts:
            numbers = shape.quantities.T
            found = evaluate_arrays_with_evidence(
                shape.tape, tuple(values[numbers]), shape.literals, tuple(errors[numbers]), len(shape.rows)
            )
            residuals[shape.rows] = found.values[0] - found.values[1]
            sizes[shape.rows] = np.maximum(found.sizes[0], found.sizes[1])
            bounds[shape.rows] = found.errors[0] + found.errors[1]
        return residuals, sizes, bounds

    def problem(self, start: Start) -> ArrayProblem:
        """What the solver takes."""
        return ArrayProblem(
            self._n,
            lambda x: self.linearise(x)[0],
            self.linearise,
            lambda x: self.evidence(x)[1],
            np.array(start.values),
            np.array(start.lower),
            np.array(start.upper),
            np.array(start.magnitude),
            evidence=self.evidence,
        )


@dataclass(frozen=True, kw_only=True)
class ArrayProblem(Problem):
    """A problem that tells its residuals, sizes and error bounds afresh: see `ArrayBlock.evidence`."""

    evidence: Callable[[Vector], tuple[Vector, Vector, Vector]]


class _Triplets:
    """Where triplets go in a compressed sparse column matrix, worked out once."""

    def __init__(self, rows: Numbers, columns: Numbers, n: int) -> None:
        order = np.argsort(columns * n + rows, kind="stable")
        rows, columns = rows[order], columns[order]
        new = np.ones(len(rows), dtype=bool)
        new[1:] = (rows[1:] != rows[:-1]) | (columns[1:] != columns[:-1])
        self._order = order
        self._starts = np.flatnonzero(new)
        counts = np.bincount(columns[new], minlength=n)
        indptr = np.concatenate(([0], np.cumsum(counts)))
        self._pattern = Pattern(rows[new].astype(np.int32), indptr.astype(np.int32))

    def matrix(self, entries: Vector) -> Matrix:
        """The matrix with these entries; those of one place are added up."""
        ordered = entries[self._order]
        alone = len(self._starts) == len(entries)
        return self._pattern.matrix(ordered if alone else np.add.reduceat(ordered, self._starts))
