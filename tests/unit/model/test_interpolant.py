"""Curves and surfaces as functions: against scipy's interpolation, between floats and arrays, and read backwards."""

from __future__ import annotations

import math
import pickle
from collections.abc import Callable, Sequence

import mpmath
import numpy as np
import pytest
from scipy.interpolate import CubicHermiteSpline, PchipInterpolator, RegularGridInterpolator

from eqsheet.model.evaluate import evaluate, evaluate_with_evidence
from eqsheet.model.generate import array_function, float_function
from eqsheet.model.interpolant import (
    Heading,
    Interpolant,
    smooth_curve,
    smooth_surface,
    stepped_curve,
    stepped_surface,
    straight_curve,
    straight_surface,
)
from eqsheet.model.isolate import isolate
from eqsheet.model.pchip import monotone_slopes
from eqsheet.model.tape import Tape, TapeBuilder

ONE = Heading("f", ("x",), (None,), None)
TWO = Heading("g", ("x", "y"), (None, None), None)

HEAD = ([0.0, 10.0, 20.0, 30.0], [32.0, 30.5, 26.0, 18.0])
PEAK = ([0.0, 10.0, 20.0, 30.0, 45.0], [0.0, 50.0, 65.0, 60.0, 12.0])
LEVEL = ([0.0, 1.0, 2.0, 5.0], [1.0, 1.0, 3.0, 4.0])
TWO_POINTS = ([-2.0, 3.0], [7.0, -1.0])
STEEP = ([0.0, 0.001, 1.0, 1.5, 900.0], [0.0, 5.0, 5.1, 5.2, 5.3])
END_TURNS = ([0.0, 1.0, 1.5], [0.0, 10.0, -40.0])
DATA = [HEAD, PEAK, LEVEL, TWO_POINTS, STEEP, END_TURNS]

X, Y = [10.0, 20.0, 35.0, 60.0], [1450.0, 2000.0, 2900.0]
Z = [[52.0, 51.0, 48.0], [61.0, 64.0, 66.0], [60.0, 66.0, 70.0], [35.0, 52.0, 69.0]]


def dense(axis: Sequence[float]) -> np.ndarray:
    return np.linspace(axis[0], axis[-1], 501)


def close(ours: object, theirs: object, size: float) -> bool:
    """To 1e-12 of the size of the data."""
    return bool(np.max(np.abs(np.asarray(ours) - np.asarray(theirs))) <= 1e-12 * size)


def read(interpolant: Interpolant) -> Tape:
    b = TapeBuilder()
    leaves = [b.quantity(k, (0, 1)) for k in range(len(interpolant.axes))]
    return b.tape((b.apply("curve" if len(leaves) == 1 else "surface", *leaves, interpolant),))


@pytest.mark.parametrize(("x", "y"), DATA)
def test_slopes_are_those_of_pchip(x: list[float], y: list[float]) -> None:
    theirs = PchipInterpolator(x, y).derivative()(x)
    assert close(monotone_slopes(x, y), theirs, np.max(np.abs(theirs)))


@pytest.mark.parametrize(("x", "y"), DATA)
def test_smooth_curve_and_its_slope_are_those_of_pchip(x: list[float], y: list[float]) -> None:
    ours, theirs = smooth_curve(ONE, x, y), PchipInterpolator(x, y)
    at = dense(x)
    assert close([ours.function(a) for a in at.tolist()], theirs(at), np.max(np.abs(y)))
    # At a point the slope is taken from the piece to its right, as scipy does.
    slopes = theirs(at, 1)
    assert close([ours.partials[0].function(a) for a in at.tolist()], slopes, np.max(np.abs(slopes)))


@pytest.mark.parametrize(("x", "y"), DATA)
def test_straight_curve_is_linear_interpolation(x: list[float], y: list[float]) -> None:
    ours, at = straight_curve(ONE, x, y), dense(x)
    assert close([ours.function(a) for a in at.tolist()], np.interp(at, x, y), np.max(np.abs(y)))
    middle = 0.5 * (x[0] + x[1])
    assert ours.partials[0].function(middle) == (y[1] - y[0]) / (x[1] - x[0])


def test_stepped_curve_takes_the_next_value_up() -> None:
    bore = stepped_curve(ONE, [20.0, 25.0, 32.0], [21.6, 27.2, 35.9])
    assert [bore.function(a) for a in (1.0, 20.0, 20.1, 25.0, 25.1, 32.0)] == [
        21.6,
        21.6,
        27.2,
        27.2,
        35.9,
        35.9,
    ]
    with pytest.raises(ValueError, match="range"):
        bore.function(32.1)


