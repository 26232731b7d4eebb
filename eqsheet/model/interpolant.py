"""Interpolants: the functions that curves and surfaces of a worksheet stand for, as hashable values.

An interpolant is made of polynomials between the points of one or two axes; so are its derivatives, which are
interpolants again, and so it can be the operand of a tape as a unit can. All numbers are in SI.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any

from eqsheet.model.pchip import cubic, monotone_slopes
from eqsheet.units.dimension import DIMENSIONLESS, Dimension
from eqsheet.units.unit import Unit

Numbers = tuple[float, ...]

#: Polynomials in the distance from the left end of an interval, of one argument.
CURVE = "curve"
#: Polynomials in the distances from the lower ends of a cell, of two arguments.
SURFACE = "surface"
#: One value for each point, or pair of points: that of the next one up.
STEPS = "steps"
#: One strictly monotone run of a curve, read from value to argument; and the slope of that.
INVERSE = "inverse"
INVERSE_SLOPE = "inverse slope"


@dataclass(frozen=True, slots=True)
class Heading:
    """Name, arguments and units of a curve or surface; a unit is None for plain numbers."""

    name: str
    arguments: tuple[str, ...]
    units: tuple[Unit | None, ...]
    unit: Unit | None

    @property
    def dimensions(self) -> tuple[Dimension, ...]:
        """Of the arguments."""
        return tuple(DIMENSIONLESS if unit is None else unit.dimension for unit in self.units)

    @property
    def dimension(self) -> Dimension:
        """Of the value."""
        return DIMENSIONLESS if self.unit is None else self.unit.dimension


@dataclass(frozen=True)
class Interpolant:
    """A function of one or two numbers, made of polynomials between points.

    Attributes
    ----------
    heading : Heading
    shape : str
        `CURVE`, `SURFACE`, `STEPS`, `INVERSE` or `INVERSE_SLOPE`.
    axes : tuple of tuple of float
        For each argument its points, strictly increasing.
    pieces : tuple of tuple of float
        `CURVE`: (c0, c1, c2, c3) for each interval. `SURFACE`: for each cell, the first argument running
        slowest, the coefficients of u^k v^l at 4*k + l. `STEPS`: one value for each (pair of) point(s).
        `INVERSE`, `INVERSE_SLOPE`: for each interval of values the left end and the width of that of the
        argument, and its (c0, c1, c2, c3).
    """

    heading: Heading
    shape: str
    axes: tuple[Numbers, ...]
    pieces: tuple[Numbers, ...]
    _hash: int = field(init=False, repr=False, compare=False)

    def __post_init__(self) -> None:
        # Taken once, as for tapes, which carry it.
        object.__setattr__(self, "_hash", hash((self.heading, self.shape, self.axes, self.pieces)))

    def __hash__(self) -> int:
        return self._hash

    def __reduce__(self) -> tuple[type[Interpolant], tuple[object, ...]]:
        # Neither the hash, which differs between processes, nor the functions are carried over.
        return Interpolant, (self.heading, self.shape, self.axes, self.pieces)

    @cached_property
    def function(self) -> Callable[..., float]:
        """The interpolant on plain floats; raises ValueError outside its range."""
        from eqsheet.model.interpolation import float_function

        return float_function(self)

    @cached_property
    def array_function(self) -> Callable[..., Any]:
        """The interpolant on arrays; nan outside its range."""
        from eqsheet.model.interpolation_arrays import array_function

        return array_function(self)

    @property
    def is_stepped(self) -> bool:
        """Whether it is constant between its steps, so that its slope is 0."""
        return self.shape == STEPS

    @cached_property
    def partials(self) -> tuple[Interpolant, ...]:
        """The derivative with respect to each argument.

        Raises
        ------
        ValueError
            It is stepped, or itself the slope of an inverse.
        """
        if self.shape == CURVE:
            return (replace(self, pieces=tuple((b, 2 * c, 3 * d, 0.0) for _, b, c, d in self.pieces)),)
        if self.shape == SURFACE:
            return (
                replace(self, pieces=tuple(map(_along_first, self.pieces))),
                replace(self, pieces=tuple(map(_along_second, self.pieces))),
            )
        if self.shape == INVERSE:
            return (replace(self, shape=INVERSE_SLOPE),)
        raise ValueError(f"no derivative of an interpolant that is {self.shape}")

    @cached_property
    def inverses(self) -> tuple[Interpolant, ...]:
        """The inverse of each monotone run of a curve; empty where there is none, or a run is level."""
        if self.shape != CURVE:
            return ()
        (x,) = self.axes
        y = [piece[0] for piece in self.pieces]
        y.append(self.function(x[-1]))
        rises = [b > a for a, b in zip(y, y[1:])]
        if any(a == b for a, b in zip(y, y[1:])):
            return ()
        ends = [i for i in range(1, len(rises)) if rises[i] != rises[i - 1]]
        return tuple(self._inverse(y, i, j) for i, j in zip([0, *ends], [*ends, len(rises)]))

    def _inverse(self, y: Sequence[float], start: int, end: int) -> Interpolant:
        """The inverse of the intervals from `start` up to `end`."""
        x = self.axes[0]
        pieces = [(x[i], x[i + 1] - x[i], *self.pieces[i]) for i in range(start, end)]
        values = list(y[start : end + 1])
        if values[0] > values[-1]:
            pieces.reverse()
            values.reverse()
        return replace(self, shape=INVERSE, axes=(tuple(values),), pieces=tuple(pieces))

    @property
    def ranges(self) -> tuple[tuple[float, float], ...]:
        """Smallest and largest value of each argument; a stepped one has no smallest."""
        low = float("-inf")
        return tuple((low if self.is_stepped else axis[0], axis[-1]) for axis in self.axes)


def smooth_curve(heading: Heading, x: Sequence[float], y: Sequence[float]) -> Interpolant:
    """Monotone cubics through the points."""
    slopes = monotone_slopes(x, y)
    pieces = (cubic(x[i + 1] - x[i], y[i], y[i + 1], slopes[i], slopes[i + 1]) for i in range(len(x) - 1))
    return Interpolant(heading, CURVE, (tuple(x),), tuple(pieces))


def straight_curve(heading: Heading, x: Sequence[float], y: Sequence[float]) -> Interpolant:
    """Straight lines between the points."""
    pieces = ((y[i], (y[i + 1] - y[i]) / (x[i + 1] - x[i]), 0.0, 0.0) for i in range(len(x) - 1))
    return Interpolant(heading, CURVE, (tuple(x),), tuple(pieces))


def stepped_curve(heading: Heading, x: Sequence[float], y: Sequence[float]) -> Interpolant:
    """The value of the next point up, as standard sizes are chosen."""
    return Interpolant(heading, STEPS, (tuple(x),), tuple((value,) for value in y))


Grid = Sequence[Sequence[float]]


def smooth_surface(heading: Heading, x: Sequence[float], y: Sequence[float], z: Grid) -> Interpolant:
    """Bicubics whose values and slopes at the points are those of monotone cubics.

    Along every row and column of the table it is the monotone cubic through that row or column. The slopes
    along x at other values of y are the monotone cubics, along y, of those at the points, so that both partial
    derivatives are continuous.

    Parameters
    ----------
    z : sequence of sequence of float
        For each x the values at each y.
    """
    columns = list(zip(*z))
    along_x = list(zip(*(monotone_slopes(x, column) for column in columns)))
    along_y = [monotone_slopes(y, row) for row in z]
    twisted = [monotone_slopes(y, row) for row in along_x]
    pieces = []
    for i in range(len(x) - 1):
        for j in range(len(y) - 1):
            width, height = x[i + 1] - x[i], y[j + 1] - y[j]
            values = [
                cubic(width, z[i][n], z[i + 1][n], along_x[i][n], along_x[i + 1][n]) for n in (j, j + 1)
            ]
            slopes = [
                cubic(width, along_y[i][n], along_y[i + 1][n], twisted[i][n], twisted[i + 1][n])
                for n in (j, j + 1)
            ]
            pieces.append(
                tuple(
                    c
                    for k in range(4)
                    for c in cubic(height, values[0][k], values[1][k], slopes[0][k], slopes[1][k])
                )
            )
    return Interpolant(heading, SURFACE, (tuple(x), tuple(y)), tuple(pieces))


def straight_surface(heading: Heading, x: Sequence[float], y: Sequence[float], z: Grid) -> Interpolant:
    """Straight lines along each argument (bilinear)."""
    pieces = []
    for i in range(len(x) - 1):
        for j in range(len(y) - 1):
            width, height = x[i + 1] - x[i], y[j + 1] - y[j]
            here, right, up, across = z[i][j], z[i + 1][j], z[i][j + 1], z[i + 1][j + 1]
            coefficients = [0.0] * 16
            coefficients[0] = here
            coefficients[4] = (right - here) / width
            coefficients[1] = (up - here) / height
            coefficients[5] = ((across - up) - (right - here)) / (width * height)
            pieces.append(tuple(coefficients))
    return Interpolant(heading, SURFACE, (tuple(x), tuple(y)), tuple(pieces))


def stepped_surface(heading: Heading, x: Sequence[float], y: Sequence[float], z: Grid) -> Interpolant:
    """The value at the next point up in both arguments."""
    return Interpolant(heading, STEPS, (tuple(x), tuple(y)), tuple((value,) for row in z for value in row))


def _along_first(c: Numbers) -> Numbers:
    return tuple((k + 1) * c[4 * (k + 1) + n] if k < 3 else 0.0 for k in range(4) for n in range(4))


def _along_second(c: Numbers) -> Numbers:
    return tuple((n + 1) * c[4 * k + n + 1] if n < 3 else 0.0 for k in range(4) for n in range(4))
