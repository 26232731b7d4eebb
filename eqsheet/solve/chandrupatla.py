"""Root of one equation inside a bracket, by bisection and inverse quadratic interpolation.

References
----------
T. R. Chandrupatla, A new hybrid quadratic/bisection algorithm for finding the zero of a nonlinear function
without using derivatives, Advances in Engineering Software 28 (1997), 145-149. Ours adds: points where the
residual is not finite are stepped around, and the last bracket is handed back, so that a pole or a jump can
be told from a root.
"""

from __future__ import annotations

from collections.abc import Callable
from math import inf
from typing import NamedTuple

# More than any bracket of doubles needs: bisection alone takes 64 for a range without its exponents, and
# interpolation saves most.
MOST_STEPS = 400
# Parts of the bracket at which a finite value is looked for where its middle has none.
ASIDE = (0.5, 0.25, 0.75, 0.375, 0.625, 0.0625, 0.9375)


class Bracket(NamedTuple):
    """Two points with residuals of opposite sign (or one that is zero)."""

    a: float
    value_a: float
    b: float
    value_b: float

    @property
    def better(self) -> tuple[float, float]:
        """The end with the smaller residual, and that residual."""
        if abs(self.value_a) <= abs(self.value_b):
            return self.a, self.value_a
        return self.b, self.value_b


def chandrupatla(residual: Callable[[float], float], bracket: Bracket) -> Bracket:
    """The bracket shrunk until its ends are neighbours (to two roundings), or one is an exact zero.

    Parameters
    ----------
    residual : callable
        x to the residual; may give nan or inf.
    bracket : Bracket
        Finite residuals of opposite sign.

    Raises
    ------
    ValueError
        If the residuals do not differ in sign.

    >>> from math import sqrt
    >>> root, _ = chandrupatla(lambda x: x * x - 2.0, Bracket(0.0, -2.0, 3.0, 7.0)).better
    >>> abs(root - sqrt(2.0)) < 1e-15
    True
    """
    a, fa, b, fb = bracket
    if fa == 0.0 or fb == 0.0:
        return bracket
    if (fa > 0.0) == (fb > 0.0):
        raise ValueError("the residuals at the ends have the same sign")
    # a is the newest point, b the end opposite to it, c the point before.
    c, fc = a, fa
    fraction = 0.5
    for _ in range(MOST_STEPS):
        x = a + fraction * (b - a)
        value = residual(x)
        if not abs(value) < inf:
            x, value = _finite_inside(residual, a, b)
            if not abs(value) < inf:
                break
        if (value > 0.0) == (fa > 0.0):
            c, fc = a, fa
        else:
            c, b, fc, fb = b, a, fb, fa
        a, fa = x, value
        if fa == 0.0:
            break
        least = 2.0**-52 * (abs(a) if abs(fa) < abs(fb) else abs(b)) + 5e-324
        width = abs(b - a)
        if width <= 2.0 * least:
            break
        smallest = least / width
        fraction = min(max(_interpolated(a, fa, b, fb, c, fc), smallest), 1.0 - smallest)
    return Bracket(a, fa, b, fb)


def _interpolated(a: float, fa: float, b: float, fb: float, c: float, fc: float) -> float:
    """Fraction of the way from a to b to go next: inverse quadratic if it can be trusted, else a half."""
    if c in (a, b) or fc in (fa, fb):
        return 0.5
    xi = (a - b) / (c - b)
    phi = (fa - fb) / (fc - fb)
    # Chandrupatla's criterion: the inverse parabola through the three points stays inside the bracket.
    if not (phi * phi < xi and (1.0 - phi) * (1.0 - phi) < 1.0 - xi):
        return 0.5
    return fa / (fb - fa) * fc / (fb - fc) + (c - a) / (b - a) * fa / (fc - fa) * fb / (fc - fb)


def _finite_inside(residual: Callable[[float], float], a: float, b: float) -> tuple[float, float]:
    """A point between a and b with a finite residual, (nan, nan) if none was found."""
    for part in ASIDE:
        x = a + part * (b - a)
        value = residual(x)
        if abs(value) < inf and x not in (a, b):
            return x, value
    return float("nan"), float("nan")