def test_rounding_carries_no_size_past_its_step_and_no_argument_past_an_end() -> None:
    above = math.nextafter(25.0, 30.0)
    assert stepped_curve(ONE, [20.0, 25.0, 32.0], [1.0, 2.0, 3.0]).function(above) == 2.0
    head = smooth_curve(ONE, *HEAD)
    assert head.function(math.nextafter(30.0, 31.0)) == head.function(30.0)
    assert head.function(-1e-14) == 32.0


@pytest.mark.parametrize("make", [smooth_curve, straight_curve])
def test_points_are_met(make: Callable[..., Interpolant]) -> None:
    f = make(ONE, *HEAD)
    assert [f.function(a) for a in HEAD[0][:-1]] == HEAD[1][:-1]
    # The last one is the end of a piece, which rounds.
    assert f.function(HEAD[0][-1]) == pytest.approx(HEAD[1][-1], rel=4e-16)


def test_smooth_surface_joins_monotone_cubics() -> None:
    surface, z = smooth_surface(TWO, X, Y, Z), np.array(Z)
    slopes = PchipInterpolator(X, z, axis=0)(X, 1)
    for b in np.linspace(Y[0], Y[-1], 23).tolist():
        along = CubicHermiteSpline(
            X, PchipInterpolator(Y, z, axis=1)(b), PchipInterpolator(Y, slopes, axis=1)(b)
        )
        at = dense(X)
        assert close([surface.function(a, b) for a in at.tolist()], along(at), 70.0)
        assert close([surface.partials[0].function(a, b) for a in at.tolist()], along(at, 1), 70.0)
    for i, a in enumerate(X):
        at = dense(Y)
        row = PchipInterpolator(Y, z[i])
        assert close([surface.function(a, b) for b in at.tolist()], row(at), 70.0)
        assert close([surface.partials[1].function(a, b) for b in at.tolist()], row(at, 1), 70.0)


def test_straight_surface_is_bilinear() -> None:
    surface, theirs = straight_surface(TWO, X, Y, Z), RegularGridInterpolator((X, Y), np.array(Z))
    points = np.random.default_rng(3).uniform((X[0], Y[0]), (X[-1], Y[-1]), (200, 2))
    assert close([surface.function(a, b) for a, b in points.tolist()], theirs(points), 70.0)


def test_stepped_surface_goes_up_in_both_arguments() -> None:
    surface = stepped_surface(TWO, X, Y, Z)
    assert surface.function(10.0, 1450.0) == 52.0
    assert surface.function(11.0, 1450.0) == 61.0
    assert surface.function(11.0, 2001.0) == 66.0
    with pytest.raises(ValueError, match="range"):
        surface.function(11.0, 3000.0)


ALL = [
    *(make(ONE, *data) for make in (smooth_curve, straight_curve, stepped_curve) for data in DATA),
    *(make(TWO, X, Y, Z) for make in (smooth_surface, straight_surface, stepped_surface)),
    *smooth_curve(ONE, *PEAK).inverses,
    *straight_curve(ONE, *HEAD).inverses,
]


@pytest.mark.parametrize("interpolant", ALL)
def test_arrays_floats_and_generated_code_give_the_same(interpolant: Interpolant) -> None:
    tape = read(interpolant)
    random = np.random.default_rng(5)
    points = [
        np.concatenate([random.uniform(axis[0] - 1, axis[-1] + 1, 200), np.array(axis)])
        for axis in interpolant.axes
    ]
    size = max(len(p) for p in points)
    points = [np.resize(p, size) for p in points]
    alone = [evaluate(tape, at, ())[-1] for at in zip(*(p.tolist() for p in points))]
    together = array_function(tape)(*points)
    scale = np.nanmax(np.abs(together))
    np.testing.assert_allclose(together, alone, rtol=0, atol=4e-16 * scale)
    assert np.isnan(alone).any() and not np.isnan(alone).all()
    fast = float_function(tape)
    for at, value in zip(zip(*(p.tolist() for p in points)), alone):
        if math.isnan(value):
            with pytest.raises(ValueError):
                fast(*at)
        else:
            assert fast(*at) == value


@pytest.mark.parametrize("interpolant", ALL)
def test_what_is_not_known_stays_so(interpolant: Interpolant) -> None:
    nothing = [math.nan] * len(interpolant.axes)
    assert math.isnan(interpolant.function(*nothing))
    assert np.isnan(interpolant.array_function(*nothing))


@pytest.mark.parametrize("interpolant", ALL)
def test_a_copy_through_pickle_is_equal(interpolant: Interpolant) -> None:
    interpolant.function(*(axis[0] for axis in interpolant.axes))
    copy = pickle.loads(pickle.dumps(interpolant))
    assert copy == interpolant
    assert hash(copy) == hash(interpolant)


