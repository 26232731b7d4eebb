"""Numbers in the text are decimals rounded to floats, and knowns set to expressions are worked out with rounding."""

from __future__ import annotations

import mpmath
import pytest
from solving import solve

TRUE = mpmath.mp.clone()
TRUE.dps = 50


@pytest.mark.parametrize(
    "text, name, true",
    [
        ("1 - exp(-N) = 0.9999999999999", "N", -TRUE.log(1 - TRUE.mpf("0.9999999999999"))),
        ("e = 0.9999999999999\n1 - exp(-N) = e", "N", -TRUE.log(1 - TRUE.mpf("0.9999999999999"))),
        ("cos(w) = 0.999999999999", "w", TRUE.acos(TRUE.mpf("0.999999999999"))),
        ("exp(-x) + 1 = 1.000000000001", "x", -TRUE.log(TRUE.mpf("1e-12"))),
        ("y = 1 - tanh(17)", "y", 1 - TRUE.tanh(17)),
        ("y = 1 - cos(1e-7)", "y", 1 - TRUE.cos(TRUE.mpf("1e-7"))),
        ("k = tan(pi/2 - 1e-9)", "k", TRUE.tan(TRUE.pi / 2 - TRUE.mpf("1e-9"))),
        ("k = tan(pi/2 - 1e-9)\ns = k - 1e9", "s", TRUE.tan(TRUE.pi / 2 - TRUE.mpf("1e-9")) - 10**9),
        ("u = 1 - exp(-1e-12)\nr = u/1e-12", "r", (1 - TRUE.exp(-TRUE.mpf("1e-12"))) / TRUE.mpf("1e-12")),
        ("x + y = 1\nx - y = 1 - 2e-13\nz = y*1e13 + 0*x", "z", TRUE.mpf(1)),
    ],
)
def test_no_digit_is_called_good_that_is_not(text: str, name: str, true: object) -> None:
    solution = solve(text)
    assert solution.solved
    found = solution[name]
    distance = abs(TRUE.mpf(found.si) - true)
    # Of first order.
    assert distance <= found.error * (1 + 1e-3)
    assert found.error <= abs(found.si) * 10.0**-found.digits or found.digits == 0


@pytest.mark.parametrize(
    "text", ["y = 3*x\nx = 0.1", "y = 0.1*x\nx = 3", "y = 25 mm + x\nx = 0.2 m", "y = pi*x\nx = 2"]
)
def test_a_number_costs_no_digits_where_nothing_cancels(text: str) -> None:
    assert solve(text)["y"].digits >= 15
