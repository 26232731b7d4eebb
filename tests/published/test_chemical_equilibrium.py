"""Chemical equilibrium: unknowns that span many decades."""

from __future__ import annotations

from collections.abc import Callable
from math import log10, sqrt

import numpy as np
import pytest

import eqsheet

Solve = Callable[[str], eqsheet.Solution]

PROPANE = """
# Combustion of propane in air, element variables: Meintjes and Morgan, Chemical equilibrium systems as
# numerical test problems, ACM Transactions on Mathematical Software 16 (1990) 143-151.
R = 10
R5 = 0.193
R6 = 0.002597/sqrt(40)
R7 = 0.003448/sqrt(40)
R8 = 0.00001799/40
R9 = 0.0002155/sqrt(40)
R10 = 0.00003846/40
{equations}
{guess}
"""

EQUATIONS = [
    "y1*y2 + y1 = 3*y5",
    "2*y1*y2 + y1 + y2*y3^2 + R8*y2 - R*y5 + 2*R10*y2^2 + R7*y2*y3 + R9*y2*y4 = 0",
    "2*y2*y3^2 + 2*R5*y3^2 - 8*y5 + R6*y3 + R7*y2*y3 = 0",
    "R9*y2*y4 + 2*y4^2 = 4*R*y5",
    "y1*(y2 + 1) + R10*y2^2 + y2*y3^2 + R8*y2 + R5*y3^2 + y4^2 - 1 + R6*y3 + R7*y2*y3 + R9*y2*y4 = 0",
]

# The one solution with positive variables, as printed for this system in the MINPACK-2 test problem
# collection (Averick, Carter, More and Xue, 1992; from memory).
PRINTED = {"y1": 0.003114102, "y2": 34.59792, "y3": 0.06504178, "y4": 0.8593781, "y5": 0.03695186}


@pytest.mark.parametrize("guess", ["y* near 1 within 0 .. 1000", "y* within 0 .. 100\ny2 near 10"])
@pytest.mark.parametrize("order", [[0, 1, 2, 3, 4], [4, 2, 0, 3, 1]], ids=["as published", "shuffled"])
def test_combustion_of_propane(solved: Solve, guess: str, order: list[int]) -> None:
    text = PROPANE.format(equations="\n".join(EQUATIONS[i] for i in order), guess=guess)
    solution = solved(text)
    for name, value in PRINTED.items():
        assert solution[name].value == pytest.approx(value, rel=3e-7), name


def test_propane_residuals_in_floats(solved: Solve) -> None:
    """The solution put into the published equations, written here a second time."""
    solution = solved(PROPANE.format(equations="\n".join(EQUATIONS), guess="y* near 1 within 0 .. 1000"))
    y1, y2, y3, y4, y5 = (solution[f"y{i}"].value for i in range(1, 6))
    root = sqrt(40)
    r6, r7, r8, r9, r10 = 0.002597 / root, 0.003448 / root, 0.00001799 / 40, 0.0002155 / root, 0.00003846 / 40
    residuals = [
        y1 * y2 + y1 - 3 * y5,
        2 * y1 * y2 + y1 + y2 * y3**2 + r8 * y2 - 10 * y5 + 2 * r10 * y2**2 + r7 * y2 * y3 + r9 * y2 * y4,
        2 * y2 * y3**2 + 2 * 0.193 * y3**2 - 8 * y5 + r6 * y3 + r7 * y2 * y3,
        r9 * y2 * y4 + 2 * y4**2 - 40 * y5,
        y1 * y2 + y1 + r10 * y2**2 + y2 * y3**2 + r8 * y2 + 0.193 * y3**2 + y4**2 - 1 + r6 * y3 + r7 * y2 * y3
        + r9 * y2 * y4,
    ]  # fmt: skip
    assert np.max(np.abs(residuals)) < 1e-13


def test_weak_acid(solved: Solve) -> None:
    """Acetic acid, 0.100 mol/L, pKa 4.756 (CRC Handbook): pH 2.88, as general chemistry textbooks print it.

    Second calculation: the cubic in the hydrogen ion, by numpy.
    """
    solution = solved(
        """
        c = 0.100 mol/L
        K_a = 10^-4.756 * c_0
        K_w = 1.0e-14 * c_0^2
        c_0 = 1 mol/L                  # standard concentration
        acid: K_a*c_HA = c_H*c_A
        water: K_w = c_H*c_OH
        matter: c = c_HA + c_A
        charge: c_H = c_A + c_OH
        pH = -log10(c_H/c_0)
        c_* within 0 mol/L .. 60 mol/L
        c_H near 1e-4 mol/L
        show c_OH in mol/L
        """
    )
    k = 10**-4.756
    ions = np.roots([1, k, -(k * 0.1 + 1e-14), -k * 1e-14])
    expected = max(float(root.real) for root in ions)
    assert solution["pH"].value == pytest.approx(2.88, abs=0.005)
    assert solution["pH"].value == pytest.approx(-log10(expected), rel=1e-11)
    assert solution["c_OH"].value == pytest.approx(1e-14 / expected, rel=1e-10)