@pytest.mark.parametrize("make", [smooth_curve, straight_curve])
@pytest.mark.parametrize("data", [HEAD, PEAK, TWO_POINTS, STEEP, END_TURNS])
def test_each_run_is_read_backwards(
    make: Callable[..., Interpolant], data: tuple[list[float], list[float]]
) -> None:
    f = make(ONE, *data)
    directions = np.sign(np.diff(data[1]))
    assert len(f.inverses) == 1 + np.count_nonzero(np.diff(directions))
    found = np.zeros(501, dtype=bool)
    for inverse in f.inverses:
        for i, a in enumerate(dense(data[0]).tolist()):
            target = f.function(a)
            try:
                back = inverse.function(target)
            except ValueError:
                continue
            assert abs(f.function(back) - target) <= 4e-15 * max(map(abs, data[1]))
            # Where the curve is level, many arguments have the same rounded value.
            slope = abs(f.partials[0].function(a))
            found[i] |= abs(back - a) * slope <= 1e-14 * max(map(abs, data[1])) or abs(back - a) < 1e-6
    assert found.all()


def test_a_level_curve_has_no_inverse_and_one_by_steps_neither() -> None:
    assert smooth_curve(ONE, *LEVEL).inverses == ()
    assert stepped_curve(ONE, *HEAD).inverses == ()
    b = TapeBuilder()
    x, y = b.quantity(0, (0, 1)), b.quantity(1, (0, 1))
    for f in (smooth_curve(ONE, *LEVEL), stepped_curve(ONE, *HEAD)):
        assert isolate(b.tape((y, b.apply("curve", x, f))), 0) is None


def test_isolation_offers_both_sides_of_a_peak() -> None:
    b = TapeBuilder()
    x, y = b.quantity(0, (0, 1)), b.quantity(1, (0, 1))
    isolation = isolate(b.tape((y, b.apply("curve", x, smooth_curve(ONE, *PEAK)))), 0)
    assert isolation is not None
    for target, holds in ((55.0, [True, True]), (5.0, [True, False]), (70.0, [False, False])):
        assert [
            evaluate(c.condition, (math.nan, target), ())[c.condition.outputs[0]] is True
            for c in isolation.candidates
            if c.condition is not None
        ] == holds
    left, right = (evaluate(c.tape, (math.nan, 55.0), ())[c.tape.outputs[0]] for c in isolation.candidates)
    assert left < 20.0 < right


def exact(piece: Sequence[float], s: object) -> object:
    return sum(mpmath.mpf(c) * s**k for k, c in enumerate(piece))


@pytest.mark.parametrize("data", DATA)
def test_error_bound_of_a_curve_holds(data: tuple[list[float], list[float]]) -> None:
    f = smooth_curve(ONE, *data)
    tape, random = read(f), np.random.default_rng(8)
    with mpmath.workdps(50):
        for a in random.uniform(data[0][0], data[0][-1], 300).tolist():
            error = 1e-13 * abs(a)
            evidence = evaluate_with_evidence(tape, (a,), (), (error,))
            i = int(np.searchsorted(data[0], a, "right")) - 1
            if not data[0][i] < a - error < a + error < data[0][i + 1]:
                continue
            for part in (-1, 0, 1):
                true = exact(f.pieces[i], mpmath.mpf(a) + part * mpmath.mpf(error) - mpmath.mpf(data[0][i]))
                assert abs(true - evidence.values[-1]) <= evidence.errors[-1] * (1 + 1e-5)


@pytest.mark.parametrize("data", [HEAD, PEAK])
def test_error_bound_of_an_inverse_holds(data: tuple[list[float], list[float]]) -> None:
    f = smooth_curve(ONE, *data)
    random = np.random.default_rng(9)
    judged = 0
    for inverse in f.inverses:
        tape = read(inverse)
        (axis,) = inverse.axes
        for t in random.uniform(axis[0], axis[-1], 100).tolist():
            evidence = evaluate_with_evidence(tape, (t,), ())
            x = evidence.values[-1]
            i = int(np.searchsorted(data[0], x, "right")) - 1
            left, error = data[0][i], evidence.errors[-1]
            if not (left < x - error and x + error < data[0][i + 1] and error < 1e-9):
                continue
            with mpmath.workdps(50):
                ends = [exact(f.pieces[i], mpmath.mpf(x) + s * mpmath.mpf(error) - left) - t for s in (-1, 1)]
            judged += 1
            assert ends[0] * ends[1] <= 0
    assert judged > 50
