"""What is said of numbers of which few digits are good, and of solutions where two meet."""

from __future__ import annotations

import pytest
from solving import only, solve


def codes(text: str) -> list[str]:
    return [d.code for d in solve(text).diagnostics if d.code in ("few-digits", "double-root")]


@pytest.mark.parametrize(
    "text",
    [
        # The critical depth of a channel, its energy worked out with rounding.
        "q = 2.5 m^2/s\nE = 1.5*(q^2/const.g_n)^(1/3)\nE = y + q^2/(2*const.g_n*y^2)\ny near 1 m",
        # The largest load of a line with one reactance, V1^2/(2 X).
        "0 = 2.5 + V/0.2*sin(d)\n0 = V^2/0.2 - V/0.2*cos(d)\nV near 1\nd near 0",
        "x*y = 1\nx + y = 2\nx near 3",
        "x - sin(x) = 0\nx near 1",
        "Q*abs(Q) = 0*Q\nQ near 1",
    ],
)
def test_a_double_root_is_always_told(text: str) -> None:
    solution = solve(text)
    assert solution.solved
    assert codes(text) == ["double-root"]


@pytest.mark.parametrize("text", ["x^2 - 2*x + 0.9 = 0\nx near 3", "tan(k) = k\nk near 4.4"])
def test_a_single_root_is_not(text: str) -> None:
    assert codes(text) == []


@pytest.mark.parametrize(
    "text, why",
    [
        ("x + y = 2\nx + 1.0000000001*y = 2.0000000001", "depending"),
        ("a = 17\ny = 1 - tanh(a)", "cancel"),
        ("y = 1 - tanh(17)", "cancel"),
        ("t = 1e-6\ny = (exp(t) - 1 - t)/t^2", "cancel"),
    ],
)
def test_the_reason_for_few_digits_is_the_right_one(text: str, why: str) -> None:
    assert why in only(solve(text), "few-digits").message


def test_a_zero_that_only_rounding_has_made_is_told() -> None:
    """(1 - cos t)/t^2 is one half for small t."""
    solution = solve("t = 1e-8\ny = (1 - cos(t))/t^2")
    assert solution["y"].si == 0.0
    assert "zero" in only(solution, "few-digits").message


@pytest.mark.parametrize(
    "text, name",
    [
        ("z = 1 - exp(-1.8*z)", "z"),
        ("a = 0.3 m\nb = 30 cm\ny = a - b", "y"),
        # No flow in the tie of a symmetric loop.
        (
            "p1 = 3 bar\nk = 1e5 Pa*s^2/L^2\np1 - pa = k*Q1*abs(Q1)\np1 - pb = k*Q2*abs(Q2)\n"
            "pa - pb = 2*k*Q3*abs(Q3)\nQ1 = Q3 + 1 L/s\nQ2 + Q3 = 1 L/s",
            "Q3",
        ),
    ],
)
def test_a_plain_zero_is_no_matter(text: str, name: str) -> None:
    solution = solve(text)
    assert solution.solved
    assert solution[name].si == 0.0
    assert codes(text) == []
