"""Kepler's equation against Meeus, Astronomical Algorithms, 2nd edition, chapter 30."""

from __future__ import annotations

from collections.abc import Callable
from math import degrees, radians, sin

import pytest

import eqsheet

Solve = Callable[[str], eqsheet.Solution]

# Eccentricity, mean anomaly and the eccentric anomaly printed (example 30.a and the table of chapter 30),
# degrees.
TABLE = [
    (0.1, 5, 5.554589),
    (0.2, 5, 6.246908),
    (0.3, 5, 7.134960),
    (0.5, 5, 9.950063),
    (0.7, 5, 16.167990),
    (0.9, 5, 33.344447),
    (0.99, 5, 45.361023),
    (0.99, 1, 24.725822),
    (0.99, 33, 89.722155),
]


@pytest.mark.parametrize(("eccentricity", "mean_anomaly", "eccentric_anomaly"), TABLE)
def test_eccentric_anomaly(
    solved: Solve, eccentricity: float, mean_anomaly: float, eccentric_anomaly: float
) -> None:
    solution = solved(
        f"""
        show E in deg
        kepler: M = E - e*sin(E)
        e = {eccentricity}
        M = {mean_anomaly} deg
        E near M within 0 deg .. 180 deg
        """
    )
    anomaly = solution["E"].si
    assert solution["E"].value == pytest.approx(eccentric_anomaly, abs=1e-6)
    assert degrees(anomaly - eccentricity * sin(anomaly)) == pytest.approx(mean_anomaly, rel=1e-11)


def test_eccentricity_from_both_anomalies(solved: Solve) -> None:
    """Solved for the eccentricity, it occurs once and needs neither guess nor bounds."""
    solution = solved("M = 5 deg\nE = 16.167990 deg\nM = E - e*sin(E)")
    assert solution["e"].value == pytest.approx(0.7, abs=1e-7)
    assert solution["e"].value == pytest.approx(radians(11.167990) / sin(radians(16.167990)), rel=1e-12)
