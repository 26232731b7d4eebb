"""Chandrupatla's method against scipy's brentq, and the hunt for changes of sign."""

import math

import pytest
from scipy.optimize import brentq
from solve_problems import scalar

from eqsheet.solve.bracketing import bracketing
from eqsheet.solve.chandrupatla import Bracket, chandrupatla
from eqsheet.solve.outcome import Status
from eqsheet.solve.trail import Budget, Trail

FUNCTIONS = [
    ("cubic", lambda x: x**3 - 2 * x - 5, 2.0, 3.0),
    ("cosine", lambda x: math.cos(x) - x, 0.0, 1.0),
    ("flat", lambda x: (x - 1) ** 9, 0.0, 1.7),
    ("steep", lambda x: math.exp(50 * (x - 0.3)) - 1, -1.0, 1.0),
    ("decades", lambda x: math.log10(x) + 7.5, 1e-12, 1e6),
    ("reciprocal", lambda x: 1 / x - 1e-5, 1.0, 1e9),
]


@pytest.mark.parametrize(("f", "a", "b"), [f[1:] for f in FUNCTIONS], ids=[f[0] for f in FUNCTIONS])
def test_agrees_with_brent(f, a, b):
    calls = []

    def counted(x):
        calls.append(x)
        return f(x)

    root, _ = chandrupatla(counted, Bracket(a, f(a), b, f(b))).better
    # The ninth power is zero to rounding over a stretch of 1e-2.
    expected = brentq(f, a, b, xtol=1e-300, rtol=4 * 2.0**-52, maxiter=1000)
    assert root == pytest.approx(expected, rel=2e-2 if f(1.0) == 0.0 else 1e-15)
    assert len(calls) <= 110


def test_equal_signs_are_refused():
    with pytest.raises(ValueError, match="same sign"):
        chandrupatla(lambda x: x, Bracket(1.0, 1.0, 2.0, 2.0))


def hunt(p):
    return bracketing(p, p.start, Trail("bracketing", p.start, Budget()))


def test_the_root_nearest_the_guess_is_taken():
    # tan-free: sin has roots at every multiple of pi.
    for guess, root in ((3.0, math.pi), (6.0, 2 * math.pi), (-0.2, 0.0), (9.0, 3 * math.pi)):
        outcome = hunt(scalar(math.sin, math.cos, guess, -20.0, 20.0, magnitude=1.0))
        assert outcome.x[0] == pytest.approx(root, abs=1e-15)


def test_a_pole_is_told_from_a_root():
    outcome = hunt(scalar(lambda x: 1 / (x - 2), lambda x: -1 / (x - 2) ** 2, 0.5, 0.0, 10.0))
    assert outcome.status is Status.POLE
    assert outcome.x[0] == pytest.approx(2.0, rel=1e-12)


def test_a_root_behind_a_pole_is_found():
    # 1/(x - 2) + 1 is zero at 1 and jumps at 2.
    outcome = hunt(scalar(lambda x: 1 / (x - 2) + 1, lambda x: -1 / (x - 2) ** 2, 3.0, 0.0, 10.0))
    assert outcome.status is Status.CONVERGED
    assert outcome.x[0] == pytest.approx(1.0, rel=1e-15)


def test_a_jump_is_no_root():
    outcome = hunt(scalar(lambda x: -1.0 if x < 0.3 else 1.0, lambda x: 0.0, 0.9, 0.0, 1.0))
    assert outcome.status is Status.POLE
    assert outcome.x[0] == pytest.approx(0.3)


def test_no_sign_change_is_said():
    outcome = hunt(scalar(lambda x: x * x + 1, lambda x: 2 * x, 3.0, -10.0, 10.0))
    assert outcome.status is Status.NO_SIGN_CHANGE


def test_a_root_beside_the_edge_of_the_domain_is_found():
    # sqrt(x - 5) = 1e-4 has its root 1e-8 above the edge of the domain at 5.
    outcome = hunt(
        scalar(lambda x: math.sqrt(x - 5) - 1e-4, lambda x: 0.5 / math.sqrt(x - 5), 9.0, 0.0, 10.0)
    )
    assert outcome.status is Status.CONVERGED
    assert outcome.x[0] - 5 == pytest.approx(1e-8, rel=1e-6)


def test_a_domain_without_the_guess_is_found():
    outcome = hunt(scalar(lambda x: math.log(x - 3) - 1, lambda x: 1 / (x - 3), -50.0))
    assert outcome.x[0] == pytest.approx(3 + math.e, rel=1e-15)


def test_nowhere_defined_is_said():
    assert hunt(scalar(lambda x: math.sqrt(-1 - x * x), lambda x: 1.0, 0.0)).status is Status.DOMAIN


def test_every_sample_is_strictly_inside_the_bounds():
    seen = []
    hunt(scalar(lambda x: x * x + 1, lambda x: 2 * x, 0.3, 0.0, 1.0, seen=seen))
    assert all(0.0 < x < 1.0 for x in seen)
