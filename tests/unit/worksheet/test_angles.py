"""Unknowns that only waves are taken of are started at a small angle, not at a radian."""

from __future__ import annotations

import math

import pytest
from solving import solve, values

import eqsheet
from eqsheet.worksheet.angles import angles


def angles_of(text: str) -> set[str]:
    prepared = eqsheet.parse(text).prepare()
    return {prepared.system.names[q] for q in angles(prepared.formulas)}


def test_what_occurs_under_waves_alone_is_an_angle() -> None:
    assert angles_of("P = V*W*sin(a - b)\nQ = V*cos(a) + tan(b/2)") == {"a", "b"}


def test_what_occurs_elsewhere_too_is_none() -> None:
    """Once in the same equation, once in another; and a number under an exponential under a sine is one of the angle."""
    assert angles_of("y = x*sin(x)\nz = cos(y)") == set()
    assert angles_of("y = sin(u)\nw = 2*u") == set()
    assert angles_of("y = sin(exp(t))") == {"t"}


@pytest.mark.parametrize("guess", ["", "V near 1\n"])
def test_a_feeder_is_solved_on_its_upper_branch_without_a_word_on_angles(guess: str) -> None:
    """A load of 0.6 + 0.2j behind 0.02 + 0.1j, all per unit (invented).

    Second calculation: with S = P + jQ the square of the voltage is the larger root of
    u^2 + (2 (P r + Q x) - 1) u + (P^2 + Q^2)(r^2 + x^2) = 0.
    """
    r, x, p, q = 0.02, 0.1, 0.6, 0.2
    y = 1 / complex(r, x)
    text = (
        f"V^2*{y.real!r} - V*({y.real!r}*cos(a - b) - {y.imag!r}*sin(b - a)) = {-p!r}\n"
        f"V*({y.imag!r}*cos(a - b) - {y.real!r}*sin(a - b)) - V^2*{y.imag!r} = {-q!r}\n"
        f"b = 0 deg\n{guess}"
    )
    half = 0.5 * (1 - 2 * (p * r + q * x))
    upper = half + math.sqrt(half * half - (p * p + q * q) * (r * r + x * x))
    assert values(solve(text))["V"] == pytest.approx(math.sqrt(upper), rel=1e-12)
