"""Starts of chains of equations without a guess: told from one another where that leads near, else typical."""

from __future__ import annotations

import math

import pytest
from solving import solve, values

# Cooling rod between a hot end and still air, in equal pieces; conduction, radiation and convection (data invented).
ROD = """\
N = {pieces}
L = 0.5 m
dx = L/N
k = 20 W/(m*K)
d = 10 mm
T_air = 300 K
for i in 1..N:
    k*pi*d^2/4*(T[i+1] - 2*T[i] + T[i-1])/dx = pi*d*dx*(0.8*const.sigma*(T[i]^4 - T_air^4) + (8 W/(m^2*K))*(T[i] - T_air))
T[0] = 900 K
T[N+1] = T[N]
"""


@pytest.mark.parametrize("pieces", [2, 3, 5, 8, 13, 40])
def test_a_chain_of_fourth_powers_is_not_started_from_what_runs_away(pieces: int) -> None:
    """The temperatures fall from the hot end towards that of the air, which no other root of the powers does."""
    solution = solve(ROD.format(pieces=pieces))
    assert solution.solved
    found = [solution[f"T[{i}]"] for i in range(pieces + 1)]
    temperatures = [value.si for value in found]
    assert temperatures == sorted(temperatures, reverse=True)
    assert temperatures[-1] >= 300.0
    assert min(value.digits for value in found) >= 12


def test_a_chain_that_leads_somewhere_is_followed() -> None:
    """A velocity tells Reynolds number and friction factor, far from what is typical of a number."""
    text = """\
v*A = Q
Re = v*D/nu
1/sqrt(f) = -2*log10(k/(3.7*D) + 2.51/(Re*sqrt(f)))
h = f*L/D*v^2/(2*const.g_n)
A = pi/4*D^2
D = 50 mm
nu = 1e-6 m^2/s
k = 0.05 mm
L = 100 m
h = 8 m
"""
    found = values(solve(text))
    root = math.sqrt(found["f"])
    assert 1 / root == pytest.approx(-2 * math.log10(1e-3 / 3.7 + 2.51 / (found["Re"] * root)), rel=1e-12)
    assert found["h"] == pytest.approx(found["f"] * 2000 * found["v"] ** 2 / (2 * 9.80665), rel=1e-12)
