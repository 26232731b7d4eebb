"""Ranges of functions hold their values, and what is left of an argument holds every one that gives such a value."""

from __future__ import annotations

import math
from collections.abc import Callable

import pytest
from hypothesis import given
from hypothesis import strategies as st

from eqsheet.model.interpolant import Heading, smooth_curve
from eqsheet.worksheet.interval import Interval, increasing, magnitude, raised, root, widened
from eqsheet.worksheet.interval_functions import (
    arc_cosine,
    cosine,
    of_arc_cosine,
    of_cosine,
    of_hyperbolic_cosine,
    of_larger,
    of_read,
    of_sine,
    of_smaller,
    of_tangent,
    read,
    sine,
    tangent,
)

# Nothing that underflows in a function.
numbers = st.floats(-60.0, 60.0).map(lambda x: x if abs(x) > 1e-100 else 0.0)
parts = st.integers(0, 1000).map(lambda k: k / 1000)
# Monotone runs up and down, a level one, points far apart and close together.
PUMP = smooth_curve(
    Heading("head", ("Q",), (None,), None),
    (-40.0, -3.0, 0.0, 1e-3, 2.0, 7.0, 55.0),
    (5.0, 8.0, 8.0, 7.5, -2.0, 40.0, 1e4),
)
POWER = 1.8
FUNCTIONS: dict[str, tuple[Callable[[float], float], Callable, Callable]] = {
    "sin": (math.sin, sine, of_sine),
    "cos": (math.cos, cosine, of_cosine),
    "tan": (math.tan, tangent, of_tangent),
    "acos": (math.acos, arc_cosine, of_arc_cosine),
    "cosh": (math.cosh, lambda a: increasing(math.cosh, magnitude(a)), of_hyperbolic_cosine),
    "curve": (PUMP.function, lambda a: read(PUMP, a), lambda whole, a: of_read(whole, PUMP, a)),
    "power": (lambda x: x**POWER, lambda a: raised(a, POWER), lambda whole, a: root(whole, POWER, a)),
}
DOMAINS = {"acos": (-1.0, 1.0), "curve": PUMP.ranges[0], "power": (0.0, 60.0)}


def inside(interval: Interval | None, value: float) -> bool:
    return interval is not None and interval[0] <= value <= interval[1]


@pytest.mark.parametrize("name", FUNCTIONS)
@given(ends=st.tuples(numbers, numbers), part=parts, room=st.tuples(parts, parts), open_ended=st.booleans())
def test_what_is_possible_stays(
    name: str, ends: Interval, part: float, room: tuple[float, float], open_ended: bool
) -> None:
    function, forwards, backwards = FUNCTIONS[name]
    low, high = DOMAINS.get(name, (-60.0, 60.0))
    first, last = sorted(min(max(end, low), high) for end in ends)
    x = min(max(first + part * (last - first), first), last)
    value = function(x)
    argument = (first, math.inf) if open_ended else (first, last)
    assert inside(forwards(argument), value)
    # A value is known to rounding at best.
    assert inside(backwards(widened(value - room[0], value + room[1]), argument), x)
    assert inside(backwards(widened(value, value), argument), x)


@given(ends=st.tuples(numbers, numbers), others=st.tuples(numbers, numbers), at=st.tuples(parts, parts))
def test_the_smaller_and_the_larger_of_two(ends: Interval, others: Interval, at: tuple[float, float]) -> None:
    a, b = sorted(ends), sorted(others)
    x = min(a[0] + at[0] * (a[1] - a[0]), a[1])
    y = min(b[0] + at[1] * (b[1] - b[0]), b[1])
    for function, backwards in ((min, of_smaller), (max, of_larger)):
        value = function(x, y)
        first, second = backwards((value, value), tuple(a), tuple(b))
        assert inside(first, x) and inside(second, y)
