"""Curves through random points: monotone where their data are, with slopes that are theirs, and reversible."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.interpolate import PchipInterpolator

from eqsheet.model.interpolant import Heading, Interpolant, smooth_curve, smooth_surface, straight_curve

ONE = Heading("f", ("x",), (None,), None)
TWO = Heading("g", ("x", "y"), (None, None), None)
GAPS = st.floats(1e-3, 1e3)


@st.composite
def axes(draw: st.DrawFn, least: int = 2, most: int = 8) -> list[float]:
    """Strictly increasing numbers."""
    gaps = draw(st.lists(GAPS, min_size=least - 1, max_size=most - 1))
    start = draw(st.floats(-1e3, 1e3))
    return [start, *(start + np.cumsum(gaps)).tolist()]


@st.composite
def points(draw: st.DrawFn, rising: bool = False) -> tuple[list[float], list[float]]:
    """Arguments and values; the values strictly rise or fall too where `rising`."""
    x = draw(axes())
    if not rising:
        # Products of slopes of tinier values underflow in the library compared with.
        values = st.floats(-1e3, 1e3).map(lambda v: v if abs(v) > 1e-100 else 0.0)
        return x, draw(st.lists(values, min_size=len(x), max_size=len(x)))
    steps = draw(st.lists(GAPS, min_size=len(x), max_size=len(x)))
    return x, (draw(st.sampled_from([1.0, -1.0])) * np.cumsum(steps)).tolist()


def inside(axis: list[float], shares: list[float]) -> list[float]:
    return [axis[0] + share * (axis[-1] - axis[0]) for share in shares]


SHARES = st.lists(st.floats(0.0, 1.0), min_size=2, max_size=12).map(sorted)


@given(points(), SHARES)
@settings(deadline=None)
def test_a_curve_stays_between_neighbouring_points(
    data: tuple[list[float], list[float]], shares: list[float]
) -> None:
    x, y = data
    f = smooth_curve(ONE, x, y)
    room = 1e-13 * max(map(abs, y))
    for a in inside(x, shares):
        i = min(int(np.searchsorted(x, a, "right")) - 1, len(x) - 2)
        assert min(y[i : i + 2]) - room <= f.function(a) <= max(y[i : i + 2]) + room


@given(points(rising=True), SHARES, st.sampled_from([smooth_curve, straight_curve]))
@settings(deadline=None)
def test_a_curve_rises_or_falls_throughout_as_its_points_do(
    data: tuple[list[float], list[float]], shares: list[float], make: Callable[..., Interpolant]
) -> None:
    x, y = data
    f = make(ONE, x, y)
    values = [f.function(a) for a in inside(x, shares)]
    direction = 1.0 if y[1] > y[0] else -1.0
    room = 1e-13 * max(map(abs, y))
    assert all(direction * (b - a) >= -room for a, b in zip(values, values[1:]))
    slope_room = 1e-12 * max(abs((d - c) / (b - a)) for a, b, c, d in zip(x, x[1:], y, y[1:]))
    assert all(direction * f.partials[0].function(a) >= -slope_room for a in inside(x, shares))


@given(points(), SHARES)
@settings(deadline=None)
def test_values_are_those_of_pchip(data: tuple[list[float], list[float]], shares: list[float]) -> None:
    x, y = data
    f, theirs = smooth_curve(ONE, x, y), PchipInterpolator(x, y)
    for a in inside(x, shares):
        assert abs(f.function(a) - float(theirs(a))) <= 1e-12 * max(map(abs, y))


@given(points(), st.floats(0.05, 0.95), st.integers(0, 6))
@settings(deadline=None)
def test_slope_is_that_of_small_differences(
    data: tuple[list[float], list[float]], share: float, piece: int
) -> None:
    x, y = data
    i = piece % (len(x) - 1)
    width = x[i + 1] - x[i]
    a, h = x[i] + share * width, 1e-4 * width
    f = smooth_curve(ONE, x, y)
    numeric = (f.function(a + h) - f.function(a - h)) / (2 * h)
    # A cubic's central difference is off by c3*h^2 and by the rounding of two values.
    room = abs(f.pieces[i][3]) * h * h + 4e-15 * (max(map(abs, y)) + max(map(abs, x)) * abs(numeric)) / h
    assert abs(f.partials[0].function(a) - numeric) <= 1.01 * room


@given(points(rising=True), SHARES)
@settings(deadline=None)
def test_read_there_and_back(data: tuple[list[float], list[float]], shares: list[float]) -> None:
    x, y = data
    f = smooth_curve(ONE, x, y)
    (inverse,) = f.inverses
    size = max(map(abs, y))
    for a in inside(x, shares):
        value = f.function(a)
        assert abs(f.function(inverse.function(value)) - value) <= 1e-13 * size + 1e-15 * size / min(
            np.diff(x)
        )


@given(axes(2, 5), axes(2, 5), st.data())
@settings(deadline=None, max_examples=60)
def test_partial_derivatives_of_a_surface(x: list[float], y: list[float], data: st.DataObject) -> None:
    row = st.lists(st.floats(-10.0, 10.0), min_size=len(y), max_size=len(y))
    z = data.draw(st.lists(row, min_size=len(x), max_size=len(x)))
    assume(np.ptp(z) > 1e-6)
    f = smooth_surface(TWO, x, y, z)
    shares = data.draw(st.tuples(st.floats(0.05, 0.95), st.floats(0.05, 0.95)))
    i, j = data.draw(st.integers(0, len(x) - 2)), data.draw(st.integers(0, len(y) - 2))
    width, height = x[i + 1] - x[i], y[j + 1] - y[j]
    a, b = x[i] + shares[0] * width, y[j] + shares[1] * height
    for k, (step, size) in enumerate(((1e-5 * width, width), (1e-5 * height, height))):
        h = (step, 0.0) if k == 0 else (0.0, step)
        numeric = (f.function(a + h[0], b + h[1]) - f.function(a - h[0], b - h[1])) / (2 * step)
        # Relative to the steepest chord of a cell: bicubics reach a small multiple of it.
        scale = np.ptp(z) / size + abs(numeric)
        points_room = 1e-15 * (abs(a) + abs(b)) / step * scale
        assert abs(f.partials[k].function(a, b) - numeric) <= 1e-6 * scale + points_room
