"""Interpolants evaluated on arrays, value for value as on plain floats; nan outside the range."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from eqsheet.model import interpolant as shapes
from eqsheet.model.interpolant import Interpolant, Numbers
from eqsheet.model.interpolation import slack

Function = Callable[..., Any]
# Halvings of an interval to the last bit, with room.
_HALVINGS = 60


def array_function(interpolant: Interpolant) -> Function:
    """The interpolant as a function of arrays (or floats), broadcast against each other; never raises."""
    return _MAKERS[interpolant.shape](interpolant)


class _Axis:
    """Where arguments lie on one axis."""

    def __init__(self, points: Numbers) -> None:
        self.points = np.array(points)
        self.slack = slack(points)

    def place(self, a: Any) -> tuple[Any, Any]:
        """Interval, and distance from its left end; nan outside the range."""
        first, last = self.points[0], self.points[-1]
        inside = (a >= first - self.slack) & (a <= last + self.slack)
        held = np.where(inside, np.clip(a, first, last), np.nan)
        i = np.minimum(np.searchsorted(self.points, held, "right") - 1, len(self.points) - 2)
        return i, held - self.points[i]


def _curve(interpolant: Interpolant) -> Function:
    axis = _Axis(interpolant.axes[0])
    c0, c1, c2, c3 = np.array(interpolant.pieces).T

    def value(a: Any) -> Any:
        i, s = axis.place(np.asarray(a, dtype=float))
        return c0[i] + s * (c1[i] + s * (c2[i] + s * c3[i]))

    return value


def _surface(interpolant: Interpolant) -> Function:
    x, y = map(_Axis, interpolant.axes)
    pieces = np.array(interpolant.pieces).T
    across = len(y.points) - 1

    def value(a: Any, b: Any) -> Any:
        i, u = x.place(np.asarray(a, dtype=float))
        j, v = y.place(np.asarray(b, dtype=float))
        c = pieces[:, i * across + j]
        total: Any = 0.0
        for k in (12, 8, 4, 0):
            total = total * u + (c[k] + v * (c[k + 1] + v * (c[k + 2] + v * c[k + 3])))
        return total

    return value


def _steps(interpolant: Interpolant) -> Function:
    axes = [_Axis(axis) for axis in interpolant.axes]
    values = np.array([piece[0] for piece in interpolant.pieces])

    def value(*arguments: Any) -> Any:
        place: Any = 0
        inside: Any = True
        for axis, argument in zip(axes, arguments):
            a = np.asarray(argument, dtype=float)
            count = len(axis.points)
            i = np.searchsorted(axis.points, a - axis.slack, "left")
            inside = inside & (i < count)
            place = place * count + np.minimum(i, count - 1)
        return np.where(inside, values[place], np.nan)

    return value


def _inverse(interpolant: Interpolant) -> Function:
    solved = _solver(interpolant)
    left = np.array(interpolant.pieces)[:, 0]

    def value(t: Any) -> Any:
        i, s = solved(t)
        return left[i] + s

    return value


def _inverse_slope(interpolant: Interpolant) -> Function:
    solved = _solver(interpolant)
    c1, c2, c3 = np.array(interpolant.pieces).T[3:]

    def value(t: Any) -> Any:
        i, s = solved(t)
        return np.divide(1.0, c1[i] + s * (2.0 * c2[i] + s * 3.0 * c3[i]))

    return value


def _solver(interpolant: Interpolant) -> Callable[[Any], tuple[Any, Any]]:
    """Finds for each value its interval and the place in it, by Newton's steps with halving."""
    axis = _Axis(interpolant.axes[0])
    pieces = np.array(interpolant.pieces).T
    heights = np.diff(axis.points)

    def solved(t: Any) -> tuple[Any, Any]:
        i, rise = axis.place(np.asarray(t, dtype=float))
        _, width, c0, c1, c2, c3 = pieces[:, i]
        target = axis.points[i] + rise
        rising = c0 + width * (c1 + width * (c2 + width * c3)) > c0
        share = rise / heights[i]
        s = width * np.where(rising, share, 1.0 - share)
        low, high = np.zeros_like(s), np.broadcast_to(width, s.shape)
        for _ in range(_HALVINGS):
            gap = c0 + s * (c1 + s * (c2 + s * c3)) - target
            beyond = (gap > 0.0) == rising
            low, high = np.where(beyond, low, s), np.where(beyond, s, high)
            new = s - np.divide(gap, c1 + s * (2.0 * c2 + s * 3.0 * c3))
            new = np.where((low < new) & (new < high), new, 0.5 * (low + high))
            new = np.where((gap == 0.0) | np.isnan(gap), s, new)
            if np.array_equal(new, s, equal_nan=True):
                break
            s = new
        return i, s

    return solved


_MAKERS: dict[str, Callable[[Interpolant], Function]] = {
    shapes.CURVE: _curve,
    shapes.SURFACE: _surface,
    shapes.STEPS: _steps,
    shapes.INVERSE: _inverse,
    shapes.INVERSE_SLOPE: _inverse_slope,
}
