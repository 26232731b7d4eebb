"""The constants of nature, through worksheets, against CODATA as scipy carries it and as it is printed."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from scipy import constants

import eqsheet

Solve = Callable[[str], eqsheet.Solution]


def test_gas_constant_is_the_product_of_two_others(solved: Solve) -> None:
    """CODATA 2018, exact: R = 8.31446261815324 J/(mol K), N_A = 6.02214076e23 1/mol, k = 1.380649e-23 J/K."""
    solution = solved("x = const.N_A*const.k_B\ny = const.R\nz = x/y\nshow y in J/(mol*K), x in J/(mol*K)")
    assert solution["z"].value == pytest.approx(1.0, rel=1e-15)
    assert solution["y"].value == pytest.approx(8.31446261815324, rel=1e-15)
    assert solution["x"].value == pytest.approx(6.02214076e23 * 1.380649e-23, rel=1e-15)


def test_radiation_constants_from_planck_s_law(solved: Solve) -> None:
    """CODATA 2018: sigma = 5.670374419e-8 W/(m^2 K^4); Wien's displacement constant b = 2.897771955e-3 m K.

    Wien's constant needs the root of x = 5 (1 - exp(-x)) other than zero.
    """
    solution = solved(
        """
        sigma = 2*pi^5*const.k_B^4/(15*const.h^3*const.c^2)
        peak: x = 5*(1 - exp(-x))
        x near 5 within 1 .. 10
        b*const.k_B*x = const.h*const.c
        same = sigma/const.sigma
        show sigma in W/(m^2*K^4), b in mm*K
        """
    )
    assert solution["sigma"].value == pytest.approx(5.670374419e-8, rel=1e-10)
    assert solution["same"].value == pytest.approx(1.0, rel=1e-12)
    assert solution["b"].value == pytest.approx(2.897771955, rel=3e-10)
    assert solution["b"].si == pytest.approx(constants.Wien, rel=1e-12)


def test_radiation_balance_of_the_earth(solved: Solve) -> None:
    """Solar constant 1361 W/m^2, albedo 0.306: 254.0 K (NASA fact sheet of the Earth, from memory)."""
    solution = solved(
        """
        S = 1361 W/m^2
        A = 0.306
        S*(1 - A)/4 = const.sigma*T^4
        T within 0 K ..
        show T in K
        """
    )
    expected = (1361 * 0.694 / 4 / constants.sigma) ** 0.25
    assert solution["T"].value == pytest.approx(254.0, abs=0.05)
    assert solution["T"].value == pytest.approx(expected, rel=1e-13)
