"""Open channels against worked examples of the textbooks, quoted from memory."""

from __future__ import annotations

from collections.abc import Callable
from math import sqrt

import pytest
from scipy.optimize import brentq

import eqsheet

Solve = Callable[[str], eqsheet.Solution]


def test_normal_and_critical_depth_of_a_trapezoidal_channel(solved: Solve) -> None:
    """Chow, Open-Channel Hydraulics (1959), examples 4-2 and 6-2: normal 3.36 ft, critical 2.15 ft deep.

    Bottom 20 ft, sides 1:2, slope 0.0016, Manning's n 0.025, discharge 400 ft^3/s. Chow writes 1.49 for
    (1 m/ft)^(1/3) = 1.4859, which moves the normal depth by less than 0.01 ft.
    """
    solution = solved(
        """
        Q = 400 ft^3/s
        b = 20 ft
        z = 2
        S = 0.0016
        n = 0.025 s/m^(1/3)
        define area(y) = (b + z*y)*y
        define wetted(y) = b + 2*y*sqrt(1 + z^2)
        define surface(y) = b + 2*z*y

        manning: Q = area(y_n)*(area(y_n)/wetted(y_n))^(2/3)*sqrt(S)/n
        critical: Q^2*surface(y_c) = const.g_n*area(y_c)^3
        Fr = Q/area(y_n)/sqrt(const.g_n*area(y_n)/surface(y_n))
        y_n near 3 ft within 0 ft ..
        y_c near 1 m within 0 m .. 10 m
        require Fr < 1
        show y_n in ft, y_c in ft
        """
    )
    assert solution["y_n"].to("ft") == pytest.approx(3.36, abs=0.01)
    assert solution["y_c"].to("ft") == pytest.approx(2.15, abs=0.005)
    flow, bottom = 400 * 0.3048**3, 20 * 0.3048

    def manning(y: float) -> float:
        area = (bottom + 2 * y) * y
        return area * (area / (bottom + 2 * y * sqrt(5))) ** (2 / 3) * 0.04 / 0.025 - flow

    def critical(y: float) -> float:
        return flow**2 * (bottom + 4 * y) - 9.80665 * ((bottom + 2 * y) * y) ** 3

    for name, residual in (("y_n", manning), ("y_c", critical)):
        assert solution[name].si == pytest.approx(brentq(residual, 0.1, 5.0, xtol=1e-15), rel=1e-11)


def test_hydraulic_jump_from_the_momentum_balance(solved: Solve) -> None:
    """White, Fluid Mechanics, example 10.7: 10 m^3/(s m), y1 = 1.25 m gives y2 = 3.46 m, loss 0.625 m.

    The balance is also met without a jump, by y2 = y1; the bounds exclude it. Belanger's closed form checks.
    """
    solution = solved(
        """
        loss = y1 + v1^2/(2*g) - y2 - v2^2/(2*g)
        momentum: y1^2/2 + q*v1/g = y2^2/2 + q*v2/g
        y2 within 1.01*y1 .. 20*y1
        v1 = q/y1
        v2*y2 = q
        q = 10 m^3/(s*m)
        y1 = 125 cm
        g = 9.81 m/s^2
        """
    )
    froude = 8.0 / sqrt(9.81 * 1.25)
    assert solution["y2"].to("m") == pytest.approx(3.46, abs=0.005)
    assert solution["loss"].to("m") == pytest.approx(0.625, abs=0.0005)
    assert solution["y2"].si == pytest.approx(1.25 / 2 * (sqrt(1 + 8 * froude**2) - 1), rel=1e-12)
