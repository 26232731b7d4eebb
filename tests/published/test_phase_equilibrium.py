"""Vapour and liquid with published constants."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from scipy.optimize import brentq

import eqsheet

Solve = Callable[[str], eqsheet.Solution]

# Antoine constants of benzene and toluene, mmHg and degC: Lange's Handbook of Chemistry, 12th edition, as
# reprinted in Felder and Rousseau, Elementary Principles of Chemical Processes, table B.4 (from memory).
ANTOINE = """
define p_B(T in degC) in mmHg = 10^(6.90565 - 1211.033/(T + 220.790)) valid 8 degC <= T <= 120 degC
define p_T(T in degC) in mmHg = 10^(6.95334 - 1343.943/(T + 219.377)) valid 6 degC <= T <= 137 degC
"""


def benzene(t: float) -> float:
    """Vapour pressure of benzene in mmHg at `t` in degC."""
    return float(10 ** (6.90565 - 1211.033 / (t + 220.790)))


def toluene(t: float) -> float:
    """Vapour pressure of toluene in mmHg at `t` in degC."""
    return float(10 ** (6.95334 - 1343.943 / (t + 219.377)))


@pytest.mark.parametrize(
    ("name", "boiling_point"), [("p_B", 80.1), ("p_T", 110.6)], ids=["benzene", "toluene"]
)
def test_normal_boiling_point(solved: Solve, name: str, boiling_point: float) -> None:
    """Felder and Rousseau, table B.1: 80.10 degC and 110.62 degC."""
    solution = solved(
        f"{ANTOINE}\n{name}(T) = 1 atm\nT near 90 degC within 8 degC .. 120 degC\nshow T in degC"
    )
    assert solution["T"].value == pytest.approx(boiling_point, abs=0.05)


def test_isothermal_flash(solved: Solve) -> None:
    """Equimolar benzene and toluene at 95 degC and 800 mmHg, Raoult's law; six unknowns.

    Two components make the compositions explicit, x = (p - p_T)/(p_B - p_T), which is the second calculation.
    """
    solution = solved(
        f"""
        {ANTOINE.strip().replace(chr(10), chr(10) + "        ")}
        T = 95 degC
        p = 800 mmHg
        F = 100 mol/s
        z_B = 50 %
        z_T = 1 - z_B
        total: F = V + L
        benzene: z_B*F = y_B*V + x_B*L
        toluene: z_T*F = y_T*V + x_T*L
        y_B*p = x_B*p_B(T)
        y_T*p = x_T*p_T(T)
        sum: x_B + x_T = y_B + y_T
        V near F/2 within 0 mol/s .. F
        x_* near 0.5 within 0 .. 1
        y_* near 0.5 within 0 .. 1
        show V in mol/s, x_B in %, y_B in %
        """
    )
    x = (800 - toluene(95)) / (benzene(95) - toluene(95))
    y = x * benzene(95) / 800
    assert solution["x_B"].si == pytest.approx(x, rel=1e-11)
    assert solution["y_B"].to("%") == pytest.approx(100 * y, rel=1e-11)
    assert solution["V"].value == pytest.approx(100 * (0.5 - x) / (y - x), rel=1e-10)


def test_bubble_and_dew_point(solved: Solve) -> None:
    """40 % benzene, 60 % toluene at 1 atm: bubble point 95.1 degC (Felder and Rousseau, example 6.4-2)."""
    solution = solved(
        f"""
        {ANTOINE.strip().replace(chr(10), chr(10) + "        ")}
        p = 1.01325 bar
        z = 0.4
        bubble: p = z*p_B(T_b) + (1 - z)*p_T(T_b)
        dew: 1/p = z/p_B(T_d) + (1 - z)/p_T(T_d)
        T_b near 90 degC within 80 degC .. 111 degC
        T_d near 375 K within 80 degC .. 111 degC
        show T_b in degC, T_d in degF
        """
    )
    pressure = 101325 / 133.322387415

    bubble = brentq(lambda t: 0.4 * benzene(t) + 0.6 * toluene(t) - pressure, 80, 111, xtol=1e-13)
    dew = brentq(lambda t: 0.4 / benzene(t) + 0.6 / toluene(t) - 1 / pressure, 80, 111, xtol=1e-13)
    assert solution["T_b"].value == pytest.approx(95.1, abs=0.05)
    assert solution["T_b"].value == pytest.approx(bubble, rel=1e-10)
    assert solution["T_d"].value == pytest.approx(1.8 * dew + 32, rel=1e-10)


def test_critical_point_of_a_van_der_waals_gas(solved: Solve) -> None:
    """Carbon dioxide, a = 3.640 L^2 bar/mol^2, b = 0.04267 L/mol (CRC Handbook, from memory).

    At the critical point the isotherm has neither slope nor curvature; V = 3 b, T = 8 a/(27 R b), p = a/(27
    b^2), and the compressibility is 3/8 whatever the gas.
    """
    solution = solved(
        """
        a = 3.640 L^2*bar/mol^2
        b = 0.04267 L/mol
        slope: 0 = -const.R*T/(V - b)^2 + 2*a/V^3
        curvature: 0 = 2*const.R*T/(V - b)^3 - 6*a/V^4
        p = const.R*T/(V - b) - a/V^2
        Z = p*V/(const.R*T)
        V near 5*b within 1.1*b .. 100*b
        T near 250 K within 10 K .. 2000 K
        show T in degC, p in bar, V in mL/mol
        """
    )
    assert solution["Z"].value == pytest.approx(0.375, rel=1e-11)
    assert solution["V"].to("L/mol") == pytest.approx(3 * 0.04267, rel=1e-11)
    assert solution["p"].to("bar") == pytest.approx(3.640 / (27 * 0.04267**2), rel=1e-10)
    assert solution["T"].to("K") == pytest.approx(8 * 3.640 / (27 * 0.0831446261815324 * 0.04267), rel=1e-11)
