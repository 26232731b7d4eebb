"""Staying strictly between the bounds."""

from __future__ import annotations

from collections.abc import Sequence
from math import inf

import numpy as np

from eqsheet.solve.problem import Problem, Vector

# Fraction of the distance to a bound that one step may use at least; near a root it grows towards 1, so
# that a root on the bound is approached faster than linearly (Coleman and Li, SIAM J. Optim. 6, 1996, p.
# 430: max(0.95, 1 - |p|)).
LEAST_FRACTION = 0.9
# A start on or outside a bound is moved inside by this part of the range, or of the typical size where the
# range is open.
NUDGE = 2.0**-7
# Distance to a bound, relative to the larger of the bound and the typical size, at which an unknown rests
# on it.
RESTING = 2.0**-40
# Well inside its bounds is what lies several times further from them, relative to whatever may be large there.
WELL_INSIDE = 2.0**-36


class Interior:
    """The open box of a problem."""

    __slots__ = ("_bounded", "_bounds", "lower", "magnitude", "upper")

    def __init__(self, problem: Problem) -> None:
        self.lower = problem.lower
        self.upper = problem.upper
        self.magnitude = problem.magnitude
        self._bounded: bool | None = None
        self._bounds: list[tuple[int, float, float]] | None = None

    @property
    def bounded(self) -> bool:
        """Whether there is any bound at all; where not, every method is the identity."""
        if self._bounded is None:
            self._bounded = bool((self.lower > -np.inf).any() or (self.upper < np.inf).any())
        return self._bounded

    def contains(self, x: Vector) -> bool:
        """Whether x lies strictly inside."""
        return bool(((self.lower < x) & (x < self.upper)).all())

    def _holds_well(self, x: Vector) -> bool:
        """Whether x lies inside by more than a little of itself, of its bounds and of its typical size."""
        if self._bounds is None:
            # Asked for once, and that of large blocks: arrays are as quick.
            return False
        values, sizes = x.tolist(), self.magnitude.tolist()
        for i, low, high in self._bounds:
            room = min(values[i] - low, high - values[i])
            if not room > WELL_INSIDE * max(sizes[i], abs(values[i])):
                return False
        return True

    def holds(self, x: Sequence[float]) -> bool:
        """As `contains`, for plain floats."""
        if self._bounds is None:
            both = enumerate(zip(self.lower.tolist(), self.upper.tolist()))
            self._bounds = [(i, low, high) for i, (low, high) in both if low > -inf or high < inf]
        for i, low, high in self._bounds:  # noqa: SIM110 - a generator would take twice as long
            if not low < x[i] < high:
                return False
        return True

    def enter(self, x: Vector) -> Vector:
        """The point itself if inside, else moved in: never onto a bound."""
        if not self.bounded or self.contains(x):
            return x
        with np.errstate(invalid="ignore", over="ignore"):
            room = np.minimum(self.upper - self.lower, self.magnitude)
        low = self.lower + NUDGE * room
        high = self.upper - NUDGE * room
        inside = np.where(x <= self.lower, low, np.where(x >= self.upper, high, x))
        return self._strictly(inside)

    def cut(self, x: Vector, step: Vector, closeness: float) -> tuple[Vector, int]:
        """The trial point ``x + step``, each unknown stopped short of its bounds, and which was stopped most.

        Parameters
        ----------
        x : ndarray (n,)
            Strictly inside.
        step : ndarray (n,)
        closeness : float
            Scaled norm of the full Newton step; small near a root, where a larger part of the distance may
            be used.

        Returns
        -------
        trial : ndarray (n,)
            Strictly inside.
        limiting : int
            Index of the unknown that was cut most, -1 if none was.
        """
        trial = x + step
        if not self.bounded or self.contains(trial):
            return trial, -1
        fraction = max(LEAST_FRACTION, 1.0 - closeness)
        low = x - fraction * (x - self.lower)
        high = x + fraction * (self.upper - x)
        clipped = np.minimum(np.maximum(trial, low), high)
        excess = np.abs(trial - clipped) / self.magnitude
        return self._strictly(clipped), int(excess.argmax())

    def resting(self, x: Vector) -> tuple[int, ...]:
        """Indices of the unknowns that rest on a bound to rounding."""
        if self._holds_well(x) or not self.bounded:
            return ()
        low = x - self.lower <= RESTING * np.maximum(np.abs(self.lower), self.magnitude)
        high = self.upper - x <= RESTING * np.maximum(np.abs(self.upper), self.magnitude)
        # A bound at infinity is never near, and less infinity is no number.
        low &= self.lower > -np.inf
        high &= self.upper < np.inf
        low |= high
        return tuple(np.flatnonzero(low).tolist()) if low.any() else ()

    def pressed(self, x: Vector, step: Vector) -> tuple[int, ...]:
        """Indices of the unknowns that `step` would carry onto or past a bound."""
        if not self.bounded:
            return ()
        beyond = (x + step <= self.lower) | (x + step >= self.upper)
        return tuple(int(i) for i in np.flatnonzero(beyond))

    def _strictly(self, x: Vector) -> Vector:
        """The point, moved by one unit in the last place where rounding has put it onto a bound."""
        x = np.where(x <= self.lower, np.nextafter(self.lower, np.inf), x)
        return np.where(x >= self.upper, np.nextafter(self.upper, -np.inf), x)
