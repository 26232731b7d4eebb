"""Functions that `math` does not have."""

from __future__ import annotations

import math

import mpmath
import numpy as np
import pytest
from scipy import special

from eqsheet.model.array_functions import ARRAY_FUNCTIONS
from eqsheet.model.functions import (
    BINARY,
    UNARY,
    digamma,
    larger,
    logmean,
    logmean_slope,
    sign,
    smaller,
    trigamma,
)

NEAR = [1.0, 1.0 + 1e-15, 1.0 - 1e-12, 1.0 + 1e-6, 1.01, 0.7, 2.9, 3.1, 20.0, 1e-8]


@pytest.mark.parametrize("ratio", NEAR)
@pytest.mark.parametrize("a", [1.0, 345.6, -2.5])
def test_logmean_and_its_slope_keep_their_digits_up_to_equality(a: float, ratio: float) -> None:
    b = a * ratio
    with mpmath.workdps(60):
        x, y = mpmath.mpf(a), mpmath.mpf(b)
        mean = (x - y) / mpmath.log(x / y) if a != b else x
        log = mpmath.log(x / y)
        slope = (log - 1 + y / x) / log**2 if a != b else mpmath.mpf(1) / 2
    assert logmean(a, b) == pytest.approx(float(mean), rel=4e-15)
    assert logmean_slope(a, b) == pytest.approx(float(slope), rel=4e-15)
    with np.errstate(all="ignore"):
        means = ARRAY_FUNCTIONS["logmean"](np.array([a]), np.array([b]))
        slopes = ARRAY_FUNCTIONS["logmean_slope"](a, b)
    assert means[0] == pytest.approx(float(mean), rel=4e-15)
    assert slopes == pytest.approx(float(slope), rel=4e-15)


def test_logmean_ends() -> None:
    assert logmean(3.0, 0.0) == logmean(0.0, 3.0) == 0.0
    assert logmean_slope(3.0, 0.0) == 0.0
    with pytest.raises(ValueError, match="math domain error"):
        logmean(3.0, -1.0)


@pytest.mark.parametrize(
    "a", [0.1, 0.5, 1.0, 1.4616321449683623, 3.3, 9.99, 10.0, 170.5, 1e6, -0.5, -3.7, -20.25]
)
def test_digamma_against_the_library(a: float) -> None:
    assert digamma(a) == pytest.approx(special.digamma(a), rel=1e-13, abs=1e-14)
    assert trigamma(a) == pytest.approx(float(mpmath.psi(1, a)), rel=1e-13)


def test_digamma_has_poles() -> None:
    with pytest.raises(ValueError, match="pole"):
        digamma(-2.0)


def test_nan_is_not_hidden() -> None:
    assert math.isnan(sign(math.nan))
    for function in (smaller, larger):
        assert math.isnan(function(math.nan, 1.0))
        assert math.isnan(function(1.0, math.nan))
    assert (sign(-0.0), sign(-3.0), sign(2.0)) == (0.0, -1.0, 1.0)


@pytest.mark.parametrize("name", UNARY)
def test_arrays_give_what_floats_give(name: str) -> None:
    points = np.array([-2.5, -1.0, -0.3, 0.0, 0.4, 1.0, 1.7, 30.0])
    with np.errstate(all="ignore"):
        got = np.broadcast_to(ARRAY_FUNCTIONS[name](points), points.shape)
    for point, value in zip(points, got):
        try:
            expected = UNARY[name].value(float(point))
        except (ValueError, ZeroDivisionError, OverflowError):
            assert not math.isfinite(value)
        else:
            assert value == pytest.approx(expected, rel=1e-13, abs=1e-15)


@pytest.mark.parametrize("name", BINARY)
def test_arrays_of_two_arguments_give_what_floats_give(name: str) -> None:
    points = [
        (a, b) for a in (-1.5, 0.3, 2.0) for b in (-0.7, 0.3, 4.0) if name[:7] != "logmean" or a * b > 0
    ]
    first, second = np.array(points).T
    with np.errstate(all="ignore"):
        got = ARRAY_FUNCTIONS[name](first, second)
    assert got == pytest.approx([BINARY[name](a, b) for a, b in points], rel=1e-14)


@pytest.mark.parametrize("name", UNARY)
def test_slopes_used_for_evidence(name: str) -> None:
    point = 1.3 if name == "acosh" else 0.4
    function = {"ln": mpmath.log, "abs": abs, "log10": lambda a: mpmath.log(a) / mpmath.log(10)}.get(name)
    exact = mpmath.diff(function or getattr(mpmath, name), point)
    assert UNARY[name].slope(point, UNARY[name].value(point)) == pytest.approx(float(exact), rel=1e-12)
