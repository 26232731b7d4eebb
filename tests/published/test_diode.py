"""A solar cell with series and shunt resistance, against the closed form with the Lambert W function.

Parameters of the R.T.C. France cell at 33 degC: Easwarakhanthan et al., International Journal of Solar
Energy 4 (1986) 1-12 (from memory). Closed form: Jain and Kapoor, Solar Energy Materials and Solar Cells 81
(2004) 269-277.
"""

from __future__ import annotations

from collections.abc import Callable
from math import exp

import pytest
from scipy import constants
from scipy.special import lambertw

import eqsheet

Solve = Callable[[str], eqsheet.Solution]

CELL = """
I = I_ph - I_s*(exp((V + I*R_s)/(n*V_t)) - 1) - (V + I*R_s)*G_p
V_t = const.k_B*T/const.e
n = 1.4837
R_s = 36.4 mOhm
G_p = 18.6 mS
I_ph = 760.8 mA
I_s = 0.3223 µA
T = 33 degC
"""


def current(voltage: float) -> float:
    """Current of the cell at `voltage`, explicit by Lambert's W."""
    r_s, g_p, light, dark = 0.0364, 0.0186, 0.7608, 0.3223e-6
    a = 1.4837 * constants.k * 306.15 / constants.e
    share = 1 + g_p * r_s
    argument = r_s * dark / (a * share) * exp((r_s * (light + dark) + voltage) / (a * share))
    return float((light + dark - voltage * g_p) / share - a / r_s * lambertw(argument).real)


@pytest.mark.parametrize("voltage", [-0.2, 0.0, 0.3, 0.45, 0.55, 0.58])
def test_current_at_a_voltage(solved: Solve, voltage: float) -> None:
    solution = solved(f"V = {voltage} V\n{CELL}\nshow I in mA\nI near 0.5 A")
    assert solution["I"].to("A") == pytest.approx(current(voltage), rel=1e-11)


@pytest.mark.parametrize("voltage", [0.3, 0.45, 0.55])
def test_voltage_at_a_current(solved: Solve, voltage: float) -> None:
    """The same cell the other way round: nothing is rewritten, only the known changes."""
    solution = solved(f"{CELL}\nI = {current(voltage)!r} A\nV near 0.5 V within -1 V .. 1 V")
    assert solution["V"].to("V") == pytest.approx(voltage, rel=1e-10)
